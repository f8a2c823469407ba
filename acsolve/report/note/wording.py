"""Numbers, names and formulas of answers as the note shows them."""

from __future__ import annotations

import re
from collections.abc import Sequence
from math import isinf
from typing import TYPE_CHECKING, Any

from acsolve.report.entry import letter
from acsolve.report.note.formula.read import UnreadableError, read_formula
from acsolve.report.note.formula.split import Chunks, equation
from acsolve.report.note.formula.tree import Node, Product, Row, Sign, Symbol, Words
from acsolve.report.note.model import Math
from acsolve.report.number import engineering, goes_on, plain

if TYPE_CHECKING:
    from acsolve.analyses.question import Ask

SPACE = "\u00a0"
DIGITS = 4
LONGEST = 1_500  # characters of a formula that is written out
_UNITS = {"ohm": "Ω", "rtHz": "√Hz", "deg": "°"}


def quantity(value: float, unit: str, digits: int = DIGITS) -> str:
    """A number with its unit: `1.026 kHz`, `4.7 µF`, `600 Ω`; `5.100 kHz` for 5.09996 kHz."""
    even = goes_on(value, digits)
    number, _, sign = engineering(value, unit, digits, even=even).partition(" ")
    if not sign:
        return readable_number(number)
    prefix = "µ" if sign.startswith("u") and sign != unit else sign[:1] if sign != unit else ""
    shown = unit
    for before, after in _UNITS.items():
        shown = shown.replace(before, after)
    return f"{readable_number(number)}{SPACE}{prefix}{shown}"


def frequencies(hertz: Sequence[float], digits: int = 5) -> list[str]:
    """Rising frequencies with so many digits, and as many more as tell neighbours apart."""
    for more in range(digits, 13):
        found = [quantity(value, "Hz", more) for value in hertz]
        if len(set(found)) == len(found):
            return found
    return found


def readable_number(text: str) -> str:
    """A number's text with a true minus sign and a power of ten: `1.5·10⁻⁷`."""
    mantissa, exponent, power = text.partition("e")
    if exponent and power.lstrip("-").isdigit() and mantissa.lstrip("-").replace(".", "").isdigit():
        raised = power.translate(str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹"))
        text = f"10{raised}" if mantissa == "1" else f"{mantissa}·10{raised}"
    return text.replace("-", "−")


def count(number: int, word: str) -> str:
    """`1 part`, `2 parts`."""
    return f"{number:,}{SPACE}{word}" + ("" if number == 1 else "s")


def ratio(value: float, digits: int = DIGITS) -> str:
    """A plain number, with zeros at its end where it goes on beyond them."""
    return readable_number(plain(value, digits, even=goes_on(value, digits)))


def decibels(value: float, digits: int = 2) -> str:
    """A level in dB with fixed places."""
    if value != value:  # noqa: PLR0124 - not a number
        return "unknown"
    if abs(value) == float("inf"):
        return "−∞" + SPACE + "dB" if value < 0 else "∞" + SPACE + "dB"
    text = f"{value:.{digits}f}"
    return f"{'0.00' if float(text) == 0 and digits == 2 else text}{SPACE}dB".replace("-", "−")


def size_words(gain_db: float, unit: str) -> str:
    """A gain in dB, or where it has a unit its magnitude."""
    if isinf(gain_db):
        return "infinite" if gain_db > 0 else "zero"
    return quantity(10 ** (gain_db / 20), unit) if unit and gain_db < 6000 else decibels(gain_db)


def name(text: str) -> Math:
    """A name of the circuit as a symbol."""
    return Math(Symbol(text))


def node_words(pair: tuple[str, str]) -> str:
    """A pair of nodes: one against ground, or both."""
    return f"“{pair[0]}”" if pair[1] == "gnd" else f"“{pair[0]}” and “{pair[1]}”"


def response_symbol(ask: Ask) -> Node:
    """H(s), Z(s), …"""
    return Row((Symbol(letter(ask)), Sign("("), Symbol("s"), Sign(")")))


def tree(text: str) -> Node | None:
    """The tree of a text of ours; None where it is too long to be read by a person."""
    if len(text) > LONGEST:
        return None
    try:
        return read_formula(text)
    except UnreadableError:
        return None


def lines(label: Node, text: str) -> list[Chunks]:
    """`label = text` as lines of a displayed formula; none where it is too long."""
    found = tree(text)
    return [] if found is None else equation(label, found)


def reading_label(text: str, ask: Ask) -> Node:
    """The left side of a reading's line: `gain(w)` is |H(jω)|, others are names of their own."""
    head, bracket, _ = text.partition("(")
    main = Symbol(letter(ask))
    of_frequency = Row((main, Sign("("), Product((Symbol("j"), Symbol("w"))), Sign(")")))
    if bracket and head == "gain":
        return Row((Sign("|"), of_frequency, Sign("|")))
    if bracket and head == "phase":
        return Row((Words("arg\u2009"), of_frequency))
    if text == "H":
        return response_symbol(ask)
    if "," in text or " " in text:
        return Words(text.replace("denominator of H", "denominator"))
    return Symbol(text)


def with_names(text: str, names: dict[str, str]) -> str:
    """A text for SymPy with the file's own names: safe name -> name."""
    spelled = re.sub(r"[A-Za-z_]\w*", lambda found: names.get(found[0], found[0]), text)
    return re.sub(r"\bI\b", "j", spelled.replace("**", "^"))


def sentence(text: str) -> str:
    """A remark with a capital at its start and one full stop at its end."""
    return f"{text[:1].upper()}{text[1:].rstrip('.')}."


def listed(words: Sequence[str]) -> str:
    """`a, b and c`."""
    if len(words) < 2:
        return "".join(words)
    return f"{', '.join(words[:-1])} and {words[-1]}"


def complex_words(value: Any, unit: str) -> str:
    """A complex number by magnitude and angle: `1.2 kΩ ∠ −30°`."""
    from cmath import phase
    from math import degrees, isfinite

    if not (isfinite(value.real) and isfinite(value.imag)):
        return "infinite"
    if not value:
        return quantity(0.0, unit)
    angle = degrees(phase(value)) + 0.0
    turned = f"{angle:.1f}".replace("-", "−").replace("−0.0", "0.0")
    return f"{quantity(abs(value), unit)} ∠{SPACE}{turned}°"
