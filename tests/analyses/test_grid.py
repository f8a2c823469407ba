"""Frequency grids: exact decades, exact edges, and what is refused."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from acsolve.analyses.grid import MOST_POINTS, HertzBand, explicit, linear, logarithmic
from acsolve.errors import AnalysisError

edges = st.builds(Fraction, st.integers(1, 10**6), st.sampled_from([1, 10, 1000, 7]))


@st.composite
def bands(draw) -> HertzBand:
    """A band between a millihertz and some gigahertz."""
    low = draw(edges)
    return HertzBand(low, low * draw(st.builds(Fraction, st.integers(11, 9999), st.just(10))))


@given(bands(), st.integers(1, 200))
def test_points_per_decade_keep_their_ratio(band, per_decade):
    """Neighbours have the ratio 10^(1/n), save a shorter last step, and the edges are exact."""
    grid = logarithmic(band, per_decade=per_decade)
    assert grid[0] == float(band.low)
    assert grid[-1] == float(band.high)
    ratio = grid[1:] / grid[:-1]
    assert np.allclose(ratio[:-1], 10 ** (1 / per_decade), rtol=1e-12)
    assert 1 < ratio[-1] <= 10 ** (1 / per_decade) * (1 + 1e-8)


@given(bands(), st.integers(2, 400))
def test_a_number_of_points_is_that_number(band, points):
    """The grid has the number of points asked for, at equal ratios, edges exact."""
    grid = logarithmic(band, points=points)
    assert len(grid) == points
    assert grid[0] == float(band.low)
    assert grid[-1] == float(band.high)
    assert np.allclose(np.diff(np.log(grid)), np.log(float(band.high / band.low)) / (points - 1))


@pytest.mark.parametrize("low", [Fraction(1, 10), Fraction(10), Fraction(20), Fraction(3, 1000)])
@pytest.mark.parametrize("options", [{"per_decade": 50}, {"per_decade": 7}, {"points": 601}])
def test_whole_decades_are_exact(low, options):
    """Every whole decade above the low edge is the double nearest to its decimal."""
    grid = set(logarithmic(HertzBand(low, low * 10**6), **options).tolist())
    for decade in range(7):
        assert float(low * 10**decade) in grid


def test_decades_between_points_are_not_forced():
    """Where a whole decade is no point of the grid, no point is moved to it."""
    grid = logarithmic(HertzBand(Fraction(1), Fraction(100)), points=4)
    assert np.allclose(grid, 10 ** (2 * np.arange(4) / 3), rtol=1e-14)


def test_fifty_a_decade_unless_told_otherwise():
    """Five decades hold 251 points at the default density."""
    assert len(logarithmic(HertzBand(Fraction(10), Fraction(10**6)))) == 251


@given(bands(), st.integers(2, 400))
def test_linear_grid_has_equal_steps(band, points):
    """A linear grid has equal steps between exact edges."""
    grid = linear(band, points=points)
    assert grid[0] == float(band.low)
    assert grid[-1] == float(band.high)
    assert np.allclose(np.diff(grid), float(band.high - band.low) / (points - 1), rtol=1e-9)


def test_linear_grid_may_start_at_zero():
    """0 Hz is a frequency."""
    assert linear(HertzBand(Fraction(0), Fraction(10)), points=3).tolist() == [0, 5, 10]


def test_explicit_frequencies_stay_as_they_are():
    """Named frequencies keep their order and their value."""
    assert explicit([Fraction(60), Fraction(1, 10)]).tolist() == [60.0, 0.1]


@pytest.mark.parametrize(
    ("ask", "text"),
    [
        (
            lambda: logarithmic(HertzBand(Fraction(0), Fraction(10))),
            "sweep.band: a logarithmic band starts above 0 Hz, got 0 Hz .. 10 Hz\n"
            "  Give a low edge above zero, or ask for a linear grid.",
        ),
        (
            lambda: logarithmic(HertzBand(Fraction(50), Fraction(5))),
            "sweep.band: a band goes from a lower to a higher frequency, got 50 Hz .. 5 Hz\n"
            "  Write 5 Hz .. 50 Hz.",
        ),
        (
            lambda: linear(HertzBand(Fraction(5), Fraction(5)), points=3),
            "sweep.band: a band goes from a lower to a higher frequency, got 5 Hz .. 5 Hz\n"
            "  Ask at a single frequency instead.",
        ),
        (
            lambda: linear(HertzBand(Fraction(-5), Fraction(5)), points=3),
            "sweep.band: a band starts at 0 Hz or above, got -5 Hz .. 5 Hz\n"
            "  Frequencies are not negative here: give the positive edges.",
        ),
        (
            lambda: logarithmic(HertzBand(Fraction(1), Fraction(10)), points=MOST_POINTS + 1),
            "sweep.points: 10,000,001 points are more than the 10,000,000 of one sweep\n"
            "  Ask for fewer points, or for a part of the band.",
        ),
        (
            lambda: logarithmic(HertzBand(Fraction(1), Fraction(10)), per_decade=0),
            "sweep.points: expected at least 1 points per decade, got 0\n"
            "  Give a whole number from 1 upwards.",
        ),
        (
            lambda: linear(HertzBand(Fraction(1), Fraction(10)), points=1),
            "sweep.points: expected at least 2 points, got 1\n"
            "  Give a whole number from 2 upwards.",
        ),
        (
            lambda: explicit([]),
            "sweep.points: there is no frequency to answer for\n  Name at least one.",
        ),
        (
            lambda: explicit([Fraction(-1)]),
            "sweep.band: a frequency is negative: -1 Hz\n  Frequencies start at 0 Hz; a band is written 10Hz..100kHz, with two dots.",
        ),
    ],
)
def test_what_is_refused_says_why(ask, text):
    """A band or a number of points that makes no sense is refused with the way out."""
    with pytest.raises(AnalysisError) as caught:
        ask()
    assert str(caught.value) == text
