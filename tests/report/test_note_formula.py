"""Formulas: read, written, broken; what comes out says what went in."""

from __future__ import annotations

from xml.etree import ElementTree as ET

import pytest
from hypothesis import given
from hypothesis import strategies as st

import acsolve
from acsolve.analyses.reading import FORM_NAMES, reading
from acsolve.report.drawing.name import split_name
from acsolve.report.note.formula.mathml import math_element
from acsolve.report.note.formula.read import UnreadableError, read_formula
from acsolve.report.note.formula.split import WIDEST, chunks, equation
from acsolve.report.note.formula.tex import tex
from acsolve.report.note.formula.tree import (
    Call,
    Node,
    Number,
    Parallel,
    Power,
    Product,
    Ratio,
    Row,
    Sign,
    Symbol,
    Total,
    width,
)
from acsolve.report.note.wording import decibels, quantity, ratio
from tests.report.note_reader import NAMES, note

_VALUES = {"a": 1.25, "b": 0.5, "c": 3.0, "s": 2.0, "pi": 3.140625}

leaves = st.sampled_from(["a", "b", "c", "s", "2", "7", "1.5e-2"])
texts = st.recursive(
    leaves,
    lambda inner: st.one_of(
        st.tuples(inner, inner).map(lambda x: f"({x[0]} + {x[1]})"),
        st.tuples(inner, inner).map(lambda x: f"({x[0]} - {x[1]})"),
        st.tuples(inner, inner).map(lambda x: f"{x[0]}*{x[1]}"),
        st.tuples(inner, inner).map(lambda x: f"{x[0]}/({x[1]})"),
        inner.map(lambda x: f"({x})^2"),
        inner.map(lambda x: f"-({x})"),
        st.tuples(inner, inner).map(lambda x: f"({x[0]} || {x[1]})"),
    ),
    max_leaves=8,
)


def value(node: Node) -> float:
    """A tree evaluated by its meaning."""
    match node:
        case Number(text):
            return float(text)
        case Symbol(name):
            return _VALUES[name]
        case Total(terms):
            return sum(-value(item) if negative else value(item) for negative, item in terms)
        case Product(factors):
            found = 1.0
            for item in factors:
                found *= value(item)
            return found
        case Ratio(top, bottom):
            return value(top) / value(bottom)
        case Power(base, exponent):
            return value(base) ** value(exponent)
        case Call("sqrt", (inner,)):
            return value(inner) ** 0.5
        case Parallel(items):
            return 1 / sum(1 / value(item) for item in items)
    raise AssertionError(node)


def by_hand(text: str) -> float:
    """The same text through Python's own grammar; parallel values by an operator of their own."""

    class Quantity(float):
        def __or__(self, other):
            return Quantity(1 / (1 / float(self) + 1 / float(other)))

    import ast

    def walk(node):
        match node:
            case ast.Expression(body):
                return walk(body)
            case ast.Constant(number):
                return float(number)
            case ast.Name(name):
                return _VALUES[name]
            case ast.UnaryOp(ast.USub(), operand):
                return -walk(operand)
            case ast.BinOp(left, operator, right):
                first, second = walk(left), walk(right)
                match operator:
                    case ast.Add():
                        return first + second
                    case ast.Sub():
                        return first - second
                    case ast.Mult():
                        return first * second
                    case ast.Div():
                        return first / second
                    case ast.Pow():
                        return first**second
                    case ast.BitOr():
                        return 1 / (1 / first + 1 / second)
        raise AssertionError(ast.dump(node))

    return walk(ast.parse(text.replace("^", "**").replace("||", "|"), mode="eval"))


@given(texts)
def test_reading_keeps_the_meaning(text):
    """The tree of a text has the value that the text has."""
    try:
        expected = by_hand(text)
    except ZeroDivisionError:
        return
    assert value(read_formula(text)) == pytest.approx(expected, rel=1e-12, abs=1e-12)


@pytest.mark.parametrize(
    "text", ["", "a +", "a b", "a)(", "(a", "a $ b", "f(a", "a||", "1 2", "*a"]
)
def test_what_is_no_formula_is_refused(text):
    """Nothing but our own form is read."""
    with pytest.raises(UnreadableError):
        read_formula(text)


def test_nesting_is_bounded():
    """A text that nests without end is refused, and costs no stack."""
    with pytest.raises(UnreadableError):
        read_formula("(" * 5000 + "a" + ")" * 5000)


@given(texts)
def test_every_tree_is_written(text):
    """MathML is XML; TeX has its braces in pairs."""
    node = read_formula(text)
    ET.fromstring(math_element(node))  # noqa: S314 - our own text
    written = tex(node)
    assert written.count("{") == written.count("}")
    assert written.count(r"\left(") == written.count(r"\right)")


@given(texts, st.floats(6, 40))
def test_breaking_loses_nothing(text, limit):
    """The chunks hold every name and number of the formula, in its order."""
    node = read_formula(text)
    whole = "".join(x for x in tex(node) if x.isalnum())
    if width(node) <= limit:
        assert chunks(node, limit) == (node,)
    joined = [name for chunk in chunks(node, limit) for name in _leaves(chunk)]
    own = _leaves(node)
    assert [x for x in joined if x not in ("1", "2")] == [x for x in own if x not in ("1", "2")]
    assert whole


def _leaves(node) -> list[str]:
    match node:
        case Number(text):
            return [text]
        case Symbol(name):
            return [name]
        case Total(terms):
            return [x for _, item in terms for x in _leaves(item)]
        case Product(items) | Parallel(items) | Call(_, items):
            return [x for item in items for x in _leaves(item)]
        case Ratio(first, second) | Power(first, second):
            return _leaves(first) + _leaves(second)
    return [x for item in getattr(node, "items", ()) for x in _leaves(item)]


@pytest.mark.parametrize("name", NAMES)
def test_every_form_of_every_circuit_is_read(name):
    """All readings of the shipped circuits are in the form that the reader knows."""
    circuit = acsolve.read(f"circuits/{name}.circuit")
    if len(circuit.parts) > 30:
        pytest.skip("its forms are no longer read by anyone")
    for chapter in note(name).facts.chapters:
        form = chapter.formula
        if form is None:
            continue
        for kind in FORM_NAMES:
            for line in reading(form, kind):
                read_formula(line.text)


def test_chunks_are_narrow():
    """A long sum breaks into pieces that a narrow page holds."""
    text = " + ".join(f"R{k}*C{k}*s" for k in range(1, 30))
    (line,) = equation(Symbol("H"), read_formula(text))
    assert max(map(width, line)) <= WIDEST + 3
    top, numerator = equation(Symbol("H"), read_formula(f"({text})/s"))
    assert max(map(width, (*top, *numerator))) <= WIDEST + 3


@pytest.mark.parametrize(
    ("name", "shown"),
    [
        ("R1", ("R", "1")),
        ("R12", ("R", "12")),
        ("tau", ("τ", "")),
        ("tau_z", ("τ", "z")),
        ("w0", ("ω", "0")),
        ("w", ("ω", "")),
        ("Rload", ("R", "load")),
        ("Q", ("Q", "")),
        ("N1[7].R", ("N1[7].R", "")),
        ("C1.series_resistance", ("C", "1, series\u00a0resistance")),
        ("V_near_in", ("V", "near_in")),
        ("fc", ("fc", "")),
    ],
)
def test_names(name, shown):
    """Numbers and words of a name stand below the line, Greek names are letters."""
    assert split_name(name) == shown


def test_numbers_in_words():
    """SI prefixes, true signs, the digits that matter."""
    assert quantity(4.7e-6, "F") == "4.7\u00a0µF"
    assert quantity(33e3, "ohm") == "33\u00a0kΩ"
    assert quantity(-1e-3, "V") == "−1\u00a0mV"
    assert quantity(1026.144, "Hz") == "1.026\u00a0kHz"
    assert ratio(1.5e-7) == "1.5·10⁻⁷"
    assert decibels(-3.0103) == "−3.01\u00a0dB"
    assert decibels(float("-inf")) == "−∞\u00a0dB"


def test_quotients_of_quotients_share_one_line():
    """a/b/c stands as a over b·c, and one over a value times another as a fraction."""
    a, b, c = map(Symbol, "abc")
    assert read_formula("a/b/c") == Ratio(a, Product((b, c)))
    assert read_formula("1/b/c*a") == Ratio(a, Product((b, c)))
    assert read_formula("1/b*(a + c)") == Ratio(Total(((False, a), (False, c))), b)


@pytest.mark.parametrize("sign", ["=", "+", "-", "||"])
def test_a_sign_at_a_start_keeps_its_distance(sign):
    """Behind a break the sign is written as one between two sides; a browser would not know."""
    text = math_element(Row((Sign(sign), Symbol("a"))))
    assert text.count("<mo") == 1
    assert 'form="infix" lspace="0" rspace="0.2' in text


def test_a_minus_that_takes_off_nothing_is_a_prefix():
    """`= −a`: the minus belongs to what follows."""
    text = math_element(Row((Sign("="), Sign("-"), Symbol("a"))))
    assert '<mo form="prefix">−</mo>' in text


def test_names_wider_than_a_screen_are_made_small():
    """There is no operator to break at; anything narrower keeps its size."""
    assert "font-size" not in math_element(Symbol("R1"))
    (text,) = [x for x in math_element(Symbol("x" * 80)).split('"') if x.startswith("font-size")]
    assert 0.25 <= float(text.removeprefix("font-size:").removesuffix("em")) < 0.5
