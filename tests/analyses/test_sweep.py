"""Sweeps against closed forms, against balls, and against the laws that networks obey."""

from __future__ import annotations

from fractions import Fraction
from math import pi

import flint
import numpy as np
import pytest
from hypothesis import assume, event, given, settings
from hypothesis import strategies as st

from acsolve.algebra.ball import precision
from acsolve.algebra.roots import complex_roots
from acsolve.analyses.question import Ask, impedance_ask, transfer_ask
from acsolve.analyses.sweep import response, responses, solver_for, sweep
from acsolve.analyses.transfer import closed_form
from acsolve.circuit.expression import PI, divide, multiply, number
from acsolve.circuit.netlist import Netlist, Part, bindings
from acsolve.circuit.value import Value
from acsolve.equations.evaluate import BallArithmetic, Evaluator
from acsolve.equations.result import Status
from acsolve.errors import AcsolveError, AnalysisError, EquationError
from tests.strategies import (
    PASSIVE,
    QUANTITIES,
    C,
    L,
    R,
    any_lumped,
    connected,
    network,
    pairs,
    part,
)

OHM, FARAD = 1000, Fraction(1, 10**6)
TAU = OHM * float(FARAD)
LOW_PASS = network(R("R1", "in", "out", OHM), C("C1", "out", "gnd", FARAD))
HIGH_PASS = network(C("C1", "in", "out", FARAD), R("R1", "out", "gnd", OHM))
BAND = np.geomspace(1.0, 1e6, 121)


def from_to(netlist: Netlist, source: str, target: str, quantity: str | None = None) -> Ask:
    """A question between two nodes and ground."""
    return transfer_ask(netlist, (source, "gnd"), (target, "gnd"), quantity=quantity)


def ladder(
    sections: int, ohm: Fraction | int = 1000, farad: Fraction = Fraction(1, 10**9)
) -> Netlist:
    """Equal RC sections from n[0] to the last."""
    parts: list[Part] = []
    for k in range(1, sections + 1):
        parts += [
            R(f"R[{k}]", f"n[{k - 1}]", f"n[{k}]", ohm),
            C(f"C[{k}]", f"n[{k}]", "gnd", farad),
        ]
    return network(*parts)


def twin_t(shunt: Fraction | int) -> Netlist:
    """Two T sections in parallel; the notch is complete where the shunt is 500 ohm."""
    nano = Fraction(1, 10**9)
    return network(
        *(R("R1", "in", "a", 1000), R("R2", "a", "out", 1000), C("C3", "a", "gnd", 2 * nano)),
        *(C("C1", "in", "b", nano), C("C2", "b", "out", nano), R("R3", "b", "gnd", shunt)),
        R("Rload", "out", "gnd", 10**6),
    )


def ball_ladder(netlist: Netlist, sections: int, hertz: float) -> flint.acb:
    """The voltage ratio of a ladder, section by section from the open end, in balls."""
    s = flint.acb(0, 2 * flint.arb.pi() * flint.arb(flint.fmpq(*hertz.as_integer_ratio())))
    known = Evaluator(bindings(netlist), BallArithmetic())
    voltage, current = flint.acb(1), flint.acb(0)
    for k in range(sections, 0, -1):
        current += s * known.name(f"C[{k}]") * voltage
        voltage += current * known.name(f"R[{k}]")
    return 1 / voltage


def dense_balls(netlist: Netlist, ask: Ask, hertz: float) -> flint.acb:
    """The ratio asked for, from a dense solution of the impedance form in balls."""
    system = ask.system(netlist)
    known = Evaluator(bindings(netlist), BallArithmetic())
    s = flint.acb(0, 2 * flint.arb.pi() * flint.arb(flint.fmpq(*hertz.as_integer_ratio())))
    size = len(system.unknowns)
    matrix = flint.acb_mat(size, size)
    for row, law in enumerate(system.laws):
        for column, entry in law.entries.items():
            matrix[row, column] = known(entry, s)
    for column, factor in ask.driven(system).items():
        matrix[size - 1, column] = flint.acb(factor)
    right = flint.acb_mat(size, 1)
    right[size - 1, 0] = flint.acb(1)
    try:
        x = matrix.solve(right)
    except ZeroDivisionError:
        return flint.acb("nan")
    return sum((x[at, 0] * k for at, k in ask.observed(system).items()), flint.acb(0))


def relative_error(value: complex, expected: flint.acb, exponent: int = 0) -> float:
    """|value · 2^exponent - expected| / |expected|, an upper bound."""
    got = flint.acb(complex(value)) * flint.arb(2) ** exponent
    return float(((got - expected) / expected).abs_upper())


def test_low_pass_has_its_closed_forms():
    """H = 1/(1 + s·tau): gain, phase, phase delay and group delay are the textbook ones."""
    found = sweep(LOW_PASS, from_to(LOW_PASS, "in", "out"), BAND)
    x = 2 * pi * BAND * TAU
    assert found.gain_db == pytest.approx(-10 * np.log10(1 + x**2), rel=1e-12, abs=1e-12)
    assert found.phase_deg == pytest.approx(-np.degrees(np.arctan(x)), rel=1e-12)
    assert found.phase_delay_s == pytest.approx(np.arctan(x) / (2 * pi * BAND), rel=1e-12)
    assert found.group_delay_s == pytest.approx(TAU / (1 + x**2), rel=1e-12)
    assert found.settled
    assert not found.unusual()
    assert found.error.max() < 1e-13


def test_half_power_is_at_the_corner():
    """At 1/(2·pi·R·C) the gain of a single pole is 1/sqrt(2) and the phase -45 degrees."""
    found = sweep(LOW_PASS, from_to(LOW_PASS, "in", "out"), [1 / (2 * pi * TAU)])
    assert abs(found.value[0]) == pytest.approx(1 / np.sqrt(2), rel=1e-15)
    assert found.phase_deg[0] == pytest.approx(-45, rel=1e-14)
    assert found.phase_delay_s[0] == pytest.approx(pi / 4 * TAU, rel=1e-14)


def test_delays_agree_at_zero_hertz():
    """At 0 Hz both delays are tau, the gain is 1 and the phase 0."""
    found = sweep(LOW_PASS, from_to(LOW_PASS, "in", "out"), [0.0])
    assert found.value[0] == 1
    assert (found.gain_db[0], found.phase_deg[0]) == (0, 0)
    assert found.phase_delay_s[0] == found.group_delay_s[0] == pytest.approx(TAU, rel=1e-14)


def test_zero_at_zero_hertz():
    """A high-pass has gain zero at 0 Hz, phase 90 degrees there, and no phase delay."""
    found = sweep(HIGH_PASS, from_to(HIGH_PASS, "in", "out"), [0.0, 1e-3])
    assert found.status.tolist() == [Status.ZERO, Status.OK]
    assert found.value[0] == 0
    assert found.gain_db[0] == -np.inf
    assert found.phase_deg == pytest.approx([90, 90], abs=1e-3)
    assert np.isnan(found.phase_delay_s[0])


def test_pole_at_zero_hertz():
    """A capacitor's impedance is infinite at 0 Hz, with phase -90 degrees from there on."""
    netlist = network(C("C1", "a", "gnd", FARAD))
    found = sweep(netlist, impedance_ask(netlist, ("a", "gnd")), [0.0, 1.0])
    assert found.status.tolist() == [Status.POLE, Status.OK]
    assert found.gain_db[0] == np.inf
    assert np.isinf(found.value[0])
    assert found.phase_deg.tolist() == [-90, -90]


def test_limit_at_zero_hertz():
    """A capacitive divider is singular at 0 Hz, where its limit holds: C1/(C1 + C2)."""
    netlist = network(C("C1", "in", "out", FARAD), C("C2", "out", "gnd", 3 * FARAD))
    found = sweep(netlist, from_to(netlist, "in", "out"), [0.0, 50.0])
    assert found.value == pytest.approx([0.25, 0.25], rel=1e-15)
    assert found.unusual() == {"limit": 1}
    assert found.phase_deg.tolist() == [0, 0]


def test_lossless_tank_at_its_resonance():
    """Parallel L and C between R and the output: the gain is the limit 0, exactly there."""
    # 1/(2·pi·sqrt(L·C)) = 1 kHz exactly, with the values written in pi
    henry = divide(number(Fraction(1, 2000)), PI)
    tank = network(
        L("L1", "in", "out", henry), C("C1", "in", "out", henry), R("R1", "out", "gnd", OHM)
    )
    found = sweep(tank, from_to(tank, "in", "out"), [999.999, 1000.0, 1000.001])
    assert found.status[1] == Status.ZERO
    assert np.isnan(found.phase_deg[1])
    assert found.phase_deg[[0, 2]] == pytest.approx([-90, 90], abs=0.2)


def test_removable_resonance_has_its_limit():
    """A lossless tank in series with the open output carries no current: H = 1, the limit."""
    henry = divide(number(Fraction(1, 2000)), PI)
    tank = network(
        L("L1", "in", "out", henry), C("C1", "in", "out", henry), C("C2", "in", "gnd", FARAD)
    )
    found = sweep(tank, from_to(tank, "in", "out"), [999.0, 1000.0, 1001.0])
    assert found.value == pytest.approx([1, 1, 1], rel=1e-15)
    assert found.phase_deg == pytest.approx([0, 0, 0], abs=1e-12)


def test_pole_at_a_lossless_resonance():
    """A lossless series circuit has an infinite gain at its resonance and turns by -180 there."""
    henry = divide(number(Fraction(1, 2000)), PI)
    netlist = network(L("L1", "in", "out", henry), C("C1", "out", "gnd", henry))
    found = sweep(netlist, from_to(netlist, "in", "out"), [10.0, 1000.0, 1e4])
    assert found.status.tolist() == [Status.OK, Status.POLE, Status.OK]
    assert found.phase_deg[[0, 2]].tolist() == [0, -180]


@pytest.mark.parametrize(
    ("shunt", "after"),
    [
        (500, 0.0),  # on the axis: +180 by convention, as the limit of the left half-plane
        (Fraction(500001, 1000), 0.0),  # left of the axis
        (Fraction(499999, 1000), -360.0),  # right of it
        (Fraction(50000001, 10**5), 0.0),
        (Fraction(49999999, 10**5), -360.0),
    ],
)
def test_notch_narrower_than_the_grid(shunt, after):
    """A notch between two points turns the phase by +180 or -180, as its zeros lie."""
    netlist = twin_t(shunt)
    found = sweep(netlist, from_to(netlist, "in", "out"), np.geomspace(10, 1e9, 33))
    assert found.settled
    assert found.phase_deg[-1] == pytest.approx(after, abs=0.1)


def test_resonance_narrower_than_the_grid():
    """A crystal with Q of 100,000 turns the phase though no point of the grid is near it."""
    tera = Fraction(1, 10**12)
    crystal = part(
        "X1",
        "crystal",
        "in",
        "out",
        motional_resistance=50,
        motional_inductance=Fraction(1, 10),
        motional_capacitance=Fraction(1, 100) * tera,
        shunt_capacitance=5 * tera,
    )
    netlist = network(crystal, R("R1", "out", "gnd", 1), L("L1", "out", "gnd", Fraction(1, 100)))
    found = sweep(netlist, from_to(netlist, "in", "out"), np.geomspace(1e3, 1e8, 12))
    assert found.settled
    assert found.phase_deg[[0, -1]] == pytest.approx(exact_phase(netlist, found), abs=1e-6)


def exact_phase(netlist: Netlist, found) -> list[float]:
    """First and last phase of a sweep from in to out, from exact poles and zeros."""
    form = closed_form(netlist, from_to(netlist, "in", "out"))
    return phase_of(form.numbers(), 2 * pi * found.hertz[[0, -1]]).tolist()


def phase_of(coefficients, omega: np.ndarray) -> np.ndarray:
    """Phase in degrees as the sum of what each exact pole and zero turns from 0 Hz on."""
    top, bottom = coefficients
    first = [next(at for at, item in enumerate(side) if item) for side in (top, bottom)]
    negative = top[first[0]] / bottom[first[1]] < 0
    total = np.full(len(omega), pi * negative + (first[0] - first[1]) * pi / 2)
    for side, sign in ((top, 1), (bottom, -1)):
        for root, multiplicity in complex_roots(side):
            if root == 0:
                continue
            if root.real == 0:
                turn = pi * ((omega > root.imag) & (root.imag > 0))
            else:
                turn = np.arctan2(omega - root.imag, abs(root.real))
                turn = (turn - np.arctan2(-root.imag, abs(root.real))) * -np.sign(root.real)
            total += sign * multiplicity * turn
    return np.degrees(total)


def numbers_of(netlist: Netlist, ask: Ask):
    """Exact coefficients of a closed form, or None where there is none in rationals."""
    try:
        form = closed_form(netlist, ask)
    except AcsolveError:
        return None
    coefficients = form.numbers()
    return coefficients if coefficients is not None and any(coefficients[0]) else None


@settings(max_examples=50)
@given(st.data())
def test_phase_is_that_of_poles_and_zeros(data):
    """The tracked phase is the sum over exact poles and zeros, between sparse points too."""
    netlist = data.draw(any_lumped(symbols=False))
    source, target = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    quantity = data.draw(st.sampled_from(QUANTITIES[:4]))
    ask = Ask(source=source, target=target, quantity=quantity)
    exact = numbers_of(netlist, ask)
    assume(exact is not None)
    found = sweep(netlist, ask, np.array([0, 1e-3, 0.02, 0.3, 4.0, 700.0]))
    known = np.isfinite(found.phase_deg)
    expected = phase_of(exact, 2 * pi * found.hertz)
    assert found.phase_deg[known] == pytest.approx(expected[known], abs=1e-5)


@given(st.data())
def test_every_answer_is_that_of_dense_balls(data):
    """Whatever the network, a point that is answered agrees with a dense solution in balls."""
    netlist = data.draw(any_lumped(symbols=False))
    source, target = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    quantity = data.draw(st.sampled_from(QUANTITIES))
    target = source if quantity == "impedance" else target
    ask = Ask(source=source, target=target, quantity=quantity)
    try:
        found = sweep(netlist, ask, [1e-3, 0.16, 1.0, 300.0])
    except EquationError as problem:
        event(problem.code)
        return
    with precision(300):
        for at in np.flatnonzero(found.status < Status.LIMIT):
            expected = dense_balls(netlist, ask, float(found.hertz[at]))
            if expected.is_finite() and not expected.contains(0):
                error = relative_error(found.value[at], expected)
                assert error < 1e-9
                assert error < 1e-13 + 100 * found.error[at]


@given(st.data())
def test_reciprocity(data):
    """Between two pairs of a network of R, L and C the transimpedance is the same both ways."""
    netlist = data.draw(connected(tree=PASSIVE, extra=PASSIVE, symbols=False, most_nodes=6))
    first, second = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    one, other = (
        response(netlist, transfer_ask(netlist, a, b, quantity="transimpedance"), [0.01, 0.2, 5.0])
        for a, b in ((first, second), (second, first))
    )
    known = np.isfinite(one) & np.isfinite(other)
    assert one[known] == pytest.approx(other[known], rel=1e-9)


def test_currents_balance_at_every_node():
    """What flows into a node of a ladder through one resistor leaves through C and the next."""
    netlist = ladder(6)
    nodes = [(f"n[{k}]", "gnd") for k in range(7)]
    hertz = np.geomspace(1e3, 1e7, 40)
    voltages = responses(netlist, from_to(netlist, "n[0]", "n[6]"), nodes, hertz)
    assert voltages.shape == (7, 40)
    currents = -np.diff(voltages, axis=0) / 1000
    into_capacitors = 2j * pi * hertz * 1e-9 * voltages[1:]
    leaving = np.vstack([currents[1:], np.zeros(40)]) + into_capacitors
    assert np.abs(currents - leaving).max() < 1e-15 * np.abs(currents).max()


@pytest.mark.parametrize("hertz", [1.0, 300.0, 1e4, 3e5, 2e6, 7e7, 1e9])
def test_deep_attenuation_keeps_every_digit(hertz):
    """200 sections agree with balls to 1e-11 and better, at -3 dB and at -15,000 dB alike."""
    netlist = ladder(200)
    ask = from_to(netlist, "n[0]", "n[200]")
    solution = solver_for(netlist, ask, np.array([hertz])).solve(np.array([hertz]))
    with precision(300):
        expected = ball_ladder(netlist, 200, hertz)
        error = relative_error(solution.mantissa[0, 0], expected, int(solution.exponent[0, 0]))
        decibel = 20 * float(expected.abs_lower().log()) / np.log(10)
    assert error < 1e-12
    assert error < solution.error[0, 0]
    assert solution.gain_db()[0, 0] == pytest.approx(decibel, rel=1e-13, abs=1e-11)


def test_long_ladder_turns_a_quarter_for_each_section():
    """200 sections approach -18,000 degrees, through 50 turns that no sampling unwraps."""
    netlist = ladder(200)
    found = sweep(netlist, from_to(netlist, "n[0]", "n[200]"), [0, 1e4, 1e12])
    assert found.settled
    assert found.value[2] == 0
    assert found.gain_db[2] == pytest.approx(-27192.72, abs=0.01)
    assert found.phase_deg[0] == 0
    assert -18000 < found.phase_deg[2] < -17999.9


def test_group_delay_is_the_derivative_of_the_phase():
    """-d(phase)/d(omega) by exact slope and by a tight difference in balls agree."""
    netlist = twin_t(480)
    ask = from_to(netlist, "in", "out")
    hertz = 1.7e5
    found = sweep(netlist, ask, [hertz])
    with precision(300):
        step = hertz * 2.0**-30
        ratio = dense_balls(netlist, ask, hertz + step) / dense_balls(netlist, ask, hertz - step)
        expected = -float(ratio.arg()) / (2 * pi * 2 * step)
    assert found.group_delay_s[0] == pytest.approx(expected, rel=1e-9)


def test_matched_line_only_delays():
    """A lossless line between its own impedance halves the voltage and delays it, exactly."""
    line = part("W1", "line", "a", "b", "gnd", "gnd", z0=75, delay=Fraction(3, 2 * 10**6))
    netlist = network(R("R1", "in", "a", 75), line, R("R2", "b", "gnd", 75))
    found = sweep(netlist, from_to(netlist, "in", "b"), np.geomspace(1, 1e8, 50))
    assert found.settled
    assert np.abs(found.value) == pytest.approx(np.full(50, 0.5), rel=1e-12)
    assert found.group_delay_s == pytest.approx(np.full(50, 1.5e-6), rel=1e-9)
    assert found.phase_deg == pytest.approx(-360 * found.hertz * 1.5e-6, rel=1e-9)


def test_constant_phase_part_starts_at_its_own_angle():
    """The impedance 1/(Q·s^n) has phase -90·n degrees at every frequency, 0 Hz included."""
    item = part(
        "X1", "constant_phase", "a", "gnd", coefficient=Fraction(1, 1000), exponent=Fraction(1, 2)
    )
    netlist = network(item)
    found = sweep(netlist, impedance_ask(netlist, ("a", "gnd")), [0.0, 1.0, 1e4])
    assert found.phase_deg == pytest.approx([-45, -45, -45], abs=1e-9)
    assert found.status[0] == Status.POLE


def test_own_sources_act_as_phasors():
    """Two sources of the file superpose with their amplitudes and angles."""
    first = part("V1", "voltage_source", "gnd", "a", amplitude=2, angle=90)
    second = part("V2", "voltage_source", "gnd", "b", amplitude=3, angle=60)
    netlist = network(first, second, R("R1", "a", "out", 50), R("R2", "b", "out", 50))
    ask = transfer_ask(netlist, None, ("out", "gnd"))
    expected = (2j + 3 * np.exp(1j * pi / 3)) / 2
    assert response(netlist, ask, [0.0, 50.0]) == pytest.approx([expected] * 2, rel=1e-14)


def test_drive_replaces_the_source_across_it():
    """A source across the driven pair is replaced, another one is set to zero."""
    netlist = network(
        part("V1", "voltage_source", "gnd", "in", amplitude=5),
        R("R1", "in", "out", 30),
        part("I1", "current_source", "gnd", "out", amplitude=7),
        R("R2", "out", "gnd", 10),
    )
    assert response(netlist, from_to(netlist, "in", "out"), 1.0) == pytest.approx(0.25)


def test_zero_ohm_is_a_short():
    """A resistor of zero ohm is a legal short."""
    netlist = network(R("R1", "in", "out", 0), R("R2", "out", "gnd", 10))
    assert response(netlist, from_to(netlist, "in", "out"), [0.0, 1e3]).tolist() == [1, 1]


def test_current_ratio_of_a_divider():
    """A current divides between two resistors in inverse ratio."""
    netlist = network(R("R1", "a", "gnd", 10), R("R2", "a", "b", 30))
    ask = transfer_ask(netlist, ("a", "gnd"), ("b", "gnd"), quantity="current-ratio")
    assert response(netlist, ask, 50.0) == pytest.approx(0.25, rel=1e-15)


def test_shape_and_order_are_kept():
    """Frequencies come in any shape and order, and so do the answers."""
    hertz = np.array([[1e3, 10.0], [1e5, 1e3]])
    found = sweep(LOW_PASS, from_to(LOW_PASS, "in", "out"), hertz)
    assert found.value.shape == found.phase_deg.shape == found.status.shape == (2, 2)
    assert found.value == pytest.approx(1 / (1 + 2j * pi * hertz * TAU), rel=1e-14)
    assert np.array_equal(found.hertz, hertz)
    with pytest.raises(ValueError, match="read-only"):
        found.value[0, 0] = 0


def test_a_network_without_an_answer_is_refused():
    """Ideal op-amps without feedback leave unknowns that nothing determines."""
    amplifier = part("U1", "opamp", "gnd", "gnd", "out", "gnd")
    netlist = network(R("R1", "in", "gnd", 10), amplifier, R("R2", "out", "gnd", 10))
    with pytest.raises(EquationError) as caught:
        sweep(netlist, from_to(netlist, "in", "out"), [1.0])
    assert caught.value.code == "equations.singular"


def test_symbols_are_refused():
    """A sweep needs numbers and says which one is missing."""
    netlist = network(R("R1", "in", "out"), C("C1", "out", "gnd", FARAD))
    with pytest.raises(EquationError) as caught:
        sweep(netlist, from_to(netlist, "in", "out"), [1.0])
    assert caught.value.code == "question.no-value"
    assert "R1" in caught.value.message


@pytest.mark.parametrize("hertz", [[-1.0], [np.nan], [np.inf, 1.0]])
def test_frequencies_are_checked(hertz):
    """Negative and non-finite frequencies are refused."""
    with pytest.raises(AnalysisError) as caught:
        sweep(LOW_PASS, from_to(LOW_PASS, "in", "out"), hertz)
    assert caught.value.code == "sweep.band"


def test_no_frequency_is_no_answer():
    """An empty set of frequencies gives empty arrays."""
    assert sweep(LOW_PASS, from_to(LOW_PASS, "in", "out"), []).value.shape == (0,)


def test_balanced_bridge_is_zero():
    """A balanced bridge passes exactly nothing, at every frequency."""
    netlist = network(
        *(R("R1", "in", "a", 100), R("R2", "a", "gnd", 300)),
        *(R("R3", "in", "b", 10), R("R4", "b", "gnd", 30), C("C1", "a", "b", FARAD)),
    )
    found = sweep(netlist, transfer_ask(netlist, ("in", "gnd"), ("a", "b")), [0.0, 1.0, 1e3, 1e6])
    assert found.value.tolist() == [0, 0, 0, 0]
    assert set(found.status.tolist()) == {Status.ZERO}


def test_quick_values_are_the_checked_ones():
    """The unchecked path gives the same numbers, beyond a double's range too."""
    netlist = ladder(60)
    hertz = np.geomspace(1e2, 1e13, 200)
    solver = solver_for(netlist, from_to(netlist, "n[0]", "n[60]"), hertz)
    checked = solver.solve(hertz).value()
    assert (checked == 0).any()
    assert np.abs(solver.quick(hertz) - checked).max() <= 1e-12
    assert solver.quick(hertz) == pytest.approx(checked, rel=1e-11)


def test_impedance_scaling_changes_no_ratio():
    """All R times k and all C over k leave a voltage ratio as it is."""
    scaled = ladder(7, 47000, Fraction(1, 47 * 10**9))
    hertz = np.geomspace(1e2, 1e6, 20)
    one, other = (response(net, from_to(net, "n[0]", "n[7]"), hertz) for net in (ladder(7), scaled))
    assert one == pytest.approx(other, rel=1e-12)


def test_many_exact_zeros_cost_little():
    """An output that nothing reaches is zero without a search at each of many points."""
    netlist = network(
        *(R("R1", "in", "a", 1), R("R2", "a", "gnd", 2), R("R3", "in", "b", 3)),
        *(R("R4", "b", "gnd", 6), L("L1", "a", "gnd", 1), L("L2", "b", "gnd", 3)),
    )
    found = sweep(
        netlist, transfer_ask(netlist, ("in", "gnd"), ("a", "b")), np.geomspace(1, 1e3, 5000)
    )
    assert not found.value.any()


def test_values_may_hold_pi():
    """A value written in pi puts the corner where it was meant."""
    farad = divide(number(1), multiply(multiply(number(2000), PI), number(1000)))
    netlist = network(R("R1", "in", "out", 1000), C("C1", "out", "gnd", farad))
    found = sweep(netlist, from_to(netlist, "in", "out"), [1000.0])
    assert found.phase_deg[0] == pytest.approx(-45, rel=1e-14)
    assert isinstance(netlist.parts[1].values["value"], Value)
