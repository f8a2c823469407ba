"""Sizes of shapes, and the grid's x of every column and y of every row."""

from __future__ import annotations

from collections import defaultdict
from math import ceil

from acsolve.circuit.netlist import GROUND
from acsolve.report.drawing.label import NAME_SIZE, SMALL_SIZE, VALUE_SIZE, short, width
from acsolve.report.drawing.model import Item
from acsolve.report.drawing.plan import BoxItem, Hang, Plan
from acsolve.report.drawing.rows import Row, Rows

PITCH = 4  # between the rows of a level
HANG = 6  # each item of a chain that hangs
LEAD = 2.5  # from where a chain hangs to its first item
BOX_HALF = 3.0  # half the width of a box
TEXT_GAP = 0.6  # between a shape and its text
BOX_ABOVE = 2.0  # from the first pin of a box to its edge
STUB = 2.0  # from a box to the ground symbol of a pin

_BROADEST = 1.5  # half of the broadest shape that hangs
#: Shape -> half its length between pins and half its breadth.
_HALVES = {
    "resistor": (2.0, 0.75),
    "impedance": (2.0, 0.75),
    "admittance": (2.0, 0.75),
    "inductor": (2.0, 0.75),
    "capacitor": (0.5, 1.5),
    "constant_phase": (1.0, 1.5),
    "crystal": (1.0, 1.5),
    "voltage_source": (1.5, 1.5),
    "current_source": (1.5, 1.5),
    "ammeter": (1.5, 1.5),
    "dots": (2.0, 0.75),
}


def halves(shape: str) -> tuple[float, float]:
    """Half the length between the pins and half the breadth of a two-terminal shape."""
    return _HALVES.get(shape, (2.0, 1.0))


def label_lines(item: Item) -> int:
    """How many lines of text stand beside an item."""
    return bool(item.label.name) + bool(item.label.value)


class Measures:
    """Where the columns and rows of a plan stand."""

    def __init__(self, plan: Plan, rows: Rows) -> None:
        self.plan = plan
        self.box_half = {id(box): _box_half(box) for box in plan.boxes}
        self.hangs: dict[int, list[Hang]] = defaultdict(list)
        for hang in plan.hangs:
            self.hangs[hang.column.place].append(hang)
        self.level_y = self._levels(rows)
        self.slots: dict[int, float] = {}
        self.column_x: dict[int, float] = {}
        self.gap_x: dict[int, float] = {}
        self._columns(rows)

    # ------------------------------------------------------------ upwards

    def y(self, row: Row) -> float:
        """Height of a row."""
        return self.level_y[row[0]] + PITCH * row[1]

    def _levels(self, rows: Rows) -> dict[int, float]:
        levels = sorted({0} | {level for level, _ in rows.taken}, reverse=True)
        found = {0: 0.0}
        for upper, lower in zip(levels[1:], levels, strict=False):
            room = self._above(lower) + self._below(upper, rows)
            found[upper] = found[lower] - float(ceil(room))
        return found

    def _above(self, level: int) -> float:
        """Room for what stands above the first row of a level."""
        found = [1.0]
        found += [
            halves(line.item.shape)[1] + TEXT_GAP + NAME_SIZE
            for line in self.plan.lines
            if line.item is not None and line.row[0] == level
        ]
        found += [
            BOX_ABOVE + 0.3 + 1.4 * label_lines(box.item) + NAME_SIZE
            for box in self.plan.boxes
            if box.level == level
        ]
        if any(flag.row == (level, 0) for flag in self.plan.flags):
            found.append(0.5 + TEXT_GAP + NAME_SIZE)
        return max(found)

    def _below(self, level: int, rows: Rows) -> float:
        """Room for what stands beneath the first row of a level, its other rows included."""
        depth = PITCH * rows.lowest(level) + 1.0
        depth = max(depth, self._texts_below(level))
        for box in self.plan.boxes:
            if box.level == level:
                depth = max(depth, PITCH * (box.height - 1) + BOX_ABOVE + 1.0)
        for hang in self.plan.hangs:
            if hang.row[0] == level:
                depth = max(depth, PITCH * hang.row[1] + chain_depth(hang) + 1.5)
        return depth

    def _texts_below(self, level: int) -> float:
        """How far shapes and values in the first row of a level reach down."""
        return max(
            (
                halves(line.item.shape)[1]
                + (TEXT_GAP + VALUE_SIZE if line.item.label.value else 0.0)
                + 0.4
                for line in self.plan.lines
                if line.item is not None and line.row[0] == level
            ),
            default=0.0,
        )

    def rail_y(self, rows: Rows) -> float:
        """Height of the rail, beneath everything."""
        deep = [
            PITCH * hang.row[1] + chain_depth(hang) for hang in self.plan.hangs if hang.row[0] == 0
        ]
        return float(ceil(max([PITCH * rows.lowest(0) + 2.5, self._texts_below(0), *deep])))

    # ------------------------------------------------------------ sideways

    def _columns(self, rows: Rows) -> None:
        wide = self._gap_widths()
        x = 0.0
        if wide.get(-1):
            x = float(ceil(wide[-1]))
            self.gap_x[-1] = x / 2
        columns = self.plan.columns
        for number, column in enumerate(columns):
            following = columns[number + 1] if number + 1 < len(columns) else None
            place = column.place
            self.column_x[place] = x
            last, reserve = self._slots(place, x)
            room = sum(wide.get(gap, 0.0) for gap in self._gaps_from(place, following))
            crowded = any(hang.items and rows.lowest(hang.row[0]) > 0 for hang in self.hangs[place])
            start = reserve if crowded else last
            after = max(start + room + 1.0, reserve + 2.5, x + 2.0)
            if (
                following is not None
                and self.hangs[following.place]
                and self._boxed(place, following)
            ):
                after += _BROADEST
            after = float(ceil(after))
            self._place_gaps(place, following, start, after, wide)
            x = after

    def _boxed(self, place: int, following: object) -> bool:
        gaps = self._gaps_from(place, following)
        return any(box.after is not None and box.after.place in gaps for box in self.plan.boxes)

    def _gaps_from(self, place: int, following: object) -> range:
        stop = getattr(following, "place", place + 1)
        return range(place, max(stop, place + 1))

    def _place_gaps(
        self, place: int, following: object, start: float, stop: float, wide: dict[int, float]
    ) -> None:
        gaps = [gap for gap in self._gaps_from(place, following) if wide.get(gap)]
        if len(gaps) == 1:
            self.gap_x[gaps[0]] = round(start + stop) / 2
            return
        at = start + 0.5
        for gap in gaps:
            self.gap_x[gap] = round(2 * at + wide[gap]) / 2
            at += wide[gap]

    def _gap_widths(self) -> dict[int, float]:
        wide: dict[int, float] = defaultdict(float)
        for line in self.plan.lines:
            if line.item is not None:
                room = max(2 * halves(line.item.shape)[0] + 2, line.item.label.width + 1)
                wide[line.gap] = max(wide[line.gap], room)
        for box in self.plan.boxes:
            gap = box.after.place if box.after is not None else -1
            half = self.box_half[id(box)]
            stub = 2 * (STUB + 2.0) if any(pin.column is None for pin in box.pins) else 2.0
            wide[gap] = max(wide[gap], 2 * half + stub, box.item.label.width + 1)
        for flag in self.plan.flags:
            wide[flag.gap] = max(wide[flag.gap], width(flag.net, NAME_SIZE) + 2, 5.0)
        return {gap: float(ceil(room)) for gap, room in wide.items()}

    def _slots(self, place: int, x: float) -> tuple[float, float]:
        """Give what hangs from a column its x; the last x, and how far its texts reach."""
        hangs = self.hangs[place]
        column = next(item for item in self.plan.columns if item.place == place)
        lowest = max((self.y(row) for row in column.rows), default=0.0)
        busy = any(self.y(hang.row) < lowest for hang in hangs)
        at, reach = (x + 3 if busy else x), x
        for number, hang in enumerate(hangs):
            if number:
                at = float(ceil(max(at + 4, reach + 2)))
            self.slots[id(hang)] = at
            reach = at + chain_reach(hang)
        return (at if hangs else x), reach


def _box_half(box: BoxItem) -> float:
    """Half the width of a box, wide enough for the names of its terminals."""
    if not has_pin_names(box.item):
        return BOX_HALF
    widest = {
        side: max(
            (width(short(pin.terminal), SMALL_SIZE) for pin in box.pins if pin.side == side),
            default=0.0,
        )
        for side in ("left", "right")
    }
    return max(BOX_HALF, float(ceil(widest["left"] + widest["right"] + 2)) / 2)


def has_pin_names(item: Item) -> bool:
    """Whether the terminals of a box are named: not where it simply stands in line."""
    return item.shape == "block" and (not item.hidden or len({*item.nets} - {GROUND}) > 2)


def chain_depth(hang: Hang) -> float:
    """From the row that a chain hangs on to its lower end."""
    return LEAD + HANG * len(hang.items) if hang.items else 2.0


def chain_reach(hang: Hang) -> float:
    """How far the texts of a chain reach to the right of it."""
    return max(
        (halves(item.shape)[1] + 0.6 + item.label.width for item, _ in hang.items), default=1.3
    )
