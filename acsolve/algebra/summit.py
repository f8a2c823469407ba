"""The largest value of a real function over a band, enclosed: branch and bound with Taylor series.

The cell with the highest upper bound is looked at first. One whose slope excludes zero is
highest at an end; one whose second derivative does holds one stationary point at most, which
is refined; any other is halved. It ends when no cell reaches above what is surely attained.
"""

from __future__ import annotations

import heapq
from dataclasses import dataclass
from fractions import Fraction
from itertools import count
from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.taylor import (
    Cell,
    Enclosure,
    Jets,
    cells,
    enclosure,
    interval,
    point,
    refined,
    sign,
    sign_at,
)

_FLAT = 2.0**-44  # a cell over which the function varies less than this is not halved
_BITS = 256


@dataclass(frozen=True, slots=True)
class Top:
    """A place that may be the highest, with the value there.

    `stationary` where it is proven to be the one place in its cell at which the slope is
    zero; else an end of the band, or a cell that could not be told apart.
    """

    cell: Cell
    value: Any
    stationary: bool = False


@dataclass(frozen=True, slots=True)
class Summit:
    """An enclosure of the largest value, and every place that may attain it, rising.

    `value` is not finite where the function is not bounded, or the search ran out. `attained`
    is a value that the function takes somewhere, as far as it is known.
    """

    value: Any
    attained: Any
    tops: tuple[Top, ...]


def summit(jets: Jets, band: Cell, *, most: int) -> Summit:
    """The largest value over a closed band above zero; at most so many cells are looked at."""
    with precision(_BITS):
        return _climbed(jets, band, most)


def _climbed(jets: Jets, band: Cell, most: int) -> Summit:
    from flint import arb

    order = count()
    heap: list[tuple[float, int, Cell, Enclosure]] = []
    best = arb("-inf")
    tops: list[Top] = []

    def put(cell: Cell) -> None:
        over = enclosure(jets, cell)
        upper = over.value.upper() if over.value.is_finite() else arb("inf")
        heapq.heappush(heap, (-float(upper), next(order), cell, over))

    for end in (band.low, band.high):
        tops.append(_at(jets, Cell(end, end)))
        best = _higher(best, tops[-1].value)
    for cell in cells(band.low, band.high):
        put(cell)
    looked = len(heap)
    while heap:
        _, _, cell, over = heapq.heappop(heap)
        if over.value.is_finite() and over.value.upper() < best:
            continue
        found = _looked_at(jets, cell, over)
        if isinstance(found, Top):
            tops.append(found)
            best = _higher(best, found.value)
        elif found:
            looked += 2
            if looked > most:
                return Summit(arb("nan"), best, ())
            best = _higher(best, _at(jets, Cell(cell.middle, cell.middle)).value)
            for half in cell.halves():
                put(half)
    return _closed(tops, best)


def _looked_at(jets: Jets, cell: Cell, over: Enclosure) -> Top | bool:
    """A candidate; or whether the cell must be halved."""
    if over.value.is_finite() and sign(over.slope):
        return False  # highest at an end: a neighbour's, or the band's
    bend = sign(over.bend)
    if over.value.is_finite() and bend:
        first, last = (sign_at(jets, x, place=1) for x in (cell.low, cell.high))
        if first and last:
            if bend > 0 or first == last:
                return False
            return _at(jets, refined(jets, cell, -1, place=1), stationary=True)
    if cell.narrow or _flat(over.value):
        return Top(cell, over.value)
    return True


def _flat(value: Any) -> bool:
    return bool(value.is_finite() and value.rad() < value.abs_lower() * _FLAT)


def _at(jets: Jets, cell: Cell, *, stationary: bool = False) -> Top:
    """The value over a very narrow cell; second order in its width at a stationary point."""
    if cell.low == cell.high:
        return Top(cell, jets(point(cell.low), 0)[0])
    width = interval(cell)
    spread = jets(width, 2)[2] * (point(cell.high - cell.low)) ** 2
    middle = jets(point(cell.middle), 1)
    linear = middle[1] * (width - point(cell.middle))
    return Top(cell, middle[0] + linear + spread * _unit(), stationary)


def _unit() -> Any:
    """The interval from -1 to 1."""
    from flint import arb

    return arb(0, 1)


def _higher(best: Any, value: Any) -> Any:
    return value.lower() if value.is_finite() and value.lower() > best else best


def _closed(tops: list[Top], best: Any) -> Summit:
    """The places that reach as high as what is attained, and the hull of their values."""
    from flint import arb

    kept = [top for top in tops if not top.value.is_finite() or top.value.upper() >= best]
    kept.sort(key=lambda top: top.cell.low)
    if any(not top.value.is_finite() for top in kept):
        return Summit(arb("inf"), best, tuple(kept))
    upper = max((top.value.upper() for top in kept), key=_order)
    middle = (best + upper) / 2
    radius = ((upper - best) / 2).abs_upper() + middle.rad()
    return Summit(arb(middle.mid(), radius), best, tuple(kept))


def _order(ball: Any) -> Fraction:
    mantissa, exponent = ball.mid().man_exp()
    return Fraction(int(mantissa)) * Fraction(2) ** int(exponent)
