"""The equations of a circuit for one question, assembled once, over no field yet.

The unknowns x (node voltages, branch currents and the drive's own current, n of them)
obey n-1 homogeneous equations B(s)·x = 0, one for each balance and each part's law: the
circuit says everything but how hard it is driven. Its solution is one direction,

    x_j  ~  (-1)^j · det(B without column j),

and every frequency-domain answer is the ratio of two linear functions of it: a voltage
ratio V(to)/V(from), a transimpedance V(to)/I(drive), an impedance V(into)/I(drive), …
So one assembly and one set of shared minors serve all quantities and all observed pairs
(Cramer's rule; G. Cramer, 1750).
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field
from typing import Literal

from acsolve.circuit.expression import (
    MINUS_ONE,
    ONE,
    Expression,
    S,
    add,
    is_zero,
    multiply,
    negate,
)
from acsolve.circuit.graph import (
    DisjointSets,
    Groups,
    is_short,
    natural_key,
    reference_groups,
)
from acsolve.circuit.netlist import Netlist, Pair, Part
from acsolve.equations.stamp import STAMPS, mutual_inductance

DRIVE = "the drive"  # no part can have such a name
SHORT = "the short"

UnknownKind = Literal["voltage", "current", "unity"]
Functional = Mapping[int, int]


@dataclass(frozen=True, slots=True)
class Unknown:
    """One unknown: the voltage of a node, the current of a branch, or the constant 1."""

    kind: UnknownKind
    name: str

    def __str__(self) -> str:
        if self.kind == "unity":
            return "1"
        return f"{'V' if self.kind == 'voltage' else 'I'}({self.name})"


@dataclass(frozen=True, slots=True)
class Law:
    """One equation, sum of entries times unknowns = 0, with what it says in words."""

    meaning: str
    entries: Mapping[int, Expression]


@dataclass(frozen=True, slots=True, eq=False)
class System:
    """B(s)·x = 0 with one equation fewer than unknowns; see the module's text.

    `positions` maps an unknown's text (`V(out)`, `I(L1)`) to its column, `diagonals` the law of
    a node's current balance to the column of its voltage.
    """

    unknowns: tuple[Unknown, ...]
    laws: tuple[Law, ...]
    positions: Mapping[str, int]
    diagonals: Mapping[int, int]
    groups: Groups
    drive: Pair | None

    def voltage(self, pair: Pair) -> Functional:
        """The voltage V(first) - V(second) as factors of the unknowns."""
        factors: dict[int, int] = {}
        for node, sign in zip(pair, (1, -1), strict=True):
            position = self.positions.get(f"V({node})")
            if position is not None:
                factors[position] = factors.get(position, 0) + sign
        return {column: factor for column, factor in factors.items() if factor}

    def current(self, branch: str) -> Functional:
        """The current of a branch (a part's name, `drive` or `short`)."""
        return {self.positions[f"I({branch})"]: 1}

    def excitation(self) -> Functional:
        """The constant 1 that the file's own sources are multiples of."""
        return {self.positions["1"]: 1}


@dataclass(slots=True)
class _Board:
    """The mutable board that stamps write to while a system is assembled."""

    groups: Groups
    branch_for: Callable[[Part], bool]
    own_sources: bool
    unknowns: list[Unknown] = field(default_factory=list)
    positions: dict[str, int] = field(default_factory=dict)
    meanings: list[str] = field(default_factory=list)
    rows: list[dict[int, Expression]] = field(default_factory=list)
    balances: dict[str, int] = field(default_factory=dict)  # node -> its law
    voltages: dict[str, int] = field(default_factory=dict)  # node -> its unknown

    def unknown(self, kind: UnknownKind, name: str) -> int:
        item = Unknown(kind, name)
        self.unknowns.append(item)
        self.positions[str(item)] = len(self.unknowns) - 1
        return len(self.unknowns) - 1

    def equation(self, meaning: str) -> int:
        self.meanings.append(meaning)
        self.rows.append({})
        return len(self.rows) - 1

    def node(self, name: str) -> None:
        if self.groups.reference(name) == name:
            return
        self.voltages[name] = self.unknown("voltage", name)
        self.balances[name] = self.equation(f"current balance at {name}")

    def _put(self, row: int, column: int, factor: Expression) -> None:
        entries = self.rows[row]
        entries[column] = add(entries[column], factor) if column in entries else factor

    def voltage(self, law: int, node: str, factor: Expression) -> None:
        column = self.voltages.get(node)
        if column is not None:
            self._put(law, column, factor)

    def current(self, law: int, branch: int, factor: Expression) -> None:
        self._put(law, branch, factor)

    def leave(self, node: str, branch: int, factor: Expression = ONE) -> None:
        row = self.balances.get(node)
        if row is not None:
            self._put(row, branch, factor)

    def conduct(self, node: str, other: str, factor: Expression) -> None:
        row = self.balances.get(node)
        if row is not None:
            self.voltage(row, other, factor)

    def admit(self, pair: tuple[str, ...], admittance: Expression) -> None:
        here, there = (self.balances.get(node) for node in pair)
        if pair[0] == pair[1]:
            return  # both ends at one potential
        if here is not None:
            self._put(here, self.voltages[pair[0]], admittance)
        if there is not None:
            self._put(there, self.voltages[pair[1]], admittance)
        if here is not None and there is not None:
            minus = negate(admittance)
            self._put(here, self.voltages[pair[1]], minus)
            self._put(there, self.voltages[pair[0]], minus)

    def branch(self, part: Part, suffix: str = "") -> int:
        return self.unknown("current", part.name + suffix)

    def law(self, part: Part, meaning: str) -> int:
        del part
        return self.equation(meaning)

    def wants_branch(self, part: Part) -> bool:
        return self.branch_for(part)

    def is_drive(self, part: Part) -> bool:
        del part
        return self.own_sources

    def unity(self, law: int, factor: Expression) -> None:
        self._put(law, self._one(), factor)

    def inject(self, node: str, factor: Expression) -> None:
        row = self.balances.get(node)
        if row is not None:
            self._put(row, self._one(), factor)

    def _one(self) -> int:
        column = self.positions.get("1")
        return self.unknown("unity", "1") if column is None else column


def always(part: Part) -> bool:
    """Give every resistor a branch current: the impedance form, for closed forms."""
    del part
    return True


def assemble(
    netlist: Netlist,
    *,
    drive: Pair | None,
    short: Pair | None = None,
    branch_for: Callable[[Part], bool] = always,
) -> System:
    """The equations of a circuit driven at one pair, or by its own sources.

    Parameters
    ----------
    netlist : the circuit; parts may stand in any order, the equations do not depend on it.
    drive : the pair where the ideal source of the question stands (current enters its
        first node). None lets the file's own sources act instead.
    short : a pair across which a short is laid, to observe its current.
    branch_for : which resistors take a branch current; the others are admittances, for
        which their value must not be zero.
    """
    joined = [pair for pair in (drive, short) if pair is not None]
    groups = reference_groups(netlist, joined=joined, apart=idle_sources(netlist, drive))
    board = _Board(groups=groups, branch_for=branch_for, own_sources=drive is None)
    parts = sorted(acting(netlist, drive), key=lambda part: natural_key(part.name))
    parts = without_idle_loops(netlist, parts, own_sources=drive is None)
    for node in sorted(_nodes(parts, joined), key=natural_key):
        board.node(node)
    for part in parts:
        STAMPS[part.kind](board, part)
    _couple(board, netlist)
    if drive is not None:
        _leave(board, board.unknown("current", DRIVE), (drive[1], drive[0]))
    if short is not None:
        _leave(board, board.unknown("current", SHORT), short)
        law = board.equation("no voltage across the short")
        board.voltage(law, short[0], ONE)
        board.voltage(law, short[1], MINUS_ONE)
    if drive is None and "1" not in board.positions:
        board.unknown("unity", "1")
    return _finish(board, drive)


def acting(netlist: Netlist, drive: Pair | None) -> Iterable[Part]:
    """The parts that act: a source directly across the driven pair is replaced by the drive."""
    for part in netlist.parts:
        source = part.kind in ("voltage_source", "current_source")
        if not (source and drive is not None and set(part.nodes) == set(drive)):
            yield part


def without_idle_loops(netlist: Netlist, parts: list[Part], *, own_sources: bool) -> list[Part]:
    """The parts without shorts that lie in parallel with other shorts.

    Two links of zero ohm beside each other share their current in a way that nothing
    determines, and that no voltage depends on: one of them is enough. Ammeters are kept
    in preference to shorts that nobody asks.
    """
    shorts = [part for part in parts if _is_zero_volt(netlist, part, own_sources)]
    if len(shorts) < 2 and not any(part.nodes[0] == part.nodes[1] for part in shorts):
        return parts
    sets = DisjointSets(node for part in shorts for node in part.nodes)
    idle = {
        part.name
        for part in sorted(shorts, key=lambda part: part.kind != "ammeter")
        if not sets.join(*part.nodes)
    }
    return [part for part in parts if part.name not in idle]


def _is_zero_volt(netlist: Netlist, part: Part, own_sources: bool) -> bool:
    if part.kind == "voltage_source":
        return not own_sources
    if part.kind == "inductor" and any(
        part.name in (item.first, item.second) for item in netlist.couplings
    ):
        return False
    return part.kind == "ammeter" or is_short(netlist, part)


def idle_sources(netlist: Netlist, drive: Pair | None) -> frozenset[str]:
    """Sources that join nothing in this question: zeroed current sources, replaced sources."""
    if drive is None:
        return frozenset()
    return frozenset(
        part.name
        for part in netlist.parts
        if part.kind == "current_source"
        or (part.kind == "voltage_source" and set(part.nodes) == set(drive))
    )


def _nodes(parts: Iterable[Part], joined: Iterable[Pair]) -> set[str]:
    found = {node for part in parts for node in part.nodes}
    return found.union(*joined)


def _leave(board: _Board, column: int, pair: Pair) -> None:
    board.leave(pair[0], column)
    board.leave(pair[1], column, MINUS_ONE)


def _couple(board: _Board, netlist: Netlist) -> None:
    """Add -s·M times the other coil's current to the law of each coupled coil."""
    if not netlist.couplings:
        return
    laws = {meaning: row for row, meaning in enumerate(board.meanings)}
    for coupling in netlist.couplings:
        reactance = negate(multiply(S, mutual_inductance(coupling)))
        for here, there in (
            (coupling.first, coupling.second),
            (coupling.second, coupling.first),
        ):
            board.current(laws[f"law of {here}"], board.positions[f"I({there})"], reactance)


def _finish(board: _Board, drive: Pair | None) -> System:
    laws = tuple(
        Law(meaning, {column: entry for column, entry in row.items() if not is_zero(entry)})
        for meaning, row in zip(board.meanings, board.rows, strict=True)
    )
    return System(
        unknowns=tuple(board.unknowns),
        laws=laws,
        positions=board.positions,
        diagonals={row: board.voltages[node] for node, row in board.balances.items()},
        groups=board.groups,
        drive=drive,
    )
