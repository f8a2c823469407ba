"""What a name in an expression stands for."""

from __future__ import annotations

from collections.abc import Iterator
from fractions import Fraction
from itertools import chain

from acsolve.circuit import expression as ex
from acsolve.circuit.expression import Expression, Name
from acsolve.circuit.kind import KINDS, Attribute, Kind
from acsolve.source import Span
from acsolve.text.book import Book
from acsolve.text.measure import (
    DECIBEL,
    DEGREE,
    PLAIN,
    SECOND,
    Measure,
    measure_of,
    raised,
    unknown,
)
from acsolve.text.scope import Draft, Named, Scope, Turns
from acsolve.text.spell import spelled
from acsolve.text.tree import Path
from acsolve.text.words import article, meant

_DOTS = "Names with dots lead into blocks, and to the attributes of parts."
Found = tuple[Expression, Measure | None]

_PER_SECOND = raised(SECOND, Fraction(-1))


def need_of(kind: Kind, attribute: Attribute) -> Measure | None:
    """The measure an attribute of a kind needs; None where it is not checked."""
    return _NEEDS[kind.name, attribute.name]


def _need_of(attribute: Attribute) -> Measure | None:
    if attribute.name in ("loss", "constant_loss"):
        return DECIBEL
    if attribute.name == "angle":
        return DEGREE
    return None if attribute.dimension is None else measure_of(attribute.dimension)


_NEEDS = {
    (kind.name, attribute.name): _need_of(attribute)
    for kind in KINDS.values()
    for attribute in kind.attributes
}


class Lookup:
    """Finds names, notes their use, and reports the unknown ones."""

    def __init__(self, book: Book) -> None:
        self._book = book
        self.measures: dict[str, Measure | None] = {}  # of named quantities, by full name
        self.mentioned: dict[str, Span] = {}  # full names of values, first mention

    def find(self, path: Path, scope: Scope, turns: Turns, *, in_s: bool = False) -> Found | None:
        """What a name stands for, or None once the problem is recorded."""
        name = path.name
        if name is not None:
            if name in turns:
                return ex.number(turns[name]), None
            if name == "pi":
                return ex.PI, None
            if name == "s":
                return self._frequency(path, in_s)
        local = spelled(path, scope, turns, self._book)
        if local is None:
            return None
        draft = scope.drafts.get(local)
        if draft is not None and draft.definition is not None:
            return self._principal(draft, path)
        quantity = self._book.quantity(local, scope)
        if quantity is not None:
            return self._quantity(quantity)
        if "." in local:
            return self._inner(scope.prefix + local, path)
        self._unknown(local, path, scope)
        return None

    def _frequency(self, path: Path, in_s: bool) -> Found | None:
        if in_s:
            return ex.S, _PER_SECOND
        self._book.problems.add(
            "value.s",
            "the complex frequency s has no place here",
            path.span,
            hint="Only impedance(…) and admittance(…) may contain s.",
        )
        return None

    def _principal(self, draft: Draft, path: Path) -> Found | None:
        definition = draft.definition
        assert definition is not None, "the caller has looked"
        principal = definition.attribute(definition.principal or "")
        if principal is None:
            names = [item.name for item in definition.attributes if not item.flag]
            hint = f"Name an attribute: {draft.local}.{names[0]}." if names else None
            self._book.problems.add(
                "name.not-a-value",
                f"{draft.local} is {article(definition.name)} and has no value of its own",
                path.span,
                hint=hint,
            )
            return None
        if principal.shape == "in_s":
            self._book.problems.add(
                "name.not-a-value",
                f"the value of {draft.local} depends on frequency and cannot be used in another",
                path.span,
                hint="Name the quantities it is made of with let, and use those.",
            )
            return None
        return self._mention(draft.name, need_of(definition, principal), path)

    def _mention(self, name: str, measure: Measure | None, path: Path) -> Found:
        self.mentioned.setdefault(name, path.span)
        return Name(name), PLAIN if measure is None else measure

    def _quantity(self, quantity: Named) -> Found:
        name = quantity.name
        self._book.used.add(name)
        if name not in self.measures:
            self.measures[name] = unknown(name)
        measure = self.measures[name]
        if measure is None:
            measure = self.measures[name] = unknown(name)
        return Name(name), measure

    def _inner(self, full: str, path: Path) -> Found | None:
        """A name with dots: a part or quantity inside a copy, or an attribute of a part."""
        draft = self._book.by_name.get(full)
        if draft is not None:
            return self._principal(draft, path)
        owner, _, attribute = full.rpartition(".")
        draft = self._book.by_name.get(owner)
        if draft is not None and draft.definition is not None:
            found = draft.definition.attribute(attribute)
            if found is not None:
                if attribute == draft.definition.principal:
                    return self._principal(draft, path)
                return self._mention(full, need_of(draft.definition, found), path)
        for scope in self._book.scopes:
            if full.startswith(scope.prefix) and full[len(scope.prefix) :] in scope.quantities:
                return self._quantity(scope.quantities[full[len(scope.prefix) :]])
        self._missing(full, path)
        return None

    # ------------------------------------------------------------ not found

    def _unknown(self, local: str, path: Path, scope: Scope) -> None:
        problems = self._book.problems
        if path.word in problems.broken_words or local in scope.drafts:
            return  # its own problem is recorded already
        what = None
        if local in scope.nodes or local in scope.pins:
            what = "a node"
        elif local in scope.ports:
            what = "a port"
        elif local in self._book.blocks:
            what = "a block"
        if what is not None:
            problems.add(
                "name.not-a-value", f"{local} is {what}, not a value", path.span,
                hint="A value is a number, a named quantity, or the value of a part.",
            )  # fmt: skip
            return
        otherwise = f"Name it first: let {local} = …, or let {local} for a symbol."
        if local[:1] in "RKMmknpu" and local[1:].isdigit():
            otherwise = f"A value code starts with a digit: 0{local}."
        problems.add(
            "name.unknown",
            f"{local} is not known here",
            path.span,
            hint=lambda: meant(local, self._known(scope), otherwise),
        )

    def _known(self, scope: Scope) -> Iterator[str]:
        return chain(scope.quantities, self._book.file.quantities, scope.drafts)

    def _missing(self, full: str, path: Path) -> None:
        if path.word in self._book.problems.broken_words:
            return
        owner = full.rpartition(".")[0]
        draft = self._book.by_name.get(owner)
        problems, message = self._book.problems, f"{path.span.text} is not known here"
        if draft is None or draft.definition is None:
            problems.add(
                "name.unknown",
                message,
                path.span,
                hint=lambda: meant(full, self._book.by_name, _DOTS),
            )
            return
        names = [item.name for item in draft.definition.attributes]
        hint = f"{draft.local} has {', '.join(names)}." if names else None
        problems.add("name.unknown", message, path.span, hint=hint)
