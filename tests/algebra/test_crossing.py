"""Crossings and touches of zero: odd and even multiplicities, and their directions."""

from __future__ import annotations

from fractions import Fraction

import flint
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.algebra.crossing import enclosed_crossings, exact_crossings

positives = st.builds(Fraction, st.integers(1, 40), st.integers(1, 9))


def product(
    roots: dict[Fraction, int], *, leading: int = 1, beside: list[int] | None = None
) -> list[Fraction]:
    """leading · product of (x - root)^count · a polynomial without positive roots."""
    total = flint.fmpq_poly(beside or [1]) * leading
    for root, count in roots.items():
        total *= flint.fmpq_poly([-flint.fmpq(*root.as_integer_ratio()), 1]) ** count
    return [Fraction(int(item.p), int(item.q)) for item in total.coeffs()]


def rising(roots: dict[Fraction, int], leading: int) -> list[bool | None]:
    """Directions from the sign above all roots downwards."""
    sign, found = leading > 0, []
    for root in sorted(roots, reverse=True):
        if roots[root] % 2:
            found.append(sign)
            sign = not sign
        else:
            found.append(None)
    return found[::-1]


@settings(max_examples=100)
@given(
    st.dictionaries(positives, st.integers(1, 4), max_size=4),
    st.sampled_from([1, -3]),
    st.sampled_from([[1], [2, 1], [1, 1, 1], [0, 1], [0, 0, 1, 5]]),
)
def test_multiplicities_and_directions(roots, leading, beside):
    """A root of odd multiplicity crosses, of even multiplicity touches; directions follow."""
    found = exact_crossings(product(roots, leading=leading, beside=beside))
    assert found.complete
    assert [item.rises for item in found.found] == rising(roots, leading)
    for item, root in zip(found.found, sorted(roots), strict=True):
        assert abs(item.value / root - 1) < Fraction(1, 2**60)


@settings(max_examples=60)
@given(
    st.sets(positives, max_size=5),
    st.sampled_from([1, -3]),
    st.sampled_from([[1], [0, 1], [1, 1, 1]]),
)
def test_enclosed_coefficients_give_the_same_crossings(places, leading, beside):
    """Simple roots are found from balls as from fractions, and proven for the enclosure."""
    roots = dict.fromkeys(places, 1)
    exact = product(roots, leading=leading, beside=beside)

    def balls():
        pi = flint.arb.pi()
        return [
            pi * flint.fmpq(*item.as_integer_ratio()) if item else flint.arb(0) for item in exact
        ]

    found = enclosed_crossings(balls)
    assert found.complete
    assert [item.rises for item in found.found] == rising(roots, leading)
    for item, root in zip(found.found, sorted(roots), strict=True):
        assert abs(item.value / root - 1) < Fraction(1, 2**58)


def test_a_double_root_in_balls_is_said_to_be_undecided():
    """A touch cannot be proven from an enclosure: nothing is listed and nothing claimed."""

    def balls():
        pi = flint.arb.pi()
        return [pi, -2 * pi, pi]

    found = enclosed_crossings(balls)
    assert not found.complete
    assert found.found == ()


def test_a_coefficient_that_is_zero_without_being_known_to_be():
    """A lowest coefficient that a ball cannot tell from zero is not taken for zero."""

    def balls():
        pi = flint.arb.pi()
        return [pi * 3 - pi - pi - pi, -pi, flint.arb(1)]

    assert not enclosed_crossings(balls).complete


def test_nothing_crosses_an_identity():
    """The zero polynomial lies on its level everywhere and crosses it nowhere."""
    assert exact_crossings([]).found == ()
    assert exact_crossings([Fraction(0), Fraction(0)]).found == ()
    assert exact_crossings([Fraction(4)]).found == ()


def test_close_crossings_keep_their_order():
    """Two crossings 2^-30 apart beside a power of two are both found, down and up."""
    close = Fraction(1) + Fraction(1, 2**30)
    found = exact_crossings(product({Fraction(1): 1, close: 1})).found
    assert [item.rises for item in found] == [False, True]
    assert [float(item.value) for item in found] == [1.0, float(close)]
