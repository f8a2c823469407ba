"""Closed forms of transfers and driving-point impedances, each checked before it is returned."""

from __future__ import annotations

from dataclasses import dataclass, replace
from decimal import Decimal

from acsolve.algebra.cofactor import OverBudgetError
from acsolve.algebra.ring import Polynomial, cancel
from acsolve.analyses.closed_form import ClosedForm, Origin, normalised
from acsolve.analyses.hidden import is_passive
from acsolve.analyses.nested import NestedForm, nested_form
from acsolve.analyses.poles import PolesZeros, poles_zeros
from acsolve.analyses.question import Ask, no_unique_solution, refuse_unreferenced
from acsolve.analyses.shape import Limit, StandardForm, limits, standard_form
from acsolve.analyses.verify import check_closed_form
from acsolve.circuit.netlist import Netlist, bindings
from acsolve.equations.exact import (
    Basis,
    ExactSystem,
    Expander,
    Symbols,
    apply,
    exact_system,
    with_symbols,
)
from acsolve.equations.system import Functional
from acsolve.errors import Diagnostic, EquationError
from acsolve.shown import Shown


@dataclass(frozen=True, slots=True, eq=False)
class Ratio:
    """Observed over driven, before common factors are removed; `driven` holds hidden modes.

    `lean` is the same ratio without the factors that can be seen only while square roots
    stand as they are: none but those, `removed`, are. `size` is the number of unknowns.
    """

    basis: Basis
    observed: Polynomial
    driven: Polynomial
    lean: tuple[Polynomial, Polynomial]
    removed: Polynomial
    size: int


DEFAULT_BUDGET = 4_000_000  # terms at once: about 1 GB and a few seconds (measured)


def ratio(
    netlist: Netlist, ask: Ask, symbols: Symbols, *, budget: int | None = DEFAULT_BUDGET
) -> Ratio:
    """Numerator and denominator of an answer as cofactor sums.

    Raises
    ------
    EquationError
        [equations.singular] the network has no unique solution; [equations.undriven] the
        drive cannot act (an ideal source held by the network, say); [equations.budget]
        the expansion would hold more terms at once than `budget`.
    """
    system = ask.system(with_symbols(netlist, symbols))
    refuse_unreferenced(system, ask)
    observed, driven = ask.observed(system), ask.driven(system)
    exact = exact_system(system, Expander(bindings(netlist), symbols))
    _refuse_early(netlist, ask, exact, (observed, driven), budget)
    try:
        directions = exact.directions(frozenset(observed) | frozenset(driven), budget=budget)
    except OverBudgetError:
        raise over_budget("more", budget or 0) from None
    ring = exact.basis.ring
    top, bottom = (apply(part, directions, ring) for part in (observed, driven))
    whole = ring.reduced(top), ring.reduced(bottom)
    if whole[1] == 0:
        raise _no_answer(ask, singular=whole[0] == 0)
    if not ring.squares:
        return Ratio(exact.basis, *whole, whole, ring.constant(1), exact.columns)
    lean = cancel(top, bottom)  # of (s + r)(s - r) = s² - 2, with r the root of 2, only now
    reduced = ring.reduced(lean[0]), ring.reduced(lean[1])
    return Ratio(exact.basis, *whole, reduced, bottom / lean[1], exact.columns)


def closed_form(
    netlist: Netlist,
    ask: Ask,
    symbols: Symbols | None = None,
    *,
    budget: int | None = DEFAULT_BUDGET,
) -> ClosedForm:
    """The exact closed form that answers a question, checked by an independent solution.

    Parameters
    ----------
    netlist : the circuit.
    ask : the question.
    symbols : which values stay symbols; by default only those without a value.
    budget : the most terms that may be held at once; above it `nested_form` answers.

    Raises
    ------
    EquationError
        as `ratio`; [equations.check-failed] if the check disagrees (a defect of ours).

    Notes
    -----
    Cramer's rule with shared minors over integer polynomials (`acsolve.algebra.cofactor`).
    """
    chosen = symbols or Symbols()
    found = ratio(netlist, ask, chosen, budget=budget)
    form = normalised(ask, found.basis, *found.lean, bindings(netlist))
    checked = check_closed_form(with_symbols(netlist, chosen), form, size=found.size)
    origin = None
    if form.basis is found.basis:
        origin = Origin(found.driven, found.removed, found.lean[1], is_passive(netlist))
    return replace(form, checked=checked, origin=origin)


_LARGEST_IMAGE = 300  # unknowns up to which an image of the determinant costs little
_SMALLEST_IMAGE = 24  # below it multiplying out costs no more than the image


def _refuse_early(
    netlist: Netlist,
    ask: Ask,
    exact: ExactSystem,
    parts: tuple[Functional, Functional],
    budget: int | None,
) -> None:
    """Refuse what has no answer, or too large a one, before any polynomial is multiplied."""
    observed, driven = parts
    if not _SMALLEST_IMAGE < exact.columns <= _LARGEST_IMAGE or not exact.basis.free_names:
        return
    if exact.vanishes(driven):
        raise _no_answer(ask, singular=exact.vanishes(observed))
    if budget is not None and _each_its_own_symbol(netlist, exact):
        count = exact.coefficient_sum(driven) + exact.coefficient_sum(observed)
        if count > budget:
            raise over_budget(_roughly(count), budget)


_PASSIVE = frozenset(
    {"resistor", "inductor", "capacitor", "ammeter", "voltage_source", "current_source"}
)


def _each_its_own_symbol(netlist: Netlist, exact: ExactSystem) -> bool:
    """Whether the terms of the answer can be counted: plain parts, each its own symbol."""
    if netlist.couplings or any(part.kind not in _PASSIVE for part in netlist.parts):
        return False
    valued = [part for part in netlist.parts if "value" in part.values]
    free = set(exact.basis.free_names)
    return all(len(part.values) == 1 and part.name in free for part in valued)


def _roughly(count: int) -> str:
    """A number of terms as words; of one beyond reading its size: `about 4 * 10^12`."""
    if count < 10**9:
        return f"{count:,}"
    mantissa, exponent = f"{Decimal(count):.0e}".lower().split("e")
    return f"about {mantissa} * 10^{int(exponent)}"


def over_budget(size: str, budget: int) -> EquationError:
    """The error for an answer of so many terms."""
    return EquationError(
        Diagnostic(
            code="equations.budget",
            message=f"multiplied out, the answer has {size} terms, over the budget of {budget:,}",
            hint="Ask for the nested form (--nested), keep fewer symbols (--keep), or raise "
            "the budget (--budget).",
        )
    )


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
        return no_unique_solution()
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
class TransferAnswer(Shown):
    """A checked closed form with what a reader asks of it next."""

    form: ClosedForm | NestedForm
    at_zero: Limit
    at_infinity: Limit
    standard_form: StandardForm | None
    roots: PolesZeros | None

    @property
    def order(self) -> int | None:
        """The degree of the denominator in s, or of the numerator where that is larger."""
        if not isinstance(self.form, ClosedForm) or not self.form.rational:
            return None
        top, bottom = self.form.coefficients()
        return max(len(top), len(bottom)) - 1


def transfer_answer(form: ClosedForm | NestedForm) -> TransferAnswer:
    """Limits, standard form, poles and zeros of a closed form (none of a nested one)."""
    if isinstance(form, NestedForm):
        return TransferAnswer(form, None, None, None, None)
    at_zero, at_infinity = limits(form)
    return TransferAnswer(form, at_zero, at_infinity, standard_form(form), poles_zeros(form))


def form_within(
    netlist: Netlist, ask: Ask, symbols: Symbols, *, budget: int | None, as_nested: bool
) -> ClosedForm | NestedForm:
    """The expanded form where it fits the budget, else, or where asked for, the nested one."""
    if not as_nested:
        try:
            return closed_form(netlist, ask, symbols, budget=budget)
        except EquationError as error:
            if error.code != "equations.budget":
                raise
    return nested_form(netlist, ask, symbols)
