"""Columns of text, aligned, and long formulas broken at their signs."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Literal

WIDTH = 80

Side = Literal["left", "right"]


def aligned(
    rows: Iterable[Sequence[str]], *, sides: Sequence[Side] = (), gap: int = 2, indent: int = 0
) -> list[str]:
    """Rows of cells as lines with the columns aligned; missing cells are blank.

    Parameters
    ----------
    rows : the cells; rows may differ in length.
    sides : alignment of each column, the left where not given.
    gap : blanks between columns.
    indent : blanks before each line.
    """
    table = [list(row) for row in rows]
    count = max((len(row) for row in table), default=0)
    widths = [max((len(row[k]) for row in table if k < len(row)), default=0) for k in range(count)]
    lines = []
    for row in table:
        cells = [
            cell.rjust(widths[k])
            if k < len(sides) and sides[k] == "right"
            else cell.ljust(widths[k])
            for k, cell in enumerate(row)
        ]
        lines.append((" " * indent + (" " * gap).join(cells)).rstrip())
    return lines


def labelled(rows: Iterable[tuple[str, str]], *, width: int = WIDTH) -> list[str]:
    """Label and text in two columns; a long text goes on under itself."""
    pairs = list(rows)
    left = max((len(label) for label, _ in pairs), default=0) + 2
    lines = []
    for label, text in pairs:
        first, *rest = wrapped(text, width - left)
        lines.append(f"{label.ljust(left)}{first}".rstrip())
        lines += [" " * left + line for line in rest]
    return lines


def wrapped(text: str, width: int) -> list[str]:
    """A text or formula in lines of at most `width`, broken at blanks, else at `*` and `/`.

    A sign stays at the head of its term; a single piece that is wider stays whole.
    """
    lines: list[str] = []
    line = ""
    for piece in _pieces(text, width):
        if line and len(line) + len(piece.rstrip()) > width:
            lines.append(line.rstrip())
            line = piece.lstrip()
        else:
            line += piece
    lines.append(line.rstrip())
    return lines


_SIGNS = ("+", "-", "=")


def _pieces(text: str, width: int) -> list[str]:
    """The text cut into pieces that stay together, blanks included."""
    pieces: list[str] = []
    words = text.split(" ")
    held = ""
    for index, word in enumerate(words):
        tail = "" if index == len(words) - 1 else " "
        if word in _SIGNS and tail:
            held += word + tail
            continue
        pieces += _cut(held + word + tail, width)
        held = ""
    return [*pieces, held] if held else pieces


def _cut(word: str, width: int) -> list[str]:
    """A piece wider than a line, cut after its operators."""
    if len(word) <= width:
        return [word]
    parts: list[str] = []
    part = ""
    for index, sign in enumerate(word):
        part += sign
        doubled = sign == "*" and word[index + 1 : index + 2] == "*"
        if sign in "*/" and not doubled:
            parts.append(part)
            part = ""
    return [*parts, part]
