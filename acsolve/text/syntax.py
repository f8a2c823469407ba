"""The compiled grammar, its terminals, and the syntax of a statement by its shape.

Two statements with the same sequence of terminals have the same syntax, so each sequence
is parsed once and remembered as a template whose leaves are token numbers.
"""

from __future__ import annotations

import os
import re
from dataclasses import dataclass
from functools import cache
from pathlib import Path
from typing import TYPE_CHECKING

from acsolve.text import limits

if TYPE_CHECKING:
    from lark import Lark, Token, Tree
    from lark.lexer import TerminalDef

STARTS = (
    "statement",
    "option_value",
    "option_pair",
    "option_band",
    "option_list",
    "option_level",
    "option_expression",
    "option_name",
)

#: Terminals beyond the grammar: what no terminal matches.
OPEN_TEXT = "OPEN_TEXT"
STRAY = "STRAY"
REST = "REST"  # nothing but blanks and a comment before the end


@dataclass(frozen=True, slots=True)
class Template:
    """The syntax of one statement shape: a rule, its first and last token, its parts."""

    rule: str
    first: int
    last: int
    parts: tuple[Template | int, ...]


@dataclass(frozen=True, slots=True)
class Failure:
    """Where a shape stops being a statement: token number, and what could have stood."""

    position: int
    expected: frozenset[str]


def grammar_text() -> str:
    """The grammar file: the packaged copy, or the one of a checkout."""
    packaged = Path(__file__).with_name("circuit.lark")
    checkout = Path(__file__).parents[2] / "grammar" / "circuit.lark"
    return (packaged if packaged.exists() else checkout).read_text(encoding="utf-8")


@cache
def parser() -> Lark:
    """The LALR(1) parser of the format, built on first use."""
    from lark import Lark

    return Lark(
        grammar_text(),
        parser="lalr",
        lexer="basic",
        start=list(STARTS),
        maybe_placeholders=False,
        propagate_positions=True,
        cache=_table_file() or False,
    )


def _table_file() -> str | None:
    """Where the parser's tables are kept between runs, or None where nothing can be kept.

    Building them takes 0.4 s, reading them 0.02 s (measured). They lie in the user's own
    cache folder; the library rebuilds them when the grammar or its own version changes.
    """
    try:
        folder = Path(os.environ.get("XDG_CACHE_HOME") or Path.home() / ".cache") / "acsolve"
        folder.mkdir(parents=True, exist_ok=True)
    except (OSError, RuntimeError):  # no home, or one that cannot be written
        return None
    return str(folder / "format.tables")


def _priority(terminal: TerminalDef) -> tuple[int, int, int, str]:
    """The order in which lark's basic lexer tries its terminals."""
    pattern = terminal.pattern
    return (-terminal.priority, -pattern.max_width, -len(pattern.value), terminal.name)


@cache
def keywords() -> dict[str, str]:
    """Words that are terminals of their own, by their spelling."""
    from lark.lexer import PatternStr

    return {
        terminal.pattern.value: terminal.name
        for terminal in parser().terminals
        if isinstance(terminal.pattern, PatternStr) and terminal.pattern.value.isalpha()
    }


@cache
def scanner() -> re.Pattern[str]:
    """All terminals of the grammar as one pattern with a named group each.

    The same terminals in the same order as lark's own lexer (a test compares them); one
    pattern is several times faster, which decides how long a large file takes.
    """
    words = set(keywords().values())
    skipped = {"BLANK", "COMMENT", *words}
    usual = sorted((item for item in parser().terminals if item.name not in skipped), key=_priority)
    groups = [f"(?P<{item.name}>{item.pattern.to_regexp()})" for item in usual]
    groups += [rf'(?P<{OPEN_TEXT}>"[^\n]*)', rf"(?P<{STRAY}>.)", rf"(?P<{REST}>\Z)"]
    return re.compile(rf"(?:[ \t\r\f]|#[^\n]*)*+(?:{'|'.join(groups)})")


_SHAPES: dict[tuple[str, tuple[str, ...]], Template | Failure] = {}


def syntax_of(start: str, shape: tuple[str, ...]) -> Template | Failure:
    """The syntax of a sequence of terminals, remembered."""
    key = (start, shape)
    found = _SHAPES.get(key)
    if found is None:
        if len(_SHAPES) >= limits.SHAPES:
            _SHAPES.clear()
        found = _SHAPES[key] = _parse(start, shape)
    return found


def _parse(start: str, shape: tuple[str, ...]) -> Template | Failure:
    from lark import Token
    from lark.exceptions import UnexpectedToken

    session = parser().parse_interactive("", start=start)
    token = Token("$START", "", start_pos=0, end_pos=0)
    try:
        for number, terminal in enumerate(shape):
            token = Token(terminal, terminal, start_pos=number, end_pos=number + 1)
            session.feed_token(token)
        tree: Tree[Token] = session.feed_eof(token)  # type: ignore[no-untyped-call]
    except UnexpectedToken as stop:
        at_end = stop.token.type == "$END"
        position = len(shape) if at_end else stop.token.start_pos
        assert position is not None, "every token fed carries its number"
        return Failure(position, frozenset(stop.expected))
    return _template(tree, len(shape))


def _template(tree: Tree[Token], size: int) -> Template:
    first = getattr(tree.meta, "start_pos", 0)
    last = getattr(tree.meta, "end_pos", size) - 1
    parts: list[Template | int] = []
    for child in tree.children:
        if isinstance(child, str):  # lark's tokens are strings
            assert child.start_pos is not None, "every token fed carries its number"
            parts.append(child.start_pos)
        else:
            parts.append(_template(child, size))
    return Template(str(tree.data), first, last, tuple(parts))
