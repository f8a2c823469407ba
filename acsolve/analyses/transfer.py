"""Closed forms of transfers and driving-point impedances, each checked before it is returned."""

from __future__ import annotations

from dataclasses import dataclass, replace

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm, normalised
from acsolve.analyses.poles import PolesZeros, poles_zeros
from acsolve.analyses.question import Ask, refuse_unreferenced
from acsolve.analyses.shape import Limit, StandardForm, limits, standard_form
from acsolve.analyses.verify import check_closed_form
from acsolve.circuit.netlist import Netlist, bindings
from acsolve.equations.exact import Basis, Expander, Symbols, apply, exact_system
from acsolve.errors import Diagnostic, EquationError


@dataclass(frozen=True, slots=True, eq=False)
class Ratio:
    """Observed over driven, before common factors are removed; `driven` holds hidden modes."""

    basis: Basis
    observed: Polynomial
    driven: Polynomial


def ratio(netlist: Netlist, ask: Ask, symbols: Symbols) -> Ratio:
    """Numerator and denominator of an answer as cofactor sums.

    Raises
    ------
    EquationError
        [equations.singular] the network has no unique solution; [equations.undriven] the
        drive cannot act (an ideal source held by the network, say).
    """
    system = ask.system(netlist)
    refuse_unreferenced(system, ask)
    observed, driven = ask.observed(system), ask.driven(system)
    exact = exact_system(system, Expander(bindings(netlist), symbols))
    directions = exact.directions(frozenset(observed) | frozenset(driven))
    ring = exact.basis.ring
    top, bottom = (apply(part, directions, ring) for part in (observed, driven))
    if bottom == 0:
        raise _no_answer(ask, singular=top == 0)
    return Ratio(exact.basis, top, bottom)


def closed_form(netlist: Netlist, ask: Ask, symbols: Symbols | None = None) -> ClosedForm:
    """The exact closed form that answers a question, checked by an independent solution.

    Parameters
    ----------
    netlist : the circuit.
    ask : the question.
    symbols : which values stay symbols; by default only those without a value.

    Raises
    ------
    EquationError
        as `ratio`; [equations.check-failed] if the check disagrees (a defect of ours).

    Notes
    -----
    Cramer's rule with shared minors over integer polynomials (`acsolve.algebra.cofactor`).
    """
    chosen = symbols or Symbols()
    found = ratio(netlist, ask, chosen)
    form = normalised(ask, found.basis, found.observed, found.driven, bindings(netlist))
    return replace(form, checked=check_closed_form(netlist, form))


def _no_answer(ask: Ask, *, singular: bool) -> EquationError:
    if ask.quantity == "impedance" and not singular:
        return EquationError(
            Diagnostic(
                code="equations.undriven",
                message="no current can enter the pair: its impedance is infinite",
                hint="Ask the impedance of a pair that a part connects.",
            )
        )
    if singular:
        return EquationError(
            Diagnostic(
                code="equations.singular",
                message="the network has no unique solution for this question",
                hint="Run `acsolve check`: a part may float, or ideal sources or op-amps "
                "may contradict each other.",
            )
        )
    kind = "voltage" if ask.quantity in ("voltage-ratio", "transadmittance") else "current"
    return EquationError(
        Diagnostic(
            code="equations.undriven",
            message=f"an ideal {kind} cannot drive this pair: the network itself "
            f"holds its {kind} at zero, or the answer is infinite at every frequency",
            hint="Drive another pair, or ask for another quantity.",
        )
    )


@dataclass(frozen=True, slots=True, eq=False)
class TransferAnswer:
    """A checked closed form with what a reader asks of it next."""

    form: ClosedForm
    at_zero: Limit
    at_infinity: Limit
    standard_form: StandardForm | None
    roots: PolesZeros | None

    @property
    def order(self) -> int | None:
        """The degree of the denominator in s, or of the numerator where that is larger."""
        if not self.form.rational:
            return None
        top, bottom = self.form.coefficients()
        return max(len(top), len(bottom)) - 1


def transfer_answer(form: ClosedForm) -> TransferAnswer:
    """Limits, standard form, poles and zeros of a closed form."""
    at_zero, at_infinity = limits(form)
    return TransferAnswer(form, at_zero, at_infinity, standard_form(form), poles_zeros(form))
