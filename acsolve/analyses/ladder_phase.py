"""How often the phase of a ladder has turned, at any single frequency and without tracking.

Where parts of R, L and C with positive values join the nodes as a tree, ground apart, the
voltage ratio from a node to another below it is a product over the links on the way,

    V(child)/V(parent) = y/(y + d),

with the link's admittance y and the admittance d from the child to ground, which looks down
the tree. Both y and y + d are positive real functions (O. Brune, J. Math. Phys. 10, 1931): their
phase never leaves ±90°, so no principal value of it ever jumps, and the sum of all of them is
the continuous phase, however many turns that makes. Zeros and poles on the axis turn it
as the limit of lossy parts does, which is the convention of `acsolve.analyses.phase`.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence
from dataclasses import dataclass
from math import isfinite
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.question import Ask
from acsolve.circuit.expression import ONE, ZERO, Expression, add, negate
from acsolve.circuit.netlist import Netlist, Part
from acsolve.equations.evaluate import Evaluator, polynomial_in_s
from acsolve.equations.numeric import float_values
from acsolve.equations.stamp import STAMPS
from acsolve.equations.system import acting

Array = NDArray[Any]
Ratio = tuple[tuple[float, ...], tuple[float, ...]]  # numerator, denominator by rising power

_POSITIVE_REAL = {"resistor", "inductor", "capacitor", "crystal"}
_LEFT = 1e-6  # |real|/size of a sum beyond which round-off, not the network, made it negative
_ASIDE = (-1e-9, 1e-9, -1e-6, 1e-6)  # relative steps from where a sum vanishes or is infinite
_GROUND = "gnd"


@dataclass(frozen=True, slots=True, eq=False)
class Ladder:
    """A tree of positive real admittances, its nodes numbered from the driven one outwards.

    `parent`, `links` (to the parent) and `shunts` (to ground) by node, the way from the
    observed node up in `way`; `negative` where the observed pair is the other way round,
    `relaxing` where there is no inductance, so that every pole and zero is real.
    """

    parent: tuple[int, ...]
    links: tuple[tuple[Ratio, ...], ...]
    shunts: tuple[tuple[Ratio, ...], ...]
    way: frozenset[int]
    negative: bool
    relaxing: bool

    def phase(self, hertz: Array) -> Array:
        """Continuous phase in radians at frequencies above 0 Hz, good to a small angle.

        Not a number where none is found, beside the frequency either.
        """
        phase = self._sum(hertz)
        for aside in _ASIDE:
            missing = np.flatnonzero(~np.isfinite(phase))
            if not len(missing):
                break
            phase[missing] = self._sum(hertz[missing] * (1 + aside))
        return phase + np.pi * self.negative

    def _sum(self, hertz: Array) -> Array:
        read = _Admittances(2j * np.pi * hertz)
        down: dict[int, Array] = {}
        total = np.zeros(len(hertz))
        with np.errstate(all="ignore"):  # infinite or 0/0 on top of a resonance: not a number
            for node in range(len(self.parent) - 1, 0, -1):
                looking = read(self.shunts[node]) + down.pop(node, 0)
                link = read(self.links[node])
                both = link + looking
                if node in self.way:
                    total += read.angle(self.links[node]) - np.angle(both)
                    total[~(both.real > -_LEFT * np.abs(both))] = np.nan
                up = self.parent[node]
                down[up] = down.get(up, 0) + link * (looking / both)
        return total


class _Admittances:
    """Sums of admittances at s; equal ones are worked out once."""

    def __init__(self, s: Array) -> None:
        self.s = s
        self.known: dict[tuple[Ratio, ...], Array] = {}
        self.angles: dict[tuple[Ratio, ...], Array] = {}

    def __call__(self, ratios: tuple[Ratio, ...]) -> Array:
        found = self.known.get(ratios)
        if found is None:
            found = np.zeros(len(self.s), dtype=complex)
            for top, bottom in ratios:
                found = found + np.polyval(top[::-1], self.s) / np.polyval(bottom[::-1], self.s)
            if len(self.known) < _KEPT:
                self.known[ratios] = found
        return found

    def angle(self, ratios: tuple[Ratio, ...]) -> Array:
        found = self.angles.get(ratios)
        if found is None:
            found = np.angle(self(ratios))
            if len(self.angles) < _KEPT:
                self.angles[ratios] = found
        return found


_KEPT = 64  # admittances kept: a ladder of equal sections has a handful


def ladder_of(netlist: Netlist, ask: Ask) -> Ladder | None:
    """The network as a ladder, None where it is none or the question is another."""
    if ask.quantity != "voltage-ratio" or ask.ammeter is not None or netlist.couplings:
        return None
    if ask.source is None:
        return None
    parts = list(acting(netlist, ask.source))
    if not all(part.kind in _POSITIVE_REAL for part in parts):
        return None
    driven, observed = _over_ground(ask.source), _over_ground(ask.target)
    joints = _joints(parts, float_values(netlist))
    if driven is None or observed is None or joints is None:
        return None
    relaxing = all(
        part.kind in ("resistor", "capacitor") and "series_inductance" not in part.values
        for part in parts
    )
    return _rooted(joints, driven, observed, relaxing=relaxing)


def _over_ground(pair: tuple[str, str]) -> tuple[str, bool] | None:
    """The node of a pair that is not ground, and whether it stands second."""
    if _GROUND not in pair:
        return None
    return (pair[0], False) if pair[1] == _GROUND else (pair[1], True)


def _joints(
    parts: Sequence[Part], evaluate: Evaluator
) -> dict[str, dict[str, tuple[Ratio, ...]]] | None:
    """Node -> neighbour -> admittances between; None where one is not positive real."""
    joints: dict[str, dict[str, tuple[Ratio, ...]]] = defaultdict(dict)
    known: dict[tuple[str, float], tuple[Ratio, ...] | None] = {}
    for part in parts:
        first, second = part.nodes
        if first == second:
            continue
        if len(part.values) == 1 and "value" in part.values:
            key = part.kind, evaluate.name(part.value_name("value"))
            if key not in known:
                known[key] = _admittance(part, evaluate)
            ratios = known[key]
        else:
            ratios = _admittance(part, evaluate)
        if ratios is None:
            return None
        together = (*joints[first].get(second, ()), *ratios)
        joints[first][second] = joints[second][first] = together
    return joints


def _rooted(
    joints: dict[str, dict[str, tuple[Ratio, ...]]],
    driven: tuple[str, bool],
    observed: tuple[str, bool],
    *,
    relaxing: bool,
) -> Ladder | None:
    """The tree seen from the driven node, breadth first; None where nodes form a loop."""
    order, place, parent = [driven[0]], {driven[0]: 0}, [0]
    for node in order:  # grows while it is read
        for other in joints.get(node, ()):
            if other == _GROUND or order[parent[place[node]]] == other:
                continue
            if other in place:
                return None
            place[other] = len(order)
            order.append(other)
            parent.append(place[node])
    if observed[0] not in place or observed[0] == driven[0]:
        return None
    way, at = set(), place[observed[0]]
    while at:
        way.add(at)
        at = parent[at]
    return Ladder(
        parent=tuple(parent),
        links=tuple(
            joints[node][order[up]] if node != driven[0] else ()
            for node, up in zip(order, parent, strict=True)
        ),
        shunts=tuple(joints.get(node, {}).get(_GROUND, ()) for node in order),
        way=frozenset(way),
        negative=driven[1] != observed[1],
        relaxing=relaxing,
    )


def _admittance(part: Part, evaluate: Evaluator) -> tuple[Ratio, ...] | None:
    """What a part's stamp puts between its nodes, as ratios of polynomials in s.

    None where a coefficient is negative or nothing divides, so that it is not positive real.
    """
    note = _Note(part)
    STAMPS[part.kind](note, part)
    found: list[Ratio] = []
    for top, bottom in ((note.admittance, ONE), (note.bottom, note.top)):
        ratio = tuple(_coefficients(item, evaluate) for item in (top, bottom))
        if any(min(side, default=0.0) < 0 for side in ratio) or not any(ratio[1]):
            return None
        if any(ratio[0]):
            found.append((ratio[0], ratio[1]))
    return tuple(found) or None


def _coefficients(expression: Expression, evaluate: Evaluator) -> tuple[float, ...]:
    """Coefficients of a polynomial in s by rising power; a negative one where it is none."""
    try:
        found = polynomial_in_s(expression, evaluate)
    except (ZeroDivisionError, OverflowError):
        found = None
    if found is None or not all(isfinite(abs(item)) and not complex(item).imag for item in found):
        return (-1.0,)
    return tuple(float(complex(item).real) for item in found)


@dataclass(slots=True)
class _Note:
    """What a stamp of a part with two terminals says: an admittance, and one in series."""

    part: Part
    admittance: Expression = ZERO
    top: Expression = ONE  # of the series impedance top/bottom
    bottom: Expression = ZERO

    def conduct(self, node: str, other: str, factor: Expression) -> None:
        if node == other == self.part.nodes[0]:
            self.admittance = add(self.admittance, factor)

    def admit(self, pair: tuple[str, ...], admittance: Expression) -> None:
        del pair
        self.admittance = add(self.admittance, admittance)

    def voltage(self, law: int, node: str, factor: Expression) -> None:
        del law
        if node == self.part.nodes[0]:
            self.bottom = factor

    def current(self, law: int, branch: int, factor: Expression) -> None:
        del law, branch
        self.top = negate(factor)

    def leave(self, node: str, branch: int, factor: Expression = ONE) -> None:
        """Both balances hold the branch current; that is what being in series means."""

    def branch(self, part: Part, suffix: str = "") -> int:
        del part, suffix
        return 0

    def law(self, part: Part, meaning: str) -> int:
        del part, meaning
        return 0

    def wants_branch(self, part: Part) -> bool:
        del part
        return False

    def is_drive(self, part: Part) -> bool:
        raise AssertionError(f"{part.name} is no source")

    def unity(self, law: int, factor: Expression) -> None:
        del law, factor
        raise AssertionError(f"{self.part.name} is no source")

    def inject(self, node: str, factor: Expression) -> None:
        del node, factor
        raise AssertionError(f"{self.part.name} is no source")
