"""Points that place themselves: what straight lines between them promise, measured."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from math import pi

import numpy as np
import pytest
from hypothesis import event, given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.analyses import adaptive
from acsolve.analyses.adaptive import GAIN_DB, PHASE_DEG, adaptive_sweep
from acsolve.analyses.grid import HertzBand
from acsolve.analyses.question import Ask, impedance_ask
from acsolve.analyses.sweep import Sweep, sweep
from acsolve.circuit.expression import PI, divide, number
from acsolve.circuit.netlist import Netlist
from acsolve.equations.result import Status
from acsolve.errors import AcsolveError, AnalysisError
from tests.analyses.test_sweep import from_to, ladder, twin_t
from tests.strategies import QUANTITIES, C, L, R, any_lumped, network, pairs, part

RANDOM = 20_000


def band(low: float, high: float) -> HertzBand:
    """A band in hertz."""
    return HertzBand(Fraction(low), Fraction(high))


def errors(found: Sweep, netlist: Netlist, ask: Ask, hertz: np.ndarray) -> tuple[float, float]:
    """Largest error in dB and degrees of the straight lines, against the engine itself."""
    at = np.clip(np.searchsorted(found.hertz, hertz, side="right") - 1, 0, len(found.hertz) - 2)
    low, high = found.hertz[at], found.hertz[at + 1]
    if found.placed.linear:
        share = (hertz - low) / (high - low)
    else:
        share = np.log1p((hertz - low) / low) / np.log1p((high - low) / low)
    exact = sweep(netlist, ask, hertz)
    worst = []
    with np.errstate(invalid="ignore"):
        for drawn, true in ((found.gain_db, exact.gain_db), (found.phase_deg, exact.phase_deg)):
            line = drawn[at] + share * (drawn[at + 1] - drawn[at])
            worst.append(np.abs(line - true).max())
    return float(worst[0]), float(worst[1])


def anywhere(found: Sweep, count: int = RANDOM) -> np.ndarray:
    """Random frequencies of the band, off the places where lines end."""
    draw = np.random.default_rng(4)
    low, high = found.hertz[0], found.hertz[-1]
    if found.placed.linear:
        hertz = draw.uniform(low, high, count)
    else:
        hertz = low * (high / low) ** draw.uniform(0, 1, count)
    hertz = np.sort(np.clip(hertz, low, high))
    for end in found.placed.ends_hertz:
        hertz = hertz[np.abs(hertz - end) > 1e-9 * high * found.placed.linear + 1e-9 * end]
    return hertz


def series_branch(quality: float) -> Netlist:
    """A crystal of 10 MHz into a small load: a peak, and a notch a little above it."""
    farad = Fraction(1 / (4 * pi**2 * 1e14 * 0.01))
    crystal = part(
        "X1",
        "crystal",
        "in",
        "out",
        motional_resistance=Fraction(2 * pi * 1e7 * 0.01 / quality),
        motional_inductance=Fraction(1, 100),
        motional_capacitance=farad,
        shunt_capacitance=Fraction(5, 10**12),
    )
    return network(crystal, R("R1", "out", "gnd", Fraction(1, 1000)))


def band_pass() -> Netlist:
    """Order ten between resistors: resonant arms with traps on both sides of the pass band."""
    parts = [R("R1", "in", "n0", 50), R("R2", "n3", "gnd", 50)]
    for k in range(3):
        parts += [
            L(f"Ls{k}", f"n{k}", f"m{k}", Fraction(1 + k, 10**5)),
            C(f"Cs{k}", f"m{k}", f"n{k + 1}", Fraction(1, (1 + k) * 10**9)),
        ]
    for k in range(2):
        parts += [
            L(f"Lp{k}", f"n{k + 1}", f"p{k}", Fraction(1 + k, 10**6)),
            C(f"Cp{k}", f"p{k}", "gnd", Fraction(5, 10**9)),
        ]
    return network(*parts)


def line() -> Netlist:
    """A lossy line between two resistances that do not match it."""
    cable = part(
        "W1",
        "line",
        "a",
        "b",
        "gnd",
        "gnd",
        z0=75,
        delay=Fraction(3, 10**8),
        loss=Fraction(3, 10),
    )
    loss = replace(cable.values["loss"], at_hertz=number(10**8))
    cable = replace(cable, values={**cable.values, "loss": loss})
    return network(R("R1", "in", "a", 50), cable, R("R2", "b", "gnd", 20))


CASES = {
    "one pole": (
        network(R("R1", "in", "out", 1000), C("C1", "out", "gnd", Fraction(1, 10**6))),
        "out",
        band(1, 1e6),
        True,
    ),
    "twin T": (twin_t(480), "out", band(10, 1e9), True),
    "complete notch": (twin_t(500), "out", band(10, 1e9), True),
    "notch of 1e-6": (twin_t(Fraction(500001, 1000)), "out", band(10, 1e9), True),
    "band pass": (band_pass(), "n3", band(1e4, 1e8), True),
    "crystal": (series_branch(1e6), "out", band(1e6, 1e8), True),
    "line": (line(), "b", band(1e3, 1e9), False),
    "ladder": (ladder(200), "n[200]", band(10, 1e7), True),
}


@pytest.mark.parametrize("name", CASES)
@pytest.mark.parametrize("linear", [False, True])
def test_lines_are_right_everywhere(name, linear):
    """At 20,000 random frequencies (5,000 linear) the lines err by at most 0.01 dB and 0.1 degrees."""
    netlist, target, over, sure = CASES[name]
    ask = from_to(netlist, "n[0]" if name == "ladder" else "in", target)
    found = adaptive_sweep(netlist, ask, over, linear=linear)
    gain, phase = errors(found, netlist, ask, anywhere(found, RANDOM // 4 if linear else RANDOM))
    assert gain <= GAIN_DB
    assert phase <= PHASE_DEG
    assert (found.placed.sure, found.placed.complete, found.settled) == (sure, True, True)


@pytest.mark.parametrize("quality", [1e6, 1e9, 1e11])
@pytest.mark.parametrize("linear", [False, True])
def test_no_peak_is_too_narrow(quality, linear):
    """Around a resonance the lines hold on the scale of its own width, and reach its top."""
    netlist = series_branch(quality)
    ask = from_to(netlist, "in", "out")
    found = adaptive_sweep(netlist, ask, band(1e6, 1e8), linear=linear)
    draw = np.random.default_rng(5)
    beside = 10 ** draw.uniform(-3, 3, 3000) * draw.choice([-1, 1], 3000) / quality
    gain, phase = errors(found, netlist, ask, np.sort(1e7 * (1 + beside)))
    assert gain <= GAIN_DB
    assert phase <= PHASE_DEG
    exact = 20 * np.log10(0.001 / (0.001 + 2 * pi * 1e5 / quality))
    assert found.gain_db.max() == pytest.approx(exact, abs=0.011)
    assert found.placed.sure


def test_lines_end_at_a_zero_on_the_axis():
    """Beside a complete notch the points come as near as 1e-12, and the place is told."""
    henry = divide(number(Fraction(1, 2000)), PI)
    tank = network(
        L("L1", "in", "out", henry), C("C1", "in", "out", henry), R("R1", "out", "gnd", 1000)
    )
    ask = from_to(tank, "in", "out")
    found = adaptive_sweep(tank, ask, band(1, 1e6))
    assert found.placed.ends_hertz == pytest.approx((1000.0,), rel=1e-11)
    assert found.status[found.hertz == 1000.0].tolist() == [Status.ZERO]
    distance = np.abs(found.hertz / 1000 - 1)
    assert 0 < distance[distance > 0].min() < 3e-12
    beside = np.sort(1000 * (1 + np.geomspace(1e-11, 1e-2, 500)))
    assert max(np.array(errors(found, tank, ask, beside)) / (GAIN_DB, PHASE_DEG)) <= 1


def test_from_zero_hertz_over_linear_frequency():
    """A high-pass is zero at 0 Hz: its lines end there, and hold from 1e-9 of the band on."""
    netlist = network(C("C1", "in", "out", Fraction(1, 10**6)), R("R1", "out", "gnd", 1000))
    found = adaptive_sweep(netlist, from_to(netlist, "in", "out"), band(0, 1e6), linear=True)
    assert found.placed.ends_hertz == (0.0,)
    assert (found.gain_db[0], found.phase_deg[0]) == (-np.inf, 90)
    hertz = np.geomspace(1e-3, 1e6, 2000)
    gain, phase = errors(found, netlist, from_to(netlist, "in", "out"), hertz)
    assert gain <= GAIN_DB
    assert phase <= PHASE_DEG


def test_a_flat_response_keeps_the_first_grid():
    """Where nothing bends no point is added."""
    netlist = network(R("R1", "in", "out", 1000), R("R2", "out", "gnd", 1000))
    found = adaptive_sweep(netlist, from_to(netlist, "in", "out"), band(1, 1e6))
    assert len(found.hertz) == 19
    assert set(found.gain_db.round(9)) == {-6.020599913}


def test_fewer_points_than_an_even_grid():
    """A crystal takes some hundred points, where even ratios would need hundred thousands."""
    netlist = series_branch(1e6)
    found = adaptive_sweep(netlist, from_to(netlist, "in", "out"), band(1e6, 1e8))
    smallest = float(np.diff(np.log(found.hertz)).min())
    assert len(found.hertz) < 1000
    assert np.log(100) / smallest > 100 * len(found.hertz)


def test_what_is_zero_everywhere_has_no_phase():
    """Where nothing arrives the points stay a grid, every one a zero."""
    netlist = network(R("R1", "in", "gnd", 10), R("R2", "out", "gnd", 10))
    found = adaptive_sweep(netlist, from_to(netlist, "in", "out"), band(1, 1e3))
    assert set(found.status.tolist()) == {Status.ZERO}
    assert np.isnan(found.phase_deg).all()


def test_the_most_points_are_told(monkeypatch):
    """Where the points run out, `complete` is false and the answer says so."""
    monkeypatch.setattr(adaptive, "MOST_PLACED", 100)
    netlist = CASES["twin T"][0]
    found = adaptive_sweep(netlist, from_to(netlist, "in", "out"), band(10, 1e9))
    assert not found.placed.complete
    assert len(found.hertz) <= 100


@settings(max_examples=60, deadline=None)
@given(st.data())
def test_lines_are_right_in_any_network(data):
    """The promise holds for random networks and quantities, active ones too."""
    netlist = data.draw(any_lumped(symbols=False))
    source, target = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    ask = Ask(source=source, target=target, quantity=data.draw(st.sampled_from(QUANTITIES[:4])))
    linear = data.draw(st.booleans())
    try:
        found = adaptive_sweep(netlist, ask, band(0.001, 100), linear=linear)
    except AcsolveError as problem:
        event(problem.code)
        return
    if found.status.min() >= Status.ZERO:
        event("nothing arrives")
        return
    gain, phase = errors(found, netlist, ask, anywhere(found, 2000))
    event(f"sure: {found.placed.sure}")
    assert found.placed.complete
    assert gain <= GAIN_DB
    if found.settled:
        assert phase <= PHASE_DEG


def test_at_the_door():
    """`points="auto"` over a band in words or numbers; without a band it is refused."""
    circuit = acsolve.parse("in -- R1 -- out -- C1 -- gnd\nR1 = 1 kohm\nC1 = 1 uF\n")
    path = circuit.path("in", "out")
    found = path.sweep("1 Hz .. 1 MHz", points="auto")
    assert found.hertz[[0, -1]].tolist() == [1, 1e6]
    assert path.sweep((1, 1e6), points="auto").hertz.tolist() == found.hertz.tolist()
    assert path.sweep("1 Hz .. 1 MHz").placed is None
    with pytest.raises(AnalysisError, match="starts above 0 Hz"):
        path.sweep("0 Hz .. 1 MHz", points="auto")
    with pytest.raises(AnalysisError, match="is no band"):
        path.sweep([1.0, 2.0, 3.0], points="auto")


def test_an_impedance_of_a_lossless_tank():
    """A pole on the axis ends the lines as a zero does."""
    henry = divide(number(Fraction(1, 2000)), PI)
    tank = network(L("L1", "a", "gnd", henry), C("C1", "a", "gnd", henry))
    found = adaptive_sweep(tank, impedance_ask(tank, ("a", "gnd")), band(10, 1e5))
    assert found.placed.ends_hertz == pytest.approx((1000.0,), rel=1e-11)
    assert found.phase_deg[[0, -1]].tolist() == [90, -90]
