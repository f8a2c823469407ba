"""Strokes and labels as SVG; colours are the page's own variables, with a fallback each."""

from __future__ import annotations

from html import escape

from acsolve.report.note.ink.strokes import (
    COLOURS,
    Curve,
    Ink,
    Label,
    Line,
    Mark,
    Move,
    Role,
    Stroke,
    short,
)


def ink_svg(ink: Ink, description: str, *, fixed: bool = False) -> str:
    """One SVG element; `fixed` gives plain colours on white paper, for use outside a page."""
    wide, high = short(ink.width), short(ink.height)
    paper = f'<rect width="{wide}" height="{high}" fill="#ffffff"/>' if fixed else ""
    return (
        f'<svg xmlns="http://www.w3.org/2000/svg" role="img" viewBox="0 0 {wide} {high}" '
        f'width="{wide}pt" height="{high}pt"><title>{escape(description)}</title>{paper}'
        f"{''.join(_mark(mark, fixed) for mark in ink.marks)}</svg>"
    )


def _colour(role: Role | None, fixed: bool) -> str:
    if role is None:
        return "none"
    return COLOURS[role] if fixed else f"var(--{role},{COLOURS[role]})"


def _mark(mark: Mark, fixed: bool) -> str:
    return _label(mark, fixed) if isinstance(mark, Label) else _stroke(mark, fixed)


def _stroke(mark: Stroke, fixed: bool) -> str:
    fill, stroke = _colour(mark.fill, fixed), _colour(mark.stroke, fixed)
    style = f"fill:{fill};stroke:{stroke}"
    if mark.stroke is not None:
        style += f";stroke-width:{short(mark.width)}"
    if mark.dashes:
        style += f";stroke-dasharray:{' '.join(map(short, mark.dashes))}"
    if mark.opacity < 1:
        style += f";opacity:{short(mark.opacity)}"
    if mark.round_ends:
        style += ";stroke-linecap:round;stroke-linejoin:round"
    return f'<path d="{_path(mark)}" style="{style}"/>'


def _path(mark: Stroke) -> str:
    found = []
    for step in mark.steps:
        match step:
            case Move(to):
                found.append(f"M{_at(to)}")
            case Line(to):
                found.append(f"L{_at(to)}")
            case Curve(first, second, to):
                found.append(f"C{_at(first)} {_at(second)} {_at(to)}")
            case _:
                found.append("Z")
    return "".join(found)


def _at(point: tuple[float, float]) -> str:
    return f"{short(point[0])} {short(point[1])}"


def _label(mark: Label, fixed: bool) -> str:
    x, y = (short(value) for value in mark.middle)
    turn = f' transform="rotate(-90 {x} {y})"' if mark.turned else ""
    inner = ""
    for piece, lowered in mark.pieces:
        if lowered:
            down = f'font-size="{short(0.72 * mark.size)}" dy="{short(0.22 * mark.size)}"'
            inner += f"<tspan {down}>{escape(piece)}</tspan>"
        else:
            inner += escape(piece)
    return (
        f'<text x="{x}" y="{y}" font-size="{short(mark.size)}" text-anchor="middle" '
        f'font-family="DejaVu Sans,Liberation Sans,Arial,sans-serif" '
        f'style="fill:{_colour(mark.role, fixed)}"{turn}>{inner}</text>'
    )
