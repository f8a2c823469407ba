"""Sweeps by dense blocks and step by step: one answer, and the check holds on both."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import flint
import numpy as np
import pytest
from hypothesis import assume, event, given, settings
from hypothesis import strategies as st

from acsolve.algebra.ball import precision
from acsolve.algebra.fronts import cut, light_steps
from acsolve.analyses.question import Ask, transfer_ask
from acsolve.analyses.sweep import solver_for
from acsolve.circuit.netlist import Netlist
from acsolve.equations.result import Status
from acsolve.equations.solver import Solver
from acsolve.errors import EquationError
from tests.strategies import QUANTITIES, C, L, R, any_lumped, network, pairs, part

HERTZ = np.geomspace(1e3, 1e7, 120)
EXACT = {Status.OK, Status.RE_SOLVED, Status.LIMIT}


def mesh(side: int, *more) -> Netlist:
    """Resistors in a square mesh with a capacitor at every node."""
    parts = []
    for i in range(side):
        for j in range(side):
            here = f"m[{i}, {j}]"
            value = 100 + (7 * i + 3 * j) % 11
            if i + 1 < side:
                parts.append(R(f"R[{i}, {j}]", here, f"m[{i + 1}, {j}]", value))
            if j + 1 < side:
                parts.append(R(f"Q[{i}, {j}]", here, f"m[{i}, {j + 1}]", value + 5))
            parts.append(C(f"C[{i}, {j}]", here, "gnd", Fraction(1 + (i + j) % 5, 10**9)))
    return network(*parts, *more)


def corner_to_corner(netlist: Netlist, side: int, hertz: np.ndarray = HERTZ) -> Solver:
    """The voltage ratio across a mesh."""
    target = f"m[{side - 1}, {side - 1}]"
    return solver_for(netlist, transfer_ask(netlist, ("m[0, 0]", "gnd"), (target, "gnd")), hertz)


def by_blocks(solver: Solver, most: int = 0) -> Solver:
    """The same question with blocks for all steps with more updates than `most`."""
    fronts = cut(solver.plan, light_steps(solver.plan, most), lambda r, f: float(30 + r * f * f))
    return replace(solver, route=replace(solver.route, fronts=fronts))


def by_steps(solver: Solver) -> Solver:
    """The same question step by step."""
    return replace(solver, route=replace(solver.route, fronts=None))


def test_the_plan_says_which_route_was_taken_and_why():
    """A mesh goes by blocks, a ladder step by step, with both estimates in the text."""
    solver = corner_to_corner(mesh(18), 18)
    assert solver.route.fronts is not None
    assert "dense blocks of up to" in str(solver.plan)
    assert "at 120 points about" in str(solver.plan)
    few = corner_to_corner(mesh(3), 3)
    assert few.route.fronts is None
    assert "run step by step" in str(few.plan)
    assert "too little work for dense blocks" in str(few.plan)


@pytest.mark.parametrize("most", [0, 9, 49])
def test_a_mesh_by_blocks_is_the_mesh_by_steps(most):
    """Values, slopes and states agree, and both estimates of the error hold."""
    solver = corner_to_corner(mesh(12), 12)
    one, other = (item.solve(HERTZ) for item in (by_blocks(solver, most), by_steps(solver)))
    assert np.all(one.status == Status.OK)
    assert np.all(other.status == Status.OK)
    assert one.error.max() <= 1e-10
    gap = np.abs(one.value() / other.value() - 1)
    assert np.all(gap <= one.error + other.error)
    assert np.allclose(one.slope, other.slope, rtol=1e-8, atol=0)
    quick = by_blocks(solver, most).quick(HERTZ)
    assert np.allclose(quick, other.value(), rtol=1e-10, atol=0)


def test_a_mesh_by_blocks_is_right_in_balls():
    """The route that is taken by itself, against the same equations in balls."""
    solver = corner_to_corner(mesh(16), 16)
    assert solver.route.fronts is not None
    found = solver.solve(HERTZ)
    for at in (0, 60, 119):
        with precision(400):
            (local,) = solver.precise.at(Fraction(float(HERTZ[at])))
            expected = flint.acb(local.mantissa) * flint.arb(2) ** local.exponent
            gap = (flint.acb(complex(found.value()[0, at])) - expected) / expected
            assert float(gap.abs_upper()) <= max(found.error[0, at], 1e-15)
            assert float(gap.abs_upper()) <= 1e-12
            slope = complex(found.slope[0, at])
            assert slope == pytest.approx(local.slope, rel=1e-9)


def test_a_mesh_by_blocks_is_the_dense_solution():
    """The same against numpy.linalg.solve on the whole matrix."""
    hertz = HERTZ[::12]
    solver = by_blocks(corner_to_corner(mesh(14), 14), 25)
    numbers = solver.numbers
    entries = numbers.at(2j * np.pi * hertz)
    full = np.zeros((len(hertz), numbers.size, numbers.size), dtype=complex)
    for row, column, value in zip(numbers.rows, numbers.columns, entries, strict=True):
        full[:, row, column] = value
    right = np.zeros((len(hertz), numbers.size, 1), dtype=complex)
    right[:, -1] = 1
    x = np.linalg.solve(full, right)[:, :, 0]
    expected = sum(x[:, column] * float(item) for column, item in solver.observed[0].items())
    assert np.allclose(solver.quick(hertz)[0], expected, rtol=1e-9, atol=0)
    assert np.allclose(solver.solve(hertz).value()[0], expected, rtol=1e-9, atol=0)


def test_many_outputs_share_the_blocks():
    """Several nodes at once are the nodes one by one, in light and in dense parts."""
    side = 8
    netlist = mesh(side)
    ask = transfer_ask(netlist, ("m[0, 0]", "gnd"), ("m[7, 7]", "gnd"))
    targets = [(f"m[{k}, {(5 * k) % side}]", "gnd") for k in range(1, side)]
    together = by_blocks(solver_for(netlist, ask, HERTZ, targets=targets), 9)
    found, quick = together.solve(HERTZ), together.quick(HERTZ)
    assert np.all(found.status == Status.OK)
    for row, target in enumerate(targets):
        alone = by_steps(solver_for(netlist, ask, HERTZ, targets=[target]))
        expected = alone.solve(HERTZ).value()[0]
        assert np.allclose(found.value()[row], expected, rtol=1e-10, atol=0)
        assert np.allclose(quick[row], expected, rtol=1e-10, atol=0)


def test_answers_beyond_a_double_leave_the_blocks():
    """Deep attenuation behind a mesh is solved with powers of two, as without blocks."""
    stages = [
        item
        for k in range(90)
        for item in (
            part(f"E[{k}]", "voltage_amplifier", f"t[{k}]", "gnd", f"u[{k}]", "gnd", gain=1),
            R(f"P[{k}]", f"u[{k}]", f"t[{k + 1}]", 10**6),
            C(f"D[{k}]", f"t[{k + 1}]", "gnd", Fraction(1, 10**6)),
        )
    ]
    netlist = mesh(6, R("P", "m[5, 5]", "t[0]", 1000), *stages)
    ask = transfer_ask(netlist, ("m[0, 0]", "gnd"), ("t[90]", "gnd"))
    solver = solver_for(netlist, ask, HERTZ)
    one, other = (item.solve(HERTZ) for item in (by_blocks(solver), by_steps(solver)))
    assert one.gain_db().min() < -7000
    assert np.all(one.status == Status.OK)
    assert one.gain_db() == pytest.approx(other.gain_db(), rel=1e-12)
    assert one.phase() == pytest.approx(other.phase(), abs=1e-9)


def test_a_lossless_resonance_behind_a_mesh():
    """Where the matrix is singular the limit is found, and other points are as they were."""
    resonant = 1 / (2 * np.pi)
    netlist = mesh(
        5, L("L1", "m[4, 4]", "t", 1), C("C1", "t", "gnd", 1), R("P", "m[4, 4]", "gnd", 7)
    )
    ask = transfer_ask(netlist, ("m[0, 0]", "gnd"), ("m[4, 4]", "gnd"))
    hertz = np.array([0.0, 0.1, resonant, 0.2, 1e3, 1e6])
    solver = solver_for(netlist, ask, hertz)
    one, other = (item.solve(hertz) for item in (by_blocks(solver), by_steps(solver)))
    assert np.allclose(one.value(), other.value(), rtol=1e-9, atol=1e-18)
    assert set(one.status[0]) | set(other.status[0]) <= EXACT


@settings(max_examples=60)
@given(st.data())
def test_any_network_is_the_same_by_blocks(data):
    """Whatever the parts and the question: answers and states do not depend on the route."""
    netlist = data.draw(any_lumped(symbols=False))
    source, target = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    quantity = data.draw(st.sampled_from(QUANTITIES))
    target = source if quantity == "impedance" else target
    hertz = np.array([0.0, 1e-3, 0.16, 1.0, 300.0])
    try:
        solver = solver_for(netlist, Ask(source=source, target=target, quantity=quantity), hertz)
    except EquationError as problem:
        event(problem.code)
        assume(False)
    most = data.draw(st.sampled_from([0, 1, 4]))
    one, other = (item.solve(hertz) for item in (by_blocks(solver, most), by_steps(solver)))
    for a, b, *values in zip(
        one.status[0], other.status[0], one.value()[0], other.value()[0], strict=True
    ):
        assert a == b or {a, b} <= EXACT
        if a in EXACT:
            assert values[0] == pytest.approx(values[1], rel=1e-8, abs=1e-300)
