"""A sheet as PNG or PDF, drawn by matplotlib from the same strokes as the SVG."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

from acsolve.report.drawing.sheet import Point, Sheet, Text
from acsolve.report.drawing.svg import DOT, LINE, arc_point, pieces
from acsolve.report.drawing.symbols import Arc, Primitive, Sign, Stroke, primitives
from acsolve.report.plot import INK, rendered

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_INCH = 12.0  # grid units to an inch: 6 points each
_POINTS = 72 / _INCH
_LARGEST = 60.0  # inches
_ARC_STEPS = 12


def picture_bytes(sheet: Sheet, ending: str) -> bytes:
    """The drawing as the bytes of a png or pdf file, the same on every run."""
    return rendered(lambda: _figure(sheet), ending)


def _figure(sheet: Sheet) -> Figure:
    from matplotlib.figure import Figure

    left, top, right, bottom = sheet.box
    wide, high = right - left, bottom - top
    scale = min(1.0, _LARGEST * _INCH / max(wide, high))
    figure = Figure(figsize=(wide / _INCH * scale, high / _INCH * scale))
    axes = figure.add_axes((0, 0, 1, 1))
    axes.set_xlim(left, right)
    axes.set_ylim(bottom, top)
    axes.set_axis_off()
    points = _POINTS * scale
    _lines(axes, [(wire.start, wire.end) for wire in sheet.wires], points)
    for symbol in sheet.symbols:
        for item in primitives(symbol):
            _primitive(axes, item, points)
    for x, y in sheet.dots:
        _primitive(axes, Arc((x, y), DOT, filled=True), points)
    for text in sheet.texts:
        _text(axes, text, points)
    return figure


def _lines(axes: Axes, lines: Iterable[tuple[Point, ...]], points: float) -> None:
    from matplotlib.collections import LineCollection

    axes.add_collection(
        LineCollection(list(lines), colors=INK, linewidths=LINE * points, capstyle="round")
    )


def _primitive(axes: Axes, item: Primitive, points: float) -> None:
    if isinstance(item, Sign):
        x, y = item.centre
        axes.text(
            x, y + 0.36 * item.size, item.text, ha="center", fontsize=item.size * points, color=INK
        )
        return
    path = item.points if isinstance(item, Stroke) else _arc_points(item)
    closed = isinstance(item, Stroke) and item.closed
    if item.filled:
        axes.fill(*zip(*path, strict=True), color=INK, linewidth=0)
    else:
        _lines(axes, [(*path, path[0]) if closed else path], points)


def _arc_points(arc: Arc) -> tuple[Point, ...]:
    steps = _ARC_STEPS * max(1, round(arc.sweep / 90))
    return tuple(arc_point(arc, arc.start + arc.sweep * k / steps) for k in range(steps + 1))


def _text(axes: Axes, text: Text, points: float) -> None:
    x, y = text.at
    for piece, lowered in pieces(text):
        size = text.size * (0.72 if lowered else 1)
        axes.text(x, y + 0.22 * text.size * lowered, piece, fontsize=size * points, color=INK)
        x += _advance(piece, size * points) / points


def _advance(text: str, points: float) -> float:
    """Width of a text in the typeface of the picture, in points."""
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import text_to_path

    found: tuple[float, float, float] = text_to_path.get_text_width_height_descent(
        text, FontProperties(size=points), ismath=False
    )
    return found[0]
