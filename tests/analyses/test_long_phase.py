"""Phase of long networks with few points asked, and what happens on top of a resonance."""

from __future__ import annotations

from fractions import Fraction
from math import pi

import mpmath
import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from acsolve.analyses import sweep as sweeps
from acsolve.analyses.ladder_phase import ladder_of
from acsolve.analyses.question import transfer_ask
from acsolve.analyses.sweep import sweep
from acsolve.circuit.expression import PI, divide, multiply, number
from acsolve.circuit.netlist import Netlist
from acsolve.equations.result import Status
from acsolve.errors import EquationError
from tests.analyses.test_sweep import from_to, ladder
from tests.strategies import C, L, R, network

NANO, MICRO = Fraction(1, 10**9), Fraction(1, 10**6)


def delay_line(sections: int, load: int | None) -> Netlist:
    """Equal LC sections of 1 uH and 1 nF, open or into a resistance."""
    parts = [R("Rload", f"n[{sections}]", "gnd", load)] if load else []
    for k in range(1, sections + 1):
        parts += [
            L(f"L[{k}]", f"n[{k - 1}]", f"n[{k}]", MICRO),
            C(f"C[{k}]", f"n[{k}]", "gnd", NANO),
        ]
    return network(*parts)


def exact(sections: int, hertz: float, *, rc: bool, load: int | None = None) -> mpmath.mpc:
    """ln H of equal sections at 50 digits, its imaginary part continuous from 0 Hz.

    From the far end u(k) = p·r^k + q·r^-k with r + 1/r = 2 + z·y: the image propagation
    function is ln r, its imaginary part between 0 and pi.
    """
    with mpmath.workdps(50):
        s = 2j * mpmath.pi * mpmath.mpf(hertz)
        z, y = (mpmath.mpf(1000), s * mpmath.mpf(10) ** -9) if rc else (s / 10**6, s / 10**9)
        half = 1 + z * y / 2
        r = half + mpmath.sqrt(half * half - 1)
        r = 1 / r if abs(r) < 1 else r
        if abs(abs(r) - 1) < mpmath.mpf(10) ** -40 and r.imag < 0:
            r = 1 / r  # the wave that travels away from the source lags
        first = 1 + z * (y + (0 if load is None else mpmath.mpf(1) / load))
        p = (first - 1 / r) / (r - 1 / r)
        turn = mpmath.mpc(mpmath.log(abs(r)), abs(mpmath.arg(r)))
        return -(sections * turn + mpmath.log(p + (1 - p) * r ** (-2 * sections)))


def check(netlist: Netlist, sections: int, hertz: np.ndarray, **known) -> None:
    """Gain and continuous phase are those of the two-port formula."""
    found = sweep(netlist, from_to(netlist, "n[0]", f"n[{sections}]"), hertz)
    assert found.settled
    for at, item in enumerate(hertz):
        expected = exact(sections, float(item), **known)
        decibel = float(expected.real * 20 / mpmath.log(10))
        assert found.gain_db[at] == pytest.approx(decibel, rel=1e-11, abs=1e-8)
        degrees = float(mpmath.degrees(expected.imag))
        assert found.phase_deg[at] == pytest.approx(degrees, rel=1e-11, abs=1e-6)


@pytest.mark.parametrize("sections", [1, 7, 1000, 4000])
def test_rc_ladder_over_six_decades(sections):
    """Five points over six decades have the true phase, of thousands of turns at most."""
    corner = 1 / (2 * pi * 1e-6 * sections**2)
    check(ladder(sections), sections, np.geomspace(corner, 1e6 * corner, 5), rc=True)


def test_rc_ladder_at_its_last_turns():
    """Far above every corner the phase of n sections is nearly -90·n degrees."""
    check(ladder(1000), 1000, np.array([1e7, 1e9, 1e12]), rc=True)


@pytest.mark.parametrize("sections", [1, 7, 1000])
def test_delay_line_into_its_impedance(sections):
    """LC sections into about their own impedance delay in the pass band."""
    corner = 1 / (2 * pi * 1e-9**0.5 * 1e-6**0.5)
    hertz = corner * np.geomspace(1e-4, 100, 5)
    check(delay_line(sections, 30), sections, hertz, rc=False, load=30)


def test_the_sum_over_links_is_the_tracked_phase():
    """A ladder's phase and the phase tracked by slopes agree, gaps between points or not."""
    for netlist in (ladder(30), delay_line(12, 40)):
        target = netlist.parts[-1].nodes[0]
        ask = from_to(netlist, "n[0]", target)
        hertz = np.geomspace(1, 1e8, 7)
        summed = sweep(netlist, ask, hertz)
        with pytest.MonkeyPatch.context() as patch:
            patch.setattr(sweeps, "ladder_of", lambda *_: None)
            tracked = sweep(netlist, ask, hertz)
        assert summed.phase_deg == pytest.approx(tracked.phase_deg, rel=1e-12, abs=1e-9)


@st.composite
def trees(draw) -> Netlist:
    """R, L and C that join nodes as a tree, with more beside them and to ground."""
    kinds, values = st.sampled_from([R, L, C]), st.builds(Fraction, st.integers(1, 40), st.just(7))
    parts, count = [], draw(st.integers(2, 7))
    ends = [(f"n[{draw(st.integers(0, k - 1))}]", f"n[{k}]") for k in range(1, count)]
    ends += draw(st.lists(st.sampled_from(ends), max_size=2))
    nodes = st.sampled_from(sorted({node for pair in ends for node in pair}))
    ends += [(node, "gnd") for node in draw(st.lists(nodes, min_size=1, max_size=5))]
    for k, (first, second) in enumerate(ends):
        parts.append(draw(kinds)(f"X{k}", first, second, draw(values)))
    return network(*parts)


@settings(max_examples=80, deadline=None)
@given(st.data())
def test_the_sum_over_links_in_random_trees(data):
    """In random trees of R, L and C, lossless ones too, both ways to the phase agree."""
    netlist = data.draw(trees())
    target = data.draw(st.sampled_from([node for node in netlist.nodes() if node != "gnd"]))
    assume(target != "n[0]")
    ask = from_to(netlist, "n[0]", target)
    assert ladder_of(netlist, ask) is not None
    hertz = np.array([1e-3, 0.02, 0.3, 4.0, 700.0])
    try:
        summed = sweep(netlist, ask, hertz)
    except EquationError:
        assume(False)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(sweeps, "ladder_of", lambda *_: None)
        tracked = sweep(netlist, ask, hertz)
    assume(tracked.settled)
    assert summed.phase_deg == pytest.approx(tracked.phase_deg, abs=1e-6, nan_ok=True)


def test_other_questions_are_no_ladder():
    """A loop, a controlled source, a coupling or another quantity leaves the sum aside."""
    looped = network(*ladder(3).parts, R("R9", "n[1]", "n[3]", 5))
    assert ladder_of(looped, from_to(looped, "n[0]", "n[3]")) is None
    current = from_to(ladder(3), "n[0]", "n[3]", "transadmittance")
    assert ladder_of(ladder(3), current) is None
    negative = network(R("R1", "in", "out", -5), C("C1", "out", "gnd", 1))
    assert ladder_of(negative, from_to(negative, "in", "out")) is None


def resonant(hertz: int, impedance: int):
    """L and C whose resonance is exactly at a frequency, written with pi."""
    omega = multiply(number(2 * hertz), PI)
    return divide(number(impedance), omega), divide(number(Fraction(1, impedance)), omega)


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_lossless_resonances_on_the_grid(data):
    """On top of exact resonances every point has an answer, a limit, a zero or a pole.

    Random ladders of tanks in series and in shunt, all resonant at frequencies of the grid:
    what is no zero and no pole agrees with its neighbours a relative 1e-9 away.
    """
    grid = [1, 10, 1000, 10**6]
    parts, node = [], "in"
    for k in range(data.draw(st.integers(1, 3))):
        after = f"n{k}"
        shape = data.draw(st.sampled_from(["series tank", "series arm", "shunt tank", "trap"]))
        coil, cap = resonant(data.draw(st.sampled_from(grid)), data.draw(st.sampled_from([1, 50])))
        middle = f"m{k}"
        if shape == "series tank":
            parts += [L(f"L{k}", node, after, coil), C(f"C{k}", node, after, cap)]
        elif shape == "series arm":
            parts += [L(f"L{k}", node, middle, coil), C(f"C{k}", middle, after, cap)]
        else:
            parts.append(R(f"R{k}", node, after, 10))
            if shape == "shunt tank":
                parts += [L(f"L{k}", after, "gnd", coil), C(f"C{k}", after, "gnd", cap)]
            else:
                parts += [L(f"L{k}", after, middle, coil), C(f"C{k}", middle, "gnd", cap)]
        node = after
    if data.draw(st.booleans()):
        parts.append(R("Rend", node, "gnd", data.draw(st.sampled_from([10, 10**6]))))
    netlist = network(*parts)
    ask = transfer_ask(netlist, ("in", "gnd"), (node, "gnd"))
    hertz = np.array([0.0, *grid, 1e12, 1e30])
    found = sweep(netlist, ask, hertz)
    beside = sweep(netlist, ask, hertz * (1 + 1e-9))
    assert Status.UNDEFINED not in found.status
    assert not np.isnan(found.gain_db).any()
    plain = found.status < Status.ZERO
    assert np.isfinite(found.phase_deg[plain]).all()
    assert (found.gain_db[found.status == Status.ZERO] == -np.inf).all()
    assert (found.gain_db[found.status == Status.POLE] == np.inf).all()
    steep = np.abs(found.group_delay_s) * 2 * pi * hertz > 1e5
    known = plain & (beside.status < Status.ZERO) & ~steep & (np.abs(found.gain_db) < 120)
    assert found.gain_db[known] == pytest.approx(beside.gain_db[known], abs=0.01)
    assert found.phase_deg[known] == pytest.approx(beside.phase_deg[known], abs=0.1)
