"""Odd questions that once failed: beyond doubles, nothing at all, resonances without end."""

from __future__ import annotations

import math

import numpy as np
import pytest

import acsolve
from acsolve.algebra.ball import precision
from acsolve.algebra.residue import _sharpened, _whole_roots

RC = "in -- R1 -- out\nout -- C1 -- gnd\n"


def test_values_near_the_end_of_doubles():
    """R·C is one second, though neither power of R nor of C is a double."""
    path = acsolve.parse(RC).with_values(R1=1e300, C1=1e-300).path("in", "out")
    (item,) = path.cutoffs().cutoffs
    assert item.rad_per_s == pytest.approx(1, rel=1e-15)


def test_nothing_is_driven_by_nothing():
    """An output that nothing reaches has a response of zero to an impulse, too."""
    path = acsolve.parse("in -- R1 = 1 -- gnd\nout -- R2 = 1 -- gnd\n").path("in", "out")
    for drive in ("step", "impulse", "1 Hz"):
        found = path.step(1, drive=drive)
        assert not found.value.any()
        assert found.impulses == ()


@pytest.mark.parametrize("quality", [10, 1e3, 1e5, 1e6])
def test_the_overshoot_of_a_sharp_resonance(quality):
    """exp(-pi·zeta/sqrt(1 - zeta²)), at half a period."""
    circuit = acsolve.parse("in -- R1 -- a -- L1 = 1 H -- out\nout -- C1 = 1 uF -- gnd\n")
    found = circuit.with_values(R1=1000 / quality).path("in", "out").step()
    zeta = 1 / (2 * quality)
    root = math.sqrt(1 - zeta * zeta)
    assert found.overshoot == pytest.approx(math.exp(-math.pi * zeta / root), rel=1e-12)
    assert found.peak_s == pytest.approx(math.pi / (1000 * root), rel=1e-9)


def test_a_higher_peak_later_on_is_found():
    """Two modes that beat: the highest peak is not the first one."""
    path = acsolve.parse(
        "in -- R1 = 0.01 -- a -- L1 = 1 H -- b\nb -- C1 = 1 F -- gnd\n"
        "b -- L2 = 1 H -- out\nout -- C2 = 0.9 F -- gnd\n"
    ).path("in", "out")
    found = path.step()
    times = np.linspace(0, 100, 20001)
    curve = found.at(times)
    assert found.overshoot >= curve.max() - 1 - 1e-12
    assert found.overshoot == pytest.approx(curve.max() - 1, abs=1e-3)


@pytest.mark.parametrize("bits", [53, 300, 1500])
def test_roots_are_narrowed_to_what_is_asked(bits):
    """Balls of twelve real roots and of a pair, each inside the first one and as narrow."""
    from flint import fmpz_poly

    poly = fmpz_poly([1])
    for k in range(1, 13):
        poly *= fmpz_poly([2 * k * k + 1, k])
    poly *= fmpz_poly([10**12, 3, 10**6])
    whole = tuple(int(value) for value in poly.coeffs())
    with precision(bits):
        for root in _whole_roots(whole):
            sharp = _sharpened(root, whole)
            assert root.contains(sharp)
            assert (sharp.real.rad() + sharp.imag.rad()) * 2**bits <= abs(sharp).abs_lower()
    places = sorted(float(_sharpened(root, whole).real) for root in _whole_roots(whole))
    assert places[0] == pytest.approx(-289 / 12, rel=1e-15)


def test_conditions_of_third_degree():
    """Three sections in a row fall all the way: one crossing, whatever the parts."""
    path = acsolve.parse(
        "in -- R1 -- a -- R2 -- b -- R3 -- out\na -- C1 -- gnd\nb -- C2 -- gnd\nout -- C3 -- gnd\n"
    ).path("in", "out")
    values = dict.fromkeys(("R1", "R2", "R3", "C1", "C2", "C3"), 1.0)
    found = path.cutoffs(symbolic=True, degree=3)
    assert len(found.cutoffs) == 3
    assert all("one is real and positive" in item.condition for item in found.cutoffs)
    assert len(path.circuit.with_values(values).path("in", "out").cutoffs().cutoffs) == 1
