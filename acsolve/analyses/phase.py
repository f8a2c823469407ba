"""Phase that is continuous from 0 Hz, tracked along the frequency axis and not unwrapped.

Every sample brings ln|H|, the principal phase and the exact slope H'/H. Over an interval the
slope integrates to the change of ln H; where that disagrees with the samples, or the phase
turns by more than a sixth of a circle, the interval is divided. Each division is one more
vectorised solution.

A zero exactly on the axis turns the phase by +180° a time, as the limit of a zero slightly
left of the axis; a lossless pole by -180°, as the limit of a slightly damped one. Nearer to the
axis than 1e-12 of its frequency counts as on it. Near such a point H'/H = p/(s - s0), and two
samples tell both p and s0.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.equations.precise import Local
from acsolve.equations.result import Solution, Status

Array = NDArray[Any]

_LARGEST_TURN = 1.05  # radians in one interval
_AGREEMENT = 0.3  # radians and nepers between slope and samples
_CLOSE_AGREEMENT = 0.01  # the same where an interval may turn more, since points run out
_MOST_POINTS = 200_000  # beside those asked for
_ROUNDS = 80
_NARROW = 4e-12  # relative width below which an interval is not divided further
_ON_AXIS = 1e-12  # relative distance of a zero or pole from the axis that counts as none
_DOUBT = 3.0  # how far a fitted zero or pole may be off, in misfits between its samples
_NEARLY_WHOLE = 0.2  # how near a fitted order must be to a whole number to mean something
_ASYMPTOTE = 0.05  # radians, nepers: how near the start must be to the behaviour at 0 Hz
_BELOW = 10.0 ** -np.array([0.3, 1, 2, 3, 4, 6, 9, 12, 16, 20, 26, 32, 40])


@dataclass(frozen=True, slots=True, eq=False)
class Track:
    """Samples along the axis, ascending, without those at zeros and poles on the axis.

    `omega` in rad/s, `log_gain` in nepers, `angle` the principal phase in radians, `slope`
    H'/H in seconds; shapes (points,).
    """

    omega: Array
    log_gain: Array
    angle: Array
    slope: Array

    def merged(self, other: Track) -> Track:
        """Both tracks as one."""
        omega = np.concatenate([self.omega, other.omega])
        _, order = np.unique(omega, return_index=True)
        return Track(
            omega[order],
            np.concatenate([self.log_gain, other.log_gain])[order],
            np.concatenate([self.angle, other.angle])[order],
            np.concatenate([self.slope, other.slope])[order],
        )

    def above(self, first: int) -> Track:
        """The track from one sample upwards."""
        return Track(
            self.omega[first:], self.log_gain[first:], self.angle[first:], self.slope[first:]
        )


def track(solution: Solution, hertz: Array, row: int) -> Track:
    """The usable samples of one observed quantity: not those on top of a zero or pole."""
    good = (solution.status[row] < Status.ZERO) & (hertz > 0)
    good &= np.abs(solution.slope[row]) * 2 * np.pi * hertz * _ON_AXIS < 1
    return Track(
        2 * np.pi * hertz[good],
        solution.log_gain()[row, good],
        solution.phase()[row, good],
        solution.slope[row, good],
    )


@dataclass(frozen=True, slots=True, eq=False)
class Steps:
    """Change of phase over each interval of a track, and which intervals are settled."""

    turn: Array
    settled: Array
    singular: Array  # complex: s0 of a zero or pole on or near the axis inside, else nan


def continuous(
    known: Track, solve: Callable[[Array], Track], start: Local
) -> tuple[Track, Array, bool]:
    """The track refined, its continuous phase in radians, and whether all of it is settled.

    Parameters
    ----------
    known : samples, among them some below the lowest frequency of interest.
    solve : more samples at angular frequencies.
    start : the behaviour at 0 Hz, which the lowest samples must have reached.

    """
    known, first_phase = _from_asymptote(known, solve, start)
    steps = _steps(known, near_limit=False)
    most = len(known.omega) + _MOST_POINTS
    for _ in range(_ROUNDS):
        new = _divisions(known, steps)
        if not len(new):
            break
        known = known.merged(solve(new))
        steps = _steps(known, near_limit=2 * len(known.omega) > most)
        if len(known.omega) > most:
            break
    phase = first_phase + np.concatenate([[0.0], np.cumsum(steps.turn)])
    return known, phase, bool(steps.settled.all())


def at(known: Track, phase: Array, omega: Array, angle: Array) -> Array:
    """Continuous phase at frequencies of known principal phase, by the tracked samples around."""
    low = np.clip(np.searchsorted(known.omega, omega, side="right") - 1, 0, len(phase) - 1)
    high = np.clip(np.searchsorted(known.omega, omega), 0, len(phase) - 1)
    return nearest((phase[low] + phase[high]) / 2, angle)


def nearest(about: Array, angle: Array) -> Array:
    """The angles, by so many whole turns that each lies within half a turn of another."""
    return about + _wrapped(angle - about)


def below(lowest: float) -> Array:
    """Frequencies under the lowest one asked for, to meet the behaviour at 0 Hz."""
    return lowest * _BELOW[:8]


def _from_asymptote(
    known: Track, solve: Callable[[Array], Track], start: Local
) -> tuple[Track, float]:
    """The track from where it follows k·s^m, and its phase there."""
    ratio = _against_asymptote(known, start)
    close = np.abs(ratio) < _ASYMPTOTE
    close &= np.abs(1j * known.omega * known.slope - start.order) < _ASYMPTOTE
    if not close[0]:
        if known.omega[0] > _LOWEST:
            return _from_asymptote(known.merged(solve(known.omega[0] * _BELOW)), solve, start)
        close[0] = True
    first = int(np.argmin(close)) - 1 if not close.all() else len(close) - 1
    return known.above(first), float(at_zero_hertz(start) + ratio[first].imag)


def at_zero_hertz(start: Local) -> float:
    """Phase at 0 Hz in radians: 0 or pi for a real gain, a quarter turn for each zero there."""
    angle = float(np.angle(start.mantissa))
    if angle < _ALMOST_MINUS_PI:
        angle += 2 * np.pi
    return angle + start.order * np.pi / 2


_ALMOST_MINUS_PI = -np.pi * (1 - 1e-9)  # a negative gain is +180°, whatever its zero's sign


_LOWEST = 1e-100  # rad/s; a start that is still not asymptotic there is taken as it is


def _against_asymptote(known: Track, start: Local) -> Array:
    """ln of H / (k·s^m), its imaginary part within half a turn."""
    log_k = np.log(np.abs(start.mantissa)) + start.exponent * np.log(2)
    real = known.log_gain - log_k - start.order * np.log(known.omega)
    imag = known.angle - np.angle(start.mantissa) - start.order * np.pi / 2
    ratio: Array = real + 1j * _wrapped(imag)
    return ratio


def _wrapped(angle: Array) -> Array:
    wrapped: Array = (angle + np.pi) % (2 * np.pi) - np.pi
    return wrapped


def _steps(known: Track, *, near_limit: bool) -> Steps:
    """Judge every interval by its slopes, then those that fail by a zero or pole inside."""
    a, b = slice(None, -1), slice(1, None)
    omega, slope = known.omega, 1j * known.slope
    change = np.diff(known.log_gain) + 1j * np.diff(known.angle)
    ratio = np.log(omega[b] / omega[a])
    expected = (omega[a] * slope[a] + omega[b] * slope[b]) / 2 * ratio
    linear = (slope[a] + slope[b]) / 2 * np.diff(omega)
    better = _misfit(linear, change) < _misfit(expected, change)
    expected = np.where(better, linear, expected)
    misfit = _misfit(expected, change)
    small = np.abs(expected.imag) < _LARGEST_TURN
    settled = (misfit < _AGREEMENT) & small
    if near_limit:
        settled |= misfit < _CLOSE_AGREEMENT
    turn = expected.imag + _wrapped(change.imag - expected.imag)
    singular = np.full(len(turn), complex(np.nan, np.nan))
    _settle_by_factor(known, change, turn, settled, singular)
    return Steps(turn, settled, singular)


def _misfit(expected: Array, change: Array) -> Array:
    turned = np.abs(_wrapped(expected.imag - change.imag))
    misfit: Array = np.maximum(np.abs(expected.real - change.real), turned)
    return misfit


def _settle_by_factor(
    known: Track, change: Array, turn: Array, settled: Array, singular: Array
) -> None:
    """Settle open intervals beside or across a zero or pole: H = (s - s0)^p times the rest.

    The factor is integrated exactly, the rest by its slopes. Where s0 lies on the axis inside
    the interval the factor turns by +180° times p (the module's text says why).
    """
    open_ = np.flatnonzero(~settled)
    if not len(open_):
        return
    s_a, s_b = 1j * known.omega[open_], 1j * known.omega[open_ + 1]
    slope_a, slope_b = known.slope[open_], known.slope[open_ + 1]
    place: Array
    with np.errstate(all="ignore"):  # equal slopes: no such factor, not a number
        order = (s_a - s_b) / (1 / slope_a - 1 / slope_b)
        place = s_a - order / slope_a
        whole = np.round(order.real)
        found = (np.abs(order - whole) < _NEARLY_WHOLE) & (np.abs(whole) >= 1)
        apart = np.abs(s_a - whole / slope_a - s_b + whole / slope_b)
        doubt = _DOUBT * np.maximum(apart, np.abs(order - whole) * np.abs(s_b - s_a))
        narrow = (s_b - s_a).imag < 3 * _NARROW * s_b.imag
        on_axis = np.abs(place.real) < np.where(narrow, (s_b - s_a).imag, _ON_AXIS * s_b.imag)
        on_axis &= narrow | (doubt < _ON_AXIS * s_b.imag)
        inside = (place.imag > s_a.imag) & (place.imag < s_b.imag)
        near = (place.imag > s_a.imag - doubt) & (place.imag < s_b.imag + doubt)
        found &= on_axis | ~near | (np.abs(place.real) > doubt)
        singular[open_[inside]] = place[inside]
        place = np.where(on_axis, 1j * place.imag, place)
        rest = slope_a - whole / (s_a - place), slope_b - whole / (s_b - place)
        factor = whole * np.log((s_b - place) / (s_a - place))
        factor = np.where(on_axis & inside, factor.real + 1j * np.pi * whole, factor)
        others = (rest[0] + rest[1]) / 2 * (s_b - s_a)
    good = found & (_misfit(others, change[open_] - factor) < _AGREEMENT)
    good &= np.abs(others.imag) < _LARGEST_TURN
    expected = (factor + others).imag[good]
    turn[open_[good]] = expected + _wrapped(change.imag[open_[good]] - expected)
    settled[open_[good]] = True


def _divisions(known: Track, steps: Steps) -> Array:
    """Where the open intervals are divided: in the middle, and at what lies inside."""
    low, high = known.omega[:-1], known.omega[1:]
    open_ = ~steps.settled & (high - low > _NARROW * high)
    low, high, place = low[open_], high[open_], steps.singular[open_]
    middle = np.where(high > 2 * low, np.sqrt(low * high), low + 0.4871 * (high - low))
    beside = np.where(np.abs(place.real) > _ON_AXIS * high, np.abs(place.real), np.nan)
    extra = [place.imag + shift * beside for shift in (-1.0, 0.0, 1.0)]
    if not len(middle):
        return middle
    inside = [item[(item > low) & (item < high)] for item in extra]
    return np.unique(np.concatenate([middle, *inside]))
