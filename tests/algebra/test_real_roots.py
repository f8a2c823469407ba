"""Isolation of positive real roots: every one, each alone in its interval."""

from __future__ import annotations

import itertools
from fractions import Fraction

import flint
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.algebra.ball import precision
from acsolve.algebra.real_roots import Isolated, UndecidedError, positive_roots, refined

integers = st.lists(st.integers(-60, 60), min_size=1, max_size=9)


def square_free(coefficients: list[int]) -> list[int]:
    """The polynomial with every root once."""
    whole = flint.fmpz_poly(coefficients)
    if whole.degree() < 1:
        return coefficients
    return [int(item) for item in (whole // whole.gcd(whole.derivative())).coeffs()]


def counted(coefficients: list[int]) -> int:
    """The number of positive real roots by the library's complex isolation."""
    whole = flint.fmpz_poly(coefficients)
    if whole.degree() < 1:
        return 0
    return sum(1 for root, _ in whole.complex_roots() if root.imag == 0 and root.real > 0)


def sign_at(coefficients: list[int], place: Fraction) -> int:
    """The exact sign of a polynomial at a fraction."""
    total = Fraction(0)
    for item in reversed(coefficients):
        total = total * place + item
    return (total > 0) - (total < 0)


def contains_one(coefficients: list[int], root: Isolated) -> bool:
    """Whether the polynomial is zero at the point, or turns its sign in the open interval."""
    if root.low == root.high:
        return sign_at(coefficients, root.low) == 0
    step = (root.high - root.low) / 2**400
    return sign_at(coefficients, root.low + step) * sign_at(coefficients, root.high - step) == -1


def evaluate(coefficients):
    """The polynomial as `refined` wants it."""

    def at(x):
        return flint.arb_poly([flint.arb(item) for item in coefficients])(x)  # at x's precision

    return at


@settings(max_examples=150)
@given(integers)
def test_every_positive_root_is_isolated(coefficients):
    """As many intervals as roots, in rising order, each with one turn of the sign inside."""
    coefficients = square_free(coefficients)
    found = positive_roots(coefficients)
    assert len(found) == counted(coefficients)
    for root in found:
        assert contains_one(coefficients, root)
        if root.low < root.high:
            step = (root.high - root.low) / 2**400
            assert root.sign == sign_at(coefficients, root.low + step)
    for first, second in itertools.pairwise(found):
        assert first.high <= second.low


@settings(max_examples=80)
@given(integers, st.integers(8, 200))
def test_refining_keeps_the_root_and_narrows_the_interval(coefficients, bits):
    """After refining, the same root is inside, and the width is below 2^-bits of it."""
    coefficients = square_free(coefficients)
    for root in positive_roots(coefficients):
        narrow = refined(root, evaluate(coefficients), bits)
        assert root.low <= narrow.low <= narrow.high <= root.high
        assert (narrow.high - narrow.low) * 2**bits <= narrow.high
        assert contains_one(coefficients, narrow)


@settings(max_examples=80)
@given(integers)
def test_balls_find_what_integers_find(coefficients):
    """Coefficients as narrow balls give the same number of roots, at the same places."""
    coefficients = square_free(coefficients)
    exact = positive_roots(coefficients)
    with precision(512):
        third = flint.arb(1) / 3
        balls = [third * item for item in coefficients]
        found = positive_roots(balls)
        narrow = [refined(root, flint.arb_poly(balls)) for root in found]
    assert len(found) == len(exact)
    for root, other in zip(exact, narrow, strict=True):
        value = refined(root, evaluate(coefficients))
        assert abs(value.low - other.low) * 2**60 <= value.high


@pytest.mark.parametrize("exponent", [3, 21, 30, 64, 200])
@pytest.mark.parametrize("place", [Fraction(1), Fraction(2), Fraction(1, 4), Fraction(3)])
def test_a_root_close_above_a_point_of_bisection(place, exponent):
    """A root at a power of two and another barely above it are two roots, refined to both."""
    other = place + Fraction(1, 2**exponent)
    poly = flint.fmpq_poly([-flint.fmpq(*place.as_integer_ratio()), 1]) * flint.fmpq_poly(
        [-flint.fmpq(*other.as_integer_ratio()), 1]
    )
    coefficients = [int(item * poly.denom()) for item in poly.coeffs()]
    found = [refined(root, evaluate(coefficients), 300) for root in positive_roots(coefficients)]
    assert len(found) == 2
    for root, exact in zip(found, (place, other), strict=True):
        assert root.low <= exact <= root.high


def test_roots_of_very_different_size():
    """Roots from 10^-30 to 10^30 are all isolated and refined."""
    poly = flint.fmpz_poly([1])
    for power in (0, 7, 30):
        poly *= flint.fmpz_poly([-1, 10**power]) * flint.fmpz_poly([-(10**power), 1])
    coefficients = square_free([int(item) for item in poly.coeffs()])
    values = [refined(root, evaluate(coefficients)) for root in positive_roots(coefficients)]
    expected = [Fraction(10) ** k for k in (-30, -7, 0, 7, 30)]
    assert len(values) == len(expected)
    for root, exact in zip(values, expected, strict=True):
        assert abs(root.low / exact - 1) < Fraction(1, 10**18)


def test_zero_is_no_positive_root():
    """Roots at zero and polynomials without roots give nothing."""
    assert positive_roots([0, 0, 3]) == []
    assert positive_roots([5]) == []
    assert positive_roots([]) == []
    assert positive_roots([1, 1, 1]) == []
    assert len(positive_roots([0, -1, 1])) == 1


def test_a_ball_that_could_be_either_sign_is_undecided():
    """Coefficients too wide to tell ask for more precision instead of guessing."""
    wide = flint.arb(0, 1e-3)
    with pytest.raises(UndecidedError):
        positive_roots([flint.arb(1), flint.arb(-2), wide])
    with pytest.raises(UndecidedError):
        positive_roots([flint.arb(1), flint.arb(-2) + wide, flint.arb(1)])
