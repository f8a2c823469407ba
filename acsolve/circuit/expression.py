"""Value expressions as immutable trees: what a part's value says, not yet computed.

Numbers are exact fractions. `Name` refers to another named quantity or part value, or
to a free symbol; `S` is the complex frequency in rad/s. The constructors fold numbers
and drop neutral elements, and nothing else: this is not a computer-algebra system.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping
from dataclasses import dataclass
from fractions import Fraction
from operator import attrgetter, is_
from typing import Any, Literal

FunctionName = Literal["sqrt", "exp", "ln", "log10", "cosh", "sinh", "cos", "sin"]


@dataclass(frozen=True, slots=True)
class Number:
    """An exact rational number."""

    value: Fraction


@dataclass(frozen=True, slots=True)
class Name:
    """A reference to a named quantity, a part's value or a free symbol."""

    name: str


@dataclass(frozen=True, slots=True)
class Pi:
    """The circle constant."""


@dataclass(frozen=True, slots=True)
class Frequency:
    """The complex frequency s, in rad/s."""


@dataclass(frozen=True, slots=True)
class Sum:
    """left + right."""

    left: Expression
    right: Expression


@dataclass(frozen=True, slots=True)
class Product:
    """left * right."""

    left: Expression
    right: Expression


@dataclass(frozen=True, slots=True)
class Quotient:
    """left / right."""

    left: Expression
    right: Expression


@dataclass(frozen=True, slots=True)
class Power:
    """base ** exponent; the exponent is an expression too (often a number)."""

    base: Expression
    exponent: Expression


@dataclass(frozen=True, slots=True)
class Call:
    """A function of one argument."""

    function: FunctionName
    argument: Expression


ElementName = Literal["g11", "g12", "g21", "g22", "s11", "s12", "s21", "s22"]


@dataclass(frozen=True, slots=True)
class PortElement:
    """An element of a two-port that is known only by its numbers at each s.

    `block` is the part it belongs to, `place` one of g11, g12, g21, g22 of the hybrid
    equations I1 = g11·V1 + g12·I2, V2 = g21·V1 + g22·I2, where I2 leaves at the far end, or
    one of s11, s12, s21, s22 of the waves b1 = s11·a1 + s12·a2, b2 = s21·a1 + s22·a2.
    """

    block: str
    place: ElementName


Expression = Number | Name | Pi | Frequency | Sum | Product | Quotient | Power | Call | PortElement

ZERO = Number(Fraction(0))
ONE = Number(Fraction(1))
MINUS_ONE = Number(Fraction(-1))
S = Frequency()
PI = Pi()


def is_zero(expression: Expression) -> bool:
    """Whether it is the number zero; much quicker than comparing fractions."""
    return isinstance(expression, Number) and expression.value.numerator == 0


def is_one(expression: Expression) -> bool:
    """Whether it is the number one."""
    if not isinstance(expression, Number):
        return False
    return expression.value.numerator == expression.value.denominator


def number(value: int | Fraction) -> Number:
    """An exact number."""
    return Number(Fraction(value))


def add(left: Expression, right: Expression) -> Expression:
    """Sum of two expressions, numbers folded."""
    if isinstance(left, Number):
        if left.value.numerator == 0:
            return right
        if isinstance(right, Number):
            return Number(left.value + right.value)
    elif is_zero(right):
        return left
    return Sum(left, right)


def negate(value: Expression) -> Expression:
    """-value."""
    if isinstance(value, Number | Product):
        return multiply(MINUS_ONE, value)
    return Product(MINUS_ONE, value)


def subtract(left: Expression, right: Expression) -> Expression:
    """Left - right."""
    return add(left, negate(right))


def multiply(left: Expression, right: Expression) -> Expression:
    """Product of two expressions, numbers folded, 0 and 1 absorbed."""
    if isinstance(left, Number):
        if left.value.numerator == 0:
            return ZERO
        if is_one(left):
            return right
        if isinstance(right, Number):
            return Number(left.value * right.value)
        if isinstance(right, Product) and isinstance(right.left, Number):
            return multiply(Number(left.value * right.left.value), right.right)
    elif isinstance(right, Number):
        if right.value.numerator == 0:
            return ZERO
        if is_one(right):
            return left
    return Product(left, right)


def divide(left: Expression, right: Expression) -> Expression:
    """Left / right, numbers folded.

    Raises
    ------
    ZeroDivisionError
        if the divisor is the number zero.

    """
    if is_zero(right):
        raise ZeroDivisionError("division by zero in an expression")
    if is_zero(left) or is_one(right):
        return left
    if isinstance(left, Number) and isinstance(right, Number):
        return Number(left.value / right.value)
    return Quotient(left, right)


_LARGEST_FOLDED_POWER = 64  # keeps 10^k literals exact without building huge integers


def power(base: Expression, exponent: Expression) -> Expression:
    """Base ** exponent; a small whole power of a number is folded."""
    if isinstance(exponent, Number) and exponent.value.denominator == 1:
        whole = exponent.value.numerator
        if whole == 0:
            return ONE
        if whole == 1:
            return base
        if isinstance(base, Number) and abs(whole) <= _LARGEST_FOLDED_POWER:
            if base.value == 0 and whole < 0:
                raise ZeroDivisionError("zero to a negative power")
            return Number(base.value**whole)
    return Power(base, exponent)


def call(function: FunctionName, argument: Expression) -> Expression:
    """A function of one argument; sqrt of the square of a rational is folded."""
    if function == "sqrt" and isinstance(argument, Number) and argument.value >= 0:
        root = exact_root(argument.value)
        if root is not None:
            return Number(root)
    if function == "exp" and is_zero(argument):
        return ONE
    if function in ("ln", "log10") and is_one(argument):
        return ZERO
    return Call(function, argument)


def exact_root(value: Fraction) -> Fraction | None:
    """The rational square root of a non-negative rational, where there is one."""
    from math import isqrt

    top, bottom = isqrt(value.numerator), isqrt(value.denominator)
    exact = top * top == value.numerator and bottom * bottom == value.denominator
    return Fraction(top, bottom) if exact else None


def children(expression: Expression) -> tuple[Expression, ...]:
    """The direct sub-expressions."""
    inner = _CHILDREN.get(type(expression))
    return () if inner is None else inner(expression)


_SIDES: Callable[[Any], tuple[Expression, ...]] = attrgetter("left", "right")
_CHILDREN: dict[type, Callable[[Any], tuple[Expression, ...]]] = {
    Sum: _SIDES,
    Product: _SIDES,
    Quotient: _SIDES,
    Power: attrgetter("base", "exponent"),
    Call: lambda item: (item.argument,),
}


def walk(expression: Expression) -> Iterator[Expression]:
    """The expression and every sub-expression, without recursion."""
    stack: list[Expression] = [expression]
    while stack:
        item = stack.pop()
        yield item
        stack.extend(children(item))


def names(expression: Expression) -> frozenset[str]:
    """All names that the expression refers to."""
    return frozenset(item.name for item in walk(expression) if isinstance(item, Name))


def depends_on_s(expression: Expression) -> bool:
    """Whether the complex frequency occurs in the expression."""
    return any(isinstance(item, Frequency | PortElement) for item in walk(expression))


def rebuild(expression: Expression, replace: Callable[[Name], Expression]) -> Expression:
    """The expression with each name replaced by `replace(name)`, folded again."""
    if isinstance(expression, Name):
        return replace(expression)
    before = children(expression)
    after = [rebuild(child, replace) for child in before]
    if all(map(is_, before, after)):
        return expression  # folded when it was built
    match expression:
        case Sum():
            return add(*after)
        case Product():
            return multiply(*after)
        case Quotient():
            return divide(*after)
        case Power():
            return power(*after)
        case Call(function):
            return call(function, *after)
        case _:
            return expression


def renamed(expression: Expression, mapping: Mapping[str, str]) -> Expression:
    """The expression with names replaced by other names."""
    return rebuild(expression, lambda item: Name(mapping.get(item.name, item.name)))
