"""What is to be drawn: items of a circuit with the nets that they hang on."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from typing import Literal

from acsolve.circuit.kind import KINDS
from acsolve.circuit.netlist import GROUND, Netlist, Pair, Part
from acsolve.report.drawing.label import Label

Sided = tuple[str, str, Literal["left", "right"], int]  # terminal, net, side, row from the top

#: Kind -> side of each terminal and its row; other kinds: first half left, the rest right.
_SIDES: dict[str, tuple[tuple[Literal["left", "right"], int], ...]] = {
    "opamp": (("left", 0), ("left", 1), ("right", 0), ("right", 1)),
    "line": (("left", 0), ("right", 0), ("left", 1), ("right", 1)),
    "measured": (("left", 0), ("right", 0), ("left", 1)),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Item:
    """One symbol to place: a part, a block, or the dots of a row of equal sections.

    `ends` are (terminal, net) pairs in the order of the kind. `drives` are pairs of nets, from
    what is sensed to what is driven, along which a signal runs one way.
    """

    name: str
    shape: str
    ends: tuple[tuple[str, str], ...]
    label: Label
    hidden: tuple[str, ...] = ()
    sense: tuple[str, ...] = ()  # terminals that sense
    signature: object = None  # equal for equal parts
    marks: tuple[str, ...] = ()

    @property
    def nets(self) -> tuple[str, ...]:
        """The nets at the ends, in their order."""
        return tuple(net for _, net in self.ends)

    @property
    def is_two_terminal(self) -> bool:
        """Whether it can stand in line."""
        return len(self.ends) == 2 and self.shape not in BOXES

    def sided(self, trunk: frozenset[str]) -> list[Sided]:
        """Side and row of every end; of an op-amp's inputs the one on the path comes first."""
        places = _SIDES.get(self.shape)
        half = (len(self.ends) + 1) // 2
        found: list[Sided] = []
        for place, (terminal, net) in enumerate(self.ends):
            if places is not None:
                side, row = places[place]
            else:
                side, row = ("left", place) if place < half else ("right", place - half)
            found.append((terminal, net, side, row))
        if self.shape == "opamp" and self.ends[1][1] in trunk and not self._plus_leads(trunk):
            (a, b, c, _), (d, e, f, _) = found[0], found[1]
            found[:2] = [(a, b, c, 1), (d, e, f, 0)]
        nets = dict(self.ends)
        if self.shape in CONTROLLED and nets["ref"] in trunk and nets["out"] not in trunk:
            (a, b, c, _), (d, e, f, _) = found[2], found[3]
            found[2:] = [(a, b, c, 1), (d, e, f, 0)]
        return found

    def _plus_leads(self, trunk: frozenset[str]) -> bool:
        plus, minus, out = self.nets[:3]
        return plus in trunk or minus == out


CONTROLLED = ("voltage_amplifier", "transconductance", "transresistance", "current_amplifier")
BOXES = frozenset(
    {
        "opamp",
        "voltage_amplifier",
        "transconductance",
        "transresistance",
        "current_amplifier",
        "transformer",
        "gyrator",
        "line",
        "measured",
        "block",
    }
)
_SENSE = ("plus", "minus")
_ONE_WAY = ("opamp", "voltage_amplifier", "transconductance", "transresistance")


@dataclass(frozen=True, slots=True, kw_only=True)
class Model:
    """The circuit as items, with the pairs that are asked about."""

    items: tuple[Item, ...]
    source: Pair | None
    target: Pair | None
    named: tuple[str, ...]  # nets whose names are shown
    rail: str = GROUND
    condensed: bool = False
    notes: tuple[str, ...] = field(default=())


def item_of(part: Part, label: Callable[[Part], Label], marks: tuple[str, ...]) -> Item:
    """The item of a part; a terminal that stays on its default node is not drawn."""
    definition = KINDS.get(part.kind)
    terminals = part.definition.terminals if definition else ()
    ends = tuple(
        (terminal.name, node)
        for terminal, node in zip(terminals, part.nodes, strict=True)
        if terminal.default is None or node != terminal.default
    )
    shape = part.kind if len(ends) == 2 or part.kind in BOXES else "block"
    return Item(
        name=part.name,
        shape=shape,
        ends=ends,
        label=label(part),
        sense=_SENSE if part.kind in _ONE_WAY else (),
        signature=(part.kind, tuple(part.values.items()), part.file),
        marks=marks,
    )


def asked_pairs(netlist: Netlist) -> tuple[Pair | None, Pair | None]:
    """Where the file's first question drives and observes; else its ports, or a source."""
    for question in netlist.questions:
        if question.source is not None:
            return question.source, question.target
    for question in netlist.questions:
        return question.target, None
    ports = list(netlist.ports.values())
    if ports:
        return ports[0], ports[1] if len(ports) > 1 else None
    return None, None
