"""Stability: exact verdicts for numbers, Hurwitz conditions for symbols, hidden modes counted."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy import Symbol, sympify

import acsolve
from acsolve.analyses.hidden import characteristic, hidden
from acsolve.analyses.stability import Stability, stability
from tests.strategies import PASSIVE, connected, positives

from .test_transfer_laws import asked, drawn_pairs, solved


def found(text: str, **numbers: str) -> Stability:
    """The stability behind the response from `in` to `out`."""
    answer = stability(acsolve.parse(text).with_values(numbers).path("in", "out").closed_form())
    assert answer is not None
    return answer


SALLEN_KEY = """
in -- R1 -- a -- R2 -- p
a -- C1 -- out
p -- C2 -- gnd
A1 : opamp(plus = p, minus = m, out = out)
out -- R3 -- m
m -- R4 -- gnd
"""


def test_a_gain_of_too_much_is_a_condition():
    """A positive-feedback section of equal parts is stable below a gain of three."""
    answer = found(SALLEN_KEY)
    assert answer.verdict == "conditional"
    (condition,) = answer.conditions
    left = sympify(condition.removesuffix(" > 0"), locals={"C1": Symbol("C1")})
    values = {"R1": 1, "R2": 1, "C1": 1, "C2": 1, "R4": 1}
    assert left.subs({**values, "R3": Fraction(19, 10)}) > 0
    assert left.subs({**values, "R3": 2}) == 0
    assert left.subs({**values, "R3": Fraction(21, 10)}) < 0


EQUAL = {"R1": "1 kohm", "R2": "1 kohm", "C1": "1 uF", "C2": "1 uF", "R4": "1 kohm"}


@pytest.mark.parametrize(
    ("feedback", "verdict", "planes"),
    [
        ("1.9 kohm", "stable", (2, 0, 0)),
        ("2 kohm", "marginal", (0, 2, 0)),
        ("2.1 kohm", "unstable", (0, 0, 2)),
    ],
)
def test_numbers_give_a_verdict(feedback, verdict, planes):
    """The same section with numbers: at a gain of exactly three it neither decays nor grows."""
    answer = found(SALLEN_KEY, R3=feedback, **EQUAL)
    assert answer.verdict == verdict
    assert answer.planes is not None
    assert (answer.planes.left, answer.planes.axis, answer.planes.right) == planes


def test_a_third_order_ring_oscillates_at_a_gain_of_eight():
    """Three equal buffered sections in a loop of gain -A: stable below 8, unstable above."""
    text = """
    in -- R0 -- out
    A1 : voltage_amplifier(plus = gnd, minus = out, out = e, ref = gnd, gain = A)
    e -- R1 -- a
    a -- C1 -- gnd
    A2 : voltage_amplifier(plus = a, minus = gnd, out = f, ref = gnd, gain = 1)
    f -- R2 -- b
    b -- C2 -- gnd
    A3 : voltage_amplifier(plus = b, minus = gnd, out = g, ref = gnd, gain = 1)
    g -- R3 -- out
    out -- C3 -- gnd
    let A
    """
    answer = found(text)
    assert answer.verdict == "conditional"
    equal = dict.fromkeys(("R1", "R2", "R3", "C1", "C2", "C3"), 1) | {"R0": 10**9}
    for gain, expected in ((Fraction(79, 10), True), (Fraction(81, 10), False)):
        values = {**equal, "A": gain}
        holds = [
            bool(sympify(text.removesuffix(" > 0")).subs(values) > 0) for text in answer.conditions
        ]
        assert all(holds) == expected


@pytest.mark.parametrize(
    ("text", "verdict"),
    [
        ("in -- R1 -- out -- C1 -- gnd", "stable"),
        ("in -- R1 -- a -- L1 -- out -- C1 -- gnd", "stable"),
        ("in -- L1 -- out -- C1 -- gnd", "marginal"),
        (
            "in -- R1 -- a -- R2 -- b -- R3 -- out\na -- C1 -- gnd\nb -- C2 -- gnd\nout -- C3 -- gnd",
            "stable",
        ),
        (
            "in -- R1 -- a -- L1 -- b -- L2 -- out -- R2 -- gnd\n"
            "a -- C1 -- gnd\nb -- C2 -- gnd\nout -- C3 -- gnd",
            "undecided",
        ),
    ],
)
def test_passive_networks_need_no_condition(text, verdict):
    """What holds for all positive parts is recognised: no condition is left."""
    answer = found(text)
    assert answer.conditions == ()
    assert answer.verdict == verdict
    if verdict == "undecided":
        assert answer.order == 5
        assert answer.reason is not None
        assert "passive" in answer.reason


@settings(max_examples=30)
@given(st.data())
def test_passive_numbers_never_grow(data):
    """Random networks of positive R, L and C have no mode on the right, by exact count."""
    netlist = data.draw(connected(tree=PASSIVE))
    source, target = drawn_pairs(data, netlist)
    form = solved(netlist, asked(netlist, source, target, "voltage-ratio"))
    answer = None if form is None else stability(form)
    if answer is None:
        return
    assert answer.planes is not None
    assert answer.planes.right == 0
    assert answer.verdict in ("stable", "marginal")


@settings(max_examples=20)
@given(st.tuples(positives, positives, positives, positives))
def test_the_conditions_agree_with_the_count(values):
    """At random parts the written condition decides as the exact count of half planes does."""
    r1, r3, c1, c2 = values
    numbers = {"R1": r1, "R2": Fraction(2), "R3": r3, "R4": Fraction(3), "C1": c1, "C2": c2}
    symbolic = found(SALLEN_KEY)
    holds = all(
        sympify(text.removesuffix(" > 0")).subs(numbers) > 0 for text in symbolic.conditions
    )
    circuit = acsolve.parse(SALLEN_KEY).with_values(dict(numbers))
    numeric = stability(circuit.path("in", "out").closed_form())
    assert numeric is not None
    assert holds == (numeric.verdict == "stable")


def test_what_cancels_still_counts():
    """A growing mode beside the path is hidden from the answer and makes the network unstable."""
    text = (
        "in -- R1 -- out -- C1 -- gnd\nin -- R2 -- x -- C2 -- gnd\nR1 = 1 ohm\nC1 = 1 F\nC2 = 1 F"
    )
    circuit = acsolve.parse(text).with_values(R2=-2)
    form = circuit.path("in", "out").closed_form()
    answer = stability(form)
    assert answer is not None
    assert (answer.verdict, answer.order) == ("unstable", 2)
    common = hidden(form)
    assert common is not None
    assert [int(value) for value in common.numbers()[0]] in ([1, -2], [-1, 2])


def test_the_characteristic_polynomial_is_denominator_times_hidden():
    """Exactly, up to a factor without s."""
    text = "in -- R1 -- a -- L1 -- out -- C1 -- gnd\nin -- R2 -- x -- C2 -- gnd"
    form = acsolve.parse(text).path("in", "out").closed_form()
    whole, common = characteristic(form), hidden(form)
    assert whole is not None
    assert common is not None
    product = form.denominator * common.numerator
    assert whole.numerator * product.coeffs()[0] == product * whole.numerator.coeffs()[0]


def test_equal_lossless_tanks_are_not_called_growing():
    """Two equal tanks share a double mode on the axis, and neither grows."""
    text = """
    in -- R1 -- out -- C1 -- gnd
    in -- L2 -- x -- C2 -- gnd
    in -- L3 -- y -- C3 -- gnd
    R1 = 1 ohm
    C1 = 1 F
    L2 = 1 H
    C2 = 1 F
    L3 = 1 H
    C3 = 1 F
    """
    answer = found(text)
    assert answer.verdict == "marginal"
    assert answer.planes is not None
    assert (answer.planes.axis, answer.planes.deepest) == (4, 2)


def test_irrational_values_are_judged_in_balls():
    """Parts with pi: the verdict is certain and says how it was found."""
    answer = found(
        "in -- R1 -- a -- L1 -- out -- C1 -- gnd\nR1 = 3 ohm * pi\nL1 = 1 mH\nC1 = 2 uF / pi"
    )
    assert answer.verdict == "stable"
    assert "enclosed" in answer.method
