"""Positive real roots of a polynomial, isolated and counted with proof.

Descartes' rule of signs with bisection (A. G. Akritas and G. E. Collins, "Polynomial real
root isolation using Descartes' rule of signs", SYMSAC 1976). Coefficients are exact
integers, or balls: with balls every sign that the method uses must be certain, so what it
finds holds for every polynomial in the enclosure, and doubt asks for more precision.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any, TypeAlias

from acsolve.algebra.ball import precision

Coefficients: TypeAlias = Sequence[Any]  # by rising power: int or flint.arb


class UndecidedError(ArithmeticError):
    """A sign could not be decided at the precision in force."""


@dataclass(frozen=True, slots=True)
class Isolated:
    """One root in the open interval (low, high), or at low where both are equal.

    `sign` is that of the polynomial just above `low`, which may be a root of its own.
    """

    low: Fraction
    high: Fraction
    sign: int = 0


def positive_roots(coefficients: Coefficients) -> list[Isolated]:
    """All positive real roots of a square-free polynomial, in rising order.

    Parameters
    ----------
    coefficients : by rising power; integers (exact), or real balls at the precision in force.

    Raises
    ------
    UndecidedError
        a ball is too wide to tell a sign; never for integers.
    """
    trimmed = _trimmed(list(coefficients))
    if len(trimmed) < 2:
        return []
    unit = Fraction(2) ** _bound_exponent(trimmed)
    if not _exact(trimmed):
        unit *= _ODD  # so that a root is hardly ever a point of bisection, where balls cannot tell
    found: list[Isolated] = []
    stack = [(0, 0, _polynomial(_scaled(trimmed, unit)))]
    while stack:
        place, depth, poly = stack.pop()
        if depth > _DEEPEST:
            raise UndecidedError("roots too close to separate")
        changes = _variations(poly)
        if changes == 1:
            step = unit / 2**depth
            found.append(Isolated(place * step, (place + 1) * step, _sign(poly[0])))
        elif changes > 1:
            left, right, middle_is_root = _halves(poly)
            stack.append((2 * place + 1, depth + 1, right))
            if middle_is_root:
                middle = (2 * place + 1) * unit / 2 ** (depth + 1)
                found.append(Isolated(middle, middle))
            stack.append((2 * place, depth + 1, left))
    return sorted(found, key=lambda root: root.low)


_ODD = Fraction(1_000_003, 1_000_000)
_DEEPEST = 4000  # halvings; far beyond what distinct roots of bounded size can need here


def _polynomial(coefficients: Sequence[Any]) -> Any:
    from flint import arb, arb_poly, fmpz_poly

    if _exact(coefficients):
        return fmpz_poly(list(coefficients))
    return arb_poly([arb(item) for item in coefficients])


def _trimmed(coefficients: list[Any]) -> list[Any]:
    """Without exact zeros at either end: a root at zero is not positive."""
    while coefficients and coefficients[-1] == 0:
        coefficients.pop()
    while coefficients and coefficients[0] == 0:
        coefficients.pop(0)
    return coefficients


def _sign(value: Any) -> int:
    if value > 0:
        return 1
    if value < 0:
        return -1
    if value == 0:
        return 0
    raise UndecidedError("the sign of a coefficient is not certain")


def _magnitude_exponent(value: Any) -> int | None:
    """A whole number e with |value| <= 2**e, close to the least; None for zero."""
    if isinstance(value, int):
        return abs(value).bit_length() if value else None
    if value == 0:
        return None
    mantissa, exponent = value.abs_upper().man_exp()
    return int(exponent) + int(mantissa).bit_length()


def _bound_exponent(coefficients: Sequence[Any]) -> int:
    """2**e above every root: Fujiwara's bound 2·max |c_k/c_n|^(1/(n-k)), rounded up."""
    degree = len(coefficients) - 1
    if _sign(coefficients[-1]) == 0:
        raise UndecidedError("the leading coefficient may be zero")
    leading = coefficients[-1]
    lower = leading if isinstance(leading, int) else leading.abs_lower()
    top = _magnitude_exponent(lower)
    assert top is not None
    best = -(1 << 60)
    for power, value in enumerate(coefficients[:-1]):
        size = _magnitude_exponent(value)
        if size is not None:
            best = max(best, -((top - 1 - size) // (degree - power)))
    return best + 1


def _scaled(coefficients: Sequence[Any], unit: Fraction) -> list[Any]:
    """Coefficients of p(unit · x), integers kept integers by a common factor."""
    degree = len(coefficients) - 1
    if _exact(coefficients):
        top, bottom = unit.numerator, unit.denominator
        return [
            item * top**power * bottom ** (degree - power)
            for power, item in enumerate(coefficients)
        ]
    from flint import arb, fmpq

    step = arb(fmpq(unit.numerator, unit.denominator))
    return [arb(item) * step**power for power, item in enumerate(coefficients)]


def _exact(coefficients: Sequence[Any]) -> bool:
    return all(isinstance(item, int) for item in coefficients)


def _variations(poly: Any) -> int:
    """Sign changes of (1+x)^n · p(1/(1+x)): a bound of the roots in (0, 1), exact if 0 or 1."""
    kind: Any = type(poly)
    reverse = kind(list(reversed(_padded(poly))))
    shifted = reverse(kind([1, 1]))
    changes, last = 0, 0
    for value in _padded(shifted):
        sign = _sign(value)
        if sign and last and sign != last:
            changes += 1
            if changes > 1:
                return changes
        last = sign or last
    return changes


def _padded(poly: Any) -> list[Any]:
    return list(poly.coeffs())


def _halves(poly: Any) -> tuple[Any, Any, bool]:
    """2^n·p(x/2) on (0, 1), the same shifted by one, and whether the middle is a root."""
    from flint import fmpz

    kind: Any = type(poly)
    coefficients = _padded(poly)
    degree = len(coefficients) - 1
    left = kind([item * fmpz(2) ** (degree - k) for k, item in enumerate(coefficients)])
    right = left(kind([1, 1]))
    middle_is_root = _sign(right[0]) == 0
    if middle_is_root:
        right = kind(_padded(right)[1:])
    return left, right, middle_is_root


def refined(root: Isolated, polynomial: Callable[[Any], Any], bits: int = 64) -> Isolated:
    """The interval narrowed by bisection until its relative width is below 2**-bits.

    `polynomial` evaluates at a ball, at the precision in force; a sign in doubt is asked
    again at twice the precision.
    """
    low, high = root.low, root.high
    if low == high:
        return root
    sign_high = -(root.sign or _certain_sign(polynomial, low))
    while (high - low) * 2**bits > high:
        middle = _middle(low, high)
        sign = _certain_sign(polynomial, middle)
        if sign == 0:
            return Isolated(middle, middle)
        if sign == sign_high:
            high = middle
        else:
            low = middle
    return Isolated(low, high, -sign_high)


def _middle(low: Fraction, high: Fraction) -> Fraction:
    """The arithmetic middle, or a power of two between ends that are far apart."""
    if low > 0 and high > 4 * low:
        ratio = high / low
        halves = (ratio.numerator.bit_length() - ratio.denominator.bit_length()) // 2
        return low * Fraction(2) ** max(1, halves)
    if low == 0:
        return high / 2**16
    return (low + high) / 2


def _certain_sign(polynomial: Callable[[Any], Any], place: Fraction) -> int:
    from flint import arb, fmpq

    for bits in (128, 512, 2048, 8192, 32768):
        with precision(bits):
            value = polynomial(arb(fmpq(place.numerator, place.denominator)))
            if value > 0:
                return 1
            if value < 0:
                return -1
            if value == 0:
                return 0
    return 0
