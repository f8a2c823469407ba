"""The step response: its formula, its figures, its curve."""

from __future__ import annotations

from typing import Any

from acsolve.report.entry import Entry, Heading
from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tree import Row, Sign, Symbol
from acsolve.report.note.ink.figure import figure_ink
from acsolve.report.note.model import Block, Formula, Picture, Section, Table, Words, cell, say
from acsolve.report.note.wording import SPACE, lines, quantity, ratio, with_names
from acsolve.report.step_text import response_unit

_LONGEST = 200
_NAMES = {"k": "K", "q": "Q", "k1": "K1", "q_z": "Q_z"}  # as the standard form calls them
_FIGURES = (
    ("rise_s", "Rise, 10 to 90\u00a0%"),
    ("delay_s", "Delay to 50\u00a0%"),
    ("settling_s", "Settled within"),
)


def step(chapter: Chapter) -> Section | None:
    """What a unit step that starts at 0 brings."""
    found = chapter.step
    if found is None:
        return None
    entry = Entry(kind="step", heading=Heading(), ask=chapter.ask, step=found)
    unit = response_unit(entry)
    blocks: list[Block] = [*_formula(found)]
    rows = _figures(found, unit)
    if rows:
        blocks.append(
            Table(
                head=(("Figure",), ("Value",)),
                rows=rows,
                sides=("left", "right"),
                caption="Figures of the step response.",
            )
        )
    if found.seconds is not None:
        from acsolve.report.plot_time import time_figure

        caption = "Step response, with its final value, the settling band and levels."
        blocks.append(
            Picture(
                ink=figure_ink(lambda: time_figure([entry])), caption=caption, description=caption
            )
        )
    blocks += [say(f"{text[:1].upper()}{text[1:]}.") for text in found.remarks]
    return Section(title="Step response", level=3, blocks=tuple(blocks))


def _formula(found: Any) -> list[Block]:
    if found.formulas is None:
        return []
    written: list[Chunks] = []
    for case in found.formulas.cases:
        texts = {key: with_names(text, _NAMES) for key, text in case.texts(safe=False).items()}
        label = Row((Symbol("y"), Sign("("), Symbol("t"), Sign(")")))
        if len(texts["step"]) > _LONGEST:
            return []
        written += lines(label, texts["step"])
        for name in case.helpers:
            written += lines(Symbol(name), texts[name])
    return [say("For t > 0:"), Formula(lines=tuple(written))] if written else []


def _figures(found: Any, unit: str) -> tuple[tuple[Words, ...], ...]:
    if found.form.symbols:
        return ()
    rows: list[tuple[Words, ...]] = [
        (cell("Just after 0"), cell(quantity(found.initial_value, unit)))
    ]
    if found.final_value is None:
        return (*rows, (cell("Final value"), cell(f"none: {found.final_reason}")))
    rows.append((cell("Final value"), cell(quantity(found.final_value, unit))))
    reasons = dict(found.figures.reasons)
    for name, label in _FIGURES:
        value = getattr(found, name)
        shown = f"none: {reasons.get(name, '')}" if value is None else quantity(value, "s")
        if name == "settling_s":
            label += f" {ratio(100 * float(found.band))}{SPACE}%"  # noqa: PLW2901
        rows.append((cell(label), cell(shown)))
    if found.overshoot is not None:
        over = "none"
        if found.peak_s is not None:
            over = f"{ratio(100 * found.overshoot)}{SPACE}% at {quantity(found.peak_s, 's')}"
        rows.append((cell("Overshoot"), cell(over)))
    return tuple(rows)
