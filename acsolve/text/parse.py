"""Text to syntax trees, statement by statement, reporting every statement that fails."""

from __future__ import annotations

from contextlib import suppress
from typing import Any

from acsolve.source import Source, Span
from acsolve.text import limits
from acsolve.text.grow import grow
from acsolve.text.mistakes import explain
from acsolve.text.problems import Problems, RefusedError
from acsolve.text.scan import Script, Splitter, Token, script, tokens
from acsolve.text.syntax import OPEN_TEXT, STRAY, Failure, syntax_of
from acsolve.text.tree import Statement

_BRACKETS = {"OPEN": 1, "OPEN_INDEX": 1, "CLOSE": -1, "CLOSE_INDEX": -1}


def statements(source: Source, problems: Problems) -> list[Statement]:
    """Every statement of the text that can be read; the others become problems."""
    found: list[Statement] = []
    sheet = script(source)

    def take(statement: list[Token]) -> None:
        node = syntax_tree("statement", sheet, statement, problems)
        if node is not None:
            found.append(node)

    with suppress(RefusedError):
        Splitter(sheet, problems, take).run()
    return found


def option(start: str, source: Source, problems: Problems) -> Any:
    """The syntax tree of a text that stands alone, such as a value on the command line."""
    sheet = script(source)
    found = [token for token in tokens(sheet.text) if token[0] != "NEWLINE"]
    return syntax_tree(start, sheet, found, problems)


def syntax_tree(start: str, sheet: Script, statement: list[Token], problems: Problems) -> Any:
    """The syntax tree of one statement, or None once its problem is recorded."""
    shape = tuple([token[0] for token in statement])
    syntax = None
    if STRAY not in shape and OPEN_TEXT not in shape:
        if not _bounded(sheet, statement, shape, problems):
            return None
        syntax = syntax_of(start, shape)
        if not isinstance(syntax, Failure):
            return grow(syntax, sheet, statement)
    explain(start, sheet, statement, syntax, problems)
    return None


def _bounded(
    sheet: Script, statement: list[Token], shape: tuple[str, ...], problems: Problems
) -> bool:
    """Whether brackets nest within their limit, so that no tree is too deep to walk."""
    if shape.count("OPEN") + shape.count("OPEN_INDEX") <= limits.BRACKETS:
        return True
    depth = 0
    for kind, start, end in statement:
        depth += _BRACKETS.get(kind, 0)
        if depth > limits.BRACKETS:
            problems.add(
                "limit.brackets",
                f"brackets stand {limits.BRACKETS + 1} deep here; the limit is {limits.BRACKETS}",
                Span(sheet.source, start, end),
                hint="Name a part of the expression with let.",
            )
            return False
    return True
