"""The network as a graph: which nodes share a reference, and the ideal branches.

Two nodes belong to one group where current can flow from one to the other. Voltages
inside a group are defined against each other; voltages between groups are not, so each
group gets a reference node of its own (`gnd` in the group that holds it).
"""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable, Iterator, Mapping
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache
from typing import Literal

from acsolve.circuit.expression import Expression, Name, Number
from acsolve.circuit.netlist import GROUND, Netlist, Pair, Part

_DIGITS = re.compile(r"(\d+)")

#: A sort key in which a whole number inside a name counts as a number.
NaturalKey = tuple[tuple[str | int, ...], str]


@lru_cache(maxsize=1 << 12)  # names come again and again in small circuits
def natural_key(name: str) -> NaturalKey:
    """Sort key of a name: `R2` comes before `R10`, `n[9]` before `n[10]`.

    Texts and numbers alternate, text first, so two keys always compare; the name itself
    decides between `R1` and `R01`.
    """
    stem = name.rstrip("0123456789")
    if len(stem) < len(name) and stem.isalpha():  # as nearly every name in a large network
        return (stem, int(name[len(stem) :]), ""), name
    pieces = _DIGITS.split(name)
    return tuple(int(item) if at % 2 else item for at, item in enumerate(pieces)), name


@dataclass(frozen=True, slots=True)
class Groups:
    """The conductively connected sets of nodes of a network.

    `of` gives the number of each node's group, counted from 0; the group of `gnd` is
    number 0 where there is one, the others follow in order of first appearance.
    `references[k]` is the node of group k whose potential is taken as zero.
    """

    of: Mapping[str, int]
    references: tuple[str, ...]

    def shares_reference(self, first: str, second: str) -> bool:
        """Whether the voltage between two nodes of the network is defined."""
        return self.of[first] == self.of[second]

    def reference(self, node: str) -> str:
        """The node against which the potential of `node` counts."""
        return self.references[self.of[node]]

    def members(self) -> tuple[tuple[str, ...], ...]:
        """The nodes of each group, in order of first appearance."""
        rows: list[list[str]] = [[] for _ in self.references]
        for node, group in self.of.items():
            rows[group].append(node)
        return tuple(tuple(row) for row in rows)


_FIRST_TWO = ((0, 1),)
_OUTPUT = ((2, 3),)
_BOTH = ((0, 1), (2, 3))

#: Kind -> places of the terminals between which current flows. Terminals that only sense
#: (of op-amps, voltage amplifiers, transconductances) join nothing; a line returns the
#: current of each end at that end's own reference.
_CONDUCTING: dict[str, tuple[tuple[int, int], ...]] = {
    "opamp": _OUTPUT,
    "voltage_amplifier": _OUTPUT,
    "transconductance": _OUTPUT,
    "transresistance": _BOTH,
    "current_amplifier": _BOTH,
    "transformer": _BOTH,
    "gyrator": _BOTH,
    "line": ((0, 2), (1, 3)),
    "cascade": ((0, 1), (1, 2)),
    "measured": ((0, 2), (1, 2)),
}

#: Kind -> the attribute at whose zero the part is an open circuit.
_OPEN_AT_ZERO = {"capacitor": "value", "admittance": "value", "constant_phase": "coefficient"}
#: Kind -> attributes that must not be given for a zero value to be a plain short.
_SHORT_AT_ZERO = {
    "resistor": ("series_inductance",),
    "inductor": ("series_resistance", "quality"),
    "impedance": (),
}


def reference_groups(
    netlist: Netlist, *, joined: Iterable[Pair] = (), apart: Collection[str] = ()
) -> Groups:
    """The sets of nodes between which current can flow, with a reference node for each.

    Parameters
    ----------
    netlist
        the circuit.
    joined
        pairs of nodes that are joined besides: a drive, a short across the pair that is observed.
    apart
        names of parts that join nothing: current sources that the question sets to zero.

    Returns
    -------
    Groups
        `gnd` is the reference of its group; elsewhere it is the first node in natural order.

    Notes
    -----
    Parts of value zero that are open circuits (C = 0) join nothing. Union-find with path
    halving, nearly linear in the number of parts.

    """
    sets = DisjointSets(node for part in netlist.parts for node in part.nodes)
    sets.join_all(_current_paths(netlist, apart))
    for first, second in joined:
        sets.add(first, second)
        sets.join(first, second)
    return _numbered(sets)


def _current_paths(netlist: Netlist, apart: Collection[str]) -> Iterator[tuple[str, ...]]:
    """The pairs of nodes between which the parts let current flow."""
    for part in netlist.parts:
        if part.kind not in _CONDUCTING:
            opening = part.kind in _OPEN_AT_ZERO and is_open(netlist, part)
            if not opening and part.name not in apart:
                yield part.nodes
        elif part.name not in apart:
            yield from conducting_pairs(part)


def conducting_pairs(part: Part) -> Iterator[Pair]:
    """The pairs of nodes of a part between which current flows, if it is not open."""
    for here, there in _CONDUCTING.get(part.kind, _FIRST_TWO):
        yield part.nodes[here], part.nodes[there]
    if part.kind == "opamp" and "input_resistance" in part.values:
        yield part.nodes[0], part.nodes[1]


class DisjointSets:
    """Sets of names that grow by joining: a forest of names that point towards their root.

    A name must be in the forest before it is joined.
    """

    __slots__ = ("parent",)

    def __init__(self, names: Iterable[str] = ()) -> None:
        self.parent: dict[str, str] = {name: name for name in names}

    def add(self, *names: str) -> None:
        """Make a set of its own of each name that is new."""
        for name in names:
            self.parent.setdefault(name, name)

    def root(self, name: str) -> str:
        """The name that stands for the set of a name."""
        parent = self.parent
        while (above := parent[name]) != name:
            parent[name] = parent[above]  # halves the path, so that paths stay short
            name = above
        return name

    def join(self, first: str, second: str) -> bool:
        """Make one set of two; False where it was one already."""
        first, second = self.root(first), self.root(second)
        self.parent[second] = first
        return first != second

    def join_all(self, pairs: Iterable[tuple[str, ...]]) -> None:
        """Join each pair; `root` is written out here, for sweeps of large networks."""
        parent = self.parent
        for first, second in pairs:
            while (above := parent[first]) != first:
                parent[first] = parent[above]
                first = above  # noqa: PLW2901
            while (above := parent[second]) != second:
                parent[second] = parent[above]
                second = above  # noqa: PLW2901
            parent[second] = first


def _numbered(sets: DisjointSets) -> Groups:
    """Number the sets, that of `gnd` first, and choose the reference of each."""
    numbers: dict[str, int] = {sets.root(GROUND): 0} if GROUND in sets.parent else {}
    of: dict[str, int] = {}
    rows: list[list[str]] = [[] for _ in numbers]
    for node in sets.parent:
        root = sets.root(node)
        group = numbers.get(root)
        if group is None:
            group = numbers[root] = len(rows)
            rows.append([])
        of[node] = group
        rows[group].append(node)
    references = (GROUND if of.get(GROUND) == k else None for k in range(len(rows)))
    return Groups(
        of,
        tuple(
            node or min(row, key=natural_key) for node, row in zip(references, rows, strict=True)
        ),
    )


def constant(netlist: Netlist, expression: Expression | None) -> Fraction | None:
    """The number that an expression plainly is, followed through named quantities."""
    for _ in range(_LONGEST_CHAIN_OF_NAMES):
        if isinstance(expression, Number):
            return expression.value
        if not isinstance(expression, Name):
            return None
        quantity = netlist.quantities.get(expression.name)
        expression = quantity.value.expression if quantity else None
    return None


_LONGEST_CHAIN_OF_NAMES = 16  # a guard against quantities that name each other in a circle


def is_zero(netlist: Netlist, part: Part, attribute: str) -> bool:
    """Whether an attribute is given and plainly is the number zero."""
    value = part.values.get(attribute)
    return value is not None and constant(netlist, value.expression) == 0


def is_open(netlist: Netlist, part: Part) -> bool:
    """Whether a part plainly carries no current at all (C = 0)."""
    attribute = _OPEN_AT_ZERO.get(part.kind)
    return attribute is not None and is_zero(netlist, part, attribute)


def is_short(netlist: Netlist, part: Part) -> bool:
    """Whether a part plainly is a branch of zero ohm (R = 0, an ammeter)."""
    if part.kind == "ammeter":
        return True
    extras = _SHORT_AT_ZERO.get(part.kind)
    return (
        extras is not None
        and is_zero(netlist, part, "value")
        and not any(extra in part.values for extra in extras)
        and not any(part.name in (item.first, item.second) for item in netlist.couplings)
    )


def is_ideal(part: Part) -> bool:
    """Whether a part is an op-amp of unlimited gain, whose two inputs are equal."""
    return part.kind == "opamp" and not {"open_loop_gain", "gain_bandwidth"} & part.values.keys()


#: What a branch of prescribed voltage or current is: a short or ammeter (`zero`), an
#: independent `source`, the zero-ohm `sense` branch of a current-controlled part, the
#: `inputs` of an ideal op-amp (equal, without current), a controlled `output`, the
#: `drive` of a question or the `short` that observes a current.
Role = Literal["zero", "source", "sense", "inputs", "output", "drive", "short"]


@dataclass(frozen=True, slots=True)
class Branch:
    """A branch of prescribed voltage or current; its current flows from first to second."""

    role: Role
    first: str
    second: str
    part: Part | None = None  # None for what a question adds

    @property
    def name(self) -> str:
        """Name of the part, or the role of what a question adds."""
        return self.part.name if self.part else self.role


def voltage_branches(netlist: Netlist) -> Iterator[Branch]:
    """The branches whose voltage their own current does not change."""
    for part in netlist.parts:
        nodes = part.nodes
        if part.kind == "voltage_source":
            role: Role = "zero" if is_zero(netlist, part, "amplitude") else "source"
            yield Branch(role, nodes[0], nodes[1], part)
        elif is_short(netlist, part):
            yield Branch("zero", nodes[0], nodes[1], part)
        if part.kind in ("transresistance", "current_amplifier"):
            yield Branch("sense", nodes[0], nodes[1], part)
        elif is_ideal(part):
            yield Branch("inputs", nodes[0], nodes[1], part)
        if _has_stiff_output(netlist, part):
            yield Branch("output", nodes[3], nodes[2], part)


def _has_stiff_output(netlist: Netlist, part: Part) -> bool:
    if part.kind != "opamp" or is_ideal(part):
        return part.kind in ("opamp", "voltage_amplifier", "transresistance")
    resistance = "output_resistance"
    return resistance not in part.values or is_zero(netlist, part, resistance)


def current_branches(netlist: Netlist) -> Iterator[Branch]:
    """The branches whose current their own voltage does not change."""
    for part in netlist.parts:
        nodes = part.nodes
        if part.kind == "current_source":
            yield Branch("source", nodes[0], nodes[1], part)
        elif part.kind in ("transconductance", "current_amplifier"):
            yield Branch("output", nodes[3], nodes[2], part)


def sensing_pairs(netlist: Netlist) -> Iterator[tuple[Part, Pair]]:
    """The pairs of terminals that sense a voltage and carry no current."""
    for part in netlist.parts:
        if part.kind in ("voltage_amplifier", "transconductance") or (
            part.kind == "opamp" and "input_resistance" not in part.values
        ):
            yield part, (part.nodes[0], part.nodes[1])


def current_sources(netlist: Netlist) -> frozenset[str]:
    """Names of the independent current sources: open circuits where they are set to zero."""
    return frozenset(part.name for part in netlist.parts if part.kind == "current_source")
