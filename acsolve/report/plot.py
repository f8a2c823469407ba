"""Pictures of responses: magnitude over phase, one frequency axis, SI labels."""

from __future__ import annotations

import io
import logging
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.report.axes import (
    degree_steps,
    set_frequency_axis,
    set_magnitude_axis,
)
from acsolve.report.plot_asymptotes import draw_asymptotes, name_asymptotes

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from acsolve.analyses.corners import Segment
    from acsolve.analyses.sweep import Sweep
    from acsolve.report.picture_kind import PictureKind

#: Hues told apart with any colour vision (after M. Okabe and K. Ito, "Color universal
#: design", 2008), each with a dash pattern and falling lightness for print without colour.
LINES: tuple[tuple[str, Any], ...] = (
    ("#0072b2", "solid"),
    ("#d55e00", (0, (7, 2.5))),
    ("#007f5f", (0, (1.6, 1.6))),
    ("#8a4f7d", (0, (8, 2, 1.6, 2))),
    ("#4d4d4d", (0, (3.5, 1.5))),
    ("#b8860b", (0, (8, 2, 1.6, 2, 1.6, 2))),
)
LARGEST = len(LINES)
INK, _PALE = "#222222", "#c9c9c9"
SETTINGS: Any = {
    "font.family": "DejaVu Sans",
    "font.size": 9.5,
    "svg.hashsalt": "acsolve",
    "svg.fonttype": "path",
    "axes.unicode_minus": True,
    "path.simplify": True,
    "text.parse_math": False,  # titles come from users; a dollar sign is one
}


@dataclass(frozen=True, slots=True, eq=False)
class Curve:
    """One response with its name and the frequencies to mark on it, in hertz."""

    sweep: Sweep
    label: str
    marks: tuple[float, ...] = ()
    line: tuple[str, Any] | None = None  # colour and dashes, where not those of its place


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Picture:
    """What is drawn: the curves, their unit and how the frequency axis runs.

    `asymptotes` belong to a lone curve of a gain.
    """

    curves: tuple[Curve, ...]
    kind: PictureKind = "gain"
    asymptotes: tuple[Segment, ...] = ()
    title: str = ""
    subtitle: str = ""
    unit: str = ""
    linear: bool = False
    level_db: float | None = None
    told_by: str | None = None  # a family: what its curves differ in


def picture_content(picture: Picture, ending: str) -> bytes:
    """The picture as the bytes of an svg, png or pdf file, the same on every run."""
    return rendered(lambda: figure(picture), ending)


def rendered(make: Callable[[], Figure], ending: str) -> bytes:
    """A figure, made under this program's settings, as the bytes of a file."""
    logging.getLogger("matplotlib").setLevel(logging.ERROR)
    import matplotlib as mpl

    with mpl.rc_context(SETTINGS):
        store = io.BytesIO()
        make().savefig(store, format=ending, dpi=160, metadata=_METADATA[ending], facecolor="white")
    return store.getvalue()


_METADATA: dict[str, dict[str, Any]] = {
    "svg": {"Date": None, "Creator": None},
    "png": {"Software": None},
    "pdf": {"CreationDate": None, "Creator": None, "Producer": None},
}


def figure(picture: Picture) -> Figure:
    """The picture as a figure with two axes, magnitude above phase."""
    from matplotlib.figure import Figure

    drawn = Figure(figsize=(7.2, 5.4), layout="constrained")
    upper, lower = drawn.subplots(2, 1, sharex=True, height_ratios=(3, 2))
    for axes in (upper, lower):
        plain_axes(axes)
    for place, curve in enumerate(picture.curves):
        _draw(upper, lower, curve, place, picture)
    band = _straight_band(picture)
    ends = draw_asymptotes(upper, picture.asymptotes, band, picture.unit) if band else []
    set_magnitude_axis(upper, np.append(_sizes(picture), ends), picture.unit)
    _phase_axis(lower, picture)
    set_frequency_axis(lower, _hertz(picture), linear=picture.linear)
    upper.tick_params(labelbottom=False)
    if picture.level_db is not None:
        _level_line(upper, picture)
    name_curves(drawn, upper, picture)
    titles(upper, picture)
    drawn.align_ylabels([upper, lower])
    if band:
        curve = picture.curves[0]
        name_asymptotes(
            upper,
            picture.asymptotes,
            band,
            picture.unit,
            marks=curve.marks,
            curve=(curve.sweep.hertz, magnitude(curve.sweep, picture.unit)),
        )
    return drawn


def _straight_band(picture: Picture) -> tuple[float, float] | None:
    """The band over which asymptotes are drawn; None where they would be no straight lines."""
    hertz = _hertz(picture)
    hertz = hertz[hertz > 0]
    if not picture.asymptotes or picture.linear or len(picture.curves) > 1 or not hertz.size:
        return None
    return float(hertz.min()), float(hertz.max())


def name_curves(drawn: Figure, axes: Axes, picture: Picture, *, beside: bool = True) -> None:
    """A legend where there are several curves; of a family, and with `beside` false, outside."""
    if picture.told_by is not None:
        drawn.legend(
            *axes.get_legend_handles_labels(),
            loc="outside right upper",
            title=picture.told_by,
            alignment="left",
            frameon=False,
            handlelength=3.2,
        )
    elif len(picture.curves) > 1 and beside:
        axes.legend(frameon=False, handlelength=3.2, loc="best")
    elif len(picture.curves) > 1:
        drawn.legend(
            *axes.get_legend_handles_labels(),
            loc="outside lower left",
            frameon=False,
            handlelength=3.2,
        )


def curve_style(curve: Curve, place: int) -> dict[str, Any]:
    """Colour, dashes and name of a curve; a dot at each point where there are few."""
    colour, dashes = curve.line or LINES[place % LARGEST]
    style = {"color": colour, "linestyle": dashes, "linewidth": 1.7, "label": curve.label}
    few = len(curve.sweep.hertz) <= 12
    return style | ({"marker": "o", "markersize": 4} if few else {})


def plain_axes(axes: Axes) -> None:
    """Axes without a box, a pale grid behind the curves."""
    for side in ("top", "right"):
        axes.spines[side].set_visible(False)
    for side in ("left", "bottom"):
        axes.spines[side].set_color(INK)
        axes.spines[side].set_linewidth(0.8)
    axes.grid(visible=True, which="major", color=_PALE, linewidth=0.6)
    axes.tick_params(colors=INK, width=0.8)
    axes.set_axisbelow(True)


def magnitude(sweep: Sweep, unit: str) -> Any:
    """What is drawn upwards: dB of a ratio, else the magnitude in its unit."""
    gain = np.asarray(sweep.gain_db, dtype=float)
    with np.errstate(over="ignore", under="ignore"):  # an infinite size is a gap in the curve
        size = 10 ** (gain / 20) if unit else gain
    return np.where(np.isfinite(size) & ((size > 0) | (not unit)), size, np.nan)


def _draw(upper: Axes, lower: Axes, curve: Curve, place: int, picture: Picture) -> None:
    style = curve_style(curve, place)
    size = magnitude(curve.sweep, picture.unit)
    upper.plot(curve.sweep.hertz, size, **style)
    lower.plot(curve.sweep.hertz, curve.sweep.phase_deg, **style)
    if curve.marks:
        _mark(upper, lower, curve, picture)


def _mark(upper: Axes, lower: Axes, curve: Curve, picture: Picture) -> None:
    """Dots at the marked frequencies; a single curve also gets lines and numbers."""
    hertz = np.asarray(curve.sweep.hertz, dtype=float)
    marks = [mark for mark in curve.marks if hertz[0] <= mark <= hertz[-1]]
    axis = hertz if picture.linear else np.log(np.maximum(hertz, 1e-300))
    where = np.array(marks) if picture.linear else np.log(np.array(marks))
    sizes = np.interp(where, axis, magnitude(curve.sweep, picture.unit))
    upper.plot(marks, sizes, "o", color=INK, markersize=4.5, zorder=4)
    if len(picture.curves) > 1:
        return
    line: dict[str, Any] = {
        "color": INK,
        "linewidth": 0.9,
        "linestyle": (0, (4, 3)),
        "zorder": 1.5,
    }
    for mark in marks:
        upper.axvline(mark, **line)
        lower.axvline(mark, **line)
    shares = (where - axis[0]) / max(axis[-1] - axis[0], 1e-300)
    for mark, row, left in zip(marks, *label_rows(shares.tolist()), strict=True):
        _number(upper, mark, row, left=left)


_LABEL = 0.15  # width of a number beside its line, as a share of the axis
_MOST_ROWS = 6


def label_rows(shares: list[float]) -> tuple[list[int], list[bool]]:
    """Row and side of each number, so that none lies over another.

    The first of several stands left of its line, as does one at the right edge.
    """
    rows: list[int] = []
    sides: list[bool] = []
    taken: list[tuple[int, float, float]] = []
    for place, share in enumerate(shares):
        left = share > 1 - _LABEL or (place == 0 and len(shares) > 1 and share > _LABEL)
        start, end = (share - _LABEL, share) if left else (share, share + _LABEL)
        row = next(
            row
            for row in range(len(shares) + 1)
            if not any(row == other and start < b and a < end for other, a, b in taken)
        )
        taken.append((row, start, end))
        rows.append(row)
        sides.append(left)
    return rows, sides


def _number(axes: Axes, mark: float, row: int, *, left: bool) -> None:
    from acsolve.report.axes import tick_text

    if row >= _MOST_ROWS:
        return
    number_beside(axes, mark, tick_text(mark, "Hz", 4), left=left, row=row)


def number_beside(axes: Axes, place: float, text: str, *, left: bool, row: int = 0) -> None:
    """A number at the foot of an upright line."""
    axes.annotate(
        text,
        xy=(place, 0.0),
        xycoords=("data", "axes fraction"),
        xytext=(-4 if left else 4, 5 + 14 * row),
        textcoords="offset points",
        ha="right" if left else "left",
        va="bottom",
        color=INK,
        fontsize=8.5,
        bbox={"facecolor": "white", "edgecolor": "none", "pad": 1.0, "alpha": 0.85},
        zorder=3,
    )


def _level_line(axes: Axes, picture: Picture) -> None:
    assert picture.level_db is not None, "drawn only where there is a level"
    height = 10 ** (picture.level_db / 20) if picture.unit else picture.level_db
    axes.axhline(height, color=INK, linewidth=0.9, linestyle=(0, (4, 3)), zorder=1.5)


def titles(axes: Axes, picture: Picture, notes: Sequence[str] = ()) -> None:
    """Title, question in words and notes on what is drawn, flush left with the axes."""
    from textwrap import wrap

    lines = wrap(picture.title, 78)[:2]
    below = wrap(picture.subtitle, 100)[:2] + [line for note in notes for line in wrap(note, 100)]
    if lines:
        axes.set_title(
            "\n".join(lines), loc="left", fontsize=11, color=INK, pad=8 + 13 * len(below)
        )
    if below:
        axes.annotate(
            "\n".join(below),
            xy=(0, 1),
            xycoords="axes fraction",
            xytext=(0, 6),
            textcoords="offset points",
            va="bottom",
            fontsize=9,
            color="#555555",
        )


def _phase_axis(axes: Axes, picture: Picture) -> None:
    phases = [np.asarray(curve.sweep.phase_deg, dtype=float) for curve in picture.curves]
    known = np.concatenate([item[np.isfinite(item)] for item in phases] or [np.zeros(0)])
    low, high = (float(known.min()), float(known.max())) if known.size else (0.0, 0.0)
    ticks = degree_steps(low, high)
    axes.set_yticks(ticks)
    span = ticks[-1] - ticks[0]
    axes.set_ylim(ticks[0] - 0.04 * span, ticks[-1] + 0.04 * span)
    axes.set_ylabel("phase (°)", color=INK)


def _sizes(picture: Picture) -> Any:
    return np.concatenate([magnitude(curve.sweep, picture.unit) for curve in picture.curves])


def _hertz(picture: Picture) -> Any:
    return np.concatenate([np.asarray(curve.sweep.hertz) for curve in picture.curves])
