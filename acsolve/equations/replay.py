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
        _visit_rows(numbers, entries, numbers.slopes(s), x, one, sums)
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
        for row, c in zip(values, observed, strict=True):
            for column, item in c.items():
                if x[column] is not None:
                    row += x[column] * float(item)
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


def _visit_rows(
    numbers: Numbers,
    entries: Sequence[Element],
    slopes: Sequence[Element | None],
    x: Vector,
    one: Element,
    sums: Sequence[_Sums],
) -> None:
    """Give every row's A·x - b, round-off scale and (dA/ds)·x to the sums."""
    holding: list[Exponent] = []  # exponents are known by identity, so none may go early
    last = numbers.size - 1
    for row in range(numbers.size):
        places = [
            place
            for place in range(numbers.starts[row], numbers.starts[row + 1])
            if x[numbers.columns[place]] is not None
        ]
        known = [x[numbers.columns[place]] for place in places]
        if row == last:
            known.append(one)
        if not known:
            continue
        exponent = None
        if isinstance(one, Scaled):
            known, exponent = aligned(known)
            holding.append(exponent)
        residual: Element = -known[-1] if row == last else 0.0
        scale: Element = abs(residual)
        slope: Element | None = None
        for place, item in zip(places, known, strict=False):
            term = entries[place] * item
            residual = residual + term
            scale = scale + abs(term)
            if slopes[place] is not None:
                term = slopes[place] * item
                slope = term if slope is None else slope + term
        for item in sums:
            item.add(row, residual, _ROUND_OFF * scale, slope, exponent)


def _stacked(answers: Sequence[Any], points: int) -> Replayed:
    shape = (len(answers), points)
    mantissa, slope = np.zeros(shape, dtype=complex), np.zeros(shape, dtype=complex)
    exponent, error = np.zeros(shape, dtype=np.int64), np.zeros(shape)
    for place, answer in enumerate(answers):
        if answer is not None:
            mantissa[place], exponent[place], slope[place], error[place] = answer
    return Replayed(mantissa, exponent, slope, error)
