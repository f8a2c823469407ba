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
from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from functools import partial
from math import isfinite
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.ladder_row import Passed, Row
from acsolve.analyses.question import Ask
from acsolve.circuit.cascade import CASCADE, condensed
from acsolve.circuit.expression import ONE, ZERO, Expression, add, negate
from acsolve.circuit.netlist import Netlist, Pair, Part
from acsolve.equations.chain import Chain, copies
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
    observed node up in `way`; a node in `rows` has a row of equal copies in place of its link,
    and `written_out` makes the same ladder without rows; `negative` where the observed pair is
    the other way round, `relaxing` where there is no inductance, so that every pole and zero is
    real.
    """

    parent: tuple[int, ...]
    links: tuple[tuple[Ratio, ...], ...]
    shunts: tuple[tuple[Ratio, ...], ...]
    rows: Mapping[int, Row]
    way: frozenset[int]
    negative: bool
    relaxing: bool
    written_out: Callable[[], Ladder | None] | None = None

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
        phase += np.pi * self.negative
        missing = np.flatnonzero(~np.isfinite(phase))
        if len(missing) and self.written_out is not None and (other := self.written_out()):
            phase[missing] = other.phase(hertz[missing])
        return phase

    def _sum(self, hertz: Array) -> Array:
        return self.passed(2j * np.pi * hertz).turn

    def passed(self, s: Array, load: Array | None = None) -> Passed:
        """Its turn and the admittance into the driven node, with a load at the observed one."""
        read = _Admittances(s)
        down: dict[int, Array] = {}
        if load is not None:
            down[max(self.way)] = load
        total = np.zeros(len(s))
        with np.errstate(all="ignore"):  # infinite or 0/0 on top of a resonance: not a number
            for node in range(len(self.parent) - 1, 0, -1):
                looking = read(self.shunts[node]) + down.pop(node, 0)
                row = self.rows.get(node)
                turn, into = row.passed(s, looking) if row else read.link(self.links[node], looking)
                if node in self.way:
                    total += turn
                up = self.parent[node]
                down[up] = down.get(up, 0) + into
            return Passed(total, read(self.shunts[0]) + down.pop(0, 0))


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

    def link(self, ratios: tuple[Ratio, ...], looking: Array) -> Passed:
        """The turn from one end of a link to the other, under an admittance; and both in series."""
        link = self(ratios)
        both = link + looking
        turn = self.angle(ratios) - np.angle(both)
        turn[~(both.real > -_LEFT * np.abs(both))] = np.nan
        return Passed(turn, link * (looking / both))

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
    driven, observed = _over_ground(ask.source), _over_ground(ask.target)
    if driven is None or observed is None:
        return None
    short = condensed(netlist, {*ask.source, *ask.target})
    written_out = partial(_ladder, netlist, ask.source, driven, observed)
    if short is not netlist:
        found = _ladder(short, ask.source, driven, observed)
        if found is not None:
            return replace(found, written_out=written_out)
    return written_out()


def _ladder(
    netlist: Netlist, drive: Pair, driven: tuple[str, bool], observed: tuple[str, bool]
) -> Ladder | None:
    acting_parts = list(acting(netlist, drive))
    parts = [part for part in acting_parts if part.kind != CASCADE]
    inside = [part for section in netlist.sections.values() for part in section.parts]
    if not all(part.kind in _POSITIVE_REAL for part in (*parts, *inside)):
        return None
    joints = _joints(parts, float_values(netlist))
    if joints is None:
        return None
    tree = _tree(
        joints, driven[0], _row_ends(part for part in acting_parts if part.kind == CASCADE)
    )
    if tree is None or observed[0] not in tree.place or observed[0] == driven[0]:
        return None
    rows = {node: _row(netlist, name, turned=turned) for node, (name, turned) in tree.rows.items()}
    known = {node: row for node, row in rows.items() if row is not None}
    if len(known) < len(rows):
        return None
    relaxing = all(
        part.kind in ("resistor", "capacitor") and "series_inductance" not in part.values
        for part in (*parts, *inside)
    )
    return _rooted(
        tree, joints, known, observed[0], negative=driven[1] != observed[1], relaxing=relaxing
    )


def _row(netlist: Netlist, name: str, *, turned: bool) -> Row | None:
    """A row of copies; None where a copy is no ladder from end to end."""
    copy = copies(netlist)[name]
    near, far = (copy.far, copy.near) if turned else (copy.near, copy.far)
    one = _ladder(copy.netlist, (near, _GROUND), (near, False), (far, False))
    if one is None:
        return None
    return Row(one.passed, Chain(copy).beside_one, copy.count, turned)


def _over_ground(pair: tuple[str, str]) -> tuple[str, bool] | None:
    """The node of a pair that is not ground, and whether it stands second."""
    if _GROUND not in pair:
        return None
    return (pair[0], False) if pair[1] == _GROUND else (pair[1], True)


Joints = dict[str, dict[str, tuple[Ratio, ...]]]


def _joints(parts: Sequence[Part], evaluate: Evaluator) -> Joints | None:
    """Node -> neighbour -> admittances between; None where one is not positive real."""
    joints: Joints = defaultdict(dict)
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


class _Tree(NamedTuple):
    """Nodes in the order of a breadth-first walk, their parents, and the rows on the way."""

    place: dict[str, int]
    parent: list[int]
    rows: dict[int, tuple[str, bool]]  # child -> name of the row, and whether it is turned round


Rows = dict[str, dict[str, tuple[str, bool]]]


def _row_ends(parts: Iterable[Part]) -> Rows | None:
    """Node -> node at the other end of a row -> its name, and whether it is seen from its far end.

    None where two rows lie side by side.
    """
    found: Rows = defaultdict(dict)
    for part in parts:
        near, far = part.nodes[:2]
        if far in found[near]:
            return None
        found[near][far], found[far][near] = (part.name, False), (part.name, True)
    return found


def _tree(joints: Joints, driven: str, rows: Rows | None) -> _Tree | None:
    """The tree seen from the driven node, breadth first; None where nodes form a loop."""
    if rows is None:
        return None
    order, place, parent = [driven], {driven: 0}, [0]
    found: dict[int, tuple[str, bool]] = {}
    for node in order:  # grows while it is read
        beside, along = joints.get(node, {}), rows.get(node, {})
        if beside.keys() & along.keys():
            return None
        for other in (*beside, *along):
            if other == _GROUND or order[parent[place[node]]] == other:
                continue
            if other in place:
                return None
            place[other] = len(order)
            if other in along:
                found[place[other]] = along[other]
            order.append(other)
            parent.append(place[node])
    return _Tree(place, parent, found)


def _rooted(
    tree: _Tree,
    joints: Joints,
    rows: Mapping[int, Row],
    observed: str,
    *,
    negative: bool,
    relaxing: bool,
) -> Ladder:
    way, at = set(), tree.place[observed]
    while at:
        way.add(at)
        at = tree.parent[at]
    order = list(tree.place)
    return Ladder(
        parent=tuple(tree.parent),
        links=tuple(
            joints[node].get(order[up], ()) if up != at else ()
            for at, (node, up) in enumerate(zip(order, tree.parent, strict=True))
        ),
        shunts=tuple(joints.get(node, {}).get(_GROUND, ()) for node in order),
        rows=rows,
        way=frozenset(way),
        negative=negative,
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
