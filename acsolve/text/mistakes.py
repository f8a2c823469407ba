"""Usual mistakes of spelling, each with its name, the words of the trade and the remedy.

A statement that fails is looked at where it stops: the token there, its neighbours, and
the tokens the grammar could have gone on with. The first rule that knows the case speaks.
"""

from __future__ import annotations

from acsolve.text.problems import Problems
from acsolve.text.scan import Tokens
from acsolve.text.syntax import OPEN_TEXT, STRAY, Failure


def explain(start: str, statement: Tokens, failure: Failure | None, problems: Problems) -> None:
    """Record why a statement cannot be read."""
    if failure is None:
        number = next(n for n, kind in enumerate(statement.kinds) if kind in (OPEN_TEXT, STRAY))
        failure = Failure(number, frozenset())
    last = len(statement.kinds) - 1
    if last < 0:
        problems.add("syntax.statement", "nothing is written here", None)
        return
    at = min(failure.position, last)
    problems.add("syntax.statement", "this cannot be read", statement.span(at, at))
