"""A schematic as strokes and labels."""

from __future__ import annotations

from math import cos, radians, sin, tan

from acsolve.report.drawing.drawing import Drawing
from acsolve.report.drawing.sheet import Text
from acsolve.report.drawing.svg import DOT, LINE, arc_point, pieces
from acsolve.report.drawing.symbols import Arc, Sign, primitives
from acsolve.report.drawing.symbols import Stroke as Shape
from acsolve.report.note.ink.strokes import (
    Close,
    Curve,
    Ink,
    Label,
    Line,
    Mark,
    Move,
    Point,
    Step,
    Stroke,
)

SCALE = 6.0  # points to a grid unit, for a drawing that fits the page
_WIDEST = 470.0  # points


def schematic_ink(drawing: Drawing) -> Ink:
    """The strokes of a drawing; a wide one is drawn smaller, so that a page holds it."""
    sheet = drawing.sheet
    left, top, right, bottom = sheet.box
    scale = min(SCALE, _WIDEST / max(right - left, 1.0))
    at = _Place(left, top, scale)
    marks: list[Mark] = []
    wires: list[Step] = []
    for wire in sheet.wires:
        wires += [Move(at(wire.start)), Line(at(wire.end))]
    if wires:
        marks.append(_thin(tuple(wires), scale))
    for symbol in sheet.symbols:
        marks += [_mark(item, at) for item in primitives(symbol)]
    marks += [_dot(at(point), DOT * scale) for point in sheet.dots]
    marks += [_label(text, at) for text in sheet.texts]
    return Ink(width=(right - left) * scale, height=(bottom - top) * scale, marks=tuple(marks))


class _Place:
    """From grid units to points."""

    def __init__(self, left: float, top: float, scale: float) -> None:
        self._left, self._top, self.scale = left, top, scale

    def __call__(self, point: Point) -> Point:
        return (point[0] - self._left) * self.scale, (point[1] - self._top) * self.scale


def _thin(steps: tuple[Step, ...], scale: float, *, filled: bool = False) -> Stroke:
    return Stroke(steps=steps, fill="ink" if filled else None, width=LINE * scale, round_ends=True)


def _mark(item: Shape | Arc | Sign, at: _Place) -> Mark:
    if isinstance(item, Sign):
        x, y = item.centre
        return Label(
            pieces=((item.text, False),),
            middle=at((x, y + 0.36 * item.size)),
            size=item.size * at.scale,
            width=item.size * at.scale,
        )
    if isinstance(item, Shape):
        first, *rest = item.points
        steps: list[Step] = [Move(at(first)), *(Line(at(point)) for point in rest)]
        if item.closed:
            steps.append(Close())
        return _thin(tuple(steps), at.scale, filled=item.filled)
    return _thin(_arc(item, at), at.scale, filled=item.filled)


def _arc(arc: Arc, at: _Place) -> tuple[Step, ...]:
    """An arc as cubic curves of a quarter turn at most, exact to 0.03 % of the radius."""
    count = max(1, -(-int(abs(arc.sweep)) // 90))
    turn = radians(arc.sweep / count)
    reach = 4 / 3 * tan(turn / 4) * arc.radius
    steps: list[Step] = [Move(at(arc_point(arc, arc.start)))]
    for part in range(count):
        start, end = (radians(arc.start) + turn * (part + k) for k in (0, 1))
        (x0, y0), (x1, y1) = (
            (arc.centre[0] + arc.radius * cos(angle), arc.centre[1] + arc.radius * sin(angle))
            for angle in (start, end)
        )
        first = (x0 - reach * sin(start), y0 + reach * cos(start))
        second = (x1 + reach * sin(end), y1 - reach * cos(end))
        steps.append(Curve(at(first), at(second), at((x1, y1))))
    return tuple(steps)


def _dot(centre: Point, radius: float) -> Stroke:
    circle = _arc(Arc(centre, radius), _Place(0, 0, 1.0))
    return Stroke(steps=(*circle, Close()), stroke=None, fill="ink")


def _label(text: Text, at: _Place) -> Label:
    left, _, right, _ = text.box
    return Label(
        pieces=tuple(pieces(text)),
        middle=at(((left + right) / 2, text.at[1])),
        size=text.size * at.scale,
        width=(right - left) * at.scale,
    )
