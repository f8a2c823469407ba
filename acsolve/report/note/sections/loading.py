"""What impedances before and behind the path change."""

from __future__ import annotations

import numpy as np

from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks, equation
from acsolve.report.note.formula.tree import Product, Ratio, Symbol, Total
from acsolve.report.note.model import Block, Formula, Math, Section, Table, Words, cell, say
from acsolve.report.note.wording import complex_words, lines, node_words, quantity

_LONGEST = 240
_ROWS = 9


def loading(chapter: Chapter) -> Section | None:
    """Impedances at both ends, and how a source and a load enter the result."""
    found = chapter.loading
    table = chapter.table
    if found is None or table is None or chapter.ask.source is None:
        return None
    blocks: list[Block] = [*_law(chapter), *_forms(chapter)]
    rows: list[tuple[Words, ...]] = []
    places = range(len(table.hertz)) if len(table.hertz) <= _ROWS else _spread(len(table.hertz))
    for place in places:
        cells = [cell(quantity(float(table.hertz[place]), "Hz"))]
        cells += [
            cell("–" if side is None else complex_words(complex(side[place]), "ohm"))
            for side in (found.source_side, found.load_side)
        ]
        rows.append(tuple(cells))
    blocks.append(
        Table(
            head=(("Frequency",), (Math(Symbol("Z_in")),), (Math(Symbol("Z_out")),)),
            rows=tuple(rows),
            sides=("right", "right", "right"),
            caption="Impedances at both ends.",
        )
    )
    return Section(title="Loading", level=3, blocks=tuple(blocks))


def _spread(number: int) -> list[int]:
    return sorted({round(place) for place in np.linspace(0, number - 1, _ROWS).tolist()})


def _law(chapter: Chapter) -> list[Block]:
    source = chapter.ask.source
    assert source is not None, "told where the path is driven"
    h, z_in, z_out = Symbol("H"), Symbol("Z_in"), Symbol("Z_out")
    z_s, z_l = Symbol("Z_S"), Symbol("Z_L")
    laws: list[Chunks] = []
    words = [f"Looking into {node_words(source)}, the circuit shows "]
    blocks: list[Block] = []
    if chapter.loading is not None and chapter.loading.source_side is not None:
        before = Product((h, Ratio(z_in, Total(((False, z_in), (False, z_s))))))
        laws += equation(Symbol("H_S"), before)
        middle = " with the output open; "
    else:
        middle = " (infinite: no current enters); "
    behind = Product((h, Ratio(z_l, Total(((False, z_l), (False, z_out))))))
    laws += equation(Symbol("H_L"), behind)
    blocks.append(
        say(
            *words,
            Math(z_in),
            middle,
            f"looking back into {node_words(chapter.ask.target)}, ",
            Math(z_out),
            " with the drive at zero. An impedance ",
            Math(z_s),
            " of the source alone, or a load ",
            Math(z_l),
            " alone, turns the result into:",
        )
    )
    blocks.append(Formula(lines=tuple(laws)))
    return blocks


def _forms(chapter: Chapter) -> list[Block]:
    """Both impedances in closed form, where they are short."""
    found = chapter.loading
    assert found is not None, "told where there is loading"
    written: list[Chunks] = []
    for label, form in (("Z_in", found.source_form), ("Z_out", found.load_form)):
        if form is not None and len(form.text()) <= _LONGEST:
            written += lines(Symbol(label), form.text())
    return [Formula(lines=tuple(written))] if written else []
