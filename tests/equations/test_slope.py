"""The derivative by s against a difference quotient at 50 digits."""

from __future__ import annotations

from fractions import Fraction

import mpmath
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.circuit.expression import (
    PI,
    Call,
    Expression,
    Frequency,
    Name,
    Number,
    Pi,
    Power,
    Product,
    Quotient,
    S,
    Sum,
    number,
)
from acsolve.equations.slope import slope


def value(expression: Expression, s):
    """An expression at a complex frequency, R = 5/3."""
    match expression:
        case Number(item):
            return mpmath.mpf(item.numerator) / item.denominator
        case Name():
            return mpmath.mpf(5) / 3
        case Pi():
            return +mpmath.pi
        case Frequency():
            return s
        case Sum(left, right):
            return value(left, s) + value(right, s)
        case Product(left, right):
            return value(left, s) * value(right, s)
        case Quotient(left, right):
            return value(left, s) / value(right, s)
        case Power(base, exponent):
            return mpmath.power(value(base, s), value(exponent, s))
        case Call(function, argument):
            named = {"ln": mpmath.log, "log10": mpmath.log10}
            return named.get(function, getattr(mpmath, function, None))(value(argument, s))
    raise AssertionError(expression)


leaves = st.sampled_from([S, S, Name("R"), PI, number(3), number(Fraction(1, 2))])


def grown(inner):
    """One more operation."""
    return st.one_of(
        st.builds(Sum, inner, inner),
        st.builds(Product, inner, inner),
        st.builds(Quotient, inner, inner),
        st.builds(lambda item: Power(item, number(Fraction(3, 2))), inner),
        st.builds(Power, st.just(Name("R")), inner),
        st.builds(Call, st.sampled_from(["sqrt", "exp", "ln", "log10", "cosh", "sinh"]), inner),
    )


@settings(max_examples=100)
@given(st.recursive(leaves, grown, max_leaves=5))
def test_slopes_are_difference_quotients(expression):
    """The derivative is the symmetric difference quotient to 15 digits, for every operation."""
    derived = slope(expression)
    with mpmath.workdps(80):
        s, step = mpmath.mpc("0.8", "1.1"), mpmath.mpf(10) ** -25
        try:
            expected = (value(expression, s + step) - value(expression, s - step)) / (2 * step)
            found = value(derived, s)
        except (ZeroDivisionError, ValueError, OverflowError):
            return
        if abs(expected) < mpmath.mpf(10) ** 20 and abs(value(expression, s)) < 10**20:
            assert abs(found - expected) <= mpmath.mpf(10) ** -15 * (1 + abs(expected))


@pytest.mark.parametrize("expression", [Name("R"), number(4), PI, Sum(Name("R"), number(1))])
def test_what_does_not_vary_has_no_slope(expression):
    """Names stand for quantities that do not depend on s."""
    assert slope(expression) == number(0)
