"""The formula tree: what a formula is made of, whatever it will be written in.

Widths are in digits of the running text, estimated on the wide side.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, TypeAlias

from acsolve.report.drawing.name import split_name

_STAND_IN = 2.6  # digits of N₁₂


@dataclass(frozen=True, slots=True)
class Number:
    """A number as it is to be shown, `1.5` or `1.5e-7`."""

    text: str


@dataclass(frozen=True, slots=True)
class Symbol:
    """A name of the circuit or of ours, as the text form spells it."""

    name: str


@dataclass(frozen=True, slots=True)
class Total:
    """A sum; each term with whether it is taken off."""

    terms: tuple[tuple[bool, Node], ...]


@dataclass(frozen=True, slots=True)
class Product:
    """Factors side by side."""

    factors: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Ratio:
    """Top over bottom."""

    top: Node
    bottom: Node


@dataclass(frozen=True, slots=True)
class Power:
    """Base to an exponent."""

    base: Node
    exponent: Node


@dataclass(frozen=True, slots=True)
class Call:
    """A named function of arguments; `sqrt` is drawn as a root."""

    name: str
    arguments: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Parallel:
    """Values in parallel, a ∥ b."""

    items: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Sign:
    """A sign that stands alone between pieces of a broken formula: `=`, `+`, `(`."""

    text: str


@dataclass(frozen=True, slots=True)
class Words:
    """Upright words or a unit inside a formula."""

    text: str


@dataclass(frozen=True, slots=True)
class Row:
    """Pieces side by side, nothing added between them."""

    items: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Matrix:
    """Rows of cells, in brackets."""

    rows: tuple[tuple[Node, ...], ...]


@dataclass(frozen=True, slots=True)
class StandIn:
    """A name for the top or the bottom of a quotient too wide to stand as it is.

    The whole quotient tells it apart from others; `named.py` numbers it.
    """

    letter: Literal["N", "D"]
    whole: Ratio


Node: TypeAlias = (
    Number
    | Symbol
    | Total
    | Product
    | Ratio
    | Power
    | Call
    | Parallel
    | Sign
    | Words
    | Row
    | Matrix
    | StandIn
)


def is_compound(node: Node) -> bool:
    """Whether it needs brackets as a factor."""
    return isinstance(node, Total | Parallel)


def is_high(node: Node) -> bool:
    """Whether it stands higher than a line of letters with subscripts."""
    match node:
        case Ratio() | Matrix() | Power():
            return True
        case Call(name, arguments):
            return name == "sqrt" or any(map(is_high, arguments))
        case Total(terms):
            return any(is_high(item) for _, item in terms)
        case Product(factors):
            return any(map(is_high, factors))
        case Parallel(items) | Row(items):
            return any(map(is_high, items))
        case _:
            return False


def needs_brackets_below_power(node: Node) -> bool:
    """Whether it needs brackets as the base of a power."""
    return not isinstance(node, Number | Symbol) or (isinstance(node, Number) and "e" in node.text)


def width(node: Node) -> float:  # noqa: PLR0912 - one case for each kind of node
    """How wide it will stand, in digits."""
    match node:
        case Number(text):
            return len(text) + 0.5
        case Symbol(name):
            return symbol_width(name)
        case StandIn():
            return _STAND_IN
        case Total(terms):
            return sum(width(item) + 2 for _, item in terms) - 1
        case Product(factors):
            return sum(width(item) + (1.4 if is_compound(item) else 0.3) for item in factors)
        case Ratio(top, bottom):
            return max(width(top), width(bottom)) + 1
        case Power(base, exponent):
            brackets = 1.4 if needs_brackets_below_power(base) else 0
            return width(base) + brackets + 0.7 * width(exponent)
        case Call("sqrt", arguments):
            return width(arguments[0]) + 1.5
        case Call(name, arguments):
            return len(name) + 1.4 + sum(width(item) + 1 for item in arguments)
        case Parallel(items):
            return sum(width(item) + 2 for item in items)
        case Sign(text) | Words(text):
            return len(text) + 1
        case Row(items):
            return sum(width(item) for item in items)
        case Matrix(rows):
            columns = zip(*rows, strict=True)
            return sum(max(width(cell) for cell in column) + 1.5 for column in columns) + 1


def symbol_width(name: str) -> float:
    """Width of a name: its head large, what is lowered small."""
    head, lowered = split_name(name)
    return len(head) + 0.7 * len(lowered) + 0.2
