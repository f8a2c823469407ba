"""Elements asked for one by one are those of the whole matrix."""

from __future__ import annotations

import numpy as np
import pytest

import acsolve
from acsolve.analyses.sweep import solver_for

TEXTS = {
    "shared and single": """
        in -- R1 = 3 ohm -- a -- R2 = 3 ohm -- b
        a -- C1 = 2 F -- gnd
        b -- C2 = 2 F || L2 = 5 H -- gnd
    """,
    "other functions of s": """
        in -- R1 = 3 ohm -- a
        a -- Z1 : impedance(7 ohm/(1 + s*3 us)) -- gnd
        a -- T1 : line(z0 = 50 ohm, delay = 5 ns) -- b
        b -- R2 = 50 ohm -- gnd
    """,
    "a row of copies": """
        block s(a, b)
            a -- R = 2 ohm -- b
            b -- C = 4 F -- gnd
        end
        in -- N1 : 40 * s -- b
        b -- R9 = 5 ohm -- gnd
    """,
}


@pytest.mark.parametrize("text", TEXTS.values(), ids=TEXTS)
def test_every_place_holds_what_the_whole_matrix_holds(text):
    """Constants, lines in s, shared ones and other functions, bit for bit."""
    circuit = acsolve.parse(text)
    solver = solver_for(circuit.netlist, circuit.path("in", "b").ask, np.array([1.0, 5.0]))
    s = 2j * np.pi * np.array([0.3, 7.0])
    asked = solver.late().at(s)
    whole = solver.numbers.at(s)
    for place in reversed(range(len(whole))):
        assert np.all(asked(place) == whole[place])
