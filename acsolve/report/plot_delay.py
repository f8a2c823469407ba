"""Pictures of delays: group delay above phase delay, one frequency axis."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.report.axes import set_frequency_axis, tick_text
from acsolve.report.plot import INK, Picture, curve_style, name_curves, plain_axes, titles

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

_BEYOND = 3.0  # times the largest group delay, up to where phase delays are shown


def delay_figure(picture: Picture) -> Figure:
    """Group delay -dφ/dω above phase delay -φ/ω, in seconds.

    Where the phase does not start from zero the phase delay grows without bound towards
    0 Hz: it is shown up to three times the largest group delay, and the picture says so.
    """
    from matplotlib.figure import Figure

    drawn = Figure(figsize=(7.2, 5.4), layout="constrained")
    upper, lower = drawn.subplots(2, 1, sharex=True)
    for axes in (upper, lower):
        plain_axes(axes)
        axes.axhline(0, color=INK, linewidth=0.8, zorder=1)
    for place, curve in enumerate(picture.curves):
        style = curve_style(curve, place)
        upper.plot(curve.sweep.hertz, _finite(curve.sweep.group_delay_s), **style)
        lower.plot(curve.sweep.hertz, _finite(curve.sweep.phase_delay_s), **style)
    set_frequency_axis(
        lower,
        np.concatenate([np.asarray(curve.sweep.hertz) for curve in picture.curves]),
        linear=picture.linear,
    )
    upper.tick_params(labelbottom=False)
    _seconds(upper, "group delay")
    _seconds(lower, "phase delay")
    notes = _limit(lower, picture)
    name_curves(drawn, upper, picture)
    titles(upper, picture, notes)
    drawn.align_ylabels([upper, lower])
    return drawn


def _finite(values: Any) -> Any:
    array = np.asarray(values, dtype=float)
    return np.where(np.isfinite(array), array, np.nan)


def _known(picture: Picture, name: str) -> Any:
    found = [_finite(getattr(curve.sweep, name)) for curve in picture.curves]
    together = np.concatenate(found)
    return together[np.isfinite(together)]


def _limit(axes: Axes, picture: Picture) -> tuple[str, ...]:
    """Keep phase delays that grow without bound out of the scale; say so where that is done."""
    group, phase = _known(picture, "group_delay_s"), _known(picture, "phase_delay_s")
    if not phase.size:
        return ("the phase delay is not known here",)
    largest = float(np.abs(group).max()) if group.size else 0.0
    if largest < 1e-6 * float(np.abs(phase).max()):
        largest = float(np.median(np.abs(phase)))  # a constant phase: there is no group delay
    most = _BEYOND * largest
    if not 0 < most < float(np.abs(phase).max()):
        return ()
    low = max(float(phase.min()), -most)
    high = min(float(phase.max()), most)
    room = 0.05 * (max(high, 0.0) - min(low, 0.0))
    axes.set_ylim(min(low, 0.0) - room, max(high, 0.0) + room)
    return (f"phase delay shown up to ±{tick_text(most, 's', 3)}: it grows beyond towards 0 Hz",)


def _seconds(axes: Axes, label: str) -> None:
    from matplotlib.ticker import FuncFormatter, MaxNLocator

    axes.set_ylabel(label, color=INK)
    axes.margins(y=0.06)
    axes.yaxis.set_major_locator(MaxNLocator(nbins=6, steps=[1, 2, 2.5, 5, 10]))
    axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: tick_text(value, "s", 4)))
