"""Points that stand for a zero or pole on the axis: told by their distance to it, and no others."""

from __future__ import annotations

from math import pi

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.analyses.beside import STEP, beside_roots

sizes = st.floats(1e-9, 1e-3)


def trap(henry: float, farad: float, ohm: float = 1e3):
    """A series resonance from `out` to ground behind a resistor, a parallel one from `tank`."""
    return acsolve.parse(
        f"in -- R1 = {ohm!r} ohm -- out\nout -- L1 = {henry!r} H -- m -- C1 = {farad!r} F -- gnd\n"
        f"tank -- L2 = {henry!r} H || C2 = {farad!r} F -- gnd\n"
    )


@settings(max_examples=25, deadline=None)
@given(sizes, sizes)
def test_a_null_is_met_at_its_rounded_frequency_only(henry, farad):
    """At 1/(2·pi·sqrt(L·C)) there is a zero; a millionth beside it there is none."""
    resonance = 1 / (2 * pi * np.sqrt(henry * farad))
    swept = trap(henry, farad).path("in", "out").sweep([resonance, resonance * (1 + 1e-6)])
    assert swept.beside.tolist() == [1, 0]
    meant = swept.as_meant()
    assert meant.gain_db[0] == -np.inf
    assert meant.value[0] == 0
    assert np.isnan(meant.phase_deg[0])
    assert meant.gain_db[1] == swept.gain_db[1]
    assert meant.phase_deg[1] == swept.phase_deg[1]


@settings(max_examples=25, deadline=None)
@given(sizes, sizes)
def test_a_pole_likewise(henry, farad):
    """A lossless parallel resonance is infinite at its own frequency."""
    resonance = 1 / (2 * pi * np.sqrt(henry * farad))
    swept = trap(henry, farad).looking_into("tank").sweep([resonance / 2, resonance])
    assert swept.beside.tolist() == [0, -1]
    assert swept.as_meant().gain_db[1] == np.inf


@settings(max_examples=25, deadline=None)
@given(st.lists(st.floats(1e-3, 1e9), min_size=1, max_size=8))
def test_a_lossy_network_has_none(hertz):
    """Poles and zeros off the axis are never taken for one, however deep the gain."""
    circuit = acsolve.parse(
        "in -- R1 = 1 kohm -- a -- R2 = 1 kohm -- out\na -- C1 = 1 uF -- gnd\nout -- C2 = 1 F -- gnd"
    )
    swept = circuit.path("in", "out").sweep(hertz)
    assert not swept.beside.any()
    assert swept.as_meant() is swept


@pytest.mark.parametrize("away", [2.0**-53, 2.0**-51, 2.0**-44, 2.0**-30])
@pytest.mark.parametrize("sign", [1, -1])
def test_the_limit_is_four_units_in_the_last_place(away, sign):
    """H = f/f0 - 1 and its inverse, f off f0 by a known amount."""
    value, moved = np.array([away + 0j]), np.array([away + STEP * (1 + away) + 0j])
    found = beside_roots(value, moved) if sign > 0 else beside_roots(1 / value, 1 / moved)
    assert found.tolist() == [sign if away < 2.0**-50 else 0]
