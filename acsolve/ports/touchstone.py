"""Touchstone files read: versions 1.1 and 2.0, any number of ports.

Every problem is told with file, line and column. Frequencies rise strictly; a two-port's noise
data behind the network data are left out with a remark.
"""

from __future__ import annotations

import os
import re
from collections.abc import Collection
from contextlib import suppress
from dataclasses import dataclass, replace
from pathlib import Path
from typing import NoReturn

import numpy as np

from acsolve.codes import Code
from acsolve.errors import Diagnostic, TextError
from acsolve.ports.data import PortData
from acsolve.ports.layout import (
    FORMATS,
    MOST_PORTS,
    SETS_IN_FILES,
    UNITS,
    NumberFormat,
    Shape,
    complex_of,
    places,
    scale,
)
from acsolve.ports.sets import SetName
from acsolve.source import Source, Span

_MOST_BYTES = 64 * 2**20
_NUMBER = re.compile(r"[+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?", re.ASCII)
_WORD = re.compile(r"\S+")
_NUMERIC = re.compile(r"[0-9eE+\-.\s]+")
_NOISE_NUMBERS = 5  # frequency, noise figure, reflection (two), resistance


@dataclass(frozen=True, slots=True)
class Word:
    """A word of a file with its place."""

    text: str
    span: Span


@dataclass(frozen=True, slots=True)
class Line:
    """A line without its comment; its words get their places when they are asked for."""

    source: Source
    start: int
    text: str

    @property
    def words(self) -> tuple[Word, ...]:
        """The words, at least one."""
        return tuple(
            Word(item[0], Span(self.source, self.start + item.start(), self.start + item.end()))
            for item in _WORD.finditer(self.text)
        )

    @property
    def first(self) -> Word:
        """The first word."""
        return self.words[0]

    def numbers(self) -> list[float]:
        """All words as numbers; one that is out of range is infinite."""
        if _NUMERIC.fullmatch(self.text):
            with suppress(ValueError):
                return list(map(float, self.text.split()))
        return [number(word) for word in self.words]


@dataclass(frozen=True, slots=True)
class Record:
    """The numbers of one frequency, and the lines that they stand on."""

    values: list[float]
    lines: list[Line]

    def word(self, place: int) -> Word:
        """The word behind a number."""
        return [word for line in self.lines for word in line.words][place]


@dataclass(frozen=True, slots=True, kw_only=True)
class Manner:
    """How the numbers of a file are meant: the option line, and what keywords add."""

    unit: float = 1e9
    name: SetName = "s"
    form: NumberFormat = "MA"
    resistance: float = 50.0
    ports: int = 0
    shape: Shape = "full"
    by_columns: bool = True
    normalised: bool = True


def read_touchstone(path: str | os.PathLike[str]) -> PortData:
    """Read a file; the ending (`.s2p`) says the number of ports before version 2.0.

    Raises
    ------
    TextError
        [file.missing], [file.unreadable], [file.too-large], and as `parse_touchstone`.
    """
    name = os.fspath(path)
    try:
        with Path(path).open("rb") as stream:
            content = stream.read(_MOST_BYTES + 1)
    except FileNotFoundError:
        fail("file.missing", f"there is no file {name}", "Check the name and the folder.")
    except (OSError, ValueError) as stop:
        reason = stop.strerror if isinstance(stop, OSError) else str(stop)
        fail("file.unreadable", f"{name} cannot be read: {reason}", "Name a readable file.")
    if len(content) > _MOST_BYTES:
        fail("file.too-large", f"{name} has more than 64 MiB", "Keep fewer frequencies.")
    return parse_touchstone(content.decode("utf-8", errors="replace"), name=name)


def parse_touchstone(text: str, *, name: str = "data.s2p", ports: int | None = None) -> PortData:
    """Read the text of a file.

    Parameters
    ----------
    text : the content.
    name : what messages call it; its ending gives the number of ports.
    ports : the number of ports, where the name does not tell.

    Raises
    ------
    TextError
        [touchstone.option], [touchstone.number], [touchstone.record], [touchstone.order],
        [touchstone.keyword], [touchstone.ports].
    """
    source = Source(name, text.replace("\r\n", "\n").replace("\r", "\n"))
    lines = _lines(source)
    if not lines:
        fail("touchstone.record", f"{name} holds no numbers", "Give an option line and data.")
    count = ports or _ports_by_name(name)
    if lines[0].first.text.startswith("["):
        from acsolve.ports.keywords import parse_version_two

        return parse_version_two(lines, count)
    return _parse_version_one(lines, name, count)


def _lines(source: Source) -> list[Line]:
    """The lines that hold something besides comments."""
    found, start = [], 0
    for raw in source.text.split("\n"):
        kept = raw.partition("!")[0]
        if kept and not kept.isspace():
            found.append(Line(source, start, kept))
        start += len(raw) + 1
    return found


def _ports_by_name(name: str) -> int | None:
    ending = re.search(r"\.s(\d{1,3})p$", name, re.IGNORECASE | re.ASCII)
    return int(ending[1]) if ending and int(ending[1]) else None


def _parse_version_one(lines: list[Line], name: str, ports: int | None) -> PortData:
    if ports is None:
        fail(
            "touchstone.ports",
            f"the name {name} does not say how many ports the data have",
            "Give the file an ending such as .s2p, or say ports=2.",
        )
    if ports > MOST_PORTS:
        fail("touchstone.ports", f"{ports} ports are too many", f"At most {MOST_PORTS} are read.")
    manner, data, remarks = None, [], []
    for line in lines:
        word = line.first if line.text.lstrip()[0] in "#[" or manner is None else None
        if word is None:
            data.append(line)
        elif word.text.startswith("#"):
            if manner is None:
                manner = option_line(line)
            else:
                remarks.append(f"a second option line (line {word.span.line}) is not used")
        elif word.text.startswith("["):
            fail(
                "touchstone.keyword",
                "keywords belong to version 2.0",
                "Begin the file with [Version] 2.0, or leave the keyword out.",
                word,
            )
        else:
            fail("touchstone.option", "numbers stand before the option line", _OPTION, word)
    if manner is None:
        fail("touchstone.option", f"{name} has no option line", _OPTION)
    manner = replace(manner, ports=ports, by_columns=ports == 2)
    reference = np.full(ports, manner.resistance)
    return assembled(data, manner, reference, tuple(remarks), noise=ports == 2, name=name)


_OPTION = "Write, say, # Hz S RI R 50 above the numbers."


def option_line(line: Line) -> Manner:
    """The option line: unit, parameters, number format and R with its resistance."""
    words = [*line.words]
    head = words.pop(0)
    if head.text != "#":
        words.insert(
            0, Word(head.text[1:], Span(head.span.source, head.span.start + 1, head.span.end))
        )
    manner, seen = Manner(), set()
    while words:
        word = words.pop(0)
        low = word.text.lower()
        what = next(
            (kind for kind, known in _OPTIONS.items() if low in known), "R" if low == "r" else None
        )
        if what is None:
            fail("touchstone.option", f"{word.text} is no word of an option line", _OPTION, word)
        if what in seen:
            fail("touchstone.option", f"the option line says its {what} twice", "Keep one.", word)
        seen.add(what)
        if what == "unit":
            manner = replace(manner, unit=UNITS[low])
        elif what == "parameters":
            manner = replace(manner, name=SETS_IN_FILES[low])
        elif what == "number format":
            manner = replace(manner, form=FORMATS[low])
        elif not words:
            fail("touchstone.option", "R stands without its resistance", "Write R 50.", word)
        else:
            manner = replace(manner, resistance=resistance(words.pop(0)))
    return manner


_OPTIONS: dict[str, Collection[str]] = {
    "unit": UNITS,
    "parameters": SETS_IN_FILES,
    "number format": FORMATS,
}


def resistance(word: Word) -> float:
    """A reference resistance above zero."""
    found = number(word)
    if found <= 0:
        fail(
            "touchstone.option",
            f"the reference resistance {word.text} is not above zero",
            "Give a positive resistance in ohm.",
            word,
        )
    return found


def number(word: Word) -> float:
    """A finite number."""
    if not _NUMBER.fullmatch(word.text):
        fail(
            "touchstone.number",
            f"{_short(word.text)} is no number",
            "Write numbers such as 1.5 or 2e-9; a comment starts with !.",
            word,
        )
    found = float(word.text)
    if not np.isfinite(found):
        fail("touchstone.number", f"{_short(word.text)} is too large", "Check the unit.", word)
    return found


def _short(text: str) -> str:
    return text if len(text) <= 40 else f"{text[:39]}…"


def assembled(
    lines: list[Line],
    manner: Manner,
    reference: np.ndarray,
    remarks: tuple[str, ...],
    *,
    noise: bool,
    name: str,
) -> PortData:
    """The data of a network from the lines that hold its numbers.

    `noise` says whether noise data may follow without a keyword, where frequencies fall.
    """
    spots = places(manner.ports, manner.shape, by_columns=manner.by_columns)
    records, rest = _records(lines, 1 + 2 * len(spots), noise=noise)
    if not records:
        fail("touchstone.record", f"{name} holds no numbers", "Give at least one frequency.")
    if rest:
        remarks = (*remarks, f"noise data at {rest} frequencies are not used")
    table = np.array([record.values for record in records])
    for row, column in np.argwhere(~np.isfinite(table))[:1]:
        number(records[row].word(column))  # refuses it
    values = complex_of(table[:, 1::2], table[:, 2::2], manner.form)
    for row, column in np.argwhere(~np.isfinite(values))[:1]:
        word = records[row].word(1 + 2 * column)
        fail("touchstone.number", "this parameter is out of range", "Check the format.", word)
    matrix = np.zeros((len(table), manner.ports, manner.ports), dtype=complex)
    for place, (row, column) in enumerate(spots):
        matrix[:, row, column] = values[:, place]
        if manner.shape != "full":
            matrix[:, column, row] = values[:, place]
    if manner.normalised:
        matrix = matrix * scale(manner.name, manner.resistance)
    _refuse_unordered(table[:, 0] * manner.unit, records)
    return PortData(table[:, 0] * manner.unit, matrix, manner.name, reference, remarks)


def _records(lines: list[Line], size: int, *, noise: bool) -> tuple[list[Record], int]:
    """The numbers of each frequency, and how many frequencies of noise data follow.

    A record starts and ends with a line, and may stand on several.
    """
    records: list[Record] = []
    here = Record([], [])
    for place, line in enumerate(lines):
        numbers = line.numbers()
        if noise and records and not here.values and numbers[0] <= records[-1].values[0]:
            return records, _noise(lines[place:])
        here.values.extend(numbers)
        here.lines.append(line)
        if len(here.values) > size:
            fail(
                "touchstone.record",
                f"this line goes on after the {size} numbers of its frequency",
                "Check the number of ports, and begin each frequency on a line of its own.",
                here.word(size),
            )
        if len(here.values) == size:
            records.append(here)
            here = Record([], [])
    if here.values:
        fail(
            "touchstone.record",
            f"the last frequency has {len(here.values)} of its {size} numbers",
            "Check the number of ports, and that the file is whole.",
            here.word(0),
        )
    return records, 0


def _noise(lines: list[Line]) -> int:
    """The number of frequencies of noise data: five numbers each, rising."""
    last = -1.0
    for line in lines:
        values = line.numbers()
        if len(values) != _NOISE_NUMBERS or values[0] <= last:
            fail(
                "touchstone.order",
                "the frequency does not rise, and what follows is no noise data",
                "Sort the frequencies; noise data have five numbers a line.",
                line.first,
            )
        last = values[0]
    return len(lines)


def _refuse_unordered(hertz: np.ndarray, records: list[Record]) -> None:
    if hertz[0] < 0:
        fail("touchstone.order", "a frequency is negative", "Start at 0.", records[0].word(0))
    for place in np.flatnonzero(np.diff(hertz) <= 0)[:1]:
        fail(
            "touchstone.order",
            "the frequency does not rise",
            "Give each frequency once, in rising order.",
            records[int(place) + 1].word(0),
        )


def fail(code: Code, message: str, hint: str, word: Word | None = None) -> NoReturn:
    """Raise the error of one problem at a word."""
    span = None if word is None else word.span
    raise TextError(Diagnostic(code=code, message=message, hint=hint, span=span)) from None
