"""The Nyquist plane: imaginary over real part of a response, for positive frequencies."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.report.axes import even_ticks, tick_text
from acsolve.report.number import plain
from acsolve.report.plot import INK, Picture, curve_style, name_curves, plain_axes, titles
from acsolve.report.plot_plane import Course, Drawn, course, decades, mark_curves, sized, with_marks
from acsolve.report.plot_words import settle

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_GROWS_DB = 10.0  # a decade, from which on a gain is taken to grow without bound at an end
_WIDER = 4.0  # times the typical size, shown where the response grows without bound
_THIN: dict[str, Any] = {"color": INK, "linewidth": 0.9, "linestyle": (0, (4, 3)), "zorder": 1.5}


def nyquist_figure(picture: Picture) -> Figure:
    """Each response as a curve from low to high frequency, both axes to one scale.

    For ratios the unit circle, and the point -1 where it lies in the picture: it matters
    where the response is that of an open loop, which a circuit file does not say. Responses
    that grow without bound are shown up to four times their median and to every finite peak,
    which the picture says.
    """
    from matplotlib.figure import Figure

    drawn = Figure(figsize=(6.6, 6.8), layout="constrained")
    axes = drawn.subplots()
    plain_axes(axes)
    courses = [
        with_marks(course(item.sweep), item.sweep, linear=picture.linear) for item in picture.curves
    ]
    limits = [
        _limit(found, item.sweep) for found, item in zip(courses, picture.curves, strict=True)
    ]
    for line in (axes.axhline, axes.axvline):
        line(0, color=INK, linewidth=0.8, zorder=1)
    paths = [_path(found, limit) for found, limit in zip(courses, limits, strict=True)]
    for at, (path, item) in enumerate(zip(paths, picture.curves, strict=True)):
        axes.plot(path.real, path.imag, **curve_style(item, at))
    _square(axes, [_inside(found, limit) for found, limit in zip(courses, limits, strict=True)])
    notes = ["frequencies above 0 Hz alone, rising along the arrows"]
    if not picture.unit:
        notes += _unit_circle(axes)
    if np.isfinite(limits).any():
        notes.append("cut off at the edges: the response grows without bound")
    _names(axes, picture.unit)
    name_curves(drawn, axes, picture, beside=False)
    titles(axes, picture, notes)
    settle(axes)
    mark_curves(
        axes,
        [
            Drawn(
                x=path.real,
                y=path.imag,
                hertz=found.hertz,
                marks=tuple(
                    (k, text)
                    for k, text in decades(found, linear=picture.linear)
                    if _in_sight(axes, path[k])
                ),
                colour=curve_style(item, at)["color"],
            )
            for at, (path, found, item) in enumerate(
                zip(paths, courses, picture.curves, strict=True)
            )
        ],
    )
    return drawn


def _limit(found: Course, sweep: Any) -> float:
    """Up to which size a response is shown; infinity where it is bounded."""
    kept = sized(found, sweep.placed)
    gain, hertz = found.gain_db[kept], found.hertz[kept]
    if gain.size < 3 or not _unbounded(found, sweep):
        return float("inf")
    even = np.linspace(np.log(max(hertz[0], 1e-300)), np.log(hertz[-1]), 400)
    typical = np.median(np.interp(even, np.log(np.maximum(hertz, 1e-300)), gain))
    inner = kept[:-2] & kept[1:-1] & kept[2:]
    with np.errstate(invalid="ignore"):
        whole = found.gain_db
        inner &= (whole[1:-1] > whole[:-2]) & (whole[1:-1] > whole[2:])
    peak = float(whole[1:-1][inner].max(initial=-np.inf))
    return float(max(_WIDER * 10 ** (typical / 20), 1.15 * 10 ** (peak / 20)))


def _unbounded(found: Course, sweep: Any) -> bool:
    """Whether the gain still rises at an end of the band, or at a pole on the axis."""
    known = np.isfinite(found.gain_db) & (found.hertz > 0)
    log, gain = np.log10(found.hertz[known]), found.gain_db[known]
    far = gain.max() - np.median(gain) > 20
    ends = [_slope(log, gain, 0) < -_GROWS_DB, _slope(log, gain, -1) > _GROWS_DB]
    placed = sweep.placed
    for end in placed.ends_hertz if placed is not None else ():
        near = gain[np.abs(10**log - end) < 1e-6 * end]
        ends.append(near.size > 0 and float(near.max()) > float(np.median(gain)) + 60)
    return bool(far and any(ends)) or bool(np.isposinf(sweep.gain_db).any())


def _slope(log: Any, gain: Any, end: int) -> float:
    """Decibels a decade over the last tenth of a decade at an end."""
    inner = int(np.argmin(np.abs(log - (log[end] + (0.1 if end == 0 else -0.1)))))
    run = float(log[inner] - log[end])
    return float(gain[inner] - gain[end]) / run if run else 0.0


def _path(found: Course, limit: float) -> Any:
    """The curve, broken where it is far outside the picture."""
    with np.errstate(invalid="ignore"):
        value = found.value
        return np.where(np.abs(value) <= 3 * limit, value, complex(np.nan, np.nan))


def _inside(found: Course, limit: float) -> Any:
    value = found.value
    kept = np.isfinite(value)
    kept[kept] &= np.abs(value[kept]) <= limit
    return value[kept]


def _square(axes: Axes, values: list[Any]) -> None:
    """One scale for both axes, the origin and all curves in sight."""
    every = np.concatenate([*values, [0j]])
    middle = complex(
        (every.real.min() + every.real.max()) / 2, (every.imag.min() + every.imag.max()) / 2
    )
    half = 0.55 * max(np.ptp(every.real), np.ptp(every.imag)) or 1.0
    axes.set_xlim(middle.real - half, middle.real + half)
    axes.set_ylim(middle.imag - half, middle.imag + half)
    axes.set_aspect("equal", adjustable="box")


def _in_sight(axes: Axes, value: complex) -> bool:
    (left, right), (low, high) = axes.get_xlim(), axes.get_ylim()
    return bool(left <= value.real <= right and low <= value.imag <= high)


def _unit_circle(axes: Axes) -> list[str]:
    """The unit circle and -1 where they can be seen; what was drawn, in words."""
    (left, right), (low, high) = axes.get_xlim(), axes.get_ylim()
    size = right - left
    turn = np.linspace(0, 2 * np.pi, 361)
    x, y = np.cos(turn), np.sin(turn)
    seen = ((x > left) & (x < right) & (y > low) & (y < high)).any()
    if not seen or size > 60:
        return []
    axes.plot(x, y, **_THIN)
    if not (left < -1 < right and low < 0 < high):
        return ["dashed: unit circle"]
    axes.plot([-1], [0], "+", color=INK, markersize=9, markeredgewidth=1.4, zorder=4)
    axes.annotate(
        "−1", xy=(-1, 0), xytext=(5, -5), textcoords="offset points", va="top", color=INK,
        fontsize=8.5,
    )  # fmt: skip
    return ["dashed: unit circle; −1 matters where this is an open loop"]


def _names(axes: Axes, unit: str) -> None:
    from matplotlib.ticker import FixedLocator, FuncFormatter

    def text(value: float, _: Any) -> str:
        return tick_text(value, unit, 4) if unit else plain(value, 4).replace("-", "−")

    for axis, edges in ((axes.xaxis, axes.get_xlim()), (axes.yaxis, axes.get_ylim())):
        axis.set_major_locator(FixedLocator(even_ticks(*edges)))
        axis.set_major_formatter(FuncFormatter(text))
    axes.set_xlabel("real part", color=INK)
    axes.set_ylabel("imaginary part", color=INK)
