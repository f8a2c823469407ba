"""Asymptotes between corners."""

from __future__ import annotations

import itertools

import numpy as np
import pytest

import acsolve
from acsolve.analyses.corners import segments


def test_far_from_every_corner_the_gain_is_the_asymptote() -> None:
    """Two corners four decades apart: the gain meets each asymptote in the middle of it."""
    circuit = acsolve.parse(
        "in -- R1 = 1 kohm -- a -- R2 = 1 Mohm -- out\na -- C1 = 10 uF -- gnd\nout -- C2 = 1 pF -- gnd\n"
    )
    path = circuit.path("in", "out")
    answer = path.transfer()
    found = segments(answer.form, answer.roots)
    assert [item.slope_db for item in found] == [0, -20, -40]
    for item in found:
        low = item.low or item.high / 1e4
        high = item.high if np.isfinite(item.high) else item.low * 1e4
        middle = (low * high) ** 0.5
        gain = 20 * np.log10(abs(path.response(middle)))
        assert item.gain_db(middle) == pytest.approx(gain, abs=0.01)


def test_neighbours_meet_at_their_corner() -> None:
    """Two asymptotes are equal at the corner between them."""
    circuit = acsolve.parse("in -- R1 = 1k -- out\nout -- R2 = 100 -- x -- C2 = 1 nF -- gnd\n")
    answer = circuit.path("in", "out").transfer()
    found = segments(answer.form, answer.roots)
    assert len(found) == 3
    for left, right in itertools.pairwise(found):
        assert left.high == right.low
        assert left.gain_db(left.high) == pytest.approx(right.gain_db(left.high), abs=1e-9)
