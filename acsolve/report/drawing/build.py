"""From a plan with places to a sheet: symbols, wires, dots and texts."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Iterator
from itertools import pairwise

from acsolve.circuit.netlist import GROUND
from acsolve.report.drawing.label import (
    NAME_SIZE,
    SMALL_SIZE,
    VALUE_SIZE,
    short,
    width,
)
from acsolve.report.drawing.measure import (
    BOX_ABOVE,
    HANG,
    LEAD,
    PITCH,
    STUB,
    TEXT_GAP,
    Measures,
    chain_depth,
    halves,
    has_pin_names,
)
from acsolve.report.drawing.model import Item
from acsolve.report.drawing.nets import junctions
from acsolve.report.drawing.plan import BoxItem, Flag, Hang, Line, Plan
from acsolve.report.drawing.rows import Rows
from acsolve.report.drawing.sheet import Pin, Point, Role, Sheet, Side, Symbol, Text, Wire

_MARGIN = 1.5


def build(plan: Plan, rows: Rows, title: str) -> Sheet:
    """Draw a seated plan."""
    drawn = _Drawn(plan, rows)
    for line in plan.lines:
        drawn.line(line)
    for box in plan.boxes:
        drawn.box(box)
    for hang in plan.hangs:
        drawn.hang(hang)
    for flag in plan.flags:
        drawn.flag(flag)
    drawn.rail()
    drawn.buses()
    return drawn.sheet(title)


class _Drawn:
    """What is drawn so far."""

    def __init__(self, plan: Plan, rows: Rows) -> None:
        self.plan = plan
        self.at = Measures(plan, rows)
        self.rail_y = self.at.rail_y(rows)
        self.on_rail: list[float] = []
        self.rail_ends: list[tuple[float, int]] = []
        self.symbols: list[Symbol] = []
        self.strokes: dict[str, list[tuple[Point, Point]]] = defaultdict(list)
        self.texts: list[Text] = []

    def wire(self, net: str, *points: Point) -> None:
        """A wire through points."""
        for start, end in pairwise(points):
            if start != end:
                self.strokes[net].append((start, end))

    # ------------------------------------------------------------ parts

    def line(self, line: Line) -> None:
        """A two-terminal part that lies in a row, or a plain link."""
        y = self.at.y(line.row)
        left, right = self.at.column_x[line.left.place], self.at.column_x[line.right.place]
        if line.item is None:
            self.wire(line.left.net, (left, y), (right, y))
            return
        x = self.at.gap_x[line.gap]
        half, broad = halves(line.item.shape)
        ends = line.item.ends if not line.flipped else line.item.ends[::-1]
        pins = (
            Pin(terminal=ends[0][0], at=(x - half, y), side="left"),
            Pin(terminal=ends[1][0], at=(x + half, y), side="right"),
        )
        self.symbols.append(
            _symbol(line.item, (x - half, y - broad, x + half, y + broad), pins, line.flipped)
        )
        self.wire(line.left.net, (left, y), (x - half, y))
        self.wire(line.right.net, (x + half, y), (right, y))
        self._centred(line.item.label.name, NAME_SIZE, x, y - broad - TEXT_GAP, "name")
        below = y + broad + TEXT_GAP + 0.78 * VALUE_SIZE
        self._centred(line.item.label.value, VALUE_SIZE, x, below, "value")

    def _centred(self, text: str, size: float, x: float, y: float, role: Role) -> None:
        if text:
            start = x - width(text, size) / 2
            self.texts.append(Text(text=text, at=(start, y), size=size, role=role, centred=True))

    def hang(self, hang: Hang) -> None:
        """Parts in series down to the rail, or to a ground symbol."""
        net = hang.column.net
        x, y = self.at.slots[id(hang)], self.at.y(hang.row)
        self.wire(net, (self.at.column_x[hang.column.place], y), (x, y))
        top, at = (x, y), y + LEAD
        for place, (item, flipped) in enumerate(hang.items):
            half, broad = halves(item.shape)
            middle = at + HANG / 2
            ends = item.ends[::-1] if flipped else item.ends
            pins = (
                Pin(terminal=ends[0][0], at=(x, middle - half), side="up"),
                Pin(terminal=ends[1][0], at=(x, middle + half), side="down"),
            )
            box = (x - broad, middle - half, x + broad, middle + half)
            self.symbols.append(_symbol(item, box, pins, flipped, turned=True))
            self.wire(ends[0][1] if place else net, top, (x, middle - half))
            self._beside(item, x + broad + TEXT_GAP, middle)
            top, at = (x, middle + half), at + HANG
        self._end(hang, top)

    def _end(self, hang: Hang, top: Point) -> None:
        x = top[0]
        if hang.row[0] == 0 and hang.end == self.plan.model.rail:
            self.wire(hang.end, top, (x, self.rail_y))
            self.on_rail.append(x)
            return
        low = self.at.y(hang.row) + chain_depth(hang) - (0.5 if hang.items else 0)
        self.wire(hang.end, top, (x, low))
        self._ground((x, low))

    def _ground(self, at: Point) -> None:
        x, y = at
        pin = Pin(terminal=GROUND, at=at, side="up")
        self.symbols.append(
            Symbol(shape="ground", box=(x - 1.25, y, x + 1.25, y + 1.25), pins=(pin,))
        )

    def _beside(self, item: Item, x: float, y: float) -> None:
        name, value = item.label.name, item.label.value
        if name and value:
            self.texts.append(Text(text=name, at=(x, y - 0.35), size=NAME_SIZE, role="name"))
            self.texts.append(Text(text=value, at=(x, y + 1.35), size=VALUE_SIZE, role="value"))
        elif name or value:
            role: Role = "name" if name else "value"
            self.texts.append(Text(text=name or value, at=(x, y + 0.55), size=NAME_SIZE, role=role))

    # ------------------------------------------------------------ boxes

    def box(self, box: BoxItem) -> None:
        """A box with its pins, its inner names and its label above."""
        gap = box.after.place if box.after is not None else -1
        x, y = self.at.gap_x[gap], self.at.level_y[box.level]
        half = self.at.box_half[id(box)]
        above = 0.25 if box.item.shape == "transformer" else BOX_ABOVE  # coils have no frame
        bottom = y + PITCH * (box.height - 1) + above
        pins = []
        for pin in box.pins:
            sign = -1 if pin.side == "left" else 1
            at = (x + sign * half, y + PITCH * pin.sub)
            pins.append(Pin(terminal=pin.terminal, at=at, side=pin.side))
            if pin.column is None:
                away = at[0] + sign * STUB
                self.wire(pin.net, at, (away, at[1]), (away, at[1] + 1))
                self._ground((away, at[1] + 1))
            else:
                self.wire(pin.net, at, (self.at.column_x[pin.column.place], at[1]))
        shape_box = (x - half, y - above, x + half, bottom)
        self.symbols.append(
            _symbol(box.item, shape_box, tuple(pins), flipped=False, mirrored=box.mirrored)
        )
        if has_pin_names(box.item):
            self._pin_names(pin for pin in pins if pin.terminal != GROUND)
        label = box.item.label
        above = y - above - 0.7
        self._centred(label.value, VALUE_SIZE, x, above, "value")
        self._centred(label.name, NAME_SIZE, x, above - (1.75 if label.value else 0), "name")

    def _pin_names(self, pins: Iterable[Pin]) -> None:
        for pin in pins:
            name = short(pin.terminal)
            room = width(name, SMALL_SIZE)
            x = pin.at[0] + 0.5 if pin.side == "left" else pin.at[0] - 0.5 - room
            self.texts.append(Text(text=name, at=(x, pin.at[1] + 0.4), size=SMALL_SIZE, role="pin"))

    # ------------------------------------------------------------ names, rail, buses

    def flag(self, flag: Flag) -> None:
        """A small circle with the net's name, where the circuit meets what is asked."""
        y = self.at.y(flag.row)
        x = self.at.gap_x[flag.gap]
        column = self.at.column_x[flag.column.place]
        side = 1 if column > x else -1
        pin = Pin(terminal=flag.net, at=(x + side * 0.5, y), side="right" if side > 0 else "left")
        self._terminal(x, y, pin)
        self.wire(flag.net, pin.at, (column, y))
        self._centred(short(flag.net), NAME_SIZE, x, y - 0.5 - TEXT_GAP, "node")
        if flag.row == (0, 0) and self._against_rail(flag.net):
            self.rail_ends.append((x, side))

    def _against_rail(self, net: str) -> bool:
        pairs = (self.plan.model.source, self.plan.model.target)
        return any(pair == (net, self.plan.model.rail) for pair in pairs)

    def _rail_end(self, x: float, side: int) -> None:
        """The second terminal of a pair, on the rail beneath the first."""
        rail = self.plan.model.rail
        where: Side = "right" if side > 0 else "left"
        pin = Pin(terminal=rail, at=(x + side * 0.5, self.rail_y), side=where)
        self._terminal(x, self.rail_y, pin)
        self.on_rail.append(pin.at[0])
        if rail != GROUND:
            self._centred(short(rail), NAME_SIZE, x, self.rail_y - 0.5 - TEXT_GAP, "node")

    def _terminal(self, x: float, y: float, pin: Pin) -> None:
        self.symbols.append(
            Symbol(shape="terminal", box=(x - 0.5, y - 0.5, x + 0.5, y + 0.5), pins=(pin,))
        )

    def rail(self) -> None:
        """The rail beneath everything, with its ground symbol."""
        if not self.on_rail:
            return
        low, high = min(self.on_rail), max(self.on_rail)
        before = [x for x, side in self.rail_ends if side > 0 and x < low - 2]
        behind = [x for x, side in self.rail_ends if side < 0 and x > high + 2]
        if before:
            self._rail_end(min(before), 1)
        if behind:
            self._rail_end(max(behind), -1)
        low, high = min(self.on_rail), max(self.on_rail)
        self.wire(self.plan.model.rail, (low, self.rail_y), (high, self.rail_y))
        if self.plan.model.rail == GROUND:
            hangs = [x for hang, x in self._rail_hangs()]
            self._ground((hangs[0], self.rail_y))

    def _rail_hangs(self) -> list[tuple[Hang, float]]:
        found = [
            (hang, self.at.slots[id(hang)])
            for hang in self.plan.hangs
            if hang.row[0] == 0 and hang.end == self.plan.model.rail
        ]
        return sorted(found, key=lambda item: item[1])

    def buses(self) -> None:
        """The upright wire of every column."""
        for column in self.plan.columns:
            heights = [self.at.y(row) for row in column.rows]
            x = self.at.column_x[column.place]
            self.wire(column.net, (x, min(heights)), (x, max(heights)))

    def sheet(self, title: str) -> Sheet:
        """All of it, with wires merged and dots where ways meet."""
        wires = tuple(
            Wire(start=start, end=end, net=net)
            for net in sorted(self.strokes)
            for start, end in _split(_merged(self.strokes[net]))
        )
        symbols = tuple(self.symbols)
        self._notes(symbols, wires)
        return Sheet(
            title=title,
            symbols=symbols,
            wires=wires,
            dots=tuple(sorted(junctions(wires, symbols))),
            texts=tuple(self.texts),
            condensed=self.plan.model.condensed,
            box=_bounds(symbols, wires, self.texts),
        )

    def _notes(self, symbols: tuple[Symbol, ...], wires: tuple[Wire, ...]) -> None:
        left, _, _, bottom = _bounds(symbols, wires, self.texts)
        for place, note in enumerate(self.plan.model.notes):
            at = (left + _MARGIN, bottom + 1.2 + 1.9 * place)
            self.texts.append(Text(text=note, at=at, size=VALUE_SIZE, role="note"))


def _symbol(
    item: Item,
    box: tuple[float, float, float, float],
    pins: tuple[Pin, ...],
    flipped: bool,
    *,
    turned: bool = False,
    mirrored: bool = False,
) -> Symbol:
    return Symbol(
        shape=item.shape,
        box=box,
        pins=pins,
        part=item.name,
        hidden=item.hidden,
        turned=turned,
        mirrored=mirrored or flipped,
        marks=item.marks,
    )


def _merged(strokes: Iterable[tuple[Point, Point]]) -> list[tuple[Point, Point]]:
    """Strokes of one net with those on one line that overlap or meet joined."""
    lines: dict[tuple[bool, float], list[tuple[float, float]]] = defaultdict(list)
    for (x0, y0), (x1, y1) in strokes:
        level = y0 == y1
        low, high = sorted((x0, x1) if level else (y0, y1))
        lines[level, y0 if level else x0].append((low, high))
    found: list[tuple[Point, Point]] = []
    for (level, at), spans in sorted(lines.items()):
        spans.sort()
        low, high = spans[0]
        for a, b in [*spans[1:], (float("inf"), float("inf"))]:
            if a <= high:
                high = max(high, b)
                continue
            found.append(((low, at), (high, at)) if level else ((at, low), (at, high)))
            low, high = a, b
    return found


def _split(lines: list[tuple[Point, Point]]) -> Iterator[tuple[Point, Point]]:
    """Lines of one net; where an upright one crosses a level one, it ends and begins."""
    level = [line for line in lines if line[0][1] == line[1][1]]
    yield from level
    for start, end in lines:
        if start[1] == end[1]:
            continue
        x = start[0]
        cuts = {y for (a, y), (b, _) in level if a < x < b and start[1] < y < end[1]}
        heights = [start[1], *sorted(cuts), end[1]]
        yield from (((x, a), (x, b)) for a, b in pairwise(heights))


def _bounds(
    symbols: Iterable[Symbol], wires: Iterable[Wire], texts: Iterable[Text]
) -> tuple[float, float, float, float]:
    boxes = [symbol.box for symbol in symbols] + [text.box for text in texts]
    boxes += [(*wire.start, *wire.end) for wire in wires]
    if not boxes:
        return (0.0, 0.0, 4.0, 4.0)
    left, top, right, bottom = zip(*boxes, strict=True)
    return (
        round(min(left) - _MARGIN, 2),
        round(min(top) - _MARGIN, 2),
        round(max(right) + _MARGIN, 2),
        round(max(bottom) + _MARGIN, 2),
    )
