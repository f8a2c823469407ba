"""Two-port parameters in closed form: ratios of the coordinates of one plane of solutions."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from typing import TypeAlias

from acsolve.algebra.cofactor import OverBudgetError
from acsolve.algebra.ring import Polynomial, Ring, cancel
from acsolve.analyses.closed_form import ClosedForm, normalised
from acsolve.analyses.port_ask import (
    PortAsk,
    References,
    combination,
    set_asks,
    without_port_sources,
)
from acsolve.analyses.port_laws import Laws, laws_of
from acsolve.analyses.question import no_unique_solution
from acsolve.analyses.transfer import DEFAULT_BUDGET, over_budget
from acsolve.analyses.verify import check_closed_form
from acsolve.circuit.expression import Expression
from acsolve.circuit.netlist import Netlist, Pair, bindings
from acsolve.equations.exact import Expander, Symbols, with_symbols
from acsolve.equations.plane import Plane, free_ports, plane
from acsolve.errors import AnalysisError, Diagnostic
from acsolve.ports.sets import NAMES, SetName

#: Parameters as ((11, 12), (21, 22)).
Matrix: TypeAlias = tuple[tuple[ClosedForm, ClosedForm], tuple[ClosedForm, ClosedForm]]


@dataclass(frozen=True, slots=True, eq=False)
class PortForms:
    """The closed forms of two pairs of a circuit, worked out when they are first asked for.

    Current enters a pair's first node and returns at its second.
    """

    netlist: Netlist
    symbols: Symbols
    first: Pair
    second: Pair
    references: References | None
    plane: Plane
    laws: Laws
    _found: dict[SetName, Matrix | None] = field(default_factory=dict, repr=False)

    def matrix(self, name: SetName) -> Matrix | None:
        """The parameters of a set, None where the set does not exist.

        Each is exact, without common factors, and checked against a dense solution of the
        circuit with its own ends.

        Raises
        ------
        AnalysisError
            [ports.reference] s parameters without a reference resistance.
        """
        if name not in self._found:
            self._found[name] = self._worked_out(name)
        return self._found[name]

    def _worked_out(self, name: SetName) -> Matrix | None:
        if name == "s" and self.references is None:
            raise no_reference()
        asks = set_asks(self.first, self.second, name, self.references)
        rows = [[self.form(ask) for ask in row] for row in asks]
        found = [(one, two) for one, two in rows if one is not None and two is not None]
        return (found[0], found[1]) if len(found) == len(rows) else None

    def form(self, ask: PortAsk) -> ClosedForm | None:
        """The closed form of a question about the two ports, None where it is infinite."""
        return form_of(self.netlist, self.symbols, self.plane, ask)


def form_of(netlist: Netlist, symbols: Symbols, found: Plane, ask: PortAsk) -> ClosedForm | None:
    """A ratio of two coordinates as a checked closed form; None where it is infinite."""
    ring = found.basis.ring
    (top, under), (bottom, above) = (
        found.combined(part, ask.held) for part in (ask.observes, ask.drives)
    )
    if ring.reduced(bottom) == 0:
        return None
    lean = cancel(top * above, bottom * under)
    reduced = _rationalised(ring, ring.reduced(lean[0]), ring.reduced(lean[1]))
    form = normalised(ask, found.basis, *reduced, bindings(netlist))
    checked = check_closed_form(with_symbols(netlist, symbols), form, size=found.size)
    return replace(form, checked=checked)


def _rationalised(ring: Ring, top: Polynomial, bottom: Polynomial) -> tuple[Polynomial, Polynomial]:
    """Both without a root of a number that divides the denominator."""
    for index, _ in ring.squares:
        root = ring.generator(index)
        if bottom.degrees()[index] and bottom % root == 0:
            top, bottom = cancel(ring.reduced(top * root), ring.reduced(bottom * root))
    return top, bottom


def plane_of(
    netlist: Netlist,
    symbols: Symbols,
    source: Pair | None,
    target: Pair,
    *,
    factors: Sequence[Expression] = (),
    budget: int | None = DEFAULT_BUDGET,
) -> Plane:
    """The plane of solutions of a circuit with two free ports.

    Raises
    ------
    EquationError
        [equations.singular], [equations.budget], [equations.not-rational] a part that is
        known only by measured numbers.
    """
    free = free_ports(with_symbols(netlist, symbols), source, target)
    try:
        found = plane(free, Expander(bindings(netlist), symbols), factors=factors, budget=budget)
    except OverBudgetError:
        raise over_budget("more", budget or 0) from None
    if found.empty:
        raise no_unique_solution()
    return found


def port_forms(
    netlist: Netlist,
    first: Pair,
    second: Pair,
    *,
    references: References | None = None,
    symbols: Symbols | None = None,
    budget: int | None = DEFAULT_BUDGET,
) -> PortForms:
    """Two-port parameters in closed form.

    Parameters
    ----------
    netlist : the circuit; its sources are set to zero, those across a port left out.
    first, second : the two pairs.
    references : reference resistances in ohm of the s parameters.
    symbols : which values stay symbols.
    budget : the most terms that may be held at once.

    Raises
    ------
    AnalysisError
        [question.same-node] a pair is one node, or both pairs are one.
    EquationError
        as `plane_of`.
    """
    check_pairs(first, second)
    chosen = symbols or Symbols()
    cleared = without_port_sources(netlist, first, second)
    factors = [
        factor
        for name in (("a1", "a2") if references else ())
        for _, factor in combination(name, references)
    ]
    found = plane_of(cleared, chosen, first, second, factors=factors, budget=budget)
    laws = laws_of(with_symbols(cleared, chosen), found)
    return PortForms(cleared, chosen, first, second, references, found, laws)


def check_pairs(first: Pair, second: Pair) -> None:
    """Refuse pairs that are no two ports."""
    for pair in (first, second):
        if pair[0] == pair[1]:
            raise _same(f"the pair ({pair[0]}, {pair[1]}) is one node", "Name two nodes.")
    if set(first) == set(second):
        raise _same(
            f"both ports are the pair ({first[0]}, {first[1]})",
            "Name another pair, or ask its impedance.",
        )


def _same(message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code="question.same-node", message=message, hint=hint))


def no_reference() -> AnalysisError:
    """The error for s parameters without a reference resistance."""
    return AnalysisError(
        Diagnostic(
            code="ports.reference",
            message="s parameters need a reference resistance",
            hint="State it: --reference 50ohm, or `reference 50 ohm` in the ask line.",
        )
    )


def sets_of(references: References | None) -> tuple[SetName, ...]:
    """The sets that can be asked for."""
    return NAMES if references is not None else tuple(name for name in NAMES if name != "s")
