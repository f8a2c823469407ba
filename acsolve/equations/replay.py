"""One replay of a plan over a block of points, with the error of each answer and its slope.

With A·x = b and Aᵀ·y = c the answer is H = c·x. What is left of the equations, r = A·x - b,
moves it by y·r. That is the correction added here and, with the magnitudes that round-off can
have in r (W. Oettli and W. Prager, Numer. Math. 6, 1964), the estimate of what is left:

    t_i = |y_i| · (|r_i| + few eps · (|A|·|x| + |b|)_i),   error ~ 3·sqrt(sum t_i²) + |c·x - y·b|

The terms add as squares, since round-off in different equations is independent. The same y
gives the derivative: dH/ds = -y·(dA/ds)·x.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.blocks import backward_cut, factor_cut, transposed_cut
from acsolve.algebra.fronts import Fronts
from acsolve.algebra.lu import (
    Element,
    Vector,
    backward,
    factor,
    needed_steps,
    transposed,
)
from acsolve.algebra.plan import Plan
from acsolve.algebra.scaled import Exponent, Scaled, aligned, power_of_two
from acsolve.algebra.stream import streamed
from acsolve.equations.balance import Balance
from acsolve.equations.element_row import element_places, scaled_row
from acsolve.equations.late import Late
from acsolve.equations.numeric import ElementEntry, Numbers
from acsolve.equations.system import Functional

_ROUND_OFF = 4 * float(np.finfo(float).eps)  # of an entry and of one product, in all


#: None of the rows is read part by part.
NO_BALANCES: Mapping[int, Balance] = {}


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
    fronts: Fronts | None = None,
    balances: Mapping[int, Balance] = NO_BALANCES,
) -> Replayed:
    """Solve at every s in doubles: along the plan, or its heavy part in blocks.

    The rows in `balances` are checked part by part.
    """
    # Singular points make infinities and what follows from them; the caller looks for these.
    with np.errstate(all="ignore"):
        entries = numbers.at(s)
        x, values, all_y = _solved(numbers, plan, observed, entries, fronts=fronts, points=len(s))
        sums = [_Sums(value, y) for value, y in zip(values, all_y, strict=True)]
        elements = element_places(numbers)
        _Rows(numbers, s, entries, numbers.slopes(s), x, 1.0, elements, balances).visit(sums)
        return _stacked([item.answer() for item in sums], len(s))


def replay_scaled(
    numbers: Numbers,
    plan: Plan,
    observed: Sequence[Functional],
    s: NDArray[np.complex128],
    *,
    balances: Mapping[int, Balance] = NO_BALANCES,
) -> Replayed:
    """Solve with powers of two carried along, slower, for answers out of a double's range."""
    one = Scaled(np.ones(len(s), dtype=complex), np.zeros(len(s), dtype=np.int64))
    with np.errstate(all="ignore"):  # as in `replay`
        entries, slopes = numbers.scaled(s)
        factors = factor(plan, entries, {numbers.size - 1: one})
        x = backward(factors)
        values = [_value(c, x) for c in observed]
        all_y = [
            None if value is None else transposed(factors, _relative(c, value))
            for c, value in zip(observed, values, strict=True)
        ]
        del factors
        sums = [_Sums(value, y) for value, y in zip(values, all_y, strict=True)]
        elements = element_places(numbers)
        _Rows(numbers, s, entries, slopes, x, one, elements, balances).visit(sums)
        return _stacked([item.answer() for item in sums], len(s))


def replay_quick(
    numbers: Numbers,
    plan: Plan,
    observed: Sequence[Functional],
    s: NDArray[np.complex128],
    *,
    route: Fronts | Late,
) -> NDArray[np.complex128]:
    """Plain values, shape (observed, points), from the steps they need; nothing is checked.

    Its heavy part is solved in blocks, or all of it streams.
    """
    wanted = {column for c in observed for column in c}
    with np.errstate(all="ignore"):  # as in `replay`
        right = {numbers.size - 1: 1.0}
        if isinstance(route, Late):
            steps = needed_steps(plan, wanted)
            x = backward(streamed(plan, route.at(s), right, steps), steps)
        else:
            steps = needed_steps(route.light, wanted)
            x = backward_cut(factor_cut(route, numbers.at(s), right, len(s), kept=steps), steps)
        found = np.zeros((len(observed), len(s)), dtype=complex)
        for row, c in zip(found, observed, strict=True):
            value = _value(c, x)
            row[:] = 0.0 if value is None else value
        return found


def _solved(
    numbers: Numbers,
    plan: Plan,
    observed: Sequence[Functional],
    entries: Sequence[Element],
    *,
    fronts: Fronts | None,
    points: int,
) -> tuple[Vector, list[Element], list[Vector | None]]:
    """x, and for each observed quantity its value H and y/H; None where H sees nothing."""
    right = {numbers.size - 1: 1.0}
    if fronts is None:
        factors = factor(plan, entries, right)
        x = backward(factors)
    else:
        cut = factor_cut(fronts, entries, right, points)
        x = backward_cut(cut)
    values = [_value(c, x) for c in observed]
    lefts = [
        _relative(c, value) for c, value in zip(observed, values, strict=True) if value is not None
    ]
    if fronts is None:
        found = iter([transposed(factors, left) for left in lefts])
    else:
        found = iter(transposed_cut(cut, lefts))
    return x, values, [None if value is None else next(found) for value in values]


def _value(c: Functional, x: Vector) -> Element:
    """c·x, or None where all that it sees is a structural zero."""
    terms = [x[column] * float(item) for column, item in c.items() if x[column] is not None]
    return sum(terms[1:], terms[0]) if terms else None


def _relative(c: Functional, value: Element) -> dict[int, Element]:
    """c/H by column."""
    inverse = value.inverse() if isinstance(value, Scaled) else _inverse(value)
    return {column: inverse * float(item) for column, item in c.items()}


class _Sums:
    """What one observed quantity gathers from the rows, relative to its own size: y/H."""

    def __init__(self, value: Element, y: Vector | None) -> None:
        self.value: Element = None if y is None or y[-1] is None else value
        if y is None or self.value is None:
            return
        self.y = y
        other = y[-1].plain() if isinstance(y[-1], Scaled) else y[-1]
        self.misfit: Element = abs(1.0 - other)
        self.correction: Element = 0.0
        self.rate: Element = 0.0
        self.squares: Element = 0.0
        self.rough: Element = 0.0
        self.moved: Element = 0.0
        self.shifts: dict[tuple[int, int], Element] = {}

    def add(
        self,
        row: int,
        residual: Element,
        scale: Element,
        slope: Element | None,
        exponent: Exponent | None,
        rough: Element | None,
    ) -> None:
        """Take in one row: A·x - b, its round-off scale and (dA/ds)·x, on one exponent.

        `rough` is the round-off scale of the row as the elimination had it, where the residual
        is that of its parts.
        """
        weight = None if self.value is None else self.y[row]
        if weight is None:
            return
        if exponent is not None:
            weight = weight.mantissa * self._shift(weight.exponent, exponent)
        term = weight * residual
        self.correction = self.correction + term
        moved, size = abs(term), abs(weight)
        if rough is None:
            bound = moved + size * scale
        else:
            bound, before = size * scale, size * rough + moved
            self.rough = self.rough + before * before
            self.moved = self.moved + moved
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
        error = 3 * np.sqrt(_ROUND_OFF**2 + self.squares) + self._second_order()
        value = self.value * (1.0 - self.correction)
        if isinstance(value, Scaled):
            return value.mantissa, value.exponent, -self.rate, error
        return value, 0, -self.rate, error

    def _second_order(self) -> Element:
        """What the correction itself may be off by: as much as y is, of all it moved.

        Where rows are not read part by part y tells of x too, and counts as it stands.
        """
        if isinstance(self.rough, float):
            return self.misfit
        doubt = 3 * np.sqrt(self.rough) + self.misfit
        return doubt * (self.moved + doubt)


def _inverse(value: Element) -> Element:
    return 1.0 / value if isinstance(value, np.ndarray) or value else float("nan")


@dataclass(frozen=True, slots=True, eq=False)
class _Rows:
    """The rows of A·x - b, of its round-off scale and of (dA/ds)·x, one at a time."""

    numbers: Numbers
    s: NDArray[np.complex128]
    entries: Sequence[Element]
    slopes: Sequence[Element | None]
    x: Vector
    one: Element  # the right-hand side of the last row
    elements: Mapping[int, ElementEntry]  # by place
    balances: Mapping[int, Balance]

    def visit(self, sums: Sequence[_Sums]) -> None:
        """Give every row to the sums."""
        holding: list[Exponent | None] = []  # exponents are known by identity, so none may go early
        for row in range(self.numbers.size):
            places, known = self._known(row)
            if known:
                visited = self._visited(row, places, known)
                holding.append(visited[3])
                for item in sums:
                    item.add(row, *visited)

    def _known(self, row: int) -> tuple[list[int], Vector]:
        """Places of the row with a known unknown, and these."""
        columns, x = self.numbers.columns, self.x
        start, end = self.numbers.starts[row : row + 2]
        places = [place for place in range(start, end) if x[columns[place]] is not None]
        known = [x[columns[place]] for place in places]
        if row == self.numbers.size - 1:
            known.append(self.one)
        return places, known

    def _visited(
        self, row: int, places: Sequence[int], known: Vector
    ) -> tuple[Element, Element, Element | None, Exponent | None, Element | None]:
        """Residual, round-off scale and slope of one row, the exponent they share, and `rough`."""
        exponent: Exponent | None = None
        if isinstance(self.one, Scaled):
            if any(place in self.elements for place in places):
                return *self._with_elements(row, places, known), None
            known, exponent = aligned(known)
        balance = self.balances.get(row)
        if balance is None or balance.own not in places:
            return *self._row(row, places, known), exponent, None
        residual, scale, slope, rough = self._balance(balance, places, known)
        return residual, scale, slope, exponent, rough

    def _balance(
        self, balance: Balance, places: Sequence[int], known: Vector
    ) -> tuple[Element, Element, Element | None, Element]:
        """The row part by part; at last the round-off scale of its own entry."""
        own = known[places.index(balance.own)]
        slope: Element | None = None
        residual: Element = 0.0
        scale: Element = 0.0
        for place, item in zip(places, known, strict=True):
            rate = self.slopes[place]
            if rate is not None:
                slope = rate * item if slope is None else slope + rate * item
            if place == balance.own:
                continue
            term = self.entries[place] * (item - own if place in balance.across else item)
            residual = residual + term
            scale = scale + abs(term)
        for place in balance.across.difference(places):  # a voltage that is always zero
            term = -self.entries[place] * own
            residual, scale = residual + term, scale + abs(term)
        if balance.leak is not None:
            term = balance.leak.at(self.s) * own
            residual, scale = residual + term, scale + abs(term)
        rough = _ROUND_OFF * abs(self.entries[balance.own] * own)
        return residual, _ROUND_OFF * scale, slope, rough

    def _with_elements(
        self, row: int, places: Sequence[int], known: Vector
    ) -> tuple[Element, Element, Element | None, Exponent | None]:
        assert row < self.numbers.size - 1, "what is driven is no element of a two-port"
        entries, slopes = (
            [items[place] for place in places] for items in (self.entries, self.slopes)
        )
        roughness = [self._roughness(place) for place in places]
        return scaled_row(entries, slopes, known, roughness, _ROUND_OFF)

    def _roughness(self, place: int) -> Element:
        entry = self.elements.get(place)
        return 0.0 if entry is None else entry.rough(self.s)

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
            if place in self.elements:
                scale = scale + abs(term) * (self._roughness(place) / _ROUND_OFF)
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
