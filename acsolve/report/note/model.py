"""The note as a document, whatever it will be written in: sections of blocks of words."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, TypeAlias

from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tree import Node
from acsolve.report.note.ink.strokes import Ink


@dataclass(frozen=True, slots=True)
class Math:
    """A formula inside a line of words."""

    node: Node


Side: TypeAlias = Literal["left", "right"]
Inline: TypeAlias = str | Math
Words: TypeAlias = tuple[Inline, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Paragraph:
    """Words that run on."""

    words: Words


@dataclass(frozen=True, slots=True, kw_only=True)
class Formula:
    """Lines of a displayed formula; each may break between its chunks.

    `notes`, where there are some, has words for each line: what its left side means.
    """

    lines: tuple[Chunks, ...]
    notes: tuple[Words, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Table:
    """A table; `sides` says for each column whether it stands left or right."""

    head: tuple[Words, ...]
    rows: tuple[tuple[Words, ...], ...]
    sides: tuple[Side, ...]
    caption: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Picture:
    """A drawing with what it shows, in words."""

    ink: Ink
    caption: str
    description: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Code:
    """Lines that stand as they are."""

    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Remark:
    """What must not be overlooked."""

    kind: Literal["caution", "safety", "note"]
    words: Words


Block: TypeAlias = Paragraph | Formula | Table | Picture | Code | Remark


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """A heading with its blocks; level 2 stands below the title, 3 below that."""

    title: str
    level: Literal[2, 3] = 2
    blocks: tuple[Block, ...]


@dataclass(frozen=True, slots=True, kw_only=True)
class Document:
    """The whole note. `date` is shown only where it was given."""

    title: str
    subtitle: str
    date: str | None
    sections: tuple[Section, ...]


def say(*words: Inline) -> Paragraph:
    """A paragraph."""
    return Paragraph(words=words)


def cell(*words: Inline) -> Words:
    """The words of a cell."""
    return words


def right_aligned(columns: int) -> tuple[Side, ...]:
    """The sides of a table of numbers."""
    side: Side = "right"
    return (side,) * columns
