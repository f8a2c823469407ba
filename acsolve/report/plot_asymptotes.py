"""Asymptotes of a gain: straight lines between its corners, their slopes, the corners."""

from __future__ import annotations

from collections.abc import Sequence
from itertools import pairwise
from math import log, sqrt
from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.report.plot_words import Word, place, settle, telling

if TYPE_CHECKING:
    from matplotlib.axes import Axes

    from acsolve.analyses.corners import Segment
    from acsolve.analyses.transfer import TransferAnswer

MOST_CORNERS = 6  # in one picture; more would say less than the curve does
_SHORTEST = 0.12  # of the band's decades, below which a segment does not tell its slope
_SAME = 0.02  # relative distance of a corner and a cutoff that need one number
_THIN: dict[str, Any] = {
    "color": "#555555",
    "linewidth": 0.9,
    "linestyle": (0, (6, 2, 1.2, 2)),
    "zorder": 1.8,
}


def asymptotes_of(found: TransferAnswer) -> tuple[Segment, ...]:
    """The asymptotes of a numeric answer; none where it has no poles and zeros to know."""
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.corners import segments

    form = found.form
    if not isinstance(form, ClosedForm) or found.roots is None or form.symbols:
        return ()
    return () if form.text() == "0" else segments(form, found.roots)


def visible(segments: Sequence[Segment], low: float, high: float) -> tuple[Segment, ...]:
    """The segments that lie over a band; none where their corners would clutter it."""
    corners = [item.low for item in segments if low < item.low < high]
    if len(corners) > MOST_CORNERS or low <= 0:
        return ()
    return tuple(item for item in segments if item.low < high and item.high > low)


def _ends(item: Segment, low: float, high: float, unit: str) -> tuple[list[float], list[float]]:
    hertz = [max(item.low, low), min(item.high, high)]
    return hertz, [_height(item.gain_db(value), unit) for value in hertz]


def _height(gain_db: float, unit: str) -> float:
    return float(10 ** (gain_db / 20)) if unit else gain_db


def draw_asymptotes(
    axes: Axes, segments: Sequence[Segment], band: tuple[float, float], unit: str
) -> list[float]:
    """Draw the segments over a band, in dB or on the logarithmic axis of a unit.

    Returns
    -------
    The heights of their ends, which the axis has to hold.
    """
    shown = visible(segments, *band)
    heights: list[float] = []
    for item in shown:
        hertz, height = _ends(item, *band, unit)
        axes.plot(hertz, height, **_THIN)
        heights += height
    return heights


def name_asymptotes(
    axes: Axes,
    segments: Sequence[Segment],
    band: tuple[float, float],
    unit: str,
    *,
    marks: Sequence[float],
    curve: tuple[Any, Any],
) -> None:
    """Slopes and corner frequencies where there is room; a marked cutoff has its number."""
    shown = visible(segments, *band)
    if not shown:
        return
    settle(axes)
    words, corners = [], []
    for before, after in pairwise(shown):
        corner = after.low
        height = _height(after.gain_db(corner), unit)
        corners.append((corner, height))
        assert before.high == after.low, "segments follow each other"
    names = telling([corner for corner, _ in corners], "Hz")
    for (corner, height), name in zip(corners, names, strict=True):
        if all(abs(mark / corner - 1) > _SAME for mark in marks):
            words.append(Word(corner, height, f"corner {name}"))
    for item in shown:
        (low, high), _ = _ends(item, *band, unit)
        if len(shown) > 1 and item.power and log(high / low) > _SHORTEST * log(band[1] / band[0]):
            middle = sqrt(low * high)
            text = f"{item.slope_db:+d} dB/decade".replace("-", "−")
            words.append(Word(middle, _height(item.gain_db(middle), unit), text))
    if corners:
        axes.plot(
            *zip(*corners, strict=True),
            "s",
            color="#555555",
            markersize=3.5,
            zorder=3,
            fillstyle="none",
        )
    lines = [curve, *(_ends(item, *band, unit) for item in shown)]
    lines += [([mark, mark], axes.get_ylim()) for mark in marks]
    heights = np.interp(np.log(marks), np.log(np.maximum(curve[0], 1e-300)), curve[1])
    dots = list(zip(marks, heights.tolist(), strict=True))
    place(axes, words, curves=lines, points=[*corners, *dots])
