"""Formulas in chunks between which a line may break: before + and −, never inside a quotient.

Inside a product it may break where nothing else fits, and then a point is written.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Literal

from acsolve.report.note.formula.tree import (
    Call,
    Node,
    Number,
    Parallel,
    Power,
    Product,
    Ratio,
    Row,
    Sign,
    StandIn,
    Symbol,
    Total,
    is_compound,
    width,
)

WIDEST = 34.0  # digits of a chunk: what 400 pixels and half a printed page hold
_INNER = WIDEST - 2  # of a quotient inside a sum or product
_SHORT = 12.0  # digits of a bracket that is kept whole
Chunks = tuple[Node, ...]


def equation(left: Node, right: Node, *, relation: str = "=") -> list[Chunks]:
    """`left = right` as lines of chunks; what is too wide in a fraction gets a line of its own."""
    named: dict[StandIn, Node] = {}
    left, right = _with_names(left, named, WIDEST), _with_names(right, named, WIDEST)
    first, *rest = chunks(right)
    lines = [(*chunks(left), _joined(Sign(relation), first), *rest)]
    for name, meaning in named.items():
        lines += equation(name, meaning)
    return lines


def _with_names(node: Node, named: dict[StandIn, Node], limit: float = _INNER) -> Node:
    """The formula with a name for each top or bottom that is too wide, kept in `named`."""
    if width(node) <= limit:
        return node

    def inner(items: Sequence[Node]) -> tuple[Node, ...]:
        return tuple(_with_names(item, named) for item in items)

    match node:
        case Ratio(top, bottom):
            return Ratio(_side("N", top, node, named), _side("D", bottom, node, named))
        case Total(terms):
            signs = (negative for negative, _ in terms)
            return Total(tuple(zip(signs, inner([item for _, item in terms]), strict=True)))
        case Product(factors):
            return Product(inner(factors))
        case Power(base, exponent):
            return Power(*inner((base, exponent)))
        case Call(name, arguments):
            return Call(name, inner(arguments))
        case Parallel(items):
            return Parallel(inner(items))
        case _:
            return node


def _side(letter: Literal["N", "D"], side: Node, whole: Ratio, named: dict[StandIn, Node]) -> Node:
    if width(side) <= _INNER - 1:
        return side
    name = StandIn(letter, whole)
    named[name] = side
    return name


def chunks(node: Node, limit: float = WIDEST) -> Chunks:
    """The pieces of a formula in order, each narrow enough to stand on a line."""
    if width(node) <= limit:
        return (node,)
    match node:
        case Total(terms):
            return _terms(terms, limit)
        case Product(factors):
            return _product(factors, limit)
        case Power(base, exponent):
            inner = _bracketed(base, limit)
            return (*inner[:-1], _joined(inner[-1], Power(Row(()), exponent)))
        case Call("sqrt", arguments):
            inner = _bracketed(arguments[0], limit)
            half = Ratio(Number("1"), Number("2"))
            return (*inner[:-1], _joined(inner[-1], Power(Row(()), half)))
        case Call(name, arguments):
            return _arguments(name, arguments, limit)
        case Parallel(items):
            listed: list[Node] = []
            for place, item in enumerate(items):
                pieces = _factor(item, limit)
                first = _joined(Sign("||"), pieces[0]) if place else pieces[0]
                listed += [first, *pieces[1:]]
            return tuple(listed)
        case _:
            return (node,)


def _terms(terms: Sequence[tuple[bool, Node]], limit: float) -> Chunks:
    found: list[Node] = []
    for place, (negative, item) in enumerate(terms):
        pieces = (
            chunks(item, limit - 2)
            if not (negative and is_compound(item))
            else _bracketed(item, limit - 2)
        )
        sign = "-" if negative else "+"
        first = _joined(Sign(sign), pieces[0]) if place or negative else pieces[0]
        found += [first, *pieces[1:]]
    return tuple(found)


def _product(factors: Sequence[Node], limit: float) -> Chunks:
    """Factors side by side as far as they fit; behind a break a point says that they go on."""
    found: list[Node] = []
    run: tuple[Node, ...] = ()
    for factor in factors:
        if width(Product((*run, factor))) <= limit:
            run += (factor,)
            continue
        pieces = _inside(factor, limit)
        fits = run and pieces and width(Product(run)) + width(pieces[0]) <= limit
        if not fits and width(Product((factor,))) <= limit:
            pieces = ()
        if run:
            _append(found, _run(run), limit)
        run = () if pieces else (factor,)
        if pieces:
            _append(found, pieces[0], limit)
            found += pieces[1:]
    if run:
        _append(found, _run(run), limit)
    return tuple(found)


def _inside(factor: Node, limit: float) -> Chunks:
    """A factor broken inside; nothing where it is a short bracket, or cannot be broken."""
    if isinstance(factor, Total) and width(factor) > _SHORT:
        return _in_brackets(_terms(factor.terms, limit - 2))
    return () if width(Product((factor,))) <= limit else _factor(factor, limit)


def _run(factors: tuple[Node, ...]) -> Node:
    """Factors that stand on one line."""
    if len(factors) > 1:
        return Product(factors)
    return Row((Sign("("), *factors, Sign(")"))) if is_compound(factors[0]) else factors[0]


def _append(found: list[Node], piece: Node, limit: float) -> None:
    """The next piece of a product: on the same line at a bracket, or behind a point."""
    if not found:
        found.append(piece)
    elif _meet(found[-1], piece) and width(found[-1]) + width(piece) <= limit:
        found[-1] = _joined(found[-1], piece)
    else:
        found.append(_joined(Sign("·"), piece))


def _meet(left: Node, right: Node) -> bool:
    """Whether two pieces side by side are read as a product: a bracket ends or begins there."""
    last = left.items[-1] if isinstance(left, Row) else left
    first = right.items[0] if isinstance(right, Row) else right
    raised = isinstance(last, Power) and last.base == Row(())
    return last == Sign(")") or raised or first == Sign("(")


def _factor(node: Node, limit: float) -> Chunks:
    return _bracketed(node, limit) if is_compound(node) else chunks(node, limit)


def _bracketed(node: Node, limit: float) -> Chunks:
    inner = chunks(node, limit - 2)
    if isinstance(node, Number | Symbol):
        return inner
    return _in_brackets(inner)


def _in_brackets(inner: Chunks) -> Chunks:
    if len(inner) == 1:
        return (Row((Sign("("), inner[0], Sign(")"))),)
    return (_joined(Sign("("), inner[0]), *inner[1:-1], _joined(inner[-1], Sign(")")))


def _arguments(name: str, arguments: Sequence[Node], limit: float) -> Chunks:
    found: list[Node] = []
    for place, item in enumerate(arguments):
        pieces = list(chunks(item, limit - 2 - (0 if place else len(name))))
        if place == 0:
            opening = (Sign("|"),) if name == "abs" else (Sign(name), Sign("("))
            pieces[0] = Row((*opening, pieces[0]))
        closing = "|" if name == "abs" else ")"
        pieces[-1] = _joined(pieces[-1], Sign(closing if place == len(arguments) - 1 else ","))
        found += pieces
    return tuple(found)


def _joined(*items: Node) -> Node:
    flat: list[Node] = []
    for item in items:
        flat += item.items if isinstance(item, Row) else (item,)
    return Row(tuple(flat))
