"""Value expressions as power series: against their derivatives, and at roots of s."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from acsolve.algebra.ball import precision
from acsolve.circuit.expression import S, add, call, divide, multiply, number, power
from acsolve.equations.evaluate import BallArithmetic, Evaluator
from acsolve.equations.series import SeriesArithmetic, coefficients, frequency, near_zero, terms
from acsolve.equations.slope import slope

positive = st.builds(Fraction, st.integers(1, 30), st.integers(1, 9))


@st.composite
def functions(draw):
    """Functions of s as parts have them."""
    a, b = number(draw(positive)), number(draw(positive))
    leaf = draw(
        st.sampled_from(
            [
                multiply(a, S),
                power(S, number(Fraction(73, 100))),
                call("sqrt", multiply(a, S)),
                call("exp", multiply(number(-1), multiply(a, S))),
                call("cosh", call("sqrt", multiply(a, S))),
                call("sinh", divide(S, a)),
                call("ln", add(b, S)),
                call("log10", add(b, S)),
                power(add(b, S), number(-2)),
            ]
        )
    )
    return divide(add(a, multiply(leaf, leaf)), add(b, multiply(S, leaf)))


@given(functions(), positive)
def test_coefficients_are_derivatives(expression, omega):
    """Value, first and half the second derivative by omega, from expressions of their own."""
    from flint import acb, arb, fmpq

    with precision(200), terms(3):
        at = arb(fmpq(omega.numerator, omega.denominator)) * fmpq(1009, 1013)  # off poles
        series = Evaluator({}, SeriesArithmetic())(expression, frequency(at, 2))
        plain = Evaluator({}, BallArithmetic())
        first = slope(expression)
        wanted = [
            plain(expression, acb(0, at)),
            plain(first, acb(0, at)) * acb(0, 1),
            plain(slope(first), acb(0, at)) * -0.5,
        ]
        assume(all(item.is_finite() for item in wanted))
        for found, exact in zip(coefficients(series, 2), wanted, strict=True):
            assert found.overlaps(exact)
            assert (found - exact).abs_upper() < 1e-40 * (1 + exact.abs_upper())


def whole(series, order):
    """The coefficients, which are exact whole numbers."""
    return [int(item.unique_fmpz()) for item in coefficients(series, order)]


def test_roots_of_s_at_zero_are_powers():
    """Over s = z**6 the square root is z³ and the cube root z²; a seventh root is none."""
    evaluate = Evaluator({}, SeriesArithmetic())
    with terms(8):
        s = near_zero(6, 8)
        assert whole(evaluate(call("sqrt", S), s), 5) == [0, 0, 0, 1, 0, 0]
        third = evaluate(power(S, number(Fraction(1, 3))), s)
        assert whole(third, 3) == [0, 0, 1, 0]
        seventh = evaluate(power(S, number(Fraction(1, 7))), s)
        assert not all(c.is_finite() for c in coefficients(seventh, 5))


def test_a_value_without_the_variable_is_a_constant():
    """Its derivatives are zero."""
    values = coefficients(Evaluator({}, SeriesArithmetic())(number(7)), 3)
    assert [complex(item) for item in values] == [7, 0, 0, 0]


def test_the_number_of_terms_is_put_back():
    """Also after an error."""
    from flint import ctx

    before = ctx.cap
    seen = []

    def work():
        with terms(3):
            seen.append(ctx.cap)
            raise ArithmeticError

    with pytest.raises(ArithmeticError):
        work()
    assert (seen, ctx.cap) == ([3], before)
