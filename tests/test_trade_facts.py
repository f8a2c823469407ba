"""Facts about a single RC section that every designer knows, through the public door.

All of them are common practice: textbook knowledge without a source of its own.
"""

from __future__ import annotations

from math import atan, cos, e, exp, isclose, log10, pi, sin, sqrt

import numpy as np
import pytest

import acsolve

OHM, FARAD = 1000.0, 100e-9
TAU = OHM * FARAD
CUTOFF = 1 / (2 * pi * TAU)

TEXT = """
title "Anti-alias section, deck strain channel 1"
bridge -- R1 -- out
out -- C1 -- gnd
R1 = 1 kohm
C1 = 100 nF
"""


@pytest.fixture(name="path")
def the_section():
    """The low-pass section from `bridge` to `out`."""
    return acsolve.parse(TEXT).path("bridge", "out")


def test_gain_is_one_at_dc_and_tends_to_zero(path):
    """Common practice: gain 1 at 0 Hz, 0 at infinite frequency."""
    answer = path.transfer()
    assert str(answer.form) == "10000/(10000 + s)"
    assert answer.at_zero.text() == "1"
    assert answer.at_infinity == "0"
    assert abs(path.response([0.0])[0]) == 1.0


def test_seventy_percent_at_the_cutoff(path):
    """Common practice: at ω = 1/(RC) the gain is 70.7 % (-3.01 dB) and the phase -45 degrees."""
    value = complex(path.response([CUTOFF])[0])
    assert isclose(abs(value), 1 / sqrt(2), rel_tol=1e-14)
    assert isclose(20 * log10(abs(value)), -3.0103, abs_tol=5e-6)
    sweep = path.sweep([CUTOFF / 2, CUTOFF, 2 * CUTOFF])
    assert isclose(sweep.phase_deg[1], -45, rel_tol=1e-14)
    (cutoff,) = path.cutoffs().cutoffs
    assert isclose(cutoff.hertz, CUTOFF, rel_tol=1e-15)
    assert cutoff.direction == "falling"


def test_minus_ninety_degrees_far_above(path):
    """Common practice: far above the cutoff the phase tends to -90 degrees, 20 dB a decade."""
    sweep = path.sweep(CUTOFF * np.array([1e4, 1e5]))
    assert sweep.phase_deg == pytest.approx([-90, -90], abs=0.006)
    assert sweep.gain_db[1] - sweep.gain_db[0] == pytest.approx(-20, abs=1e-6)


def test_a_sine_is_delayed_by_the_arctangent(path):
    """Common practice: a sine is delayed by atan(ωRC)/ω: RC far below the cutoff, less above."""
    hertz = CUTOFF * np.array([1e-3, 0.1, 1.0, 10.0, 1000.0])
    sweep = path.sweep(hertz)
    expected = [atan(2 * pi * f * TAU) / (2 * pi * f) for f in hertz]
    assert sweep.phase_delay_s == pytest.approx(expected, rel=1e-12)
    assert sweep.phase_delay_s[0] == pytest.approx(TAU, rel=1e-6)
    assert sweep.phase_delay_s[-1] < TAU / 600
    assert sweep.group_delay_s == pytest.approx(TAU / (1 + (2 * pi * hertz * TAU) ** 2), rel=1e-12)


def test_the_output_sine_lags_the_input_sine(path):
    """Common practice: sin(ωt) gives |H|·sin(ωt - φ), which Kirchhoff's law confirms."""
    omega = 2 * pi * 3000.0
    value = complex(path.response([3000.0])[0])
    for t in (0.0, 1e-5, 7e-5):
        out = (value * complex(cos(omega * t), sin(omega * t))).imag
        slope = (1j * omega * value * complex(cos(omega * t), sin(omega * t))).imag
        assert isclose(out + TAU * slope, sin(omega * t), abs_tol=1e-12)


def test_sixty_three_percent_after_one_time_constant(path):
    """Common practice: one time constant into a step the output has reached 1 - 1/e, 63.2 %.

    The pole and the residue of H(s)/s there give the step response 1 - exp(-t/RC).
    """
    answer = path.transfer()
    (pole,) = answer.roots.poles
    assert pole == complex(-1 / TAU)
    reached = 1 - exp(pole.real * TAU)
    assert isclose(reached, 1 - 1 / e, rel_tol=1e-15)
    assert isclose(reached, 0.632, abs_tol=5e-4)
    named = answer.standard_form
    assert named.shape == "low-pass"
    assert (named.parts["k"], named.parts["tau"], named.parts["w0"]) == ("1", "1/10000", "10000")


def test_the_mirrored_section_passes_high_frequencies():
    """Common practice: R and C exchanged, gain 0 at 0 Hz, 1 far above, +45 degrees at cutoff."""
    path = acsolve.parse("bridge -- C1 -- out\nout -- R1 -- gnd\nR1 = 1 kohm\nC1 = 100 nF\n").path(
        "bridge", "out"
    )
    answer = path.transfer()
    assert answer.at_zero == "0"
    assert answer.at_infinity.text() == "1"
    sweep = path.sweep([CUTOFF, 1e4 * CUTOFF])
    assert isclose(sweep.phase_deg[0], 45, rel_tol=1e-14)
    (cutoff,) = path.cutoffs().cutoffs
    assert cutoff.direction == "rising"
    assert isclose(cutoff.hertz, CUTOFF, rel_tol=1e-15)


def test_two_sections_load_each_other():
    """Common practice: two RC sections in cascade are not the product of two single ones.

    Of equal parts the denominator is 1 + 3·RC·s + (RC·s)², not (1 + RC·s)².
    """
    path = acsolve.parse(
        "let R, C\n"
        "bridge -- R1 -- mid -- R2 -- out\nmid -- C1 -- gnd\nout -- C2 -- gnd\n"
        "R1, R2 = R\nC1, C2 = C\n"
    ).path("bridge", "out")
    assert str(path.closed_form()) == "1/(1 + 3*R*C*s + R^2*C^2*s^2)"


def test_the_symbolic_cutoff_is_one_over_rc():
    """Common practice: without values, the cutoff is 1/(R·C), of one coil and resistor R/L."""
    section = acsolve.parse("bridge -- R1 -- out\nout -- C1 -- gnd\n").path("bridge", "out")
    (cutoff,) = section.cutoffs().cutoffs
    assert cutoff.closed_form == "1/(R1*C1)"
    coil = acsolve.parse("bridge -- L1 -- out\nout -- R1 -- gnd\n").path("bridge", "out")
    (other,) = coil.cutoffs().cutoffs
    assert other.closed_form == "R1/L1"
