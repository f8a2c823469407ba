"""What is written reads back equal."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.circuit import expression as ex
from acsolve.circuit.netlist import Netlist
from acsolve.errors import AcsolveError
from acsolve.text import parse, write
from acsolve.text.write import text_literal
from acsolve.text.write_values import number_text
from tests.strategies import LUMPED, PASSIVE, connected
from tests.text.test_soup import lines


@settings(max_examples=200)
@given(connected(extra=LUMPED, odd=True))
def test_generated_netlists(netlist):
    """Any generated netlist with numbers reads back equal."""
    assert parse(write(netlist)).netlist == netlist


@settings(max_examples=60)
@given(connected(extra=PASSIVE, symbols=True))
def test_generated_netlists_with_symbols(netlist):
    """Any generated network of resistors, coils and capacitors reads back equal."""
    simple = [part for part in netlist.parts if set(part.values) == {"value"}]
    names = {part.name for part in simple}
    couplings = tuple(item for item in netlist.couplings if {item.first, item.second} <= names)
    plain = Netlist(parts=tuple(simple), couplings=couplings)
    if simple:
        assert parse(write(plain)).netlist == plain


@settings(max_examples=300)
@given(lines)
def test_whatever_reads_is_written(text):
    """Any text that reads gives a netlist that is written and reads back equal."""
    try:
        netlist = parse(text).netlist
    except AcsolveError:
        return
    written = write(netlist)
    if written:
        assert parse(written).netlist == netlist


leaves = st.one_of(
    st.builds(ex.Number, st.fractions(-1000, 1000, max_denominator=60)),
    st.sampled_from([ex.Name("x"), ex.Name("y"), ex.PI]),
)


def grown(inner):
    """Operations on expressions, made by the constructors."""
    pairs = st.tuples(st.sampled_from([ex.add, ex.subtract, ex.multiply, ex.divide]), inner, inner)
    calls = st.tuples(st.sampled_from(["sqrt", "exp", "ln", "log10"]), inner)
    raised = st.tuples(inner, st.integers(-3, 3))
    return st.one_of(
        pairs.map(_combined),
        calls.map(lambda item: ex.call(*item)),
        raised.map(lambda item: _safe(ex.power, item[0], ex.number(item[1]))),
    )


def _combined(item):
    return _safe(*item)


def _safe(operation, left, right):
    try:
        return operation(left, right)
    except ZeroDivisionError:
        return left


@settings(max_examples=200)
@given(st.recursive(leaves, grown, max_leaves=12))
def test_expressions(expression):
    """Any expression of plain numbers and names reads back as the same tree."""
    first = parse("let x = 1 V/V\nlet y = 2 V/V\nlet z = 1 V/V\na -- C1 = (x*y*1 F) -- b").netlist
    item = first.quantities["z"]
    changed = {**first.quantities, "z": _with(item, expression)}
    netlist = Netlist(parts=first.parts, quantities=changed)
    assert parse(write(netlist)).netlist.quantities["z"].value.expression == expression


def _with(item, expression):
    from dataclasses import replace

    return replace(item, value=replace(item.value, expression=expression))


def test_units_that_folding_lost_are_put_back():
    """A formula in which numbers had units keeps its dimension when written."""
    text = "a -- R1 = 1 kohm -- b\nlet f = 1/(2*pi*R1*10 nF)\nb -- C1 = (1/(f*50 ohm)) -- gnd"
    netlist = parse(text).netlist
    again = parse(write(netlist)).netlist
    assert again == netlist
    assert again.quantities["f"].dimension == netlist.quantities["f"].dimension


@given(st.fractions())
def test_numbers(value):
    """A number as written is that number."""
    text = f"a -- R1 = ({number_text(value)}) -- b"
    assert parse(text).netlist.parts[0].values["value"].expression == ex.Number(value)


@given(st.text(st.characters(exclude_categories=["Cs", "Cc"], exclude_characters="\u2028\u2029")))
def test_texts(title):
    """A title of any characters on one line reads back equal."""
    assert parse(f"title {text_literal(title)}\na -- R1 -- b").netlist.title == title


def test_values_get_their_prefix():
    """Written values carry the prefix a person would choose."""
    netlist = parse("a -- C1 = 1e-8 F -- b\na -- R1 = 4700 -- b\na -- R2 = (1/3) -- b").netlist
    assert write(netlist) == (
        "a -- C1 = 10 nF -- b\na -- R1 = 4.7 kohm -- b\na -- R2 = ((1/3)) -- b\n"
    )
    assert number_text(Fraction(1, 3)) == "(1/3)"


@pytest.mark.parametrize("word", ["N1.R", "R1~L1"])
def test_inner_names_need_the_mark(word):
    """Names with dots stand for themselves only in a flattened text."""
    text = f"{word} -- R1 = 5 ohm -- b\n"
    assert parse(f"flattened\n{text}").netlist.parts[0].nodes == (word, "b")
    with pytest.raises(AcsolveError):
        parse(text)
