"""The order in which a sparse matrix is eliminated, worked out once and replayed often.

Pivots are chosen for little fill (H. M. Markowitz, "The elimination form of the inverse and
its application to linear programming", Management Science 3, 1957), among few lines only
(Z. Zlatev, "On some pivotal strategies in Gaussian elimination by sparse technique", SIAM J.
Numer. Anal. 17, 1980), and never where the number at that place is small against its row and
column, or left over from a cancellation, at one of a few sample points. A plan is pure data: it
holds no number of the matrix and serves every field.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from heapq import heapify, heappop, heappush
from operator import mul, sub, truediv
from typing import Any, NamedTuple, TypeAlias

import numpy as np
from numpy.typing import NDArray

Samples: TypeAlias = list[complex]

_THRESHOLD = 0.02  # least size of a pivot against its column or row, after equilibration
_CANCELLED = 1e-9  # a number this small against what it was made of counts as zero
_LAST_RESORT = 1e-12  # relative size given to what is zero at some samples, but not at all
_LINES = 4  # lines of a similar count that are compared before one is taken (empirical)
_MANY = 64  # updates of one step from which samples are kept in arrays, not lists (empirical)
_EQUILIBRATIONS = 4  # passes; each halves the exponents that are left


class Step(NamedTuple):
    """One elimination. Numbers of slots say where values stand; see `Plan`.

    For each slot in `below` (outer loop) and each in `right` (inner loop) one slot of
    `targets` receives the update  a[target] -= a[below] / a[pivot] * a[right].
    """

    row: int
    column: int
    pivot: int
    below: tuple[int, ...]
    below_rows: tuple[int, ...]
    right: tuple[int, ...]
    right_columns: tuple[int, ...]
    targets: tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Plan:
    """An elimination order for one pattern.

    The matrix's own entries stand in slots 0 to `entries` - 1, in the order in which they
    were given, fill in those after them up to `slots` - 1. `undetermined` lists the columns
    for which no pivot was found: the matrix is singular at every sample where there are any.
    `remark` is printed with the plan: how it is run.
    """

    size: int
    entries: int
    slots: int
    steps: tuple[Step, ...]
    undetermined: tuple[int, ...] = ()
    remark: str = ""

    @property
    def fill(self) -> int:
        """Entries that the elimination creates."""
        return self.slots - self.entries

    @property
    def multiplications(self) -> int:
        """Products of one replay with one right-hand side."""
        return sum(
            len(step.targets) + 2 * len(step.below) + len(step.right) + 1 for step in self.steps
        )

    @property
    def order(self) -> tuple[tuple[int, int], ...]:
        """Row and column of each pivot, in order."""
        return tuple((step.row, step.column) for step in self.steps)

    def __str__(self) -> str:
        head = (
            f"elimination of {self.size} unknowns: {self.entries} entries, fill {self.fill}, "
            f"{self.multiplications} multiplications"
        )
        shown = ", ".join(f"({row}, {column})" for row, column in self.order[:_SHOWN])
        more = ", …" if self.size > _SHOWN else ""
        remark = f"\n{self.remark}" if self.remark else ""
        return f"{head}\npivots (row, column): {shown}{more}{remark}"


_SHOWN = 12  # pivots in the printed form


def plan_elimination(
    rows: Sequence[int], columns: Sequence[int], samples: NDArray[Any], *, size: int
) -> Plan:
    """Choose an elimination order for a square sparse matrix.

    Parameters
    ----------
    rows, columns : place of each entry; no place occurs twice.
    samples : complex, shape (entries, points)
        the entries at a few representative points.
    size : number of rows and of columns.

    Notes
    -----
    Cost is near linear for ladders and trees: lines stand in a heap by their count and are
    looked at again only after a change. The result is the same for the same input.

    """
    scaled = _equilibrated(np.asarray(rows), np.asarray(columns), samples, size)
    return _Elimination(rows, columns, scaled, size).plan()


def _equilibrated(
    rows: NDArray[Any], columns: NDArray[Any], samples: NDArray[Any], size: int
) -> NDArray[np.complex128]:
    """The samples with rows and columns scaled so that their largest entries are near 1.

    Each pass divides by the square roots of the largest magnitudes (D. Ruiz, "A scaling
    algorithm to equilibrate both rows and columns norms in matrices", RAL-TR-2001-034).
    """
    scaled = np.array(samples, dtype=complex)
    for point in range(scaled.shape[1]):
        values = scaled[:, point]
        for _ in range(_EQUILIBRATIONS):
            sizes = np.abs(values)
            factor = np.ones(len(sizes))
            for lines in (rows, columns):
                largest = np.zeros(size)
                np.maximum.at(largest, lines, sizes)
                largest[largest == 0] = 1
                factor *= np.sqrt(largest[lines])
            values /= factor
    return scaled


class _Elimination:
    """The elimination in progress, on a few samples; lines are rows (1) or columns (0)."""

    def __init__(
        self, rows: Sequence[int], columns: Sequence[int], samples: NDArray[Any], size: int
    ) -> None:
        self.size = size
        self.entries = len(rows)
        self.values: list[Samples] = samples.tolist()
        self.made_of: list[list[float]] = np.abs(samples).tolist()
        self.arrays: _Arrays | None = None  # takes over from the lists where steps grow
        self.slots = len(rows)
        self.lines: tuple[list[dict[int, int]], list[dict[int, int]]] = (
            [{} for _ in range(size)],
            [{} for _ in range(size)],
        )
        for slot, (row, column) in enumerate(zip(rows, columns, strict=True)):
            self.lines[1][row][column] = slot
            self.lines[0][column][row] = slot
        self.active = ([True] * size, [True] * size)
        self.heap = [(len(self.lines[kind][at]), kind, at) for kind in (0, 1) for at in range(size)]
        heapify(self.heap)
        self.steps: list[Step] = []
        self.touched: tuple[int, int] | None = None  # row and column beside the last pivot

    def plan(self) -> Plan:
        """Eliminate until nothing is left or nothing can be a pivot."""
        for threshold in (_THRESHOLD, 0.0):
            while (place := self._next(threshold) or self._choose(threshold)) is not None:
                self._eliminate(*place)
            self._all_again()
        return Plan(
            self.size,
            self.entries,
            self.slots,
            tuple(self.steps),
            tuple(column for column in range(self.size) if self.active[0][column]),
        )

    def _all_again(self) -> None:
        self.heap = [
            (len(self.lines[kind][at]), kind, at)
            for kind in (0, 1)
            for at in range(self.size)
            if self.active[kind][at]
        ]
        heapify(self.heap)

    def _next(self, threshold: float) -> tuple[int, int] | None:
        """The place beside the last pivot, where nothing can be cheaper: along a ladder.

        Its row and column are in the heap again only if it is not taken, which spares most of
        the heap's work in long networks.
        """
        if self.touched is None:
            return None
        row, column = self.touched
        line, across = self.lines[1][row], self.lines[0][column]
        if len(line) <= 2 >= len(across) and (not self.heap or self.heap[0][0] > 1):
            here = self._largest(line) if len(line) > 1 else None
            if self._relative_size(line[column], here, across) > threshold:
                return self.touched
        self._put_back((row,), (column,))
        self.touched = None
        return None

    def _choose(self, threshold: float) -> tuple[int, int] | None:
        """The next pivot, or None. A line without one is set aside until it changes."""
        best: tuple[int, float, int, int] | None = None
        seen: list[tuple[int, int, int]] = []
        while self.heap and len(seen) < _LINES:
            count, kind, at = self.heap[0]
            if best is not None and best[0] <= (count - 1) ** 2:
                break
            heappop(self.heap)
            if not self.active[kind][at] or count != len(self.lines[kind][at]):
                continue
            found = self._best_in(kind, at, threshold)
            if found is not None:
                seen.append((count, kind, at))
                best = found if best is None else min(best, found)
        for item in seen:
            heappush(self.heap, item)
        return None if best is None else (best[2], best[3])

    def _best_in(self, kind: int, at: int, threshold: float) -> tuple[int, float, int, int] | None:
        """(cost, -relative size, row, column) of a line's best pivot."""
        line, across = self.lines[kind][at], self.lines[1 - kind]
        best: tuple[int, float, int, int] | None = None
        here = self._largest(line) if len(line) > 1 else None
        for other, slot in line.items():
            cost = (len(line) - 1) * (len(across[other]) - 1)
            if best is not None and cost > best[0]:
                continue
            size = self._relative_size(slot, here, across[other])
            if size > threshold:
                row, column = (at, other) if kind else (other, at)
                candidate = (cost, -size, row, column)
                best = candidate if best is None else min(best, candidate)
        return best

    def _relative_size(self, slot: int, here: list[float] | None, there: dict[int, int]) -> float:
        """Least size over the samples against its row or column; 1 alone there, 0 for zero."""
        values, made_of = self._samples(slot)
        sizes = [
            size if (size := abs(value)) > _CANCELLED * made else 0.0
            for value, made in zip(values, made_of)  # noqa: B905 - of one length, and often
        ]
        if not all(sizes):
            return _LAST_RESORT * any(sizes)
        if here is None or len(there) == 1:
            return 1.0
        relative: float = min(map(truediv, sizes, here))
        if relative > _THRESHOLD:
            return relative
        limits = map(min, here, self._largest(there))
        return float(min(map(truediv, sizes, limits)))

    def _samples(self, slot: int) -> tuple[Samples, list[float]]:
        """An entry and the size of what it was made of, at each sample."""
        if self.arrays is None:
            return self.values[slot], self.made_of[slot]
        return self.arrays.values[slot].tolist(), self.arrays.made_of[slot].tolist()

    def _largest(self, line: dict[int, int]) -> list[float]:
        if self.arrays is not None:
            sizes: list[float] = np.abs(self.arrays.values[list(line.values())]).max(0).tolist()
            return sizes
        values = self.values
        points = zip(*[values[slot] for slot in line.values()], strict=True)
        return [max(map(abs, point)) for point in points]

    def _eliminate(self, row: int, column: int) -> None:
        by_column, by_row = self.lines
        pivot_row, pivot_column = by_row[row], by_column[column]
        pivot = pivot_row.pop(column)
        del pivot_column[row]
        if self.arrays is None and len(pivot_row) * len(pivot_column) >= _MANY:
            self.arrays = _Arrays(self.values, self.made_of)
        targets = self._targets(pivot_row, pivot_column)
        below, right = list(pivot_column.values()), list(pivot_row.values())
        if self.arrays is None:
            self._update(pivot, below, right, targets)
        else:
            self.arrays.update(pivot, below, right, targets, self.slots)
        for other_row in pivot_column:
            del by_row[other_row][column]
        for other_column in pivot_row:
            del by_column[other_column][row]
        if len(pivot_row) == len(pivot_column) == 1:
            self.touched = other_row, other_column
        else:
            self.touched = None
            self._put_back(pivot_column, pivot_row)
        self.active[1][row] = self.active[0][column] = False
        self.steps.append(
            Step(
                row,
                column,
                pivot,
                tuple(pivot_column.values()),
                tuple(pivot_column),
                tuple(pivot_row.values()),
                tuple(pivot_row),
                tuple(targets),
            )
        )

    def _put_back(self, rows: Iterable[int], columns: Iterable[int]) -> None:
        """Lines that have changed, with their new counts."""
        for kind, lines in ((1, rows), (0, columns)):
            for at in lines:
                heappush(self.heap, (len(self.lines[kind][at]), kind, at))

    def _targets(self, pivot_row: dict[int, int], pivot_column: dict[int, int]) -> list[int]:
        """Slots of the updates, row by row; places without an entry get one."""
        by_column, by_row = self.lines
        targets: list[int] = []
        for row in pivot_column:
            line = by_row[row]
            for column in pivot_row:
                target = line.get(column)
                if target is None:
                    target = line[column] = by_column[column][row] = self.slots
                    self.slots += 1
                targets.append(target)
        return targets

    def _update(
        self, pivot: int, below: Sequence[int], right: Sequence[int], targets: Sequence[int]
    ) -> None:
        """Subtract multiples of the pivot row; entries that are new stand at the end."""
        values, made_of = self.values, self.made_of
        values[pivot] = [value or 1.0 for value in values[pivot]]  # a last resort
        place = 0
        for slot in below:
            factors = list(map(truediv, values[slot], values[pivot]))
            for other in right:
                target = targets[place]
                place += 1
                terms = list(map(mul, factors, values[other]))
                if target == len(values):
                    values.append([-term for term in terms])
                    made_of.append([abs(term) for term in terms])
                else:
                    values[target] = list(map(sub, values[target], terms))
                    made_of[target] = list(map(max, made_of[target], map(abs, terms)))


class _Arrays:
    """The samples as arrays with room to grow, shape (slots, samples): one update a step."""

    def __init__(self, values: list[Samples], made_of: list[list[float]]) -> None:
        self.values = np.array(values)
        self.made_of = np.array(made_of)

    def update(
        self,
        pivot: int,
        below: Sequence[int],
        right: Sequence[int],
        targets: Sequence[int],
        slots: int,
    ) -> None:
        """Subtract multiples of the pivot row; `slots` counts the new entries, too."""
        if slots > len(self.values):
            room = ((0, slots), (0, 0))
            self.values, self.made_of = np.pad(self.values, room), np.pad(self.made_of, room)
        values, made_of = self.values, self.made_of
        values[pivot][values[pivot] == 0] = 1.0  # a last resort
        if not targets:
            return
        with np.errstate(all="ignore"):  # silent as plain numbers are
            factors = values[below] / values[pivot]
            terms = (factors[:, None] * values[right]).reshape(len(targets), -1)
            values[targets] -= terms
            made_of[targets] = np.maximum(made_of[targets], np.abs(terms))
