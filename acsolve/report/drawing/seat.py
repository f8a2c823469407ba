"""Rows and gaps for everything in a plan: the signal path first, then what hangs on it."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import pairwise

from acsolve.circuit.netlist import GROUND
from acsolve.report.drawing.plan import BoxItem, Column, Flag, Hang, Line, Plan
from acsolve.report.drawing.rows import Row, Rows, Span


def seat(plan: Plan) -> Rows:
    """Give every item of the plan its row, and its gap where it has a choice."""
    seats = _Seats(plan)
    seats.trunk()
    seats.early_hangs()
    for box in plan.boxes:
        seats.box(box)
    seats.all_lines()
    seats.late_hangs()
    for flag in plan.flags:
        seats.flag(flag)
    seats.bare_columns()
    return seats.rows


class _Seats:
    """The state of seating one plan."""

    def __init__(self, plan: Plan) -> None:
        self.plan = plan
        self.rows = Rows()
        self.done: set[int] = set()
        self.busy: dict[int, int] = {}  # gap -> bodies in it
        for line in plan.lines:
            if line.left.place > line.right.place:
                line.left, line.right = line.right, line.left
                line.flipped = not line.flipped

    # ------------------------------------------------------------ the path

    def trunk(self) -> None:
        """The signal path on the lowest level, in line."""
        for trunk in self.plan.trunks:
            for first, second in pairwise(trunk):
                self._step(first, second)

    def _step(self, first: str, second: str) -> None:
        pair = {first, second}
        boxes = [
            box
            for box in self.plan.boxes
            if pair <= {pin.net for pin in box.pins} and id(box) not in self.done
        ]
        if any(self._try_box(box, 0) for box in boxes if box.item.sense):
            return
        for line in self.plan.lines:
            on_path = line.item is not None and {line.left.net, line.right.net} == pair
            if on_path and id(line) not in self.done and self._try_line(line, (0, 0)):
                return
        any(self._try_box(box, 0) for box in boxes)

    # ------------------------------------------------------------ lines

    def all_lines(self) -> None:
        """Lines off the path, the shortest lowest."""
        waiting = [line for line in self.plan.lines if id(line) not in self.done]
        waiting.sort(key=lambda line: line.right.place - line.left.place)
        for line in waiting:
            if id(line) not in self.done:
                self._line(line)

    def _line(self, line: Line) -> None:
        rows = [*line.prefer, *((level, 0) for level in self.rows.levels())]
        found = any(self._try_line(line, row) for row in rows)
        assert found, "a new level has room for any line"

    def _try_line(self, line: Line, row: Row) -> bool:
        for gap in self._gaps(line):
            spans = _line_spans(line, gap)
            if self.rows.is_free(row, spans):
                self.rows.take(row, spans)
                line.row, line.gap = row, gap
                self._attach(row, line.left, line.right)
                if line.item is not None:
                    self.busy[gap] = self.busy.get(gap, 0) + 1
                self.done.add(id(line))
                return True
        return False

    def _gaps(self, line: Line) -> list[int]:
        """Gaps for a line's body: those that are wide anyway, and near the middle."""
        if line.item is None:
            return [line.left.place]
        middle = (line.left.place + line.right.place - 1) / 2
        return sorted(
            range(line.left.place, line.right.place),
            key=lambda gap: (not self.busy.get(gap), abs(gap - middle), gap),
        )

    def _attach(self, row: Row, *columns: Column) -> None:
        for column in columns:
            column.rows.add(row)

    # ------------------------------------------------------------ boxes

    def box(self, box: BoxItem) -> None:
        """A box and its links, on the lowest level that has room."""
        if id(box) not in self.done:
            found = any(self._try_box(box, level) for level in self.rows.levels())
            assert found, "a new level has room for any box"
        for link in box.links:
            if id(link) not in self.done:
                self._line(link)

    def _try_box(self, box: BoxItem, level: int) -> bool:
        gap = box.after.place if box.after is not None else -1
        wanted = {(level, sub): [_body(gap, box.item.name)] for sub in range(box.height)}
        for pin in box.pins:
            if pin.column is not None:
                edge = 4 * gap if pin.side == "left" else 4 * gap + 4
                ends = sorted((edge, 4 * pin.column.place))
                wanted[level, pin.sub].append((ends[0], ends[1], pin.net))
        if not all(self.rows.is_free(row, spans) for row, spans in wanted.items()):
            return False
        for row, spans in wanted.items():
            self.rows.take(row, spans)
        for pin in box.pins:
            if pin.column is not None:
                self._attach((level, pin.sub), pin.column)
        box.level = level
        self.busy[gap] = self.busy.get(gap, 0) + 1
        self.done.add(id(box))
        for link in box.links:
            link.prefer = self._beside(box, link)
        return True

    def _beside(self, box: BoxItem, link: Line) -> tuple[Row, ...]:
        """Rows for a link of a box: right beneath where it starts from the lowest pin."""
        below = (box.level, box.height)
        low = any(
            pin.column in (link.left, link.right) and pin.sub == box.height - 1 and pin.sub > 0
            for pin in box.pins
        )
        above = tuple((level, 0) for level in self.rows.levels() if level < box.level)
        return (below, *above) if low else above

    # ------------------------------------------------------------ what hangs

    def early_hangs(self) -> None:
        """What hangs from the path, while the room beneath it is free."""
        path = {net for trunk in self.plan.trunks for net in trunk}
        for hang in self.plan.hangs:
            if hang.column.net in path and hang.column is self.plan.main.get(hang.column.net):
                self._try_hang(hang, [row for row in _low_first(hang.column.rows) if row[0] == 0])

    def late_hangs(self) -> None:
        """Everything else that hangs: from where its column is lowest, or on a level of its own."""
        for hang in self.plan.hangs:
            if id(hang) in self.done:
                continue
            if hang.end != GROUND:
                rows = [row for row in _low_first(hang.column.rows) if row[0] == 0]
                rows.append((0, self.rows.lowest(0) + 1))
            else:
                rows = [*_low_first(hang.column.rows), *((at, 0) for at in self.rows.levels())]
            found = self._try_hang(hang, rows)
            assert found, "a new level, or the room beneath all rows, is free"

    def _try_hang(self, hang: Hang, rows: Iterable[Row]) -> bool:
        place = 4 * hang.column.place
        stub: Span = (place, place, hang.column.net)
        below: Span = (place, place, f"under {hang.column.net}")
        for row in rows:
            if self.rows.is_free(row, [stub]) and self.rows.is_free_below(row, below):
                self.rows.take(row, [stub])
                self.rows.take_below(row, below)
                hang.row = row
                self._attach(row, hang.column)
                self.done.add(id(hang))
                return True
        return False

    # ------------------------------------------------------------ names

    def flag(self, flag: Flag) -> None:
        """The terminal of a named net: at the outer end of its row where it is outermost."""
        place = flag.column.place
        gaps = [place - 1, place] if place == 0 else [place, place - 1]
        own = sorted((row for row in flag.column.rows if row[1] == 0), reverse=True)
        for row in (*own, *((level, 0) for level in self.rows.levels())):
            for gap in gaps:
                spans: list[Span] = [
                    (4 * place, 4 * place, flag.net),
                    _body(gap, f"flag {flag.net}"),
                ]
                if self.rows.is_free(row, spans):
                    self.rows.take(row, spans)
                    flag.row, flag.gap = row, gap
                    self._attach(row, flag.column)
                    self.busy[gap] = self.busy.get(gap, 0) + 1
                    return
        raise AssertionError("a new level has room for any name")

    def bare_columns(self) -> None:
        """Leave out columns that nothing hangs on."""
        self.plan.columns = [column for column in self.plan.columns if column.rows]


def _low_first(rows: Iterable[Row]) -> list[Row]:
    return sorted(rows, key=lambda row: (-row[0], -row[1]))


def _body(gap: int, owner: str) -> Span:
    return 4 * gap + 1, 4 * gap + 3, f"body of {owner}"


def _line_spans(line: Line, gap: int) -> list[Span]:
    left, right = 4 * line.left.place, 4 * line.right.place
    if line.item is None:
        return [(left, right, line.left.net)]
    return [
        (left, 4 * gap, line.left.net),
        _body(gap, line.item.name),
        (4 * gap + 4, right, line.right.net),
    ]
