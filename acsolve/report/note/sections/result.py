"""The answer in the form to read, its limits, cutoffs, poles and zeros."""

from __future__ import annotations

from math import inf, pi
from typing import TYPE_CHECKING, Any

from acsolve.analyses.closed_form import ClosedForm
from acsolve.report.entry import Entry, Heading, unit_sign
from acsolve.report.formula import numeric_polynomial
from acsolve.report.json import cutoff_names
from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tree import Node, Row, Sign, Symbol
from acsolve.report.note.model import Block, Formula, Inline, Math, Section, Table, Words, cell, say
from acsolve.report.note.wording import (
    SPACE,
    count,
    decibels,
    lines,
    quantity,
    ratio,
    readable_number,
    reading_label,
    response_symbol,
    tree,
    with_names,
)
from acsolve.report.number import gain_in_db, plain
from acsolve.report.values import coefficients, limit_number, standard_numbers

if TYPE_CHECKING:
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.pole_record import RootRecord, RootTable
    from acsolve.analyses.reading import FormName
    from acsolve.analyses.shape import Limit

_MOST_TERMS = 40
_MOST_ROOTS = 24
_LONGEST_READING = 600  # characters of a form that is still read
_LONGEST_DELAY = 90  # of a formula of delays, which say little when they are long
_ORDERS = {1: "first", 2: "second"}
_HALF_POWER = -3.0102999566398120


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
        return [say("Multiplied out it is too long; the command transfer gives it as named steps.")]
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
                *_limit(found.at_zero, unit),
                ". At infinite frequency: ",
                *_limit(found.at_infinity, unit),
                ".",
            )
        )
    for answer in chapter.cutoffs:
        blocks += _cutoffs(answer, chapter, unit)
    title = "Limits and cutoffs" if chapter.cutoffs else "Limits"
    return Section(title=title, level=3, blocks=tuple(blocks)) if blocks else None


def _limit(limit: Limit, unit: str) -> tuple[Inline, ...]:
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
    "stated": "as stated",
}


def _cutoffs(found: CutoffAnswer, chapter: Chapter, unit: str) -> list[Block]:
    entry = Entry(kind="cutoff", heading=Heading(), ask=chapter.ask, cutoff=found)
    names = {safe: own for own, safe in cutoff_names(entry).items()}
    blocks: list[Block] = [say(_reference(found, unit))]
    rows: list[tuple[Words, ...]] = []
    formulas: list[Chunks] = []
    for place, item in enumerate(found.cutoffs, start=1):
        if item.hertz is not None and item.rad_per_s is not None:
            rows.append(
                (
                    cell(quantity(item.hertz, "Hz", 5)),
                    cell(f"{readable_number(plain(item.rad_per_s, 5))}{SPACE}rad/s"),
                    cell(item.direction or ""),
                )
            )
        if item.closed_form is not None:
            label = Symbol("w_c" if len(found.cutoffs) == 1 else f"w_c{place}")
            formulas += lines(label, with_names(item.closed_form, names))
    if rows:
        blocks.append(
            Table(
                head=(("Cutoff",), ("Angular frequency",), ("The gain is",)),
                rows=tuple(rows),
                sides=("right", "right", "left"),
                caption="Cutoffs.",
            )
        )
    if formulas:
        blocks += [say("In closed form:"), Formula(lines=tuple(formulas))]
    blocks += [say(_band(item)) for item in found.bands]
    blocks += [
        say(f"At {quantity(item.hertz, 'Hz')} the curve meets the level without crossing it.")
        for item in found.touches
    ]
    blocks.append(say(_proof(found)))
    blocks += [say(_remark(with_names(text, names))) for text in found.remarks]
    return blocks


def _remark(text: str) -> str:
    return f"{text[:1].upper()}{text[1:]}{'' if text.endswith('.') else '.'}"


def _reference(found: CutoffAnswer, unit: str) -> str:
    half = abs(found.level_db - _HALF_POWER) < 1e-12
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
    return f"{level} counts from {size} {place}; it is a gain of {there}."


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
    no = "no further" if found.cutoffs else "no"
    where = ""
    if found.searched is not None:
        low, high = (quantity(edge, "Hz") for edge in found.searched)
        where = f" from {low} to {high}"
    if found.complete:
        return f"It is proven that {no} crossing exists{where}."
    return f"It is not proven{where} that {no} crossing exists."


def roots(chapter: Chapter) -> Section | None:
    """Poles and zeros, hidden modes, stability."""
    found = chapter.poles
    if found is None:
        return None
    blocks: list[Block] = []
    for word, table in (("Poles", found.poles), ("Zeros", found.zeros)):
        blocks += _roots(word, table)
    if found.hidden is not None and found.hidden.roots:
        blocks.append(say("Modes of the network that this answer does not show:"))
        blocks += _roots("Hidden modes", found.hidden)
    if found.stability is not None:
        from acsolve.report.pole_text import stability_rows

        words = "; ".join(text for _, text in stability_rows(found.stability, found.form))
        blocks.append(say(f"Stability: {words}."))
    return Section(title="Poles and zeros", level=3, blocks=tuple(blocks)) if blocks else None


def _roots(word: str, table: RootTable | None) -> list[Block]:
    if table is None:
        return []
    upper = [item for item in table.roots if item.value is not None and item.value.imag >= 0]
    if not table.roots:
        unsolved = [item for item in table.factors if item.degree > 0]
        return [] if unsolved else [say(f"{word}: none.")]
    if not upper:
        return _symbolic(word, table)
    rows = tuple(_root_row(item) for item in upper[:_MOST_ROOTS])
    more = (
        f" The {_MOST_ROOTS} nearest to zero of {len(upper)}." if len(upper) > _MOST_ROOTS else ""
    )
    sure = "" if table.certified else " Eigenvalues, not certified."
    return [
        Table(
            head=((word,), ("Natural frequency",), ("Q",), ("Times",)),
            rows=rows,
            sides=("right", "right", "right", "right"),
            caption=f"{word}, pairs as one.{more}{sure}",
        )
    ]


def _symbolic(word: str, table: RootTable) -> list[Block]:
    letter_of = {"Poles": "s_p", "Zeros": "s_z"}.get(word, "s_h")
    written: list[Chunks] = []
    for place, item in enumerate(table.roots, start=1):
        if item.closed_form is not None and len(item.closed_form) <= _LONGEST_READING:
            label = Symbol(letter_of + (str(place) if len(table.roots) > 1 else ""))
            written += lines(label, with_names(item.closed_form, {}))
    return [say(f"{word}:"), Formula(lines=tuple(written))] if written else []


def _root_row(item: RootRecord) -> tuple[Words, ...]:
    value = item.value
    assert value is not None, "asked for where there is a number"
    real = readable_number(plain(value.real, 5)) if value.real else "0"
    if value.imag:
        place = f"{real}{SPACE}±{SPACE}j{readable_number(plain(value.imag, 5))}{SPACE}rad/s"
    else:
        place = f"{real}{SPACE}rad/s"
    frequency = quantity(abs(value) / (2 * pi), "Hz") if value else "0"
    q = item.q
    sharp = "–" if q is None else "∞" if q == inf else ratio(q)
    return cell(place), cell(frequency), cell(sharp), cell(str(item.multiplicity))
