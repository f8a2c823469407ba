"""The step response: its formula, its figures, a curve for each duration asked for."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.report.entry import Entry, Heading
from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tree import Node, Row, Sign, Symbol
from acsolve.report.note.ink.figure import figure_ink
from acsolve.report.note.model import (
    Block,
    Formula,
    Inline,
    Math,
    Picture,
    Section,
    Table,
    Words,
    cell,
    say,
)
from acsolve.report.note.wording import (
    SPACE,
    lines,
    listed,
    quantity,
    ratio,
    sentence,
    tree,
    with_names,
)
from acsolve.report.step_text import response_unit

if TYPE_CHECKING:
    from acsolve.analyses.step import StepAnswer
    from acsolve.analyses.time_formula import TimeFormula

_LONGEST = 200
_NAMES = {"k": "K", "q": "Q", "k1": "K1", "q_z": "Q_z", "wr": "w_r", "wd": "w_d"}
_UNITS = {"a": "1/s", "w0": "rad/s", "wd": "rad/s", "wr": "rad/s", "tau": "s"}
_FIGURES = (
    ("rise_s", "Rise, 10 to 90\u00a0%"),
    ("delay_s", "Delay to 50\u00a0%"),
    ("settling_s", "Settled within"),
)


def step(chapter: Chapter) -> Section | None:
    """What a unit step that starts at 0 brings."""
    if not chapter.in_time:
        return None
    found = chapter.in_time[0]
    entry = Entry(kind="step", heading=Heading(), ask=chapter.ask, step=found)
    unit = response_unit(entry)
    blocks: list[Block] = [*_formula(found)]
    rows = figure_rows(found, unit)
    if rows:
        blocks.append(
            Table(
                head=(("Figure",), ("Value",)),
                rows=rows,
                sides=("left", "right"),
                caption="Figures of the step response.",
            )
        )
    blocks += [_curve(chapter, item) for item in chapter.in_time if item.seconds is not None]
    blocks += [say(sentence(text)) for text in found.remarks]
    return Section(title="Step response", level=3, blocks=tuple(blocks))


def _curve(chapter: Chapter, found: StepAnswer) -> Block:
    from acsolve.report.plot_time import time_figure

    entry = Entry(kind="step", heading=Heading(), ask=chapter.ask, step=found)
    also = list(_drawn(found))
    caption = f"Step response{', with ' if also else ''}{listed(also)}."
    figure = figure_ink(lambda: time_figure([entry]))
    return Picture(ink=figure, caption=caption, description=caption)


def _drawn(found: StepAnswer) -> Iterable[str]:
    """What stands in the picture beside the curve."""
    if not found.final_value or found.seconds is None:
        return
    end = float(found.seconds[-1])
    yield "its final value (dashed) and the settling band (grey)"
    levels = zip(("10", "50", "90"), found.figures.levels_s, strict=True)
    shown = [word for word, seconds in levels if seconds is not None and 0 < seconds <= end]
    if shown:
        yield f"{listed(shown)}\u00a0% of it (dots)"
    if found.settling_s is not None and 0 < found.settling_s <= end:
        yield "the time it has settled"


def _formula(found: StepAnswer) -> list[Block]:
    """y(t) with the names in it; of several cases each with its condition."""
    if found.formulas is None:
        return []
    blocks: list[Block] = []
    for case in found.formulas.cases:
        texts = {key: with_names(text, _NAMES) for key, text in case.texts(safe=False).items()}
        label = Row((Symbol("y"), Sign("("), Symbol("t"), Sign(")")))
        if len(texts["step"]) > _LONGEST:
            return []
        written: list[Chunks] = lines(label, texts["step"])
        for name in case.helpers:
            written += lines(Symbol(_NAMES.get(name, name)), texts[name])
        condition = _condition(case) if found.form.symbols else None
        head: tuple[Inline, ...] = ("For t > 0:",)
        if condition is not None:
            head = ("For t > 0, where ", Math(condition), ":")
        blocks += [say(*head), Formula(lines=tuple(written))] if written else []
    numbers = _numbers(found, found.formulas.cases[0])
    return [*blocks, *([say("In numbers: ", *numbers, ".")] if blocks and numbers else [])]


def _condition(case: TimeFormula) -> Node | None:
    """`abs(q) > 1/2` as |Q| > 1/2."""
    text = case.condition
    if text is None:
        return None
    left, sign, right = text.split()
    first, second = tree(with_names(left, _NAMES)), tree(right)
    return None if first is None or second is None else Row((first, Sign(sign), second))


def _numbers(found: StepAnswer, case: TimeFormula) -> list[Inline]:
    """The names in the formula as numbers."""
    from acsolve.equations.evaluate import Evaluator, FloatArithmetic
    from acsolve.report.values import standard_numbers

    if found.form.symbols or found.formulas is None:
        return []
    raw = standard_numbers(found.form, dict.fromkeys(found.formulas.parts))
    known: dict[str, Any] = {name: value.real for name, value in raw.items()}
    ends = {"y_0": found.initial_value, "y_end": found.final_value}
    known |= {name: end for name, end in ends.items() if name in found.formulas.parts}
    if not set(found.formulas.parts) <= set(known):
        return []  # a negative value makes one of them imaginary
    for name, expression in case.helpers.items():
        known[name] = Evaluator({}, FloatArithmetic(), overrides=known)(expression, None)
    words: list[Inline] = []
    for name, value in known.items():
        if value is None or not np.isfinite(value):
            continue
        unit = _UNITS.get(name, "")
        shown = quantity(float(value), unit) if unit == "s" else f"{ratio(float(value))} {unit}"
        words += [", " if words else "", Math(Symbol(_NAMES.get(name, name))), " = "]
        words += [shown.strip().replace(" ", SPACE)]
    return words


def figure_rows(found: StepAnswer, unit: str) -> tuple[tuple[Words, ...], ...]:
    """The figures of a step with numbers, each with its name."""
    if found.form.symbols or found.initial_value is None:
        return ()
    rows: list[tuple[Words, ...]] = [
        (cell("Just after 0"), cell(quantity(found.initial_value, unit)))
    ]
    if found.final_value is None:
        return (*rows, (cell("Final value"), cell(f"none: {found.final_reason}")))
    rows.append((cell("Final value"), cell(quantity(found.final_value, unit))))
    reasons = dict(found.figures.reasons)
    if not any(getattr(found, name) is not None for name, _ in _FIGURES):
        reason = next(iter(reasons.values()), "")
        rows.append((cell("Rise, delay and settling"), cell(f"none: {reason}")))
        return (*rows, *_extreme(found, unit))
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


_ROUNDS = 4  # of a finer grid around the largest value
_FINER = 101


def _extreme(found: StepAnswer, unit: str) -> Iterable[tuple[Words, ...]]:
    """The largest value of a response that goes back to zero, and when, on ever finer grids."""
    if found.seconds is None or found.value is None or len(found.seconds) < 3:
        return
    times, values = found.seconds, found.value
    for _ in range(_ROUNDS):
        size = np.where(np.isfinite(values), np.abs(values), 0.0)
        top = int(size.argmax())
        low, high = max(top - 1, 0), min(top + 1, len(times) - 1)
        times = np.linspace(times[low], times[high], _FINER)
        values = found.at(times)
    top = int(np.abs(values).argmax())
    if values[top] and np.isfinite(values[top]):
        when = quantity(float(times[top]), "s", 3) if times[top] else "0"
        yield cell("Largest value"), cell(f"{quantity(float(values[top]), unit)} at {when}")
