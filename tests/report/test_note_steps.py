"""Long answers as named steps: every step that is needed, in order, each with its meaning."""

from __future__ import annotations

import pytest

import acsolve
from acsolve.report.note.chapters import is_read
from acsolve.report.note.formula.tree import Sign, Symbol
from acsolve.report.note.model import Formula
from acsolve.report.note.sections.steps import MOST, named_steps
from tests.report.note_reader import NAMES, Page, note

CHAPTERS = [(name, k) for name in NAMES for k in range(len(note(name).facts.chapters))]


def symbols(node) -> set[str]:
    """Every name in a tree."""
    if isinstance(node, Symbol):
        return {node.name}
    inner = [getattr(node, key) for key in getattr(node, "__dataclass_fields__", ())]
    listed = [x for item in inner for x in (item if isinstance(item, tuple) else (item,))]
    flat = [x for item in listed for x in (item if isinstance(item, tuple) else (item,))]
    return {name for item in flat if not isinstance(item, str | bool) for name in symbols(item)}


@pytest.mark.parametrize(("name", "place"), CHAPTERS)
def test_steps_stand_where_the_form_is_too_long(name, place):
    """A form that can be read has no steps; each step uses parts, s and earlier steps only."""
    chapter = note(name).facts.chapters[place]
    form = chapter.formula
    if form is not None and is_read(form):
        assert chapter.steps is None
    if chapter.steps is None:
        return
    assert chapter.steps.checked.max_relative_error < 1e-9
    steps = chapter.steps.steps
    shown = [block for block in named_steps(chapter) if isinstance(block, Formula)]
    assert len(shown) == (1 if len(steps) <= MOST else 2)
    known = {"s"}
    for step in steps:
        assert step.meaning
        known.add(step.name)
    for block in shown:
        assert len(block.notes) == len(block.lines)
    if len(steps) <= MOST:
        told = [words for words in shown[0].notes if words]
        assert len(told) == len(steps)
    own = {*known, *chapter.steps.symbols, "N", "D", "pi"}
    own |= {item.partition(".")[0] for item in chapter.steps.symbols}
    for line in (line for block in shown for line in block.lines):
        for chunk in line:
            assert symbols(chunk) <= own | {"H", "Z", "V", "Y", "I"}, symbols(chunk) - own
        assert any(isinstance(x, Sign) for chunk in line for x in getattr(chunk, "items", ()))


def test_named_steps_give_the_closed_form():
    """Put into each other, the steps of five sections are the expanded form."""
    sympy = pytest.importorskip("sympy")
    chapter = note("five_sections").facts.chapters[0]
    values = {}
    for name, text in chapter.steps.step_texts(safe=True):
        values[name] = sympy.sympify(text).subs(values)
    nested = sympy.sympify(chapter.steps.text(safe=True)).subs(values)
    numbers = {name: 2 + k for k, name in enumerate(sorted(map(str, nested.free_symbols)))}
    expanded = sympy.sympify(chapter.formula.text(safe=True))
    assert nested.subs(numbers) == expanded.subs(numbers)


def test_many_steps_are_told_by_their_number():
    """A long ladder shows its first and last steps, and says how many lie between."""
    sections = 30
    text = "in -- " + " -- ".join(f"R{k} -- n{k}" for k in range(sections)) + "\n"
    text += "".join(f"n{k} -- C{k} -- gnd\n" for k in range(sections))
    made = acsolve.parse(f"{text}ask transfer from in to n{sections - 1}\n").note()
    (chapter,) = made.facts.chapters
    page = Page(made.html()).text.replace("\u00a0", " ")
    assert f"{len(chapter.steps.steps):,} named steps" in page
    assert f"and so on, {len(chapter.steps.steps) - 10:,} steps more" in page
    assert "impedance met by the current of R29" in page
    for form in (made.latex(), made.markdown()):
        assert "admittance at n28" in form
