"""|H(jω)| of a closed form at 50 digits, and a search of its crossings on a fine grid."""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from functools import cached_property
from typing import Any

import mpmath
import numpy as np

from acsolve.analyses.closed_form import ClosedForm

from .dense import evaluated
from .field import Digits

POINTS = 20_000
#: Angular frequencies from far below to far above all that these networks do.
GRID = np.asarray(np.logspace(-5, 5, POINTS + 1), dtype=np.longdouble)


class Curve:
    """|H|² over x = ω², from the coefficients in s at 50 digits."""

    def __init__(self, form: ClosedForm) -> None:
        self.field = Digits()
        self.mp = self.field.context
        place = form.basis.s_index
        self.sides: list[list[Any]] = []  # by rising power of s
        for side in (form.numerator, form.denominator):
            powers = {0: side} if place is None else form.basis.ring.by_power(side, place)
            self.sides.append(
                [
                    self._number(form, powers[power]) if power in powers else self.mp.mpf(0)
                    for power in range(max(powers, default=0) + 1)
                ]
            )

    def _number(self, form: ClosedForm, coefficient: Any) -> Any:
        from dataclasses import replace

        one = form.basis.ring.constant(1)
        alone = replace(form, numerator=coefficient, denominator=one)
        return evaluated(alone, self.field, self.mp.mpf(0)).real

    def squared(self, omega: Any) -> Any:
        """|H|² at an angular frequency."""
        s = self.mp.mpc(0, omega)
        top, bottom = (self.mp.polyval(side[::-1], s) for side in self.sides)
        return abs(top) ** 2 / abs(bottom) ** 2

    def at_zero(self) -> Any:
        """|H|² at 0 Hz, infinite where there is a pole."""
        return self._end(lambda side: next((k, v) for k, v in enumerate(side) if v), sign=1)

    def at_infinity(self) -> Any:
        """The limit of |H|² at infinite frequency."""
        return self._end(
            lambda side: next((k, v) for k, v in reversed(list(enumerate(side))) if v), sign=-1
        )

    def _end(self, pick: Callable[[list[Any]], tuple[int, Any]], *, sign: int) -> Any:
        if not any(self.sides[0]):
            return self.mp.mpf(0)
        (top_power, top), (bottom_power, bottom) = (pick(side) for side in self.sides)
        if top_power == bottom_power:
            return (top / bottom) ** 2
        return self.mp.mpf(0) if (top_power - bottom_power) * sign > 0 else self.mp.inf

    def peak(self) -> tuple[Any, Any]:
        """The largest |H|² and the angular frequency of it, by grid and golden section."""
        best = int(np.argmax(self.on_grid))
        low, high = (
            self.mp.mpf(float(GRID[at])) for at in (max(0, best - 1), min(POINTS, best + 1))
        )
        golden = (self.mp.sqrt(5) - 1) / 2
        for _ in range(120):
            left, right = high - golden * (high - low), low + golden * (high - low)
            if self.squared(left) > self.squared(right):
                high = right
            else:
                low = left
        return self.squared(low), low

    @cached_property
    def on_grid(self) -> Any:
        """|H|² on the grid in extended precision."""
        squares = []
        for side in self.sides:
            even, odd = (
                sum(
                    float(value) * (-1) ** (power // 2) * GRID ** np.longdouble(power)
                    for power, value in enumerate(side)
                    if power % 2 == rest
                )
                for rest in (0, 1)
            )
            squares.append(even**2 + odd**2 + np.longdouble(0))
        with np.errstate(divide="ignore", invalid="ignore"):  # a pole on the grid
            return squares[0] / squares[1] + 0 * GRID

    def sign_changes(self, level: Any) -> list[tuple[Any, Any, bool]]:
        """Neighbours on the grid between which |H|² crosses a level: low, high, rises."""
        excess = self.on_grid / float(level) - 1
        for at in np.flatnonzero(~(np.abs(excess) > 1e-8)):  # too close for these digits
            excess[at] = float(self.squared(self.mp.mpf(float(GRID[at]))) / level - 1)
        turns = np.flatnonzero((excess[:-1] > 0) != (excess[1:] > 0))
        return [(float(GRID[at]), float(GRID[at + 1]), bool(excess[at + 1] > 0)) for at in turns]

    def slope(self, omega: Any) -> Any:
        """|d ln|H|² / d ln ω|, numerically."""
        step = self.mp.mpf(10) ** -12
        upper, lower = self.squared(omega * (1 + step)), self.squared(omega * (1 - step))
        return abs(self.mp.log(upper / lower)) / (2 * step)


def power_ratio(decibel: Fraction | None) -> Any:
    """The ratio of squared gains that a level in decibels stands for; None is half power."""
    context = mpmath.MPContext()
    context.dps = 50
    if decibel is None:
        return context.mpf(1) / 2
    return context.mpf(10) ** (context.mpf(decibel.numerator) / decibel.denominator / 10)
