"""The plan of a drawing: columns for nets, items between or beneath them, not yet measured.

Each net has an upright bus of its own. Two-terminal parts lie between two buses, or hang from
one towards the rail; everything else is a box in a gap between two buses. Where a box wants a
net on the wrong side, a second bus of that net stands there, and a link joins the two. Any
network has such a plan, and its wires follow from it without search.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, field
from itertools import pairwise
from typing import Literal

from acsolve.circuit.netlist import GROUND
from acsolve.report.drawing.model import Item, Model, Sided
from acsolve.report.drawing.order import columns, components, path
from acsolve.report.drawing.rows import Row


@dataclass(slots=True, eq=False)
class Column:
    """A bus; `rows` are those that something hangs on it."""

    net: str
    rows: set[Row] = field(default_factory=set)
    place: int = -1


@dataclass(slots=True, eq=False)
class Line:
    """A two-terminal item between two columns; `flipped` where its first end is on the right."""

    item: Item | None  # None: a plain link between two columns of one net
    left: Column
    right: Column
    flipped: bool = False
    gap: int = -1
    row: Row = (0, 0)
    prefer: tuple[Row, ...] = ()


@dataclass(slots=True, eq=False)
class BoxPin:
    """A terminal of a box; without a column it has a ground symbol of its own."""

    terminal: str
    net: str
    side: Literal["left", "right"]
    sub: int
    column: Column | None


@dataclass(slots=True, eq=False)
class BoxItem:
    """An item with more than two terminals in the gap behind a column."""

    item: Item
    after: Column | None
    mirrored: bool
    pins: list[BoxPin]
    links: list[Line] = field(default_factory=list)
    level: int = 0

    @property
    def height(self) -> int:
        """Rows that it takes."""
        return max(pin.sub for pin in self.pins) + 1


@dataclass(slots=True, eq=False)
class Hang:
    """Items in series from a column down to the rail or to a ground symbol; none: a wire."""

    items: tuple[tuple[Item, bool], ...]  # the flag: its second end is on top
    column: Column
    end: str  # the net at the lower end
    row: Row = (0, 0)


@dataclass(slots=True, eq=False)
class Flag:
    """The terminal of a named net in the gap before or behind its column."""

    net: str
    column: Column
    gap: int = -1
    row: Row = (0, 0)


@dataclass(slots=True, eq=False)
class Plan:
    """Everything that is to be placed, in columns from left to right."""

    model: Model
    columns: list[Column] = field(default_factory=list)
    main: dict[str, Column] = field(default_factory=dict)
    trunks: list[list[str]] = field(default_factory=list)
    lines: list[Line] = field(default_factory=list)
    boxes: list[BoxItem] = field(default_factory=list)
    hangs: list[Hang] = field(default_factory=list)
    flags: list[Flag] = field(default_factory=list)

    def number(self) -> None:
        """Count the columns."""
        for place, column in enumerate(self.columns):
            column.place = place

    def insert(self, net: str, after: Column | None) -> Column:
        """A further column of a net behind another one, or in front of all."""
        place = 0 if after is None else self.columns.index(after) + 1
        column = Column(net)
        self.columns.insert(place, column)
        return column


def make_plan(model: Model) -> Plan:
    """The plan of a circuit; its rows and gaps are chosen later."""
    plan = Plan(model)
    for nets, items in components(model):
        trunk = path(model, nets, items) if nets else []
        chains, rest = _chains(model, items, frozenset(trunk))
        gone = {net for chain in chains for net in _inner(chain)}
        order = columns(model, [net for net in nets if net not in gone], items, trunk)
        for net in order:
            plan.main[net] = Column(net)
            plan.columns.append(plan.main[net])
        plan.trunks.append(trunk)
        for chain in chains:
            _hang(plan, chain)
        for item in rest:
            if item.is_two_terminal:
                _two_terminal(plan, item)
        for item in rest:
            if not item.is_two_terminal:
                _box(plan, item, order, frozenset(trunk))
    plan.flags = [Flag(net, plan.main[net]) for net in model.named if net in plan.main]
    plan.number()
    return plan


# ---------------------------------------------------------------- two terminals


def _special(model: Model, net: str) -> bool:
    return net in (GROUND, model.rail)


def _chains(
    model: Model, items: Sequence[Item], kept: frozenset[str]
) -> tuple[list[list[Item]], list[Item]]:
    """Parts in series down to the rail with nothing between them, and all other items."""
    on: dict[str, list[Item]] = defaultdict(list)
    for item in items:
        for net in item.nets:
            on[net].append(item)
    chains: list[list[Item]] = []
    for item in items:
        low = [net for net in item.nets if _special(model, net)]
        if not item.is_two_terminal or len(low) != 1:
            continue
        chain = [item]
        net = _other(item, low[0])
        while net not in kept and net not in model.named and len(on[net]) == 2:
            after = next((other for other in on[net] if other is not chain[0]), None)
            if after is None or not after.is_two_terminal or len(set(after.nets)) < 2:
                break
            if _special(model, _other(after, net)):
                break
            chain.insert(0, after)
            net = _other(after, net)
        chains.append(chain)
    used = {id(item) for chain in chains for item in chain}
    return chains, [item for item in items if id(item) not in used]


def _other(item: Item, net: str) -> str:
    first, second = item.nets
    return second if first == net else first


def _inner(chain: Sequence[Item]) -> set[str]:
    return {net for a, b in pairwise(chain) for net in {*a.nets} & {*b.nets}}


def _hang(plan: Plan, chain: Sequence[Item]) -> None:
    end = next(net for net in chain[-1].nets if _special(plan.model, net))
    directed: list[tuple[Item, bool]] = []
    net = end
    for item in reversed(chain):
        directed.insert(0, (item, item.nets[0] == net))
        net = _other(item, net)
    plan.hangs.append(Hang(tuple(directed), plan.main[net], end))


def _two_terminal(plan: Plan, item: Item) -> None:
    first, second = item.nets
    special = [_special(plan.model, net) for net in item.nets]
    if all(special):
        last = plan.columns[-1] if plan.columns else None
        left = plan.insert(first, last)
        right = plan.insert(second, left)
        plan.hangs += [Hang((), left, first), Hang((), right, second)]
        plan.lines.append(Line(item, left, right))
        return
    a, b = plan.main[first], plan.main[second]
    if a is b:
        b = plan.insert(first, a)
        plan.lines += [Line(item, a, b), Line(None, a, b)]
        return
    flipped = plan.columns.index(a) > plan.columns.index(b)
    left, right = (b, a) if flipped else (a, b)
    plan.lines.append(Line(item, left, right, flipped=flipped))


# ---------------------------------------------------------------- boxes

_WRONG_SIDE = 3.0
_MIRROR = 1.5


def _box(plan: Plan, item: Item, order: Sequence[str], trunk: frozenset[str]) -> None:
    """Put a box into the gap where its wires are shortest and few ends are on the wrong side."""
    ends = item.sided(trunk)
    places = {net: plan.columns.index(plan.main[net]) for _, net, _, _ in ends if net in plan.main}
    last = len(plan.columns) - 1
    low = plan.columns.index(plan.main[order[0]]) - 1 if order else last
    high = plan.columns.index(plan.main[order[-1]]) if order else last
    ways = (False,) if item.shape == "block" else (False, True)
    tried = [(mirrored, gap) for mirrored in ways for gap in range(low, high + 1)]

    def cost(choice: tuple[bool, int]) -> float:
        mirrored, gap = choice
        total = _MIRROR * mirrored
        for _, net, side, _ in _on_sides(item, ends, places, gap):
            if net in places:
                left = (side == "left") != mirrored
                away = gap - places[net] if left else places[net] - gap - 1
                total += away if away >= 0 else _WRONG_SIDE - away
        return total

    mirrored, gap = min(tried, key=cost)
    box = BoxItem(item, plan.columns[gap] if gap >= 0 else None, mirrored, [])
    before = plan.columns[gap + 1] if gap + 1 < len(plan.columns) else None
    for terminal, net, side, sub in _on_sides(item, ends, places, gap):
        real: Literal["left", "right"] = side
        if mirrored:
            real = "right" if side == "left" else "left"
        column = None if net == GROUND else _pin_column(plan, box, before, net, real)
        box.pins.append(BoxPin(terminal, net, real, sub, column))
        if column is not None and column is not plan.main.get(net):
            _join(plan, box, box.pins[-1])
    plan.boxes.append(box)


def _on_sides(
    item: Item, ends: Sequence[Sided], places: Mapping[str, int], gap: int
) -> Sequence[Sided]:
    """The ends of a block each on the side where its net is; of other boxes as they are."""
    if item.shape != "block":
        return ends
    found: list[Sided] = []
    counts = {"left": 0, "right": 0}
    for terminal, net, _, _ in ends:
        side: Literal["left", "right"] = "left" if places.get(net, -1) <= gap else "right"
        found.append((terminal, net, side, counts[side]))
        counts[side] += 1
    return found


def _pin_column(plan: Plan, box: BoxItem, before: Column | None, net: str, side: str) -> Column:
    """The column that a pin runs to: the net's own where it is on that side, else a new one."""
    main = plan.main.get(net)
    if main is not None:
        place = plan.columns.index(main)
        edge = plan.columns.index(box.after) if box.after is not None else -1
        if (place <= edge) == (side == "left"):
            return main
    column = plan.insert(net, box.after)
    if side == "left":
        box.after = column
    elif before is not None:
        # Behind the gap: in front of the column that followed it.
        plan.columns.remove(column)
        plan.columns.insert(plan.columns.index(before), column)
    return column


def _join(plan: Plan, box: BoxItem, pin: BoxPin) -> None:
    """Join a pin's own column to the net: by a link, or by a wire down to the rail."""
    assert pin.column is not None, "only pins with a column are joined"
    main = plan.main.get(pin.net)
    if main is None:
        plan.hangs.append(Hang((), pin.column, pin.net))
        return
    link = Line(None, main, pin.column)
    box.links.append(link)
    plan.lines.append(link)
