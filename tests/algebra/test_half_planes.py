"""Roots counted by half plane: against polynomials made of known roots, exactly."""

from __future__ import annotations

from fractions import Fraction

from flint import arb, fmpz_poly
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.algebra.half_planes import half_planes, lopsided_count

roots = st.tuples(st.integers(-3, 3), st.integers(0, 3), st.integers(1, 3))


def multiplied(chosen) -> fmpz_poly:
    """The polynomial with roots a (b = 0) or a ± jb, each so many times."""
    whole = fmpz_poly([1])
    for a, b, times in chosen:
        whole *= (fmpz_poly([-a, 1]) if b == 0 else fmpz_poly([a * a + b * b, -2 * a, 1])) ** times
    return whole


def coefficients(poly: fmpz_poly) -> list[Fraction]:
    """By rising power."""
    return [Fraction(int(value)) for value in poly.coeffs()]


@settings(max_examples=200)
@given(st.lists(roots, min_size=1, max_size=6))
def test_roots_are_counted_where_they_were_put(chosen):
    """Left, on and right of the axis, with the largest multiplicity on it."""
    sides = {-1: 0, 0: 0, 1: 0}
    on_axis: dict[int, int] = {}
    for a, b, times in chosen:
        sides[(a > 0) - (a < 0)] += times * (1 if b == 0 else 2)
        if a == 0:
            on_axis[b] = on_axis.get(b, 0) + times
    found = half_planes(coefficients(multiplied(chosen)))
    assert (found.left, found.axis, found.right) == (sides[-1], sides[0], sides[1])
    assert found.deepest == max(on_axis.values(), default=0)


def test_a_zero_in_the_first_column_is_no_obstacle():
    """s⁴ + s³ + 2s² + 2s + 3 stops Routh's array at its third row, and has two roots right."""
    found = half_planes([Fraction(value) for value in (3, 2, 2, 1, 1)])
    assert (found.left, found.axis, found.right) == (2, 0, 2)


def test_an_order_of_five_hundred_is_counted():
    """A product of 250 damped pairs, one of them growing."""
    whole = multiplied([(-k, k, 1) for k in range(1, 250)] + [(1, 7, 1)])
    found = half_planes(coefficients(whole))
    assert (found.left, found.axis, found.right) == (498, 0, 2)


@settings(max_examples=50)
@given(st.lists(st.tuples(st.integers(1, 9), st.integers(0, 5)), min_size=1, max_size=5))
def test_balls_tell_what_integers_tell(pairs):
    """The same count from coefficients known as balls."""
    poly = multiplied([(-a, b, 1) for a, b in pairs])
    found = lopsided_count([arb(value) * (1 + arb(0, 1e-12)) for value in poly.coeffs()])
    assert found == half_planes(coefficients(poly))
