"""The largest relative error of a cut closed form over a band and a box: found, and bounded.

The bound comes from ball arithmetic over pieces of band and box that cover both, so it holds
for every frequency and every value between the limits, not for samples only.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise, product
from math import ceil, inf, isnan, log, log10, nextafter, sqrt
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.ball import precision
from acsolve.analyses.cut import Coefficients, Cut, ErrorFormula, terms
from acsolve.analyses.grid import HertzBand, logarithmic
from acsolve.analyses.spread import Spread
from acsolve.equations.evaluate import BallArithmetic, Evaluator, FloatArithmetic, Scalar

Floats = NDArray[np.float64]

_BITS = 96  # far finer than any piece is narrow
_CORNERS = 6  # up to so many loose values every corner of the box is sampled
_SAMPLES = 64
_WORK = 2_000_000  # factors multiplied in balls, about two seconds
_PIECES = (24, 5000)
_TINY = 1e-15  # an error that doubles do not show
_NARROWEST = 1e-9  # a relative width of a piece of the band below which a pole stands in the way
_SEED = 20


@dataclass(frozen=True, slots=True)
class Point:
    """A frequency in hertz and a place between its limits (0 to 1) for each loose value."""

    hertz: float
    places: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True)
class Enclosure:
    """The largest error found, where, and a proven bound on it (None where there is none).

    `lost_at` is a frequency in hertz near which the error could not be bounded at all: a pole
    or zero may lie there.
    """

    found: float
    at: Point
    bound: float | None
    lost_at: float | None = None


class RealBalls(BallArithmetic):
    """Balls that stay on the real axis where they can: four times quicker to multiply."""

    def number(self, value: Any) -> Scalar:
        """A real ball around a rational number."""
        from flint import arb, fmpq

        return arb(fmpq(value.numerator, value.denominator))

    def pi(self) -> Scalar:
        """A real ball around pi."""
        from flint import arb

        return arb.pi()


class ErrorOver:
    """The size of the relative error of one cut over a band and a box of values."""

    def __init__(self, split: Cut, spread: Spread, band: HertzBand) -> None:
        self.cut = split
        self.formula = ErrorFormula(split)
        self.spread = spread
        self.band = band
        self.size = sum(1 + sum(map(bool, item.exponents)) for item in terms(split.exact))
        self._known: dict[tuple[tuple[float, float], ...], _Prepared] = {}

    def sizes(self, hertz: Floats, places: Sequence[Floats]) -> Floats:
        """|H~ - H|/|H| in doubles; frequencies and places broadcast. Infinite at 0/0."""
        arithmetic = FloatArithmetic()
        shape = np.broadcast_shapes(hertz.shape, *(item.shape for item in places))
        with np.errstate(all="ignore"):
            evaluate = self.spread.evaluator(arithmetic, places)
            known = self.formula.coefficients(evaluate, arithmetic)
            error = self.formula.at(known, evaluate, arithmetic, 2j * np.pi * hertz)
            found = np.abs(np.broadcast_to(np.asarray(error, dtype=complex), shape))
        return np.where(np.isfinite(found), found, inf)

    def upper(self, piece: _Piece) -> float:
        """A bound on the error that holds on a whole piece; infinite where it cannot be told."""
        from flint import acb, arb

        arithmetic = RealBalls()
        prepared = self._known.get(piece.box)
        if prepared is None:
            places = [arb(low).union(arb(high)) for low, high in piece.box]
            evaluate = self.spread.evaluator(arithmetic, places)
            prepared = _Prepared(evaluate, self.formula.coefficients(evaluate, arithmetic))
            if len(self._known) >= _REMEMBERED:
                self._known.clear()
            self._known[piece.box] = prepared
        hertz = arb(piece.hertz[0]).union(arb(piece.hertz[1]))
        s = acb(0, 2 * arb.pi() * hertz)
        error = self.formula.at(prepared.coefficients, prepared.evaluate, arithmetic, s)
        if error == 0:  # exactly: what is dropped has the value zero
            return 0.0
        size = float(error.abs_upper())
        return inf if isnan(size) else nextafter(size, inf)


_REMEMBERED = 256  # boxes whose coefficients are kept for the next piece of the band


@dataclass(frozen=True, slots=True, eq=False)
class _Prepared:
    evaluate: Evaluator
    coefficients: list[tuple[Coefficients, Coefficients] | None]


@dataclass(frozen=True, slots=True)
class _Piece:
    """A piece of the band (hertz) and of the box (places), with its bound."""

    hertz: tuple[float, float]
    box: tuple[tuple[float, float], ...]
    bound: float = inf

    @property
    def middle(self) -> Point:
        low, high = self.hertz
        return Point(sqrt(low) * sqrt(high), tuple((a + b) / 2 for a, b in self.box))

    def halves(self, weights: Sequence[float], speed: float) -> list[_Piece]:
        """Two pieces, cut across the direction in which the error can change most."""
        low, high = self.hertz
        widths = [speed * log(high / low) if low < high else 0.0]
        widths += [w * (b - a) for w, (a, b) in zip(weights, self.box, strict=True)]
        longest = max(range(len(widths)), key=widths.__getitem__)
        if longest == 0:
            centre = min(max(self.middle.hertz, low), high)
            return [_Piece((low, centre), self.box), _Piece((centre, high), self.box)]
        first, last = self.box[longest - 1]
        parts = (first, (first + last) / 2), ((first + last) / 2, last)
        return [
            _Piece(self.hertz, (*self.box[: longest - 1], part, *self.box[longest:]))
            for part in parts
        ]


def sample_places(spread: Spread) -> Floats:
    """Nominal, corners and random places of the box, shape (samples, loose values)."""
    loose = len(spread.names)
    nominal = [float(item) for item in spread.nominal_places(FloatArithmetic())]
    if not loose:
        return np.zeros((1, 0))
    random = np.random.default_rng(_SEED)
    if loose <= _CORNERS:
        corners = np.array(list(product((0.0, 1.0), repeat=loose)))
    else:
        corners = random.integers(0, 2, (_SAMPLES, loose)).astype(float)
    inside = random.random((_SAMPLES // 2, loose))
    return np.vstack([np.array([nominal]), corners, inside])


def worst(over: ErrorOver, hertz: Floats, places: Floats) -> tuple[float, Point]:
    """The largest error over samples and, climbing from there, over neighbouring corners."""
    found, at = _largest(over, hertz, places)
    for _ in range(3):
        if not at.places:
            break
        flipped = np.tile(np.array(at.places), (len(at.places) + 1, 1))
        for place in range(len(at.places)):
            flipped[place, place] = 0.0 if flipped[place, place] > 1 / 2 else 1.0
        better, there = _largest(over, hertz, flipped)
        if better <= found:
            break
        found, at = better, there
    return found, at


def _largest(over: ErrorOver, hertz: Floats, places: Floats) -> tuple[float, Point]:
    columns = [places[:, k : k + 1] for k in range(places.shape[1])]
    sizes = over.sizes(hertz[np.newaxis, :], columns)
    row, column = np.unravel_index(int(np.argmax(sizes)), sizes.shape)
    sizes = np.broadcast_to(sizes, (len(places), len(hertz)))
    row, column = np.unravel_index(int(np.argmax(sizes)), sizes.shape)
    place = tuple(float(item) for item in places[row])
    return float(sizes[row, column]), Point(float(hertz[column]), place)


def band_points(band: HertzBand) -> Floats:
    """Frequencies in hertz to sample a band at, its ends among them.

    Raises AnalysisError [sweep.band] where the band does not rise, from above 0 Hz.
    """
    logarithmic(band, points=2)  # refuses a band that does not read
    decades = log10(float(band.high) / float(band.low))
    return logarithmic(band, points=int(min(401, max(41, ceil(20 * decades) + 1))))


def enclose(
    over: ErrorOver, found: float, at: Point, *, within: float = inf, stop_above: float = inf
) -> Enclosure:
    """The largest error over band and box between what is found and what is proven.

    Parameters
    ----------
    found, at : the largest error known so far, and where.
    within : the bound should not lie above this, however near the error found comes to it.
    stop_above : an error found above this ends the search, without a bound.

    Notes
    -----
    Branch and bound: the pieces whose bound lies well above the largest error found are
    halved, and the error in their middle is looked at, until none is left or the work that
    is allowed is done (a fixed amount, so the answer does not depend on the machine).
    """
    with precision(_BITS):
        search = _Search(over, found, at, within)
        search.run(stop_above)
    return search.enclosure(stop_above)


class _Search:
    """The state of one branch and bound."""

    def __init__(self, over: ErrorOver, found: float, at: Point, within: float) -> None:
        self._over = over
        self.found, self.at = found, at
        self._within = within
        self.lost_at: float | None = None
        least, most = _PIECES
        self._left = max(least, min(most, _WORK // max(1, over.size)))
        self._weights, self._speed = _weights(over)
        self._settled = 0.0
        self._pieces = [self._bounded(piece) for piece in _first_pieces(over, self._left)]

    def _bounded(self, piece: _Piece) -> _Piece:
        self._left -= 1
        return _Piece(piece.hertz, piece.box, self._over.upper(piece))

    def run(self, stop_above: float) -> None:
        """Halve pieces until none is worth it, changing the state."""
        fresh = self._pieces
        while self._pieces and self._left > 1:
            self._look_inside(fresh)
            self.lost_at = self._unbounded()
            if self.found > stop_above or self.lost_at is not None:
                return
            self._settle()
            self._pieces.sort(key=lambda piece: piece.bound, reverse=True)
            count = max(1, min(len(self._pieces), self._left // 2, 128))
            chosen, rest = self._pieces[:count], self._pieces[count:]
            halves = [item.halves(self._weights, self._speed) for item in chosen]
            fresh = [self._bounded(half) for pair in halves for half in pair]
            self._pieces = rest + fresh
        self._settle()
        self.lost_at = next((item.hertz[0] for item in self._pieces if item.bound == inf), None)

    def _look_inside(self, pieces: Sequence[_Piece]) -> None:
        """The error in the middle of some pieces, in doubles; changes what is found."""
        points = [piece.middle for piece in pieces]
        hertz = np.array([point.hertz for point in points])
        places = np.array([point.places for point in points]).T
        sizes = np.broadcast_to(self._over.sizes(hertz, list(places)), hertz.shape)
        best = int(np.argmax(sizes))
        if sizes[best] > self.found:
            self.found, self.at = float(sizes[best]), points[best]

    def _settle(self) -> None:
        """Put aside the pieces whose bound is good enough."""
        enough = max(_TINY, 1.005 * self.found, min(1.05 * self.found, self._within))
        done = [piece.bound for piece in self._pieces if piece.bound <= enough]
        self._settled = max([self._settled, *done])
        self._pieces = [piece for piece in self._pieces if piece.bound > enough]

    def _unbounded(self) -> float | None:
        """A frequency so near a pole or zero that no bound will come out, or None."""
        for piece in self._pieces:
            low, high = piece.hertz
            if piece.bound == inf and high <= low * (1 + _NARROWEST):
                return low
        return None

    def enclosure(self, stop_above: float) -> Enclosure:
        """What is found and proven; a bound far above what is found is of no use."""
        bound = max([self._settled, self.found, *(piece.bound for piece in self._pieces)])
        useful = bound <= 10 * self.found + 1e-12 and self.found <= stop_above
        proven = bound if useful and bound < inf else None
        return Enclosure(self.found, self.at, proven, self.lost_at)


def _first_pieces(over: ErrorOver, most: int) -> list[_Piece]:
    """The whole box, the band in pieces of about a fifth of a decade."""
    low = nextafter(float(over.band.low), 0.0)
    high = nextafter(float(over.band.high), inf)
    count = max(1, min(ceil(5 * log10(high / low)), most // 4))
    steps = [low * (high / low) ** (k / count) for k in range(1, count)]
    edges = [low, *(min(max(step, low), high) for step in steps), high]
    box = ((0.0, 1.0),) * len(over.spread.names)
    return [_Piece((a, b), box) for a, b in pairwise(edges)]


def _weights(over: ErrorOver) -> tuple[list[float], float]:
    """How fast the error may change: along each loose value, and along the band (per e-fold).

    A rough measure, the degree times the relative width; it steers the halving only.
    """
    form, arithmetic = over.formula.form, FloatArithmetic()
    degrees = [
        int(max(pair))
        for pair in zip(form.numerator.degrees(), form.denominator.degrees(), strict=True)
    ]
    by_name: dict[str, float] = {}
    speed = 1.0
    for item, degree in zip(form.basis.generators, degrees, strict=False):
        if item.varies:
            speed = max(speed, degree / item.root)
        elif hasattr(item.leaf, "name"):
            by_name[item.leaf.name] = degree / item.root
    weights = []
    with np.errstate(all="ignore"):
        for place, name in enumerate(over.spread.names):
            ends = [_value(over.spread, name, place, end, arithmetic) for end in (0.0, 1.0)]
            size = max(abs(ends[0]), abs(ends[1]), 1e-300)
            weights.append(by_name.get(name, 1.0) * abs(ends[1] - ends[0]) / size)
    return weights, speed


def _value(
    spread: Spread, name: str, place: int, end: float, arithmetic: FloatArithmetic
) -> complex:
    places = spread.nominal_places(arithmetic)
    places[place] = end
    return complex(spread.evaluator(arithmetic, places).name(name))
