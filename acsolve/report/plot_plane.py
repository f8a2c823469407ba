"""A response as one curve in a plane: its course between points, frequency marks, limits."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import pairwise
from math import ceil, log10
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from acsolve.report.axes import even_ticks, log_ticks, tick_text
from acsolve.report.plot_words import Word, arrows, place, visible_length

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from acsolve.analyses.sweep import Placement, Sweep

Floats = NDArray[np.float64]

_DEGREES, _DECIBELS = 1.0, 0.5  # between two drawn points
_MOST = 400  # drawn points between two computed ones
_BESIDE = 1e-3  # relative distance from an end on the axis that does not set the scale


@dataclass(frozen=True, slots=True, eq=False)
class Course:
    """A response along rising frequency: arrays of one shape, NaN where a curve is broken.

    value : gain and phase as a complex number, infinite where the gain is.
    """

    hertz: Floats
    gain_db: Floats
    phase_deg: Floats

    @property
    def value(self) -> NDArray[np.complex128]:
        """The response itself."""
        with np.errstate(over="ignore", under="ignore", invalid="ignore"):
            turned = np.exp(1j * np.radians(self.phase_deg))
            return np.asarray(10 ** (self.gain_db / 20) * turned)


def course(sweep: Sweep) -> Course:
    """What a sweep says between its points.

    Between placed points gain and phase are straight within the sweep's own bound, and are
    filled in as closely as a curve in a plane needs. Points that were named are joined as
    they are. Ends on the axis break the curve.
    """
    order = np.argsort(sweep.hertz, kind="stable")
    hertz = np.asarray(sweep.hertz, dtype=float)[order]
    gain = np.asarray(sweep.gain_db, dtype=float)[order]
    phase = np.asarray(sweep.phase_deg, dtype=float)[order]
    if np.isnan(phase).all():
        phase = np.degrees(np.angle(np.asarray(sweep.value)[order]))
    gain = np.where(np.isfinite(gain) & np.isfinite(phase), gain, np.nan)
    phase = np.where(np.isnan(gain), np.nan, phase)
    if sweep.placed is None:
        return Course(hertz, gain, phase)
    return _filled(hertz, gain, phase, sweep.placed)


def _filled(hertz: Floats, gain: Floats, phase: Floats, placed: Placement) -> Course:
    with np.errstate(divide="ignore"):
        axis = hertz if placed.linear else np.log(hertz)
    closer = np.fmax(np.abs(np.diff(phase)) / _DEGREES, np.abs(np.diff(gain)) / _DECIBELS)
    counts = np.clip(np.nan_to_num(np.ceil(closer), nan=1.0), 1, _MOST).astype(int)
    pieces: list[Any] = []
    for k, count in enumerate(counts):
        share = np.arange(count) / count
        columns = [part[k] + share * (part[k + 1] - part[k]) for part in (gain, phase)]
        between = axis[k] + share * (axis[k + 1] - axis[k]) if count > 1 else axis[k : k + 1]
        columns.insert(0, between if placed.linear else np.exp(between))
        columns[0][0] = hertz[k]
        if any(hertz[k] <= end <= hertz[k + 1] for end in placed.ends_hertz):
            columns = [np.append(part[:1], np.nan) for part in columns]
            columns[0][1] = hertz[k]
        pieces.append(np.stack(columns))
    pieces.append(np.stack([hertz[-1:], gain[-1:], phase[-1:]]))
    return Course(*np.concatenate(pieces, axis=1))


def sized(course: Course, placed: Placement | None) -> Any:
    """Which points set the scale: those known, and not right beside an end on the axis."""
    kept = np.isfinite(course.gain_db)
    for end in placed.ends_hertz if placed is not None else ():
        kept &= np.abs(course.hertz / end - 1) > _BESIDE if end else course.hertz > 0
    return kept if kept.any() else np.isfinite(course.gain_db)


def decades(course: Course, *, linear: bool) -> tuple[tuple[int, str], ...]:
    """Places on a course at round frequencies, and the names of these.

    Only frequencies at which the course has a point (filled in or computed) within a
    thousandth are named.
    """
    positive = course.hertz[(course.hertz > 0) & np.isfinite(course.gain_db)]
    if positive.size < 2 or positive[0] == positive[-1]:
        return ()
    low, high = float(positive[0]), float(positive[-1])
    found = []
    for hertz in even_ticks(low, high) if linear else log_ticks(low, high):
        near = np.where(np.isfinite(course.gain_db), np.abs(course.hertz - hertz), np.inf)
        k = int(np.argmin(near))
        if near[k] <= 1e-3 * hertz:
            found.append((k, tick_text(hertz, "Hz", 4)))
    return tuple(found)


def with_marks(found: Course, sweep: Sweep, *, linear: bool) -> Course:
    """The course with points at round frequencies, where straight lines say what is there."""
    if sweep.placed is None:
        return found
    low, high = float(found.hertz[0]), float(found.hertz[-1])
    positive = max(low, float(found.hertz[found.hertz > 0][0]))
    ticks = even_ticks(low, high) if linear else log_ticks(positive, high)
    wanted = np.array([tick for tick in ticks if low < tick < high])
    if not wanted.size:
        return found
    with np.errstate(divide="ignore"):
        axis, at = (found.hertz, wanted) if linear else (np.log(found.hertz), np.log(wanted))
    after = np.searchsorted(found.hertz, wanted)
    columns = (found.hertz, found.gain_db, found.phase_deg)
    return Course(
        *(
            np.insert(part, after, wanted if k == 0 else np.interp(at, axis, part))
            for k, part in enumerate(columns)
        )
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Drawn:
    """A curve as it was drawn: arrays of one shape, and the points with a round frequency."""

    x: Floats
    y: Floats
    hertz: Floats
    marks: tuple[tuple[int, str], ...]
    colour: str


def mark_curves(axes: Axes, curves: Sequence[Drawn]) -> None:
    """Dots with their frequencies where there is room, and arrows towards higher ones.

    The ends are named first. A stretch without a round frequency, as around a resonance,
    has three others named, to as many digits as tell them apart. Of several curves names
    stand close to their dots alone, in the colour of the curve.
    """
    several = len(curves) > 1
    lines = [(curve.x, curve.y) for curve in curves]
    few = len(curves) <= _FEW
    marked = [(curve, _all_marks(axes, curve, stretches=few)) for curve in curves]
    spots = [(float(curve.x[k]), float(curve.y[k])) for curve, marks in marked for k, _ in marks]
    for curve, marks in marked:
        where = [k for k, _ in marks]
        style: dict[str, Any] = {"color": curve.colour, "markersize": 4, "zorder": 4}
        axes.plot(curve.x[where], curve.y[where], "o", **style)
        ends = (min(where, default=0), max(where, default=0))
        words = [
            Word(float(curve.x[k]), float(curve.y[k]), text, *([curve.colour] if several else []))
            for k, text in sorted(marks, key=lambda mark: (mark[0] not in ends, mark[0]))
        ]
        place(axes, words, curves=lines, points=spots, rings=1 if several else 3)
    for curve in curves:
        arrows(axes, curve.x, curve.y, curve.colour)


def _all_marks(axes: Axes, curve: Drawn, *, stretches: bool) -> list[tuple[int, str]]:
    along = visible_length(axes, curve.x, curve.y)
    if along[-1] < _POINT and curve.marks:
        return [(curve.marks[0][0], "at every frequency")]
    if not stretches:
        return list(curve.marks)
    return [*curve.marks, *_between(along, curve.hertz, [k for k, _ in curve.marks])]


_FEW = 3  # curves, up to which stretches without a round frequency are marked too
_POINT = 3.0  # pixels, below which a curve is a point
_STRETCH = 0.4  # of the visible curve, that no mark may leave empty


def _between(along: Floats, hertz: Floats, marked: list[int]) -> list[tuple[int, str]]:
    """Marks on stretches of a curve that have none."""
    found = []
    for start, end in pairwise([0, *marked, len(along) - 1]):
        seen = float(along[end] - along[start])
        if seen <= _STRETCH * along[-1]:
            continue
        for share in (0.25, 0.5, 0.75):
            k, low, high = (
                int(np.searchsorted(along, along[start] + at * seen))
                for at in (share, share - 0.03, share + 0.03)
            )
            spread = max(float(hertz[high] - hertz[low]), 1e-12 * float(hertz[k]))
            digits = min(max(3, ceil(log10(hertz[k] / spread)) + 2), 12)
            found.append((k, tick_text(float(hertz[k]), "Hz", digits)))
    return found
