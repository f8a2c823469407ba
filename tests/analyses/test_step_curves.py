"""Responses in time: against SciPy, integration, closed forms, and the laws that they obey."""

from __future__ import annotations

from fractions import Fraction
from math import factorial, pi, sqrt
from pathlib import Path

import numpy as np
import pytest
from flint import arb
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy import signal
from scipy.integrate import solve_ivp
from scipy.special import gammainc, gammaincinv

import acsolve
from acsolve.algebra.ball import precision
from acsolve.algebra.expsum import ExponentialSum
from acsolve.algebra.laplace import over_s
from acsolve.algebra.residue import exact_ratio, expand, expanded_at, value_at
from acsolve.errors import EquationError

RC = "in -- R1 = 1 kohm -- out -- C1 = 1 uF -- gnd"
RLC = "in -- R1 = 400 ohm -- m -- L1 = 1 mH -- out -- C1 = 1 nF -- gnd"


def path(text: str, source: str = "in", target: str = "out") -> acsolve.Path:
    """A question about a few chains."""
    return acsolve.parse(text).path(source, target)


def step_of(top: list, bottom: list) -> ExponentialSum:
    """The step response of a ratio by rising power."""
    return ExponentialSum(
        over_s(exact_ratio(*([Fraction(x) for x in part] for part in (top, bottom))))
    )


def prototypes() -> list[tuple[str, np.ndarray, np.ndarray]]:
    """Thirty stable networks as coefficients, highest power first."""
    found = []
    for order in (1, 2, 3, 4, 5, 7):
        found.append((f"butterworth {order}", *signal.butter(order, 1, analog=True)))
        found.append((f"bessel {order}", *signal.bessel(order, 1, analog=True)))
        found.append((f"ripple {order}", *signal.cheby1(order, 1, 1, analog=True)))
    for order in (3, 4, 5, 6):
        found.append((f"elliptic {order}", *signal.ellip(order, 0.5, 50, 1, analog=True)))
        found.append((f"stop-band ripple {order}", *signal.cheby2(order, 40, 1, analog=True)))
    for order in (1, 2):
        found.append((f"high-pass {order}", *signal.butter(order, 1, "high", analog=True)))
        found.append((f"band-pass {order}", *signal.butter(order, [1, 2], "band", analog=True)))
    return found


@pytest.mark.parametrize("case", prototypes(), ids=lambda case: case[0])
def test_thirty_networks_agree_with_scipy(case):
    """Step and impulse response are those of SciPy's state space, to its rounding."""
    _, top, bottom = case
    rising = [[Fraction(float(x)) for x in part[::-1]] for part in (top, bottom)]
    seconds = np.linspace(0, 30, 301)
    step, impulse = step_of(*rising), ExponentialSum(exact_ratio(*rising))
    assert step.values(seconds) == pytest.approx(signal.step((top, bottom), T=seconds)[1], abs=2e-9)
    assert impulse.values(seconds) == pytest.approx(
        signal.impulse((top, bottom), T=seconds)[1], abs=2e-9
    )


def test_thirty():
    """They are thirty."""
    assert len(prototypes()) == 30


def test_partial_fractions_add_up():
    """N/D is the sum of its partial fractions, multiple and imaginary poles included."""
    top = [Fraction(3), Fraction(1), Fraction(0), Fraction(2)]
    bottom = np.polynomial.polynomial.polyfromroots([0, 0, -1, -1, -1, -2])
    bottom = np.polynomial.polynomial.polymul(bottom, [4, 0, 1])
    ratio = exact_ratio(top, [Fraction(round(x)) for x in bottom])
    with precision(200):
        s = arb("0.7") + 0
        gap = expanded_at(expand(ratio), s) - value_at(ratio, s)
        assert gap.contains(0)
        assert abs(gap) < 1e-40
        counts = sorted(term.pole.multiplicity for term in expand(ratio).terms)
    assert counts == [1, 1, 2, 3]


@pytest.mark.parametrize("count", [1, 2, 5, 12])
def test_equal_sections_have_the_gamma_function(count):
    """1/(1 + s)^n: the step response is the regularised incomplete gamma function."""
    sections = "\n".join(
        f"n{k} -- R{k} = 1 ohm -- m{k} -- C{k} = 1 F -- gnd\n"
        f"U{k} : opamp(plus = m{k}, minus = n{k + 1}, out = n{k + 1})"
        for k in range(count)
    )
    found = path(sections, "n0", f"n{count}").step(30)
    (mode,) = [item for item in found.modes if item.rate]
    assert mode.rate == -1
    assert len(mode.weights) == count
    assert found.value == pytest.approx(gammainc(count, found.seconds), rel=1e-12, abs=0)
    early, late = gammaincinv(count, [0.1, 0.9])
    assert found.rise_s == pytest.approx(late - early, rel=1e-12)


def test_near_multiple_poles_keep_their_digits():
    """Poles 1e-12 apart, whose residues cancel twelve digits, answer like a double pole."""
    bottom = np.array([Fraction(1), Fraction(2) + Fraction(1, 10**12), 1 + Fraction(1, 10**12)])
    seconds = np.linspace(0, 12, 101)
    value = step_of([bottom[2]], bottom[::-1].tolist()).values(seconds)
    assert value == pytest.approx(1 - (1 + seconds) * np.exp(-seconds), abs=1e-11)


def test_early_times_are_right_relative_to_themselves():
    """Where a tenth-order response is 1e-30 of what it becomes, its digits are right."""
    top, bottom = signal.butter(10, 1, analog=True)
    found = step_of([Fraction(float(top[-1]))], [Fraction(float(x)) for x in bottom[::-1]])
    early = found.values(np.array([1e-3]))[0]
    assert early == pytest.approx(1e-30 / factorial(10), rel=1e-2)


def test_lossless_resonance():
    """An LC divider swings for ever around its dc gain: 1 - cos(w0·t)."""
    found = path("in -- L1 = 1 mH -- out -- C1 = 1 nF -- gnd").step(5e-5)
    assert found.final_value is None
    assert "oscillating" in found.final_reason
    assert found.stable is False
    assert found.rise_s is found.settling_s is found.overshoot is None
    assert found.value == pytest.approx(1 - np.cos(1e6 * found.seconds), abs=1e-12)


def test_a_driven_lossless_resonance_grows():
    """Driven at its own frequency, known only through pi, the swing grows with t."""
    tank = path("in -- L1 = 1 mH -- out -- C1 -- gnd\nC1 = 1/((2*pi*1 kHz)^2*L1)")
    found = tank.step("20 ms", drive="1 kHz")
    x = 2 * pi * 1e3 * found.seconds
    assert found.value == pytest.approx((np.sin(x) - x * np.cos(x)) / 2, abs=1e-10)
    assert max(len(mode.weights) for mode in found.modes) == 2


def test_integrator():
    """A pole at 0 Hz: the impedance of a capacitor ramps, and there is no final value."""
    found = acsolve.parse("a -- C1 = 2 F -- gnd").looking_into("a").step(10)
    assert found.value == pytest.approx(found.seconds / 2, rel=1e-12)
    assert found.final_value is None
    assert "integrates" in found.final_reason
    assert found.moments is None


def test_all_pass_starts_upside_down():
    """(1 - s·tau)/(1 + s·tau): from -1 to 1, which is 1 - 2·exp(-t/tau)."""
    lattice = "a -- R1 = 1 ohm -- p -- C1 = 1 F -- gnd\na -- R2 = 1 ohm -- m -- R3 = 1 ohm -- gnd"
    found = acsolve.parse(lattice).path("a", ("p", "m")).step(8)
    assert found.initial_value == -0.5
    assert found.value == pytest.approx(0.5 - np.exp(-found.seconds), abs=1e-12)
    assert found.delay_s == pytest.approx(np.log(4), rel=1e-14)


def test_direct_feedthrough_and_impulses():
    """What passes at once stands at t = 0; an inductor answers a current step by an impulse."""
    lead = path("in -- R1 = 1 ohm -- out -- R2 = 1 ohm -- gnd\nin -- C1 = 1 F -- out").step()
    assert lead.initial_value == 1
    assert lead.final_value == 0.5
    assert lead.overshoot == 1
    assert lead.peak_s == 0
    coil = acsolve.parse("a -- R1 = 5 ohm -- b -- L1 = 3 H -- gnd").looking_into("a")
    assert coil.step().impulses == (3.0,)
    assert coil.step(drive="impulse").impulses == (5.0, 3.0)


def test_stiff_network():
    """Time constants 1e-9 s and 1e3 s in one network, each seen at its own time."""
    text = "in -- R1 = 1 ohm -- a -- C1 = 1 nF -- gnd\nU1 : opamp(plus = a, minus = b, out = b)\n"
    found = path(text + "b -- R2 = 1 kohm -- out -- C2 = 1 F -- gnd").step()
    seconds = np.array([1e-10, 1e-9, 1e-6, 1.0, 1e3, 5e3])
    fast, slow = 1e-9, 1e3
    exact = 1 - (slow * np.exp(-seconds / slow) - fast * np.exp(-seconds / fast)) / (slow - fast)
    assert found.at(seconds)[2:] == pytest.approx(exact[2:], rel=1e-6)
    assert found.at([1e-13]) == pytest.approx([1e-26 / (2e-6)], rel=1e-4)
    assert found.rise_s == pytest.approx(slow * np.log(9), rel=1e-9)


def test_slope_of_the_step_is_the_impulse():
    """h is the derivative of the step response, by central differences."""
    asked = path(RLC)
    seconds = np.linspace(1e-7, 2e-5, 50)
    step, impulse = asked.step(), asked.step(drive="impulse")
    h = 1e-11
    slope = (step.at(seconds + h) - step.at(seconds - h)) / (2 * h)
    assert impulse.at(seconds) == pytest.approx(slope, rel=1e-6, abs=1)


def test_time_scaling():
    """All capacitors and inductors ten times larger: everything ten times later."""
    first = path(RLC).step()
    second = path(RLC.replace("1 mH", "10 mH").replace("1 nF", "10 nF")).step()
    assert second.at(10 * first.seconds) == pytest.approx(first.value, rel=1e-12, abs=1e-300)
    for name in ("rise_s", "delay_s", "settling_s", "peak_s"):
        assert getattr(second, name) == pytest.approx(10 * getattr(first, name), rel=1e-13)
    assert second.overshoot == pytest.approx(first.overshoot, rel=1e-14)


def test_final_value_theorem():
    """The final value is H at 0 Hz, and the curve is there at the end."""
    found = path("in -- R1 = 3 ohm -- out -- C1 || R2 -- gnd\nC1 = 1 F\nR2 = 1 ohm").step()
    assert found.final_value == 0.25
    assert found.at(100) == pytest.approx(0.25, rel=1e-13)
    assert found.at(-1) == 0


def test_a_burst_is_a_sine_and_its_end():
    """Whole and half cycles: the burst against its integral over the impulse response."""
    asked = path(RC)
    for cycles in (1, 2.5):
        found = asked.step("8 ms", drive=("500 Hz", cycles))
        length = cycles / 500

        def slope(t, y, length=length):
            return ((np.sin(2 * pi * 500 * t) if t < length else 0.0) - y) / 1e-3

        done = solve_ivp(
            slope, (0, 8e-3), [0.0], t_eval=found.seconds, rtol=1e-10, atol=1e-12, max_step=2e-5
        )
        assert found.value == pytest.approx(done.y[0], abs=2e-6)
        assert found.final_value == 0


def test_the_steady_sine_is_the_residue():
    """The mode of a lasting sine has the amplitude and phase that a sweep finds."""
    found = path(RLC).step(drive="100 kHz")
    steady = found.steady
    (mode,) = [item for item in found.modes if item.rate.real == 0]
    assert 2 * abs(mode.weights[0]) == pytest.approx(steady.amplitude, rel=1e-12)
    phase = np.degrees(np.angle(mode.weights[0] * 1j))
    assert (phase - steady.phase_deg + 180) % 360 - 180 == pytest.approx(0, abs=1e-9)


@pytest.mark.parametrize("hertz", [1.0, 159.0, 1e3, 1e6])
def test_three_delays_of_a_single_pole(hertz):
    """A sine is late by atan(omega·tau)/omega, its envelope by tau/(1 + (omega·tau)²)."""
    found = path(RC).sine(hertz)
    x = 2 * pi * hertz * 1e-3
    assert found.delay_s == pytest.approx(np.arctan(x) / (2 * pi * hertz), rel=1e-13)
    assert found.group_delay_s == pytest.approx(1e-3 / (1 + x**2), rel=1e-12)
    assert found.amplitude == pytest.approx(1 / sqrt(1 + x**2), rel=1e-13)
    assert found.shift_s == pytest.approx(found.delay_s, rel=1e-12)


def test_growing_response():
    """A mode in the right half plane is said to be one, and the closed form still holds."""
    grows = "in -- R1 = 1 ohm -- out -- C1 = 1 F -- gnd\nout -- R2 = -0.5 ohm -- gnd"
    found = path(grows).step(3)
    assert found.stable is False
    assert "right half plane" in found.final_reason
    assert found.value == pytest.approx(np.expm1(found.seconds), rel=1e-12)
    assert any("decays" in text for text in found.remarks)


def test_values_with_pi():
    """Coefficients that are no rational numbers: the same to the last digits."""
    found = path("in -- R1 = 1 kohm -- out -- C1 -- gnd\nC1 = 1/(2*pi*1 kHz*R1)").step()
    tau = 1 / (2 * pi * 1e3)
    assert found.value == pytest.approx(-np.expm1(-found.seconds / tau), rel=1e-12)
    assert found.settling_s == pytest.approx(tau * np.log(50), rel=1e-14)


def test_a_line_has_no_residues():
    """A line is refused with what to do instead."""
    cable = acsolve.read(Path(__file__).parents[2] / "circuits" / "mast_cable.circuit")
    question = next(item for item in cable.questions if item.kind == "cutoff")
    with pytest.raises(EquationError) as caught:
        cable.asked(question).step()
    assert caught.value.code == "equations.not-rational"
    assert "sections" in caught.value.hint


def test_too_many_poles():
    """A chain of 200 sections has more poles than residues are worked out for."""
    tape = acsolve.read(Path(__file__).parents[2] / "circuits" / "seepage_tape.circuit")
    with pytest.raises(EquationError) as caught:
        tape.path("head", "tail").step()
    assert caught.value.code == "equations.budget"


values = st.sampled_from([1, 2, 3, 5, 7])


@settings(max_examples=25, deadline=None)
@given(st.lists(st.tuples(values, values, values), min_size=1, max_size=3), values)
def test_ladders_agree_with_integration(sections, load):
    """Random RLC ladders against their state equations, integrated at tight tolerance."""
    lines = [f"R{k} = {r} ohm\nL{k} = {h} H\nC{k} = {c} F" for k, (r, h, c) in enumerate(sections)]
    nodes = ["in", *(f"n{k}" for k in range(len(sections)))]
    chains = [
        f"{nodes[k]} -- R{k} -- x{k} -- L{k} -- {nodes[k + 1]} -- C{k} -- gnd"
        for k in range(len(sections))
    ]
    text = "\n".join([*chains, *lines, f"{nodes[-1]} -- RL = {load} ohm -- gnd"])
    found = path(text, "in", nodes[-1]).step(12, points=25)
    count = len(sections)

    def slope(_, state):
        current, voltage = state[:count], state[count:]
        before = np.concatenate([[1.0], voltage[:-1]])
        after = np.concatenate([current[1:], [voltage[-1] / load]])
        r, h, c = np.array(sections, dtype=float).T
        return np.concatenate([(before - voltage - r * current) / h, (current - after) / c])

    done = solve_ivp(
        slope, (0, 12), np.zeros(2 * count), t_eval=found.seconds, rtol=1e-10, atol=1e-12
    )
    assert found.value == pytest.approx(done.y[-1], abs=1e-7)
    assert found.at(1e4) == pytest.approx(found.final_value, rel=1e-9)
