"""A picture as strokes and labels: what every page format can draw.

Lengths are points (1/72 inch), x to the right, y downwards.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, TypeAlias

Point: TypeAlias = tuple[float, float]
#: What a stroke or label is drawn in: the reader's ink, a fainter one, the paper, a curve.
Role: TypeAlias = Literal[
    "ink",
    "soft",
    "pale",
    "band",
    "paper",
    "curve1",
    "curve2",
    "curve3",
    "curve4",
    "curve5",
    "curve6",
]


@dataclass(frozen=True, slots=True)
class Move:
    """Start a new line."""

    to: Point


@dataclass(frozen=True, slots=True)
class Line:
    """Straight on."""

    to: Point


@dataclass(frozen=True, slots=True)
class Curve:
    """A cubic curve with its two control points."""

    first: Point
    second: Point
    to: Point


@dataclass(frozen=True, slots=True)
class Close:
    """Back to where the line started."""


Step: TypeAlias = Move | Line | Curve | Close


@dataclass(frozen=True, slots=True, kw_only=True)
class Stroke:
    """A path, drawn in `stroke`, filled in `fill`, or both."""

    steps: tuple[Step, ...]
    stroke: Role | None = "ink"
    fill: Role | None = None
    width: float = 1.0
    dashes: tuple[float, ...] = ()
    opacity: float = 1.0
    round_ends: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Label:
    """A line of text around the middle of its baseline; `lowered` pieces are subscripts.

    `turned` labels read upwards.
    """

    pieces: tuple[tuple[str, bool], ...]
    middle: Point
    size: float
    width: float
    role: Role = "ink"
    turned: bool = False


Mark: TypeAlias = Stroke | Label


@dataclass(frozen=True, slots=True, kw_only=True)
class Ink:
    """A picture of a given size."""

    width: float
    height: float
    marks: tuple[Mark, ...]


#: Role -> colour on white paper. Hues told apart with any colour vision, falling lightness.
COLOURS: dict[Role, str] = {
    "ink": "#1a1a1a",
    "soft": "#555555",
    "pale": "#c9c9c9",
    "band": "#dcdcdc",
    "paper": "#ffffff",
    "curve1": "#0072b2",
    "curve2": "#d55e00",
    "curve3": "#007f5f",
    "curve4": "#8a4f7d",
    "curve5": "#4d4d4d",
    "curve6": "#b8860b",
}


def short(value: float) -> str:
    """A length with two digits behind the point."""
    text = f"{value:.2f}".rstrip("0").rstrip(".")
    return "0" if text in ("-0", "") else text
