"""The steps of a family: edges, even ratios, even differences."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from acsolve.analyses.family import steps

positives = st.builds(Fraction, st.integers(1, 10**6), st.integers(1, 10**6))


@given(first=positives, last=positives, count=st.integers(2, 40), sign=st.sampled_from([1, -1]))
def test_even_ratios_between_exact_edges(first, last, count, sign):
    """Both edges are met exactly; ratios are even but for the digits that are shown."""
    found = steps(sign * first, sign * last, count)
    assert (found[0], found[-1], len(found)) == (sign * first, sign * last, count)
    for at, value in enumerate(found):
        expected = float(first) * float(last / first) ** (at / (count - 1))
        assert float(sign * value) == pytest.approx(expected, rel=6e-4)


def test_even_differences_where_a_ratio_makes_no_sense():
    """Across zero, or from it, the steps are differences."""
    assert steps(Fraction(-2), Fraction(2), 5) == [-2, -1, 0, 1, 2]
    assert steps(Fraction(0), Fraction(1), 3) == [0, Fraction(1, 2), 1]


def test_a_narrow_range_keeps_its_steps_apart():
    """Where four digits would make neighbours equal, all digits stay."""
    found = steps(Fraction(1000), Fraction(10001, 10), 9)
    assert len(set(found)) == 9
    assert found == sorted(found)


def test_values_between_are_what_is_shown():
    """A step that shows as 1.778 is 1.778."""
    assert steps(Fraction(1000), Fraction(10_000), 5)[1] == 1778
