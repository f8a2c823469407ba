"""The response as a picture and as numbers at the frequencies that matter."""

from __future__ import annotations

from typing import Any

import numpy as np

from acsolve.report.entry import question_text, unit_sign
from acsolve.report.note.facts import Chapter
from acsolve.report.note.ink.figure import figure_ink
from acsolve.report.note.model import Block, Picture, Section, Table, Words, cell, say
from acsolve.report.note.wording import SPACE, decibels, quantity
from acsolve.report.plot import Curve, figure
from acsolve.report.plot import Picture as Plot


def response(chapter: Chapter) -> Section | None:
    """Gain and phase over frequency, with cutoffs and asymptotes."""
    swept = chapter.curve
    if swept is None:
        return None
    unit = unit_sign(chapter.ask)
    marks = tuple(
        item.hertz
        for answer in chapter.cutoffs
        for item in answer.cutoffs
        if item.hertz is not None
    )
    asymptotes = _asymptotes(chapter)
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
    blocks: list[Block] = [
        Picture(ink=figure_ink(lambda: figure(plot)), caption=caption, description=caption)
    ]
    if not np.isfinite(swept.gain_db).any():
        blocks.append(say("The response is zero at every frequency."))
    return Section(title="Response over frequency", level=3, blocks=tuple(blocks))


def _asymptotes(chapter: Chapter) -> Any:
    from acsolve.report.plot_asymptotes import asymptotes_of

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
    return Section(
        title="Numbers",
        level=3,
        blocks=(
            Table(
                head=(("Frequency",), (size,), ("Phase",), ("Group delay",)),
                rows=tuple(_row(swept, place, unit) for place in range(len(swept.hertz))),
                sides=("right",) * 4,
                caption=f"{size}, phase and group delay where it matters: at cutoffs, at poles and "
                "zeros, and at round frequencies between.",
            ),
        ),
    )


def _row(swept: Any, place: int, unit: str) -> tuple[Words, ...]:
    gain = float(swept.gain_db[place])
    size = quantity(10 ** (gain / 20), unit) if unit and gain < 6000 else decibels(gain)
    phase, delay = float(swept.phase_deg[place]), float(swept.group_delay_s[place])
    turned = "–" if not np.isfinite(phase) else f"{phase + 0.0:.1f}{SPACE}°"
    late = "–" if not np.isfinite(delay) else quantity(delay, "s")
    turned = turned.replace("-0.0", "0.0").replace("-", "−")
    return cell(quantity(float(swept.hertz[place]), "Hz")), cell(size), cell(turned), cell(late)
