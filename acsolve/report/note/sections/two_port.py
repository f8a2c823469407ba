"""Two-port parameters: each set in closed form, the network's laws, numbers over frequency."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.circuit.expression import Number
from acsolve.report.formula import numeric_polynomial
from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tree import Matrix, Row, Sign, Symbol, width
from acsolve.report.note.model import (
    Block,
    Formula,
    Math,
    Section,
    Table,
    Words,
    cell,
    right_aligned,
    say,
)
from acsolve.report.note.wording import complex_words, decibels, lines, listed, quantity, tree
from acsolve.report.values import coefficients

if TYPE_CHECKING:
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.ports.sets import SetName

_PLACES = ("11", "12", "21", "22")
_LONGEST = 240
_WIDEST = 30.0  # digits of a matrix that is written as one
_LAWS = ("reciprocal", "symmetric", "lossless", "passive")
_UNITS = {
    "z": ("ohm", "ohm", "ohm", "ohm"),
    "y": ("S", "S", "S", "S"),
    "h": ("ohm", "", "", "S"),
    "g": ("S", "", "", "ohm"),
    "abcd": ("", "ohm", "S", ""),
    "s": ("", "", "", ""),
}
_TABLED: tuple[SetName, ...] = ("s", "abcd", "z", "y", "h", "g")


def two_port(chapter: Chapter) -> Section | None:
    """Every set that exists, what holds for the network, and numbers at telling frequencies."""
    found = chapter.two_port
    if found is None:
        return None
    blocks: list[Block] = []
    if found.references is not None:
        shown = [
            quantity(float(item.value), "ohm") if isinstance(item, Number) else str(item)
            for item in found.references
        ]
        blocks.append(say(f"The s parameters refer to {listed(list(dict.fromkeys(shown)))}."))
    missing = []
    for name, matrix in found.forms.items():
        if matrix is None:
            missing.append(_spelled(name))
            continue
        blocks += _set(name, matrix)
    if missing:
        blocks.append(say(f"The {listed(missing)} parameters do not exist for this network."))
    if found.ports is not None:
        blocks.append(say(_laws(found.ports.laws)))
    if found.port_condition == "assumed":
        blocks.append(
            say("They hold where the current into each pair’s first node returns at its second.")
        )
    if found.remark is not None:
        blocks.append(say(f"{found.remark[:1].upper()}{found.remark[1:]}."))
    blocks += _numbers(found)
    return Section(title="Parameters", level=3, blocks=tuple(blocks))


def _spelled(name: str) -> str:
    return "ABCD" if name == "abcd" else name


def _symbols(name: str) -> tuple[Symbol, ...]:
    """z11 … z22, or A to D."""
    if name == "abcd":
        return tuple(map(Symbol, "ABCD"))
    return tuple(Symbol(f"{name}_{place}") for place in _PLACES)


def _set(name: str, matrix: Any) -> list[Block]:
    """One set as a matrix where it is narrow, else each parameter on a line of its own."""
    texts = [_text(form) for row in matrix for form in row]
    if any(len(text) > _LONGEST for text in texts):
        words = f"The {_spelled(name)} parameters are too long to read; the command two-port "
        return [say(f"{words}has them.")]
    words = f"The {_spelled(name)} parameters{_in_units(name)}:"
    nodes = [tree(text) for text in texts]
    symbols = _symbols(name)
    if all(node is not None for node in nodes):
        left = Matrix((symbols[:2], symbols[2:]))
        right = Matrix(((nodes[0], nodes[1]), (nodes[2], nodes[3])))  # type: ignore[arg-type]
        if width(right) <= _WIDEST:
            return [say(words), Formula(lines=((left, Row((Sign("="), right))),))]
    written: list[Chunks] = []
    for symbol, text in zip(symbols, texts, strict=True):
        written += lines(symbol, text)
    return [say(words), Formula(lines=tuple(written))]


def _text(form: ClosedForm) -> str:
    """A parameter to read: decimals with the lowest term below the line 1, else its symbols."""
    numbers = None if form.symbols else coefficients(form)
    if numbers is None:
        return form.text()
    top, bottom = numeric_polynomial(numbers.top), numeric_polynomial(numbers.bottom)
    return top if bottom == "1" else f"({top})/({bottom})"


def _in_units(name: str) -> str:
    """The unit where all four share one; the others are told with the table."""
    units = {unit for unit in _UNITS[name] if unit}
    if len(units) == 1 and "" not in _UNITS[name]:
        return f" in {units.pop().replace('ohm', 'Ω')}"
    return " in Ω and S" if units else ""


def _laws(laws: Any) -> str:
    words = []
    for law in _LAWS:
        held = getattr(laws, law)
        words.append(f"{law}: {'not proven' if held is None else 'yes' if held else 'no'}")
    return f"The network’s laws: {'; '.join(words)}."


def _numbers(found: Any) -> list[Block]:
    """One set over frequency: s where there is a reference, else the first that exists."""
    swept = found.sweep
    if swept is None:
        return []
    name = next((item for item in _TABLED if swept.matrices.get(item) is not None), None)
    if name is None:
        return []
    matrix = np.asarray(swept.matrices[name])
    head: list[Words] = [("Frequency",), *((Math(symbol),) for symbol in _symbols(name))]
    between = found.insertion
    if between is not None:
        head.append(("Insertion loss",))
    rows = []
    for place, hertz in enumerate(swept.hertz.tolist()):
        cells = [cell(quantity(hertz, "Hz"))]
        cells += [
            cell(_entry(complex(value), unit, name))
            for value, unit in zip(matrix[place].ravel(), _UNITS[name], strict=True)
        ]
        if between is not None:
            cells.append(cell(decibels(float(between.insertion_loss_db[place]))))
        rows.append(tuple(cells))
    sides = right_aligned(len(head))
    loss = " and the insertion loss between the references" if between is not None else ""
    return [
        Table(
            head=tuple(head),
            rows=tuple(rows),
            sides=sides,
            caption=f"{_spelled(name)} parameters{loss}, by magnitude and angle.",
        )
    ]


def _entry(value: complex, unit: str, name: str) -> str:
    """Magnitude and angle: waves in dB."""
    if name != "s" or not np.isfinite(value):
        return complex_words(value, unit)
    if not value:
        return "zero"
    turned = f"{np.degrees(np.angle(value)) + 0.0:.1f}".replace("-", "−").replace("−0.0", "0.0")
    return f"{decibels(20 * float(np.log10(abs(value))))} ∠\u00a0{turned}°"
