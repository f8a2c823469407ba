"""Dense blocks for the heavy part of an elimination, and the choice between the routes."""

from __future__ import annotations

import threading
from time import process_time

import numpy as np
import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from acsolve.algebra import cores
from acsolve.algebra.blocks import backward_cut, factor_cut, transposed_cut
from acsolve.algebra.fronts import Fronts, cut, light_steps
from acsolve.algebra.lu import backward, factor, needed_steps, transposed
from acsolve.algebra.plan import Plan, plan_elimination
from acsolve.algebra.route import block_cost, blocks_cost, choose_route, steps_cost

Entries = dict[tuple[int, int], object]

MERGES = {
    "never": lambda *size: float(size[0] ** 3),
    "always": lambda *_size: 1.0,
    "by cost": lambda *size: block_cost(*size, 100),
}


def planned(entries: Entries, size: int) -> Plan:
    """A plan that sees the first three of the points."""
    samples = np.array([np.resize(value, 3) for value in entries.values()])
    rows, columns = zip(*entries, strict=True)
    return plan_elimination(rows, columns, samples.astype(complex), size=size)


def dense(entries: Entries, size: int, points: int) -> np.ndarray:
    """The same matrix, one dense one for each point."""
    full = np.zeros((points, size, size), dtype=complex)
    for (row, column), value in entries.items():
        full[:, row, column] = value
    return full


def grid(side: int, points: int, *, skew: float = 0.0) -> Entries:
    """Node equations of a square mesh: conductances between nodes, a capacitor at each."""
    omega = np.linspace(1.0, 3.0, points)
    entries: Entries = {}
    number = {(i, j): i * side + j for i in range(side) for j in range(side)}
    for (i, j), here in number.items():
        entries[here, here] = 0.5 + 1j * omega * (1 + (i + 2 * j) % 3)
    for (i, j), here in number.items():
        for other in ((i + 1, j), (i, j + 1)):
            if other in number:
                there = number[other]
                g = 1.0 + 0.1 * ((3 * i + 5 * j) % 7)
                entries[here, there], entries[there, here] = -g, -g * (1 + skew)
                entries[here, here] = entries[here, here] + g
                entries[there, there] = entries[there, there] + g
    return entries


def chain(size: int, points: int) -> Entries:
    """Node equations of a ladder."""
    omega = np.linspace(1.0, 3.0, points)
    entries: Entries = {}
    for at in range(size):
        entries[at, at] = 2.5 + 0.1 * (at % 7) + 1j * omega
        if at:
            entries[at, at - 1] = entries[at - 1, at] = -1.0
    return entries


def run(fronts: Fronts, entries: Entries, row: int, column: int, points: int):
    """x and y by blocks, as arrays (size, points)."""
    factors = factor_cut(fronts, list(entries.values()), {row: 1.0}, points)
    (y,) = transposed_cut(factors, [{column: 1.0}])
    return tuple(
        np.array([np.broadcast_to(0.0 if item is None else item, points) for item in vector])
        for vector in (backward_cut(factors), y)
    )


@st.composite
def matrices(draw) -> tuple[Entries, int, int]:
    """A matrix of any pattern with a transversal, some entries the same at every point.

    No point is unlike the first three, which the plan sees.
    """
    size, points = draw(st.integers(1, 12)), draw(st.sampled_from([1, 3, 60]))
    crossing = draw(st.permutations(range(size)))
    extra = draw(st.lists(st.tuples(*[st.integers(0, size - 1)] * 2), max_size=5 * size))
    random = np.random.default_rng(draw(st.integers(0, 10**6)))
    entries: Entries = {}
    for place in [*enumerate(crossing), *extra]:
        value = random.integers(1, 9) * random.choice([-1.0, 1.0])
        varying = value + 1j * np.resize(random.normal(size=min(points, 3)), points)
        entries[place] = varying if random.random() < 0.6 else float(value)
    return entries, size, points


@given(matrices(), st.sampled_from(sorted(MERGES)), st.sampled_from([0, 1, 4, 1000]), st.data())
def test_blocks_solve_the_dense_system(given_matrix, merge, most, data):
    """A·x = b and Aᵀ·y = c as the dense solution, whatever is light and however blocks merge."""
    entries, size, points = given_matrix
    full = dense(entries, size, points)
    worst = np.linalg.cond(full).max()
    assume(worst < 1e6)
    plan = planned(entries, size)
    fronts = cut(plan, light_steps(plan, most), MERGES[merge])
    row, column = data.draw(st.tuples(*[st.integers(0, size - 1)] * 2))
    x, y = run(fronts, entries, row, column, points)
    identity = np.broadcast_to(np.eye(size), full.shape)
    expected_x = np.linalg.solve(full, identity[:, :, row : row + 1])[..., 0].T
    expected_y = np.linalg.solve(full.transpose(0, 2, 1), identity[:, :, column : column + 1])
    scale = max(np.abs(expected_x).max(), np.abs(expected_y).max())
    assert np.abs(x - expected_x).max() <= 1e-11 * worst * scale
    assert np.abs(y - expected_y[..., 0].T).max() <= 1e-11 * worst * scale


@pytest.mark.parametrize("merge", sorted(MERGES))
@pytest.mark.parametrize("most", [0, 9, 36, 10**6])
@pytest.mark.parametrize("skew", [0.0, 0.4])
def test_a_mesh_is_the_same_by_every_route(merge, most, skew):
    """Steps, blocks and a dense solution agree to rounding, in x and in y."""
    side, points = 9, 70
    size = side * side
    entries = grid(side, points, skew=skew)
    plan = planned(entries, size)
    x, y = run(cut(plan, light_steps(plan, most), MERGES[merge]), entries, 0, size - 1, points)
    factors = factor(plan, list(entries.values()), {0: 1.0})
    assert np.allclose(x, np.array(backward(factors)), rtol=1e-12, atol=0)
    assert np.allclose(y, np.array(transposed(factors, {size - 1: 1.0})), rtol=1e-12, atol=0)
    full = dense(entries, size, points)
    expected = np.linalg.solve(full, np.broadcast_to(np.eye(size)[:, :1], (points, size, 1)))
    assert np.allclose(x, expected[..., 0].T, rtol=1e-11, atol=0)


@pytest.mark.parametrize("merge", sorted(MERGES))
def test_blocks_take_every_unknown_and_every_entry_once(merge):
    """Pivots are all unknowns of the dense part, own slots all entries that are left of it."""
    plan = planned(grid(8, 60), 64)
    light = light_steps(plan, 9)
    fronts = cut(plan, light, MERGES[merge])
    assert sorted(np.concatenate([item.pivots for item in fronts.blocks])) == list(
        range(len(fronts.rows))
    )
    assert len(fronts.rows) + len(fronts.light.steps) == plan.size
    live = set(range(plan.entries)).union(*(step.targets for step in fronts.light.steps))
    used = {slot for step in fronts.light.steps for slot in (step.pivot, *step.below, *step.right)}
    assert sorted(fronts.slots) == sorted(live - used)
    for place, item in enumerate(fronts.blocks):
        assert all(child < place for child, _ in item.children)
        assert not set(item.pivots) & set(item.others)


def test_light_steps_wait_for_no_heavy_one():
    """No step that is not light updates a row or a column of a light one."""
    plan = planned(grid(8, 60), 64)
    light = light_steps(plan, 16)
    assert any(light)
    assert not all(light)
    light_rows = {step.row for step, is_light in zip(plan.steps, light, strict=True) if is_light}
    light_columns = {s.column for s, is_light in zip(plan.steps, light, strict=True) if is_light}
    for step, is_light in zip(plan.steps, light, strict=True):
        assert not is_light or len(step.targets) <= 16
        if not is_light and step.targets:
            assert not set(step.below_rows) & light_rows
            assert not set(step.right_columns) & light_columns


def test_a_singular_point_shows_and_spoils_no_other():
    """Where one matrix of a batch is singular its numbers are not finite, the others right."""
    side, points = 5, 60
    size = side * side
    entries = {place: np.full(points, value, complex) for place, value in grid(side, 1).items()}
    for (row, _), values in entries.items():
        if row == 12:  # one law says nothing at one point
            values[7] = 0.0
    plan = planned(entries, size)
    with np.errstate(all="ignore"):
        x, _ = run(cut(plan, [False] * size, MERGES["by cost"]), entries, 0, 24, points)
    assert not np.isfinite(x[:, 7]).all()
    others = np.delete(np.arange(points), 7)
    assert np.allclose(x[:, others], x[:, :1], rtol=1e-12, atol=0)


@pytest.mark.parametrize("count", [1, 2, 5])
def test_threads_change_nothing(monkeypatch, count):
    """The same numbers on any number of cores, and no thread is left behind."""
    entries = grid(6, 170)
    plan = planned(grid(6, 60), 36)
    fronts = cut(plan, light_steps(plan, 9), MERGES["by cost"])
    before = threading.active_count()
    reference = run(fronts, entries, 0, 35, 170)
    monkeypatch.setattr(cores, "cores", lambda: count)
    found = run(fronts, entries, 0, 35, 170)
    assert all(np.array_equal(a, b) for a, b in zip(found, reference, strict=True))
    assert threading.active_count() == before


def test_a_failure_in_a_thread_is_told(monkeypatch):
    """The exception of a piece of work is the caller's, and the threads end."""
    monkeypatch.setattr(cores, "cores", lambda: 2)
    before = threading.active_count()
    with pytest.raises(KeyboardInterrupt):
        cores.spread(_interrupted, list(range(8)))
    assert threading.active_count() == before
    assert cores.spread(abs, [-1, 2, -3]) == [1, 2, 3]


def _interrupted(item: int) -> int:
    if item == 3:
        raise KeyboardInterrupt
    return item


def test_only_needed_light_steps_are_kept():
    """Without a check one unknown is the same, from fewer steps and no kept factors."""
    entries, points = grid(7, 60), 60
    plan = planned(entries, 49)
    fronts = cut(plan, light_steps(plan, 9), MERGES["by cost"])
    for column in (0, fronts.light.steps[0].column, fronts.columns[-1]):
        steps = needed_steps(fronts.light, {column})
        factors = factor_cut(fronts, list(entries.values()), {0: 1.0}, points, kept=steps)
        x = backward_cut(factors, steps)
        assert all(done == () for _, done in factors.batches)
        assert np.array_equal(x[column], run(fronts, entries, 0, 48, points)[0][column])


@pytest.mark.parametrize("points", [1, 30, 200, 5000])
def test_a_ladder_goes_step_by_step(points):
    """A ladder has no fill: blocks are not even worked out."""
    route = choose_route(planned(chain(400, 60), 400), points)
    assert route.fronts is None
    assert route.blockwise is None
    assert "step by step" in str(route)


@pytest.mark.parametrize("points", [10, 100, 300])
def test_a_mesh_goes_by_blocks(points):
    """A mesh fills in: blocks, and the plan's text says how many and at what estimate."""
    route = choose_route(planned(grid(24, 60), 576), points)
    assert route.fronts is not None
    assert route.blockwise is not None
    assert route.blockwise < route.stepwise
    assert f"{len(route.fronts.blocks)} dense blocks" in str(route)
    assert f"{route.stepwise:.2g} s" in str(route)


@pytest.mark.parametrize(("side", "points"), [(6, 3000), (16, 3000), (20, 5000)])
def test_many_points_go_step_by_step(side, points):
    """At many points the calls no longer count, and steps move fewer numbers than blocks."""
    route = choose_route(planned(grid(side, 60), side * side), points)
    assert route.fronts is None
    assert "run step by step" in str(route)


def _fastest(work) -> float:
    """Processor time of the best of some runs."""
    times = []
    for _ in range(3):
        start = process_time()
        work()
        times.append(process_time() - start)
    return min(times)


@pytest.mark.parametrize(
    ("name", "entries", "size"), [("chain", chain(300, 100), 300), ("mesh", grid(18, 100), 324)]
)
def test_the_estimate_is_right_on_both_sides(monkeypatch, name, entries, size):
    """Where it prefers one route clearly, that route takes less time when run."""
    monkeypatch.setattr(cores, "cores", lambda: 1)
    points = 100
    plan = planned(entries, size)
    light = light_steps(plan, 81 if name == "mesh" else 0)
    fronts = cut(plan, light, lambda pivots, width: block_cost(pivots, width, points))
    values = list(entries.values())
    steps = _fastest(lambda: factor(plan, values, {0: 1.0}, kept=set()))
    blocks = _fastest(lambda: factor_cut(fronts, values, {0: 1.0}, points, kept=set()))
    assert (steps_cost(plan.steps, points) < blocks_cost(fronts, points)) == (steps < blocks)
    assert (name == "chain") == (steps < blocks)
