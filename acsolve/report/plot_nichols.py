"""The Nichols plane: gain in dB over phase in degrees."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.report.axes import degree_steps, picture_unit
from acsolve.report.plot import INK, Picture, curve_style, name_curves, plain_axes, titles
from acsolve.report.plot_plane import Drawn, course, decades, mark_curves, sized, with_marks
from acsolve.report.plot_words import settle

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure


def nichols_figure(picture: Picture) -> Figure:
    """Each response as a curve from low to high frequency, the phase continuous.

    For ratios the point 0 dB at -180° where it lies in the picture: it matters where the
    response is that of an open loop. Zeros and poles on the frequency axis, where the gain
    has no end, do not set the scale, and the picture says so.
    """
    from matplotlib.figure import Figure

    drawn = Figure(figsize=(7.2, 5.8), layout="constrained")
    axes = drawn.subplots()
    plain_axes(axes)
    courses = [
        with_marks(course(item.sweep), item.sweep, linear=picture.linear) for item in picture.curves
    ]
    for at, (found, item) in enumerate(zip(courses, picture.curves, strict=True)):
        axes.plot(found.phase_deg, found.gain_db, **curve_style(item, at))
    notes = ["frequency rises along the arrows"]
    if _scales(axes, picture, courses):
        notes.append("cut off at the edges: at zeros and poles on the frequency axis")
    if not picture.unit:
        notes[0] += _critical(axes)
    unit = picture_unit(picture.unit)
    axes.set_xlabel("phase (°)", color=INK)
    axes.set_ylabel(f"gain (dB re 1 {unit})" if unit else "gain (dB)", color=INK)
    name_curves(drawn, axes, picture, beside=False)
    titles(axes, picture, notes)
    settle(axes)
    low, high = axes.get_ylim()
    mark_curves(
        axes,
        [
            Drawn(
                x=found.phase_deg,
                y=found.gain_db,
                hertz=found.hertz,
                marks=tuple(
                    (k, text)
                    for k, text in decades(found, linear=picture.linear)
                    if low <= found.gain_db[k] <= high
                ),
                colour=curve_style(item, at)["color"],
            )
            for at, (found, item) in enumerate(zip(courses, picture.curves, strict=True))
        ],
    )
    return drawn


def _scales(axes: Axes, picture: Picture, courses: list[Any]) -> bool:
    """Limits and ticks; whether something lies outside them."""
    from matplotlib.ticker import FuncFormatter, MaxNLocator

    every = [np.isfinite(found.gain_db) for found in courses]
    kept = [
        sized(found, item.sweep.placed) for found, item in zip(courses, picture.curves, strict=True)
    ]
    gain = np.concatenate([found.gain_db[mask] for found, mask in zip(courses, kept, strict=True)])
    phase = np.concatenate(
        [found.phase_deg[mask] for found, mask in zip(courses, every, strict=True)]
    )
    if not gain.size:
        return False
    low, high = float(gain.min()), float(gain.max())
    room = 0.06 * (high - low) if high - low > 1e-6 else 1.0
    axes.set_ylim(low - room, high + room)
    ticks = degree_steps(float(phase.min()), float(phase.max()))
    span = ticks[-1] - ticks[0]
    axes.set_xticks(ticks)
    axes.set_xlim(ticks[0] - 0.04 * span, ticks[-1] + 0.04 * span)
    axes.yaxis.set_major_locator(MaxNLocator(nbins=9, steps=[1, 2, 3, 6, 10]))
    number = FuncFormatter(lambda value, _: f"{value:g}".replace("-", "−"))
    axes.yaxis.set_major_formatter(number)
    axes.xaxis.set_major_formatter(number)
    outer = np.concatenate(
        [found.gain_db[mask] for found, mask in zip(courses, every, strict=True)]
    )
    return bool((outer < low - room).any() or (outer > high + room).any())


def _critical(axes: Axes) -> str:
    (left, right), (low, high) = axes.get_xlim(), axes.get_ylim()
    if not (left < -180 < right and low < 0 < high):
        return ""
    axes.plot([-180], [0], "+", color=INK, markersize=9, markeredgewidth=1.4, zorder=4)
    return "; +: 0 dB at −180°, for open loops"
