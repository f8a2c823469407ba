"""The text cut into logical statements: line by line, going on inside brackets."""

from __future__ import annotations

from collections.abc import Callable

from acsolve.source import Span
from acsolve.text import limits
from acsolve.text.outline import Outlines
from acsolve.text.problems import Problems
from acsolve.text.scan import Script, Token, Tokens, gathered, tokens

_OPENING = frozenset(("OPEN", "OPEN_INDEX"))
_CLOSING = {"CLOSE": "OPEN", "CLOSE_INDEX": "OPEN_INDEX"}
_GOES_ON = frozenset(("LINK", "COMMA", "PARALLEL", "PLUS"))
_STOPS_BRACKETS = frozenset(("LINK", "END"))  # signs that no bracket can hold


class Splitter:
    """Cuts a text into logical statements and hands them to `emit`.

    A bracket that is never closed would swallow the rest of the file. So where a bracket
    is open at a sign that no bracket can hold (`--`, `end`) or at the end of the text, its
    line is reported and dropped, and the lines after it are read again one by one.
    """

    def __init__(self, script: Script, problems: Problems, emit: Callable[[Tokens], None]) -> None:
        self._script = script
        self._problems = problems
        self._emit = emit
        self._pending: list[Token] = []
        self._open: list[Token] = []
        self._skipping = False

    def run(self) -> None:
        """Split the whole text."""
        text, known, emit = self._script.text, Outlines(self._script), self._emit
        start = 0
        for line in text.split("\n"):
            end = start + len(line)
            if self._pending or (found := known.match(line, start)) is None:
                self._scan(line, start, end, known)
            else:
                emit(found)
            start = end + 1
        if self._open:
            self._unclosed(at_end=True)
        if self._pending:
            self._flush()

    def _scan(self, line: str, start: int, end: int, known: Outlines) -> None:
        """Take the tokens of one line."""
        fresh = not self._pending
        for token in tokens(self._script.text, start, end):
            self._feed(token)
        self._skipping = False
        if self._open:
            self._pending.append(("NEWLINE", end, end))
        elif self._pending and self._pending[-1][0] not in _GOES_ON:
            statement = self._flush()
            if fresh:
                known.remember(line, start, statement)

    def _feed(self, token: Token) -> None:
        kind = token[0]
        if self._skipping:
            return
        if kind in _OPENING:
            self._open.append(token)
        elif kind in _CLOSING:
            self._close(token)
        elif token[2] - token[1] > limits.NAME_CHARACTERS and kind == "NAME":
            self._long_name(token)
        self._pending.append(token)
        if self._open and kind in _STOPS_BRACKETS:
            self._unclosed()
        if len(self._pending) > limits.STATEMENT_TOKENS:
            self._too_long()

    def _flush(self) -> Tokens:
        statement = gathered(self._script, self._pending)
        self._pending, self._open = [], []
        self._emit(statement)
        return statement

    def _close(self, token: Token) -> None:
        opening = self._open.pop() if self._open else None
        if opening is not None and opening[0] != _CLOSING[token[0]]:
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
            self._feed(token)

    def _take_line(self, line: list[Token], *, spoiled: bool) -> None:
        """Hand over a line as a statement of its own, or drop it."""
        if spoiled:
            self._spoil(line)
        elif line:
            self._emit(gathered(self._script, line))

    def _spoil(self, line: list[Token]) -> None:
        """Remember the names of a dropped line, so that nobody misses them later."""
        self._problems.broken_words.update(self._text(token) for token in line)

    def _long_name(self, token: Token) -> None:
        self._problems.add(
            "limit.name",
            f"this name is longer than {limits.NAME_CHARACTERS} characters",
            self._span(token),
            hint="Use a shorter name.",
        )

    def _too_long(self) -> None:
        self._problems.refuse(
            "limit.statement",
            f"this statement is longer than {limits.STATEMENT_TOKENS:,} words and signs",
            self._span(self._pending[0]),
            hint="Cut the chain at a node and go on in a new line.",
        )

    def _text(self, token: Token) -> str:
        return self._script.text[token[1] : token[2]]

    def _span(self, token: Token) -> Span:
        return Span(self._script.source, token[1], token[2])


def _lines(found: list[Token]) -> list[list[Token]]:
    """The tokens line by line, without the line ends."""
    lines: list[list[Token]] = [[]]
    for token in found:
        if token[0] == "NEWLINE":
            lines.append([])
        else:
            lines[-1].append(token)
    return lines
