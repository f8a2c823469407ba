"""Corners, slopes between them, and bands in closed form."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

import acsolve

SERIES = "in -- L1 -- a -- C1 -- out\nout -- R1 -- gnd\n"
LAG = "in -- R1 -- out\nout -- R2 -- b\nb -- C1 -- gnd\n"


def valued(text, **values):
    """A circuit's path with values."""
    return acsolve.parse(text).with_values(**values).path("in", "out")


def slope(path, hertz):
    """d(dB)/d(decade) of the gain itself."""
    low, high = np.abs(path.response([hertz / 1.001, hertz * 1.001]))
    return 20 * np.log10(high / low) / (2 * np.log10(1.001))


@settings(max_examples=25, deadline=None)
@given(st.lists(st.floats(0, 1), min_size=2, max_size=4), st.booleans())
def test_far_from_corners_the_gain_has_the_slopes(shifts, lag):
    """Sections that do not load each other, four decades apart: half way the slope is told."""
    lines, node = [], "in"
    for k, shift in enumerate(shifts):
        resistance = 10 ** (4 + shift)
        lines.append(f"{node} -- R{k} = {resistance!r} ohm -- a{k}")
        step = f"C{k} = {10.0 ** (-4 - 4 * k)!r} F -- gnd"
        lines.append(
            f"a{k} -- RD{k} = {resistance / 100!r} ohm -- m{k} -- {step}"
            if lag
            else f"a{k} -- {step}"
        )
        lines.append(
            f"B{k} : voltage_amplifier(plus = a{k}, minus = gnd, out = b{k}, ref = gnd, gain = 1)"
        )
        node = f"b{k}"
    path = acsolve.parse("\n".join(lines)).path("in", node)
    found = path.cutoffs(reference="dc").roll_off
    assert found is not None
    assert found.slopes_db is not None
    assert found.ends_db == (found.slopes_db[0], found.slopes_db[-1])
    assert len(found.slopes_db) == len(found.corners) + 1
    places = [corner.hertz for corner in found.corners]
    for k, (low, high) in enumerate(pairwise([places[0] / 1e4, *places, places[-1] * 1e4])):
        if high / low > 30:
            assert slope(path, math.sqrt(low * high)) == pytest.approx(found.slopes_db[k], abs=2)


def test_a_double_corner_is_one():
    """Poles of one magnitude, in a pair or ten of them on a circle, make one corner."""
    pair = valued(SERIES, R1="50", L1="1 mH", C1="1 nF").cutoffs().roll_off
    (corner,) = pair.corners
    assert corner.rad_per_s == pytest.approx(1e6, rel=1e-15)
    assert corner.change_db == -40
    assert corner.closed_form == "1/sqrt(L1*C1)"
    assert pair.slopes_db == (20, -20)
    elements = [2 * math.sin((2 * k - 1) * math.pi / 20) for k in range(1, 11)]
    lines, node = ["in -- R0 = 1 -- n0"], "n0"
    for k, value in enumerate(elements):
        if k % 2:
            lines.append(f"{node} -- L{k} = {value!r} -- n{k}")
            node = f"n{k}"
        else:
            lines.append(f"{node} -- C{k} = {value!r} -- gnd")
    lines.append(f"{node} -- RL = 1 -- gnd")
    found = acsolve.parse("\n".join(lines)).path("in", node).cutoffs().roll_off
    assert found.slopes_db[-1] == -200
    assert [corner.rad_per_s for corner in found.corners] == pytest.approx([1] * len(found.corners))


def test_an_all_pass_has_no_corner():
    """Poles and zeros of one magnitude cancel."""
    path = acsolve.parse(
        "in -- R1 = 1k -- x -- R2 = 1k -- y\nin -- R3 = 1k -- p\np -- C1 = 1 uF -- gnd\n"
        "A1 : opamp(plus = p, minus = x, out = y)\n"
    ).path("in", "y")
    assert path.transfer().standard_form.shape == "all-pass"
    found = path.cutoffs(0.5, reference="dc")
    assert found.roll_off.corners == ()
    assert found.roll_off.slopes_db == (0,)
    assert found.cutoffs == ()
    assert found.complete


def test_corners_over_symbols():
    """A pole and a zero in closed form; which comes first only values tell."""
    found = acsolve.parse(LAG).path("in", "out").cutoffs(reference="dc").roll_off
    assert [(item.closed_form, item.change_db) for item in found.corners] == [
        ("1/(C1*(R1 + R2))", -20),
        ("1/(R2*C1)", 20),
    ]
    assert found.slopes_db is None
    assert found.ends_db == (0, 0)
    assert all(item.hertz is None and item.condition is None for item in found.corners)


@settings(max_examples=30, deadline=None)
@given(*(st.floats(0.1, 10) for _ in range(3)))
def test_conditions_tell_which_corners_hold(r, inductance, c):
    """Of a pair and two real poles, those whose condition holds are the numeric corners."""
    found = acsolve.parse(SERIES).path("in", "out").cutoffs().roll_off
    names = {"R1": r, "L1": inductance, "C1": c}
    assert len(found.corners) == 3
    held = [
        (float(sympy.sympify(item.closed_form).subs(names)), item.change_db)
        for item in found.corners
        if bool(sympy.sympify(item.condition).subs(names))
    ]
    numeric = valued(SERIES, **names).cutoffs().roll_off
    expected = [(item.rad_per_s, item.change_db) for item in numeric.corners]
    assert len(held) == len(expected)
    for (place, change), (wanted, step) in zip(sorted(held), expected, strict=True):
        assert change == step
        assert place == pytest.approx(wanted, rel=1e-9)
    assert all(item.closed_form is not None for item in numeric.corners)


def test_a_band_in_closed_form():
    """Width R/L, centre 1/sqrt(LC), Q their ratio; symbols and numbers alike."""
    for path in (
        acsolve.parse(SERIES).path("in", "out"),
        valued(SERIES, R1="50", L1="1 mH", C1="1 nF"),
    ):
        forms = path.cutoffs().band_forms
        assert (forms.width, forms.centre, forms.condition) == ("R1/L1", "1/sqrt(L1*C1)", None)
        q = sympy.sympify(f"({forms.q}) / (({forms.centre})/({forms.width}))")
        positive = {name: sympy.Symbol(name.name, positive=True) for name in q.free_symbols}
        assert sympy.simplify(q.subs(positive)) == 1


def test_a_band_of_another_level():
    """At -20 dB the width has the factor sqrt(99), and it is the numeric one."""
    path = valued(SERIES, R1="50", L1="1 mH", C1="1 nF")
    found = path.cutoffs(-20)
    width = float(sympy.sympify(found.band_forms.width).subs({"R1": 50, "L1": 1e-3, "C1": 1e-9}))
    assert width == pytest.approx(math.sqrt(99) * 5e4, rel=1e-12)
    assert width / (2 * math.pi) == pytest.approx(found.bands[0].width, rel=1e-12)


def test_the_width_of_a_very_narrow_notch():
    """R/L = 1e-9 rad/s at 1000 rad/s: no difference of two doubles."""
    path = acsolve.parse(
        "in -- R1 = 1 nohm -- out\nout -- L1 = 1 H -- a -- C1 = 1 uF -- gnd\n"
    ).path("in", "out")
    (band,) = path.cutoffs(reference="dc").bands
    assert band.kind == "stop"
    assert band.width == pytest.approx(1e-9 / (2 * math.pi), rel=1e-7)
    assert band.q == pytest.approx(1e12, rel=1e-7)


def test_lines_have_no_corners():
    """What is no ratio of polynomials has none, and says so."""
    path = acsolve.parse(
        "in -- R1 = 50 -- a\nT1 : line(near = a, far = out, z0 = 75 ohm, delay = 1 ns)\nout -- R2 = 10 -- gnd\n"
    ).path("in", "out")
    assert path.cutoffs(reference="dc").roll_off is None
