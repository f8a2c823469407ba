"""Text to tokens."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from acsolve.source import Source, Span
from acsolve.text.syntax import REST, keywords, scanner

#: Code points that look like a sign of the format, one for one, so that places stay true.
LOOK_ALIKES = str.maketrans(
    {
        "\N{OHM SIGN}": "Ω",
        "\N{GREEK SMALL LETTER MU}": "µ",
        "\N{MINUS SIGN}": "-",
        "\N{NO-BREAK SPACE}": " ",
        "\N{NARROW NO-BREAK SPACE}": " ",
        "\N{FIGURE SPACE}": " ",
        "\N{THIN SPACE}": " ",
        "\N{PARALLEL TO}": "∥",
        "\N{DOUBLE VERTICAL LINE}": "∥",
        "\N{ZERO WIDTH NO-BREAK SPACE}": " ",
    }
)


@dataclass(frozen=True, slots=True)
class Script:
    """A source, and its text with look-alike signs replaced one for one."""

    source: Source
    text: str


def script(source: Source) -> Script:
    """The source, ready to be read."""
    ascii_only = source.text.isascii()
    return Script(source, source.text if ascii_only else source.text.translate(LOOK_ALIKES))


@dataclass(slots=True)
class Tokens:
    """The tokens of one statement: terminal, first character, character after the last.

    Places count from `base`, so that lines of one outline can share them.
    """

    script: Script
    base: int
    kinds: tuple[str, ...]
    starts: tuple[int, ...]
    ends: tuple[int, ...]

    def text(self, number: int) -> str:
        """The text of a token, look-alike signs replaced."""
        base = self.base
        return self.script.text[base + self.starts[number] : base + self.ends[number]]

    def span(self, first: int, last: int) -> Span:
        """The characters from the first token to the last."""
        base = self.base
        return Span(self.script.source, base + self.starts[first], base + self.ends[last])


Token = tuple[str, int, int]


def tokens(text: str, start: int, end: int) -> Iterator[Token]:
    """The tokens in a stretch of text, line ends included, blanks and comments left out."""
    words = keywords()
    for match in scanner().finditer(text, start, end):
        kind = match.lastgroup
        assert kind is not None, "every alternative of the scanner is a named group"
        if kind == REST:
            return
        first, last = match.span(kind)
        if kind == "NAME":
            kind = words.get(text[first:last], kind)
        yield kind, first, last


def gathered(script: Script, found: list[Token]) -> Tokens:
    """Loose tokens as one statement, line ends left out."""
    kept = [token for token in found if token[0] != "NEWLINE"]
    kinds, starts, ends = zip(*kept, strict=True) if kept else ((), (), ())
    return Tokens(script, 0, kinds, starts, ends)
