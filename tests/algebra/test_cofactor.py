"""Shared minors against plain determinants."""

from __future__ import annotations

from itertools import permutations

import flint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.algebra.cofactor import MinorPlan, OverBudgetError, minors, plan_minors


@st.composite
def sparse(draw, entries=None):
    """A sparse matrix of one row fewer than columns: rows as mappings, and its width."""
    size = draw(st.integers(2, 7))
    entry = st.integers(-4, 4) if entries is None else entries
    columns = st.integers(0, size - 1)
    rows = draw(
        st.lists(
            st.dictionaries(columns, entry, min_size=0, max_size=4),
            min_size=size - 1,
            max_size=size - 1,
        )
    )
    return [{k: v for k, v in row.items() if v != 0} for row in rows], size


def minor(rows, size: int, left: int):
    """(-1)^left times the determinant without one column, by the library's own elimination."""
    matrix = [[row.get(column, 0) for column in range(size) if column != left] for row in rows]
    return (-1) ** left * flint.fmpz_mat(matrix).det()


@settings(max_examples=200)
@given(sparse())
def test_minors_are_determinants(matrix):
    """Each signed minor is the determinant that is left without its column."""
    rows, size = matrix
    plan = plan_minors([sorted(row) for row in rows])
    found = minors(rows, range(size), plan, columns=size)
    for column in range(size):
        assert found.get(column, 0) == minor(rows, size, column)


@settings(max_examples=80)
@given(sparse(), st.data())
def test_wanted_columns_are_all_that_is_computed(matrix, data):
    """Asking for some minors gives those and no others, with the same values."""
    rows, size = matrix
    plan = plan_minors([sorted(row) for row in rows])
    wanted = data.draw(st.sets(st.integers(0, size - 1)))
    found = minors(rows, wanted, plan, columns=size)
    assert set(found) <= wanted
    for column in wanted:
        assert found.get(column, 0) == minor(rows, size, column)


@settings(max_examples=80)
@given(sparse(), st.data())
def test_the_order_of_rows_changes_nothing(matrix, data):
    """Any order of the expansion gives the same minors; the parity of the order is its sign."""
    rows, size = matrix
    order = tuple(data.draw(st.permutations(range(size - 1))))
    inversions = sum(
        order[i] > order[j] for i in range(len(order)) for j in range(i + 1, len(order))
    )
    plan = MinorPlan(order, size, (-1) ** inversions)
    found = minors(rows, range(size), plan, columns=size)
    for column in range(size):
        assert found.get(column, 0) == minor(rows, size, column)


@settings(max_examples=60)
@given(sparse())
def test_minors_span_the_null_space(matrix):
    """The vector of all signed minors solves every row of the matrix."""
    rows, size = matrix
    plan = plan_minors([sorted(row) for row in rows])
    found = minors(rows, range(size), plan, columns=size)
    for row in rows:
        assert sum(value * found.get(column, 0) for column, value in row.items()) == 0


@settings(max_examples=60)
@given(sparse(st.lists(st.integers(-3, 3), min_size=1, max_size=3).map(flint.fmpz_poly)))
def test_polynomials_as_entries(matrix):
    """Over polynomials, the minors at a number are the minors of the matrix at that number."""
    rows, size = matrix
    plan = plan_minors([sorted(row) for row in rows])
    found = minors(rows, range(size), plan, columns=size)
    numbers = [{column: int(value(7)) for column, value in row.items()} for row in rows]
    for column in range(size):
        value = found[column](7) if column in found else 0
        assert value == minor(numbers, size, column)


@settings(max_examples=60)
@given(sparse())
def test_the_plan_is_a_permutation_with_its_parity(matrix):
    """A plan orders every row once and knows the sign of that permutation."""
    rows, _ = matrix
    plan = plan_minors([sorted(row) for row in rows])
    assert sorted(plan.order) == list(range(len(rows)))
    order = plan.order
    inversions = sum(
        order[i] > order[j] for i in range(len(order)) for j in range(i + 1, len(order))
    )
    assert plan.parity == (-1) ** inversions
    assert str(len(rows)) in str(plan)


def test_every_permutation_of_three_rows_has_its_sign():
    """The determinant of a permuted identity is the permutation's sign, whatever the plan says."""
    for order in permutations(range(3)):
        rows = [{column: 1} for column in order]
        plan = plan_minors([list(row) for row in rows])
        found = minors(rows, [3], plan, columns=4)
        assert found[3] == minor(rows, 4, 3)


def test_degenerate_shapes():
    """No rows: the one minor is the empty product. Two columns without entries: all are zero."""
    assert minors([{0: 1}], [0, 1, 2], plan_minors([[0]]), columns=3) == {}
    assert minors([{0: 5}], [0, 1], plan_minors([[0]]), columns=2) == {1: -5}
    assert minors([{}], [0, 1], plan_minors([[]]), columns=2) == {}


def test_a_budget_stops_the_expansion():
    """More terms at once than the budget raise OverBudgetError; enough of it changes nothing."""
    x = flint.fmpz_mpoly_ctx.get(("x", "y", "z"), "degrevlex").gens()
    rows = [{0: x[0] + x[1], 1: x[1] - 1, 2: x[2]}, {0: x[2] + 3, 1: x[0], 2: x[1] + 5}]
    plan = plan_minors([sorted(row) for row in rows])
    full = minors(rows, [0, 1, 2], plan, columns=3)
    assert minors(rows, [0, 1, 2], plan, columns=3, budget=1000) == full
    with pytest.raises(OverBudgetError):
        minors(rows, [0, 1, 2], plan, columns=3, budget=2)
