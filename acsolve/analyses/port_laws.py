"""What holds of a two-port as a whole: reciprocity, symmetry, losslessness, passivity."""

from __future__ import annotations

from dataclasses import dataclass
from random import Random
from typing import Any

from acsolve.algebra.ring import Polynomial
from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import Netlist, Part
from acsolve.equations.plane import I1, I2, V1, V2, Plane

_POSITIVE = frozenset({"resistor", "inductor", "capacitor", "crystal"})
_EVEN = frozenset({"transformer", "gyrator", "line", "ammeter", "voltage_source", "current_source"})


@dataclass(frozen=True, slots=True)
class Laws:
    """Laws of a two-port; None where neither side is proven.

    reciprocal : z12 = z21 and what follows, exactly.
    symmetric : exchanging the ports changes nothing: also z11 = z22.
    lossless : at real frequencies what enters one port leaves at the other, exactly.
    passive : it delivers no more than it takes in, by the kinds and values of its parts.
    """

    reciprocal: bool
    symmetric: bool
    lossless: bool | None
    passive: bool | None


def laws_of(netlist: Netlist, plane: Plane) -> Laws:
    """The laws that hold of a plane of solutions, decided on exact polynomials."""
    reduced = plane.basis.ring.reduced
    reciprocal = bool(reduced(plane.pair(V1, I1) + plane.pair(V2, I2)) == 0)
    even = bool(reduced(plane.pair(V1, I2) + plane.pair(V2, I1)) == 0)
    lossless = _lossless(plane)
    if lossless is None and all(_keeps_energy(part) for part in netlist.parts):
        lossless = True
    return Laws(reciprocal, reciprocal and even, lossless, True if _passive(netlist) else None)


def _lossless(plane: Plane) -> bool | None:
    """Whether V1·I1* + I1·V1* + V2·I2* + I2·V2* is zero for all solutions.

    The conjugate of a solution at s = jω is one at -s, so that is an identity of polynomials.
    Four solutions that span the plane are those with one port quantity held at zero. None
    where other functions of s than whole powers occur.
    """
    if not plane.basis.rational_in_s:
        return None
    names = (V1, I1, V2, I2)
    if _takes_power_somewhere(plane):
        return False
    here = [{name: plane.pair(name, held) for name in names} for held in names]
    there = [{name: _mirrored(plane, item) for name, item in one.items()} for one in here]
    return all(plane.basis.ring.reduced(_power(one, two)) == 0 for one in here for two in there)


def _takes_power_somewhere(plane: Plane) -> bool:
    """Whether one random point shows that the network is not lossless, before multiplying.

    The 16 products are then numbers: one that is not zero is a proof. Roots of numbers have no
    whole numbers for them, so nothing is tried there.
    """
    ring, place = plane.basis.ring, plane.basis.s_index
    if ring.squares:
        return False
    random = Random(20)  # noqa: S311 - the same point on every run, no secret
    point = [random.randrange(2, 1 << 20) for _ in ring.names] or [1]
    turned = [-value if at == place else value for at, value in enumerate(point)]
    names = (V1, I1, V2, I2)
    here, there = (
        [{name: int(plane.pair(name, held)(*at)) for name in names} for held in names]
        for at in (point, turned)
    )
    return any(_power(one, two) for one in here for two in there)


def _power(one: dict[str, Any], two: dict[str, Any]) -> Any:
    return one[V1] * two[I1] + one[I1] * two[V1] + one[V2] * two[I2] + one[I2] * two[V2]


def _mirrored(plane: Plane, polynomial: Polynomial) -> Polynomial:
    """The polynomial at -s."""
    place = plane.basis.s_index
    if place is None:
        return polynomial
    ring = plane.basis.ring
    s = ring.generator(place)
    parts = ring.by_power(polynomial, place)
    return sum((part * (-s) ** power for power, part in parts.items()), ring.constant(0))


def _keeps_energy(part: Part) -> bool:
    """Whether a part is lossless by its kind and attributes alone."""
    if part.kind in ("inductor", "capacitor"):
        return set(part.values) <= {"value", "series_inductance"}
    if part.kind == "line":
        return set(part.values) <= {"z0", "delay"}
    return part.kind in _EVEN


def _passive(netlist: Netlist) -> bool:
    """Whether every part is passive: of such a kind, no value negative, couplings numbers.

    Couplings that are numbers were found possible when they were read.
    """
    coupled = (item.coefficient.expression for item in netlist.couplings)
    return all(isinstance(item, Number) for item in coupled) and all(
        part.kind in _EVEN - {"line"}
        or (part.kind in _POSITIVE | {"line"} and not _may_be_negative(part))
        for part in netlist.parts
    )


def _may_be_negative(part: Part) -> bool:
    """Whether a value is negative, or an expression whose sign is not plain to see."""
    return any(
        value.expression is not None
        and not (isinstance(value.expression, Number) and value.expression.value >= 0)
        for value in part.values.values()
    )
