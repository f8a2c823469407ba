"""Source text and places in it: the lowest layer, standard library only."""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass, field
from typing import NamedTuple


@dataclass(frozen=True, slots=True)
class Source:
    """A text with its name, able to turn character offsets into lines and columns."""

    name: str
    text: str = field(repr=False)
    _starts: tuple[int, ...] = field(init=False, repr=False, compare=False, default=())

    def __post_init__(self) -> None:
        starts = [0]
        position = self.text.find("\n")
        while position >= 0:
            starts.append(position + 1)
            position = self.text.find("\n", position + 1)
        object.__setattr__(self, "_starts", tuple(starts))

    def place(self, offset: int) -> tuple[int, int]:
        """Line and column of a character offset, both counted from 1."""
        offset = min(max(offset, 0), len(self.text))
        line = bisect_right(self._starts, offset)
        return line, offset - self._starts[line - 1] + 1

    def line_text(self, line: int) -> str:
        """The text of line number `line` (from 1), without its line end."""
        start = self._starts[line - 1]
        end = self._starts[line] - 1 if line < len(self._starts) else len(self.text)
        return self.text[start:end].rstrip("\r")


class Span(NamedTuple):
    """The characters `start` to `end` (exclusive) of a source.

    A named tuple, since large files make a million of them: a third of the time of a class.
    """

    source: Source
    start: int
    end: int

    def __repr__(self) -> str:
        return f"Span(start={self.start}, end={self.end})"

    @property
    def line(self) -> int:
        """Line of the first character, counted from 1."""
        return self.source.place(self.start)[0]

    @property
    def column(self) -> int:
        """Column of the first character, counted from 1, in characters."""
        return self.source.place(self.start)[1]

    @property
    def text(self) -> str:
        """The characters themselves."""
        return self.source.text[self.start : self.end]
