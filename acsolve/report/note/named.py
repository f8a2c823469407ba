"""Numbers for the names that wide quotients get, each name with one meaning in a note."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import fields, is_dataclass, replace
from itertools import count
from typing import Any, TypeAlias

from acsolve.report.drawing.name import split_name
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tree import Node, Ratio, StandIn, Symbol
from acsolve.report.note.model import Code, Formula, Picture, Section, Words

Names: TypeAlias = dict[tuple[str, Node], str]  # letter and what it stands for -> name


def numbered_names(sections: Sequence[Section]) -> tuple[Section, ...]:
    """The sections with N₁, D₁, N₂, … for the stand-ins in their order.

    Tops, or bottoms, that are the same share a name, as those of one network's answers often
    are; what the circuit itself calls so is left out.
    """
    taken = {split_name(item.name) for item in _nodes(sections) if isinstance(item, Symbol)}
    free = (
        str(number) for number in count(1) if not {("N", str(number)), ("D", str(number))} & taken
    )
    numbers: dict[Ratio, str] = {}
    names: Names = {}
    for item in _nodes(sections):
        if isinstance(item, StandIn) and _meaning(item) not in names:
            if item.whole not in numbers:
                numbers[item.whole] = next(free)
            names[_meaning(item)] = f"{item.letter}_{numbers[item.whole]}"
    return tuple(
        replace(
            section,
            blocks=tuple(
                _named(block, names) if isinstance(block, Formula) else block
                for block in section.blocks
            ),
        )
        for section in sections
    )


def _meaning(item: StandIn) -> tuple[str, Node]:
    return item.letter, item.whole.top if item.letter == "N" else item.whole.bottom


def _named(block: Formula, names: Names) -> Formula:
    """A displayed formula with its names; what two of its lines call the same stands once."""
    notes = block.notes or ((),) * len(block.lines)
    kept: dict[Chunks, Words] = {}
    for line, words in zip(block.lines, notes, strict=True):
        kept.setdefault(_with_names(line, names), words)
    return replace(block, lines=tuple(kept), notes=tuple(kept.values()) if block.notes else ())


def _nodes(value: Any) -> Iterator[Node]:
    """Every part of every formula, in order; what a stand-in stands for is no part of it."""
    if isinstance(value, Symbol | StandIn):
        yield value
    elif isinstance(value, tuple | list):
        for item in value:
            yield from _nodes(item)
    elif is_dataclass(value) and not isinstance(value, Picture | Code):
        for field in fields(value):
            yield from _nodes(getattr(value, field.name))


def _with_names(value: Any, names: Names) -> Any:
    if isinstance(value, StandIn):
        return Symbol(names[_meaning(value)])
    if isinstance(value, tuple):
        return tuple(_with_names(item, names) for item in value)
    if is_dataclass(value) and not isinstance(value, type):
        held = {field.name: getattr(value, field.name) for field in fields(value)}
        return replace(value, **{name: _with_names(item, names) for name, item in held.items()})
    return value
