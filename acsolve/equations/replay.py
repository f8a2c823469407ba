"""One replay of a plan over a block of points, with the error of each answer and its slope.

With A·x = b and Aᵀ·y = c the answer is H = c·x. What is left of the equations, r = A·x - b, moves
it by y·r, which is both the correction added here and, with the magnitudes that round-off
can have in r (W. Oettli and W. Prager, Numer. Math. 6, 1964), the estimate of what is left:

    |error| <= sum_i |y_i| · (|r_i| + few eps · (|A|·|x| + |b|)_i) + |c·x - y·b|

The same y gives the derivative: dH/ds = -y·(dA/ds)·x.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.lu import Element, Vector, backward, factor, transposed
from acsolve.algebra.plan import Plan
from acsolve.algebra.scaled import Scaled
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


@dataclass(frozen=True, slots=True, eq=False)
class _Rows:
    """By row: A·x - b, its round-off scale, and (dA/ds)·x; None where nothing is."""

    residual: Vector
    scale: Vector
    slope: Vector


def replay(
    numbers: Numbers,
    plan: Plan,
    observed: Sequence[Functional],
    s: NDArray[np.complex128],
    *,
    scaled: bool,
) -> Replayed:
    """Solve at every s; `scaled` carries powers of two, slower, for answers out of range."""
    one: Element = Scaled.of(np.ones(len(s), dtype=complex)) if scaled else 1.0
    # Singular points make infinities and what follows from them; the caller looks for these.
    with np.errstate(all="ignore"):
        entries = numbers.at(s)
        factors = factor(plan, entries, {numbers.size - 1: one})
        x = backward(factors)
        rows = _rows(numbers, entries, numbers.slopes(s), x, one)
        answers = [
            _answer(c, x, transposed(factors, _of(c, one)), rows, numbers.size - 1)
            for c in observed
        ]
        return _stacked(answers, len(s))


def _of(functional: Functional, one: Element) -> Mapping[int, Element]:
    return {column: one * float(item) for column, item in functional.items()}


def _rows(
    numbers: Numbers, entries: Sequence[Element], slopes: Sequence[Element], x: Vector, one: Element
) -> _Rows:
    residual: Vector = [None] * numbers.size
    scale: Vector = [None] * numbers.size
    slope: Vector = [None] * numbers.size
    residual[-1], scale[-1] = -one, _size(one)
    sizes = [None if item is None else _size(item) for item in x]
    entry_sizes: dict[int, Element] = {}
    for row, column, entry, rate in zip(
        numbers.rows, numbers.columns, entries, slopes, strict=True
    ):
        known = x[column]
        if known is None:
            continue
        size = entry_sizes.get(id(entry))
        if size is None:
            size = entry_sizes[id(entry)] = _size(entry)
        _add(residual, row, entry * known)
        _add(scale, row, size * sizes[column])
        if rate is not None:
            _add(slope, row, rate * known)
    return _Rows(residual, scale, slope)


def _add(sums: Vector, place: int, term: Element) -> None:
    old = sums[place]
    sums[place] = term if old is None else old + term


def _size(item: Element) -> Element:
    """|real| + |imaginary|: as good as the magnitude in a bound, and much cheaper."""
    if isinstance(item, Scaled):
        return item.size()
    if isinstance(item, np.ndarray):
        return np.abs(item.real) + np.abs(item.imag)
    return abs(item)


def _answer(
    c: Functional, x: Vector, y: Vector, rows: _Rows, driven: int
) -> tuple[Element, Element, Element] | None:
    """(H, H'/H, relative error), or None where H is zero because nothing reaches it."""
    direct = _sum(x[column] * float(item) for column, item in c.items() if x[column] is not None)
    if direct is None or y[driven] is None:
        return None
    correction = bound = rate = None
    for weight, residual, scale, slope in zip(
        y, rows.residual, rows.scale, rows.slope, strict=True
    ):
        if weight is None or scale is None:
            continue
        term = weight * residual
        correction = term if correction is None else correction + term
        term = _size(weight) * (_size(residual) + _ROUND_OFF * scale)
        bound = term if bound is None else bound + term
        if slope is not None:
            term = weight * slope
            rate = term if rate is None else rate + term
    answer = direct - correction
    bound = bound + _size(direct - y[driven])
    return answer, _over(rate, answer, -1.0), _over(bound, _size(answer), 1.0)


def _sum(terms: Any) -> Element | None:
    total = None
    for term in terms:
        total = term if total is None else total + term
    return total


def _over(top: Element | None, bottom: Element, sign: float) -> Element:
    if top is None:
        return 0.0
    if isinstance(top, Scaled):
        return sign * top.over(bottom)
    return sign * np.divide(top, bottom)


def _stacked(answers: Sequence[Any], points: int) -> Replayed:
    shape = (len(answers), points)
    mantissa, slope = np.zeros(shape, dtype=complex), np.zeros(shape, dtype=complex)
    exponent, error = np.zeros(shape, dtype=np.int64), np.zeros(shape)
    for place, answer in enumerate(answers):
        if answer is None:
            continue
        value, slope[place], error[place] = answer
        if isinstance(value, Scaled):
            mantissa[place], exponent[place] = value.mantissa, value.exponent
        else:
            mantissa[place] = value
    return Replayed(mantissa, exponent, slope, error)
