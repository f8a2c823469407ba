"""Heads, bodies and ends: flat statements to nested ones."""

from __future__ import annotations

from dataclasses import dataclass, field

from acsolve.errors import Label
from acsolve.text import limits
from acsolve.text.problems import Problems
from acsolve.text.tree import (
    Block,
    BlockHead,
    Broken,
    End,
    Head,
    Nested,
    Repeat,
    RepeatHead,
    Statement,
    VariantBody,
    VariantHead,
)

_WORDS = {BlockHead: "block", RepeatHead: "repeat", VariantHead: "variant", Broken: "block"}


@dataclass(slots=True)
class _Level:
    head: Head | Broken | None
    body: list[Nested] = field(default_factory=list)


def nested(found: list[Statement], problems: Problems) -> tuple[Nested, ...]:
    """The statements of a file, each head with its body."""
    levels = [_Level(None)]
    for statement in found:
        match statement:
            case BlockHead() | RepeatHead() | VariantHead() | Broken():
                _allowed(statement, levels, problems)
                levels.append(_Level(statement))
            case End():
                _close(statement, levels, problems)
            case _:
                levels[-1].body.append(statement)
    while len(levels) > 1:
        head = levels[-1].head
        assert head is not None, "only the outermost level has no head"
        if isinstance(head, Broken):
            _finish(levels)  # its own problem is recorded
            continue
        word = _WORDS[type(head)]
        problems.add(
            "syntax.no-end",
            f"this {word} is never ended",
            head.span,
            hint=f"Write end on a line of its own after the last statement of the {word}.",
        )
        _finish(levels)
    return tuple(levels[0].body)


def _allowed(head: Head | Broken, levels: list[_Level], problems: Problems) -> None:
    """Blocks and variants stand at the outermost level; repeats may nest."""
    outer = levels[-1].head
    if isinstance(head, BlockHead | VariantHead) and outer is not None:
        word, around = _WORDS[type(head)], _WORDS[type(outer)]
        problems.add(
            "syntax.nesting",
            f"a {word} cannot stand inside a {around}",
            head.span,
            hint=f"Move it out, or end the {around} first.",
            labels=(Label(outer.span, f"the {around} starts here"),),
        )
    if len(levels) > limits.NESTING:
        problems.refuse(
            "limit.nesting",
            f"repeats stand more than {limits.NESTING} deep",
            head.span,
            hint="Use one repeat over a longer range.",
        )


def _close(end: End, levels: list[_Level], problems: Problems) -> None:
    if len(levels) == 1:
        problems.add(
            "syntax.end",
            "this end has no block, repeat or variant to close",
            end.span,
            hint="Take the line out, or write the missing head.",
        )
        return
    _finish(levels)


def _finish(levels: list[_Level]) -> None:
    level = levels.pop()
    body = tuple(level.body)
    match level.head:
        case BlockHead() as head:
            levels[-1].body.append(Block(head, body))
        case RepeatHead() as head:
            levels[-1].body.append(Repeat(head, body))
        case VariantHead() as head:
            levels[-1].body.append(VariantBody(head, body))
        case _:
            pass  # the head could not be read; its body has no meaning
