"""Poles and zeros one by one: closed forms, digits, multiplicities, and estimates beyond."""

from __future__ import annotations

from decimal import Decimal, localcontext
from fractions import Fraction
from math import isclose, sqrt

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy import Poly, Symbol, sympify
from sympy.parsing.sympy_parser import parse_expr

import acsolve
from acsolve.analyses.estimated_roots import estimated_tables
from acsolve.analyses.pole_record import pole_answer
from acsolve.analyses.poles import poles_zeros
from acsolve.analyses.transfer import closed_form
from tests.strategies import any_lumped

from .test_poles import drawn_form

RLC = "in -- R1 -- a -- L1 -- out -- C1 -- gnd"
s = Symbol("s")


def read(text: str, **numbers) -> complex:
    """What SymPy's parser makes of a text."""
    return complex(
        parse_expr(text, local_dict={n: Symbol(n) for n in numbers}).subs(numbers).evalf(25)
    )


@settings(max_examples=40)
@given(st.data())
def test_records_are_the_poles_and_zeros(data):
    """Random networks: the same roots as the plain list, closed forms that evaluate to them."""
    form = drawn_form(data, data.draw(any_lumped(symbols=False)))
    plain, found = poles_zeros(form), pole_answer(form)
    for table, roots in ((found.poles, plain.poles), (found.zeros, plain.zeros)):
        listed = [item.value for item in table.roots for _ in range(item.multiplicity)]
        assert sorted(listed, key=str) == sorted(roots, key=str)
        assert sum(item.degree * item.multiplicity for item in table.factors) == len(roots)
        for item in table.roots:
            if item.closed_form is not None:
                assert abs(read(item.closed_form) - item.value) <= 1e-13 * abs(item.value)
            if item.w0_form is not None:
                assert isclose(read(item.w0_form).real, item.w0, rel_tol=1e-13)


@settings(max_examples=25)
@given(st.data())
def test_factors_multiply_to_the_polynomial(data):
    """Exactly, over the rationals, and none of them splits further."""
    form = drawn_form(data, data.draw(any_lumped(symbols=False)))
    found = pole_answer(form)
    for table, whole in zip((found.zeros, found.poles), form.coefficients(), strict=True):
        numbers = form.numbers()
        if numbers is None:
            return
        product = Poly(1, s)
        for item in table.factors:
            product *= Poly(sympify(item.text), s) ** item.multiplicity
            if item.degree > 0:
                assert Poly(sympify(item.text), s).is_irreducible
        side = numbers[0] if table is found.zeros else numbers[1]
        assert product.all_coeffs() == [int(value) for value in reversed(side)]
        assert len(whole) == len(side)


def test_symbols_have_closed_forms():
    """A second-order section: both poles, natural frequency and Q over the parts."""
    found = acsolve.parse(RLC).path("in", "out").poles()
    first, second = found.poles.roots
    assert (first.w0_form, first.q_form) == ("1/sqrt(L1*C1)", "sqrt(L1/C1)/R1")
    table = {"R1": 1, "L1": 2, "C1": 3}
    values = {read(item.closed_form, **table) for item in (first, second)}
    for value in values:
        assert abs(1 + 3 * value + 6 * value**2) < 1e-12
    assert len(values) == 2
    assert found.zeros.roots == ()
    assert found.stability.verdict == "stable"


def test_what_factors_over_symbols_is_solved_factor_by_factor():
    """Two buffered sections of any order up to two each: four poles in closed form."""
    text = (
        RLC
        + "\nA1 : voltage_amplifier(plus = out, minus = gnd, out = b, ref = gnd, gain = 1)"
        + "\nb -- R2 -- c -- L2 -- d -- C2 -- gnd"
    )
    found = acsolve.parse(text).path("in", "d").poles()
    assert [item.degree for item in found.poles.factors] == [2, 2]
    assert len(found.poles.roots) == 4
    assert all(item.closed_form for item in found.poles.roots)
    equal = acsolve.parse(text).with_values(R1=1, L1=2, C1=3, R2=1, L2=2, C2=3)
    twice = equal.path("in", "d").poles()
    assert [item.multiplicity for item in twice.poles.roots] == [2, 2]


def test_digits_are_certified():
    """Forty digits of sqrt(2)/2 and of a damping, each within one unit of the last."""
    found = acsolve.parse(RLC).with_values(R1=1, L1=1, C1=2).path("in", "out").poles(digits=40)
    lower, upper = found.poles.roots
    assert upper.digits is not None
    assert lower.digits == (upper.digits[0], f"-{upper.digits[1]}")
    with localcontext() as context:
        context.prec = 60
        assert abs(Decimal(upper.digits[0]) + Decimal("0.5")) <= Decimal(10) ** -40
        assert abs(Decimal(upper.digits[1]) - Decimal("0.5")) <= Decimal(10) ** -40
    cubic = acsolve.parse(
        "in -- R1 -- a -- L1 -- out\na -- C1 -- gnd\nout -- C2 -- gnd\nout -- R2 -- gnd"
    ).with_values(R1=1, L1=3, C1=2, C2=5, R2=7)
    form = cubic.path("in", "out").closed_form()
    bottom = form.numbers()[1]
    with localcontext() as context:
        context.prec = 150
        for item in pole_answer(form, digits=100).poles.roots:
            if item.value.imag == 0:
                root = Decimal(item.digits[0])
                value = sum(Decimal(int(c)) * root**k for k, c in enumerate(bottom))
                slope = sum(
                    k * Decimal(int(c)) * root ** (k - 1) for k, c in enumerate(bottom) if k
                )
                assert abs(value / slope) <= Decimal(10) ** -100 * abs(root) * 10


@pytest.mark.parametrize("digits", [0, 1001, True, "30"])
def test_no_number_of_digits(digits):
    """A number of digits is a whole one from 1 to 1,000."""
    with pytest.raises(acsolve.AcsolveError) as refused:
        acsolve.parse(RLC).with_values(R1=1, L1=1, C1=2).path("in", "out").poles(digits=digits)
    assert refused.value.code == "option.value"


def test_frequency_and_damping():
    """w0 = 1/sqrt(LC), damping R/2·sqrt(C/L), Q its half inverse, time constant 2L/R."""
    found = acsolve.parse(RLC).with_values(R1=3, L1=2, C1=Fraction(1, 5)).path("in", "out").poles()
    item = found.poles.roots[1]
    assert isclose(item.w0, sqrt(2.5), rel_tol=1e-15)
    assert isclose(item.damping, 1.5 * sqrt(0.1), rel_tol=1e-15)
    assert isclose(item.q * 2 * item.damping, 1, rel_tol=1e-15)
    assert isclose(item.tau, 4 / 3, rel_tol=1e-15)


def test_hidden_modes_are_listed():
    """A section beside the path, and a pole that a zero cancels exactly."""
    text = "in -- R1 -- out -- C1 -- gnd\nin -- R2 -- x -- C2 -- gnd"
    found = acsolve.parse(text).with_values(R1=1, C1=1, R2=2, C2=3).path("in", "out").poles()
    (mode,) = found.hidden.roots
    assert mode.closed_form == "-1/6"
    divider = "in -- R1 -- out -- R2 -- gnd\nin -- C1 -- out -- C2 -- gnd"
    matched = acsolve.parse(divider).with_values(R1=1, C1=6, R2=2, C2=3).path("in", "out").poles()
    assert matched.poles.roots == ()
    (mode,) = matched.hidden.roots
    assert mode.value == complex(Fraction(-1, 6))
    other = acsolve.parse(divider).with_values(R1=1, C1=6, R2=2, C2=4).path("in", "out").poles()
    assert other.hidden.roots == ()
    assert len(other.poles.roots) == 1


def ladder(sections: int):
    """Lossy LC sections, from `in` to the far end."""
    lines, node = [], "in"
    for k in range(sections):
        lines += [
            f"{node} -- R{k} -- m{k} -- L{k} -- n{k} -- C{k} -- gnd",
            f"R{k} = {1 + k % 3} ohm",
        ]
        lines += [f"L{k} = {2 + k % 2} mH", f"C{k} = {1 + k % 2} uF"]
        node = f"n{k}"
    return acsolve.parse("\n".join(lines)).path("in", node)


def test_estimates_know_their_error():
    """Eigenvalues of a ladder of order 80: all there, within a few estimated errors."""
    path = ladder(40)
    exact = poles_zeros(closed_form(path.circuit.netlist, path.ask)).poles
    poles, zeros = estimated_tables(path.circuit.netlist, path.ask)
    assert zeros.roots == ()
    assert not poles.certified
    values = np.array([item.value for item in poles.roots])
    errors = np.array([item.error for item in poles.roots])
    apart = np.abs(values[:, None] - np.array(exact)[None, :])
    assert sorted(apart.argmin(axis=1)) == list(range(80))
    assert (apart.min(axis=1) <= 5 * errors).all()
    assert (errors < 1e-9 * np.abs(values)).all()


def test_beyond_certification_the_answer_says_so():
    """An order of 200: eigenvalues, not certified; stability is still exact."""
    found = ladder(100).poles()
    assert len(found.poles.roots) == 200
    assert not found.poles.certified
    assert found.stability.planes.left == 200
    assert found.stability.verdict == "stable"
