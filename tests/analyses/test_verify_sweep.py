"""Proofs of a sweep: they hold, they bound the true error, and they catch what is false."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from math import exp, log10, pi

import mpmath
import numpy as np
import pytest
from hypothesis import HealthCheck, assume, given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.algebra.ball import precision
from acsolve.analyses.question import Ask, impedance_ask, transfer_ask
from acsolve.analyses.sweep import Sweep, sweep
from acsolve.analyses.verify_sweep import chosen, verify_sweep
from acsolve.circuit.netlist import Netlist
from acsolve.equations import enclosure
from acsolve.equations.enclosure import Enclosure
from acsolve.equations.numeric import ball_values
from acsolve.equations.result import Status
from acsolve.errors import AcsolveError, EquationError
from tests.reference.dense import answer
from tests.reference.field import Digits
from tests.strategies import QUANTITIES, C, L, R, any_lumped, network, pairs, part

FARAD = Fraction(1, 10**9)
LOW_PASS = network(R("R1", "in", "out", 1000), C("C1", "out", "gnd", FARAD))
BAND = np.geomspace(1e3, 1e7, 41)


def from_to(netlist: Netlist, source: str, target: str) -> Ask:
    """The voltage ratio between two nodes."""
    return transfer_ask(netlist, (source, "gnd"), (target, "gnd"))


def ladder(sections: int) -> Netlist:
    """RC sections that differ a little, from n[0] to the last."""
    parts = []
    for k in range(1, sections + 1):
        parts.append(R(f"R[{k}]", f"n[{k - 1}]", f"n[{k}]", 1000 + 7 * k % 13))
        parts.append(C(f"C[{k}]", f"n[{k}]", "gnd", FARAD * (50 + k % 7) / 50))
    return network(*parts)


def altered(found: Sweep, name: str, place: int, value: complex) -> Sweep:
    """The sweep with one number of one column replaced."""
    column = getattr(found, name).copy()
    column[place] = value
    return replace(found, **{name: column})


@st.composite
def swept(draw) -> tuple[Netlist, Ask, Sweep]:
    """A random network, a question it has an answer to, and that answer."""
    netlist = draw(any_lumped(symbols=False, odd=draw(st.booleans())))
    quantity = draw(st.sampled_from(QUANTITIES))
    source, target = draw(pairs(netlist)), draw(pairs(netlist))
    hertz = draw(st.lists(st.floats(1e-4, 1e3), min_size=1, max_size=3, unique=True))
    try:
        if quantity == "impedance":
            ask = impedance_ask(netlist, source)
        else:
            ask = transfer_ask(netlist, source, target, quantity=quantity)
        return netlist, ask, sweep(netlist, ask, [0.0, *hertz])
    except AcsolveError:
        assume(False)
        raise


def by_digits(netlist: Netlist, ask: Ask, hertz: float) -> mpmath.mpc | None:
    """The answer at 100 digits by equations that share nothing with the library."""
    field = Digits()
    field.context.dps = 100
    s = 2j * field.context.pi * field.context.mpf(hertz)
    quantity = ask.quantity
    found = answer(netlist, field, s, source=ask.source, target=ask.target, quantity=quantity)
    return found.value if found.state == "determined" else None


@settings(max_examples=60, deadline=None, suppress_health_check=list(HealthCheck))
@given(swept())
def test_random_sweeps_are_proven(given_sweep):
    """No point of a random network is wrong, and only unusual ones and 0 Hz may be unproven."""
    netlist, ask, found = given_sweep
    proven = verify_sweep(netlist, ask, found, "all")
    assert proven.confirmed() is proven
    assert proven.points + len(proven.unproven) == len(found.hertz)
    states = dict(zip(found.hertz.tolist(), found.status.tolist(), strict=True))
    for item in proven.unproven:
        assert states[item.hertz] >= Status.LIMIT or item.hertz == 0, item
    for item in proven.proofs:
        assert item.relative_error < 1e-9


@settings(max_examples=60, deadline=None, suppress_health_check=list(HealthCheck))
@given(swept())
def test_bounds_are_above_the_true_error(given_sweep):
    """Each bound is at least the error against 100 digits of independent equations."""
    netlist, ask, found = given_sweep
    proven = verify_sweep(netlist, ask, found, "all")
    place_of = {float(hertz): place for place, hertz in enumerate(found.hertz)}
    for item in proven.proofs:
        place = place_of[item.hertz]
        truth = by_digits(netlist, ask, item.hertz)
        if truth is None or abs(truth) < 1e-60 or found.status[place] >= Status.ZERO:
            continue
        value = complex(found.value[place])
        error = abs(truth.context.mpc(value.real, value.imag) - truth) / abs(truth)
        assert item.relative_error >= error * (1 - truth.context.mpf(10) ** -40)
        assert item.relative_error <= error + 1e-24
        decibel = 20 * truth.context.log10(abs(truth)) - float(found.gain_db[place])
        assert item.gain_error_db is not None
        assert item.gain_error_db >= abs(decibel) * (1 - truth.context.mpf(10) ** -40)


@settings(max_examples=40, deadline=None)
@given(
    place=st.integers(0, len(BAND) - 1),
    angle=st.floats(0, 6.28),
    size=st.floats(-13, -2),
)
def test_a_false_value_is_caught(place, angle, size):
    """A value moved by more than was claimed, in any direction, is told with its error."""
    ask = from_to(LOW_PASS, "in", "out")
    right = sweep(LOW_PASS, ask, BAND)
    moved = right.value[place] * (1 + 10**size * np.exp(1j * angle))
    assume(10**size > 2 * right.error[place])
    proven = verify_sweep(LOW_PASS, ask, altered(right, "value", place, moved), "all")
    (wrong,) = proven.wrong
    assert wrong.hertz == BAND[place]
    assert wrong.wrong == ("value",)
    assert wrong.relative_error == pytest.approx(10**size, rel=0.05)
    with pytest.raises(EquationError, match="proven wrong") as caught:
        proven.confirmed()
    assert caught.value.code == "equations.check-failed"


@pytest.mark.parametrize("sections", [5, 40, 120])
@pytest.mark.parametrize(
    ("name", "change", "what"),
    [
        ("value", lambda value: value * (1 + 1e-8), "value"),
        ("gain_db", lambda value: value + 1e-7, "gain"),
        ("phase_deg", lambda value: value - 1e-7, "phase"),
        ("group_delay_s", lambda value: value * (1 + 1e-4), "group delay"),
    ],
)
def test_each_column_is_watched(sections, name, change, what):
    """A slip of 1e-8 in the value, or of as little in another column, is told as that one's."""
    netlist = ladder(sections)
    ask = from_to(netlist, "n[0]", f"n[{sections}]")
    right = sweep(netlist, ask, np.geomspace(1e2, 1e5, 9))
    false = altered(right, name, 4, change(getattr(right, name)[4]))
    assert not verify_sweep(netlist, ask, right, "all").wrong
    (wrong,) = verify_sweep(netlist, ask, false, "all").wrong
    assert wrong.wrong == (what,)


def test_whole_turns_of_the_phase_are_another_matter():
    """A phase off by 360 degrees is as right as before: `settled` speaks of turns."""
    ask = from_to(LOW_PASS, "in", "out")
    right = sweep(LOW_PASS, ask, BAND)
    turned = altered(right, "phase_deg", 3, right.phase_deg[3] + 360)
    assert not verify_sweep(LOW_PASS, ask, turned, "all").wrong


def test_beyond_a_double_gain_and_phase_are_proven():
    """Where the value is below a double's range, gain and phase are held to the estimate."""
    netlist = ladder(200)
    ask = from_to(netlist, "n[0]", "n[200]")
    right = sweep(netlist, ask, [1e4, 1e8])
    assert right.value[1] == 0
    proven = verify_sweep(netlist, ask, right, "all")
    assert proven.points == 2
    assert proven.max_relative_error < 1e-11
    assert not proven.wrong
    (wrong,) = verify_sweep(
        netlist, ask, altered(right, "gain_db", 1, right.gain_db[1] + 1e-6), "all"
    ).wrong
    assert wrong.wrong == ("value", "gain")
    assert wrong.relative_error == pytest.approx(10 ** (1e-6 / 20) - 1, rel=1e-3)


def test_gain_and_relative_error_agree():
    """A value known within e has a gain known within 20·log10(1 + e) dB, but for rounding."""
    netlist = ladder(60)
    ask = from_to(netlist, "n[0]", "n[60]")
    for item in verify_sweep(netlist, ask, sweep(netlist, ask, BAND), "all").proofs:
        assert item.gain_error_db <= 20 / log10(exp(1)) ** -1 * item.relative_error + 1e-11


def test_a_limit_is_not_counted_as_proven():
    """Where the equations are singular nothing is proven, and it is said why."""
    divider = network(C("C1", "in", "out", FARAD), C("C2", "out", "gnd", 3 * FARAD))
    ask = from_to(divider, "in", "out")
    proven = verify_sweep(divider, ask, sweep(divider, ask, [0.0, 50.0]), "all")
    assert proven.points == 1
    (open_,) = proven.unproven
    assert open_.hertz == 0
    assert "limit" in open_.reason


def test_an_infinity_is_not_counted_as_proven():
    """A capacitor's impedance at 0 Hz is infinite by a limit, which proves nothing."""
    alone = network(C("C1", "a", "gnd", FARAD))
    ask = impedance_ask(alone, ("a", "gnd"))
    found = sweep(alone, ask, [0.0, 1.0])
    proven = verify_sweep(alone, ask, found, "all")
    assert proven.points == 1
    assert "infinite" in proven.unproven[0].reason


def test_zeros_are_proven_where_they_are_exact():
    """A high-pass is exactly zero at 0 Hz; a balanced bridge is zero for all that balls tell."""
    high = network(C("C1", "in", "out", FARAD), R("R1", "out", "gnd", 1000))
    ask = from_to(high, "in", "out")
    found = sweep(high, ask, [0.0, 1e3])
    assert found.status[0] == Status.ZERO
    assert verify_sweep(high, ask, found, "all").points == 2
    bridge = network(
        *(R("R1", "in", "a", 100), R("R2", "a", "gnd", 300)),
        *(R("R3", "in", "b", 10), R("R4", "b", "gnd", 30), C("C1", "a", "b", FARAD)),
    )
    ask = transfer_ask(bridge, ("in", "gnd"), ("a", "b"))
    proven = verify_sweep(bridge, ask, sweep(bridge, ask, [1.0, 1e3]), "all")
    assert proven.points == 0
    assert proven.max_relative_error is None
    assert all("zero" in item.reason for item in proven.unproven)


def test_a_false_zero_is_caught():
    """A zero where there is a response is wrong by all of it."""
    ask = from_to(LOW_PASS, "in", "out")
    right = sweep(LOW_PASS, ask, BAND)
    false = altered(altered(right, "value", 2, 0), "status", 2, Status.ZERO)
    (wrong,) = verify_sweep(LOW_PASS, ask, false, "all").wrong
    assert wrong.relative_error == 1


def test_a_point_without_an_answer_is_not_proven():
    """An undefined point is told as one."""
    ask = from_to(LOW_PASS, "in", "out")
    gap = altered(sweep(LOW_PASS, ask, BAND), "status", 7, Status.UNDEFINED)
    proven = verify_sweep(LOW_PASS, ask, gap, "all")
    assert proven.points == len(BAND) - 1
    assert [item.hertz for item in proven.unproven] == [BAND[7]]


@settings(max_examples=40, deadline=None, suppress_health_check=list(HealthCheck))
@given(swept())
def test_both_routes_enclose_the_same(given_sweep):
    """The dense and the sparse solution overlap, in value and in slope."""
    netlist, ask, found = given_sweep
    for hertz in found.hertz.tolist():
        with pytest.MonkeyPatch.context() as patch:
            dense = prepared(netlist, ask).at(hertz)
            patch.setattr(enclosure, "_LARGEST_DENSE", 0)
            sparse = prepared(netlist, ask).at(hertz)
        if dense is None or sparse is None:
            continue
        with precision(2048):
            assert dense.value.overlaps(sparse.value)
            if dense.slope is not None and sparse.slope is not None:
                assert dense.slope.overlaps(sparse.slope)


def prepared(netlist: Netlist, ask: Ask) -> Enclosure:
    """The balls of a question."""
    system = ask.system(netlist)
    return Enclosure(
        system=system,
        observed=ask.observed(system),
        driven=ask.driven(system),
        evaluate=lambda: ball_values(netlist),
    )


def test_low_pass_lies_in_its_ball():
    """1/(1 + s·tau) and -tau/(1 + s·tau), at 60 digits, lie in the balls of value and slope."""
    from flint import acb, arb, fmpq

    hertz = 159154.9
    found = prepared(LOW_PASS, from_to(LOW_PASS, "in", "out")).at(hertz)
    assert found is not None
    with precision(256):
        tau = arb(fmpq(1, 10**6))
        one = 1 + acb(0, 2 * arb.pi() * arb(hertz)) * tau
        assert found.value.overlaps(1 / one)
        assert found.slope.overlaps(-tau / one)
        assert found.value.rel_accuracy_bits() > 100


def test_a_line_is_proven():
    """Parts that are no ratios of polynomials are enclosed as well."""
    line = part("W1", "line", "a", "b", "gnd", "gnd", z0=75, delay=Fraction(3, 2 * 10**6))
    netlist = network(R("R1", "in", "a", 50), line, R("R2", "b", "gnd", 75))
    ask = from_to(netlist, "in", "b")
    proven = verify_sweep(netlist, ask, sweep(netlist, ask, np.geomspace(1, 1e7, 20)), "all")
    assert proven.points == 20
    assert not proven.wrong


def test_a_lossless_resonance_beside_the_grid():
    """Close to a pole on the axis the bound stays true, and the error is not large."""
    tank = network(L("L1", "in", "out", FARAD), C("C1", "out", "gnd", FARAD))
    ask = from_to(tank, "in", "out")
    near = 1e9 / (2 * pi) * (1 + 1e-9)
    proven = verify_sweep(tank, ask, sweep(tank, ask, [near]), "all")
    assert proven.points == 1
    assert not proven.wrong


def test_own_sources_are_proven():
    """The response to the file's own phasors is held to its proof like any other."""
    netlist = network(
        part("V1", "voltage_source", "gnd", "a", amplitude=2, angle=37),
        part("V2", "voltage_source", "gnd", "b", amplitude=3, angle=60),
        *(R("R1", "a", "out", 50), R("R2", "b", "out", 50), C("C1", "out", "gnd", FARAD)),
    )
    ask = transfer_ask(netlist, None, ("out", "gnd"))
    proven = verify_sweep(netlist, ask, sweep(netlist, ask, BAND), "all")
    assert proven.points == len(BAND)
    assert proven.max_relative_error < 1e-14


def test_equal_sections_are_proven_written_out():
    """A cascade in the text, however it is swept, is proven by the equations of all its parts."""
    circuit = acsolve.parse(
        "block section(a, b)\n    a -- R -- b\n    b -- C -- gnd\n    R = 1 kohm\n    C = 1 nF\n"
        "end\n\nstart -- N1 : 150 * section -- finish\n"
    )
    path = circuit.path("start", "finish")
    found = path.sweep("10 Hz .. 10 MHz", points=15)
    proven = verify_sweep(circuit.netlist, path.ask, found, "all")
    assert proven.points == 15
    assert proven.max_relative_error < 1e-10
    assert not proven.wrong, "an error above the sweep's own estimate"


@pytest.mark.parametrize("wanted", [None, 1, 2, 5, 20, 41, 100, "all"])
def test_points_are_spread_and_telling(wanted):
    """As many as asked for, distinct; both ends, the worst estimate and the extremes first."""
    found = sweep(LOW_PASS, from_to(LOW_PASS, "in", "out"), BAND)
    places = chosen(found, wanted)
    expected = {None: 7, "all": 41, 100: 41}.get(wanted, wanted)
    assert len(places) == len(set(places)) == expected
    assert places == sorted(places)
    if expected >= 5:
        assert {0, 20, 40, int(np.argmax(found.error)), int(np.argmin(found.gain_db))} <= {*places}


def test_repeated_frequencies_are_proven_once():
    """Points that share a frequency are one, in whatever shape they were asked."""
    hertz = np.array([[1e3, 1e4], [1e4, 1e3]])
    ask = from_to(LOW_PASS, "in", "out")
    proven = verify_sweep(LOW_PASS, ask, sweep(LOW_PASS, ask, hertz), "all")
    assert [item.hertz for item in proven.proofs] == [1e3, 1e4]


def test_nothing_asked_proves_nothing():
    """An empty sweep has no points to prove."""
    ask = from_to(LOW_PASS, "in", "out")
    assert verify_sweep(LOW_PASS, ask, sweep(LOW_PASS, ask, [])).points == 0
