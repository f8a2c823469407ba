"""The squared magnitude |H|² = A(x)/B(x) as exact polynomials in x = ω²."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import partial
from typing import Any, Literal

from acsolve.algebra.crossing import (
    Crossings,
    enclosed_crossings,
    exact_crossings,
    factored_crossings,
)
from acsolve.algebra.factors import squarefree
from acsolve.algebra.ring import Polynomial, lowest_part, univariate
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.enclosed import axis_coefficients, axis_part, ball_coefficients

ReferenceName = Literal["dc", "infinity", "peak", "stated"]
#: A squared gain that is exact, as numerator and denominator over the form's ring.
Exact = tuple[Polynomial, Polynomial]


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
    """|H|² = top/bottom of a closed form; in both, the generator of s stands for x = ω²."""

    form: ClosedForm
    top: Polynomial
    bottom: Polynomial

    @property
    def _place(self) -> int | None:
        return self.form.basis.s_index

    def at_zero(self) -> Exact | None:
        """|H(0)|² (zero as 0/1), or None where it is infinite."""
        return self._end(lambda part: self._degree(part, lowest=True), lowest=True)

    def at_infinity(self) -> Exact | None:
        """The limit of |H|² at infinite frequency, or None where it is infinite."""
        return self._end(lambda part: self._degree(part, lowest=False), lowest=False)

    def _end(self, degree: Callable[[Polynomial], int], *, lowest: bool) -> Exact | None:
        ring = self.form.basis.ring
        first, second = degree(self.top), degree(self.bottom)
        if self.top == 0 or ((first > second) == lowest and first != second):
            return ring.constant(0), ring.constant(1)
        if first != second:
            return None
        return self._leading(self.top, lowest), self._leading(self.bottom, lowest)

    def _degree(self, part: Polynomial, *, lowest: bool) -> int:
        if self._place is None or part == 0:
            return 0
        if lowest:
            return int(part.term_content().monoms()[0][self._place])
        return int(part.degrees()[self._place])

    def _leading(self, part: Polynomial, lowest: bool) -> Polynomial:
        if self._place is None:
            return part
        if lowest:
            return lowest_part(self.form.basis.ring, part, self._place)
        return self.form.basis.ring.by_power(part, self._place)[self._degree(part, lowest=False)]

    def crossings_at(self, level: Exact) -> Crossings:
        """Where |H|² crosses or touches an exact level (a squared gain)."""
        return self._roots(self.top * level[1] - self.bottom * level[0])

    def crossings_near(self, level: Callable[[], Any]) -> Crossings:
        """The same for a level known as a ball, computed at the precision in force."""

        def coefficients() -> list[Any]:
            top, bottom = self._balls(self.top), self._balls(self.bottom)
            size = max(len(top), len(bottom))
            padded = [part + [_ball(0)] * (size - len(part)) for part in (top, bottom)]
            factor = level()
            return [a - factor * b for a, b in zip(*padded, strict=True)]

        return enclosed_crossings(coefficients)

    def stationary(self) -> Crossings:
        """Where the slope of |H|² is zero: roots of A'·B - A·B'."""
        if self._place is None:
            return Crossings((), complete=True)
        first, second = (part.derivative(self._place) for part in (self.top, self.bottom))
        return self._roots(first * self.bottom - self.top * second)

    def axis_poles(self) -> Crossings:
        """The x > 0 at which |H|² is infinite: there D(jω) itself is zero, |D|² doubly so."""
        part = axis_part(self.form, self.form.denominator)
        return enclosed_crossings(partial(axis_coefficients, self.form, part))

    def _roots(self, polynomial: Polynomial) -> Crossings:
        """The positive roots in x, from an exact square-free factorisation."""
        whole = univariate(polynomial, self._place)
        if whole is not None:
            return exact_crossings(whole)
        factors = [
            (int(multiplicity), partial(self._balls, factor))
            for factor, multiplicity in squarefree(polynomial)[1]
            if self._degree(factor, lowest=False) > 0
        ]
        return factored_crossings(factors, lambda: self._balls(polynomial))

    def _balls(self, polynomial: Polynomial) -> list[Any]:
        return ball_coefficients(self.form, polynomial)

    def ball(self, exact: Exact) -> Any:
        """An exact squared gain as a ball at the precision in force."""
        top, bottom = (self._balls(part)[0] for part in exact)
        return top / bottom

    def value(self, x: Fraction) -> Any:
        """|H|² at x = ω², as a ball at the precision in force."""
        place = _ball(x)
        return _horner(self._balls(self.top), place) / _horner(self._balls(self.bottom), place)


def magnitude(form: ClosedForm) -> Magnitude:
    """The squared magnitude of a rational form whose values are all numbers."""
    return Magnitude(form, *(_in_x(form, part) for part in (form.numerator, form.denominator)))


def _in_x(form: ClosedForm, polynomial: Polynomial) -> Polynomial:
    """|P(jω)|² with the generator of s standing for x."""
    ring, place = form.basis.ring, form.basis.s_index
    if place is None:
        return polynomial * polynomial
    total = ring.constant(0)
    for power, value in enumerate(squared_magnitude(form.by_power(polynomial))):
        total += ring.reduced(value) * ring.generator(place) ** power
    return total


def _ball(value: Fraction | int) -> Any:
    from flint import arb, fmpq

    exact = Fraction(value)
    return arb(fmpq(exact.numerator, exact.denominator))


def _horner(values: Sequence[Any], x: Any) -> Any:
    total = _ball(0)
    for value in reversed(values):
        total = total * x + value
    return total
