"""Points that doubles know less well in long networks: told, and worked out only once."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import numpy as np

import acsolve
from acsolve.analyses.sweep import solver_for
from acsolve.equations import solver as solvers
from acsolve.equations.result import Status


def test_what_no_other_order_betters_is_not_solved_again(monkeypatch):
    """Near dc a ladder of 6,000 sections errs above 1e-9 by estimate; the estimate holds."""
    count = 6_000
    lines = [
        f"n{k - 1} -- R{k} = {90 + k % 21} ohm -- n{k}\nn{k} -- C{k} = {90 + k % 17} pF -- gnd"
        for k in range(1, count + 1)
    ]
    circuit = acsolve.parse("\n".join(lines))
    hertz = np.geomspace(1e-3, 1, 24)
    solver = solver_for(circuit.netlist, circuit.path("n0", f"n{count}").ask, hertz)
    points = 0

    def counted(*arguments, **options):
        nonlocal points
        points += len(arguments[3])
        return replay(*arguments, **options)

    replay = solvers.replay
    monkeypatch.setattr(solvers, "replay", counted)
    monkeypatch.setattr(solvers, "_BALL_BUDGET", 0)  # as in a network too large for balls
    found = solver.solve(hertz)
    assert points == len(hertz)
    assert (found.status == Status.INEXACT).any()
    assert set(np.unique(found.status)) <= {Status.OK, Status.INEXACT}
    exact = solver.precise.at(Fraction(float(hertz[0])))[0]
    assert exact is not None
    value = complex(exact.mantissa) * 2.0**exact.exponent
    assert abs(found.value()[0, 0] / value - 1) <= found.error[0, 0] < 1e-7


def test_blocks_are_bounded_in_memory():
    """A plan of 200,000 unknowns gets fewer points at a time than one of 2,000, within 1 GB."""
    circuit = acsolve.parse("in -- R1 = 1 ohm -- out\nout -- C1 = 1 F -- gnd")
    plan = solver_for(circuit.netlist, circuit.path("in", "out").ask, np.ones(1)).plan
    small, large = (replace(plan, size=size, slots=4 * size) for size in (2_000, 200_000))
    lengths = [solvers._block_length(item, None) for item in (small, large)]
    assert lengths[0] > lengths[1] >= solvers._BLOCK[0]
    assert lengths[1] * 16 * 7 * 200_000 <= 1 << 30
