"""One replay of a plan over a block of points, with the error of each answer and its slope.

With A·x = b and Aᵀ·y = c the answer is H = c·x. What is left of the equations, r = A·x - b,
moves it by y·r. That is the correction added here and, with the magnitudes that round-off can
have in r (W. Oettli and W. Prager, Numer. Math. 6, 1964), the estimate of what is left:

    t_i = |y_i| · (|r_i| + few eps · (|A|·|x| + |b|)_i),   error ~ 3·sqrt(sum t_i²) + |c·x - y·b|

The terms add as squares, since round-off in different equations is independent. The same y
gives the derivative: dH/ds = -y·(dA/ds)·x.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.lu import Element, Factors, Vector, backward, factor, transposed
from acsolve.algebra.plan import Plan
from acsolve.algebra.scaled import Exponent, Scaled, aligned, power_of_two
from acsolve.equations.numeric import Numbers
from acsolve.equations.system import Functional

_ROUND_OFF = 4 * float(np.finfo(float).eps)  # of an entry and of one product, in all


@dataclass(frozen=True, slots=True, eq=False)
class Replayed:
    """Answers of one replay, shape (observed, points); see `result.Solution`."""

    mantissa: NDArray[np.complex128]
    exponent: NDArray[np.int64]
    slope: NDArray[np.complex128]
    error: NDArray[np.float64]


def replay(
    numbers: Numbers,
    plan: Plan,
    observed: Sequence[Functional],
    s: NDArray[np.complex128],
    *,
    scaled: bool,
) -> Replayed:
    """Solve at every s; `scaled` carries powers of two, slower, for answers out of range."""
    one: Element = 1.0
    if scaled:
        one = Scaled(np.ones(len(s), dtype=complex), np.zeros(len(s), dtype=np.int64))
    # Singular points make infinities and what follows from them; the caller looks for these.
    with np.errstate(all="ignore"):
        entries = numbers.at(s)
        factors = factor(plan, entries, {numbers.size - 1: one})
        x = backward(factors)
        sums = [_Sums(c, x, factors, scaled=scaled) for c in observed]
        del factors
        _Rows(numbers, entries, numbers.slopes(s), x, one).visit(sums)
        return _stacked([item.answer() for item in sums], len(s))


def replay_quick(
    numbers: Numbers,
    plan: Plan,
    observed: Sequence[Functional],
    s: NDArray[np.complex128],
    steps: Collection[int],
) -> NDArray[np.complex128]:
    """Plain values, shape (observed, points), from the steps they need; nothing is checked."""
    with np.errstate(all="ignore"):  # as in `replay`
        factors = factor(plan, numbers.at(s), {numbers.size - 1: 1.0}, kept=steps)
        x = backward(factors, steps)
        values = np.zeros((len(observed), len(s)), dtype=complex)
        for place, c in enumerate(observed):
            for column, item in c.items():
                if x[column] is not None:
                    values[place] += x[column] * float(item)
        return values


class _Sums:
    """What one observed quantity gathers from the rows, relative to its own size: y/H."""

    def __init__(self, c: Functional, x: Vector, factors: Factors, *, scaled: bool) -> None:
        self.value: Element = None
        terms = [x[column] * float(item) for column, item in c.items() if x[column] is not None]
        if not terms:
            return
        self.value = sum(terms[1:], terms[0])
        inverse = self.value.inverse() if scaled else _inverse(self.value)
        self.y = transposed(factors, {column: inverse * float(item) for column, item in c.items()})
        if self.y[-1] is None:
            self.value = None
            return
        other = self.y[-1].plain() if scaled else self.y[-1]
        self.misfit: Element = abs(1.0 - other)
        self.correction: Element = 0.0
        self.rate: Element = 0.0
        self.squares: Element = 0.0
        self.shifts: dict[tuple[int, int], Element] = {}

    def add(
        self,
        row: int,
        residual: Element,
        scale: Element,
        slope: Element | None,
        exponent: Exponent | None,
    ) -> None:
        """Take in one row: A·x - b, its round-off scale and (dA/ds)·x, on one exponent."""
        weight = None if self.value is None else self.y[row]
        if weight is None:
            return
        if exponent is not None:
            weight = weight.mantissa * self._shift(weight.exponent, exponent)
        term = weight * residual
        self.correction = self.correction + term
        bound = abs(term) + abs(weight) * scale
        self.squares = self.squares + bound * bound
        if slope is not None:
            self.rate = self.rate + weight * slope

    def _shift(self, first: Exponent, second: Exponent) -> Element:
        """2 ** (first + second); rows that were scaled together share it."""
        key = (id(first), id(second))
        known = self.shifts.get(key)
        if known is None:
            known = self.shifts[key] = power_of_two(first + second)
        return known

    def answer(self) -> tuple[Element, Exponent | int, Element, Element] | None:
        """(mantissa, exponent, H'/H, relative error), or None where nothing reaches it."""
        if self.value is None:
            return None
        error = 3 * np.sqrt(_ROUND_OFF**2 + self.squares) + self.misfit
        value = self.value * (1.0 - self.correction)
        if isinstance(value, Scaled):
            return value.mantissa, value.exponent, -self.rate, error
        return value, 0, -self.rate, error


def _inverse(value: Element) -> Element:
    return 1.0 / value if isinstance(value, np.ndarray) or value else float("nan")


@dataclass(frozen=True, slots=True, eq=False)
class _Rows:
    """The rows of A·x - b, of its round-off scale and of (dA/ds)·x, one at a time."""

    numbers: Numbers
    entries: Sequence[Element]
    slopes: Sequence[Element | None]
    x: Vector
    one: Element  # the right-hand side of the last row

    def visit(self, sums: Sequence[_Sums]) -> None:
        """Give every row to the sums."""
        holding: list[Exponent] = []  # exponents are known by identity, so none may go early
        for row in range(self.numbers.size):
            places, known, exponent = self._known(row)
            if exponent is not None:
                holding.append(exponent)
            if known:
                visited = self._row(row, places, known)
                for item in sums:
                    item.add(row, *visited, exponent)

    def _known(self, row: int) -> tuple[list[int], Vector, Exponent | None]:
        """Places of the row with a known unknown, and these on one exponent."""
        columns, x = self.numbers.columns, self.x
        start, end = self.numbers.starts[row : row + 2]
        places = [place for place in range(start, end) if x[columns[place]] is not None]
        known = [x[columns[place]] for place in places]
        if row == self.numbers.size - 1:
            known.append(self.one)
        if known and isinstance(self.one, Scaled):
            return places, *aligned(known)
        return places, known, None

    def _row(
        self, row: int, places: Sequence[int], known: Vector
    ) -> tuple[Element, Element, Element | None]:
        last = row == self.numbers.size - 1
        residual: Element = -known[-1] if last else 0.0
        scale: Element = abs(residual)
        slope: Element | None = None
        for place, item in zip(places, known, strict=False):
            term = self.entries[place] * item
            residual = residual + term
            scale = scale + abs(term)
            rate = self.slopes[place]
            if rate is not None:
                slope = rate * item if slope is None else slope + rate * item
        return residual, _ROUND_OFF * scale, slope


def _stacked(answers: Sequence[Any], points: int) -> Replayed:
    shape = (len(answers), points)
    mantissa, slope = np.zeros(shape, dtype=complex), np.zeros(shape, dtype=complex)
    exponent, error = np.zeros(shape, dtype=np.int64), np.zeros(shape)
    for place, answer in enumerate(answers):
        if answer is not None:
            mantissa[place], exponent[place], slope[place], error[place] = answer
    return Replayed(mantissa, exponent, slope, error)
