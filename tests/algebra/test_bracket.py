"""Roots and maxima by enclosures: known ones are found, none is invented, doubt is said."""

from __future__ import annotations

import itertools
from dataclasses import dataclass
from fractions import Fraction
from math import isclose, pi, sin

import pytest
from hypothesis import assume, example, given, settings
from hypothesis import strategies as st

from acsolve.algebra.bracket import Doubt, Root, outermost, search
from acsolve.algebra.summit import summit
from acsolve.algebra.taylor import Cell, cells, enclosure, refined, sign_at

MOST = 20_000
BAND = Cell(Fraction(1, 16), Fraction(33))


@dataclass(frozen=True)
class Series:
    """A function given by what it makes of a real power series."""

    of: object

    def __call__(self, x, order):
        """Taylor coefficients over a ball."""
        from flint import arb, arb_series, ctx

        before, ctx.cap = ctx.cap, order + 1
        try:
            found = self.of(arb_series([x, 1], prec=order + 1)).coeffs()
        except ValueError:  # a division by what may be zero
            return [arb("nan")] * (order + 1)
        finally:
            ctx.cap = before
        return [*found, *[arb(0)] * (order + 1 - len(found))]

    def size(self, x):
        """One: the functions here are of that size."""
        from flint import arb

        del x
        return arb(1)


def product(roots):
    """(x - r1)·(x - r2)·..."""
    from flint import fmpq

    def of(x):
        total = x * 0 + 1
        for root in roots:
            total = total * (x - fmpq(root.numerator, root.denominator))
        return total

    return Series(of)


places = st.builds(Fraction, st.integers(100, 3000), st.integers(97, 103))


@given(st.lists(places, max_size=6, unique=True))
@example([Fraction(9, 2), Fraction(7)])
def test_every_simple_root_is_found_and_none_invented(roots):
    """The roots of a polynomial, with their directions, each in a cell of 2**-80."""
    inside = sorted(root for root in roots if BAND.low < root < BAND.high)
    found = search(product(roots), BAND, most=MOST)
    assert found.decided
    assert found.reached == BAND.high
    assert len(found.roots) == len(inside)
    above = len(roots) - len(inside)
    for at, (item, root) in enumerate(zip(found.roots, inside, strict=True)):
        assert item.cell.low <= root <= item.cell.high
        assert item.cell.high - item.cell.low <= root / 2**79
        assert item.rises == ((len(inside) - at - 1 + above) % 2 == 0)


@settings(max_examples=25)
@given(places, st.lists(places, max_size=2, unique=True))
def test_a_double_root_is_in_doubt(double, others):
    """It touches or is two roots: a doubt without a change of sign, and no more than one."""
    assume(double < BAND.high)
    assume(all(abs(double - item) > Fraction(1, 100) for item in others))
    assume(all(item < BAND.high for item in others))
    found = search(product([double, double, *others]), BAND, most=MOST)
    (doubt,) = found.doubts
    assert doubt.change == 0
    assert doubt.cell.low <= double <= doubt.cell.high
    assert doubt.cell.high - doubt.cell.low < double / 2**30
    assert len(found.roots) == len(others)


@settings(max_examples=15)
@given(places)
def test_a_triple_root_is_in_doubt_and_changes_sign(triple):
    """An odd number of roots is certain where the sign changes."""
    assume(triple < BAND.high)
    (doubt,) = search(product([triple] * 3), BAND, most=MOST).doubts
    assert doubt.change == 1


def test_a_function_that_is_zero_is_one_doubt():
    """A stretch at the level is not halved for ever."""
    found = search(Series(lambda x: x - x), BAND, most=MOST)
    assert [(item.cell, item.change) for item in found.doubts] == [(BAND, 0)]


def test_a_search_that_runs_out_says_how_far_it_came():
    """What lies below `reached` is decided."""
    wave = Series(lambda x: (x * 200).sin())
    found = search(wave, BAND, most=200)
    assert BAND.low < found.reached < BAND.high
    step = pi / 200
    inside = [k * step for k in range(1, 3000) if BAND.low < k * step < found.reached]
    assert len(found.roots) == len(inside)
    for item, root in zip(found.roots, inside, strict=True):
        assert isclose(float(item.cell.middle), root, rel_tol=1e-14)


@given(places, st.integers(1, 12))
def test_an_enclosure_holds_what_it_encloses(middle, width):
    """Value, slope and second derivative of a sine at sampled points of a cell."""
    cell = Cell(middle, middle * (1 + Fraction(1, 2**width)))
    over = enclosure(Series(lambda x: x.sin()), cell)
    for k in range(9):
        x = float(cell.low + (cell.high - cell.low) * Fraction(k, 8))
        for ball, value in (
            (over.value, sin(x)),
            (over.slope, sin(x + pi / 2)),
            (over.bend, -sin(x)),
        ):
            assert float(ball.lower()) - 1e-12 <= value <= float(ball.upper()) + 1e-12


@given(places)
def test_a_peak_is_enclosed(place):
    """1/(1 + (x - a)²) is highest at a, with 1."""
    from flint import fmpq

    at = fmpq(place.numerator, place.denominator)
    assume(place < BAND.high)
    found = summit(Series(lambda x: 1 / (1 + (x - at) * (x - at))), BAND, most=MOST)
    (top,) = found.tops
    assert top.stationary
    assert top.cell.low <= place <= top.cell.high
    assert found.value.contains(1)
    assert found.value.rad() < 2.0**-100


@pytest.mark.parametrize("count", [1, 5])
def test_equal_peaks_are_all_listed(count):
    """Sine over some turns: every crest."""
    band = Cell(Fraction(1, 10), Fraction(2 * 355, 113) * count)
    found = summit(Series(lambda x: x.sin()), band, most=MOST)
    assert found.value.contains(1)
    crests = [pi / 2 + 2 * pi * k for k in range(count)]
    assert [float(top.cell.middle) for top in found.tops] == pytest.approx(crests, rel=1e-14)


def test_a_peak_at_an_edge():
    """A function that rises all the way is highest at the upper edge."""
    found = summit(Series(lambda x: x * x), BAND, most=MOST)
    assert [top.cell for top in found.tops] == [Cell(BAND.high, BAND.high)]
    assert found.value.contains(33 * 33)


def test_a_pole_has_no_peak():
    """The largest value is not finite."""
    found = summit(Series(lambda x: 1 / ((x - 7) * (x - 7))), BAND, most=MOST)
    assert not found.value.is_finite()


def test_cells_cover_a_band():
    """Neighbours share their ends, and nothing is left out."""
    parts = cells(BAND.low, BAND.high)
    assert parts[0].low == BAND.low
    assert parts[-1].high == BAND.high
    assert all(first.high == second.low for first, second in itertools.pairwise(parts))
    low, high = BAND.halves()
    assert (low.low, low.high, high.high) == (BAND.low, high.low, BAND.high)


def test_refining_a_slope():
    """The place where a derivative is zero."""
    wave = Series(lambda x: x.sin())
    cell = refined(wave, Cell(Fraction(1), Fraction(2)), -1, place=1)
    assert isclose(float(cell.middle), pi / 2, rel_tol=1e-15)
    assert sign_at(wave, Fraction(3), place=1) == -1


@given(st.lists(st.fractions(1, 32, max_denominator=50), min_size=1, max_size=4, unique=True))
def test_outermost_roots_are_the_ends_of_the_search(roots):
    """The first and the last root over a band are those of all roots, and none is none."""
    jets, ordered = product(roots), sorted(roots)
    for last, root in ((False, ordered[0]), (True, ordered[-1])):
        found = outermost(jets, BAND, last=last, most=MOST)
        assert isinstance(found, Root)
        assert found.cell.low <= root <= found.cell.high
    beyond = Cell(ordered[-1] + 1, ordered[-1] + 9)
    assert outermost(jets, beyond, last=True, most=MOST) is None


def test_outermost_says_where_it_gave_up():
    """With too few cells the answer is a doubt, not silence."""
    assert isinstance(outermost(product([Fraction(7, 3)]), BAND, last=True, most=3), Doubt)
