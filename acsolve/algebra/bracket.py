"""Every root of a real function over a band, proven by enclosures and bisection.

A cell over which the function's enclosure excludes zero has no root; one over which its
slope's does has one exactly where the signs at its ends differ; any other is halved, down to
2**-40 of where it lies. What is left then is undecided, and said to be.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from acsolve.algebra.taylor import Cell, Jets, cells, enclosure, interval, refined, sign, sign_at

_FLAT = 2.0**-44  # a function this small beside its terms, over a whole cell, is not told from 0
_STRETCH = 1 << 12  # such a cell is at least this part of where it lies


@dataclass(frozen=True, slots=True)
class Root:
    """One simple root in a narrow cell; `rises` from negative to positive."""

    cell: Cell
    rises: bool


@dataclass(frozen=True, slots=True)
class Doubt:
    """A cell that may hold roots; `change` is 1, -1 or 0: the change of sign from end to end."""

    cell: Cell
    change: int


@dataclass(frozen=True, slots=True)
class Searched:
    """What a search found, in rising order, from the band's low end up to `reached`."""

    roots: tuple[Root, ...]
    doubts: tuple[Doubt, ...]
    reached: Fraction

    @property
    def decided(self) -> bool:
        """Whether nothing is in doubt up to `reached`."""
        return not self.doubts


def search(jets: Jets, band: Cell, *, most: int) -> Searched:
    """All roots over a band above zero.

    Parameters
    ----------
    jets : the function.
    band : its ends should be no roots.
    most : cells that may be looked at; the search goes upwards and stops there.
    """
    waiting = cells(band.low, band.high)[::-1]
    roots: list[Root] = []
    doubtful: list[Cell] = []
    looked = 0
    while waiting and looked < most:
        cell = waiting.pop()
        looked += 1
        found = _looked_at(jets, cell)
        if found is None:
            waiting += cell.halves()[::-1]
        elif isinstance(found, Cell):
            doubtful.append(found)
        elif found:
            roots.append(Root(refined(jets, cell, found), found > 0))
    reached = waiting[-1].low if waiting else band.high
    doubts = tuple(Doubt(cell, _change(jets, cell)) for cell in _joined(doubtful))
    return Searched(tuple(roots), doubts, reached)


def outermost(jets: Jets, band: Cell, *, last: bool, most: int) -> Root | Doubt | None:
    """The first root over a band above zero, or with `last` the last; None where there is none.

    A cell that may or may not hold it is a doubt, as is what is left when `most` cells have
    been looked at.
    """
    waiting = cells(band.low, band.high)
    if not last:
        waiting.reverse()
    for _ in range(most):
        if not waiting:
            return None
        cell = waiting.pop()
        found = _looked_at(jets, cell)
        if found is None:
            waiting += cell.halves() if last else cell.halves()[::-1]
        elif isinstance(found, Cell):
            return Doubt(found, _change(jets, found))
        elif found:
            return Root(refined(jets, cell, found), found > 0)
    left = waiting[-1]
    return Doubt(left, _change(jets, left))


def _looked_at(jets: Jets, cell: Cell) -> int | Cell | None:
    """0 for no root, 1 or -1 for one that rises or falls, the cell for doubt, None to halve it."""
    over = enclosure(jets, cell)
    if sign(over.value):
        return 0
    monotone = sign(over.slope)
    if monotone:
        first, last = sign_at(jets, cell.low), sign_at(jets, cell.high)
        if first and last:
            return 0 if first == last else monotone
    if cell.narrow or _flat(jets, cell, over.value):
        return cell
    return None


def _flat(jets: Jets, cell: Cell, value: Any) -> bool:
    """Whether the function is told from zero nowhere in a cell that is not even narrow.

    Near a touch it is small, too, but in narrow cells only.
    """
    if (cell.high - cell.low) * _STRETCH < cell.high:
        return False
    size = jets.size(interval(cell))
    if not size.is_finite():
        return False
    return bool(abs(value) < size.abs_lower() * _FLAT)


def _joined(doubtful: list[Cell]) -> Iterator[Cell]:
    """Cells that touch are one."""
    pending: Cell | None = None
    for cell in doubtful:
        if pending is not None and pending.high == cell.low:
            pending = Cell(pending.low, cell.high)
            continue
        if pending is not None:
            yield pending
        pending = cell
    if pending is not None:
        yield pending


def _change(jets: Jets, cell: Cell) -> int:
    first, last = sign_at(jets, cell.low), sign_at(jets, cell.high)
    return (last - first) // 2 if first and last else 0
