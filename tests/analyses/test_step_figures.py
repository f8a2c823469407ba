"""Rise, delay, overshoot and settling: published values, definitions, moments, closed forms."""

from __future__ import annotations

from fractions import Fraction
from math import exp, log, pi, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import signal
from scipy.optimize import brentq

import acsolve
from acsolve.algebra.expsum import ExponentialSum
from acsolve.algebra.laplace import over_s
from acsolve.algebra.residue import exact_ratio
from acsolve.analyses.settle import figures
from acsolve.errors import AnalysisError

from .test_step_curves import RC, RLC, path, prototypes

TWO = Fraction(1, 50)


def figures_of(top, bottom, band=TWO):
    """The figures of a ratio with coefficients by falling power."""
    rising = [[Fraction(float(x)) for x in part[::-1]] for part in (top, bottom)]
    whole = ExponentialSum(over_s(exact_ratio(*rising)))
    return figures(whole, band=band), whole


def test_single_pole():
    """63.2 % at tau, ln 9 tau from 10 to 90 %, ln 2 tau to the half, ln 50 tau to 2 %."""
    found = path(RC).step()
    assert found.at(1e-3) == pytest.approx(1 - exp(-1), rel=1e-14)
    assert found.rise_s == pytest.approx(1e-3 * log(9), rel=1e-15)
    assert found.delay_s == pytest.approx(1e-3 * log(2), rel=1e-15)
    assert found.settling_s == pytest.approx(1e-3 * log(50), rel=1e-15)
    assert found.overshoot == 0
    assert found.peak_s is None


@pytest.mark.parametrize("zeta", [0.01, 0.2, 0.5, 0.7, 0.9, 0.99])
def test_overshoot_formula(zeta):
    """exp(-pi·zeta/sqrt(1 - zeta²)) at pi/(w0·sqrt(1 - zeta²))."""
    found, _ = figures_of([1], [1, 2 * zeta, 1])
    root = sqrt(1 - zeta**2)
    assert found.overshoot == pytest.approx(exp(-pi * zeta / root), rel=1e-11)
    assert found.peak_s == pytest.approx(pi / root, rel=1e-12)


@pytest.mark.parametrize("zeta", [1.0, 1.5, 30.0])
def test_no_overshoot_of_real_poles(zeta):
    """Two real poles never pass the final value, and that is proven, not sampled."""
    found, _ = figures_of([1], [1, 2 * zeta, 1])
    assert found.overshoot == 0
    assert found.reasons == ()


def test_tiny_overshoot_is_seen():
    """Damped so much that the overshoot is 1e-42, it is there all the same."""
    zeta = 0.9995
    found, _ = figures_of([1], [1, 2 * zeta, 1])
    assert found.overshoot == pytest.approx(exp(-pi * zeta / sqrt(1 - zeta**2)), rel=1e-6)


@pytest.mark.parametrize(
    "case", [item for item in prototypes() if "pass" not in item[0]], ids=lambda case: case[0]
)
def test_figures_are_those_of_a_dense_search(case):
    """Each figure against a fine grid of SciPy's curve, refined by bisection."""
    _, top, bottom = case
    found, whole = figures_of(top, bottom)
    final = top[-1] / bottom[-1]
    seconds = np.linspace(0, 90, 9001)
    value = signal.step((top, bottom), T=seconds)[1] / final

    def crossing(level, places):
        k = places[0] if level < 0.95 else places[-1]
        return brentq(
            lambda t: whole.values(np.array([t]))[0] / final - level,
            seconds[k],
            seconds[k + 1],
            xtol=1e-14,
        )

    levels = []
    for level in (0.1, 0.5, 0.9):
        places = np.flatnonzero((value[:-1] < level) & (value[1:] >= level))
        levels.append(crossing(level, places) if places.size and value[0] < level else 0.0)
    assert found.levels_s == pytest.approx(levels, rel=1e-6, abs=1e-12)
    outside = np.flatnonzero(np.abs(value - 1) > 0.02)[-1]
    assert seconds[outside] <= found.settling_s <= seconds[outside + 1]
    assert found.overshoot == pytest.approx(max(0.0, value.max() - 1), abs=2e-5)
    if found.peak_s is not None:
        assert whole.values(np.array([found.peak_s]))[0] == pytest.approx(
            final * (1 + found.overshoot), rel=1e-9
        )


@settings(max_examples=30, deadline=None)
@given(
    st.lists(st.integers(1, 30), min_size=1, max_size=3, unique=True),
    st.lists(st.tuples(st.integers(1, 9), st.integers(1, 20)), max_size=2),
    st.integers(1, 20),
)
def test_definitions(reals, pairs, tenths):
    """At every figure the response has the value that the figure's definition names."""
    bottom = np.array([1.0])
    for root in reals:
        bottom = np.polymul(bottom, [1, root])
    for real, imag in pairs:
        bottom = np.polymul(bottom, [1, 2 * real, real**2 + imag**2])
    band = Fraction(tenths, 100)
    found, whole = figures_of([bottom[-1]], bottom, band)
    low, middle, high = found.levels_s
    at = whole.values(np.array([low, middle, high, found.settling_s]))
    assert at[:3] == pytest.approx([0.1, 0.5, 0.9], rel=1e-10)
    assert abs(at[3] - 1) == pytest.approx(float(band), rel=1e-9)
    later = whole.values(found.settling_s * np.linspace(1.000001, 4, 400))
    assert np.all(np.abs(later - 1) <= float(band) * (1 + 1e-9))
    every = whole.values(np.linspace(0, 4 * found.settling_s, 2001))
    assert every.max() <= 1 + found.overshoot + 1e-12


@pytest.mark.parametrize(
    ("top", "bottom", "passes"),
    [
        ([2], np.polymul([1, 1], [1, 2, 2]), False),
        ([1, 1, 10], np.polymul([1, 1], [1, 2, 10]), False),
        ([9.5, 10], np.polymul([1, 1], [1, 2, 10]), True),
    ],
)
def test_poles_above_each_other(top, bottom, passes):
    """A real pole and a pair that decay alike: whichever weighs more decides."""
    found, whole = figures_of(top, bottom)
    value = whole.values(np.linspace(0, 20, 20_001))
    assert (found.overshoot > 0) is passes
    assert found.overshoot == pytest.approx(max(0.0, value.max() - 1), abs=1e-5)


def test_settling_band():
    """A wider band is reached earlier; the band is said."""
    asked = path(RC)
    assert asked.step(band="10%").settling_s == pytest.approx(1e-3 * log(10), rel=1e-15)
    assert asked.step(band=0.1).band == Fraction(1, 10)
    with pytest.raises(AnalysisError):
        asked.step(band=2)


def test_settling_of_a_long_ringing():
    """With Q = 500 the last of hundreds of crossings is found, not the first."""
    zeta = 1e-3
    found, whole = figures_of([1], [1, 2 * zeta, 1])
    assert log(50) / zeta - pi < found.settling_s <= log(50) / zeta * 1.001
    assert abs(whole.values(np.array([found.settling_s]))[0] - 1) == pytest.approx(0.02, rel=1e-9)


def test_no_figures_without_a_final_value():
    """A band-pass ends at zero: null, and why."""
    found = path("in -- C1 = 1 uF -- out -- R1 = 1 kohm -- gnd").step()
    assert found.final_value == 0
    assert found.rise_s is found.delay_s is found.settling_s is found.overshoot is None
    assert {text for _, text in found.figures.reasons} == {
        "the final value is zero, so there is nothing to count from"
    }


def test_falling_final_value():
    """An inverting stage has the same figures, its levels below zero."""
    text = "in -- R1 = 1 kohm -- x -- R2 || C2 -- out\nR2 = 2 kohm\nC2 = 1 uF\nU1 : opamp(plus = gnd, minus = x, out = out)"
    found = path(text).step()
    assert found.final_value == -2
    assert found.rise_s == pytest.approx(2e-3 * log(9), rel=1e-14)
    assert found.overshoot == 0


# -- moments ---------------------------------------------------------------------------------


def test_moments_are_integrals():
    """m_k, the delay and the variance against the impulse response, integrated."""
    found = path(RLC).step(1e-4, drive="impulse", points=200_001)
    raw = [item.number for item in found.moments.raw]
    for power, moment in enumerate(raw):
        area = np.trapezoid(found.seconds**power * found.value, found.seconds)
        assert moment == pytest.approx(area, rel=1e-5)
    assert found.moments.delay.number == pytest.approx(4e-7, rel=1e-15)


def test_moments_are_exact_with_symbols():
    """Elmore's sum over the capacitors of a tree, term for term."""
    tree = "in -- R1 -- a -- C1 -- gnd\na -- R2 -- out -- C2 -- gnd\na -- R3 -- x -- C3 -- gnd"
    found = path(tree).step(symbolic=True)
    assert found.seconds is None
    assert found.moments.delay.text() == "R1*(C1 + C2 + C3) + R2*C2"


def test_elmore_rise_time():
    """sqrt(2·pi)·tau of a single pole."""
    assert path(RC).step().moments.elmore_rise_s == pytest.approx(sqrt(2 * pi) * 1e-3, rel=1e-15)


def test_cumulants_of_a_cascade_add():
    """Delay and variance of buffered sections are sums."""
    text = (
        "in -- R1 = 1 ohm -- a -- C1 = 2 F -- gnd\nU1 : opamp(plus = a, minus = b, out = b)\n"
        "b -- R2 = 3 ohm -- out -- C2 = 5 F -- gnd"
    )
    found = path(text).step().moments
    assert found.delay.number == 17
    assert found.variance.number == 4 + 225


# -- closed forms in time --------------------------------------------------------------------

SHAPES = [
    "in -- R1 -- out -- C1 -- gnd",
    "in -- C1 -- out -- R1 -- gnd",
    "in -- R1 -- out -- R2 -- gnd\nin -- C1 -- out",
    "in -- R1 -- m -- L1 -- out -- C1 -- gnd",
    "in -- C1 -- m -- L1 -- out -- R1 -- gnd",
    "in -- R1 -- m -- C1 -- out -- L1 -- gnd",
    "in -- R1 -- out -- L1 -- m -- C1 -- gnd",
    "in -- L1 -- out -- C1 -- gnd",
    "in -- R1 -- a -- C1 -- gnd\na -- R2 -- out -- C2 -- gnd",
]
VALUES = [{}, {"R1": 7, "L1": 2, "C1": 3}, {"R1": 2, "C1": 1, "L1": 1}, {"R1": Fraction(1, 9)}]


def evaluated(text, names):
    """A formula of the answer through SymPy, at 30 digits."""
    import sympy

    clash = {name: sympy.Symbol(name) for name in names}
    return sympy.sympify(text, locals=clash).subs({clash[k]: v for k, v in names.items()}).evalf(30)


@pytest.mark.parametrize("text", SHAPES)
@pytest.mark.parametrize("numbers", VALUES)
@pytest.mark.parametrize("drive", ["step", "impulse"])
def test_formulas_are_the_curve(text, numbers, drive):
    """The closed form that holds, read by SymPy with the parts put in, is the curve."""
    circuit = acsolve.parse(text)
    numbers = {name: numbers.get(name, 1) for name in circuit.parts}
    found = circuit.with_values(numbers).path("in", "out").step(5, drive=drive, points=6)
    (case,) = found.formulas.cases
    exact = {
        key: value if isinstance(value, int) else Fraction(value) for key, value in numbers.items()
    }
    names = {key: evaluated(f"{value}", {}) for key, value in exact.items()}
    for name, part in found.formulas.parts.items():
        names[name] = evaluated(part, names)
    texts = case.texts()
    for name in case.helpers:
        names[name] = evaluated(texts[name], names)
    formula = texts[drive]
    for t, value in zip(found.seconds[1:], found.value[1:], strict=True):
        regular = formula.replace("DiracDelta(t)", "0")
        assert float(evaluated(regular, {**names, "t": t})) == pytest.approx(
            value, rel=1e-11, abs=1e-13
        )


def test_cases_and_conditions():
    """With symbols a second-order low-pass has three cases, with numbers one."""
    three = path(SHAPES[3]).step().formulas
    assert [(item.case, item.condition) for item in three.cases] == [
        ("oscillating", "abs(q) > 1/2"),
        ("critical", "abs(q) = 1/2"),
        ("damped", "abs(q) < 1/2"),
    ]
    assert three.cases[0].texts()["overshoot"] == "exp(-pi/sqrt(4*q**2 - 1))"
    one = acsolve.parse(SHAPES[8]).with_values(R1=1, R2=2, C1=3, C2=4).path("in", "out")
    assert [item.case for item in one.step().formulas.cases] == ["damped"]


def test_formula_of_the_figures():
    """A first-order low-pass tells ln 9 tau and the like, the settling for the band asked."""
    (case,) = path(SHAPES[0]).step(band="5%").formulas.cases
    texts = case.texts()
    assert texts["rise_s"] == "log(9)*tau"
    assert texts["delay_s"] == "log(2)*tau"
    assert texts["settling_s"] == "log(20)*tau"


@pytest.mark.parametrize(
    ("asked", "code"),
    [
        ({"duration": 0}, "option.value"),
        ({"duration": -1.0}, "option.value"),
        ({"drive": "0 Hz"}, "sweep.band"),
        ({"drive": ("step", 3)}, "option.value"),
        ({"drive": (50, 1.3)}, "option.value"),
        ({"drive": (50, "many")}, "option.value"),
        ({"points": 1}, "sweep.points"),
        ({"points": "auto"}, "sweep.points"),
        ({"band": "200%"}, "option.value"),
    ],
)
def test_refusals(asked, code):
    """What does not fit is refused with its code."""
    with pytest.raises(AnalysisError) as caught:
        path(RC).step(**asked)
    assert caught.value.code == code
