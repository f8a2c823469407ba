"""Points that doubles know less well in long networks: told, and worked out only once."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest

import acsolve
from acsolve.analyses.sweep import solver_for
from acsolve.equations import solver as solvers
from acsolve.equations.result import Status
from acsolve.equations.solver import Solver

COUNT = 6_000


@pytest.fixture(scope="module")
def solver() -> Solver:
    """A ladder of unequal sections, prepared for its lowest frequencies."""
    lines = [
        f"n{k - 1} -- R{k} = {90 + k % 21} ohm -- n{k}\nn{k} -- C{k} = {90 + k % 17} pF -- gnd"
        for k in range(1, COUNT + 1)
    ]
    circuit = acsolve.parse("\n".join(lines))
    return solver_for(circuit.netlist, circuit.path("n0", f"n{COUNT}").ask, HERTZ)


HERTZ = np.geomspace(1e-3, 1e5, 24)


def test_a_long_ladder_keeps_its_digits(solver):
    """Read part by part, errors grow with the number of sections, not with its square."""
    found = solver.solve(HERTZ)
    assert (found.status == Status.OK).all()
    assert found.error.max() < 1e-11
    for place in (0, 11, 23):
        exact = solver.precise.at(Fraction(float(HERTZ[place])))[0]
        assert exact is not None
        shift = 2.0 ** float(found.exponent[0, place] - exact.exponent)
        off = abs(complex(found.mantissa[0, place]) * shift / complex(exact.mantissa) - 1)
        assert off <= found.error[0, place]
        assert off < 1e-13


def test_what_no_other_order_betters_is_not_solved_again(solver, monkeypatch):
    """Points above the limit in a network too large for balls are told, and solved once."""
    points = 0

    def counted(*arguments, **options):
        nonlocal points
        points += len(arguments[3])
        return replay(*arguments, **options)

    replay = solvers.replay
    monkeypatch.setattr(solvers, "replay", counted)
    monkeypatch.setattr(solvers, "_BALL_BUDGET", 0)  # as in a network too large for balls
    monkeypatch.setattr(solvers, "_ACCURATE", 1e-16)
    hertz = HERTZ[:18]  # answers within a double's range
    found = solver.solve(hertz)
    assert points == len(hertz)
    assert (found.status == Status.INEXACT).all()


def test_blocks_are_bounded_in_memory():
    """A plan of 200,000 unknowns gets fewer points at a time than one of 2,000, within 1 GB."""
    circuit = acsolve.parse("in -- R1 = 1 ohm -- out\nout -- C1 = 1 F -- gnd")
    plan = solver_for(circuit.netlist, circuit.path("in", "out").ask, np.ones(1)).plan
    small, large = (replace(plan, size=size, slots=4 * size) for size in (2_000, 200_000))
    lengths = [solvers._block_length(item, None) for item in (small, large)]
    assert lengths[0] > lengths[1] >= solvers._BLOCK[0]
    assert lengths[1] * 16 * 7 * 200_000 <= 1 << 30
