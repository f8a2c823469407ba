"""Maximal minors of a sparse matrix with one row fewer than columns, all shared.

Cofactor expansion row by row, memoised on the set of columns already used (P. S. Laplace,
1772; the memoised form is dynamic programming over column sets). Rows are ordered so that
few columns are open at a time; a set that leaves a finished column unused is kept only if
that column may be the one left out. Runs over any commutative ring whose elements have
`+`, `-` and `*`.
"""

from __future__ import annotations

from collections.abc import Collection, Mapping, Sequence
from dataclasses import dataclass
from typing import Any, TypeAlias

Element: TypeAlias = Any  # an element of the ring: fmpz_mpoly, fmpz_poly, int, ...
SparseRow: TypeAlias = Mapping[int, Element]


@dataclass(frozen=True, slots=True)
class MinorPlan:
    """An order of the rows for a pattern; `width` is the largest number of open columns."""

    order: tuple[int, ...]
    width: int
    parity: int  # +1 or -1: the sign of the row permutation

    def __str__(self) -> str:
        return f"expansion of {len(self.order)} rows, at most {self.width} columns open"


def plan_minors(pattern: Sequence[Collection[int]]) -> MinorPlan:
    """Order rows greedily: always the row that opens the fewest columns net of those closed.

    Parameters
    ----------
    pattern : for each row the columns of its entries.
    """
    rows_of: dict[int, set[int]] = {}
    for row, columns in enumerate(pattern):
        for column in columns:
            rows_of.setdefault(column, set()).add(row)
    left, order = set(range(len(pattern))), []
    opened: set[int] = set()
    open_now = width = 0
    candidates = set(left)

    def cost(row: int) -> tuple[int, int, int]:
        new = sum(column not in opened for column in pattern[row])
        closed = sum(len(rows_of[column]) == 1 for column in pattern[row])
        return new - closed, len(pattern[row]), row

    while left:
        row = min(candidates or left, key=cost)
        new, closed = 0, 0
        left.discard(row)
        order.append(row)
        candidates = set()
        for column in pattern[row]:
            if column not in opened:
                opened.add(column)
                new += 1
            rows_of[column].discard(row)
            closed += not rows_of[column]
        width = max(width, open_now + new)
        open_now += new - closed
        candidates = (
            {other for column in opened for other in rows_of[column]}
            if len(left) < _SMALL
            else _near(pattern[row], rows_of, opened)
        )
    return MinorPlan(tuple(order), width, _parity(order))


_SMALL = 400  # above this many rows only neighbours of the last row are looked at (empirical)


def _near(row: Collection[int], rows_of: Mapping[int, set[int]], opened: set[int]) -> set[int]:
    near = {other for column in row for other in rows_of[column]}
    if near:
        return near
    return {other for column in opened for other in rows_of[column]}


def _parity(order: Sequence[int]) -> int:
    seen, sign = [False] * len(order), 1
    for start in range(len(order)):
        length, place = 0, start
        while not seen[place]:
            seen[place] = True
            place = order[place]
            length += 1
        if length and length % 2 == 0:
            sign = -sign
    return sign


class OverBudgetError(ArithmeticError):
    """The expansion would hold more terms at once than allowed."""


@dataclass(frozen=True, slots=True)
class _Rules:
    """What the expansion may leave out, and how much it may hold."""

    wanted: Collection[int]
    budget: int | None


def minors(
    rows: Sequence[SparseRow],
    wanted: Collection[int],
    plan: MinorPlan,
    *,
    columns: int,
    budget: int | None = None,
) -> dict[int, Element]:
    """Signed maximal minors: for each wanted column j, (-1)^j · det(matrix without column j).

    Together they span the null space of the matrix where its rank is full.

    Parameters
    ----------
    rows : n-1 sparse rows, column -> element; structural zeros are left out.
    wanted : the columns j asked for; others are not computed.
    plan : from `plan_minors` on the pattern of these rows.
    columns : n, the number of columns.
    budget : the largest number of terms (`len` of the elements) held at once.

    Raises
    ------
    OverBudgetError
        more terms than the budget; raised before they are all computed.

    Returns
    -------
    column -> element; columns whose minor is structurally zero are left out.
    """
    last = {column: step for step, row in enumerate(plan.order) for column in rows[row]}
    mentioned = set(last)
    missing = [column for column in range(columns) if column not in mentioned]
    if len(missing) > 1 or any(column not in wanted for column in missing):
        return {}  # more than one free unknown: every minor is zero
    closing: dict[int, list[int]] = {}
    for column, step in last.items():
        closing.setdefault(step, []).append(column)
    rules = _Rules(wanted, budget)
    state: dict[tuple[int, int], Element] = {(0, missing[0] if missing else -1): None}
    for step, row in enumerate(plan.order):
        state = _advance(state, rows[row], closing.get(step, ()), rules)
        if not state:
            return {}
    return {
        left: _signed(value, plan.parity * (-1 if left % 2 else 1))
        for (_, left), value in state.items()
        if left >= 0
    }


def _advance(
    state: Mapping[tuple[int, int], Element],
    row: SparseRow,
    closing: Sequence[int],
    rules: _Rules,
) -> dict[tuple[int, int], Element]:
    """Expand every state by one row; a state is (columns used, column left out or -1)."""
    following: dict[tuple[int, int], Element] = {}
    spent = 0
    entries = [(column, entry, _unit(entry)) for column, entry in sorted(row.items())]
    for (mask, left), value in state.items():
        for column, entry, unit in entries:
            bit = 1 << column
            if mask & bit or column == left:
                continue
            key = _closed(mask | bit, left, closing, rules.wanted)
            if key is None:
                continue
            negative = (mask >> column).bit_count() % 2 == 1
            if value is None:
                term = entry
            elif unit:  # a product with one would copy the whole polynomial
                term, negative = value, negative != (unit < 0)
            else:
                term = value * entry
            if rules.budget is not None and (spent := spent + len(term)) > rules.budget:
                raise OverBudgetError
            if key not in following:
                following[key] = -term if negative else term
            else:
                following[key] = following[key] - term if negative else following[key] + term
    return {key: value for key, value in following.items() if value != 0}


def _unit(entry: Element) -> int:
    """1 or -1 where the entry is that, else 0."""
    return 1 if entry == 1 else -1 if entry == -1 else 0


def _closed(
    mask: int, left: int, closing: Sequence[int], wanted: Collection[int]
) -> tuple[int, int] | None:
    """The key after columns close: each must be used, save the one that is left out."""
    for column in closing:
        if not mask >> column & 1:
            if left == column:
                continue
            if left >= 0 or column not in wanted:
                return None
            left = column
    return mask, left


def _signed(value: Element, sign: int) -> Element:
    return value if sign > 0 else -value
