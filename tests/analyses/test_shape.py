"""Limits and standard forms: what they name is what the closed form does."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from sympy import Symbol, oo
from sympy.parsing.sympy_parser import parse_expr

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.question import impedance_ask
from acsolve.analyses.shape import limit_text, limits, standard_form
from acsolve.analyses.transfer import closed_form, transfer_answer
from acsolve.circuit.netlist import Netlist
from tests.reference.curve import Curve
from tests.strategies import C, L, R, any_lumped, network, part, positives

from .test_transfer_laws import drawn_pairs, form_of, gnd


def response(netlist: Netlist) -> ClosedForm:
    """The closed form from `in` to `out`."""
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    return form


@settings(max_examples=40)
@given(st.data())
def test_limits_are_where_the_response_tends(data):
    """The texts at zero and infinite frequency are the limits of the magnitude, `oo` included."""
    netlist = data.draw(any_lumped(symbols=False))
    source, target = drawn_pairs(data, netlist)
    form = form_of(netlist, source, target)
    assume(form is not None)
    assert form is not None
    curve = Curve(form)
    for limit, expected in zip(limits(form), (curve.at_zero(), curve.at_infinity()), strict=True):
        text = limit_text(limit)
        assert text is not None
        if text == "oo":
            assert expected == curve.mp.inf
        else:
            assert abs(curve.mp.mpf(parse_expr(text).evalf(40)) ** 2 - expected) <= 1e-30 * (
                1 + expected
            )


PARTS = {
    "low-pass": network(R("R1", "in", "out"), C("C1", "out", "gnd")),
    "high-pass": network(C("C1", "in", "out"), R("R1", "out", "gnd")),
    "low-pass 2": network(R("R1", "in", "a"), L("L1", "a", "out"), C("C1", "out", "gnd")),
    "high-pass 2": network(C("C1", "in", "a"), R("R1", "a", "out"), L("L1", "out", "gnd")),
    "band-pass": network(R("R1", "in", "out"), L("L1", "out", "gnd"), C("C1", "out", "gnd")),
    "notch": network(R("R1", "in", "out"), L("L1", "out", "a"), C("C1", "a", "gnd")),
    "all-pass": network(
        R("R1", "in", "minus", 1),
        R("R2", "minus", "out", 1),
        R("R3", "in", "plus"),
        C("C1", "plus", "gnd"),
        part("U1", "opamp", "plus", "minus", "out", "gnd"),
    ),
    "other": network(R("R1", "in", "out"), R("R2", "out", "a"), C("C1", "a", "gnd")),
}


@pytest.mark.parametrize("name", PARTS)
@settings(max_examples=5)
@given(values=st.lists(positives, min_size=3, max_size=3))
def test_standard_forms_rebuild_the_denominator(name, values):
    """1 + s·tau, or 1 + s/(q·w0) + s²/w0², is the denominator up to a factor; k is the gain."""
    form = response(PARTS[name])
    found = standard_form(form)
    assert found is not None
    assert found.shape == name.removesuffix(" 2")
    table = {
        form.spelled(safe=True).name(item): value
        for item, value in zip(form.symbols, values, strict=False)
    }

    def number(text: str):
        return (
            parse_expr(text, local_dict={item: Symbol(item) for item in table})
            .subs(table)
            .evalf(30)
        )

    s = Symbol("s")
    top, bottom = form.as_sympy().as_numer_denom()
    ratio = (top / bottom).subs(
        {Symbol(item, positive=True): value for item, value in table.items()}
    )
    if found.order == 1:
        monic = 1 + s * number(found.parts["tau"])
        assert abs(number(found.parts["tau"]) * number(found.parts["w0"]) - 1) < 1e-25
    else:
        w0 = number(found.parts["w0"])
        q = oo if found.parts["q"] == "oo" else number(found.parts["q"])
        monic = 1 + s / (q * w0) + s**2 / w0**2
    product = [(ratio * monic).subs(s, point).evalf(30) for point in (Fraction(1, 3), 2, 5)]
    k = number(found.parts["k"])
    w0 = number(found.parts["w0"])
    expected = {
        "low-pass": lambda _: k,
        "high-pass": lambda s: k * (s / w0) ** found.order,
        "band-pass": lambda s: k * s / (q * w0),
        "notch": lambda s: k * (1 + s**2 / w0**2),
        "all-pass": lambda s: k * (1 - s / w0),
    }.get(found.shape)
    if expected is not None:
        for value, point in zip(product, (Fraction(1, 3), 2, 5), strict=True):
            assert abs(value - expected(point)) < 1e-20


def test_a_lossless_resonance_has_infinite_quality_and_gain():
    """A tank without losses: q is `oo`, and no part is a division by zero."""
    netlist = network(L("L1", "in", "gnd"), C("C1", "in", "gnd"))
    form = closed_form(netlist, impedance_ask(netlist, gnd("in")))
    found = standard_form(form)
    assert found is not None
    assert found.shape == "band-pass"
    assert found.parts["q"] == "oo"
    assert found.parts.get("k", "oo") == "oo"
    assert not any("/0" in text for text in found.parts.values())


def test_order_counts_the_higher_degree():
    """The order is the degree of the denominator, or of the numerator where that is larger."""
    netlist = network(R("R1", "in", "a"), L("L1", "a", "gnd"))
    form = closed_form(netlist, impedance_ask(netlist, gnd("in")))
    answer = transfer_answer(form)
    assert answer.order == 1
    assert (limit_text(answer.at_zero), limit_text(answer.at_infinity)) == ("R1", "oo")


def test_a_response_that_is_zero_has_zero_limits():
    """No response at all tends to zero at both ends and has no standard form."""
    netlist = network(R("R1", "in", "gnd", 1), R("R2", "out", "gnd", 1))
    form = response(netlist)
    assert [limit_text(item) for item in limits(form)] == ["0", "0"]
    assert standard_form(form) is None
