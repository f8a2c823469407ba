"""Whatever the text, nothing but the one family of errors comes out."""

from __future__ import annotations

from contextlib import suppress

from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.errors import AcsolveError
from acsolve.text import (
    parse,
    parse_band,
    parse_duration,
    parse_frequencies,
    parse_gain,
    parse_level,
    parse_pair,
    parse_value,
)

PIECES = [
    "a",
    "b",
    "R1",
    "R2",
    "C1",
    "L1",
    "L2",
    "A1",
    "N1",
    "k",
    "n[k]",
    "R[1]",
    "R[1..2]",
    "N1[2].R",
    "N1.b",
    "gnd",
    "0",
    "7",
    ".5",
    "1.",
    "4k7",
    "100n",
    "2R",
    "5e3",
    "10",
    "nF",
    "ohm",
    "kHz",
    "dB",
    "deg",
    "V/√Hz",
    "ppm",
    "±",
    "+-",
    "+80%",
    "-20%",
    "%",
    "--",
    "-",
    "+",
    "||",
    "∥",
    "(",
    ")",
    "[",
    "]",
    ",",
    "=",
    ":",
    "..",
    ".",
    "~",
    "*",
    "/",
    "^",
    "**",
    "∠",
    "angle",
    "title",
    "caution",
    "let",
    "couple",
    "join",
    "port",
    "block",
    "repeat",
    "variant",
    "ask",
    "goal",
    "absent",
    "end",
    "from",
    "to",
    "into",
    "as",
    "at",
    "over",
    "reference",
    "for",
    "below",
    "above",
    "half",
    "power",
    "uniform",
    "normal",
    "transfer",
    "cutoff",
    "two-port",
    "impedance",
    "sweep",
    "s",
    "pi",
    "sqrt(",
    "exp(",
    "opamp(",
    "plus=",
    "minus=",
    "out=",
    "value=",
    "tc=",
    "quality=",
    "resistor",
    "section",
    "flattened",
    '"x"',
    '"',
    "#",
    "–",
    "Ω",
    "μ",
    "\t",
    "\n",
    "\n",
    "\n",
]
texts = st.lists(st.sampled_from(PIECES), max_size=60).map(" ".join)
lines = st.lists(
    st.sampled_from(
        (
            "a -- R1 = 4k7 -- b -- C1 -- gnd", "R1 = 5 ohm ± 1 %", "let R, x", "let fc = 1 kHz",
            "C1 = 1/(2*pi*fc*R1)", "block cell(a, b)", "a -- R -- b", "R = x", "end",
            "b -- N1 : 3 * cell(R = 2*R1) -- c", "N1[2].R = 5 ohm", "repeat k = 1 .. 3",
            "n[k-1] -- R[k] -- n[k]", "variant \"v\"", "R1 = absent", "join a, c",
            "couple L1, L2 = 0.5", "c -- L1 -- d -- L2 -- gnd", "ask cutoff from a to b",
            "port p = (a, b)", "goal from a to b over 1 Hz .. 2 Hz below -3 dB", "join p, a",
            "A1 : opamp(plus = a, minus = b, out = c)", "flattened", "x.y -- R9 -- a~b",
            "N1[2].b -- R8 -- q", "ask transfer from p to N1[1].b", "R[1 .. 3] = 2*R[4]",
        )
    ),
    max_size=14,
).map("\n".join)  # fmt: skip


def tried(call, *arguments) -> None:
    """Call, and let only the family of errors pass."""
    with suppress(AcsolveError):
        call(*arguments)


@settings(max_examples=400)
@given(texts)
def test_token_soup(text):
    """Random tokens give a netlist or an AcsolveError, never anything else."""
    tried(parse, text)


@settings(max_examples=400)
@given(lines)
def test_statement_soup(text):
    """Random statements give a netlist or an AcsolveError, never anything else."""
    tried(parse, text)


@given(st.text(max_size=80))
def test_character_soup(text):
    """Random characters give a netlist or an AcsolveError, never anything else."""
    tried(parse, text)


@settings(max_examples=200)
@given(texts)
def test_option_soup(text):
    """Random option values give a value or an AcsolveError, never anything else."""
    netlist = parse("a -- R1 = 4k7 -- b\nport p = (a, b)\nlet fc = 1 kHz").netlist
    tried(parse_value, text)
    tried(parse_pair, text, netlist)
    for call in (parse_band, parse_frequencies, parse_level, parse_duration, parse_gain):
        tried(call, text)
