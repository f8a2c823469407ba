"""Single points in ball arithmetic: exact where doubles fail, limits where the matrix does.

A point that is singular in exact arithmetic, too, is approached from the right half-plane: with
H(s0 + e) ~ k·e^m for a shift e so small that nothing else matters, e·H'/H tells the order m
at once, and k or its absence is the limit. Balls prove how many bits are right.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.lu import backward, factor, transposed
from acsolve.algebra.plan import Plan
from acsolve.equations.numeric import Numbers
from acsolve.equations.system import Functional

_PLAIN_BITS = (160, 640)  # at the point itself
_SHIFTED_BITS = (4096, 16384, 65536)  # beside it; cancellations cost a multiple of the shift
_SHIFT = 700  # the shift is this many powers of two below the point
_WANTED_BITS = 56


@dataclass(frozen=True, slots=True)
class Local:
    """H near a point: (mantissa · 2 ** exponent) · e ** order, and H'/H less order/e.

    `order` is 0 at an ordinary point, positive at a zero, negative at a pole; not whole at
    s = 0 of parts with fractional powers of s. `singular` tells that a limit was taken.
    """

    order: float
    mantissa: complex
    exponent: int
    slope: complex
    singular: bool = False

    @property
    def vanishes(self) -> bool:
        """Whether H is zero everywhere around the point."""
        return self.mantissa == 0


@dataclass(slots=True)
class Precise:
    """Solves single points in balls. `numbers` builds the system at the working precision."""

    plan: Plan
    numbers: Callable[[], Numbers]
    observed: Sequence[Functional]
    known: dict[int, Numbers] = field(default_factory=dict)

    def at(self, hertz: Fraction) -> list[Local | None]:
        """H near s = 2π·j·hertz for each functional; None where no limit was found."""
        plain = self._all(hertz, _PLAIN_BITS, shifted=False)
        missing = [place for place, item in enumerate(plain) if item is None]
        if missing:
            shifted = self._all(hertz, _SHIFTED_BITS, shifted=True)
            for place in missing:
                plain[place] = shifted[place]
        return plain

    def beside(self, hertz: Fraction) -> list[Local | None]:
        """The same, always by a limit: for the order of a zero or pole."""
        return self._all(hertz, _SHIFTED_BITS, shifted=True)

    def _all(self, hertz: Fraction, bits: Sequence[int], *, shifted: bool) -> list[Local | None]:
        answers: list[Local | None] = [None] * len(self.observed)
        for item in bits:
            with precision(item):
                answers = self._solve(hertz, item, shifted=shifted)
            if all(answer is not None for answer in answers):
                break
        return answers

    def _solve(self, hertz: Fraction, bits: int, *, shifted: bool) -> list[Local | None]:
        point, shift = _point(hertz)
        found = self.enclosed(point + shift if shifted else point, bits)
        return [_local(value, rate, shift if shifted else None, bits) for value, rate in found]

    def enclosed(self, s: Any, bits: int) -> list[tuple[Any, Any]]:
        """Balls around each answer and its derivative at s, a ball, at a working precision."""
        from flint import acb

        numbers = self.known.get(bits)
        if numbers is None:
            numbers = self.known[bits] = self.numbers()
        factors = factor(self.plan, numbers.at(s), {numbers.size - 1: acb(1)})
        x = backward(factors)
        rates = _rates(numbers, numbers.slopes(s), x)
        answers = []
        for c in self.observed:
            value = sum((x[at] * k for at, k in c.items() if x[at] is not None), acb(0))
            y = transposed(factors, {column: acb(item) for column, item in c.items()})
            rate = -sum(
                (a * b for a, b in zip(y, rates, strict=True) if a is not None and b is not None),
                acb(0),
            )
            answers.append((value, rate))
        return answers


def _point(hertz: Fraction) -> tuple[Any, Any]:
    """s0 = 2π·j·hertz and the shift beside it, as balls."""
    from flint import acb, arb, fmpq

    omega = 2 * arb.pi() * arb(fmpq(hertz.numerator, hertz.denominator))
    scale = arb(2) ** -_SHIFT
    return acb(0, omega), acb(scale * omega.mid() if hertz else scale)


def _rates(numbers: Numbers, slopes: Sequence[Any], x: Sequence[Any]) -> list[Any]:
    """(dA/ds)·x by row."""
    rates: list[Any] = [None] * numbers.size
    for row, column, slope in zip(numbers.rows, numbers.columns, slopes, strict=True):
        if slope is not None and x[column] is not None:
            term = slope * x[column]
            rates[row] = term if rates[row] is None else rates[row] + term
    return rates


def _local(value: Any, rate: Any, shift: Any, bits: int) -> Local | None:
    """What a value and its derivative, `shift` beside the point, say about the point."""
    if not (value.is_finite() and rate.is_finite()):
        return None
    if value.contains(0):
        return _zero(value, rate, bits)
    logarithmic = rate / value
    if value.rel_accuracy_bits() < _WANTED_BITS:
        return None
    if shift is None:
        return Local(0.0, *_split(value), complex(logarithmic))
    if (shift * logarithmic).rad() > 1e-9:
        return None
    order = complex(shift * logarithmic).real
    if abs(order - round(order)) < 1e-9:
        order = float(round(order))
    power = _power(shift, order)
    return Local(order, *_split(value / power), complex(logarithmic - order / shift), singular=True)


def _zero(value: Any, rate: Any, bits: int) -> Local | None:
    """Exactly zero, for all that most of the bits can say; None where a try may tell more."""
    if value.is_zero() and rate.is_zero():
        return Local(0.0, 0j, 0, 0j)
    tiny = value.abs_upper() < 2.0 ** (-min(bits // 2, 1000)) if bits > _SHIFTED_BITS[0] else False
    return Local(0.0, 0j, 0, 0j) if tiny else None


def _power(shift: Any, order: float) -> Any:
    from flint import acb

    return shift ** int(order) if order.is_integer() else shift ** acb(order)


def _split(ball: Any) -> tuple[complex, int]:
    """The middle of a ball as mantissa and power of two."""
    from flint import arb

    mantissa, power = ball.abs_upper().mid().man_exp()
    exponent = int(power) + int(mantissa).bit_length()
    return complex(ball * arb(2) ** -exponent), exponent
