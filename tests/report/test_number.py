"""Numbers for people: round trips and the ranges of their parts."""

from __future__ import annotations

import re
from math import inf, nan

import pytest
from hypothesis import given
from hypothesis import strategies as st

from acsolve.circuit.unit import PREFIXES
from acsolve.report.number import complex_text, decibels, engineering, plain

POWERS = {"": 0, **PREFIXES}
SIZES = st.floats(min_value=1e-14, max_value=9e14)
ANY = st.floats(allow_nan=False, allow_infinity=False)


def back(text: str) -> float:
    """The number that a text with prefix and `Hz` stands for."""
    number, _, unit = text.partition(" ")
    return float(f"{number}e{POWERS[unit.removesuffix('Hz')]}")


@given(SIZES, st.integers(2, 12), st.booleans())
def test_engineering_reads_back(value, digits, even):
    """A number is shown to within half a unit of its last digit."""
    assert back(engineering(value, "Hz", digits, even=even)) == pytest.approx(
        value, rel=0.51 * 10.0 ** (1 - digits)
    )


@given(SIZES)
def test_mantissa_has_one_to_three_whole_digits(value):
    """The prefix is the one that leaves a mantissa from 1 to below 1000."""
    mantissa = float(engineering(value, "Hz").split()[0])
    assert 1 <= mantissa < 1000


@given(SIZES)
def test_sign_is_kept(value):
    """A negative number is its positive one with a sign before it."""
    assert engineering(-value, "Hz") == "-" + engineering(value, "Hz")


@given(SIZES, st.integers(3, 9))
def test_even_digits_line_up(value, digits):
    """With `even` every number has the same count of digits."""
    shown = engineering(value, "s", digits, even=True).split()[0]
    assert len(shown.replace(".", "").replace("-", "")) == digits


@given(ANY)
def test_plain_reads_back(value):
    """A plain number is a Python number of six digits."""
    assert float(plain(value)) == pytest.approx(value, rel=5.1e-6, abs=5e-324)


@given(ANY)
def test_every_double_is_shown(value):
    """No double is beyond what can be shown, whatever its size."""
    assert re.fullmatch(r"-?\d+(\.\d+)?(e-?\d+)? \S*Hz", engineering(value, "Hz"))


@pytest.mark.parametrize(
    ("value", "shown"),
    [
        (0.0, "0 Hz"),
        (1.0, "1 Hz"),
        (999.9999, "1 kHz"),
        (999.9994, "999.999 Hz"),
        (1e3, "1 kHz"),
        (0.001, "1 mHz"),
        (1026.144, "1.02614 kHz"),
        (4.7e-6, "4.7 uHz"),
        (123456.0, "123.456 kHz"),
        (1e15, "1e15 Hz"),
        (1e-18, "1e-18 Hz"),
        (inf, "infinite"),
        (-inf, "-infinite"),
        (nan, "unknown"),
    ],
)
def test_engineering_examples(value, shown):
    """Prefixes change at thousands, after rounding, and end at f and T."""
    assert engineering(value, "Hz") == shown


@given(st.floats(-1e4, 1e4))
def test_decibels_read_back(value):
    """A level is shown to a ten-thousandth of a decibel."""
    assert float(decibels(value).split()[0]) == pytest.approx(value, abs=5.1e-5)


def test_complex_numbers_carry_their_unit():
    """A complex number is real and imaginary part with one unit; a real one is plain."""
    assert complex_text(3 - 4j, "V") == "3 - j4 V"
    assert complex_text(2500 + 0j, "V") == "2.5 kV"
