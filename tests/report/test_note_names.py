"""Wide quotients: each gets names of its own, and lines break where a reader is not misled."""

from __future__ import annotations

import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

import acsolve
from acsolve.report.drawing.name import split_name
from acsolve.report.drawing.sheet import Text
from acsolve.report.drawing.svg import pieces
from acsolve.report.note.formula.read import read_formula
from acsolve.report.note.formula.split import WIDEST, equation
from acsolve.report.note.formula.tex import tex
from acsolve.report.note.formula.tree import (
    Power,
    Product,
    Ratio,
    Row,
    Sign,
    StandIn,
    Symbol,
    width,
)
from acsolve.report.note.model import Formula, Section
from acsolve.report.note.named import numbered_names
from tests.report.note_reader import NAMES, note
from tests.report.test_note_formula import by_hand, texts

_DEFINED = re.compile(r"^([ND]_\{\d+\}) = (.*)$", re.DOTALL)
_USED = re.compile(r"(?<![A-Za-z_{])[ND]_\{\d+\}")

wide = st.lists(texts, min_size=2, max_size=6).map(
    lambda found: f"({' + '.join(found)})*(a + {found[0]})/(b + {' - '.join(found)})"
)


def flat(chunks) -> str:
    """A broken line as one text for Python."""

    def spelled(node) -> str:
        match node:
            case Row(items):
                return " ".join(map(spelled, items))
            case Sign("·"):
                return "*"
            case Sign("||"):
                return "|"
            case Sign(text):
                return text
            case StandIn(letter):
                return f"{letter}{{{hash(node.whole)}}}"
            case Product(factors):
                return "*".join(f"({spelled(item)})" for item in factors)
            case Ratio(top, bottom):
                return f"(({spelled(top)})/({spelled(bottom)}))"
            case Power(Row(()), exponent):
                return f"**({spelled(exponent)})"
            case Power(base, exponent):
                return f"(({spelled(base)})**({spelled(exponent)}))"
        terms = getattr(node, "terms", None)
        if terms is not None:
            signed = [f"{'-' if negative else '+'} ({spelled(x)})" for negative, x in terms]
            return " ".join(signed).removeprefix("+ ")
        items = getattr(node, "items", None)
        if items is not None:
            return "(" + "|".join(f"({spelled(item)})" for item in items) + ")"
        return getattr(node, "text", None) or node.name

    return " ".join(map(spelled, chunks))


def juxtaposed(text: str) -> str:
    """Signs of multiplication where factors stand side by side, as a reader understands them."""
    text = re.sub(r"(?<=[\w)])\s*\(", "*(", text)
    return re.sub(r"\)\s*(?=[A-Za-z0-9])", ")*", text)


@given(wide)
def test_a_broken_equation_keeps_its_value(text):
    """Every name put back in, and the pieces of each line put together, give the same number."""
    try:
        expected = by_hand(text)
    except ZeroDivisionError:
        return
    lines = [flat(line).split("=", 1) for line in equation(Symbol("H"), read_formula(text))]
    whole = lines[0][1]
    for name, meaning in lines[1:]:
        whole = whole.replace(name.strip(), f"({meaning})")
    assert "{" not in whole
    try:
        assert by_hand(juxtaposed(whole.strip())) == pytest.approx(expected, rel=1e-9, abs=1e-9)
    except ZeroDivisionError:
        return


@given(wide)
def test_lines_break_at_signs_alone(text):
    """Each piece behind a break starts with a sign, and no quotient is parted."""
    for line in equation(Symbol("H"), read_formula(text)):
        _, *rest = line
        for piece in rest:
            first = piece.items[0] if isinstance(piece, Row) else piece
            assert first in {Sign(x) for x in ("=", "+", "-", "||", "·")}
        assert not any(Sign("/") in getattr(piece, "items", ()) for piece in line)


def test_factors_that_need_a_break_show_a_point():
    """A product of many factors goes on behind a point; one that fits has none."""
    (line,) = equation(Symbol("H"), read_formula("*".join(f"Rload{k}" for k in range(1, 12))))
    assert len(line) > 2
    assert all(piece.items[0] == Sign("·") for piece in line[2:])
    assert max(map(width, line)) <= WIDEST + 3
    (short,) = equation(Symbol("H"), read_formula("R1*R2*(C1 + C2)"))
    assert r"\cdot" not in " ".join(map(tex, short))


def test_a_quotient_inside_a_sum_is_named_too():
    """Not only the outermost one: nothing is broken at a slash."""
    top = " + ".join(f"R{k}*C{k}" for k in range(1, 12))
    first, second = equation(Symbol("H"), read_formula(f"1 + ({top})*s/(R1 + R2)"))
    assert r"\frac{N}{R_{1} + R_{2}}" in " ".join(map(tex, first))
    assert tex(second[0]) == "N"


def _section(*pairs: tuple[str, str]) -> Section:
    lines = [line for name, text in pairs for line in equation(Symbol(name), read_formula(text))]
    return Section(title="", blocks=(Formula(lines=tuple(lines)),))


_LONG = " + ".join(f"R{k}" for k in range(1, 20))


def test_numbers_follow_the_quotients():
    """Different tops and bottoms, different names; the same one keeps its name, told once."""
    made = _section(
        ("H", f"1/({_LONG})"), ("Q", f"({_LONG})/({_LONG} + a)"), ("X", f"({_LONG} + b)/({_LONG})")
    )
    (section,) = numbered_names([made])
    text = [tex(line[0]) for line in section.blocks[0].lines]
    assert text == ["H", "D_{1}", "Q", "N_{2}", "D_{2}", "X", "N_{3}"]
    assert r"\frac{N_{3}}{D_{1}}" in tex(section.blocks[0].lines[5][1])


def test_names_of_the_circuit_are_left_out():
    """A part D1 or N2 keeps its name for itself."""
    made = _section(("H", f"D1*N2/({_LONG})"))
    (section,) = numbered_names([made])
    assert tex(section.blocks[0].lines[1][0]) == "D_{3}"


@pytest.mark.parametrize("name", NAMES)
def test_each_name_has_one_meaning(name):
    """In every form of every shipped note, a name used is told, and never in two ways."""
    for page in (note(name).markdown(), note(name).latex()):
        meanings: dict[str, str] = {}
        joined = re.sub(r"\\begin\{aligned\}\n& |\\\\\n& \\quad |\n\\end\{aligned\}", " ", page)
        shown = re.findall(r"\$\$\n(.*?)\n\$\$", joined, re.DOTALL)
        shown += re.findall(r"\\noteformula\{(.*)\}", joined)
        for line in shown:
            plain = " ".join(re.sub(r"\\notepiece", "", line).split())
            found = _DEFINED.match(plain.lstrip("{ ").replace("} {", " ", 1))
            if found:
                assert meanings.setdefault(found[1], found[2]) == found[2]
        if "\\documentclass" not in page:
            used = {name for line in shown for name in _USED.findall(line)}
            assert used <= set(meanings)
            assert all(re.search(r"(?<![A-Za-z_{\\])[N]\s*=", line) is None for line in shown)


def test_a_two_port_has_no_second_d():
    """D is a chain parameter; what stands below a line is called D with a number."""
    text = "in -- R1 -- a -- L1 -- out\na -- C1 -- gnd\nout -- C2 -- gnd\n"
    text += "ask two-port from in to out\n"
    page = acsolve.parse(text).note().markdown()
    assert len(re.findall(r"(?:^|& )D = ", page, re.MULTILINE)) <= 1


@pytest.mark.parametrize("name", ["R1", "Rin", "Radc", "R_1", "Cx1", "Ld", "C12", "tau", "load"])
def test_drawing_and_formula_agree(name):
    """A part's name is parted in the same way on the sheet and in a formula."""
    shown = pieces(Text(text=name, at=(0, 0), size=1.0, role="name"))
    head, lowered = split_name(name)
    assert shown == ([(head, False), (lowered, True)] if lowered else [(head, False)])


@pytest.mark.parametrize(
    ("name", "shown"),
    [("Cx1", ("C", "x1")), ("Ld", ("L", "d")), ("R_1", ("R", "1")), ("Radc", ("R", "adc"))],
)
def test_letter_and_word(name, shown):
    """The letter of the kind stands alone, whatever follows lies below the line."""
    assert split_name(name) == shown


def test_words_on_the_sheet_stay_whole():
    """Values, nodes, and words about several parts have no subscripts."""
    for text, role in (
        ("4.7 µF", "value"),
        ("n1", "node"),
        ("R1 to R30", "name"),
        ("R1 …", "name"),
    ):
        assert pieces(Text(text=text, at=(0, 0), size=1.0, role=role)) == [(text, False)]
