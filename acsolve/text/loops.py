"""What can be known of blocks before any is written out: loops, and size."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from typing import NamedTuple, NoReturn

from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text import limits
from acsolve.text.book import Book
from acsolve.text.tree import (
    Arm,
    Chain,
    Declare,
    Fitted,
    Formula,
    KindText,
    Let,
    Literal,
    Nested,
    Placed,
    Reference,
    Repeat,
    RepeatHead,
)
from acsolve.text.words import listed

Uses = Mapping[str, Mapping[str, Span]]
Numbers = Mapping[str, int]


def _statements(body: Iterable[Nested], known: Numbers) -> Iterator[tuple[Nested, int]]:
    """Every statement of a body, with how often repeats around it turn, where known."""
    stack = [(statement, 1) for statement in body]
    while stack:
        statement, times = stack.pop()
        yield statement, times
        if isinstance(statement, Repeat):
            turns = times * _turns(statement.head, known)
            stack.extend((item, turns) for item in statement.body)


def _kinds(statement: Nested) -> Iterator[KindText]:
    """Every kind stated in a statement."""
    if isinstance(statement, Declare):
        yield statement.kind
    elif isinstance(statement, Chain):
        stack = list(statement.items)
        while stack:
            item = stack.pop()
            if isinstance(item, Arm):
                stack.extend(item.units)
            elif isinstance(item, Fitted) and item.kind is not None:
                yield item.kind


def _whole(formula: Formula | None, known: Numbers) -> int | None:
    """A whole number where it is plain to see."""
    if isinstance(formula, Literal) and formula.unit is None and formula.text.isdigit():
        return int(formula.text) if len(formula.text) < 12 else limits.EXPANSION
    if isinstance(formula, Reference) and formula.path.name is not None:
        return known.get(formula.path.name)
    return None


def _turns(head: RepeatHead, known: Numbers) -> int:
    first, last = _whole(head.low, known), _whole(head.high, known)
    return 1 if first is None or last is None else max(1, last - first + 1)


def _numbers(body: Iterable[Nested]) -> dict[str, int]:
    """Named quantities that are plain whole numbers."""
    found: dict[str, int] = {}
    for statement in body:
        if isinstance(statement, Let) and statement.value is not None:
            number = _whole(statement.value.formula, found)
            for target in statement.targets:
                if number is not None and target.name is not None:
                    found[target.name] = number
    return found


def refuse_loops(book: Book) -> None:
    """Find blocks that contain themselves."""
    uses: dict[str, dict[str, Span]] = {}
    for word, block in book.blocks.items():
        found = uses[word] = {}
        for statement, _ in _statements(block.body, {}):
            for kind in _kinds(statement):
                if kind.word in book.blocks:
                    found.setdefault(kind.word, kind.word_span)
    for word, block in book.blocks.items():
        route = _route(word, uses)
        if route is None:
            continue
        book.refused_blocks.add(word)
        through = f" through {listed(route[:-1])}" if len(route) > 1 else ""
        book.problems.add(
            "block.loop",
            f"the block {word} contains itself{through}",
            uses[word][route[0]],
            hint="A block may hold other blocks, but never a copy of itself.",
            labels=(Label(block.head.word_span, "the block starts here"),),
        )


def _route(word: str, uses: Uses) -> list[str] | None:
    """The shortest way from a block down to itself."""
    came: dict[str, str] = {}
    queue = [word]
    for block in queue:
        for inner in uses[block]:
            if inner == word:
                route = [word]
                while block != word:
                    route.append(block)
                    block = came[block]  # noqa: PLW2901 - the walk back
                return route[::-1]
            if inner not in came:
                came[inner] = block
                queue.append(inner)
    return None


class _Size(NamedTuple):
    """Statements and parts that a statement or a block comes to when written out."""

    statements: int
    parts: int

    def plus(self, other: _Size, times: int) -> _Size:
        most = limits.EXPANSION * 2  # beyond it nobody needs the exact count
        return _Size(
            min(self.statements + times * other.statements, most),
            min(self.parts + times * other.parts, most),
        )


def _size(statement: Nested, sizes: Mapping[str, _Size], known: Numbers) -> _Size:
    parts = _parts(statement)
    total = _Size(1, parts)
    for kind in _kinds(statement):
        if kind.word in sizes:
            total = total.plus(sizes[kind.word], _whole(kind.count, known) or 1)
            total = _Size(total.statements, total.parts - 1)  # the block itself is no part
    return total


def _parts(statement: Nested) -> int:
    """Parts that a statement places; those that several statements mention count once."""
    if isinstance(statement, Placed):
        return 1
    if not isinstance(statement, Chain):
        return 0
    count, stack = 0, list(statement.items[1::2])
    while stack:
        item = stack.pop()
        if isinstance(item, Arm):
            stack.extend(item.units)
        else:
            count += 1
    return count


def refuse_size(body: Iterable[Nested], book: Book) -> None:
    """Refuse a text whose copies and repeats pass the limit, before any is written out.

    Counts that are plain to see decide; the rest is counted while it is written out.
    """
    content = tuple(body)
    if not book.blocks and not any(isinstance(item, Repeat) for item in content):
        return  # nothing is written out; the parts are counted as they come
    outer = _numbers(content)
    sizes: dict[str, _Size] = dict.fromkeys(book.blocks, _Size(1, 0))
    for _ in range(min(len(book.blocks), limits.NESTING) + 1):  # inner blocks settle first
        for word, block in book.blocks.items():
            known = {**outer, **_numbers(block.body)}
            total = _Size(1, 0)
            for item, times in _statements(block.body, known):
                total = total.plus(_size(item, sizes, known), times)
            sizes[word] = total
    total = _Size(0, 0)
    for statement, times in _statements(content, outer):
        total = total.plus(_size(statement, sizes, outer), times)
        if total.parts > limits.PARTS:
            refuse_parts(statement.span, book)
        if total.statements > limits.EXPANSION:
            refuse_statements(statement.span, book)


def refuse_parts(span: Span, book: Book) -> NoReturn:
    """Refuse a circuit of too many parts."""
    book.problems.refuse(
        "limit.parts",
        f"written out, this circuit has more than {limits.PARTS:,} parts",
        span,
        hint="Use fewer copies, or smaller ranges.",
    )


def refuse_statements(span: Span, book: Book) -> NoReturn:
    """Refuse a text of too many statements."""
    book.problems.refuse(
        "limit.expansion",
        f"written out, this text has more than {limits.EXPANSION:,} statements",
        span,
        hint="Use fewer copies, or smaller ranges.",
    )
