"""Questions about two ports: what is driven, what is held at zero, what is observed."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TypeAlias

from acsolve.analyses.question import Ask
from acsolve.circuit import unit
from acsolve.circuit.expression import (
    MINUS_ONE,
    ONE,
    Expression,
    Number,
    call,
    divide,
    multiply,
    negate,
)
from acsolve.circuit.netlist import Netlist, Pair, Part, with_absent
from acsolve.circuit.unit import Dimension
from acsolve.equations.plane import (
    I1,
    I2,
    V1,
    V2,
    Combination,
    ended,
    free_ports,
    port_quantities,
    whole,
)
from acsolve.equations.system import Functional, System, always
from acsolve.ports.sets import SETS, SetName

#: Reference resistance of each port.
References: TypeAlias = tuple[Expression, Expression]

_DRIVEN = "what is driven"


def _observed_name(place: int) -> str:
    return f"observed quantity {place + 1}"


@dataclass(frozen=True, slots=True, kw_only=True)
class PortAsk(Ask):
    """observed/driven with `held` at zero; `source` and `target` are the two ports.

    `beside` is observed in the same pass of a sweep. Nothing else drives the ports:
    `without_port_sources` clears them.
    """

    observes: Combination
    drives: Combination
    held: Combination
    beside: tuple[Combination, ...] = ()
    unit: Dimension = unit.NONE

    @property
    def dimension(self) -> Dimension:
        """Dimension of the answer."""
        return self.unit

    @property
    def observes_current(self) -> bool:
        """Whether a current is observed: no pair needs a common reference, both are driven."""
        return True

    @property
    def short(self) -> Pair | None:
        """No short of its own: the port's law takes its place."""
        return None

    def system(self, netlist: Netlist, *, branch_for: Callable[[Part], bool] = always) -> System:
        """The equations for this question."""
        free = free_ports(netlist, self.source, self.target, branch_for)
        rows = [(_observed_name(place), item) for place, item in enumerate(self._rows())]
        named = {
            name: item
            for name, item in (*rows, (_DRIVEN, self.drives))
            if whole(free.quantities, item) is None
        }
        return ended(free, self.held, named)

    def observed(self, system: System) -> Functional:
        """What is observed, as a linear function of the unknowns."""
        return self._functional(system, _observed_name(0), self.observes)

    def all_observed(self, system: System) -> list[Functional]:
        """That, and what is observed beside it."""
        return [
            self._functional(system, _observed_name(place), item)
            for place, item in enumerate(self._rows())
        ]

    def _rows(self) -> tuple[Combination, ...]:
        return self.observes, *self.beside

    def driven(self, system: System) -> Functional:
        """What it is divided by, likewise."""
        return self._functional(system, _DRIVEN, self.drives)

    def _functional(self, system: System, name: str, what: Combination) -> Functional:
        own = system.positions.get(f"V({name})")
        if own is not None:
            return {own: 1}
        found = whole(port_quantities(system, self.source, self.target), what)
        assert found is not None, "a combination that is not whole has an unknown of its own"
        return found


def without_port_sources(netlist: Netlist, *pairs: Pair) -> Netlist:
    """The netlist without the sources that stand directly across a port: drives replace them."""
    across = [set(pair) for pair in pairs]
    gone = frozenset(
        part.name
        for part in netlist.parts
        if part.kind in ("voltage_source", "current_source") and set(part.nodes) in across
    )
    return with_absent(netlist, gone)


def combination(name: str, references: References | None) -> Combination:
    """A quantity of `SETS` over the port voltages and currents.

    The waves are those of `acsolve.ports.sets`, all times 2·sqrt(R1): ratios stay as they are.
    """
    plain: dict[str, Combination] = {
        V1: ((V1, ONE),),
        I1: ((I1, ONE),),
        V2: ((V2, ONE),),
        I2: ((I2, ONE),),
        "-I2": ((I2, MINUS_ONE),),
    }
    if name in plain:
        return plain[name]
    assert references is not None, "waves need reference resistances"
    first, second = references
    if name in ("a1", "b1"):
        return (V1, ONE), (I1, first if name == "a1" else negate(first))
    scale = root_of_ratio(first, second)
    current = multiply(scale, second)
    return (V2, scale), (I2, current if name == "a2" else negate(current))


def root_of_ratio(first: Expression, second: Expression) -> Expression:
    """sqrt(first/second), one where they are equal."""
    if first == second:
        return ONE
    ratio = divide(first, second)
    if isinstance(ratio, Number):
        return call("sqrt", ratio)
    return divide(call("sqrt", first), call("sqrt", second))


def _unit(left: str, right: str) -> Dimension:
    voltage, other = (name.lstrip("-").startswith("V") for name in (left, right))
    if left[0] == "b" or voltage == other:
        return unit.NONE
    return unit.OHM if voltage else unit.SIEMENS


def set_asks(
    first: Pair, second: Pair, name: SetName, references: References | None = None
) -> tuple[tuple[PortAsk, PortAsk], tuple[PortAsk, PortAsk]]:
    """The questions whose answers are the parameters of a set, as a 2 x 2 matrix."""
    left, right = SETS[name]

    def ask(row: int, column: int) -> PortAsk:
        return PortAsk(
            source=first,
            target=second,
            quantity="two-port",
            observes=combination(left[row], references),
            drives=combination(right[column], references),
            held=combination(right[1 - column], references),
            unit=_unit(left[row], right[column]),
        )

    return (ask(0, 0), ask(0, 1)), (ask(1, 0), ask(1, 1))
