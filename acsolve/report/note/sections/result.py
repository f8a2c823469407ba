"""The answer in the form to read, its limits and cutoffs."""

from __future__ import annotations

from math import pi
from typing import TYPE_CHECKING, Any

from acsolve.analyses.closed_form import ClosedForm
from acsolve.report.entry import Entry, Heading, unit_sign
from acsolve.report.formula import numeric_polynomial
from acsolve.report.json import cutoff_names
from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tree import Node, Row, Sign, Symbol
from acsolve.report.note.model import Block, Formula, Inline, Math, Section, Table, Words, cell, say
from acsolve.report.note.places import is_besides, marks
from acsolve.report.note.wording import (
    SPACE,
    count,
    decibels,
    frequencies,
    lines,
    quantity,
    ratio,
    reading_label,
    response_symbol,
    sentence,
    tree,
    with_names,
)
from acsolve.report.number import HALF_POWER_DB, gain_in_db
from acsolve.report.values import coefficients, limit_number, standard_numbers

if TYPE_CHECKING:
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.reading import FormName
    from acsolve.analyses.shape import Limit

_MOST_TERMS = 16
_LONGEST_READING = 600  # characters of a form that is still read
_LONGEST_CUTOFF = 400  # of the closed form of a cutoff
_LONGEST_DELAY = 90  # of a formula of delays, which say little when they are long
_ORDERS = {1: "first", 2: "second"}


def result(chapter: Chapter) -> Section | None:
    """The closed form to read: lowest terms 1, standard form, gain and phase."""
    blocks: list[Block] = []
    if chapter.formula is not None and chapter.formula.rational:
        blocks += _readings(chapter)
    blocks += _numeric(chapter)
    blocks += _not_rational(chapter)
    return Section(title="Result", level=3, blocks=tuple(blocks)) if blocks else None


def _not_rational(chapter: Chapter) -> list[Block]:
    found = chapter.transfer
    if found is None:
        return []
    form = found.form
    if not isinstance(form, ClosedForm):
        return [say("Multiplied out it is too long to read; its named steps are the closed form.")]
    if form.rational:
        return []
    written = lines(response_symbol(chapter.ask), form.text())
    words = say("It is no ratio of polynomials in ", Math(Symbol("s")), ": it has no order.")
    return [words, *([Formula(lines=tuple(written))] if written else [])]


def _readings(chapter: Chapter) -> list[Block]:
    from acsolve.analyses.reading import reading

    form = chapter.formula
    assert form is not None, "asked for where there is a closed form"
    blocks: list[Block] = []
    wanted: tuple[tuple[FormName, str], ...] = (
        ("unit", "With the lowest terms taken out and parallel values named:"),
        ("standard", _standard_words(chapter)),
        ("real", "Gain and phase over the angular frequency:"),
        ("delay", "Delays:"),
    )
    order = max(len(part) for part in form.coefficients()) - 1
    for name, words in wanted:
        if name in ("real", "delay") and (order > 2 or order == 0):
            continue
        found = reading(form, name)
        longest = _LONGEST_DELAY if name == "delay" else _LONGEST_READING
        if not found or any(len(item.text) > longest for item in found):
            continue
        written: list[Chunks] = []
        for item in found:
            written += lines(_label(item.label, chapter), item.text)
        if written:
            blocks += [say(words), Formula(lines=tuple(written))]
        if name == "standard":
            blocks += _standard_values(chapter)
    return blocks


_DELAYS = {"phase_delay": "p", "group_delay": "g"}


def _label(text: str, chapter: Chapter) -> Node:
    head = text.partition("(")[0]
    if head in _DELAYS:
        return Row((Symbol(f"t_{_DELAYS[head]}"), Sign("("), Symbol("w"), Sign(")")))
    return reading_label(text, chapter.ask)


def _standard_words(chapter: Chapter) -> str:
    found = chapter.transfer.standard_form if chapter.transfer is not None else None
    if found is None or found.shape == "other":
        return "In standard form:"
    return f"In the standard form of a {found.shape} of {_ORDERS[found.order]} order:"


def _standard_values(chapter: Chapter) -> list[Block]:
    """The standard form's quantities as numbers."""
    found = chapter.transfer
    if found is None or found.standard_form is None or found.form.symbols:
        return []
    form: Any = found.form
    numbers = standard_numbers(form, found.standard_form.parts)
    unit = unit_sign(chapter.ask)
    words: list[Inline] = []
    for key, value in numbers.items():
        text = _standard_number(key, value, unit)
        words += [
            ", " if words else "In numbers: ",
            Math(Symbol(_STANDARD.get(key, key))),
            f" = {text}",
        ]
    return [say(*words, ".")] if words else []


_STANDARD = {"k": "K", "q": "Q", "k1": "K1", "q_z": "Q_z"}


def _standard_number(key: str, value: complex, unit: str) -> str:
    if key == "k":
        return quantity(value.real, unit) if unit else ratio(value.real)
    if key == "tau":
        return quantity(value.real, "s")
    if key == "w0":
        frequency = quantity(value.real / (2 * pi), "Hz")
        return f"{ratio(value.real)}{SPACE}rad/s (that is {frequency})"
    return ratio(value.real)


def _numeric(chapter: Chapter) -> list[Block]:
    """The closed form with the values put in, where every part has one."""
    found = chapter.transfer
    if found is None or not isinstance(found.form, ClosedForm) or found.form.symbols:
        return []
    numbers = coefficients(found.form)
    if numbers is None:
        return []
    terms = sum(value != 0 for value in (*numbers.top, *numbers.bottom))
    order = max(len(numbers.top), len(numbers.bottom)) - 1
    if terms > _MOST_TERMS:
        return [
            say(
                f"With its values it is a ratio of polynomials of order {order} with "
                f"{count(terms, 'coefficient')}, too many to read; "
                "poles, zeros and the curve say more."
            )
        ]
    top, bottom = numeric_polynomial(numbers.top), numeric_polynomial(numbers.bottom)
    text = top if bottom == "1" else f"({top})/({bottom})"
    written = lines(response_symbol(chapter.ask), text)
    unit = unit_sign(chapter.ask)
    told = f" (in {unit.replace('ohm', 'Ω')})" if unit else ""
    words = say("With the values of the parts", told, ", ", Math(Symbol("s")), " in rad/s:")
    return [words, Formula(lines=tuple(written))] if written else []


def limits(chapter: Chapter) -> Section | None:
    """The ends of the frequency axis, and each level with its crossings."""
    blocks: list[Block] = []
    found = chapter.transfer
    unit = unit_sign(chapter.ask)
    if found is not None and isinstance(found.form, ClosedForm) and found.form.rational:
        blocks.append(
            say(
                "At 0",
                SPACE,
                "Hz: ",
                *limit_words(found.at_zero, unit),
                ". At infinite frequency: ",
                *limit_words(found.at_infinity, unit),
                ".",
            )
        )
    for answer in chapter.cutoffs:
        if is_besides(answer, chapter):
            blocks.append(say(_BESIDES[answer.reference.at]))
        blocks += _cutoffs(answer, chapter, unit)
    title = "Limits and cutoffs" if chapter.cutoffs else "Limits"
    return Section(title=title, level=3, blocks=tuple(blocks)) if blocks else None


_BESIDES = {
    "peak": "That reference lies far below the peak, and counted from it half power says little "
    "about the pass band. Counted from the peak:",
    "stated": "That reference lies far above a wide level part of the curve, as stray parts at "
    "infinite frequency can bring about. Counted from the level part:",
}


def limit_words(limit: Limit, unit: str) -> Words:
    """A limit as a number, a formula or a word."""
    if limit is None:
        return ("unknown",)
    if limit == "oo":
        return ("infinite",)
    value = limit_number(limit)
    if value is not None and not value:
        return ("zero",)
    if value is None:
        node = None if isinstance(limit, str) else tree(limit.text(safe=False))
        return ("a long expression",) if node is None else (Math(node),)
    if unit or value.imag:
        return (quantity(value.real, unit),)
    return (f"{ratio(value.real)} ({decibels(gain_in_db(value.real))})",)


_PLACES = {
    "dc": "at 0\u00a0Hz",
    "infinity": "at infinite frequency",
    "peak": "at the peak",
    "stated": "on the level part of the curve",
}


_DIRECTIONS = {"falling": "falls below the level", "rising": "rises above the level"}


def _cutoffs(found: CutoffAnswer, chapter: Chapter, unit: str) -> list[Block]:
    entry = Entry(kind="cutoff", heading=Heading(), ask=chapter.ask, cutoff=found)
    names = {safe: own for own, safe in cutoff_names(entry).items()}
    blocks: list[Block] = [say(_reference(found, unit))]
    rows: list[tuple[Words, ...]] = []
    formulas: list[Chunks] = []
    unread = 0
    known = marks([found])
    shown = dict(zip(known, frequencies(known), strict=True))
    for place, item in enumerate(found.cutoffs, start=1):
        if item.hertz is not None and item.rad_per_s is not None:
            rows.append(
                (
                    cell(shown[item.hertz]),
                    cell(f"{ratio(item.rad_per_s, 5)}{SPACE}rad/s"),
                    cell(_DIRECTIONS.get(item.direction or "", "")),
                )
            )
        if item.closed_form is not None:
            label = Symbol("w_c" if len(found.cutoffs) == 1 else f"w_c{place}")
            text = with_names(item.closed_form, names)
            unread += len(text) > _LONGEST_CUTOFF
            formulas += lines(label, text) if len(text) <= _LONGEST_CUTOFF else []
    if rows:
        blocks.append(
            Table(
                head=(("Cutoff",), ("Angular frequency",), ("The response",)),
                rows=tuple(rows),
                sides=("right", "right", "left"),
                caption="Cutoffs.",
            )
        )
    if formulas:
        blocks += [say("In closed form:"), Formula(lines=tuple(formulas))]
    if unread:
        blocks.append(
            say(
                f"{count(unread, 'closed form')} too long to read here; the command cutoff "
                "prints what is left out."
            )
        )
    blocks += [say(_band(item)) for item in found.bands]
    blocks += [
        say(f"At {quantity(item.hertz, 'Hz')} the curve meets the level without crossing it.")
        for item in found.touches
    ]
    blocks.append(say(_proof(found)))
    blocks += [say(sentence(with_names(text, names))) for text in found.remarks]
    return blocks


def _reference(found: CutoffAnswer, unit: str) -> str:
    half = abs(found.level_db - HALF_POWER_DB) < 1e-12
    level = "Half power" if half else f"The level {decibels(found.level_db)}"
    reference = found.reference
    place = _PLACES[reference.at]
    if reference.at == "peak" and reference.hertz is not None:
        place += f", {quantity(reference.hertz, 'Hz')}"
    if reference.gain is None:
        return f"{level} counts from the gain {place}."
    size = quantity(reference.gain, unit) if unit else ratio(reference.gain)
    limit = reference.gain * 10 ** (found.level_db / 20)
    there = quantity(limit, unit) if unit else ratio(limit)
    return f"{level} counts from {size} {place}; it lies at {there}."


def _band(item: Any) -> str:
    q = "" if item.q is None else f", Q{SPACE}={SPACE}{ratio(item.q)}"
    text = (
        f"Between them lies a {item.kind} band, {quantity(item.width, 'Hz')} wide{q}, with its "
        f"centre (geometric mean) at {quantity(item.centre, 'Hz')}"
    )
    if item.extremum is None:
        return f"{text}."
    word = "peak" if item.kind == "pass" else "deepest point"
    return f"{text} and its {word} at {quantity(item.extremum, 'Hz')}."


def _proof(found: CutoffAnswer) -> str:
    no = "no other" if found.cutoffs else "no"
    where = ""
    if found.searched is not None:
        low, high = (quantity(edge, "Hz") for edge in found.searched)
        where = f" from {low} to {high}"
    if found.complete:
        return f"Proven: there is {no} crossing{where}."
    return f"Not proven{where} is that there is {no} crossing."
