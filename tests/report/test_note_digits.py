"""Digits of numbers in a note: as many as are told, zeros at the end where a number goes on."""

from __future__ import annotations

from decimal import Decimal
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from acsolve.report.note.formula.mathml import mathml
from acsolve.report.note.formula.read import read_formula
from acsolve.report.note.formula.tex import tex
from acsolve.report.note.formula.tree import Call, Number, Product, Symbol, Total
from acsolve.report.note.wording import frequencies, quantity, ratio, sentence
from acsolve.report.number import engineering, goes_on, plain


def digits_of(text):
    """The digits of a number, without zeros in front."""
    mantissa = text.split("e")[0].split(" ")[0].lstrip("-")
    return mantissa.replace(".", "").lstrip("0")


@given(st.floats(1e-12, 1e12), st.integers(2, 8))
def test_a_number_that_goes_on_has_all_its_digits(value, digits):
    """So many digits, and the number they stand for is the value rounded to them."""
    for text in (plain(value, digits, even=True), engineering(value, "", digits, even=True)):
        if "e" in text or abs(value) < 10 ** (digits - 1):
            assert len(digits_of(text)) == digits
        assert float(text) == float(f"{value:.{digits - 1}e}")


@given(st.integers(1, 9999), st.integers(-12, 9))
def test_a_number_of_few_digits_is_short(mantissa, power):
    """What the digits say completely has no zeros at its end, rounded or not."""
    value = float(Decimal(mantissa).scaleb(power))
    assert not goes_on(value, 4)
    assert not goes_on(value * (1 + 2.0**-50), 4)
    assert goes_on(value * (1 + 1e-6), 4)


def test_examples():
    """Beside each other they line up."""
    assert quantity(5.09996e3, "Hz", 5) == "5.1000\u00a0kHz"
    assert quantity(5.1e3, "Hz", 5) == "5.1\u00a0kHz"
    assert quantity(1e3, "ohm") == "1\u00a0kΩ"
    assert quantity(999.99, "ohm") == "1.000\u00a0kΩ"
    assert ratio(0.70000001) == "0.7000"
    assert ratio(1234.4) == "1234"
    assert ratio(0.0) == "0"


@pytest.mark.parametrize("text", ["it is so", "It is so", "it is so.", "it is so.."])
def test_a_sentence_ends_once(text):
    """One capital, one full stop."""
    assert sentence(text) == "It is so."


def test_a_coupling_is_a_name():
    """k(L1, L2) is one symbol, and k a part of that name before a bracket is another."""
    found = read_formula("s*k(L1, L2)*sqrt(L1*L2)")
    assert isinstance(found, Product)
    assert found.factors[1] == Symbol("k_L1\u2009L2")
    assert read_formula("k*(a + b)") == Product(
        (Symbol("k"), Total(((False, Symbol("a")), (False, Symbol("b")))))
    )


def test_angles_and_magnitudes_as_written_by_hand():
    """arg of a complex number, bars around a magnitude, in both languages of mathematics."""
    found = read_formula("atan2(w*R, -1)")
    assert isinstance(found, Call)
    assert found.name == "arg"
    assert read_formula("atan2(0, -R)").arguments == (Total(((True, Symbol("R")),)),)
    size = read_formula("abs(R)")
    assert tex(size) == r"\left|R\right|"
    assert mathml(size).count("|") == 2
    assert "abs" not in mathml(size)
    assert Number("2") == read_formula("2")


@given(st.lists(st.floats(1e-3, 1e9), min_size=1, max_size=4, unique=True))
def test_neighbours_are_told_apart(hertz):
    """Different frequencies have different texts, five digits where these are enough."""
    spread = sorted(hertz)
    found = frequencies(spread)
    relative = [second / first - 1 for first, second in pairwise(spread)]
    if all(step > 1e-10 for step in relative):
        assert len(set(found)) == len(found)
    if all(step > 1e-3 for step in relative):
        assert found == [quantity(value, "Hz", 5) for value in spread]
