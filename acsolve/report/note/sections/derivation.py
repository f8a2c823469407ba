"""The way to the answer: node equations as written by hand, the matrix, what is left."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING

from acsolve.circuit.expression import Expression, Number, Product, Quotient, Sum, is_zero, number
from acsolve.circuit.netlist import GROUND
from acsolve.equations.write import Spelling, expression_text
from acsolve.report.note.chapters import is_read
from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks, equation
from acsolve.report.note.formula.tree import Matrix, Node, Ratio, Row, Sign, Symbol, Total, width
from acsolve.report.note.formula.tree import Product as Times
from acsolve.report.note.model import Block, Formula, Math, Section, say
from acsolve.report.note.sections.steps import named_steps
from acsolve.report.note.wording import count, lines, listed, node_words, response_symbol, tree

if TYPE_CHECKING:
    from acsolve.analyses.equations import Equations

_BY_HAND = 14  # equations that are written out
_MATRIX = 7  # rows of a matrix that is shown
_WIDEST_MATRIX = 33.0  # digits
_CURRENT = "current balance at "


def derivation(chapter: Chapter) -> Section | None:
    """Equations, matrix, and the closed form that elimination leaves."""
    found = chapter.equations
    blocks: list[Block] = []
    if found is not None:
        blocks += _equations(found, chapter)
    form = chapter.formula
    if form is not None:
        blocks += _result(chapter)
    blocks += named_steps(chapter)
    return Section(title="Derivation", level=3, blocks=tuple(blocks)) if blocks else None


def _equations(found: Equations, chapter: Chapter) -> list[Block]:
    if found.size > _BY_HAND:
        return [
            say(
                f"{count(found.size, 'equation')} hold the circuit: one current balance for each "
                "node and one law for each branch whose current is an unknown. So many say little "
                "on paper and are left out; the command equations prints them."
            )
        ]
    drive = chapter.ask.source
    intro = "Each node’s currents add up to zero, and each further unknown brings its law."
    if drive is not None:
        intro += f" A voltage E drives {node_words(drive)}; the answer is {_ratio(chapter)}."
    zeros = [node for node in found.references if node != GROUND]
    if zeros:
        words = listed([f"“{node}”" for node in zeros])
        whose = "whose own is" if len(zeros) == 1 else "whose own are"
        intro += f" Where no part leads to ground, voltages count from {words}, {whose} zero."
    written: list[Chunks] = []
    for row in range(found.size):
        written += _by_hand(found, row)
    blocks: list[Block] = [say(intro), Formula(lines=tuple(written))]
    return blocks + _matrix(found)


def _ratio(chapter: Chapter) -> str:
    if chapter.ask.quantity == "impedance":
        return "E over the current that it sends in"
    return f"the voltage at {node_words(chapter.ask.target)} over E"


def _unknown(text: str) -> Node:
    """`V(out)` as V with `out` below the line; ground is zero."""
    head, _, inner = text.partition("(")
    return Symbol(f"{head}_{inner.removesuffix(')')}")


def _text(expression: Expression) -> Node:
    found = tree(expression_text(expression, Spelling({})))
    return Symbol("…") if found is None else found


def _addends(expression: Expression) -> list[tuple[bool, Expression]]:
    """The terms of a sum, each with whether it is taken off."""
    match expression:
        case Sum(left, right):
            return [*_addends(left), *_addends(right)]
        case Product(Number(value), right) if value == -1:
            return [(not negative, item) for negative, item in _addends(right)]
        case Number(value) if value < 0:
            return [(True, number(-value))]
        case Quotient(Number(value), right) if value == -1:
            return [(True, Quotient(number(1), right))]
        case _:
            return [(False, expression)]


def _by_hand(found: Equations, row: int) -> list[Chunks]:
    """One equation: what a branch takes stands with the voltage across it."""
    entries: Mapping[int, Expression] = found.matrix[row]
    meaning = found.meanings[row]
    own = None
    if meaning.startswith(_CURRENT):
        wanted = f"V({meaning.removeprefix(_CURRENT)})"
        own = next((k for k, text in enumerate(found.unknowns) if text == wanted), None)
    terms: list[tuple[bool, Node]] = []
    left = [] if own is None else _addends(entries.get(own, number(0)))
    others: list[tuple[bool, Node]] = []
    for column, entry in sorted(entries.items()):
        if column == own:
            continue
        variable = _unknown(found.unknowns[column])
        for negative, item in _addends(entry):
            if negative and own is not None and (False, item) in left:
                left.remove((False, item))
                across = Total(((False, _unknown(found.unknowns[own])), (True, variable)))
                terms.append((False, _times(item, across)))
            else:
                others.append((negative, _times(item, variable)))
    if own is not None:
        terms += [
            (negative, _times(item, _unknown(found.unknowns[own])))
            for negative, item in left
            if item != number(0)
        ]
    terms += others
    if not terms:
        return []
    if all(negative for negative, _ in terms) and is_zero(found.excitation[row]):
        terms = [(False, item) for _, item in terms]
    if terms[0][0] and any(not negative for negative, _ in terms):
        terms.sort(key=lambda term: term[0])
    whole = terms[0][1] if len(terms) == 1 and not terms[0][0] else Total(tuple(terms))
    right = found.excitation[row]
    return equation(whole, _text(right))


def _times(factor: Expression, variable: Node) -> Node:
    """An admittance times a voltage, as it is written by hand: over R, or times sC."""
    match factor:
        case Number(value) if value == 1:
            return variable
        case Quotient(Number(value), right) if value == 1:
            return Ratio(variable, _text(right))
    inner = _text(factor)
    if isinstance(inner, Times):
        return Times((*inner.factors, variable))
    return Times((inner, variable))


def _matrix(found: Equations) -> list[Block]:
    if found.size > _MATRIX:
        filled = sum(len(row) for row in found.matrix)
        return [
            say(
                f"As a matrix they have {count(found.size, 'row')}, of whose "
                f"{found.size**2} entries {filled} are not zero."
            )
        ]
    cells = tuple(
        tuple(_text(found.entry(row, column)) for column in range(found.size))
        for row in range(found.size)
    )
    left = Matrix(cells)
    if width(left) > _WIDEST_MATRIX:
        return []
    unknowns = Matrix(tuple((_unknown(text),) for text in found.unknowns))
    right = Matrix(tuple((_text(item),) for item in found.excitation))
    return [
        say("In matrix form:"),
        Formula(lines=((Row((left, unknowns)), Row((Sign("="), right))),)),
    ]


def _result(chapter: Chapter) -> list[Block]:
    """Numerator and denominator after elimination; long ones as their size."""
    form = chapter.formula
    assert form is not None, "asked for where there is a closed form"
    words = "Eliminating all unknowns but the two that are asked about"
    label = response_symbol(chapter.ask)
    written = lines(label, form.text()) if is_read(form) else []
    if written:
        return [
            say(
                f"{words} (both are cofactors of the matrix, by Cramer’s rule; what they have in "
                "common is cancelled) leaves, with powers of ",
                Math(Symbol("s")),
                " collected:",
            ),
            Formula(lines=tuple(written)),
        ]
    return [
        say(
            f"{words} leaves a ratio of polynomials with "
            f"{count(len(form.numerator), 'term')} above and "
            f"{count(len(form.denominator), 'term')} below the line; the command transfer or "
            "impedance prints them."
        )
    ]
