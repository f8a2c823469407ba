"""What can be known of blocks before any is written out: loops, and size."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping

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
    Item,
    KindText,
    Literal,
    Nested,
    Repeat,
)
from acsolve.text.words import listed

Uses = Mapping[str, Mapping[str, Span]]


def kinds_in(body: Iterable[Nested]) -> Iterator[tuple[KindText, int]]:
    """Every kind stated in a body, with how often repeats around it turn, where known."""
    stack = [(statement, 1) for statement in body]
    while stack:
        statement, times = stack.pop()
        match statement:
            case Repeat(head, inner):
                turns = times * _turns(head.low, head.high)
                stack.extend((item, turns) for item in inner)
            case Declare(_, kind):
                yield kind, times
            case Chain(items):
                yield from ((kind, times) for kind in _stated(items))


def _stated(items: Iterable[Item]) -> Iterator[KindText]:
    stack = list(items)
    while stack:
        item = stack.pop()
        if isinstance(item, Arm):
            stack.extend(item.units)
        elif isinstance(item, Fitted) and item.kind is not None:
            yield item.kind


def _plain(formula: Formula | None) -> int | None:
    if isinstance(formula, Literal) and formula.unit is None and formula.text.isdigit():
        return int(formula.text) if len(formula.text) < 12 else limits.EXPANSION
    return None


def _turns(low: Formula, high: Formula) -> int:
    first, last = _plain(low), _plain(high)
    return 1 if first is None or last is None else max(1, last - first + 1)


def refuse_loops(book: Book) -> None:
    """Find blocks that contain themselves."""
    uses: dict[str, dict[str, Span]] = {}
    for word, block in book.blocks.items():
        found = uses[word] = {}
        for kind, _ in kinds_in(block.body):
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


def refuse_size(body: Iterable[Nested], book: Book) -> None:
    """Refuse a text whose copies alone pass the limit, before any is written out."""
    sizes: dict[str, int] = {}

    def size(content: Iterable[Nested]) -> int:
        total = 1
        for kind, times in kinds_in(content):
            inner = sizes.get(kind.word, 1)
            total += times * (_plain(kind.count) or 1) * inner
        return min(total, limits.EXPANSION * 2)

    for _ in range(min(len(book.blocks), limits.NESTING) + 1):  # inner blocks first settle
        for word, block in book.blocks.items():
            sizes[word] = size(block.body)
    for kind, times in kinds_in(body):
        if times * (_plain(kind.count) or 1) * sizes.get(kind.word, 1) > limits.EXPANSION:
            book.problems.refuse(
                "limit.expansion",
                f"written out, this text has more than {limits.EXPANSION:,} statements",
                kind.span,
                hint="Use fewer copies, or smaller ranges.",
            )
