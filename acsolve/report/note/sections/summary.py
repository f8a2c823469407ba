"""Key results: each question with the few figures that a reader looks for first."""

from __future__ import annotations

from collections.abc import Iterator, Mapping, Sequence
from math import pi
from typing import TYPE_CHECKING

import numpy as np

from acsolve.analyses.closed_form import ClosedForm
from acsolve.report.entry import Entry, Heading, unit_sign
from acsolve.report.note.facts import Chapter, Facts
from acsolve.report.note.formula.tree import Symbol
from acsolve.report.note.formula.tree import width as width_of
from acsolve.report.note.model import Inline, Math, Section, Table, Words, cell
from acsolve.report.note.places import best_first, is_besides, leading, marks
from acsolve.report.note.sections.response import is_constant
from acsolve.report.note.sections.result import limit_words
from acsolve.report.note.sections.times import figure_rows
from acsolve.report.note.wording import (
    SPACE,
    decibels,
    frequencies,
    listed,
    node_words,
    quantity,
    ratio,
    size_words,
    tree,
    with_names,
)
from acsolve.report.number import HALF_POWER_DB, gain_in_db
from acsolve.report.step_text import response_unit

if TYPE_CHECKING:
    from acsolve.analyses.cutoff import Cutoff, CutoffAnswer
    from acsolve.analyses.sweep import Sweep

_MOST_CUTOFFS = 6  # of one level
_WIDEST = 24.0  # digits of a formula in the table
_TIMES = ("Rise", "Delay", "Settled", "Overshoot", "Largest")  # figures of a step told here
_QUANTITIES = {
    "voltage-ratio": "Voltage",
    "current-ratio": "Current",
    "transimpedance": "Transimpedance",
    "transadmittance": "Transadmittance",
}
_VERDICTS = {
    "stable": "stable",
    "marginal": "marginal",
    "unstable": "not stable",
    "conditional": "on conditions, see there",
    "undecided": "not decided",
}

Row = tuple[Words, Words]


def results(facts: Facts) -> Section | None:
    """A short table in front of all derivations; the sections behind tell how and why."""
    told = leading(facts.chapters)
    rows: list[tuple[Words, ...]] = []
    for chapter in facts.chapters:
        for place, row in enumerate(_chapter(chapter, told)):
            rows.append((cell(_question(chapter) if place == 0 else ""), *row))
    rows += [
        (cell(item.kind.capitalize()), cell("Not answered"), cell(item.words.partition(" ")[2]))
        for item in facts.unanswered
    ]
    if not rows:
        return None
    table = Table(
        head=(("Question",), ("Figure",), ("Value",)),
        rows=tuple(rows),
        sides=("left", "left", "left"),
        caption=f"{_VALUES[_has_numbers(facts)]}; the sections below tell how each comes about.",
    )
    return Section(title="Key results", blocks=(table,))


_VALUES = {True: "With nominal values", False: "In the symbols of the parts"}


def _has_numbers(facts: Facts) -> bool:
    values = (value for part in facts.netlist.parts for value in part.values.values())
    return any(value.expression is not None for value in values)


def _question(chapter: Chapter) -> str:
    ask = chapter.ask
    target = f"ammeter {ask.ammeter}" if ask.ammeter else node_words(ask.target)
    if ask.quantity == "impedance":
        return f"Impedance into {target}"
    if ask.source is None:
        return f"{'Current of' if ask.observes_current else 'Voltage at'} {target}"
    head = "Two-port" if "two-port" in chapter.kinds else _QUANTITIES.get(ask.quantity, "Response")
    return f"{head} from {node_words(ask.source)} to {target}"


def _chapter(chapter: Chapter, told: Sequence[float]) -> Iterator[Row]:
    for item in chapter.problems:
        yield cell("No answer"), cell(item.message)
    if chapter.two_port is not None:
        yield from _ports(chapter)
        return
    unit = unit_sign(chapter.ask)
    if chapter.table is not None and is_constant(chapter.table):
        size = size_words(float(chapter.table.gain_db[0]), unit)
        yield cell("At every frequency"), cell(size)
        return
    yield from _ends(chapter, unit)
    yield from _cutoffs(chapter, unit)
    yield from _nulls(chapter)
    yield from _at(chapter, told, unit)
    yield from _times(chapter)
    yield from _order(chapter)


def _ends(chapter: Chapter, unit: str) -> Iterator[Row]:
    """Both ends of the frequency axis."""
    found = chapter.transfer
    if found is None or not isinstance(found.form, ClosedForm) or not found.form.rational:
        return
    for words, limit in (
        (f"At 0{SPACE}Hz", found.at_zero),
        ("At infinite frequency", found.at_infinity),
    ):
        shown = limit_words(limit, unit)
        if all(isinstance(item, str) or width_of(item.node) <= _WIDEST for item in shown):
            yield cell(words), shown


def _cutoffs(chapter: Chapter, unit: str) -> Iterator[Row]:
    """Each level with its crossings; first those that count from the pass band."""
    for answer in best_first(chapter):
        half = abs(answer.level_db - HALF_POWER_DB) < 1e-12
        reference = answer.reference
        if reference.at == "peak" and reference.gain and reference.hertz:
            size = quantity(reference.gain, unit) if unit else decibels(gain_in_db(reference.gain))
            yield cell("Peak"), cell(f"{size} at {quantity(reference.hertz, 'Hz')}")
        level = "Half power" if half else f"{ratio(answer.level_db)}{SPACE}dB level"
        yield cell(level, _counted(answer, chapter)), _crossings(answer)
        if len(answer.bands) == 1:
            band = answer.bands[0]
            q = "" if band.q is None else f", Q{SPACE}={SPACE}{ratio(band.q)}"
            words = f"{quantity(band.width, 'Hz')} around {quantity(band.centre, 'Hz')}{q}"
            yield cell(f"{band.kind.capitalize()} band"), cell(words)


def _nulls(chapter: Chapter) -> Iterator[Row]:
    """Frequencies at which nothing passes: zeros exactly on the axis."""
    table = None if chapter.poles is None else chapter.poles.zeros
    values = [] if table is None else [root.value for root in table.roots]
    nulls = [value.imag / (2 * pi) for value in values if value and not value.real]
    shown = [quantity(hertz, "Hz") for hertz in sorted(set(nulls)) if hertz > 0][:_MOST_CUTOFFS]
    if shown:
        yield cell("Null"), cell(f"at {listed(shown)}")


def _counted(answer: CutoffAnswer, chapter: Chapter) -> str:
    """From where, where two references are told."""
    if not any(is_besides(item, chapter) for item in chapter.cutoffs):
        return ""
    words = {"dc": "from 0\u00a0Hz", "infinity": "from infinity", "peak": "from the peak"}
    return f", {words.get(answer.reference.at, 'from the level part')}"


def _crossings(answer: CutoffAnswer) -> Words:
    if not answer.cutoffs:
        return ("no crossing",) if answer.complete else ("no crossing found",)
    words: list[Inline] = []
    known = marks([answer])
    shown = dict(zip(known, frequencies(known), strict=True))
    for item in answer.cutoffs[:_MOST_CUTOFFS]:
        words += [", " if words else "", *_crossing(item, shown)]
    left = len(answer.cutoffs) - _MOST_CUTOFFS
    return (*words, f" and {left} more") if left > 0 else tuple(words)


def _crossing(item: Cutoff, shown: Mapping[float, str]) -> Words:
    way = f" ({item.direction})" if item.direction else ""
    if item.hertz is not None:
        return (f"{shown[item.hertz]}{way}",)
    node = None if item.closed_form is None else tree(with_names(item.closed_form, {}))
    if node is None or width_of(node) > _WIDEST:
        return (f"a long closed form{way}",)
    return Math(Symbol("w")), " = ", Math(node), way


def _at(chapter: Chapter, told: Sequence[float], unit: str) -> Iterator[Row]:
    """An impedance at the note's telling frequencies, its smallest and largest size."""
    if chapter.ask.quantity != "impedance":
        return
    table = chapter.table
    if table is not None:
        for hertz in told:
            place = int(np.abs(table.hertz - hertz).argmin())
            if abs(table.hertz[place] / hertz - 1) < 1e-9:
                yield cell(f"At {quantity(hertz, 'Hz')}"), cell(_entry(table, place, unit))
    for curve in chapter.curves:
        known = np.where(np.isfinite(curve.gain_db), curve.gain_db, np.nan)
        if np.isnan(known).all():
            continue
        low, high = int(np.nanargmin(known)), int(np.nanargmax(known))
        for word, place in (("Smallest", low), ("Largest", high)):
            if 0 < place < len(known) - 1:
                where = quantity(float(curve.hertz[place]), "Hz")
                yield cell(f"{word} magnitude"), cell(f"{_entry(curve, place, unit)} at {where}")


def _entry(swept: Sweep, place: int, unit: str) -> str:
    return size_words(float(swept.gain_db[place]), unit)


def _times(chapter: Chapter) -> Iterator[Row]:
    if not chapter.in_time:
        return
    found = chapter.in_time[0]
    entry = Entry(kind="step", heading=Heading(), ask=chapter.ask, step=found)
    for name, value in figure_rows(found, response_unit(entry)):
        if str(name[0]).startswith(_TIMES) and not str(value[0]).startswith("none"):
            yield cell(f"Step: {str(name[0])[:1].lower()}{str(name[0])[1:]}"), value


def _order(chapter: Chapter) -> Iterator[Row]:
    """Order and stability, where poles are known."""
    found, poles = chapter.transfer, chapter.poles
    if found is None or found.order is None or chapter.ask.quantity == "impedance":
        return
    verdict = "" if poles is None or poles.stability is None else poles.stability.verdict
    words = f"{found.order}{f', {_VERDICTS[verdict]}' if verdict else ''}"
    if found.order:
        yield cell("Order"), cell(words)


def _ports(chapter: Chapter) -> Iterator[Row]:
    """The network's laws that are proven, and the least insertion loss."""
    found = chapter.two_port
    assert found is not None, "asked for where there is one"
    if found.ports is not None:
        laws = found.ports.laws
        held = [
            name
            for name in ("reciprocal", "symmetric", "lossless", "passive")
            if getattr(laws, name)
        ]
        yield cell("Proven"), cell(", ".join(held) or "none of the usual laws")
    if found.insertion is not None and found.sweep is not None:
        losses = found.insertion.insertion_loss_db
        place = int(np.nanargmin(losses))
        where = quantity(float(found.sweep.hertz[place]), "Hz")
        yield cell("Least insertion loss"), cell(f"{decibels(float(losses[place]))} at {where}")
