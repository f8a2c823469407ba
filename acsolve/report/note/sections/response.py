"""The response as a picture and as numbers at the frequencies that matter."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.report.entry import question_text, unit_sign
from acsolve.report.note import places
from acsolve.report.note.facts import Chapter
from acsolve.report.note.ink.figure import figure_ink
from acsolve.report.note.model import Block, Picture, Section, Table, Words, cell, say
from acsolve.report.note.wording import DIGITS, SPACE, frequencies, listed, quantity, size_words
from acsolve.report.plot import Curve, figure
from acsolve.report.plot import Picture as Plot
from acsolve.report.plot_asymptotes import asymptotes_of, visible

if TYPE_CHECKING:
    from acsolve.analyses.sweep import Sweep

_FLAT = 1e-9  # dB and degrees


def response(chapter: Chapter) -> Section | None:
    """Gain and phase over frequency, with cutoffs and asymptotes."""
    if not chapter.curves:
        return None
    unit = unit_sign(chapter.ask)
    if all(map(is_constant, chapter.curves)):
        size = size_words(float(chapter.curves[0].gain_db[0]), unit)
        words = f"It does not depend on frequency: {size} everywhere, so nothing is drawn."
        return Section(title="Response over frequency", level=3, blocks=(say(words),))
    blocks: list[Block] = [_picture(chapter, swept, unit) for swept in chapter.curves]
    if not any(np.isfinite(swept.gain_db).any() for swept in chapter.curves):
        blocks.append(say("The response is zero at every frequency."))
    return Section(title="Response over frequency", level=3, blocks=tuple(blocks))


def _picture(chapter: Chapter, swept: Sweep, unit: str) -> Block:
    """One band; the caption names what really stands in it."""
    low, high = float(swept.hertz.min()), float(swept.hertz.max())
    marks = tuple(hertz for hertz in places.marks(chapter.cutoffs) if low <= hertz <= high)
    asymptotes = visible(_asymptotes(chapter), low, high)
    words = question_text(chapter.ask)
    plot = Plot(
        curves=(Curve(swept, words, marks),),
        asymptotes=asymptotes,
        unit=unit,
        level_db=_level(chapter),
    )
    told = "Magnitude" if unit else "Gain"
    also = [*(["cutoffs (dots, dashed lines)"] if marks else [])]
    also += ["asymptotes (dash-dotted)"] if asymptotes else []
    caption = f"{told} and phase of the {words}{', with ' if also else ''}{' and '.join(also)}."
    ink = figure_ink(lambda: figure(plot))
    return Picture(ink=ink, caption=caption, description=caption)


def is_constant(swept: Any) -> bool:
    """Whether gain and phase are the same at every frequency, to more digits than are shown."""
    sizes = (swept.gain_db, swept.phase_deg)
    return all(np.isfinite(item).all() and np.ptp(item) < _FLAT for item in sizes)


def _asymptotes(chapter: Chapter) -> Any:
    return () if chapter.transfer is None else asymptotes_of(chapter.transfer)


def _level(chapter: Chapter) -> float | None:
    from acsolve.report.number import gain_in_db

    if len(chapter.cutoffs) != 1 or not chapter.cutoffs[0].reference.gain:
        return None
    return gain_in_db(chapter.cutoffs[0].reference.gain) + chapter.cutoffs[0].level_db


def numbers(chapter: Chapter) -> Section | None:
    """Gain, phase and delay at cutoffs, corners and whole decades."""
    swept = chapter.table
    if swept is None:
        return None
    unit = unit_sign(chapter.ask)
    size = "Magnitude" if unit else "Gain"
    delayed = chapter.ask.quantity != "impedance"  # of one pair nothing travels
    shown = frequencies(swept.hertz.tolist(), DIGITS)
    rows = [
        (cell(text), *_row(swept, place, unit, delayed=delayed)) for place, text in enumerate(shown)
    ]
    if is_constant(swept):
        rows = [(cell("every"), *rows[0][1:])]
    columns = [size, "Phase", *(["Group delay"] if delayed else [])]
    return Section(
        title="Numbers",
        level=3,
        blocks=(
            Table(
                head=(("Frequency",), *((word,) for word in columns)),
                rows=tuple(rows),
                sides=("right", "right", "right", *(("right",) if delayed else ())),
                caption=f"{listed([columns[0], *map(str.lower, columns[1:])])} at the ends of "
                "bands, at cutoffs and peaks, at whole decades, and at poles and zeros.",
            ),
        ),
    )


def _row(swept: Any, place: int, unit: str, *, delayed: bool) -> tuple[Words, ...]:
    gain = float(swept.gain_db[place])
    phase, delay = float(swept.phase_deg[place]), float(swept.group_delay_s[place])
    size = size_words(gain, unit)
    if np.isinf(gain):
        phase = delay = np.nan
    turned = "–" if not np.isfinite(phase) else f"{phase + 0.0:.1f}{SPACE}°"
    turned = turned.replace("-0.0", "0.0").replace("-", "−")
    cells = [cell(size), cell(turned)]
    if delayed:
        cells.append(cell("–" if not np.isfinite(delay) else quantity(delay, "s")))
    return tuple(cells)
