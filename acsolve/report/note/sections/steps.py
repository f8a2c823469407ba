"""The answer as named steps, where multiplied out it is too long to be read."""

from __future__ import annotations

from typing import Any

from acsolve.circuit.expression import Expression
from acsolve.equations.write import Spelling, expression_text
from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks, equation
from acsolve.report.note.formula.tree import Node, Symbol
from acsolve.report.note.model import Block, Formula, Words, say
from acsolve.report.note.wording import count, response_symbol, tree

MOST = 24  # steps that are all shown
_FIRST, _LAST = 6, 4  # what is shown of more
_TAIL = ", all that lies beyond included"


def named_steps(chapter: Chapter) -> list[Block]:
    """Each step with its meaning; of many the first, the last and their number."""
    form = chapter.steps
    if form is None:
        return []
    steps = form.steps
    parted = len(steps) > MOST
    blocks: list[Block] = [say(*_intro(len(steps), parted))]
    if parted:
        blocks.append(_formulas(steps[:_FIRST]))
        blocks.append(
            say(
                f"and so on, {count(len(steps) - _FIRST - _LAST, 'step')} more in the same way, "
                "which transfer --nested --symbolic prints, until:"
            )
        )
        steps = steps[-_LAST:]
    answer = equation(response_symbol(chapter.ask), _node(form.result))
    return [*blocks, _formulas(steps, tuple(answer))]


def _intro(number: int, parted: bool) -> Words:
    shown = "the first and the last of them are" if parted else "each is"
    return (
        f"Elimination from the far end towards the drive gives the same in "
        f"{count(number, 'named step')}; {shown} written here with what it means. An impedance or "
        "admittance includes all that lies beyond it; voltages and currents count for a drive "
        "of one.",
    )


def _formulas(steps: tuple[Any, ...], answer: tuple[Chunks, ...] = ()) -> Formula:
    lines: list[Chunks] = []
    notes: list[Words] = []
    for step in steps:
        written = equation(Symbol(step.name), _node(step.expression))
        lines += written
        meaning = step.meaning.removesuffix(_TAIL).removesuffix(" for a drive of one")
        notes += [(meaning,), *((),) * (len(written) - 1)]
    return Formula(lines=(*lines, *answer), notes=(*notes, *((),) * len(answer)))


def _node(expression: Expression) -> Node:
    """An expression over the parts and earlier steps; a dot where nobody would read it."""
    found = tree(expression_text(expression, Spelling({})))
    return Symbol("…") if found is None else found
