"""Cutoffs that are easily missed or invented: many edges, very narrow notches, equal ripple."""

from __future__ import annotations

from fractions import Fraction
from math import isclose, pi, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import signal
from sympy import Symbol
from sympy.parsing.sympy_parser import parse_expr

import acsolve
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import CutoffAnswer, CutoffLevel, cutoffs
from acsolve.analyses.question import impedance_ask
from acsolve.analyses.radicals import radicals, values
from acsolve.analyses.transfer import closed_form
from acsolve.circuit.expression import Expression, S, add, divide, multiply, number
from acsolve.equations.grouping import Writer
from tests.strategies import C, L, R, network, part

from .test_transfer_laws import form_of, gnd


def polynomial(coefficients) -> Expression:
    """A polynomial in s by falling power, each coefficient exactly the double it is."""
    total: Expression = number(0)
    for value in coefficients:
        total = add(multiply(total, S), number(Fraction(float(value))))
    return total


def rational(top, bottom) -> ClosedForm:
    """The impedance of one part whose value is a ratio of polynomials in s."""
    value = divide(polynomial(top), polynomial(bottom))
    netlist = network(part("X1", "impedance", "in", "gnd", value=value))
    return closed_form(netlist, impedance_ask(netlist, gnd("in")))


def dense(top, bottom, level: float, low: float, high: float, count: int = 1_000_001):
    """Where |H| crosses a gain, on a fine grid of angular frequencies, in long doubles."""
    omega = np.logspace(np.log10(low), np.log10(high), count).astype(np.longdouble)
    s = 1j * omega
    top, bottom = (np.asarray(item, dtype=np.longdouble) for item in (top, bottom))
    size = np.abs(np.polyval(top, s) / np.polyval(bottom, s)) - level
    places = np.flatnonzero(np.sign(size[1:]) * np.sign(size[:-1]) < 0)
    return [float((omega[k] + omega[k + 1]) / 2) for k in places]


def same(answer: CutoffAnswer, searched) -> None:
    """Every crossing of the search is listed, and no more."""
    assert answer.complete
    found = [item.rad_per_s for item in answer.cutoffs]
    assert len(found) == len(searched)
    assert found == pytest.approx(searched, rel=1e-3)


@pytest.mark.parametrize("level", [-0.05, -0.09, -0.3, -1, -3, -40, -55, -65])
def test_an_elliptic_band_pass_of_order_ten(level):
    """Ripple of 0.1 dB in its band and 60 dB beside it: every crossing of every level."""
    top, bottom = signal.ellip(5, 0.1, 60, [0.9, 1.1], btype="bandpass", analog=True)
    form = rational(top, bottom)
    assert len(form.coefficients()[1]) == 11
    asked = CutoffLevel(None if level == -3 else Fraction(str(level)))
    answer = cutoffs(form, level=asked, reference="peak")
    gain = answer.reference.gain * 10 ** (asked.db / 20)
    same(answer, dense(top, bottom, gain, 1e-3, 1e3))
    assert len(answer.cutoffs) % 2 == 0
    if level in (-1, -3):
        (band,) = answer.bands
        assert band.kind == "pass"
        assert isclose(band.centre, sqrt(0.99) / (2 * pi), rel_tol=1e-9)
        assert band.low < band.extremum < band.high


def test_a_notch_a_millionth_of_its_centre_wide():
    """Both edges, the centre as geometric mean, Q of a million, and the zero as extremum."""
    netlist = network(
        R("R1", "in", "out", Fraction(1)),
        L("L1", "out", "a", Fraction(10**6)),
        C("C1", "a", "gnd", Fraction(1, 10**6)),
    )
    form = form_of(netlist, gnd("in"), gnd("out"))
    answer = cutoffs(form)
    assert answer.complete
    first, second = answer.cutoffs
    assert (first.direction, second.direction) == ("falling", "rising")
    assert isclose(first.rad_per_s, (sqrt(4 + 1e-12) - 1e-6) / 2, rel_tol=1e-15)
    assert isclose(second.rad_per_s, (sqrt(4 + 1e-12) + 1e-6) / 2, rel_tol=1e-15)
    (band,) = answer.bands
    assert band.kind == "stop"
    assert isclose(band.centre, 1 / (2 * pi), rel_tol=1e-15)
    assert isclose(band.extremum, 1 / (2 * pi), rel_tol=1e-15)
    assert isclose(band.q, 1e6, rel_tol=1e-9)


def test_a_notch_far_narrower_than_doubles_tell():
    """A relative width of 1e-17: two crossings, though they are one double."""
    netlist = network(
        R("R1", "in", "out", Fraction(1)),
        L("L1", "out", "a", Fraction(10**17)),
        C("C1", "a", "gnd", Fraction(1, 10**17)),
    )
    answer = cutoffs(form_of(netlist, gnd("in"), gnd("out")))
    assert answer.complete
    assert [item.direction for item in answer.cutoffs] == ["falling", "rising"]
    assert answer.bands[0].q is None or answer.bands[0].q > 1e15


@pytest.mark.parametrize("order", range(2, 9))
def test_equal_ripple_touches_the_level_of_its_ripple(order):
    """Equal ripple touches the bottom of its ripple and leaves it once, exactly.

    With H = 1/(1 + T(ω)²), T Chebyshev's polynomial, a gain of one half is met wherever
    |T| = 1: inside the band it is touched, at the edge ω = 1 crossed.
    """
    chebyshev = np.polynomial.chebyshev.cheb2poly([0] * order + [1])
    squared = np.polynomial.polynomial.polymul(chebyshev, chebyshev)[::2]
    turned = [float((-1) ** k * value) for k, value in enumerate(squared)]
    turned[0] += 1.0
    falling = [item for value in reversed(turned) for item in (value, 0.0)][:-1]
    form = rational([1.0], falling)
    answer = cutoffs(form, level=CutoffLevel(Fraction(0)), reference=Fraction(1, 2))
    inside = sorted(np.cos(np.pi * k / order) for k in range(1, (order + 1) // 2))
    assert answer.complete
    assert [item.rad_per_s for item in answer.cutoffs] == [1.0]
    assert [item.rad_per_s for item in answer.touches] == pytest.approx(inside, rel=1e-14)


@settings(max_examples=15, deadline=None)
@given(st.integers(2, 4), st.integers(1, 3), st.data())
def test_radicals_are_the_roots(degree, symbols, data):
    """Closed forms up to degree four, read by SymPy, are the roots that NumPy finds."""
    names = [f"R{k}" for k in range(degree + 1)]
    netlist = network(*[R(name, "in", "gnd", None) for name in names])
    form = closed_form(netlist, impedance_ask(netlist, gnd("in")))
    places = [form.basis.ring.generator(k) for k in range(degree + 1)]
    numbers = [data.draw(st.integers(-9, 9)) for _ in range(degree)] + [symbols]
    if not numbers[0]:
        numbers[0] = 5
    write = Writer(form.basis, form.spelled(safe=True))
    table = dict(zip(names, numbers, strict=True))
    plain = values(numbers)
    expected = np.roots(numbers[::-1])
    if any(abs(a - b) < 1e-3 for k, a in enumerate(expected) for b in expected[:k]):
        return  # nearly equal roots: NumPy's are no reference
    for item in radicals(write, places):
        text = parse_expr(item.text, local_dict={name: Symbol(name) for name in names})
        number_ = plain[item.branch]
        if number_ is None or (degree == 4 and numbers[1] == numbers[3] == 0):
            continue
        assert isclose(abs(complex(text.subs(table).evalf(30)) - number_), 0, abs_tol=1e-6)
        assert min(abs(number_ - each) for each in expected) < 1e-6


def test_a_third_order_section_on_request():
    """A third-order ladder solves a cubic in ω²: refused by default, written with degree=3."""
    text = "in -- R1 -- a -- L1 -- out\na -- C1 -- gnd\nout -- C2 -- gnd\nout -- R2 -- gnd"
    asked = acsolve.parse(text).path("in", "out")
    with pytest.raises(acsolve.AnalysisError) as refused:
        asked.cutoffs()
    assert refused.value.code == "question.no-value"
    assert "--degree 4" in refused.value.hint
    numbers = {"R1": 1, "R2": 2, "L1": 3, "C1": 1, "C2": 2}
    valued = acsolve.parse(text).with_values(numbers).path("in", "out")
    assert valued.cutoffs().cutoffs[0].closed_form is None
    (item,) = valued.cutoffs(degree=3).cutoffs
    found = parse_expr(item.closed_form, local_dict={name: Symbol(name) for name in numbers})
    assert isclose(complex(found.subs(numbers).evalf(30)).real, item.rad_per_s, rel_tol=1e-12)


@pytest.mark.parametrize("level", [None, -6, -1, Fraction(-7, 2)])
def test_the_edges_of_a_resonance(level):
    """Symbolic edges of a series resonance: their product is 1/(L·C), their distance ~ R/L."""
    asked = acsolve.parse("in -- C1 -- a -- L1 -- out -- R1 -- gnd").path("in", "out")
    answer = asked.cutoffs(level)
    assert answer.reference.at == "peak"
    assert [item.direction for item in answer.cutoffs] == ["rising", "falling"]
    assert all(item.condition is None for item in answer.cutoffs)
    numbers = {"R1": Fraction(3), "L1": Fraction(2), "C1": Fraction(1, 5)}
    edges = [
        parse_expr(item.closed_form, local_dict={name: Symbol(name) for name in numbers})
        .subs(numbers)
        .evalf(30)
        for item in answer.cutoffs
    ]
    assert isclose(edges[0] * edges[1], 2.5, rel_tol=1e-14)
    excess = sqrt(10 ** (-CutoffLevel(None if level is None else Fraction(level)).db / 10) - 1)
    assert isclose(edges[1] - edges[0], 1.5 * excess, rel_tol=1e-14)
    valued = acsolve.parse("in -- C1 -- a -- L1 -- out -- R1 -- gnd").with_values(numbers)
    found = valued.path("in", "out").cutoffs(level)
    assert [item.rad_per_s for item in found.cutoffs] == pytest.approx(
        [float(edge) for edge in edges], rel=1e-14
    )
    assert all(item.closed_form for item in found.cutoffs)


def test_a_level_that_is_no_ratio_keeps_its_power_of_ten():
    """-6 dB stays 10^(3/5) in the closed form, exact."""
    (item,) = acsolve.parse("in -- R1 -- out -- C1 -- gnd").path("in", "out").cutoffs(-6).cutoffs
    found = parse_expr(item.closed_form, local_dict={"R1": Symbol("R1"), "C1": Symbol("C1")})
    expected = parse_expr(
        "sqrt(10**(3/5) - 1)/(R1*C1)", local_dict={"R1": Symbol("R1"), "C1": Symbol("C1")}
    )
    assert (found - expected).simplify() == 0
    assert item.condition is None
    assert item.direction == "falling"
