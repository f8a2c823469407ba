"""The plane of solutions that a network leaves where two things about it are free.

Driven at two ports, the n unknowns of a network obey n-2 homogeneous equations: its solutions
form a plane. Six numbers say all about it, the minors p(f, g) of the equations completed by
two linear functions f and g (the Plücker coordinates of the plane; J. Plücker, 1865), and each
parameter of a two-port is a ratio of two of them. They are found in one pass: a law with an
unknown weight for each port quantity completes the equations,

    w1·f1 + w2·f2 + … = 0,

and on the single direction that is left, f has the value w1·p(f, f1) + w2·p(f, f2) + …
"""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TypeAlias

from acsolve.algebra.ring import Polynomial
from acsolve.circuit.expression import Expression, Name, Number, add, multiply, number
from acsolve.circuit.netlist import Netlist, Pair, Part
from acsolve.equations.exact import Basis, Expander, apply, exact_system, ratio_in
from acsolve.equations.system import (
    DRIVE,
    SHORT,
    Functional,
    Law,
    System,
    Unknown,
    always,
    assemble,
)

#: A linear function of the port quantities: their names with factors.
Combination: TypeAlias = tuple[tuple[str, Expression], ...]

V1, I1, V2, I2, OWN = "V1", "I1", "V2", "I2", "1"


@dataclass(frozen=True, slots=True, eq=False)
class FreePorts:
    """The equations with both ports free, n-2 laws in n unknowns.

    `quantities` are the port quantities as functions of the unknowns: V1 and I1 of the driven
    pair, or `1`, what the file's own sources are multiples of; V2 and I2 of the other pair.
    Currents enter a pair's first node and return at its second.
    """

    system: System
    quantities: Mapping[str, Functional]


def free_ports(
    netlist: Netlist,
    source: Pair | None,
    target: Pair,
    branch_for: Callable[[Part], bool] = always,
) -> FreePorts:
    """The equations of a network that nothing holds at two pairs of nodes.

    Parameters
    ----------
    source : the first pair; None lets the file's own sources act instead.
    target : the second pair.
    branch_for : as for `assemble`.
    """
    closed = assemble(netlist, drive=source, short=target, branch_for=branch_for)
    system = replace(closed, laws=closed.laws[:-1])  # all but the law of the short
    return FreePorts(system, port_quantities(system, source, target))


def port_quantities(system: System, source: Pair | None, target: Pair) -> Mapping[str, Functional]:
    """The port quantities as linear functions of the unknowns."""
    entering = {column: -factor for column, factor in system.current(SHORT).items()}
    found: dict[str, Functional] = {V2: system.voltage(target), I2: entering}
    if source is None:
        return {OWN: system.excitation(), **found}
    return {V1: system.voltage(source), I1: system.current(DRIVE), **found}


def ended(free: FreePorts, held: Combination, named: Mapping[str, Combination]) -> System:
    """The equations with one combination held at zero, others as unknowns of their own.

    Parameters
    ----------
    held : what is zero: I2 of an open end, V2 of a shorted one.
    named : name of the new unknown -> what it is.
    """
    quantities = free.quantities
    laws = [*free.system.laws, Law("what is held at the ports", _entries(quantities, held))]
    unknowns, positions = list(free.system.unknowns), dict(free.system.positions)
    for name, combination in named.items():
        item = Unknown("voltage", name)
        column = positions[str(item)] = len(unknowns)
        unknowns.append(item)
        laws.append(
            Law(f"what {name} is", {**_entries(quantities, combination), column: number(-1)})
        )
    return replace(free.system, unknowns=tuple(unknowns), laws=tuple(laws), positions=positions)


def _entries(
    quantities: Mapping[str, Functional], combination: Combination
) -> dict[int, Expression]:
    found: dict[int, Expression] = {}
    for name, factor in combination:
        for column, sign in quantities[name].items():
            term = multiply(number(sign), factor)
            found[column] = add(found[column], term) if column in found else term
    return found


@dataclass(frozen=True, slots=True, eq=False)
class Plane:
    """The coordinates of the plane of solutions, over one ring.

    `size` is the number of unknowns. Squares of roots are not replaced in the coordinates.
    """

    basis: Basis
    coordinates: Mapping[tuple[str, str], Polynomial]
    expand: Expander
    size: int

    def pair(self, first: str, second: str) -> Polynomial:
        """The coordinate p(first, second); p(second, first) is its negative."""
        if first == second:
            return self.basis.ring.constant(0)
        if (first, second) in self.coordinates:
            return self.coordinates[first, second]
        return -self.coordinates[second, first]

    def combined(self, first: Combination, second: Combination) -> tuple[Polynomial, Polynomial]:
        """p of two linear combinations, as numerator and denominator."""
        total, bottom = self.basis.ring.constant(0), self.basis.ring.constant(1)
        for left, a in first:
            for right, b in second:
                top, below = self.factor(multiply(a, b))
                total, bottom = (
                    total * below + top * self.pair(left, right) * bottom,
                    bottom * below,
                )
        return total, bottom

    def factor(self, expression: Expression) -> tuple[Polynomial, Polynomial]:
        """A factor of a combination as numerator and denominator."""
        return ratio_in(self.basis, self.expand(expression))

    @property
    def empty(self) -> bool:
        """Whether the equations leave more than a plane: the network is singular."""
        ring = self.basis.ring
        return all(ring.reduced(item) == 0 for item in self.coordinates.values())


def plane(
    free: FreePorts,
    expand: Expander,
    *,
    factors: Sequence[Expression] = (),
    budget: int | None = None,
) -> Plane:
    """All coordinates of the plane of solutions, from shared minors.

    Parameters
    ----------
    free : the equations with both ports free.
    expand : names to values, down to symbols.
    factors : expressions that combinations of port quantities will hold.
    budget : the most terms held at once.

    Raises
    ------
    OverBudgetError
        more terms than `budget` would be held at once.
    """
    names = list(free.quantities)
    weights = {name: Name(f"weight of {name}") for name in names}  # no part has such a name
    law: dict[int, Expression] = {}
    for name in names:
        for column, entry in _entries(free.quantities, ((name, weights[name]),)).items():
            law[column] = add(law[column], entry) if column in law else entry
    system = replace(free.system, laws=(*free.system.laws, Law("a law with weights", law)))
    exact = exact_system(system, expand, [expand(item) for item in factors])
    wanted = frozenset(column for item in free.quantities.values() for column in item)
    directions = exact.directions(wanted, budget=budget)
    generators = zip(exact.basis.generators, exact.basis.ring.names, strict=False)
    called = {item.leaf: name for item, name in generators}
    ring, found = exact.basis.ring, {}
    for place, first in enumerate(names):
        value = apply(free.quantities[first], directions, ring)
        for second in names[place + 1 :]:
            alone = {
                called[weight]: int(name == second)  # each term holds one weight
                for name, weight in weights.items()
                if weight in called
            }
            none = weights[second] not in called
            found[first, second] = ring.constant(0) if none else value.subs(alone)
    return Plane(exact.basis, found, expand, exact.columns)


def whole(quantities: Mapping[str, Functional], combination: Combination) -> Functional | None:
    """The combination as whole multiples of the unknowns, or None where it is none."""
    found: dict[int, int] = {}
    for name, factor in combination:
        if not isinstance(factor, Number) or factor.value.denominator != 1:
            return None
        for column, sign in quantities[name].items():
            found[column] = found.get(column, 0) + sign * factor.value.numerator
    return {column: factor for column, factor in found.items() if factor}
