"""Certified complex roots: exact multiplicities, exact axes, and mpmath as the second method."""

from __future__ import annotations

from fractions import Fraction
from math import sqrt

import flint
import mpmath
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.algebra.roots import complex_roots, integer_coefficients


def expanded(*factors: list[Fraction | int]) -> list[Fraction]:
    """The product of polynomials given by rising power."""
    total = flint.fmpq_poly([1])
    for factor in factors:
        total *= flint.fmpq_poly(
            [flint.fmpq(*Fraction(item).as_integer_ratio()) for item in factor]
        )
    return [Fraction(int(item.p), int(item.q)) for item in total.coeffs()]


def flat(roots: list[tuple[complex, int]]) -> list[complex]:
    """Each root as often as its multiplicity says."""
    return [root for root, count in roots for _ in range(count)]


rationals = st.builds(Fraction, st.integers(-30, 30), st.integers(1, 9))


@settings(max_examples=60)
@given(st.lists(rationals, min_size=1, max_size=6))
def test_rational_roots_with_their_multiplicities(roots):
    """A product of linear factors has those roots, as often as each was put in."""
    found = complex_roots(expanded(*([-root, 1] for root in roots)))
    counted = {root: roots.count(root) for root in roots}
    assert len(found) == len(counted)
    assert dict(found) == {complex(float(root)): count for root, count in counted.items()}


@settings(max_examples=60)
@given(st.lists(st.integers(-50, 50), min_size=2, max_size=9).filter(lambda item: item[-1] != 0))
def test_roots_agree_with_a_second_method(coefficients):
    """Each root is within some units of the last place of one that mpmath finds at 60 digits."""
    found = flat(complex_roots([Fraction(item) for item in coefficients]))
    assert len(found) == len(coefficients) - 1
    with mpmath.workdps(60):
        simple = square_free_part(coefficients)
        other = (
            mpmath.polyroots(simple[::-1], maxsteps=500, extraprec=400) if len(simple) > 1 else []
        )
        for root in found:
            nearest = min(other, key=lambda item: abs(item - mpmath.mpc(root)))
            assert abs(nearest - mpmath.mpc(root)) <= 3e-16 * abs(nearest)


def square_free_part(coefficients: list[int]) -> list[int]:
    """The polynomial with every root once."""
    whole = flint.fmpz_poly(coefficients)
    return [int(item) for item in (whole // whole.gcd(whole.derivative())).coeffs()]


@settings(max_examples=60)
@given(st.lists(st.integers(-50, 50), min_size=2, max_size=9).filter(lambda item: item[-1] != 0))
def test_conjugates_are_exact_mirror_images(coefficients):
    """Complex roots come in pairs with equal doubles, sorted by magnitude."""
    found = complex_roots([Fraction(item) for item in coefficients])
    table = dict(found)
    for root, count in found:
        assert table[root.conjugate()] == count
    sizes = [abs(root) for root, _ in found]
    assert sizes == sorted(sizes)


@settings(max_examples=60)
@given(st.lists(st.integers(1, 40), min_size=1, max_size=3), rationals, st.integers(1, 3))
def test_roots_on_the_imaginary_axis_are_exactly_on_it(squares, real, count):
    """s² + a has roots with a real part of exactly zero, whatever stands beside it."""
    factors = [[item, 0, 1] for item in squares] + [[-real, 1]] * count
    for root, _ in complex_roots(expanded(*factors)):
        if root.imag:
            assert root.real == 0.0
            assert any(abs(abs(root.imag) - sqrt(item)) < 1e-14 for item in squares)


@pytest.mark.parametrize("digits", [10, 40, 80, 150])
def test_the_sign_of_a_tiny_real_part_is_certain(digits):
    """Beside a pair on the axis, a pair that is barely off it keeps its side, or 1e-150 of it."""
    tiny = Fraction(1, 10**digits)
    for sign in (1, -1):
        found = dict(complex_roots(expanded([2, 0, 1], [3, sign * tiny, 1])))
        on = [root for root in found if abs(root.imag) < 1.5]
        off = [root for root in found if abs(root.imag) > 1.5]
        assert [root.real for root in on] == [0.0, 0.0]
        for root in off:
            assert root.real == pytest.approx(-sign * float(tiny) / 2, rel=1e-15)


@pytest.mark.parametrize("digits", [8, 30, 100])
def test_clustered_roots_are_told_apart(digits):
    """Roots 1 and 1 + 10^-n are two simple roots; three in a cluster are three."""
    step = Fraction(1, 10**digits)
    found = complex_roots(expanded([-1, 1], [-1 - step, 1], [-1 + step, 1]))
    assert [count for _, count in found] == [1, 1, 1]
    assert all(abs(root - 1) <= 1.01 * float(step) for root, _ in found)


def test_roots_at_zero_are_counted():
    """Powers of s in front are roots at zero."""
    assert complex_roots([Fraction(0), Fraction(0), Fraction(3), Fraction(1)]) == [
        (0j, 2),
        (-3 + 0j, 1),
    ]
    assert complex_roots([Fraction(7)]) == []


def test_a_ladder_of_forty_roots():
    """The roots of a product of forty factors, far apart and close together, are all found."""
    places = [Fraction(-(k**3) - 1, 7) for k in range(40)]
    found = flat(complex_roots(expanded(*([-item, 1] for item in places))))
    assert sorted(item.real for item in found) == [float(item) for item in sorted(places)]


@settings(max_examples=40)
@given(st.lists(rationals, min_size=1, max_size=6))
def test_integer_coefficients_are_in_proportion(values):
    """Denominators are cleared by one common factor."""
    whole = integer_coefficients(values)
    assert all(isinstance(item, int) for item in whole)
    ratios = {Fraction(item) / value for item, value in zip(whole, values, strict=True) if value}
    assert len(ratios) <= 1
