"""Usual mistakes of spelling, each with its name, the words of the trade and the remedy.

A statement that fails is looked at where it stops: the token there, its neighbours, and
the tokens the grammar could have gone on with. The first rule that knows the case speaks.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from acsolve.codes import Code
from acsolve.source import Span
from acsolve.text.problems import Problems
from acsolve.text.scan import Script, Token
from acsolve.text.syntax import OPEN_TEXT, STRAY, Failure, keywords


def explain(
    start: str,
    sheet: Script,
    statement: list[Token],
    failure: Failure | None,
    problems: Problems,
) -> None:
    """Record why a statement cannot be read."""
    if failure is None:
        number = next(n for n, token in enumerate(statement) if token[0] in (OPEN_TEXT, STRAY))
        failure = Failure(number, frozenset())
    _, first, last = statement[min(failure.position, len(statement) - 1)] if statement else ("", 0, 0)
    problems.add("syntax.statement", "this cannot be read", Span(sheet.source, first, last))
