"""Discs hold what their members make of each other, and long products keep them narrow."""

from __future__ import annotations

from fractions import Fraction

import pytest
from flint import acb, arb, fmpq
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.algebra.ball import precision
from acsolve.algebra.disc import Disc

parts = st.fractions(-100, 100, max_denominator=1000)
radii = st.fractions(0, Fraction(1, 4), max_denominator=1000)
#: Fractions of a turn and of the radius, for a member of a disc: 3/5 + 4/5·j is a unit.
turns = st.sampled_from([1, -1, 1j, -1j, 0.6 + 0.8j, 0.8 - 0.6j])
shares = st.fractions(0, Fraction(99, 100), max_denominator=100)


def exact(number: Fraction) -> arb:
    """A rational number as a ball."""
    return arb(fmpq(number.numerator, number.denominator))


@st.composite
def discs(draw) -> tuple[Disc, acb]:
    """A disc and a ball around one of its members."""
    middle = acb(exact(draw(parts)), exact(draw(parts)))
    radius = exact(draw(radii))
    member = middle + radius * exact(draw(shares)) * acb(draw(turns)) * exact(Fraction(99, 100))
    return Disc(middle, radius), member


OPERATIONS = {
    "sum": lambda a, b: a + b,
    "difference": lambda a, b: a - b,
    "product": lambda a, b: a * b,
    "opposite": lambda a, _: -a,
    "reciprocal": lambda a, _: 1.0 / a,
    "chain": lambda a, b: a * b - b * b + 1.0 / (a - b),
}


@pytest.mark.parametrize("name", OPERATIONS)
@settings(max_examples=60, deadline=None)
@given(first=discs(), second=discs())
def test_what_members_make_lies_in_the_disc(name, first, second):
    """An operation on members lies in the same operation on their discs."""
    with precision(96):
        found = OPERATIONS[name](first[0], second[0]).ball()
        member = OPERATIONS[name](first[1], second[1])
        if found.is_finite() and member.is_finite():
            assert found.overlaps(member)


def test_a_disc_around_zero_has_no_reciprocal():
    """What may be zero divides nothing: the result is not finite."""
    assert not (1.0 / Disc(acb(1), arb(1))).ball().is_finite()
    assert not (1.0 / Disc(acb(0))).ball().is_finite()


def test_long_products_keep_their_digits():
    """10,000 turns of 37 degrees lose four digits in a disc, all in a rectangle."""
    with precision(128):
        unit = acb(exact(Fraction(4, 5)), exact(Fraction(3, 5)))
        disc, ball = Disc(unit), unit
        turned = Disc(unit)
        for _ in range(10_000):
            disc, ball = disc * turned, ball * unit
        assert disc.ball().overlaps(unit**10_001)
        assert disc.radius < 1e-33
        assert ball.rad() > 1
