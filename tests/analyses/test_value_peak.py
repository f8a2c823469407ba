"""Values that put a cutoff where it is wanted, the level counted from the gain at the peak."""

from __future__ import annotations

from fractions import Fraction
from math import isclose, log10

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import acsolve

RLC = "in -- R1 -- a -- L1 -- out -- C1 -- gnd"
COUPLED = (
    "in -- R1 -- a\na -- C1 -- gnd\na -- L1 -- gnd\na -- C3 -- out\n"
    "out -- C2 -- gnd\nout -- L2 -- gnd\nout -- R2 -- gnd"
)
LADDER = "in -- R1 -- a -- L1 -- out\na -- C1 -- gnd\nout -- C2 -- gnd\nout -- R2 -- gnd"
SHELF = "in -- R1 -- out\nout -- R2 -- a -- C1 -- b -- L1 -- gnd\nout -- C2 -- gnd"

values = st.builds(Fraction, st.integers(1, 12), st.integers(1, 5))
HERTZ = np.concatenate([[0.0], np.geomspace(1e-3, 30, 6000)])


def excess(circuit, name, hertz, level, grid) -> np.ndarray:
    """Gain at the frequency over the highest of a dense grid, less the level, in dB."""
    answers = circuit.path("in", "out").response(
        np.concatenate([HERTZ, [hertz]]), values={name: grid}
    )
    sizes = np.abs(answers)
    return 20 * np.log10(sizes[:, -1] / sizes.max(axis=1)) - level


@settings(max_examples=25, deadline=None)
@given(
    st.sampled_from([RLC, COUPLED, LADDER, SHELF]),
    st.lists(values, min_size=7, max_size=7),
    st.sampled_from([-3.0102999566398, -6, -10, -1]),
    st.data(),
)
def test_every_value_and_no_other(text, drawn, level, data):
    """Each value has a cutoff or touch there; a scan of values over dense grids finds no more."""
    circuit = acsolve.parse(text)
    numbers = dict(zip(circuit.parts, drawn, strict=False))
    name = data.draw(st.sampled_from(sorted(numbers)))
    circuit = circuit.with_values(numbers)
    hertz = float(data.draw(values)) / 12
    asked = None if level < -3 and level > -4 else level
    answer = circuit.path("in", "out").value_for(name, cutoff=hertz, level=asked, reference="peak")
    assert answer.complete
    assert answer.reference == "peak"
    for item in answer.values:
        again = circuit.with_values({name: item.value}).path("in", "out")
        found = again.cutoffs(asked, reference="peak")
        places = [each.hertz for each in (*found.cutoffs, *found.touches)]
        assert any(isclose(place, hertz, rel_tol=1e-6) for place in places)
    grid = np.logspace(-3, 3, 241)
    over = excess(circuit, name, hertz, level, grid)
    for k in np.flatnonzero(np.sign(over[1:]) != np.sign(over[:-1])):
        if min(abs(over[k]), abs(over[k + 1])) < 0.02:
            continue  # the grid of frequencies is no finer
        near = log10(grid[k]), log10(grid[k + 1])
        inside = [each for each in answer.values if near[0] <= log10(each.value) <= near[1]]
        assert inside, (grid[k], grid[k + 1], answer.values)


def test_symbols_and_orders_that_are_refused():
    """Over symbols there is no closed form; a large order is said to be too large."""
    with pytest.raises(acsolve.AcsolveError) as refused:
        acsolve.parse(RLC).path("in", "out").value_for("R1", cutoff=1, reference="peak")
    assert refused.value.code == "question.no-reference"
    lines, node = ["in -- R0 = 50 -- n0"], "n0"
    for k in range(5):
        lines += [f"n{k} -- C{k} = {10 + k} nF -- gnd", f"n{k} -- L{k} = {33 + k} uH -- n{k + 1}"]
        node = f"n{k + 1}"
    lines.append(f"{node} -- RL = 50 -- gnd")
    path = acsolve.parse("\n".join(lines)).path("in", node)
    with pytest.raises(acsolve.AcsolveError) as refused:
        path.value_for("L1", cutoff="300 kHz", reference="peak")
    assert refused.value.code == "equations.budget"
    assert "--reference" in refused.value.diagnostics[0].hint


def test_no_value_is_said():
    """A pair of sections without a peak of their own never reaches -0.1 dB far above."""
    found = (
        acsolve.parse("in -- R1 = 1 -- a -- C1 = 1 F -- gnd\na -- R2 = 1 -- out -- C2 = 1 F -- gnd")
        .path("in", "out")
        .value_for("R1", cutoff=10, level=-0.1, reference="peak")
    )
    assert found.values == ()
    assert found.complete
    assert found.remarks
