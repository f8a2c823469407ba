"""Formulas in chunks between which a line may break: at their operators, never elsewhere."""

from __future__ import annotations

from collections.abc import Sequence

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
    Symbol,
    Total,
    is_compound,
    width,
)

WIDEST = 34.0  # digits of a chunk: what 400 pixels and half a printed page hold
Chunks = tuple[Node, ...]


def equation(left: Node, right: Node, *, relation: str = "=") -> list[Chunks]:
    """`left = right` as lines of chunks; a fraction too wide gets N and D on lines of their own."""
    negative = False
    match right:
        case Total(((True, Ratio() as inner),)):
            negative, right = True, inner
    if isinstance(right, Ratio) and width(right) > WIDEST:
        top_wide, bottom_wide = width(right.top) > WIDEST - 2, width(right.bottom) > WIDEST - 2
        top: Node = Symbol("N") if top_wide else right.top
        bottom: Node = Symbol("D") if bottom_wide else right.bottom
        whole: Node = Ratio(top, bottom)
        lines = [_line(left, Total(((True, whole),)) if negative else whole, relation)]
        lines += [_line(Symbol("N"), right.top, "=")] if top_wide else []
        lines += [_line(Symbol("D"), right.bottom, "=")] if bottom_wide else []
        return lines
    return [_line(left, Total(((True, right),)) if negative else right, relation)]


def _line(left: Node, right: Node, relation: str) -> Chunks:
    first, *rest = chunks(right)
    return (*chunks(left), _joined(Sign(relation), first), *rest)


def chunks(node: Node, limit: float = WIDEST) -> Chunks:
    """The pieces of a formula in order, each narrow enough to stand on a line."""
    if width(node) <= limit:
        return (node,)
    match node:
        case Total(terms):
            return _terms(terms, limit)
        case Product(factors):
            found: list[Node] = []
            for factor in factors:
                found += _factor(factor, limit)
            return _packed(found, limit)
        case Ratio(top, bottom):
            below = _bracketed(bottom, limit)
            return (*_factor(top, limit), _joined(Sign("/"), below[0]), *below[1:])
        case Power(base, exponent):
            inner = _bracketed(base, limit)
            return (*inner[:-1], Row((inner[-1], Row((Power(Row(()), exponent),)))))
        case Call("sqrt", arguments):
            inner = _bracketed(arguments[0], limit)
            half = Ratio(Number("1"), Number("2"))
            return (*inner[:-1], Row((inner[-1], Power(Row(()), half))))
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


def _factor(node: Node, limit: float) -> Chunks:
    return _bracketed(node, limit) if is_compound(node) else chunks(node, limit)


def _bracketed(node: Node, limit: float) -> Chunks:
    inner = chunks(node, limit - 2)
    if isinstance(node, Number | Symbol):
        return inner
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


def _packed(pieces: Sequence[Node], limit: float) -> Chunks:
    """Neighbours put together as long as they fit."""
    found: list[Node] = []
    for piece in pieces:
        if found and width(found[-1]) + width(piece) <= limit:
            found[-1] = _joined(found[-1], piece)
        else:
            found.append(piece)
    return tuple(found)
