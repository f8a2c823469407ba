"""Polynomials over named generators: what cancels, what is reduced, what stays equal."""

from __future__ import annotations

from fractions import Fraction

from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.algebra.ring import (
    Ring,
    cancel,
    common_denominator,
    lowest_part,
    positive,
    univariate,
)

RING = Ring(("s", "R", "C"))
ROOTS = Ring(("s", "r2", "r3"), ((1, 2), (2, 3)))


@st.composite
def polynomials(draw, ring=RING):
    """A small polynomial."""
    monomials = st.tuples(*(st.integers(0, 2) for _ in ring.names))
    terms = draw(st.dictionaries(monomials, st.integers(-5, 5), max_size=5))
    return ring.context.from_dict({key: value for key, value in terms.items() if value})


def value(polynomial, points):
    """A polynomial at numbers."""
    total = Fraction(0)
    for exponents, coefficient in polynomial.terms():
        term = Fraction(int(coefficient))
        for point, exponent in zip(points, exponents, strict=True):
            term *= Fraction(point) ** int(exponent)
        total += term
    return total


@settings(max_examples=100)
@given(polynomials(), polynomials(), polynomials())
def test_cancel_removes_every_common_factor(top, bottom, common):
    """What is left is coprime, integers included, and the ratio is what it was."""
    if bottom == 0 or common == 0:
        return
    first, second = cancel(top * common, bottom * common)
    assert first * bottom == second * top
    assert first.gcd(second).is_one()


@settings(max_examples=100)
@given(polynomials(), st.integers(0, 2))
def test_powers_put_together_again(polynomial, place):
    """The coefficients of the powers of a generator sum up to the polynomial."""
    powers = RING.by_power(polynomial, place)
    generator = RING.generator(place)
    assert sum((item * generator**k for k, item in powers.items()), RING.constant(0)) == polynomial
    assert all(item.degrees()[place] == 0 for item in powers.values() if item != 0)
    if polynomial != 0:
        assert lowest_part(RING, polynomial, place) == powers[min(powers)]


@settings(max_examples=100)
@given(polynomials(ROOTS), polynomials(ROOTS))
def test_roots_of_primes_square_to_them(first, second):
    """A reduced product has no square of a root left, and is the same number."""
    product = first * second
    reduced = ROOTS.reduced(product)
    if reduced != 0:
        assert all(degree < 2 for degree in reduced.degrees()[1:])
    points = (1.25, 2**0.5, 3**0.5)
    numbers = [
        sum(
            float(int(c)) * points[0] ** int(e[0]) * points[1] ** int(e[1]) * points[2] ** int(e[2])
            for e, c in item.terms()
        )
        for item in (product, reduced)
    ]
    assert abs(numbers[0] - numbers[1]) < 1e-8  # rounding of sums of some hundred terms
    assert ROOTS.reduced(reduced) == reduced


@settings(max_examples=60)
@given(st.lists(polynomials(), min_size=1, max_size=4))
def test_the_common_denominator_is_a_multiple_of_each(denominators):
    """Every denominator divides their least common multiple."""
    if any(item == 0 for item in denominators):
        return
    common = common_denominator(RING, denominators)
    for item in denominators:
        assert (common / item) * item == common


@settings(max_examples=60)
@given(polynomials(), polynomials())
def test_positive_changes_the_sign_of_both_or_of_none(top, bottom):
    """The sign is chosen once for both parts, and the chosen one is kept."""
    first, second = positive(top, bottom, bottom)
    assert (first, second) in ((top, bottom), (-top, -bottom))
    assert positive(first, second, second) == (first, second)


@settings(max_examples=60)
@given(st.lists(st.integers(-5, 5), max_size=5))
def test_univariate_reads_coefficients_back(coefficients):
    """A polynomial in s alone gives its coefficients by rising power; others give None."""
    s = RING.generator(0)
    polynomial = sum((c * s**k for k, c in enumerate(coefficients)), RING.constant(0))
    while coefficients and coefficients[-1] == 0:
        coefficients.pop()
    assert univariate(polynomial, 0) == coefficients
    assert univariate(polynomial + RING.generator(1), 0) is None
    if coefficients[1:]:
        assert univariate(polynomial, None) is None
    assert univariate(RING.constant(7), None) == [7]


def test_a_ring_without_generators():
    """Plain numbers need no generator."""
    empty = Ring(())
    assert empty.constant(6) == 6
    assert cancel(empty.constant(6), empty.constant(4)) == (3, 2)
    assert value(empty.constant(6), (1,)) == 6
