"""Cutoffs by certified bracketing: closed formulas, a dense search, the rational answer."""

from __future__ import annotations

from fractions import Fraction
from math import acos, atan, isclose, log10, pi, sqrt, tan

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from scipy.optimize import brentq

import acsolve
from acsolve.analyses.band_cutoff import METHOD, band_cutoffs
from acsolve.analyses.cutoff import HALF_POWER, CutoffLevel, cutoffs
from acsolve.analyses.grid import HertzBand
from acsolve.circuit.netlist import Netlist
from acsolve.errors import AnalysisError
from tests.strategies import C, L, R, connected, network, part, positives

from .test_transfer_laws import form_of, gnd


def path(text: str, **values) -> acsolve.Path:
    """From `in` to `out`."""
    return acsolve.parse(text).with_values(values).path("in", "out")


def hertz(answer) -> list[float]:
    """The cutoffs."""
    return [item.hertz for item in answer.cutoffs]


LINE = """
in -- R1 -- a
T1 : line(near = a, far = out, z0 = 50 ohm, delay = 5 ns)
out -- R2 -- gnd
R1, R2 = 50 ohm
"""
STUB = """
in -- R1 -- out -- R2 -- gnd
T1 : line(near = out, far = tip, z0 = 50 ohm, delay = 5 ns)
tip -- R3 -- gnd
R1, R2 = 50 ohm
R3 = 0 ohm
"""
HALF = (
    "in -- R1 -- out\nQ1 : constant_phase(a = out, b = gnd)\nR1 = 50 ohm\nQ1.coefficient = 1e-5\n"
)


# ------------------------------------------------------------ closed formulas


@pytest.mark.parametrize("load", [400, 75, 8])
@pytest.mark.parametrize("level", [-0.5, -3, -6])
def test_a_line_between_unequal_ends(load, level):
    """|H|² = g²/(cos² + (a·sin)²) from a voltage source: every crossing from the formula."""
    answer = path(LINE, R1="0 ohm", R2=load).cutoffs(level, reference=1.0, band=(1e5, 1e9))
    ratio = 50 / load
    wanted = 2 if level == -3 else 10 ** (-level / 10)
    share = (wanted - 1) / (ratio**2 - 1)  # of sin²
    assert answer.complete
    assert answer.searched == (1e5, 1e9)
    if not 0 < share < 1:
        assert answer.cutoffs == ()
        return
    angle = acos(sqrt(1 - share))
    turns = [angle, *(k * pi + sign * angle for k in range(1, 12) for sign in (1, -1))]
    formula = sorted(turn / (2 * pi * 5e-9) for turn in turns)
    assert hertz(answer) == pytest.approx([item for item in formula if item < 1e9], rel=1e-13)


def test_a_matched_line_crosses_nothing():
    """Its gain is the same at every frequency."""
    answer = path(LINE).cutoffs()
    assert answer.complete
    assert answer.cutoffs == ()
    assert answer.reference.at == "dc"
    assert answer.reference.gain == 0.5
    at_level = path(LINE).cutoffs(0, band=(1e6, 3e7))
    assert not at_level.complete
    assert (at_level.cutoffs, at_level.touches) == ((), ())
    assert any("stays at the level" in remark for remark in at_level.remarks)
    assert path(LINE).cutoffs(reference="peak", band=(1e6, 3e7)).reference.gain == pytest.approx(
        0.5, rel=1e-12
    )


def test_a_shorted_stub_passes_where_it_is_a_quarter_wave():
    """H = j·tan/(1 + 2j·tan)·… : half power of the peak where |tan| = 1/2."""
    answer = path(STUB).cutoffs(band="1 MHz .. 400 MHz")
    assert answer.complete
    assert answer.reference.at == "peak"
    assert answer.reference.gain == pytest.approx(0.5, rel=1e-15)
    angle = atan(0.5)
    formula = [
        turn / (2 * pi * 5e-9) for k in range(4) for turn in (angle + k * pi, k * pi + pi - angle)
    ]
    assert hertz(answer) == pytest.approx(formula, rel=1e-13)
    assert [item.direction for item in answer.cutoffs] == ["rising", "falling"] * 4


def test_a_notch_of_an_open_stub():
    """Zero at the quarter wave; -20 dB where |H| = 1/|2 + j·tan|·… is a tenth of the dc gain."""
    text = STUB.replace("tip -- R3 -- gnd\n", "").replace("R3 = 0 ohm\n", "")
    answer = path(text).cutoffs(-20, band=(1e6, 9e7))
    turn = atan(2 * sqrt(99))
    formula = [turn / (2 * pi * 5e-9), (pi - turn) / (2 * pi * 5e-9)]
    assert answer.complete
    assert hertz(answer) == pytest.approx(formula, rel=1e-13)
    assert tan(turn) == pytest.approx(2 * sqrt(99))


@pytest.mark.parametrize("exponent", [Fraction(1, 2), Fraction(7, 10), Fraction(73, 100), 1])
@pytest.mark.parametrize("level", [None, -40])
def test_a_constant_phase_low_pass(exponent, level):
    """|1 + (j·x)^a|² = 1 + 2·cos(a·90°)·x^a + x^2a, solved for x^a."""
    from math import cos

    text = f"{HALF}Q1.exponent = {float(exponent)}"
    answer = path(text).cutoffs(level, band=None if exponent != 1 else (1, 1e9))
    turn = 2 * cos(float(exponent) * pi / 2)
    wanted = 2 if level is None else 10 ** (-level / 10)
    power = (-turn + sqrt(turn**2 + 4 * (wanted - 1))) / 2
    omega = (power / (50 * 1e-5)) ** (1 / float(exponent))
    assert answer.complete
    assert answer.reference.at == "dc"
    assert hertz(answer) == pytest.approx([omega / (2 * pi)], rel=1e-12)
    assert answer.cutoffs[0].rad_per_s == pytest.approx(omega, rel=1e-12)


def test_the_shipped_cable():
    """4.5 dB at 1 MHz by the root of frequency, matched: the half-power point by hand."""
    circuit = acsolve.read("circuits/mast_cable.circuit")
    answer = circuit.path("send", "far_end").cutoffs()
    decibels = 20 * log10(sqrt(2))
    assert hertz(answer) == pytest.approx([1e6 * (decibels / 4.5) ** 2], rel=1e-14)
    assert answer.complete
    assert answer.method == METHOD


def test_a_diffusion_element():
    """Z = R·tanh(q)/q, q = sqrt(s·tau): the dc gain is a limit, the cutoff from mpmath."""
    import mpmath

    q = "sqrt(s*1 ms)"
    text = f"in -- R1 -- out -- Z1 -- gnd\nR1 = 100 ohm\nZ1 : impedance(1 kohm/{q}*(exp({q}) - exp(-{q}))/(exp({q}) + exp(-{q})))"
    answer = path(text).cutoffs()
    assert answer.complete
    assert answer.reference.gain == pytest.approx(1000 / 1100, rel=1e-15)

    def miss(f):
        root = mpmath.sqrt(2j * mpmath.pi * f / 1000)
        z = 1000 * mpmath.tanh(root) / root
        return abs(z / (z + 100)) ** 2 / (mpmath.mpf(10) / 11) ** 2 - mpmath.mpf(1) / 2

    with mpmath.workdps(30):
        assert hertz(answer) == pytest.approx([float(mpmath.findroot(miss, 7000))], rel=1e-14)


# ------------------------------------------------------------ rational networks, both ways


LEVELS = (None, Fraction(-6), Fraction(-7, 2), Fraction(-20), Fraction(1))


@settings(max_examples=40)
@given(st.data(), st.sampled_from(LEVELS), st.sampled_from((None, "dc", Fraction(1, 3))))
def test_rational_networks_answer_alike(data, level, reference):
    """The proven roots of the polynomial and the bracketed ones are the same."""
    netlist = data.draw(connected(most_nodes=5, most_extra=3))
    form = form_of(netlist, gnd("in"), gnd(data.draw(st.sampled_from(netlist.nodes()[1:]))))
    assume(form is not None and form.numerator != 0)
    try:
        exact = cutoffs(form, level=CutoffLevel(level), reference=reference)
    except AnalysisError:
        return
    assume(exact.complete and not exact.touches and exact.reference.at != "peak")
    wide = HertzBand(Fraction(1, 10**5), Fraction(10**5))
    found = band_cutoffs(
        form,
        level=CutoffLevel(level),
        reference=reference or exact.reference.at,
        band=wide,
    )
    inside = [item for item in exact.cutoffs if 1e-5 < item.hertz < 1e5]
    assert [item.direction for item in found.cutoffs] == [item.direction for item in inside]
    assert hertz(found) == pytest.approx([item.hertz for item in inside], rel=1e-14)
    assert found.reference.gain == pytest.approx(exact.reference.gain, rel=1e-14)
    if found.cutoffs or not found.touches:
        assert found.complete


def test_a_peak_found_both_ways():
    """A resonant low-pass: the same peak, the same cutoffs below it, one touch at 0 dB."""
    netlist = network(
        R("R1", "in", "a", 1), L("L1", "a", "out", 1), C("C1", "out", "gnd", Fraction(1, 9))
    )
    form = form_of(netlist, gnd("in"), gnd("out"))
    band = HertzBand(Fraction(1, 1000), Fraction(1000))
    exact = cutoffs(form, reference="peak")
    found = band_cutoffs(form, level=HALF_POWER, reference="peak", band=band)
    assert found.complete
    assert hertz(found) == pytest.approx(hertz(exact), rel=1e-15)
    assert found.reference.gain == pytest.approx(exact.reference.gain, rel=1e-15)
    assert found.reference.hertz == pytest.approx(exact.reference.hertz, rel=1e-15)
    top = band_cutoffs(form, level=CutoffLevel(Fraction(0)), reference="peak", band=band)
    assert top.complete
    assert [item.hertz for item in top.touches] == pytest.approx([exact.reference.hertz])


def test_a_band_narrows_a_rational_answer():
    """Only the crossings in the band; the proof holds there."""
    text = "in -- C1 -- a -- R1 -- out -- R2 -- gnd\nout -- C2 -- gnd\nC1 = 1 uF\nC2 = 1 nF\nR1, R2 = 1 kohm"
    every = path(text).cutoffs(reference="peak")
    assert len(every.cutoffs) == 2
    low, high = hertz(every)
    part = path(text).cutoffs(reference="peak", band=(low * 2, high * 2))
    assert hertz(part) == [high]
    assert part.complete
    assert part.searched == (low * 2, high * 2)
    assert hertz(path(text).cutoffs(reference="peak", band=(low, high))) == [low, high]
    nothing = path(text).cutoffs(reference="peak", band=(high * 2, high * 4))
    assert nothing.cutoffs == ()
    assert any("does not cross" in remark for remark in nothing.remarks)


# ------------------------------------------------------------ against a dense search


@st.composite
def distributed(draw) -> Netlist:
    """R, L and C with a line or constant-phase part, or two."""
    netlist = draw(connected(most_nodes=4, most_extra=2, extra=("resistor", "capacitor")))
    nodes, parts = netlist.nodes(), list(netlist.parts)
    for at in range(draw(st.integers(1, 2))):
        first = draw(st.sampled_from(nodes[1:]))
        if draw(st.booleans()):
            fields = {"z0": draw(positives), "delay": draw(positives) / 20}
            if draw(st.booleans()):
                fields["constant_loss"] = draw(positives) / 4
            ends = (first, f"far{at}", "gnd", "gnd")
            parts.append(part(f"T{at}", "line", *ends, **fields))
            parts.append(R(f"Rt{at}", f"far{at}", "gnd", draw(positives)))
        else:
            exponent = draw(st.sampled_from([Fraction(1, 2), Fraction(2, 3), Fraction(4, 5)]))
            values = {"coefficient": draw(positives), "exponent": exponent}
            parts.append(part(f"Q{at}", "constant_phase", first, "gnd", **values))
    parts.append(R("Rs", "in", "drive", draw(positives)))
    return network(*parts)


@settings(max_examples=25)
@given(st.data(), st.sampled_from((None, Fraction(-6), Fraction(-10))))
def test_a_dense_search_finds_the_same(data, level):
    """Each crossing between neighbouring points is listed, each listed one is at the level."""
    netlist = data.draw(distributed())
    form = form_of(netlist, gnd("drive"), gnd(data.draw(st.sampled_from(netlist.nodes()[1:]))))
    assume(form is not None and form.numerator != 0 and not form.rational)
    gain = data.draw(st.sampled_from([Fraction(1, 2), Fraction(1, 5), Fraction(9, 10)]))
    band = HertzBand(Fraction(1, 1000), Fraction(4))
    found = band_cutoffs(form, level=CutoffLevel(level), reference=gain, band=band)
    assume(found.complete)
    limit = float(gain) * (sqrt(0.5) if level is None else 10 ** (float(level) / 20))

    def miss(f):
        return float(abs(form.response([f])[0])) / limit - 1

    grid = np.geomspace(1e-3, 4, 3001)
    values = np.abs(form.response(grid)) / limit - 1
    changes = np.flatnonzero(np.sign(values[:-1]) * np.sign(values[1:]) < 0)
    seen = [brentq(miss, grid[k], grid[k + 1], xtol=1e-15, rtol=1e-14) for k in changes]
    for item in seen:
        assert any(isclose(item, other, rel_tol=1e-7) for other in hertz(found))
    for item in found.cutoffs:
        assert abs(miss(item.hertz)) < 1e-9
        beside = [miss(item.hertz * (1 + step)) for step in (-1e-5, 1e-5)]
        if min(map(abs, beside)) > 1e-9 and len(seen) == len(found.cutoffs):
            assert (beside[0] < 0) == (item.direction == "rising")
    assert (len(found.cutoffs) - len(seen)) % 2 == 0


# ------------------------------------------------------------ what is refused or doubted


def test_references_that_are_none():
    """A line's gain has no limit at infinite frequency; a shorted one none at 0 Hz."""
    with pytest.raises(AnalysisError, match="no limit at infinite frequency"):
        path(LINE, R2=400).cutoffs(reference="infinity")
    with pytest.raises(AnalysisError, match="at 0 Hz is zero"):
        path(STUB).cutoffs(reference="dc")
    open_end = path(LINE, R1="0 ohm").circuit.without("R2").path("in", "out")
    with pytest.raises(AnalysisError, match="pole"):
        open_end.cutoffs(reference="peak", band=(1e6, 8e7))


@pytest.mark.parametrize("band", [(0, 1e6), "0 Hz .. 1 MHz"])
def test_bands_that_are_none(band):
    """A band in equal ratios starts above zero."""
    with pytest.raises(AnalysisError) as caught:
        path(LINE).cutoffs(band=band)
    assert caught.value.code == "sweep.band"


def test_symbols_have_no_bracket():
    """Numbers are needed."""
    with pytest.raises(AnalysisError) as caught:
        path(LINE).cutoffs(keep="R2")
    assert caught.value.code == "equations.not-rational"


def test_a_band_goes_with_numbers():
    """A closed form of a cutoff lies in no band."""
    question = path("in -- R1 -- out -- C1 -- gnd\nR1 = 1 kohm\nC1 = 1 uF")
    with pytest.raises(AnalysisError) as caught:
        question.cutoffs(keep="C1", band=(1, 10))
    assert caught.value.code == "option.value"


def test_a_crossing_on_an_edge_counts():
    """The band is closed, as far as doubles can say."""
    (edge,) = hertz(path(f"{HALF}Q1.exponent = 0.5").cutoffs())
    for band in ((edge, 10 * edge), (edge / 10, edge)):
        assert hertz(path(f"{HALF}Q1.exponent = 0.5").cutoffs(band=band)) == [edge]


def test_more_turns_than_can_be_looked_at(monkeypatch):
    """A search that ends early is not complete, and says where it ended."""
    monkeypatch.setattr("acsolve.analyses.band_cutoff._CELLS", (10, 300))
    answer = path(LINE, R2=400, R1=0).cutoffs(reference=1.0, level=0, band=(1e6, 1e15))
    assert not answer.complete
    assert any("came as far as" in remark for remark in answer.remarks)


def test_peaks_of_one_height():
    """A level of 0 dB below equal peaks touches each; that they are equal is not proven."""
    answer = path(LINE, R1=20, R2=400).cutoffs(0, reference="peak", band=(1e6, 4e8))
    assert [item.hertz for item in answer.touches] == pytest.approx([5e7, 1.5e8, 2.5e8, 3.5e8])
    assert not answer.complete
    assert answer.cutoffs == ()


def test_values_that_hold_pi_and_functions_of_s():
    """An impedance in s of any form, here a root of a sum, as part of a divider."""
    text = "in -- R1 -- out -- Z1 -- gnd\nR1 = 1 kohm\nZ1 : impedance(1 kohm/sqrt(1 + s*1 ms/pi))"
    answer = path(text).cutoffs(reference="dc")

    def miss(f):
        z = 1000 / np.sqrt(1 + 2j * f * 1e-3)
        return abs(z / (z + 1000)) / 0.5 / sqrt(0.5) - 1

    assert answer.complete
    assert hertz(answer) == pytest.approx([brentq(miss, 1, 1e6, rtol=1e-14)], rel=1e-12)
