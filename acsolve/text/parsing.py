"""Text to syntax trees, statement by statement, reporting every statement that fails."""

from __future__ import annotations

from contextlib import suppress
from typing import Any

from acsolve.source import Source
from acsolve.text import limits
from acsolve.text.grow import Recipe, recipe
from acsolve.text.mistakes import explain
from acsolve.text.problems import Problems, RefusedError
from acsolve.text.scan import Tokens, gathered, script, tokens
from acsolve.text.split import Splitter
from acsolve.text.syntax import OPEN_TEXT, STRAY, Failure, syntax_of
from acsolve.text.tree import Broken, Statement

_HEADS = frozenset(("BLOCK", "REPEAT", "VARIANT"))
_BRACKETS = {"OPEN": 1, "OPEN_INDEX": 1, "CLOSE": -1, "CLOSE_INDEX": -1}


def statements(source: Source, problems: Problems) -> list[Statement]:
    """Every statement of the text that can be read; the others become problems."""
    found: list[Statement] = []
    recipes: dict[tuple[str, ...], Recipe] = {}

    def take(statement: Tokens) -> None:
        ready = recipes.get(statement.kinds)
        if ready is None:
            ready = _recipe("statement", statement, problems)
            if ready is None:
                if statement.kinds[0] in _HEADS and "LINK" not in statement.kinds:
                    found.append(Broken(statement.span(0, 0)))
                return
            recipes[statement.kinds] = ready
        found.append(ready(statement))

    with suppress(RefusedError):
        Splitter(script(source), problems, take).run()
    return found


def option(start: str, source: Source, problems: Problems) -> Any:
    """The syntax tree of a text that stands alone, such as a value on the command line."""
    sheet = script(source)
    statement = gathered(sheet, list(tokens(sheet.text, 0, len(sheet.text))))
    ready = _recipe(start, statement, problems)
    return None if ready is None else ready(statement)


def _recipe(start: str, statement: Tokens, problems: Problems) -> Recipe | None:
    """How to make the syntax tree of a statement, or None once its problem is recorded."""
    if STRAY in statement.kinds or OPEN_TEXT in statement.kinds:
        explain(start, statement, None, problems)
        return None
    if not _bounded(statement, problems):
        return None
    syntax = syntax_of(start, statement.kinds)
    if isinstance(syntax, Failure):
        explain(start, statement, syntax, problems)
        return None
    return recipe(syntax)


def _bounded(statement: Tokens, problems: Problems) -> bool:
    """Whether brackets nest within their limit, so that no tree is too deep to walk."""
    kinds = statement.kinds
    if kinds.count("OPEN") + kinds.count("OPEN_INDEX") <= limits.BRACKETS:
        return True
    depth = 0
    for number, kind in enumerate(kinds):
        depth += _BRACKETS.get(kind, 0)
        if depth > limits.BRACKETS:
            problems.add(
                "limit.brackets",
                f"brackets stand {limits.BRACKETS + 1} deep here; the limit is {limits.BRACKETS}",
                statement.span(number, number),
                hint="Name a part of the expression with let.",
            )
            return False
    return True
