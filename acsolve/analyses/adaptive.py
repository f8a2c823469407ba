"""Sweeps that place their own points, so that straight lines between them are right.

Every point brings the exact slopes of gain and phase, so two neighbours make a cubic (Hermite).
Further points between them test the cubic; where it holds, its distance from the chord is the
error of the straight line, and the interval stays as it is or is divided into as many even
pieces as that error asks for: the error of a chord falls with the square of its length. Where
the cubic fails, the test points are taken in and tested again. All points of one round are
solved together.

The first points are a coarse grid, what the continuous phase needed, and points at and beside
each natural mode and zero near the axis, in steps of its own damping. Where those are not known
the grid is finer and each interval is tested twice, off its middle.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields

import numpy as np

from acsolve.analyses import grid
from acsolve.analyses.grid import HertzBand
from acsolve.analyses.ladder_phase import Ladder, ladder_of
from acsolve.analyses.modes import NearAxis, near_axis, on_own_scale
from acsolve.analyses.phase import (
    Track,
    at,
    at_zero_hertz,
    below,
    continuous,
    nearest,
    track,
)
from acsolve.analyses.question import Ask
from acsolve.analyses.sweep import (
    Array,
    Placement,
    Sweep,
    columns_of,
    frozen,
    refuse_nowhere,
    solver_for,
)
from acsolve.circuit.netlist import Netlist
from acsolve.equations.result import Solution, Status
from acsolve.equations.solver import Solver

GAIN_DB, PHASE_DEG = 0.01, 0.1  # what straight lines may err
MOST_PLACED = 200_000  # points of one adaptive sweep
_FINEST = 1e-12  # relative distance of two points below which none is put between them
_CHORD = 0.75  # share of the error that a chord may have, by its cubic
_CUBIC = 0.15  # share that the cubic may miss a test point by
_MOST_PIECES = 64  # of one interval in one round
_ROUNDS = 120
_KNOWN, _UNKNOWN = (3, 24), (50, 400)  # points a decade, or in all over linear frequency
_MIDDLE, _TWICE = (0.5,), (0.294, 0.689)  # where intervals are tested
_ALONG = np.linspace(0.1, 0.9, 9)[:, None]  # where a chord is compared with its cubic


@dataclass(frozen=True, slots=True, eq=False)
class _Points:
    """Solved points, ascending; `phase` is continuous, in radians."""

    hertz: Array
    phase: Array
    solution: Solution

    def merged(self, other: _Points) -> _Points:
        """Both, each frequency once."""
        _, order = np.unique(np.concatenate([self.hertz, other.hertz]), return_index=True)
        solution = _joined([self.solution, other.solution], order)
        phase = np.concatenate([self.phase, other.phase])[order]
        return _Points(np.concatenate([self.hertz, other.hertz])[order], phase, solution)

    def chosen(self, which: Array) -> _Points:
        """Some of the points, ascending."""
        order = np.flatnonzero(which)[np.argsort(self.hertz[which])]
        return _Points(self.hertz[order], self.phase[order], _joined([self.solution], order))

    def dead(self) -> Array:
        """Where there is no finite answer that a line could end at."""
        dead: Array = self.solution.status[0] >= Status.ZERO
        return dead

    def curves(self, *, linear: bool) -> tuple[Array, Array]:
        """Gain and phase in shares of their error, and their slopes, shapes (2, points)."""
        scale = np.array([[20 / np.log(10) / GAIN_DB], [180 / np.pi / PHASE_DEG]])
        gain = self.solution.gain_db()[0] / GAIN_DB
        per = 2j * np.pi * (np.ones_like(self.hertz) if linear else self.hertz)
        slope = per * self.solution.slope[0]
        return (
            np.stack([gain, self.phase * scale[1]]),
            np.stack([slope.real, slope.imag]) * scale,
        )


class _Engine:
    """Solves points and tells their continuous phase; keeps what the phase itself needed."""

    def __init__(self, solver: Solver, ladder: Ladder | None) -> None:
        self.solver = solver
        self.ladder = ladder
        self.pool: list[tuple[Array, Solution]] = []
        self.settled = True
        self.known: tuple[Track, Array] | None = None
        self.at_zero = np.nan

    @property
    def has_phase(self) -> bool:
        """Whether the response has a phase at all: not where it is zero everywhere."""
        return self.ladder is not None or self.known is not None

    def start(self, hertz: Array) -> _Points:
        """The first points, and the phase tracked through all of them."""
        solution = self._pooled(hertz)
        refuse_nowhere(solution)
        if self.ladder is not None and not np.isfinite(self.ladder.phase(hertz[hertz > 0])).all():
            self.ladder = None
        if self.ladder is None or hertz[0] == 0:
            self._track(hertz, solution)
        every = np.concatenate([item for item, _ in self.pool])
        inside = np.flatnonzero((every >= hertz[0]) & (every <= hertz[-1]))
        _, order = np.unique(every[inside], return_index=True)
        order = inside[order]
        joined = _joined([item for _, item in self.pool], order)
        self.pool.clear()
        return self._with_phase(every[order], joined)

    def _track(self, hertz: Array, solution: Solution) -> None:
        """Find the phase at 0 Hz and, where no ladder tells it, follow it from there."""
        local = self.solver.near_zero()[0]
        if local is None or local.vanishes:
            self.settled = local is not None
            return
        self.at_zero = at_zero_hertz(local)
        if self.ladder is None:
            lowest = float(hertz[hertz > 0][0])
            first = track(solution, hertz, 0).merged(self._tracked(2 * np.pi * below(lowest)))
            known, phase, self.settled = continuous(first, self._tracked, local)
            self.known = known, phase

    def solve(self, hertz: Array) -> _Points:
        """More points."""
        return self._with_phase(hertz, self.solver.solve(hertz))

    def _pooled(self, hertz: Array) -> Solution:
        solution = self.solver.solve(hertz)
        self.pool.append((hertz, solution))
        return solution

    def _tracked(self, omega: Array) -> Track:
        hertz = omega / (2 * np.pi)
        return track(self._pooled(hertz), hertz, 0)

    def _with_phase(self, hertz: Array, solution: Solution) -> _Points:
        """Points with their phase; 0 where there is none at all, not a number at a zero."""
        phase, angle, positive = np.zeros(len(hertz)), solution.phase()[0], hertz > 0
        if self.ladder is not None:
            phase[positive] = nearest(self.ladder.phase(hertz[positive]), angle[positive])
        elif self.known is not None:
            phase = at(*self.known, 2 * np.pi * hertz, angle)
        if self.has_phase:
            phase[~positive] = self.at_zero
        return _Points(hertz, phase, solution)


def adaptive_sweep(netlist: Netlist, ask: Ask, band: HertzBand, *, linear: bool = False) -> Sweep:
    """Answer a question over a band at points that the curves themselves call for.

    Straight lines between the points, over the logarithm of the frequency or, `linear`, over
    the frequency, are right within 0.01 dB and 0.1 degrees. `Sweep.placed` says what that
    rests on and where it ends.

    Raises
    ------
    AnalysisError
        [sweep.band] the band does not go from a lower to a higher frequency, or starts at
        0 Hz without being linear.
    EquationError
        as for `sweep`.

    Notes
    -----
    At a zero or pole on the axis the gain is infinite, and no line follows it: points come
    nearer to it by about a tenth of their distance each, down to 1e-12 of the frequency.

    """
    edges = _grid(band, _KNOWN, linear=linear)
    solver, ladder = solver_for(netlist, ask, edges), ladder_of(netlist, ask)
    positive = edges[edges > 0][[0, -1]]
    if ladder is not None and ladder.relaxing:
        near = NearAxis(modes=np.zeros(0, dtype=complex), complete=True)
    else:
        near = near_axis(solver, positive)
    first = edges if near.complete else _grid(band, _UNKNOWN, linear=linear)
    engine = _Engine(solver, ladder)
    points = engine.start(_with_marks(first, on_own_scale(near.modes, positive)))
    tests = _MIDDLE if near.complete else _TWICE
    placed = _placed(engine, points, tests, linear=linear)
    phase = np.where(placed.points.dead(), np.nan, placed.points.phase)
    if not engine.has_phase:
        phase = np.full(len(phase), np.nan)
    phase[placed.points.hertz == 0] = engine.at_zero
    columns = columns_of(placed.points.hertz, placed.points.solution, phase)
    return Sweep(
        settled=engine.settled,
        placed=Placement(
            gain_db=GAIN_DB,
            phase_deg=PHASE_DEG,
            linear=linear,
            sure=near.complete and engine.settled,
            complete=placed.complete,
            ends_hertz=placed.ends,
        ),
        **{name: frozen(column) for name, column in columns.items()},
    )


def _with_marks(first: Array, marks: Array) -> Array:
    """A grid and the marks inside it, without marks that lie as good as on another point."""
    inside = np.unique(np.concatenate([first, marks[(marks > first[0]) & (marks < first[-1])]]))
    apart = np.diff(inside, prepend=-1.0) > 2 * _FINEST * inside
    return np.asarray(inside[apart | np.isin(inside, first)])


def _grid(band: HertzBand, density: tuple[int, int], *, linear: bool) -> Array:
    if linear:
        return grid.linear(band, points=density[1])
    return grid.logarithmic(band, per_decade=density[0])


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Placed:
    points: _Points
    complete: bool
    ends: tuple[float, ...]


def _placed(engine: _Engine, points: _Points, tests: Sequence[float], *, linear: bool) -> _Placed:
    """Round by round, until every chord is confirmed or as short as may be.

    `open_` holds the frequencies at which intervals start that are not confirmed yet.
    """
    least = _FINEST * float(points.hertz[-1]) if linear else 0.0
    open_, ended = points.hertz[:-1], np.zeros(0)
    for _ in range(_ROUNDS):
        place = np.searchsorted(points.hertz, open_)
        width = points.hertz[place + 1] - open_
        wide = width > np.maximum(_FINEST * points.hertz[place + 1], least)
        ended, open_ = np.union1d(ended, open_[~wide]), open_[wide]
        if not len(open_):
            break
        found = _judged(engine, points, place[wide], tests, linear=linear)
        if len(points.hertz) + len(found.inner) > MOST_PLACED:
            break
        points = points.merged(found.tested).merged(engine.solve(found.inner))
        open_ = np.union1d(open_[~found.confirmed], [*found.tested.hertz, *found.inner])
    ends = _clusters(ended[_jumps(points, ended, linear=linear)], least)
    return _Placed(points=points, complete=not len(open_), ends=ends)


def _jumps(points: _Points, low: Array, *, linear: bool) -> Array:
    """Which of the shortest intervals no line crosses: the curve changes by more than it may."""
    place = np.searchsorted(points.hertz, low)
    value = points.curves(linear=linear)[0]
    with np.errstate(invalid="ignore"):  # infinite at zeros and poles
        change = np.abs(value[:, place + 1] - value[:, place]).max(axis=0)
    jumps: Array = ~(change < 1)
    return jumps


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Verdict:
    """Which intervals are confirmed, the test points to take in, and further ones inside."""

    confirmed: Array
    tested: _Points
    inner: Array


def _judged(
    engine: _Engine, points: _Points, place: Array, tests: Sequence[float], *, linear: bool
) -> _Verdict:
    """Test intervals, given by the place of their first point."""
    low, high = points.hertz[place], points.hertz[place + 1]
    shares = np.array(tests)[:, None]
    tried = engine.solve(_between(low, high, shares, linear=linear).ravel())
    value, slope = points.curves(linear=linear)
    width = high - low if linear else np.log1p((high - low) / low)
    ends = [item[:, None, :] for item in (value[:, place], value[:, place + 1])]
    rates = [item[:, None, :] * width for item in (slope[:, place], slope[:, place + 1])]
    got = tried.curves(linear=linear)[0].reshape(2, len(tests), len(place))
    with np.errstate(invalid="ignore"):  # infinite at zeros and poles: never confirmed
        chord = ends[0] + (ends[1] - ends[0]) * shares
        missed = np.abs(got - chord - _bulge(ends, rates, shares)).max(axis=(0, 1))
        error = np.abs(_bulge(ends, rates, _ALONG)).max(axis=(0, 1))
    trusted = missed < _CUBIC
    confirmed = trusted & (error < _CHORD)
    dead = points.dead()
    confirmed |= dead[place] & dead[place + 1] & tried.dead().reshape(len(tests), -1).all(axis=0)
    pieces = np.ceil(np.sqrt(error[trusted & ~confirmed] / _CHORD)).clip(2, _MOST_PIECES)
    inner = [
        _between(low[at_], high[at_], np.arange(1, count) / count, linear=linear)
        for at_, count in zip(np.flatnonzero(trusted & ~confirmed), pieces.astype(int), strict=True)
    ]
    taken = np.tile(~trusted & ~confirmed, len(tests))
    return _Verdict(
        confirmed=confirmed,
        tested=tried.chosen(taken),
        inner=np.concatenate([np.zeros(0), *inner]),
    )


def _bulge(ends: Sequence[Array], rates: Sequence[Array], share: Array) -> Array:
    """How far the cubic through both ends, with their slopes, lies above their chord."""
    change = ends[1] - ends[0]
    first, last = rates[0] - change, rates[1] - change
    bulge: Array = share * (1 - share) * ((1 - share) * first - share * last)
    return bulge


def _between(low: Array, high: Array, share: Array, *, linear: bool) -> Array:
    """Frequencies at shares of intervals, along the axis over which lines are straight."""
    if linear:
        return np.asarray(low + share * (high - low))
    return np.asarray(low + low * np.expm1(share * np.log1p((high - low) / low)))


def _joined(solutions: Sequence[Solution], order: Array) -> Solution:
    """Solutions of one question as one, in an order."""
    return Solution(
        **{
            item.name: frozen(
                np.concatenate([getattr(one, item.name) for one in solutions], axis=1)[:, order]
            )
            for item in fields(Solution)
        }
    )


def _clusters(hertz: Array, least: float) -> tuple[float, ...]:
    """One frequency for each group of shortest intervals that surrounds a zero or pole."""
    if not len(hertz):
        return ()
    apart = np.diff(hertz) > 1000 * np.maximum(_FINEST * hertz[1:], least)
    groups = np.split(hertz, 1 + np.flatnonzero(apart))
    return tuple(float(np.median(group)) if group[0] else 0.0 for group in groups)
