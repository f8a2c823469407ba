"""Elimination by blocks over doubles: batches of dense matrices, one for each point.

For a front [[D, R], [B, F]] with the pivots' part D first, D⁻¹, U = D⁻¹·R and B are kept and
F - B·U goes to the parent. The same serves A·x = b and the transposed Aᵀ·y = c.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.cores import spread
from acsolve.algebra.fronts import Front, Fronts
from acsolve.algebra.lu import (
    Element,
    Factors,
    Vector,
    backward,
    factor,
    transposed_down,
    transposed_up,
)

Array = NDArray[np.complex128]

_BATCH = 50  # points: larger batches leave the cache, smaller ones cost calls (empirical)


@dataclass(frozen=True, slots=True, eq=False)
class Eliminated:
    """A front after its elimination; shapes (points, lines, lines)."""

    front: Front
    inverse: Array
    right: Array
    below: Array


@dataclass(frozen=True, slots=True, eq=False)
class CutFactors:
    """A matrix eliminated along fronts, with one right-hand side solved; see `lu.Factors`.

    heavy : x of the dense part, shape (m, points).
    batches : points of each batch and its fronts; empty where they were not to be kept.
    """

    fronts: Fronts
    light: Factors
    heavy: Array
    batches: tuple[tuple[slice, tuple[Eliminated, ...]], ...]


def factor_cut(
    fronts: Fronts,
    entries: Sequence[Element],
    right: Mapping[int, Element],
    points: int,
    *,
    kept: Collection[int] | None = None,
) -> CutFactors:
    """Eliminate light steps one by one, then the blocks in batches of points, on all cores.

    Parameters
    ----------
    entries, right : as in `lu.factor`, over doubles.
    points : how many there are.
    kept : places of the light steps that will be used; with these named, nothing is kept
        for a transposed solution.

    """
    light = factor(fronts.light, entries, right, kept=kept)
    own = _stacked([light.values[slot] for slot in fronts.slots], points)
    heavy = _stacked([light.forward[row] for row in fronts.rows], points)

    def batch(here: slice) -> tuple[slice, tuple[Eliminated, ...]]:
        with np.errstate(all="ignore"):  # settings of the caller do not reach a thread
            done = eliminate(fronts, own[:, here])
            heavy[:, here] = solution(done, heavy[:, here].T.copy()).T
        return here, done if kept is None else ()

    slices = [slice(at, min(at + _BATCH, points)) for at in range(0, points, _BATCH)]
    return CutFactors(fronts, light, heavy, tuple(spread(batch, slices)))


def backward_cut(factors: CutFactors, steps: Collection[int] | None = None) -> Vector:
    """x by column; of the light steps only those named."""
    known = dict(zip(factors.fronts.columns, factors.heavy, strict=True))
    return backward(factors.light, steps, known)


def transposed_cut(factors: CutFactors, lefts: Sequence[Mapping[int, Element]]) -> list[Vector]:
    """y by row for each left-hand side c by column; see `lu.transposed`."""
    fronts, light = factors.fronts, factors.light
    size, points = light.plan.size, factors.heavy.shape[1]
    all_y: list[Vector] = [[None] * size for _ in lefts]
    wanted = np.empty((len(lefts), len(fronts.rows), points), dtype=complex)
    for left, y, target in zip(lefts, all_y, wanted, strict=True):
        sums: Vector = [None] * size
        for column, element in left.items():
            sums[column] = element
        transposed_down(light, sums, y)
        target[:] = _stacked([sums[column] for column in fronts.columns], points)

    def batch(item: tuple[slice, tuple[Eliminated, ...]]) -> None:
        here, done = item
        with np.errstate(all="ignore"):  # as above
            here_wanted = np.ascontiguousarray(wanted[:, :, here].transpose(2, 0, 1))
            wanted[:, :, here] = across(done, here_wanted).transpose(1, 2, 0)

    spread(batch, factors.batches)
    for y, found in zip(all_y, wanted, strict=True):
        for row, element in zip(fronts.rows, found, strict=True):
            y[row] = element
        transposed_up(light, y)
    return all_y


def _stacked(elements: Sequence[Element], points: int) -> Array:
    """Scalars, vectors and structural zeros as rows of one array."""
    rows = np.empty((len(elements), points), dtype=complex)
    for row, element in zip(rows, elements, strict=True):
        row[:] = 0.0 if element is None else element
    return rows


def eliminate(fronts: Fronts, own: Array) -> tuple[Eliminated, ...]:
    """All blocks, from the entries that the light steps left, shape (slots, points)."""
    left: dict[int, Array] = {}
    done: list[Eliminated] = []
    for place, front in enumerate(fronts.blocks):
        full = _assembled(front, own, left)
        pivots = len(front.pivots)
        inverse = _inverse(full[:, :pivots, :pivots])
        below = full[:, pivots:, :pivots]
        right = np.matmul(inverse, full[:, :pivots, pivots:])
        if len(front.others):
            rest = np.matmul(below, right)
            left[place] = np.subtract(full[:, pivots:, pivots:], rest, out=rest)
        done.append(Eliminated(front, inverse, right, np.ascontiguousarray(below)))
    return tuple(done)


def _assembled(front: Front, own: Array, left: dict[int, Array]) -> Array:
    first, last = front.own
    points, width = own.shape[1], front.width
    full = np.zeros((points, width * width), dtype=complex)
    full[:, front.own_at] = own[first:last].T
    for child, spots in front.children:
        full[:, spots] += left.pop(child).reshape(points, -1)
    return full.reshape(points, width, width)


def _inverse(matrices: Array) -> Array:
    """Inverses, shape (points, n, n); not a number where a matrix is singular."""
    try:
        return np.asarray(np.linalg.inv(matrices))
    except np.linalg.LinAlgError:
        found = np.full(matrices.shape, complex(np.nan, np.nan))
        for at, matrix in enumerate(matrices):
            try:
                found[at] = np.linalg.inv(matrix)
            except np.linalg.LinAlgError:
                continue  # stays not a number, so that the point shows as singular
        return found


def solution(done: Sequence[Eliminated], right: Array) -> Array:
    """x, shape (points, m), for a right-hand side of that shape, which is used up."""
    for item in done:
        pivots, others = item.front.pivots, item.front.others
        known = _times(item.inverse, right[:, pivots])
        right[:, pivots] = known
        right[:, others] -= _times(item.below, known)
    for item in reversed(done):
        pivots, others = item.front.pivots, item.front.others
        right[:, pivots] -= _times(item.right, right[:, others])
    return right


def _times(matrices: Array, vectors: Array) -> Array:
    return np.asarray(np.matmul(matrices, vectors[:, :, None])[:, :, 0])


def across(done: Sequence[Eliminated], left: Array) -> Array:
    """y of the transposed system, shape (points, outputs, m), from c of that shape, used up."""
    for item in done:
        pivots, others = item.front.pivots, item.front.others
        left[:, :, others] -= np.matmul(left[:, :, pivots], item.right)
    for item in reversed(done):
        pivots, others = item.front.pivots, item.front.others
        wanted = left[:, :, pivots] - np.matmul(left[:, :, others], item.below)
        left[:, :, pivots] = np.matmul(wanted, item.inverse)
    return left
