"""A drawn circuit as pure data: symbols with their pins, wires, dots and texts on a grid.

Lengths are grid units, x to the right and y downwards. Pins and the ends of wires stand on
whole or half units, so that comparing them is exact.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

Side = Literal["left", "right", "up", "down"]
Role = Literal["name", "value", "node", "note", "pin"]
Point = tuple[float, float]
Box = tuple[float, float, float, float]  # left, top, right, bottom


@dataclass(frozen=True, slots=True, kw_only=True)
class Pin:
    """Where a terminal meets the wires; `terminal` as its kind names it."""

    terminal: str
    at: Point
    side: Side


@dataclass(frozen=True, slots=True, kw_only=True)
class Symbol:
    """One shape. `part` is the part it stands for; `hidden` those that it puts away.

    `shape` names the drawing of `symbols.py`; `box` bounds all its strokes but its leads.
    """

    shape: str
    box: Box
    pins: tuple[Pin, ...]
    part: str | None = None
    hidden: tuple[str, ...] = ()
    turned: bool = False  # drawn downwards instead of to the right
    mirrored: bool = False
    marks: tuple[str, ...] = ()  # coupled coils: where a dot stands


@dataclass(frozen=True, slots=True, kw_only=True)
class Wire:
    """A straight wire, level or upright; `net` is the node it belongs to."""

    start: Point
    end: Point
    net: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Text:
    """A line of text. `at` is its baseline's start; widths are estimated on the wide side."""

    text: str
    at: Point
    size: float
    role: Role
    centred: bool = False  # keep the middle where it is, whatever the reader's typeface

    @property
    def box(self) -> Box:
        """The space that the text takes."""
        from acsolve.report.drawing.label import width

        x, y = self.at
        return x, y - 0.78 * self.size, x + width(self.text, self.size), y + 0.25 * self.size


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """A whole drawing. `condensed` says that it does not show every part on its own."""

    title: str
    symbols: tuple[Symbol, ...]
    wires: tuple[Wire, ...]
    dots: tuple[Point, ...]
    texts: tuple[Text, ...]
    condensed: bool
    box: Box

    @property
    def size(self) -> tuple[float, float]:
        """Width and height in grid units."""
        return self.box[2] - self.box[0], self.box[3] - self.box[1]
