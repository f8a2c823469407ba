"""Poles and zeros in the s plane: crosses and circles, on axes that keep all of them apart."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import ceil, floor, log10
from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.errors import AnalysisError, Diagnostic
from acsolve.report.axes import even_ticks, tick_text
from acsolve.report.number import hertz, plain
from acsolve.report.plot import INK, Picture, plain_axes, titles
from acsolve.report.plot_words import Word, place, settle, telling

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from acsolve.analyses.pole_record import PoleAnswer, RootRecord, RootTable

_WIDE = 40.0  # largest over smallest part, up to which an axis stays linear
_NOISE = 1e-12  # of the largest root; smaller parts do not set a threshold
_MOST_CIRCLES = 3
_MANY = 16  # roots, from which on a name far from its root could be another's
_MOST_TICKS = 4  # on each side of a logarithmic axis
_PALE = "#9a9a9a"


@dataclass(frozen=True, slots=True)
class Style:
    """How one sort of root is drawn; told apart by its marker alone."""

    name: str
    marker: str
    colour: str
    size: float
    hollow: bool = False


POLE = Style("pole", "x", "#0072b2", 8.0)
ZERO = Style("zero", "o", "#d55e00", 8.0, hollow=True)
HIDDEN = Style("hidden mode, cancelled from the answer", "D", "#4d4d4d", 9.5, hollow=True)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PoleMap:
    """What is drawn: poles, zeros and hidden modes of one answer, in rad/s."""

    roots: PoleAnswer
    title: str = ""
    subtitle: str = ""

    def __post_init__(self) -> None:
        """Refuse what has no places in the plane.

        Raises
        ------
        AnalysisError
            [equations.not-rational] there are no poles and zeros to speak of;
            [question.no-value] values are missing.
        """
        form = self.roots.form
        if form.symbols:
            raise AnalysisError(
                Diagnostic(
                    code="question.no-value",
                    message=f"{', '.join(form.symbols[:6])} have no value, so poles and zeros "
                    "have no place to be drawn at",
                    hint="Give values in the file or with --let, and leave --symbolic out.",
                )
            )
        if not form.rational:
            raise no_map("the response is no ratio of polynomials in s: it has no finite set "
                         "of poles")  # fmt: skip
        if self.roots.poles is None or self.roots.zeros is None:
            raise no_map("the poles and zeros of so large a network are not known")


def no_map(message: str) -> AnalysisError:
    """The error where there is nothing to put into the s plane."""
    return AnalysisError(
        Diagnostic(
            code="equations.not-rational",
            message=message,
            hint="Draw --picture gain, delay, nyquist or nichols instead.",
        )
    )


def sorts(found: PoleMap) -> tuple[tuple[Style, tuple[RootRecord, ...]], ...]:
    """The roots to draw, sort by sort; those that are empty are left out."""
    tables = ((POLE, found.roots.poles), (ZERO, found.roots.zeros), (HIDDEN, found.roots.hidden))
    return tuple((style, _records(table)) for style, table in tables if _records(table))


def _records(table: RootTable | None) -> tuple[RootRecord, ...]:
    return () if table is None else tuple(item for item in table.roots if item.value is not None)


def poles_figure(found: PoleMap) -> Figure:
    """Crosses for poles, circles for zeros, diamonds for hidden modes; numbers say how often.

    An axis on which the parts of the roots span more than a factor of 40 is linear near zero
    and logarithmic beyond a threshold that the picture states.
    """
    from matplotlib.figure import Figure

    drawn_sorts = sorts(found)
    values = np.array([item.value for _, items in drawn_sorts for item in items], dtype=complex)
    flat = not np.any(values.imag)
    drawn = Figure(figsize=(7.2, 3.4 if flat else 5.8), layout="constrained")
    axes = drawn.subplots()
    plain_axes(axes)
    for line in (axes.axhline, axes.axvline):
        line(0, color=INK, linewidth=0.9, zorder=1)
    notes = _scales(axes, values)
    if any(item.error is not None for _, items in drawn_sorts for item in items):
        notes.append("eigenvalues, not certified")
    if not values.size:
        notes.append("neither poles nor zeros: the response does not depend on frequency")
    for style, items in drawn_sorts:
        _draw(axes, style, items)
    if drawn_sorts:
        drawn.legend(loc="outside lower left", ncols=len(drawn_sorts), frameon=False)
    titles(axes, Picture(curves=(), title=found.title, subtitle=found.subtitle), notes)
    settle(axes)
    _name(axes, drawn_sorts)
    return drawn


def _draw(axes: Axes, style: Style, items: Sequence[RootRecord]) -> None:
    values = [complex(item.value) for item in items if item.value is not None]
    axes.plot(
        [value.real for value in values],
        [value.imag for value in values],
        linestyle="none",
        marker=style.marker,
        color=style.colour,
        markersize=style.size,
        markeredgewidth=1.7,
        markerfacecolor="none" if style.hollow else style.colour,
        label=style.name,
        clip_on=False,
        zorder=4,
    )
    for item, value in zip(items, values, strict=True):
        if item.multiplicity > 1:
            axes.annotate(
                f"{item.multiplicity}×",
                xy=(value.real, value.imag),
                xytext=(-6, 5),
                textcoords="offset points",
                ha="right",
                va="bottom",
                color=style.colour,
                fontsize=8.5,
                fontweight="bold",
                zorder=5,
            )


def _name(axes: Axes, drawn: Sequence[tuple[Style, Sequence[RootRecord]]]) -> None:
    """Natural frequency and Q beside each pole and zero of the upper half, where there is room."""
    named = [
        item
        for style, items in drawn
        for item in items
        if style is not HIDDEN and item.value and item.value.imag >= 0
    ]
    sizes = [hertz(item.w0 or 0.0) for item in named]
    few = len(named) <= _MANY
    texts = telling(sizes, "Hz") if few else [tick_text(size, "Hz", 4) for size in sizes]
    words = [
        Word(item.value.real, item.value.imag, root_name(item, text))
        for item, text in zip(named, texts, strict=True)
        if item.value
    ]
    spots = []
    for _, items in drawn:
        for item in items:
            value = complex(item.value or 0)
            spots.append((value.real, value.imag))
    reach = axes.get_xlim(), axes.get_ylim()
    lines = [(reach[0], (0, 0)), ((0, 0), reach[1])]
    place(axes, words, curves=lines, points=spots, rings=1 if len(spots) > _MANY else 3)


def root_name(item: RootRecord, text: str) -> str:
    """The natural frequency of a root, and the quality factor of a pair."""
    if item.q is None or not np.isfinite(item.q):
        return text
    return f"{text}, Q {plain(item.q, 3)}".replace("-", "−")


def _scales(axes: Axes, values: Any) -> list[str]:
    """Scale, limits and ticks of both axes; what a reader must know about them."""
    parts = (np.append(values.real, 0.0), np.append(values.imag, 0.0))
    floor_at = _NOISE * float(np.abs(values).max(initial=0.0))
    real, imag = (_scale_of(part, floor_at) for part in parts)
    if _alike(real, imag):
        _even(axes, *parts)
        _circles(axes, values)
        notes = []
    else:
        for axis, scale in ((axes.xaxis, real), (axes.yaxis, imag)):
            _one_axis(axis, scale)
        notes = _thresholds(real, imag)
    axes.set_xlabel("real part (rad/s)", color=INK)
    axes.set_ylabel("imaginary part (rad/s)", color=INK)
    return notes


@dataclass(frozen=True, slots=True)
class Scale:
    """An axis: the outermost parts on it, the smallest and largest size that is not zero."""

    low: float
    high: float
    smallest: float
    largest: float

    @property
    def threshold(self) -> float | None:
        """Up to where it is linear, a power of ten; None where all of it is."""
        if self.largest <= _WIDE * self.smallest:
            return None
        return float(10.0 ** floor(log10(self.smallest)))


def _scale_of(part: Any, floor_at: float) -> Scale:
    sizes = np.abs(part[np.abs(part) > floor_at])
    smallest, largest = (float(sizes.min()), float(sizes.max())) if sizes.size else (0.0, 0.0)
    return Scale(float(part.min()), float(part.max()), smallest, largest)


def _alike(real: Scale, imag: Scale) -> bool:
    """Whether one linear scale shows both axes."""
    known = [item for item in (real, imag) if item.largest]
    if len(known) < 2:
        return False
    return max(item.largest for item in known) <= _WIDE * min(item.smallest for item in known)


def _even(axes: Axes, real: Any, imag: Any) -> None:
    """Both axes to one linear scale, zero in sight."""
    room = 0.14 * max(np.ptp(real), np.ptp(imag))
    axes.set_xlim(real.min() - room, real.max() + room)
    axes.set_ylim(imag.min() - room, imag.max() + room)
    axes.set_aspect("equal", adjustable="datalim")
    for axis in (axes.xaxis, axes.yaxis):
        _ticks(axis)


def _one_axis(axis: Any, scale: Scale) -> None:
    """An axis of its own: linear, or linear near zero and logarithmic beyond."""
    axes, name = axis.axes, axis.axis_name
    limits, scaling = getattr(axes, f"set_{name}lim"), getattr(axes, f"set_{name}scale")
    if not scale.largest:
        limits(-1, 1)
        _ticks(axis, [0.0])
        return
    threshold = scale.threshold
    if threshold is None:
        room = 0.14 * (scale.high - scale.low)
        limits(scale.low - room, scale.high + room)
        _ticks(axis, even_ticks(scale.low - room, scale.high + room))
        return
    scaling("symlog", linthresh=threshold, linscale=0.7)
    further = (scale.largest / threshold) ** 0.08 * 2
    low = scale.low * further if scale.low < 0 else -threshold
    high = scale.high * further if scale.high > 0 else threshold
    limits(min(low, -threshold), max(high, threshold))
    _ticks(axis, _signed_decades(low, high, threshold))


def _signed_decades(low: float, high: float, threshold: float) -> list[float]:
    """Zero and powers of ten on both sides, few enough to be read."""
    first = round(log10(threshold))
    last = floor(log10(max(-low, high)) + 1e-9)
    step = max(1, ceil((last - first) / _MOST_TICKS))
    powers = [10.0**power for power in range(first, last + 1, step)]
    return [0.0, *(s * v for v in powers for s in (1, -1) if low <= s * v <= high)]


def _ticks(axis: Any, ticks: Sequence[float] | None = None) -> None:
    """Ticks at given places, or at round ones of a linear axis whose limits are still open."""
    from matplotlib.ticker import FixedLocator, FuncFormatter, MaxNLocator, NullLocator

    even = MaxNLocator(nbins=6, steps=[1, 2, 5, 10])
    axis.set_major_locator(even if ticks is None else FixedLocator(sorted(ticks)))
    axis.set_minor_locator(NullLocator())
    axis.set_major_formatter(FuncFormatter(lambda value, _: tick_text(value, "", 4)))


def _thresholds(real: Scale, imag: Scale) -> list[str]:
    words = [
        f"{name} axis linear within ±{tick_text(scale.threshold, 'rad/s')}"
        for name, scale in (("real", real), ("imaginary", imag))
        if scale.threshold is not None
    ]
    return [f"{', '.join(words)}, logarithmic beyond"] if words else []


def _circles(axes: Axes, values: Any) -> None:
    """Circles of constant natural frequency through the pairs, where they are few."""
    sizes = sorted({float(f"{abs(value):.9e}") for value in values if value.imag > 0})
    if len(sizes) > _MOST_CIRCLES:
        return
    turn = np.linspace(np.pi / 2, 3 * np.pi / 2, 181)
    if any(value.real > 0 and value.imag for value in values):
        turn = np.linspace(0, 2 * np.pi, 361)
    for size in sizes:
        axes.plot(
            size * np.cos(turn), size * np.sin(turn),
            color=_PALE, linewidth=0.9, linestyle=(0, (4, 3)), zorder=1.5,
        )  # fmt: skip
