"""Variants: other values, parts left out and nodes joined, under full names."""

from __future__ import annotations

from collections.abc import Iterator
from itertools import chain

from acsolve.circuit.kind import Kind
from acsolve.circuit.netlist import Coupling, Variant
from acsolve.circuit.value import Value
from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text import limits
from acsolve.text.book import Book, Coupled, is_absent
from acsolve.text.couplings import Couplings
from acsolve.text.givens import Givens, PartPlace, Place
from acsolve.text.references import Lookup
from acsolve.text.scope import NO_TURNS, Draft, Turns
from acsolve.text.spell import spelled_all, whole
from acsolve.text.tree import (
    Assign,
    Couple,
    Join,
    LeaveOut,
    Nested,
    Path,
    Repeat,
    ValueText,
    VariantBody,
)
from acsolve.text.walk import Walker
from acsolve.text.words import meant

_ALLOWED = "values, absent, join and couple"


class Variants:
    """Reads the variants of a file."""

    def __init__(
        self, book: Book, givens: Givens, lookup: Lookup, walker: Walker, couplings: Couplings
    ) -> None:
        self._book = book
        self._givens = givens
        self._lookup = lookup
        self._walker = walker
        self._couplings = couplings

    def read(self, body: VariantBody, known: dict[str, Coupling]) -> Variant:
        """One variant."""
        reader = _Reader(self, known)
        for statement, turns in _written_out(body.body, NO_TURNS, self._book):
            reader.take(statement, turns)
        return Variant(
            name=body.head.name,
            values=reader.values,
            absent=frozenset(reader.absent),
            joins=tuple(reader.joins),
            span=body.head.span,
        )

    # the parts of reading that one statement needs

    def target(self, local: str, span: Span) -> tuple[Draft, str | None] | Place | None:
        """What a name in a variant stands for: a part (and attribute), or a quantity."""
        book = self._book
        draft = book.by_name.get(local)
        if draft is not None:
            return draft, None
        owner, _, attribute = local.rpartition(".")
        draft = book.by_name.get(owner)
        if draft is not None and draft.definition and draft.definition.attribute(attribute):
            return draft, attribute
        for scope in book.scopes:
            if local.startswith(scope.prefix):
                quantity = scope.quantities.get(local[len(scope.prefix) :])
                if quantity is not None:
                    book.used.add(quantity.name)
                    return Place(local, self._lookup.measures.get(local))
        if local.partition("[")[0].partition(".")[0] not in book.problems.broken_words:
            book.problems.add(
                "name.unknown",
                f"{local} is neither a part nor a named quantity of this circuit",
                span,
                hint=lambda: meant(
                    local,
                    chain(book.by_name, book.file.quantities),
                    "A variant changes what the file already has.",
                ),
            )
        return None

    def value(
        self, found: tuple[Draft, str | None] | Place, text: ValueText, turns: Turns
    ) -> Iterator[tuple[str, Value]]:
        """The values, under the names by which they are kept."""
        file = self._book.file
        if isinstance(found, Place):
            value = self._givens.value(text, found, file, turns)
            if value is not None:
                yield found.words, value
            return
        draft, attribute = found
        kind = draft.definition
        assert kind is not None, "parts have kinds"
        row = kind.attribute(attribute or kind.principal or "")
        if row is None:
            self._no_value(draft, kind, text)
            return
        value = self._givens.value(text, PartPlace(draft.name, kind, row), file, turns)
        if value is not None:
            yield (draft.name if row.name == kind.principal else f"{draft.name}.{row.name}"), value
        angle = self._givens.angle(text, file, turns) if row.shape == "phasor" else None
        if angle is not None:
            yield f"{draft.name}.angle", angle

    def _no_value(self, draft: Draft, kind: Kind, text: ValueText) -> None:
        first = kind.attributes[0].name if kind.attributes else None
        self._book.problems.add(
            "name.not-a-value",
            f"{draft.name} has no value of its own",
            text.span,
            hint=f"Name an attribute of it: {draft.name}.{first}." if first else None,
        )


class _Reader:
    """Gathers one variant."""

    def __init__(self, parent: Variants, known: dict[str, Coupling]) -> None:
        self._parent = parent
        self._book = parent._book
        self._known = known
        self.values: dict[str, Value] = {}
        self.absent: set[str] = set()
        self.joins: list[tuple[str, ...]] = []
        self._given: dict[str, Span] = {}

    def take(self, statement: Nested, turns: Turns) -> None:
        """Take one statement of the body."""
        match statement:
            case Assign(targets, value):
                self._assign(targets, value, turns)
            case LeaveOut(targets, span):
                self._assign(targets, ValueText(None, None, None, None, span), turns)
            case Join():
                file = self._book.file
                nodes = self._parent._walker.joined(statement, file, turns)
                find = self._book.nodes.find
                self.joins.append(tuple(find(node) for node in nodes))
            case Couple():
                self._couple(statement, turns)
            case _:
                self._book.problems.add(
                    "variant.statement",
                    f"a variant holds {_ALLOWED}, nothing else",
                    statement.span,
                    hint="Place parts and ask questions outside; leave parts out with absent.",
                )

    def _assign(self, targets: tuple[Path, ...], text: ValueText, turns: Turns) -> None:
        for target in targets:
            for local in spelled_all(target, self._book.file, turns, self._book):
                self._one(local, target.span, text, turns)

    def _one(self, local: str, span: Span, text: ValueText, turns: Turns) -> None:
        if is_absent(text) and local in self._book.copies:
            self._block_absent(local, span)
            return
        found = self._parent.target(local, span)
        if found is None:
            return
        if is_absent(text):
            if isinstance(found, Place) or found[1] is not None:
                self._book.problems.add(
                    "value.absent",
                    f"{local} is no part and cannot be absent",
                    text.span,
                    hint="Only whole parts can be left out.",
                )
            else:
                self._once(local, span)
                self.absent.add(local)
            return
        for name, value in self._parent.value(found, text, turns):
            if self._once(name, span):
                self.values[name] = value

    def _block_absent(self, local: str, span: Span) -> None:
        """Leave out every part inside a block."""
        if self._once(local, span):
            inside = (f"{local}.", f"{local}[")
            self.absent.update(name for name in self._book.by_name if name.startswith(inside))

    def _once(self, name: str, span: Span) -> bool:
        first = self._given.setdefault(name, span)
        if first is span:
            return True
        self._book.problems.add(
            "value.twice",
            f"{name} is given two values in one variant",
            span,
            hint="Keep one.",
            labels=(Label(first, "first given here"),),
        )
        return False

    def _couple(self, statement: Couple, turns: Turns) -> None:
        names = [
            name
            for target in statement.targets
            for name in spelled_all(target, self._book.file, turns, self._book)
        ]
        coupled = Coupled(names, statement, self._book.file, turns)
        value = self._parent._couplings.coefficient(coupled)
        if value is None:
            return
        for number, first in enumerate(names):
            for second in names[number + 1 :]:
                item = self._known.get(f"k({first}, {second})") or self._known.get(
                    f"k({second}, {first})"
                )
                if item is None:
                    self._book.problems.add(
                        "variant.couple",
                        f"{first} and {second} are not coupled in the file itself",
                        statement.span,
                        hint=f"Write couple {first}, {second} = 0 outside the variant.",
                    )
                else:
                    self.values[item.name] = value


def _written_out(
    body: tuple[Nested, ...], turns: Turns, book: Book
) -> Iterator[tuple[Nested, Turns]]:
    """The statements of a body, repetitions written out."""
    for statement in body:
        if not isinstance(statement, Repeat):
            book.step(statement)
            yield statement, turns
            continue
        head = statement.head
        low = whole(head.low, book.file, turns, book, what="the start of a repeat")
        high = whole(head.high, book.file, turns, book, what="the end of a repeat")
        if low is None or high is None:
            continue
        if high - low >= limits.RANGE:
            book.problems.refuse("limit.range", "this repeat has too many turns", head.span)
        for turn in range(low, high + 1):
            yield from _written_out(statement.body, {**turns, head.word: turn}, book)
