"""Pictures of responses in time: the curve, its final value, settling band and levels."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.errors import AnalysisError, Diagnostic
from acsolve.report.axes import picture_unit, tick_text
from acsolve.report.entry import Entry, curve_words
from acsolve.report.number import plain
from acsolve.report.plot import (
    INK,
    LARGEST,
    LINES,
    Picture,
    number_beside,
    plain_axes,
    rendered,
    titles,
)
from acsolve.report.step_text import response_unit

if TYPE_CHECKING:
    from matplotlib.axes import Axes
    from matplotlib.figure import Figure

    from acsolve.analyses.step import StepAnswer

_DASHED: dict[str, Any] = {"color": INK, "linewidth": 0.9, "linestyle": (0, (4, 3)), "zorder": 1.5}
_BAND = "#dcdcdc"


def time_picture(entries: Sequence[Entry], ending: str) -> bytes:
    """Responses in time as the bytes of an svg, png or pdf file, the same on every run.

    Raises
    ------
    AnalysisError
        [option.value] the curves differ in unit, or are too many for one picture;
        [question.no-value] one has no numbers.
    """
    _refuse_unfit(entries)
    return rendered(lambda: time_figure(entries), ending)


def _refuse_unfit(entries: Sequence[Entry]) -> None:
    if len(entries) > LARGEST or len({response_unit(entry) for entry in entries}) > 1:
        raise AnalysisError(
            Diagnostic(
                code="option.value",
                message=f"one picture cannot hold these {len(entries)} answers",
                hint="Pick one with --from and --to, or --into.",
            )
        )
    for entry in entries:
        if entry.step is not None and entry.step.seconds is None:
            listed = ", ".join(entry.step.form.symbols[:6])
            raise AnalysisError(
                Diagnostic(
                    code="question.no-value",
                    message=f"{listed} have no value, so there is no curve to draw",
                    hint="Give values in the file or with --let.",
                )
            )


def time_figure(entries: Sequence[Entry]) -> Figure:
    """The picture: one axis of time, one of the response."""
    from matplotlib.figure import Figure

    drawn = Figure(figsize=(7.2, 4.3), layout="constrained")
    axes = drawn.subplots()
    plain_axes(axes)
    subtitle, labels = curve_words([entry.ask for entry in entries if entry.ask is not None])
    for place, (entry, label) in enumerate(zip(entries, labels, strict=True)):
        _curve(axes, entry, label, place)
    _axes(axes, entries)
    if len(entries) == 1:
        _figures(axes, entries[0])
    else:
        axes.legend(frameon=False, handlelength=3.2, loc="best")
    heading = entries[0].heading
    variant = f' (variant "{heading.variant}")' if heading.variant else ""
    words = _words(entries[0])
    titles(
        axes,
        Picture(
            curves=(),
            title=(heading.title or "") + variant,
            subtitle=f"{words}: {subtitle}" if subtitle else words,
        ),
    )
    return drawn


def _words(entry: Entry) -> str:
    from acsolve.report.text import DRIVES

    assert entry.step is not None, "a step entry holds a response in time"
    drive = entry.step.drive
    if drive.hertz is None:
        return DRIVES[drive.kind]
    length = "" if drive.cycles is None else f"{float(drive.cycles):g} cycles of "
    return f"response to {length}a sine of {tick_text(float(drive.hertz), 'Hz')}"


def _answer(entry: Entry) -> StepAnswer:
    assert entry.step is not None, "a step entry holds a response in time"
    return entry.step


def _curve(axes: Axes, entry: Entry, label: str, place: int) -> None:
    colour, dashes = LINES[place]
    found = _answer(entry)
    assert found.seconds is not None, "refused before where there is no curve"
    assert found.value is not None, "refused before where there is no curve"
    value = np.where(np.isfinite(found.value), found.value, np.nan)
    axes.plot(
        found.seconds, value, color=colour, linestyle=dashes, linewidth=1.7, label=label, zorder=3
    )
    if found.initial_value and found.drive.kind == "step" and np.isfinite(found.initial_value):
        axes.plot([0, 0], [0, found.initial_value], color=colour, linewidth=1.7, zorder=3)


def _axes(axes: Axes, entries: Sequence[Entry]) -> None:
    """Labels with SI prefixes, the whole curve in sight."""
    from matplotlib.ticker import FuncFormatter, MaxNLocator

    unit = response_unit(entries[0])
    answers = [_answer(entry) for entry in entries]
    end = max(float(found.seconds[-1]) for found in answers if found.seconds is not None)
    axes.set_xlim(0, end)
    axes.set_xlabel("time", color=INK)
    axes.set_ylabel(f"response ({picture_unit(unit)})" if unit else "response", color=INK)
    axes.xaxis.set_major_locator(MaxNLocator(nbins=8, steps=[1, 2, 2.5, 5, 10]))
    axes.yaxis.set_major_locator(MaxNLocator(nbins=7, steps=[1, 2, 2.5, 5, 10]))
    axes.xaxis.set_major_formatter(FuncFormatter(lambda value, _: tick_text(value, "s", 4)))
    axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: _tick(value, unit)))
    axes.margins(y=0.06)
    if all(np.nanmin(found.value) >= 0 for found in answers if found.value is not None):
        axes.set_ylim(bottom=0)
    axes.axhline(0, color=INK, linewidth=0.8, zorder=1)


def _tick(value: float, unit: str) -> str:
    """A value with its unit and prefix; a plain number where it has none."""
    return tick_text(value, unit, 4) if unit else plain(value, 4).replace("-", "−")


def _figures(axes: Axes, entry: Entry) -> None:
    """The final value with its band, dots at the levels, a line where it has settled."""
    found = _answer(entry)
    final = found.final_value
    if final is None or found.drive.kind != "step" or not final:
        return
    share = float(found.band)
    axes.axhspan(final * (1 - share), final * (1 + share), color=_BAND, linewidth=0, zorder=0.5)
    axes.axhline(final, **_DASHED)
    end = axes.get_xlim()[1]
    for level, seconds in zip((0.1, 0.5, 0.9), found.figures.levels_s, strict=True):
        if seconds is None or not 0 < seconds <= end:
            continue
        axes.plot([seconds], [level * final], "o", color=INK, markersize=4.5, zorder=4)
        axes.annotate(
            f"{100 * level:.0f} %",
            xy=(seconds, level * final),
            xytext=(7, -3 if final > 0 else 3),
            textcoords="offset points",
            va="center",
            color=INK,
            fontsize=8.5,
        )
    settled = found.settling_s
    if settled is not None and 0 < settled <= end:
        axes.axvline(settled, **_DASHED)
        number_beside(
            axes, settled, f"settled {tick_text(settled, 's', 4)}", left=settled > 0.75 * end
        )
