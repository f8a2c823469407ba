"""Real functions over an interval by Taylor series in balls: what they certainly are there.

A function is given by its jets: the Taylor coefficients f, f', f''/2 and so on, at a real ball.
At a point they are numbers; over a whole interval they are enclosures, of which only the last
is used, as the remainder: f(m + t) = sum of f_k(m)·t^k for k < n, plus f_n(some point)·t^n.
(R. E. Moore, "Interval Analysis", 1966; F. Johansson's balls.)
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any, Protocol

from acsolve.algebra.ball import precision

ORDER = 8  # of the remainder; more costs hardly anything, less asks for more intervals
_BITS = (128, 512, 2048)  # more only where a number is lost in its own error


class Jets(Protocol):
    """A real function of one real variable."""

    def __call__(self, x: Any, order: int) -> Sequence[Any]:
        """Taylor coefficients 0 to `order` over the ball x, each an enclosure, maybe not finite."""

    def size(self, x: Any) -> Any:
        """A ball around the size of the terms that the function's value is a difference of."""


@dataclass(frozen=True, slots=True)
class Cell:
    """A closed interval with exact ends."""

    low: Fraction
    high: Fraction

    @property
    def middle(self) -> Fraction:
        """The middle."""
        return (self.low + self.high) / 2

    @property
    def narrow(self) -> bool:
        """Whether it is too narrow to be halved again: 2**-40 of where it lies."""
        return self.high - self.low <= self.high * Fraction(1, 1 << 40)

    def halves(self) -> tuple[Cell, Cell]:
        """Two parts; not quite halves, so that a round number is hardly ever an end."""
        between = self.low + (self.high - self.low) * _SPLIT
        return Cell(self.low, between), Cell(between, self.high)


_SPLIT = Fraction(2087, 4096)


def point(value: Fraction) -> Any:
    """A number as a ball, exact where the precision in force allows it."""
    from flint import arb, fmpq

    return arb(fmpq(value.numerator, value.denominator))


def interval(cell: Cell) -> Any:
    """A ball that holds a cell."""
    from flint import arb

    return arb(point(cell.middle), point((cell.high - cell.low) / 2).abs_upper())


@dataclass(frozen=True, slots=True)
class Enclosure:
    """A function and its first two derivatives over a cell."""

    value: Any
    slope: Any
    bend: Any


def enclosure(jets: Jets, cell: Cell) -> Enclosure:
    """What the function and its derivatives are over a cell, at the precision that is needed."""
    for bits in _BITS:
        with precision(bits):
            middle = list(jets(point(cell.middle), ORDER - 1))
            if middle[0].is_finite() and middle[0].contains(0) and bits < _BITS[-1]:
                continue
            last = list(jets(interval(cell), ORDER))[-1]
            return _enclosed([*middle, last], point((cell.high - cell.low) / 2))
    raise AssertionError("the last precision always answers")


def _enclosed(coefficients: list[Any], radius: Any) -> Enclosure:
    """Bounds of a Taylor polynomial with a remainder, and of its derivatives."""
    from flint import arb

    around = arb(0, radius.abs_upper())
    bounds = []
    for _ in range(3):
        total = arb(0)
        for item in reversed(coefficients):
            total = total * around + item
        bounds.append(total)
        coefficients = [k * item for k, item in enumerate(coefficients)][1:]
    return Enclosure(*bounds)


def sign(ball: Any) -> int:
    """1 or -1 where it is certain, else 0."""
    return 1 if ball > 0 else -1 if ball < 0 else 0


def sign_at(jets: Jets, x: Fraction, *, place: int = 0) -> int:
    """The sign at a point of the function, or of a derivative; 0 where no precision tells."""
    for bits in _BITS:
        with precision(bits):
            found = sign(jets(point(x), place)[place])
            if found:
                return found
    return 0


_RELATIVE = Fraction(1, 1 << 80)


def refined(jets: Jets, cell: Cell, rising: int, *, place: int = 0) -> Cell:
    """The only root in a cell of the function or of a derivative, to 2**-80 of where it lies.

    Parameters
    ----------
    rising : sign of the function (the derivative) at the high end.
    place : 0 for the function, 1 for its slope.

    Notes
    -----
    Newton's method over intervals, bisection where that does not halve the cell. It stops
    early where the function itself is known no better (a level that is a ball).
    """
    with precision(_BITS[1]):
        while cell.high - cell.low > cell.high * _RELATIVE:
            middle = _short(cell)
            value = jets(point(middle), place)[place]
            narrowed = _newton(jets, cell, middle, value, place)
            if narrowed is None:
                side = sign(value)
                if value.is_zero():  # the root itself, met exactly
                    beside = middle * _RELATIVE / 4
                    return Cell(max(cell.low, middle - beside), min(cell.high, middle + beside))
                if not side:
                    return cell
                narrowed = Cell(cell.low, middle) if side == rising else Cell(middle, cell.high)
            cell = narrowed
        return cell


def _newton(jets: Jets, cell: Cell, middle: Fraction, value: Any, place: int) -> Cell | None:
    """The step over intervals; None where it does not halve the cell."""
    over = jets(interval(cell), place + 1)[place + 1] * (place + 1)
    if not sign(over) or not value.is_finite():
        return None
    landed = point(middle) - value / over
    low = max(cell.low, _exact(landed.lower()))
    high = min(cell.high, _exact(landed.upper()))
    if low >= high or 2 * (high - low) > cell.high - cell.low:
        return None
    return Cell(low, high)


def _short(cell: Cell) -> Fraction:
    """A point near the middle with few digits."""
    width = cell.high - cell.low
    scale = (width.denominator.bit_length() - width.numerator.bit_length()) + 12
    step = Fraction(2) ** -scale
    return round(cell.middle / step) * step


def _exact(ball: Any) -> Fraction:
    mantissa, exponent = ball.mid().man_exp()
    return Fraction(int(mantissa)) * Fraction(2) ** int(exponent)


def cells(low: Fraction, high: Fraction, step: Fraction = Fraction(5, 4)) -> list[Cell]:
    """A band above zero cut at equal ratios."""
    found, start = [], low
    while start * step < high:
        end = Fraction(float(start * step))
        found.append(Cell(start, end))
        start = end
    return [*found, Cell(start, high)]
