"""Values that put a cutoff where it is wanted: put back, compared with a search, or refused."""

from __future__ import annotations

from fractions import Fraction
from math import isclose, log10, pi, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy import Symbol
from sympy.parsing.sympy_parser import parse_expr

import acsolve

RC = "in -- R1 -- out -- C1 -- gnd"
RESONANCE = "in -- C1 -- a -- L1 -- out -- R1 -- gnd"
RLC = "in -- R1 -- a -- L1 -- out -- C1 -- gnd"
TWO = "in -- R1 -- a -- R2 -- out\na -- C1 -- gnd\nout -- C2 -- gnd"
LADDER = "in -- R1 -- a -- L1 -- out\na -- C1 -- gnd\nout -- C2 -- gnd\nout -- R2 -- gnd"

values = st.builds(Fraction, st.integers(1, 30), st.integers(1, 7))


def path(text: str, **numbers):
    """From `in` to `out`."""
    return acsolve.parse(text).with_values(numbers).path("in", "out")


def read(text: str, numbers) -> complex:
    """What SymPy's parser makes of a closed form."""
    found = parse_expr(text, local_dict={name: Symbol(name) for name in numbers})
    return complex(found.subs(numbers).evalf(30))


def test_the_resistor_of_a_single_section():
    """R = 1/(w·C) at half power, sqrt(10^(3/5) - 1)/(w·C) at -6 dB."""
    assert path(RC).value_for("R1", cutoff="1 kHz").values[0].closed_form == "1/(w*C1)"
    (item,) = path(RC, C1="1 uF").value_for("R1", cutoff=1000).values
    assert item.value == pytest.approx(1e6 / (2000 * pi), rel=1e-15)
    (item,) = path(RC).value_for("R1", cutoff="1 kHz", level=-6).values
    assert item.condition is None
    number = read(item.closed_form, {"w": 3, "C1": 5})
    assert number == pytest.approx(sqrt(10**0.6 - 1) / 15, rel=1e-14)


@settings(max_examples=40)
@given(
    st.sampled_from([RC, RESONANCE, RLC, TWO, LADDER]),
    st.tuples(values, values, values, values, values),
    st.sampled_from([None, -6, -10, -1]),
    st.data(),
)
def test_every_value_and_no_other_puts_the_cutoff_there(text, drawn, level, data):
    """Each value gives a cutoff (or touch) at the frequency; a scan of values finds no more."""
    circuit = acsolve.parse(text)
    numbers = dict(zip(circuit.parts, drawn, strict=False))
    name = data.draw(st.sampled_from(list(numbers)))
    asked = circuit.with_values(numbers).path("in", "out")
    hertz = float(data.draw(values)) / 20
    answer = asked.value_for(name, cutoff=hertz, level=level)
    assert answer.complete
    for item in answer.values:
        again = circuit.with_values({**numbers, name: item.value}).path("in", "out")
        found = again.cutoffs(level, reference=answer.reference)
        places = [each.hertz for each in (*found.cutoffs, *found.touches)]
        assert any(isclose(place, hertz, rel_tol=1e-6) for place in places)
        assert item.gain_error < 1e-9
        if item.closed_form is not None:
            table = {**numbers, "w": 2 * pi * hertz}
            assert isclose(read(item.closed_form, table).real, item.value, rel_tol=1e-6)
    near = [item.value for item in answer.values]
    for value in scan(asked, name, hertz, answer):
        assert any(abs(log10(value / each)) < 0.011 for each in near), (value, near)


def scan(asked, name, hertz, answer) -> list[float]:
    """Where the gain at the frequency crosses the level, over a grid of values."""
    grid = np.logspace(-4, 4, 801)
    gain = np.abs(asked.response([hertz, 0.0], values={name: grid}))
    counted = gain[:, 1] if answer.reference == "dc" else 1.0  # a series resonance peaks at 1
    signs = np.sign(gain[:, 0] - counted * 10 ** (answer.level_db / 20))
    places = np.flatnonzero(signs[1:] * signs[:-1] < 0)
    return [float(sqrt(grid[place] * grid[place + 1])) for place in places]


def test_two_values_of_one_coil():
    """A coil makes either edge of a resonance: 1/(w²·C) minus or plus R/w, the first where > 0."""
    first, second = path(RESONANCE).value_for("L1", cutoff="100 Hz").values
    assert first.closed_form == "1/(w**2*C1) - R1/w"
    assert second.closed_form == "1/(w**2*C1) + R1/w"
    assert first.condition == "1/(w**2*C1) - R1/w > 0"


def test_higher_degrees_on_request():
    """The resistor of three equal sections solves a cubic in its square: only when asked for."""
    circuit = acsolve.parse(
        "in -- R1 -- a -- R2 -- b -- R3 -- out\na -- C1 -- gnd\nb -- C2 -- gnd\nout -- C3 -- gnd\n"
        "let R = 1 kohm\nR1 = R\nR2 = R\nR3 = R\nC1 = 1 uF\nC2 = 1 uF\nC3 = 1 uF"
    )
    asked = circuit.path("in", "out")
    (plain,) = asked.value_for("R", cutoff="100 Hz").values
    assert plain.closed_form is None
    (item,) = asked.value_for("R", cutoff="100 Hz", degree=3).values
    assert item.value == plain.value
    table = {"w": 200 * pi, "C1": 1e-6, "C2": 1e-6, "C3": 1e-6}
    assert read(item.closed_form, table).real == pytest.approx(item.value, rel=1e-9)
    found = circuit.with_values(R=item.value).path("in", "out").cutoffs()
    assert [each.hertz for each in found.cutoffs] == pytest.approx([100.0], rel=1e-13)


def test_impossible_is_said():
    """No resistor loads two sections so lightly that they still pass 5 kHz."""
    answer = path(TWO, R1="1 kohm", R2="1 kohm", C1="1 uF", C2="1 uF").value_for("R2", cutoff=5e3)
    assert answer.values == ()
    assert answer.complete
    assert "No positive value of R2" in answer.remarks[0]


@pytest.mark.parametrize(
    ("name", "more", "code"),
    [
        ("R7", {}, "question.unknown-name"),
        ("R9", {}, "option.value"),
        ("R1", {"cutoff": 0}, "sweep.band"),
        ("R1", {"cutoff": "1 kHz, 2 kHz"}, "sweep.band"),
        ("R1", {"degree": 5}, "option.value"),
        ("R1", {"reference": "infinity"}, "question.no-reference"),
    ],
)
def test_what_cannot_be_answered_is_refused(name, more, code):
    """Unknown parts, parts without influence, no frequency, no reference."""
    asked = path(RC + "\nin -- R9 -- gnd", R1=1, C1=1, R9=1)
    with pytest.raises(acsolve.AcsolveError) as refused:
        asked.value_for(name, **{"cutoff": 1, **more})
    assert refused.value.code == code


def test_no_value_and_no_closed_form():
    """Where other parts are symbols and the degree is too high, the answer says what to do."""
    text = LADDER.replace("L1 -- out", "L1 -- b -- L2 -- out") + "\nb -- C3 -- gnd"
    circuit = acsolve.parse(text + "\nlet k\nL2 = k * L1\nC3 = C1")
    with pytest.raises(acsolve.AcsolveError) as refused:
        circuit.path("in", "out").value_for("L1", cutoff=1)
    assert refused.value.code == "question.no-value"


def test_values_follow_one_another():
    """A part whose value is made of the wanted one follows it."""
    circuit = acsolve.parse(
        "in -- R1 -- out -- C1 -- gnd\nout -- R2 -- gnd\nR2 = 3 * R1\nC1 = 1 uF"
    )
    (item,) = circuit.path("in", "out").value_for("R1", cutoff="1 kHz").values
    assert item.value == pytest.approx(4 / 3 * 1e6 / (2000 * pi), rel=1e-14)


def test_a_formula_over_many_parts_is_not_squared_out():
    """A bridge with its cables: the symbols' equation would have millions of terms."""
    circuit = acsolve.parse(
        """
        drive -- Rw1 = 6.8 ohm -- top
        bot -- Rw2 = 6.8 ohm -- gnd
        top -- Ra = 349 ohm -- p -- Rb = 351 ohm -- bot
        top -- Rc = 351 ohm -- m -- Rd = 349 ohm -- bot
        p -- Rw3 = 6.8 ohm -- sp
        m -- Rw4 = 6.8 ohm -- sm
        sp -- Cc = 6 nF -- sm
        sp -- Rin = 2 Mohm -- sm
        sp -- Cg1 = 4.7 nF -- gnd
        sm -- Cg2 = 5.1 nF -- gnd
        top -- Cx = 8 nF -- bot
        """
    )
    path = circuit.path("drive", ("sp", "sm"))
    (found,) = path.value_for("Cc", cutoff="100 kHz").values
    assert found.value == pytest.approx(44.893031e-9, rel=1e-6)
    again = circuit.with_values({"Cc": found.value}).path("drive", ("sp", "sm"))
    assert any(item.hertz == pytest.approx(1e5, rel=1e-9) for item in again.cutoffs().cutoffs)
