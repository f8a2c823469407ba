"""Elimination along a plan, over any field: one replay serves a whole block of points.

Elements may be Python numbers, NumPy vectors (one number a point), `Scaled` vectors or balls.
Numbers that are the same at every point stay scalars until a vector meets them. Notation: the
matrix is A = P·L·U·Q with the order of the plan; `b` is a right-hand side, x solves A·x = b,
and y solves the transposed system, so that  c·x = y·b.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from math import nan
from typing import Any, TypeAlias

import numpy as np

from acsolve.algebra.plan import Plan

Element: TypeAlias = Any  # a number, a vector of numbers, a Scaled vector or a ball
Vector: TypeAlias = list[Element]  # None stands for a structural zero


@dataclass(frozen=True, slots=True, eq=False)
class Factors:
    """An eliminated matrix with one right-hand side carried along.

    `values` holds by slot: 1/pivot on the diagonal, the multipliers of L below it, U to the
    right; `forward` holds L⁻¹·b by row.
    """

    plan: Plan
    values: Vector
    forward: Vector


def reciprocal(value: Element) -> Element:
    """1/value; not a number where a scalar is zero, so that the point shows as singular."""
    if isinstance(value, np.ndarray):
        return np.reciprocal(value)  # three quarters of the time of a quotient
    try:
        return 1.0 / value
    except ZeroDivisionError:
        return complex(nan, nan)


def factor(
    plan: Plan,
    entries: Sequence[Element],
    right: Mapping[int, Element],
    *,
    kept: Collection[int] | None = None,
) -> Factors:
    """Eliminate along a plan; divides once a pivot, multiplies otherwise.

    Parameters
    ----------
    plan : its first slots are the `entries`, in the same order.
    entries : elements of the matrix; scalars and vectors may mix.
    right : row -> element of the right-hand side; other rows are zero.
    kept : places of the steps whose rows of U will be used; None keeps all, and the
        multipliers too, which only the transposed solution needs.

    Notes
    -----
    A vector that meets a zero pivot holds non-finite numbers at that point from there on;
    the caller silences the warnings and looks at the result.

    """
    values: Vector = [*entries, *([None] * plan.fill)]
    forward: Vector = [None] * plan.size
    for row, element in right.items():
        forward[row] = element
    for place, step in enumerate(plan.steps):
        _eliminate(step, values, forward, keep_below=kept is None)
        if kept is not None and place not in kept:
            for slot in (step.pivot, *step.right):
                values[slot] = None
    return Factors(plan, values, forward)


def _eliminate(step: Any, values: Vector, forward: Vector, *, keep_below: bool) -> None:
    row, _, pivot, below, below_rows, right, _, targets = step
    inverse = values[pivot] = reciprocal(values[pivot])
    pushed = forward[row]
    rights = [values[slot] for slot in right]
    place = 0
    for slot, other in zip(below, below_rows, strict=True):
        multiplier = values[slot] * inverse
        values[slot] = multiplier if keep_below else None
        for element in rights:
            target = targets[place]
            place += 1
            old = values[target]
            term = multiplier * element
            values[target] = -term if old is None else old - term
        if pushed is not None:
            old = forward[other]
            term = multiplier * pushed
            forward[other] = -term if old is None else old - term


def backward(
    factors: Factors,
    steps: Collection[int] | None = None,
    known_before: Mapping[int, Element] | None = None,
) -> Vector:
    """Solution x by column; only the components of the given steps where they are named.

    `known_before` holds components by column that no step of the plan determines.
    """
    plan, values, forward = factors.plan, factors.values, factors.forward
    x: Vector = [None] * plan.size
    for column, element in (known_before or {}).items():
        x[column] = element
    for place in range(len(plan.steps) - 1, -1, -1):
        if steps is not None and place not in steps:
            continue
        row, column, pivot, _, _, right, right_columns, _ = plan.steps[place]
        total = forward[row]
        for slot, other in zip(right, right_columns, strict=True):
            known = x[other]
            if known is not None:
                term = values[slot] * known
                total = -term if total is None else total - term
        if total is not None:
            x[column] = total * values[pivot]
    return x


def transposed(factors: Factors, left: Mapping[int, Element]) -> Vector:
    """Solution y by row of the transposed system for a left-hand side c by column."""
    sums: Vector = [None] * factors.plan.size
    for column, element in left.items():
        sums[column] = element
    y: Vector = [None] * factors.plan.size
    transposed_down(factors, sums, y)
    transposed_up(factors, y)
    return y


def transposed_down(factors: Factors, sums: Vector, y: Vector) -> None:
    """First half of `transposed`: U, on left-hand sides by column; fills y, uses up `sums`."""
    values = factors.values
    for row, column, pivot, _, _, right, right_columns, _ in factors.plan.steps:
        if sums[column] is None:
            continue
        solved = y[row] = sums[column] * values[pivot]
        for slot, other in zip(right, right_columns, strict=True):
            term = values[slot] * solved
            old = sums[other]
            sums[other] = -term if old is None else old - term


def transposed_up(factors: Factors, y: Vector) -> None:
    """Second half of `transposed`: L, on y itself."""
    values = factors.values
    for row, _, _, below, below_rows, _, _, _ in reversed(factors.plan.steps):
        total = y[row]
        for slot, other in zip(below, below_rows, strict=True):
            known = y[other]
            if known is not None:
                term = values[slot] * known
                total = -term if total is None else total - term
        y[row] = total


def needed_steps(plan: Plan, wanted: Collection[int]) -> frozenset[int]:
    """Places of the steps whose unknowns must be known to know the wanted columns.

    Columns that no step determines need none.
    """
    place_of = {step.column: place for place, step in enumerate(plan.steps)}
    found: set[int] = set()
    stack = [place_of[column] for column in wanted if column in place_of]
    while stack:
        place = stack.pop()
        if place not in found:
            found.add(place)
            columns = plan.steps[place].right_columns
            stack.extend(place_of[column] for column in columns if column in place_of)
    return frozenset(found)
