"""Plans and their replay over vectors, scaled vectors and balls."""

from __future__ import annotations

from fractions import Fraction

import flint
import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from acsolve.algebra.ball import precision
from acsolve.algebra.lu import backward, factor, needed_steps, transposed
from acsolve.algebra.plan import Plan, plan_elimination
from acsolve.algebra.scaled import Scaled, aligned, normal, power_of_two

POINTS = 5


def plan_of(entries: dict[tuple[int, int], object], size: int, *, points: int = POINTS) -> Plan:
    """A plan that sees every point as a sample."""
    samples = np.zeros((len(entries), points), dtype=complex)
    for row, value in zip(samples, entries.values(), strict=True):
        row[:] = value
    rows, columns = zip(*entries, strict=True)
    return plan_elimination(rows, columns, samples, size=size)


def dense(entries: dict[tuple[int, int], object], size: int) -> np.ndarray:
    """The same matrix, one dense one for each point."""
    full = np.zeros((POINTS, size, size), dtype=complex)
    for (row, column), value in entries.items():
        full[:, row, column] = value
    return full


def chain(size: int) -> dict[tuple[int, int], object]:
    """The pattern of a ladder: a diagonal with a vector, scalars beside it."""
    entries: dict[tuple[int, int], object] = {}
    for at in range(size):
        entries[at, at] = 2.5 + 0.1 * at + 1j * np.arange(1, POINTS + 1)
        if at:
            entries[at, at - 1] = entries[at - 1, at] = -1.0
    return entries


@st.composite
def matrices(draw) -> tuple[dict[tuple[int, int], object], int]:
    """A sparse matrix with a transversal, some entries scalars and some vectors."""
    size = draw(st.integers(1, 8))
    crossing = draw(st.permutations(range(size)))
    extra = draw(st.lists(st.tuples(*[st.integers(0, size - 1)] * 2), max_size=3 * size))
    number = st.integers(-9, 9).filter(bool)
    entries: dict[tuple[int, int], object] = {}
    for place in [*enumerate(crossing), *extra]:
        if place not in entries:
            values = draw(st.lists(number, min_size=POINTS, max_size=POINTS))
            entries[place] = (
                float(values[0]) if draw(st.booleans()) else np.array(values) + 1j * values[0]
            )
    return entries, size


@given(matrices(), st.data())
def test_solution_is_that_of_the_dense_matrix(given_matrix, data):
    """A·x = b, and x agrees with the dense solution to a few units times the condition."""
    entries, size = given_matrix
    full = dense(entries, size)
    worst = np.linalg.cond(full).max()
    assume(worst < 1e8)
    plan = plan_of(entries, size)
    assert not plan.undetermined
    row = data.draw(st.integers(0, size - 1))
    x = backward(factor(plan, list(entries.values()), {row: 1.0}))
    expected = np.linalg.solve(full, np.eye(size)[:, row : row + 1][None].repeat(POINTS, 0))[..., 0]
    got = np.array([np.broadcast_to(0.0 if item is None else item, POINTS) for item in x]).T
    assert np.abs(got - expected).max() <= 1e-12 * worst * max(np.abs(expected).max(), 1e-3)


@given(matrices(), st.data())
def test_transposed_solution_sees_the_same_answer(given_matrix, data):
    """c·x = y·b for the solution x of A·x = b and y of the transposed system."""
    entries, size = given_matrix
    assume(np.linalg.cond(dense(entries, size)).max() < 1e6)
    plan = plan_of(entries, size)
    row, column = data.draw(st.tuples(*[st.integers(0, size - 1)] * 2))
    factors = factor(plan, list(entries.values()), {row: 1.0})
    direct, across = backward(factors)[column], transposed(factors, {column: 1.0})[row]
    direct, across = (0.0 if item is None else item for item in (direct, across))
    assert np.allclose(direct, across, rtol=1e-9, atol=1e-12)


@given(matrices())
def test_plan_uses_every_row_and_column_once(given_matrix):
    """The pivots of a plan are a permutation, and its slots are counted without gaps."""
    entries, size = given_matrix
    assume(np.linalg.cond(dense(entries, size)).max() < 1e8)
    plan = plan_of(entries, size)
    rows, columns = zip(*plan.order, strict=True)
    assert sorted(rows) == sorted(columns) == list(range(size))
    slots = {slot for step in plan.steps for slot in (step.pivot, *step.below, *step.right)}
    assert slots == set(range(plan.slots))
    assert plan == plan_of(entries, size), "the same matrix gave another plan"


@pytest.mark.parametrize("size", [1, 2, 3, 50, 3000])
def test_chain_has_no_fill(size):
    """A ladder is eliminated without fill, in a number of products that grows linearly."""
    plan = plan_of(chain(size), size)
    assert plan.fill == 0
    assert plan.multiplications <= 5 * size


def test_tree_has_no_fill():
    """A network without loops is eliminated without fill, whatever its numbering."""
    size = 127
    entries: dict[tuple[int, int], object] = {(at, at): 4.0 for at in range(size)}
    for at in range(1, size):
        entries[at, (at - 1) // 2] = entries[(at - 1) // 2, at] = -1.0
    assert plan_of(entries, size).fill == 0


def test_cancelled_pivot_is_refused():
    """An entry that the elimination has cancelled is never a pivot while another will do."""
    third = 1 / 3
    entries: dict[tuple[int, int], object] = {
        (0, 0): 3.0,
        (0, 1): 1.0,
        (1, 0): 1.0,
        (1, 1): third,  # less 1·1/3: exactly zero, or round-off
        (1, 2): 1.0,
        (2, 1): 1.0,
        (2, 2): 5.0,
    }
    plan = plan_of(entries, 3)
    x = backward(factor(plan, list(entries.values()), {0: 1.0}))
    assert np.allclose(x, np.linalg.solve(dense(entries, 3)[0], [1, 0, 0]), rtol=1e-14)


def test_small_pivot_is_refused():
    """A pivot that is small against both its row and its column is put off."""
    entries: dict[tuple[int, int], object] = {(0, 0): 1e-20, (0, 1): 1.0, (1, 0): 1.0, (1, 1): 1.0}
    plan = plan_of(entries, 2)
    x = backward(factor(plan, list(entries.values()), {0: 1.0, 1: 2.0}))
    assert x == pytest.approx([1.0, 1.0], rel=1e-15)


def test_singular_matrix_leaves_a_column_undetermined():
    """A matrix that is singular at every sample has no full set of pivots."""
    entries: dict[tuple[int, int], object] = {(0, 0): 1.0, (0, 1): 2.0, (1, 0): 2.0, (1, 1): 4.0}
    assert len(plan_of(entries, 2).undetermined) == 1


def test_row_that_is_zero_at_one_sample_still_gets_a_pivot():
    """A resonance that hits a sample exactly does not make the plan give up."""
    entries: dict[tuple[int, int], object] = {(0, 0): np.array([0.0, 1, 2, 3, 4]), (1, 1): 1.0}
    assert not plan_of(entries, 2).undetermined


def test_partial_back_substitution_gives_the_same_unknown():
    """Only the needed steps are replayed, and the wanted unknown does not change."""
    size = 20
    entries = chain(size)
    plan = plan_of(entries, size)
    whole = backward(factor(plan, list(entries.values()), {3: 1.0}))
    for wanted in (0, 7, size - 1):
        steps = needed_steps(plan, [wanted])
        factors = factor(plan, list(entries.values()), {3: 1.0}, kept=steps)
        assert np.array_equal(backward(factors, steps)[wanted], whole[wanted])


def test_balls_run_along_the_same_plan():
    """The replay over balls encloses the replay over doubles, and its residual holds zero."""
    entries = chain(12)
    plan = plan_of(entries, 12)
    with precision(200):
        exact = [flint.acb(complex(np.broadcast_to(v, POINTS)[2])) for v in entries.values()]
        x = backward(factor(plan, exact, {0: flint.acb(1)}))
        sums = [flint.acb(0)] * 12
        for (row, column), value in zip(entries, exact, strict=True):
            sums[row] = sums[row] + value * x[column]
        assert sums[0].contains(1)
        assert all(item.contains(0) for item in sums[1:])
        assert all(item.rel_accuracy_bits() > 180 for item in x)
    doubles = backward(factor(plan, list(entries.values()), {0: 1.0}))
    for got, expected in zip(doubles, x, strict=True):
        assert got[2] == pytest.approx(complex(expected), rel=1e-13)


def test_scaled_replay_goes_beyond_a_double():
    """A chain of couplings 1e-30 has the product of all as its transfer: 1e-1200 for 40."""
    size, small = 41, 1e-30
    entries: dict[tuple[int, int], object] = {(at, at): np.ones(POINTS) for at in range(size)}
    for at in range(1, size):
        entries[at, at - 1] = -small * np.exp(1j * np.arange(POINTS))
    plan = plan_of(entries, size)
    one = Scaled(np.ones(POINTS, dtype=complex), np.zeros(POINTS, dtype=np.int64))
    last = backward(factor(plan, list(entries.values()), {0: one}))[size - 1]
    logarithm = np.log10(np.abs(last.mantissa)) + last.exponent * np.log10(2)
    assert logarithm == pytest.approx(np.full(POINTS, -1200.0), abs=1e-9)
    turns = np.exp(40j * np.arange(POINTS))
    assert last.mantissa / np.abs(last.mantissa) == pytest.approx(turns, rel=1e-12)


@given(
    st.lists(st.floats(-1e100, 1e100), min_size=4, max_size=4),
    st.lists(st.integers(-3000, 3000), min_size=4, max_size=4),
)
def test_scaled_sums_are_those_of_fractions(values, exponents):
    """Sums and differences of scaled numbers are the exact ones, rounded."""
    first, second = (
        normal(np.array(values[at : at + 2]), np.array(exponents[at : at + 2], dtype=np.int64))
        for at in (0, 2)
    )
    for total, sign in ((first + second, 1), (first - second, -1)):
        for at in range(2):
            terms = [
                Fraction(values[at]) * Fraction(2) ** exponents[at],
                sign * Fraction(values[at + 2]) * Fraction(2) ** exponents[at + 2],
            ]
            got = Fraction(float(total.mantissa[at]))
            got *= Fraction(2) ** int(total.exponent[at]) if got else 1
            assert abs(got - sum(terms)) <= max(map(abs, terms)) / 2**51


def test_powers_of_two_are_exact_or_nothing():
    """Powers a double can hold are exact, lower ones vanish."""
    exponents = np.array([-5000, -1101, -1074, -1, 0, 10, 1023])
    assert power_of_two(exponents).tolist() == [0, 0, 2.0**-1074, 0.5, 1, 1024, 2.0**1023]


def test_aligned_vectors_share_the_largest_exponent():
    """Alignment changes no number that stays in sight of the largest."""
    items = [normal(np.array([3.0, 1e-9]), np.array([5, 90])), normal(np.ones(2), np.zeros(2, int))]
    (first, second), top = aligned(items)
    assert np.allclose(first * 2.0**top, [96.0, 1e-9 * 2.0**90])
    assert np.allclose(second * 2.0**top, [1.0, 1.0])


def test_a_plan_prints_its_cost_and_order():
    """A plan can be read: unknowns, fill, products, first pivots."""
    text = str(plan_of(chain(3), 3))
    assert text.startswith("elimination of 3 unknowns: 7 entries, fill 0, ")
    assert "pivots (row, column): (0, 0), (1, 1), (2, 2)" in text
