"""Numbers as written are exact."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given
from hypothesis import strategies as st

from acsolve.circuit import unit
from acsolve.circuit.expression import Number
from acsolve.circuit.unit import PREFIXES
from acsolve.errors import AcsolveError
from acsolve.text import parse_value

UNITS = {
    "ohm": unit.OHM,
    "Ω": unit.OHM,
    "F": unit.FARAD,
    "H": unit.HENRY,
    "S": unit.SIEMENS,
    "Hz": unit.HERTZ,
    "s": unit.SECOND,
    "V": unit.VOLT,
    "A": unit.AMPERE,
    "W": unit.WATT,
    "K": unit.KELVIN,
    "V/√Hz": unit.VOLT_PER_ROOT_HERTZ,
    "A/rtHz": unit.AMPERE_PER_ROOT_HERTZ,
}
#: IEC 60062:2016, resistance; looked up.
RESISTANCE = {
    "4R7": "4.7", "470R": "470", "4K7": "4700", "47K": "47000", "47K3": "47300",
    "470K": "470000", "4M7": "4700000", "8K2": "8200", "15M0": "15000000",
}  # fmt: skip
#: IEC 60062:2016, resistance; from memory.
RESISTANCE_FROM_MEMORY = {
    "1R0": "1", "3R32": "3.32", "59R0": "59", "590R": "590", "5K90": "5900", "1M0": "1e6",
    "10M": "1e7", "1G0": "1e9", "1T0": "1e12", "2L2": "0.0022",
}  # fmt: skip
#: IEC 60062:2016, capacitance; examples from memory, the letters looked up.
CAPACITANCE = {
    "3p3": "3.3e-12", "33p": "3.3e-11", "330p": "3.3e-10", "3n3": "3.3e-9", "33n": "3.3e-8",
    "3u3": "3.3e-6", "33u": "3.3e-5", "3m3": "3.3e-3",
}  # fmt: skip


def number(text: str, dimension: unit.Dimension | None = None) -> Fraction:
    """The exact number a value stands for."""
    expression = parse_value(text, dimension=dimension).expression
    assert isinstance(expression, Number)
    return expression.value


@pytest.mark.parametrize(("code", "value"), [*(RESISTANCE | RESISTANCE_FROM_MEMORY).items()])
def test_resistance_codes(code, value):
    """A resistance code of IEC 60062 that starts with a digit is exactly its value."""
    assert number(code, unit.OHM) == Fraction(value)


@pytest.mark.parametrize(("code", "value"), [*CAPACITANCE.items()])
def test_capacitance_codes(code, value):
    """A capacitance code of IEC 60062 that starts with a digit is exactly its value."""
    assert number(code, unit.FARAD) == Fraction(value)


@pytest.mark.parametrize("code", ["R47", "R10", "p33", "n33", "u33", "m33"])
def test_codes_that_start_with_a_letter_are_names(code):
    """A code that starts with a letter is a name, and an unknown one."""
    with pytest.raises(AcsolveError, match=r"name\.unknown"):
        parse_value(code, dimension=unit.OHM)


digits = st.integers(0, 10**9)
powers = st.integers(-30, 30)


@given(whole=digits, decimals=st.text("0123456789", max_size=8), power=powers)
def test_plain_numbers_are_exact(whole, decimals, power):
    """A number with a power of ten is the fraction that Python reads in it."""
    text = f"{whole}.{decimals}e{power}" if decimals else f"{whole}e{power}"
    assert number(text) == Fraction(text)


@given(
    whole=digits,
    decimals=st.text("0123456789", min_size=1, max_size=6),
    prefix=st.sampled_from(["", *PREFIXES, "µ", "μ"]),
    sign=st.sampled_from(sorted(UNITS)),
    blank=st.sampled_from(["", " ", "\N{NO-BREAK SPACE}"]),
)
def test_units_and_prefixes_are_exact(whole, decimals, prefix, sign, blank):
    """A number with prefix and unit is exactly scaled, with or without a blank."""
    if not prefix and not blank and sign == "K":
        return  # 47K attached is a value code
    scale = Fraction(10) ** PREFIXES.get(prefix.replace("µ", "u").replace("μ", "u"), 0)
    text = f"{whole}.{decimals}{blank}{prefix}{sign}"
    assert number(text, UNITS[sign]) == Fraction(f"{whole}.{decimals}") * scale


@given(whole=digits, decimals=digits, letter=st.sampled_from("RKkMGTpnum"))
def test_codes_are_exact(whole, decimals, letter):
    """A value code is its digits with the letter as decimal point, times the letter's power."""
    scale = Fraction(10) ** (PREFIXES | {"R": 0, "K": 3})[letter]
    assert number(f"{whole}{letter}{decimals}") == Fraction(f"{whole}.{decimals}") * scale


@pytest.mark.parametrize(
    ("text", "value"),
    [("47K", 47000), ("300 K", 300), ("2 %", Fraction(1, 50)), ("100 ppm", Fraction(1, 10**4)),
     ("4k7 ohm", 4700), ("4k7ohm", 4700), ("-6 dB", -6), ("2^10", 1024), ("2**-1", Fraction(1, 2)),
     ("-2^2", -4), ("sqrt(9/4)", Fraction(3, 2)), ("0.1 uF", Fraction(1, 10**7)),
     ("1 mohm", Fraction(1, 1000)), ("1 Mohm", 10**6)],
)  # fmt: skip
def test_values_by_hand(text, value):
    """A few values worked out by hand."""
    assert number(text) == value


def test_an_attached_k_is_kelvin_where_kelvin_are_needed():
    """`300K` is a temperature in the place of one, and three hundred thousand elsewhere."""
    assert number("300K", unit.KELVIN) == 300
    assert number("300K", unit.OHM) == 300_000


@pytest.mark.parametrize(
    ("text", "hint"),
    [(".5", "0.5"), ("1.", "1 or 1.0"), ("4,7", "4.7"), ("100 n", "100n"), ("4.7 Kohm", "4.7 kohm"),
     ("1 Ohm", "1 ohm"), ("10 MHZ", "10 MHz"), ("5 meg", "5 M"), ("2 R", "2R or 2 ohm"),
     ("100n F", "100 nF"), ("4k7k", "4.7")],
)  # fmt: skip
def test_wrong_spellings_name_the_right_one(text, hint):
    """A wrong spelling is refused with the right one in the hint."""
    with pytest.raises(AcsolveError) as caught:
        parse_value(text)
    assert hint in (caught.value.hint or "")
