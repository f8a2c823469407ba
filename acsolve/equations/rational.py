"""Value expressions as ratios of polynomials in s, in double precision."""

from __future__ import annotations

from typing import Any, TypeAlias

from numpy.polynomial.polynomial import polyadd, polymul
from numpy.typing import NDArray

from acsolve.circuit.expression import Expression, Number, Power, Product, Quotient, Sum
from acsolve.equations.evaluate import Evaluator, polynomial_in_s
from acsolve.equations.numeric import ElementEntry, Entry, PolynomialEntry

#: Numerator and denominator by rising power of s.
Ratio: TypeAlias = tuple[tuple[complex, ...], tuple[complex, ...]]

_LARGEST_POWER = 16  # of an expression in s; larger ones are no lumped part


def ratio_of(entry: Entry) -> Ratio | None:
    """An entry as a ratio of polynomials, or None where it is another function of s."""
    if isinstance(entry, PolynomialEntry):
        return tuple(entry.coefficients), (1.0,)
    if isinstance(entry, ElementEntry):
        return None
    return _ratio(entry.value, entry.evaluate)


def _ratio(expression: Expression, evaluate: Evaluator) -> Ratio | None:
    plain = polynomial_in_s(expression, evaluate)
    if plain is not None:
        return tuple(plain), (1.0,)
    match expression:
        case Sum(left, right) | Product(left, right) | Quotient(left, right):
            first, second = _ratio(left, evaluate), _ratio(right, evaluate)
            if first is None or second is None:
                return None
            if isinstance(expression, Sum):
                return _sum(first, second)
            return _product(first, second if isinstance(expression, Product) else second[::-1])
        case Power(base, Number(exponent)) if exponent.denominator == 1:
            return _power(_ratio(base, evaluate), exponent.numerator)
        case _:
            return None


def _sum(first: Ratio, second: Ratio) -> Ratio:
    (a, b), (c, d) = first, second
    if b == d:
        return _closed(polyadd(a, c)), b
    return _closed(polyadd(polymul(a, d), polymul(c, b))), _closed(polymul(b, d))


def _product(first: Ratio, second: Ratio) -> Ratio:
    return _closed(polymul(first[0], second[0])), _closed(polymul(first[1], second[1]))


def _power(base: Ratio | None, exponent: int) -> Ratio | None:
    if base is None or abs(exponent) > _LARGEST_POWER:
        return None
    total: Ratio = ((1.0,), (1.0,))
    for _ in range(abs(exponent)):
        total = _product(total, base)
    return total if exponent >= 0 else total[::-1]


def _closed(coefficients: NDArray[Any]) -> tuple[complex, ...]:
    return tuple(complex(item) for item in coefficients)
