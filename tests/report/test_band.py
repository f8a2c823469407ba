"""Bands and frequencies chosen for pictures."""

from __future__ import annotations

from math import pi

import numpy as np
from hypothesis import given
from hypothesis import strategies as st

from acsolve.report.band import drawn_frequencies, natural_band

HERTZ = st.floats(1e-9, 1e12)


@given(st.lists(HERTZ, min_size=1, max_size=6))
def test_band_has_room_around_every_frequency(places):
    """Every frequency lies inside, at least a factor of five from either end."""
    low, high = natural_band(places)
    assert low * 5 <= min(places) * 1.01
    assert max(places) * 5 <= high * 1.01


def test_band_without_any_feature():
    """Where nothing depends on frequency a usual band is shown."""
    low, high = natural_band([])
    assert 0 < low < high


@given(st.floats(2.0, 5.0), st.floats(1.0, 1e6))
def test_a_narrow_resonance_is_met(exponent, quality):
    """Frequencies rise, and some lie within the half width of a resonance of any quality."""
    centre = 10.0**exponent
    root = 2 * pi * complex(-centre / (2 * quality), centre)
    found = drawn_frequencies((10.0, 1e6), [root, root.conjugate()], [123.0])
    assert np.all(np.diff(found) > 0)
    assert 123.0 in found
    assert np.sum(np.abs(found - centre) <= centre / (2 * quality)) >= 5
