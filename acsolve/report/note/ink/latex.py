r"""Strokes and labels inside LaTeX without any package: PDF operators and kernel boxes.

`\noteink` of the template hands operators (ISO 32000-1, 8.5) to whichever engine runs.
"""

from __future__ import annotations

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
from acsolve.report.note.tex_escape import escape_tex

WIDEST = 455.0  # points of a line of the page


def ink_latex(ink: Ink) -> str:
    """A `picture` environment as wide as the drawing, or as the line where that is less."""
    scale = min(1.0, WIDEST / ink.width)
    lines = [
        r"\setlength{\unitlength}{1bp}%",
        rf"\begin{{picture}}({short(ink.width * scale)},{short(ink.height * scale)})%",
    ]
    lines += [_mark(mark, ink.height, scale) for mark in ink.marks]
    return "\n".join([*lines, r"\end{picture}"])


def _mark(mark: Mark, high: float, scale: float) -> str:
    if isinstance(mark, Label):
        return _label(mark, high, scale)
    return rf"\put(0,0){{\noteink{{{_operators(mark, high, scale)}}}}}%"


def _rgb(role: Role) -> str:
    code = COLOURS[role].lstrip("#")
    return " ".join(short(int(code[place : place + 2], 16) / 255) for place in (0, 2, 4))


def _operators(mark: Stroke, high: float, scale: float) -> str:
    found = ["q"]
    if mark.stroke is not None:
        dashes = " ".join(short(size * scale) for size in mark.dashes)
        found.append(f"{_rgb(mark.stroke)} RG {short(mark.width * scale)} w [{dashes}] 0 d")
        found.append("1 J 1 j" if mark.round_ends else "0 J 1 j")
    if mark.fill is not None:
        found.append(f"{_rgb(mark.fill)} rg")
    for step in mark.steps:
        match step:
            case Move(to):
                found.append(f"{_at(to, high, scale)} m")
            case Line(to):
                found.append(f"{_at(to, high, scale)} l")
            case Curve(first, second, to):
                points = " ".join(_at(point, high, scale) for point in (first, second, to))
                found.append(f"{points} c")
            case _:
                found.append("h")
    both = mark.stroke is not None, mark.fill is not None
    found.append({(True, True): "B", (True, False): "S", (False, True): "f"}.get(both, "n"))
    return "\n".join([*found, "Q"])


def _at(point: tuple[float, float], high: float, scale: float) -> str:
    return f"{short(point[0] * scale)} {short((high - point[1]) * scale)}"


def _label(mark: Label, high: float, scale: float) -> str:
    x, y = mark.middle[0] * scale, (high - mark.middle[1]) * scale
    size = mark.size * scale * 0.95
    inner = ""
    for piece, lowered in mark.pieces:
        text = escape_tex(piece)
        inner += rf"\textsubscript{{{text}}}" if lowered else text
    font = rf"\fontsize{{{short(size)}bp}}{{{short(size)}bp}}\selectfont\sffamily"
    box = rf"\makebox(0,0)[b]{{\raisebox{{0pt}}[0pt][0pt]{{{font} {inner}}}}}"
    if mark.turned:
        box = rf"\noteturn{{{font} {inner}}}"
    return rf"\put({short(x)},{short(y)}){{{box}}}%"
