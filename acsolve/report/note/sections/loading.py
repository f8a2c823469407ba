"""What impedances before and behind the path change."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from acsolve.report.entry import letter, unit_sign
from acsolve.report.note.facts import Chapter, Loading
from acsolve.report.note.formula.split import Chunks, equation
from acsolve.report.note.formula.tree import Product, Ratio, Symbol, Total
from acsolve.report.note.model import (
    Block,
    Formula,
    Inline,
    Math,
    Section,
    Table,
    Words,
    cell,
    right_aligned,
    say,
)
from acsolve.report.note.wording import (
    DIGITS,
    complex_words,
    frequencies,
    lines,
    name,
    node_words,
    size_words,
)

if TYPE_CHECKING:
    from acsolve.analyses.sweep import Sweep

_LONGEST = 240
_ROWS = 9


def loading(chapter: Chapter) -> Section | None:
    """Impedances at both ends, how a source and a load enter, what the file's own ones do."""
    found = chapter.loading
    table = chapter.table
    if found is None or table is None:
        return None
    blocks: list[Block] = [*_law(chapter, found), *_forms(found), *_impedances(found, table)]
    blocks += _ends(chapter, found, table)
    return Section(title="Loading", level=3, blocks=tuple(blocks))


def _impedances(found: Loading, table: Sweep) -> list[Block]:
    """Both impedances over frequency; one line where frequency does not matter."""
    sides = [
        (symbol, side)
        for symbol, side in (("Z_in", found.source_side), ("Z_out", found.load_side))
        if side is not None and np.any(side)
    ]
    nothing = [
        say(Math(Symbol(symbol)), " is zero at every frequency.") for symbol in _zeros(found)
    ]
    if not sides:
        return [*nothing]
    places = _spread(len(table.hertz))
    shown = frequencies(table.hertz.tolist(), DIGITS)
    rows = [
        (
            cell(shown[place]),
            *(cell(complex_words(complex(side[place]), "ohm")) for _, side in sides),
        )
        for place in places
    ]
    if len(rows) > 1 and len({row[1:] for row in rows}) == 1:
        rows = [(cell("every"), *rows[0][1:])]
    return [
        *nothing,
        Table(
            head=(("Frequency",), *((Math(Symbol(symbol)),) for symbol, _ in sides)),
            rows=tuple(rows),
            sides=right_aligned(1 + len(sides)),
            caption=_CAPTIONS[tuple(symbol for symbol, _ in sides)],
        ),
    ]


def _zeros(found: Loading) -> list[str]:
    sides = (("Z_in", found.source_side), ("Z_out", found.load_side))
    return [symbol for symbol, side in sides if side is not None and not np.any(side)]


_CAPTIONS = {
    ("Z_in", "Z_out"): "Impedances at both ends.",
    ("Z_in",): "Impedance of the input.",
    ("Z_out",): "Impedance of the output.",
}


def _spread(number: int) -> list[int]:
    if number <= _ROWS:
        return list(range(number))
    return sorted({round(place) for place in np.linspace(0, number - 1, _ROWS).tolist()})


_ROLES = {
    "source": ("in line behind the drive", "with none of it"),
    "load": ("across the output", "with the output open"),
}


def _ends(chapter: Chapter, found: Loading, table: Sweep) -> list[Block]:
    """What the file's own source and load resistors change."""
    if not found.ends:
        return []
    words: list[Inline] = []
    for item in found.ends:
        place, without = _ROLES[item.role]
        words += [" " if words else "", name(item.name), f" stands {place}; the result holds it. "]
        words += [f"The table tells what it would be {without}."]
    head: list[Words] = [("Frequency",), ("As it is",)]
    head += [("Without ", name(item.name)) for item in found.ends]
    unit = unit_sign(chapter.ask)
    shown = frequencies(table.hertz.tolist(), DIGITS)
    columns = [table.gain_db, *(item.gain_db for item in found.ends)]
    rows = tuple(
        (
            cell(shown[place]),
            *(cell(size_words(float(column[place]), unit)) for column in columns),
        )
        for place in _spread(len(table.hertz))
    )
    caption = "What the source and load of the file change."
    table_of_ends = Table(
        head=tuple(head), rows=rows, sides=right_aligned(len(head)), caption=caption
    )
    return [say(*words), table_of_ends]


def _law(chapter: Chapter, found: Loading) -> list[Block]:
    """Both impedances in words, and the voltage or current divider that each makes."""
    source, target = chapter.ask.source, node_words(chapter.ask.target)
    h, z_in, z_out = Symbol(letter(chapter.ask)), Symbol("Z_in"), Symbol("Z_out")
    z_s, z_l = Symbol("Z_S"), Symbol("Z_L")
    laws: list[Chunks] = []
    words: list[Inline] = []
    if source is not None:
        words += [f"Looking into {node_words(source)}, the circuit shows "]
        if found.source_side is not None:
            current = chapter.ask.quantity == "transimpedance"
            share = Ratio(z_s if current else z_in, Total(((False, z_in), (False, z_s))))
            laws += equation(Symbol(f"{h.name}_S"), Product((h, share)))
            words += [Math(z_in), " with the output open; "]
            ends: list[Inline] = ["An impedance ", Math(z_s), " of the source alone, or a load "]
        else:
            words += ["no finite impedance: no current enters; "]
            ends = ["A source’s impedance changes nothing; a load "]
        words += [f"looking back into {target}, ", Math(z_out), " with the drive at zero. ", *ends]
    else:
        words += [f"Looking back into {target}, the circuit shows ", Math(z_out)]
        words += [" with its sources at zero. A load "]
    alone = " alone, turns" if found.source_side is not None else " turns"
    share = Ratio(z_l, Total(((False, z_l), (False, z_out))))
    laws += equation(Symbol(f"{h.name}_L"), Product((h, share)))
    return [say(*words, Math(z_l), f"{alone} the result into:"), Formula(lines=tuple(laws))]


def _forms(found: Loading) -> list[Block]:
    """Both impedances in closed form, where they are short."""
    written: list[Chunks] = []
    for label, form in (("Z_in", found.source_form), ("Z_out", found.load_form)):
        if form is not None and len(form.text()) <= _LONGEST:
            written += lines(Symbol(label), form.text())
    return [Formula(lines=tuple(written))] if written else []
