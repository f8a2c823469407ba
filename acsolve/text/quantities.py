"""Named quantities: dimensions in order of use, then values."""

from __future__ import annotations

from acsolve.circuit.value import Quantity, Value
from acsolve.source import Span
from acsolve.text.book import Book
from acsolve.text.formula import UnreadableError
from acsolve.text.givens import Givens, Place
from acsolve.text.measure import Solver, dimension_of, unknown
from acsolve.text.references import Lookup
from acsolve.text.scope import Given, Named
from acsolve.text.tree import Applied, Formula, Path, Raised, Reference, Signed, Terms


class Quantities:
    """Reads every `let` of a text."""

    def __init__(self, book: Book, givens: Givens, lookup: Lookup, solver: Solver) -> None:
        self._book = book
        self._givens = givens
        self._lookup = lookup
        self._solver = solver
        self._values: dict[str, Value] = {}

    def read(self) -> None:
        """Work out the value and the dimension of each, those it depends on first."""
        for named in _ordered(self._book):
            self._read(named)

    def given(self, named: Named) -> Given | None:
        """The value text of a quantity: from outside, as an argument, or its own."""
        return given_for(named, self._book)

    def _read(self, named: Named) -> None:
        given = self.given(named)
        name = named.name
        if given is None:
            self._lookup.measures[name] = unknown(name)
            self._values[name] = Value(span=named.span)
            return
        if given.text.formula is None:
            self._book.problems.add(
                "value.absent",
                f"{named.local} names a quantity and cannot be absent",
                given.text.span,
                hint="Only parts can be left out.",
            )
            return
        try:
            measure = self._givens.measured(given.text, named.local, given.scope, given.turns)
        except UnreadableError:
            self._lookup.measures[name] = unknown(name)
            self._values[name] = Value(span=named.span)
            return
        if measure is None:
            measure = unknown(name)
        self._lookup.measures[name] = measure
        place = Place(named.local, measure)
        value = self._givens.value(given.text, place, given.scope, given.turns)
        self._values[name] = value or Value(span=named.span)

    def finished(self) -> dict[str, Quantity]:
        """The quantities, with the dimensions that all uses have led to."""
        result = {}
        for named in self._book.full_quantities():
            name = named.name
            if name not in self._values:
                continue
            measure = self._solver.reduced(self._lookup.measures.get(name) or {})
            result[name] = Quantity(
                name=name,
                value=self._values[name],
                dimension=dimension_of(measure),
                span=named.span,
            )
        return result


def given_for(named: Named, book: Book) -> Given | None:
    """The value text of a quantity: from outside, as an argument, or its own."""
    if named.name in book.overrides:
        book.met_overrides.add(named.name)
        return book.overrides[named.name]
    if named.local in named.scope.arguments:
        return named.scope.arguments[named.local]
    if named.given is None:
        return None
    return Given(named.given, named.scope, named.turns, named.span)


def _ordered(book: Book) -> list[Named]:
    """All quantities, each after those its value refers to; loops are reported elsewhere."""
    order: list[Named] = []
    done: set[str] = set()
    for start in book.full_quantities():
        stack = [(start, False)]
        while stack:
            named, ready = stack.pop()
            if ready:
                order.append(named)
                continue
            if named.name in done:
                continue
            done.add(named.name)
            stack.append((named, True))
            given = given_for(named, book)
            if given is not None and given.text.formula is not None:
                for path in paths_in(given.text.formula):
                    inner = book.quantity(path.name or "", given.scope)
                    if inner is not None and inner.name not in done:
                        stack.append((inner, False))
    return order


def paths_in(formula: Formula) -> list[Path]:
    """Every name in a formula."""
    found: list[Path] = []
    stack: list[Formula] = [formula]
    while stack:
        match stack.pop():
            case Reference(path):
                found.append(path)
            case Signed(_, inner):
                stack.append(inner)
            case Terms(first, rest):
                stack += [first, *(term for _, term in rest)]
            case Raised(base, exponent):
                stack += [base, exponent]
            case Applied(_, argument):
                stack.append(argument)
    return found


def unused(book: Book) -> list[tuple[str, Span]]:
    """Quantities that nothing refers to."""
    return [
        (named.local, named.span) for named in book.full_quantities() if named.name not in book.used
    ]
