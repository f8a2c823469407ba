"""Text to tokens, and tokens to logical statements."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass

from acsolve.source import Source, Span
from acsolve.text import limits
from acsolve.text.problems import Problems
from acsolve.text.syntax import OPEN_TEXT, STRAY, keywords, scanner

#: A token: terminal name, first character, character after the last.
Token = tuple[str, int, int]

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


_OPENING = frozenset(("OPEN", "OPEN_INDEX"))
_CLOSING = {"CLOSE": "OPEN", "CLOSE_INDEX": "OPEN_INDEX"}
_GOES_ON = frozenset(("LINK", "COMMA", "PARALLEL", "PLUS"))
_STOPS_BRACKETS = frozenset(("LINK", "END"))  # signs that no bracket can hold


def tokens(text: str) -> Iterator[Token]:
    """The tokens of a text, line ends included, blanks and comments left out."""
    words = keywords()
    for match in scanner().finditer(text):
        kind = match.lastgroup
        assert kind is not None, "every alternative of the scanner is a named group"
        start, end = match.span(kind)
        if kind == "NAME":
            kind = words.get(text[start:end], kind)
        yield kind, start, end


class Splitter:
    """Cuts a stream of tokens into logical statements and hands them to `emit`.

    A bracket that is never closed would swallow the rest of the file. So where a bracket
    is open at a sign that no bracket can hold (`--`, `end`) or at the end of the text, its
    line is reported and dropped, and the lines after it are read again one by one.
    """

    def __init__(
        self, script: Script, problems: Problems, emit: Callable[[list[Token]], None]
    ) -> None:
        self._script = script
        self._problems = problems
        self._emit = emit
        self._pending: list[Token] = []
        self._open: list[Token] = []
        self._skipping = False

    def run(self) -> None:
        """Split the whole text."""
        for token in tokens(self._script.text):
            self.feed(token)
        self.finish()

    def feed(self, token: Token) -> None:
        """Take one token."""
        kind, pending = token[0], self._pending
        if kind == "NEWLINE":
            self._skipping = False
            if self._open:
                pending.append(token)
            elif pending and pending[-1][0] not in _GOES_ON:
                self._flush()
            return
        if self._skipping:
            return
        if kind in _OPENING:
            self._open.append(token)
        elif kind in _CLOSING:
            if self._open:
                self._close(token)
        elif self._open and kind in _STOPS_BRACKETS:
            pending.append(token)
            self._unclosed()
            return
        pending.append(token)
        if len(pending) > limits.STATEMENT_TOKENS:
            self._too_long()

    def finish(self) -> None:
        """Take the end of the text."""
        if self._open:
            self._unclosed(at_end=True)
        if self._pending:
            self._flush()

    def _flush(self) -> None:
        statement = [token for token in self._pending if token[0] != "NEWLINE"]
        self._pending, self._open = [], []
        if statement:
            self._emit(statement)

    def _close(self, token: Token) -> None:
        opening = self._open.pop()
        if opening[0] != _CLOSING[token[0]]:
            wrong, right = self._text(token), ")" if opening[0] == "OPEN" else "]"
            self._problems.add(
                "syntax.bracket",
                f"{wrong} closes a bracket that was opened with {self._text(opening)}",
                self._span(token),
                hint=f"Write {right} here.",
            )

    def _unclosed(self, *, at_end: bool = False) -> None:
        """Report open brackets, drop their lines, read the other lines one by one."""
        for opening in self._open:
            sign = self._text(opening)
            self._problems.add(
                "syntax.bracket",
                f"this {sign} is never closed",
                self._span(opening),
                hint=f"Close it with {')' if sign == '(' else ']'}.",
            )
        marked = set(self._open)
        lines = _lines(self._pending)
        self._pending, self._open = [], []
        current = [] if at_end else lines.pop()
        for line in lines:
            self._take_line(line, spoiled=not marked.isdisjoint(line))
        if not marked.isdisjoint(current):
            self._spoil(current)
            self._skipping = True
            return
        for token in current:
            self.feed(token)

    def _take_line(self, line: list[Token], *, spoiled: bool) -> None:
        """Hand over a line as a statement of its own, or drop it."""
        if spoiled:
            self._spoil(line)
        elif line:
            self._emit(line)

    def _spoil(self, line: list[Token]) -> None:
        """Remember the names of a dropped line, so that nobody misses them later."""
        self._problems.broken_words.update(self._text(token) for token in line)

    def _too_long(self) -> None:
        first = self._pending[0]
        self._problems.refuse(
            "limit.statement",
            f"this statement is longer than {limits.STATEMENT_TOKENS:,} words and signs",
            self._span(first),
            hint="Cut the chain at a node and go on in a new line.",
        )

    def _text(self, token: Token) -> str:
        return self._script.text[token[1] : token[2]]

    def _span(self, token: Token) -> Span:
        return Span(self._script.source, token[1], token[2])


def _lines(tokens_: list[Token]) -> list[list[Token]]:
    """The tokens line by line, without the line ends."""
    lines: list[list[Token]] = [[]]
    for token in tokens_:
        if token[0] == "NEWLINE":
            lines.append([])
        else:
            lines[-1].append(token)
    return lines

