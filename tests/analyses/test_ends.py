"""The gain at 0 Hz and towards infinite frequency: against values close by."""

from __future__ import annotations

from fractions import Fraction
from math import sqrt

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.algebra.ball import precision
from acsolve.analyses.ends import at_infinity, at_zero
from acsolve.equations.evaluate import BallArithmetic
from tests.strategies import R, connected, network, part, positives

from .test_transfer_laws import form_of, gnd

DIVIDER = "in -- R1 -- out -- Z1 -- gnd\nR1 = 1 kohm\nZ1 : impedance({})"
Q = "sqrt(s*1 ms)"
TANH = f"(exp({Q}) - exp(-{Q}))/(exp({Q}) + exp(-{Q}))"
CASES = [
    (f"1 kohm/{Q}*{TANH}", "value", 0.5, "unknown"),
    (f"1 kohm*{Q}*{TANH}", "zero", 0.0, "unknown"),
    (f"1 kohm/({Q}*{TANH})", "value", 1.0, "unknown"),
    ("1 kohm/sqrt(s*1 ms)", "value", 1.0, "zero"),
    ("1 kohm*sqrt(s*1 ms)", "zero", 0.0, "value"),
    ("1 kohm*(1 + exp(-s*1 ms))", "value", 2 / 3, "none"),
    ("1 kohm*(3 + exp(-sqrt(s*1 ms)))", "value", 4 / 5, "value"),
    ("1 kohm*(1 - exp(-s*1 ms))/(s*1 ms)", "value", 0.5, "zero"),
    ("1 kohm*(1 - exp(-s*1 ms))", "zero", 0.0, "none"),
    ("1 kohm*sqrt(1 + s*1 ms)", "value", 0.5, "unknown"),
    ("1 kohm*exp(-s*1 ms)*exp(-sqrt(s*1 ms))", "value", 0.5, "zero"),
]


@pytest.mark.parametrize(("value", "low", "gain", "high"), CASES)
def test_ends_of_dividers(value, low, gain, high):
    """What is known by hand; a removable 0/0 at 0 Hz has its limit."""
    form = acsolve.parse(DIVIDER.format(value)).path("in", "out").closed_form()
    found = at_zero(form)
    assert found.kind == low
    if found.squared is not None:
        with precision(128):
            assert sqrt(float(found.squared())) == pytest.approx(gain, rel=1e-15)
    assert at_infinity(form).kind == high


@settings(max_examples=60)
@given(st.data())
def test_ends_of_random_networks(data):
    """R, L, C and constant-phase parts: near both ends the gain is what is said of them."""
    from flint import acb

    netlist = data.draw(connected(most_nodes=4, most_extra=3))
    parts = list(netlist.parts)
    for at in range(data.draw(st.integers(0, 2))):
        exponent = data.draw(st.sampled_from([Fraction(1, 2), Fraction(2, 3), Fraction(13, 20)]))
        values = {"coefficient": data.draw(positives), "exponent": exponent}
        node = data.draw(st.sampled_from(netlist.nodes()[1:]))
        parts.append(part(f"Q{at}", "constant_phase", node, "gnd", **values))
    parts.append(R("Rs", "in", "drive", data.draw(positives)))
    target = gnd(data.draw(st.sampled_from(netlist.nodes()[1:])))
    form = form_of(network(*parts, couplings=netlist.couplings), gnd("drive"), target)
    assume(form is not None)
    with precision(2000):
        arithmetic = BallArithmetic()
        for end, omega in ((at_zero(form), acb(2) ** -800), (at_infinity(form), acb(2) ** 800)):
            near = abs(form.at(acb(0, 1) * omega, form.evaluator(arithmetic), arithmetic))
            if end.kind == "value":
                assert end.squared is not None
                assert float(abs(near**2 / end.squared() - 1).abs_upper()) < 1e-60
            else:
                assert end.kind in ("zero", "infinite")
                assert (near < 1e-60) if end.kind == "zero" else (near > 1e60)
