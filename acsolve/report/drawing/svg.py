"""A sheet as SVG text: strokes in the reader's own colour, so light and dark both work."""

from __future__ import annotations

from html import escape
from math import cos, radians, sin

from acsolve.report.drawing.name import split_name
from acsolve.report.drawing.sheet import Point, Sheet, Text
from acsolve.report.drawing.symbols import Arc, Primitive, Sign, Stroke, primitives

SCALE = 8  # pixels to a grid unit
LINE = 0.16  # width of every stroke, in grid units
DOT = 0.3
_SUBSCRIPT = 0.72


def svg_text(sheet: Sheet) -> str:
    """The drawing as one SVG element; the same sheet gives the same text."""
    left, top, right, bottom = sheet.box
    wide, high = right - left, bottom - top
    title = escape(sheet.title or "Schematic")
    parts = [
        f'<svg xmlns="http://www.w3.org/2000/svg" role="img" viewBox="{_n(left)} {_n(top)} '
        f'{_n(wide)} {_n(high)}" width="{_n(wide * SCALE)}" height="{_n(high * SCALE)}">',
        f"<title>{title}</title>",
        f"<desc>{escape(description(sheet))}</desc>",
        f'<g fill="none" stroke="currentColor" stroke-width="{LINE}" stroke-linecap="round" '
        'stroke-linejoin="round">',
        _path("".join(_line(wire.start, wire.end) for wire in sheet.wires)),
        *(_symbol(primitives(symbol)) for symbol in sheet.symbols),
        "</g>",
        '<g fill="currentColor">',
        *(f'<circle cx="{_n(x)}" cy="{_n(y)}" r="{DOT}"/>' for x, y in sheet.dots),
        "</g>",
        '<g fill="currentColor" font-family="sans-serif">',
        *(_text(text) for text in sheet.texts),
        "</g>",
        "</svg>",
    ]
    return "\n".join(part for part in parts if part) + "\n"


def description(sheet: Sheet) -> str:
    """What is drawn, in words, for those who do not see it."""
    names = [item.part for item in sheet.symbols if item.part and item.shape != "dots"]
    hidden = sum(len(symbol.hidden) for symbol in sheet.symbols)
    more = f", and {hidden} parts more in blocks or rows" if hidden else ""
    return f"Circuit diagram with {', '.join(names[:40])}{', …' if len(names) > 40 else ''}{more}."


def pieces(text: Text) -> list[tuple[str, bool]]:
    """A text in pieces; those that say so stand as subscripts."""
    if text.role != "name" or " " in text.text or "…" in text.text:
        return [(text.text, False)]  # words about several parts, or a name cut in its middle
    head, lowered = split_name(text.text)
    return [(head, False), (lowered, True)] if lowered else [(head, False)]


def _n(value: float) -> str:
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text == "-0" else text


def _line(start: Point, end: Point) -> str:
    return f"M{_n(start[0])} {_n(start[1])}L{_n(end[0])} {_n(end[1])}"


def _path(data: str) -> str:
    return f'<path d="{data}"/>' if data else ""


def _symbol(items: list[Primitive]) -> str:
    plain, solid, rest = "", "", ""
    for item in items:
        if isinstance(item, Sign):
            rest += _sign(item)
        elif item.filled:
            solid += _data(item)
        else:
            plain += _data(item)
    filled = f'<path d="{solid}" fill="currentColor"/>' if solid else ""
    return _path(plain) + filled + rest


def _data(item: Stroke | Arc) -> str:
    if isinstance(item, Stroke):
        points = [f"{_n(x)} {_n(y)}" for x, y in item.points]
        return f"M{'L'.join(points)}{'Z' if item.closed else ''}"
    halves = 2 if item.sweep >= 360 else 1
    step = item.sweep / halves
    data = f"M{_at(item, item.start)}"
    for half in range(halves):
        end = _at(item, item.start + step * (half + 1))
        data += f"A{_n(item.radius)} {_n(item.radius)} 0 0 1 {end}"
    return data


def _at(arc: Arc, degrees: float) -> str:
    x, y = arc_point(arc, degrees)
    return f"{_n(x)} {_n(y)}"


def arc_point(arc: Arc, degrees: float) -> Point:
    """A point of an arc."""
    angle = radians(degrees)
    return arc.centre[0] + arc.radius * cos(angle), arc.centre[1] + arc.radius * sin(angle)


def _sign(item: Sign) -> str:
    x, y = item.centre
    return (
        f'<text x="{_n(x)}" y="{_n(y + 0.36 * item.size)}" font-size="{_n(item.size)}" '
        'font-family="sans-serif" text-anchor="middle" fill="currentColor" stroke="none">'
        f"{escape(item.text)}</text>"
    )


def _text(text: Text) -> str:
    left, _, right, _ = text.box
    x, anchor = (left + right) / 2 if text.centred else left, ""
    if text.centred:
        anchor = ' text-anchor="middle"'
    inner = ""
    for piece, lowered in pieces(text):
        if lowered:
            size = f'font-size="{_n(_SUBSCRIPT * text.size)}" dy="{_n(0.22 * text.size)}"'
            inner += f"<tspan {size}>{escape(piece)}</tspan>"
        else:
            inner += escape(piece)
    return (
        f'<text x="{_n(x)}" y="{_n(text.at[1])}" font-size="{_n(text.size)}"{anchor}>{inner}</text>'
    )
