"""Names as written to names as kept: indices worked out, ranges written out."""

from __future__ import annotations

from fractions import Fraction
from itertools import product as combinations

from acsolve.source import Span
from acsolve.text import limits
from acsolve.text.book import Book
from acsolve.text.scope import NO_TURNS, Scope, Turns
from acsolve.text.tree import (
    Formula,
    GroundWord,
    Index,
    Literal,
    Path,
    Place,
    Raised,
    Reference,
    Signed,
    Terms,
)


class NotWholeError(Exception):
    """A formula is no whole number; the message says why."""

    def __init__(self, reason: str, span: Span) -> None:
        super().__init__(reason)
        self.reason = reason
        self.span = span


def node_name(place: Place, scope: Scope, turns: Turns, book: Book) -> str | None:
    """The local name of a node, or None once its problem is recorded."""
    if isinstance(place, Path):
        return spelled(place, scope, turns, book)
    digits = place.text
    if digits == "0":
        book.problems.add(
            "name.node-zero",
            "0 is no node; the reference node is called gnd",
            place.span,
            hint="Write gnd.",
        )
    elif not digits.isdigit() or digits[0] == "0":
        book.problems.add(
            "name.node-number",
            f"{digits} is no node: a node's number is whole and starts with 1 to 9",
            place.span,
            hint="Write a whole number, or a name that starts with a letter.",
        )
    else:
        return digits
    return None


def spelled(path: Path, scope: Scope, turns: Turns, book: Book) -> str | None:
    """The name with its indices worked out; a range is an error here."""
    if path.name is not None:
        return path.name
    names = spelled_all(path, scope, turns, book, ranges=False)
    return names[0] if names else None


def spelled_all(
    path: Path, scope: Scope, turns: Turns, book: Book, *, ranges: bool = True
) -> list[str]:
    """All names that a name with index ranges stands for; empty once a problem is recorded."""
    if path.name is not None:
        return [path.name]
    pieces: list[list[str]] = []
    count = 1
    for step in path.steps:
        pieces.append([step.joint + step.word])
        if not step.indices:
            continue
        choices = [_index(index, scope, turns, book, ranges=ranges) for index in step.indices]
        for choice in choices:
            count *= len(choice)
        if not _fits(count, path.span, book):
            return []
        pieces.append([f"[{','.join(map(str, group))}]" for group in combinations(*choices)])
    names = ["".join(group) for group in combinations(*pieces)] if count else []
    return names if all(_short(name, path.span, book) for name in names[-1:]) else []


def _short(name: str, span: Span, book: Book) -> bool:
    if len(name) <= limits.NAME_CHARACTERS:
        return True
    book.problems.add(
        "limit.name",
        f"this name is longer than {limits.NAME_CHARACTERS} characters",
        span,
        hint="Use a shorter name.",
    )
    return False


def _fits(count: int, span: Span, book: Book) -> bool:
    if count <= limits.RANGE:
        return True
    book.problems.add(
        "limit.range",
        f"this range has {count:,} indices; the limit is {limits.RANGE:,}",
        span,
        hint="Use a smaller range.",
    )
    return False


def _index(index: Index, scope: Scope, turns: Turns, book: Book, *, ranges: bool) -> range:
    low = whole(index.low, scope, turns, book, what="an index")
    if index.high is None:
        return range(0) if low is None else range(low, low + 1)
    if not ranges:
        book.problems.add(
            "name.range",
            "a range of indices stands only left of an equals sign",
            index.span,
            hint="Use repeat k = 1 .. 20 around the statement, and k as the index.",
        )
        return range(0)
    high = whole(index.high, scope, turns, book, what="an index")
    if low is None or high is None:
        return range(0)
    if high < low:
        book.problems.add(
            "name.range",
            f"the range from {low} to {high} is empty",
            index.span,
            hint=f"Write {high} .. {low}.",
        )
    return range(low, high + 1)


def whole(formula: Formula, scope: Scope, turns: Turns, book: Book, *, what: str) -> int | None:
    """A whole number, or None once its problem is recorded."""
    try:
        number = _evaluate(formula, scope, turns, book, frozenset())
        if number.denominator != 1:
            raise NotWholeError(f"{what} must be a whole number, got {number}", formula.span)
        if abs(number) > limits.INDEX:
            raise NotWholeError(f"{what} is limited to {limits.INDEX:,}", formula.span)
    except NotWholeError as stop:
        book.problems.add(
            "name.index",
            stop.reason,
            stop.span,
            hint="An index is a whole number: digits, the index of a repeat, or a let of one.",
        )
        return None
    return int(number)


def _evaluate(
    formula: Formula, scope: Scope, turns: Turns, book: Book, visited: frozenset[str]
) -> Fraction:
    """The number a formula of digits, index names and whole-number lets stands for."""
    match formula:
        case Literal(text, None, False) if text.isdigit() and len(text) <= 30:
            return Fraction(int(text))
        case Literal():
            reason = f"{formula.span.text} is not a plain whole number"
            raise NotWholeError(reason, formula.span)
        case Reference(path):
            return _looked_up(path, scope, turns, book, visited)
        case Signed(negative, inner):
            number = _evaluate(inner, scope, turns, book, visited)
            return -number if negative else number
        case Terms(first, rest):
            number = _evaluate(first, scope, turns, book, visited)
            for sign, term in rest:
                number = _step(
                    sign, number, _evaluate(term, scope, turns, book, visited), formula.span
                )
            return number
        case Raised(base, exponent):
            number = _evaluate(base, scope, turns, book, visited)
            power = _evaluate(exponent, scope, turns, book, visited)
            if power.denominator != 1 or not 0 <= power <= 64 or abs(number) > limits.INDEX:
                raise NotWholeError("a power in an index must be small and whole", formula.span)
            return Fraction(number ** int(power))
        case GroundWord() | _:
            raise NotWholeError("an index is a whole-number expression", formula.span)


def _step(sign: str, left: Fraction, right: Fraction, span: Span) -> Fraction:
    if max(abs(left.numerator), abs(right.numerator), left.denominator).bit_length() > 256:
        raise NotWholeError(f"an index is limited to {limits.INDEX:,}", span)
    match sign:
        case "+":
            return left + right
        case "-":
            return left - right
        case "*":
            return left * right
        case _:
            if right == 0:
                raise NotWholeError("this index divides by zero", span)
            return left / right


def _looked_up(
    path: Path, scope: Scope, turns: Turns, book: Book, visited: frozenset[str]
) -> Fraction:
    name = path.name
    if name is not None and name in turns:
        return Fraction(turns[name])
    if name is not None:
        given = scope.arguments.get(name) if name in scope.quantities else None
        if given is not None and given.text.formula is not None:
            book.used.add(scope.prefix + name)
            return _evaluate(given.text.formula, given.scope, given.turns, book, visited)
        found = book.quantity(name, scope)
        if found is not None:
            key = found.name
            if found.given is None or found.given.formula is None:
                raise NotWholeError(f"{name} is a symbol, not a whole number", path.span)
            if key in visited or len(visited) > 50:
                raise NotWholeError(f"{name} is defined by itself", path.span)
            book.used.add(key)
            return _evaluate(found.given.formula, found.scope, NO_TURNS, book, visited | {key})
    raise NotWholeError(f"{path.span.text} is not known here as a whole number", path.span)
