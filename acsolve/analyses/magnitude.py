"""The squared magnitude |H|² = A(x)/B(x) as polynomials in x = ω², exact or enclosed."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any, Literal

from acsolve.algebra.crossing import Crossings, enclosed_crossings, exact_crossings
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.enclosed import ball_coefficients

ReferenceName = Literal["dc", "infinity", "peak", "stated"]
Real = Any  # Fraction or flint.arb


def squared_magnitude(coefficients: Sequence[Any]) -> list[Any]:
    """|P(jω)|² in x = ω² for P given by rising power of s: (even part)² + x·(odd part)²."""
    even = [value * (-1) ** k for k, value in enumerate(coefficients[0::2])]
    odd = [value * (-1) ** k for k, value in enumerate(coefficients[1::2])]
    total: list[Any] = [0 * coefficients[0]] * len(coefficients)
    for part, shift in ((even, 0), (odd, 1)):
        for i, a in enumerate(part):
            for j, b in enumerate(part):
                total[i + j + shift] = total[i + j + shift] + a * b
    return total


@dataclass(frozen=True, slots=True)
class Magnitude:
    """|H|² of a numeric closed form. `parts()` gives A and B at the precision in force."""

    parts: Callable[[], tuple[list[Real], list[Real]]]
    exact: bool

    def at_zero(self) -> Real | None:
        """|H(0)|², or None where it is infinite."""
        top, bottom = self.parts()
        low = (_lowest(top), _lowest(bottom))
        if low[0] is None or (low[1] or 0) < low[0]:
            return Fraction(0)
        return None if (low[1] or 0) > low[0] else top[low[0]] / bottom[low[0]]

    def at_infinity(self) -> Real | None:
        """The limit of |H|² at infinite frequency, or None where it is infinite."""
        top, bottom = self.parts()
        high = (_highest(top), _highest(bottom))
        if high[0] is None or high[0] < (high[1] or 0):
            return Fraction(0)
        return None if high[0] > (high[1] or 0) else top[high[0]] / bottom[high[0]]

    def crossings(self, level: Callable[[], Real], *, level_exact: bool) -> Crossings:
        """Where |H|² crosses a level (a squared gain)."""
        if self.exact and level_exact:
            top, bottom = self.parts()
            return exact_crossings(_minus(top, bottom, level()))

        def coefficients() -> list[Any]:
            top, bottom = self.parts()
            return [_ball(value) for value in _minus(top, bottom, level())]

        return enclosed_crossings(coefficients)

    def stationary(self) -> Crossings:
        """Where the slope of |H|² is zero: roots of A'·B - A·B'."""

        def slope() -> list[Any]:
            top, bottom = self.parts()
            first, second = _times(_slope(top), bottom), _times(top, _slope(bottom))
            return _minus(first, second, Fraction(1))

        if self.exact:
            return exact_crossings(slope())
        return enclosed_crossings(lambda: [_ball(value) for value in slope()])

    def value(self, x: Fraction) -> Any:
        """|H|² at x = ω², as a ball at the precision in force."""
        top, bottom = self.parts()
        place = _ball(x)
        return _horner(top, place) / _horner(bottom, place)


def magnitude(form: ClosedForm) -> Magnitude:
    """The squared magnitude of a rational form whose values are all numbers."""
    numbers = form.numbers()
    if numbers is not None:
        exact = squared_magnitude(numbers[0] or [Fraction(0)]), squared_magnitude(numbers[1])
        return Magnitude(lambda: exact, exact=True)

    def parts() -> tuple[list[Real], list[Real]]:
        top = squared_magnitude(ball_coefficients(form, form.numerator))
        bottom = squared_magnitude(ball_coefficients(form, form.denominator))
        return top, bottom

    return Magnitude(parts, exact=False)


def _lowest(values: Sequence[Any]) -> int | None:
    return next((power for power, value in enumerate(values) if value != 0), None)


def _highest(values: Sequence[Any]) -> int | None:
    return next((power for power in reversed(range(len(values))) if values[power] != 0), None)


def _minus(first: list[Any], second: list[Any], factor: Any) -> list[Any]:
    """first - factor·second."""
    length = max(len(first), len(second))
    padded = [item + [Fraction(0)] * (length - len(item)) for item in (first, second)]
    if isinstance(factor, Fraction):
        return [_subtracted(a, b, factor) for a, b in zip(*padded, strict=True)]
    return [_ball(a) - factor * _ball(b) for a, b in zip(*padded, strict=True)]


def _subtracted(first: Any, second: Any, factor: Fraction) -> Any:
    if isinstance(first, Fraction) and isinstance(second, Fraction):
        return first - factor * second
    return _ball(first) - _ball(factor) * _ball(second)


def _times(first: Sequence[Any], second: Sequence[Any]) -> list[Any]:
    if not first or not second:
        return [Fraction(0)]
    total: list[Any] = [0 * first[0] * second[0]] * (len(first) + len(second) - 1)
    for i, a in enumerate(first):
        for j, b in enumerate(second):
            total[i + j] = total[i + j] + a * b
    return total


def _slope(values: Sequence[Any]) -> list[Any]:
    return [value * power for power, value in enumerate(values)][1:]


def _ball(value: Any) -> Any:
    from flint import arb, fmpq

    if isinstance(value, Fraction):
        return arb(fmpq(value.numerator, value.denominator))
    return arb(value)


def _horner(values: Sequence[Any], x: Any) -> Any:
    total = _ball(Fraction(0))
    for value in reversed(values):
        total = total * x + _ball(value)
    return total
