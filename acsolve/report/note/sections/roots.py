"""Poles and zeros: as a table, by formula, and in the s plane."""

from __future__ import annotations

from math import inf, pi
from typing import TYPE_CHECKING

from acsolve.report.entry import question_text
from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tree import Symbol
from acsolve.report.note.ink.figure import figure_ink
from acsolve.report.note.model import Block, Formula, Picture, Section, Table, Words, cell, say
from acsolve.report.note.wording import SPACE, lines, quantity, ratio, with_names
from acsolve.report.plot_poles import PoleMap, poles_figure

if TYPE_CHECKING:
    from acsolve.analyses.pole_record import PoleAnswer, RootRecord, RootTable

_MOST_ROOTS = 12
_MOST_DRAWN = 60  # poles and zeros of a map that is still read
_LONGEST = 600  # characters of a closed form of a root


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
    blocks += _map(found, chapter)
    return Section(title="Poles and zeros", level=3, blocks=tuple(blocks)) if blocks else None


def _map(found: PoleAnswer, chapter: Chapter) -> list[Block]:
    """The s plane, where there is more in it than a table says at a glance."""
    order = chapter.transfer.order if chapter.transfer is not None else None
    tables = (found.poles, found.zeros)
    if order is None or order < 2 or found.form.symbols or None in tables:
        return []
    number = sum(len(table.roots) for table in tables if table is not None)
    if number > _MOST_DRAWN:
        return []
    caption = (
        f"Poles (crosses) and zeros (circles) of the {question_text(chapter.ask)} in the s plane"
    )
    hidden = found.hidden is not None and found.hidden.roots
    caption += ", hidden modes as diamonds." if hidden else "."
    figure = figure_ink(lambda: poles_figure(PoleMap(roots=found)))
    return [Picture(ink=figure, caption=caption, description=caption)]


def _roots(word: str, table: RootTable | None) -> list[Block]:
    if table is None:
        return []
    upper = [item for item in table.roots if item.value is not None and item.value.imag >= 0]
    if not table.roots:
        unsolved = [item for item in table.factors if item.degree > 0]
        return [] if unsolved else [say(f"{word}: none.")]
    if not upper:
        return _symbolic(word, table)
    upper.sort(key=lambda item: abs(item.value or 0))
    rows = tuple(_root_row(item) for item in upper[:_MOST_ROOTS])
    more = f" The {len(rows)} nearest to zero of {len(upper)}." if len(upper) > len(rows) else ""
    paired = any(item.value is not None and item.value.imag for item in upper)
    together = "; a complex pair stands in one row" if paired else ""
    sure = "" if table.certified else " Eigenvalues, not certified."
    return [
        Table(
            head=((word,), ("Natural frequency",), ("Q",), ("Multiplicity",)),
            rows=rows,
            sides=("right", "right", "right", "right"),
            caption=f"{word}{together}.{more}{sure}",
        )
    ]


def _symbolic(word: str, table: RootTable) -> list[Block]:
    letter_of = {"Poles": "s_p", "Zeros": "s_z"}.get(word, "s_h")
    written: list[Chunks] = []
    for place, item in enumerate(table.roots, start=1):
        if item.closed_form is not None and len(item.closed_form) <= _LONGEST:
            label = Symbol(letter_of + (str(place) if len(table.roots) > 1 else ""))
            written += lines(label, with_names(item.closed_form, {}))
    return [say(f"{word}:"), Formula(lines=tuple(written))] if written else []


def _root_row(item: RootRecord) -> tuple[Words, ...]:
    value = item.value
    assert value is not None, "asked for where there is a number"
    real = ratio(value.real, 5) if value.real else "0"
    if value.imag:
        place = f"{real} ±{SPACE}j{ratio(value.imag, 5)}{SPACE}rad/s"
    else:
        place = f"{real}{SPACE}rad/s"
    frequency = quantity(abs(value) / (2 * pi), "Hz") if value else "0"
    q = item.q
    sharp = "–" if q is None else "∞" if q == inf else ratio(q)
    return cell(place), cell(frequency), cell(sharp), cell(str(item.multiplicity))
