"""Plans of networks that fill in: samples in arrays give the same plan as samples in lists."""

from __future__ import annotations

import numpy as np
import pytest

from acsolve.algebra import plan as plan_module
from acsolve.algebra.plan import Plan, plan_elimination


def random_plan(size: int, extra: int, seed: int) -> Plan:
    """A plan of a random pattern with a transversal; a few entries vanish at some samples."""
    random = np.random.default_rng(seed)
    places = {(at, int(other)) for at, other in enumerate(random.permutation(size))}
    places |= {tuple(pair) for pair in random.integers(0, size, (extra, 2)).tolist()}
    rows, columns = zip(*sorted(places), strict=True)
    samples = random.integers(-4, 5, (len(rows), 3)) + 1j * random.integers(-1, 2, (len(rows), 3))
    return plan_elimination(rows, columns, samples, size=size)


@pytest.mark.parametrize("seed", range(40))
def test_arrays_change_no_plan(monkeypatch, seed):
    """Kept in arrays from the first step, from some step or never: step by step the same."""
    plans = []
    for many in (0, 9, 10**9):
        monkeypatch.setattr(plan_module, "_MANY", many)
        plans.append(random_plan(5 + seed, 4 * (5 + seed), seed))
    assert plans[0] == plans[1] == plans[2]
