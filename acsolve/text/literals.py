"""Numbers as the trade writes them: units, SI prefixes, IEC 60062 value codes. Exact.

References
----------
IEC 60062:2016, marking codes for resistors and capacitors: the letter stands at the
decimal mark (4k7, 0R47, 2u2). Codes that start with a letter (R47) are names here.

"""

from __future__ import annotations

import re
from dataclasses import dataclass, field
from difflib import get_close_matches
from fractions import Fraction
from functools import lru_cache

from acsolve.circuit import expression as ex
from acsolve.circuit import unit
from acsolve.circuit.expression import Expression
from acsolve.circuit.unit import PREFIXES
from acsolve.codes import Code
from acsolve.text import limits
from acsolve.text.measure import (
    DECIBEL,
    DEGREE,
    FARAD,
    KELVIN,
    OHM,
    PER_KELVIN,
    PLAIN,
    Measure,
    measure_of,
)


@dataclass(frozen=True, slots=True)
class Meaning:
    """What a literal stands for.

    `measure` is None for a bare number, which takes the dimension its place needs.
    `word` is the letters that could also be read as a name. `kelvin` tells that an
    attached K is a temperature where the place needs one; `radian` asks for 180/pi.
    `expression` is the number in SI units, angles in degrees.
    """

    number: Fraction
    measure: Measure | None
    word: str | None = None
    kelvin: bool = False
    radian: bool = False
    expression: Expression = field(init=False)

    def __post_init__(self) -> None:
        number: Expression = ex.Number(self.number)
        if self.radian:
            number = ex.divide(ex.Number(self.number * 180), ex.PI)
        object.__setattr__(self, "expression", number)


@dataclass(frozen=True, slots=True)
class Fault:
    """Why a literal cannot be read."""

    code: Code
    message: str
    hint: str


_RATIOS = {
    "V/√Hz": measure_of(unit.VOLT_PER_ROOT_HERTZ),
    "V/rtHz": measure_of(unit.VOLT_PER_ROOT_HERTZ),
    "A/√Hz": measure_of(unit.AMPERE_PER_ROOT_HERTZ),
    "A/rtHz": measure_of(unit.AMPERE_PER_ROOT_HERTZ),
    "V/V": PLAIN,
    "A/A": PLAIN,
}
#: Units that take a prefix.
_PREFIXABLE: dict[str, Measure] = {
    "ohm": OHM,
    "Ω": OHM,
    "F": FARAD,
    "H": measure_of(unit.HENRY),
    "S": measure_of(unit.SIEMENS),
    "Hz": measure_of(unit.HERTZ),
    "s": measure_of(unit.SECOND),
    "V": measure_of(unit.VOLT),
    "A": measure_of(unit.AMPERE),
    "W": measure_of(unit.WATT),
    "K": KELVIN,
    "rad": DEGREE,
    **_RATIOS,
}
_FIXED: dict[str, tuple[int, Measure]] = {
    "dB": (0, DECIBEL),
    "deg": (0, DEGREE),
    "%": (-2, PLAIN),
    "ppm": (-6, PLAIN),
    "ppm/K": (-6, PER_KELVIN),
}
_CODE_LETTERS: dict[str, tuple[int, Measure | None]] = {
    "R": (0, OHM),
    "L": (-3, OHM),
    "F": (0, FARAD),
    "K": (3, None),
    **{letter: (power, None) for letter, power in PREFIXES.items()},
}

_NUMBER = re.compile(r"([0-9]+)(?:\.([0-9]+))?(?:[eE]([+-]?[0-9]+))?")
_CODE = re.compile(r"([0-9]+)([A-Za-z])([0-9]+)([A-Za-zΩ]*)")
_ALL_UNITS = [prefix + base for base in _PREFIXABLE for prefix in ("", *PREFIXES)] + [*_FIXED]


@lru_cache(maxsize=1_000)
def unit_meaning(word: str) -> tuple[int, Measure] | None:
    """Power of ten and measure of a unit with or without prefix, None where it is none."""
    word = word.replace("µ", "u")
    if word in _FIXED:
        return _FIXED[word]
    if word in _PREFIXABLE:
        return 0, _PREFIXABLE[word]
    if word[:1] in PREFIXES and word[1:] in _PREFIXABLE:
        return PREFIXES[word[0]], _PREFIXABLE[word[1:]]
    return None


def _decimal(digits: int, power: int) -> Fraction:
    """digits · 10^power."""
    return Fraction(digits * 10**power) if power >= 0 else Fraction(digits, 10**-power)


@lru_cache(maxsize=50_000)
def meaning(text: str, unit_word: str | None, glued: bool) -> Meaning | Fault:
    """What a literal stands for, exactly."""
    if len(text) > limits.LITERAL_DIGITS:
        return Fault(
            "limit.digits",
            f"this number has more than {limits.LITERAL_DIGITS} digits",
            "Write it with a power of ten, rounded to what can be measured.",
        )
    if glued:
        return _attached(text.replace("µ", "u"), unit_word)
    found = None if unit_word is None else unit_meaning(unit_word)
    number = _number(text, found[0] if found else 0)
    if isinstance(number, Fault):
        return number
    if unit_word is None:
        return Meaning(number, None)
    if found is None:
        return _unknown_unit(text, unit_word, blank=True)
    return _with_unit(number, unit_word, found[1])


def _with_unit(number: Fraction, word: str, measure: Measure) -> Meaning:
    return Meaning(number, measure, word, radian=word.endswith("rad"))


def _number(text: str, scale: int) -> Fraction | Fault:
    """A plain number with an optional power of ten, times 10^scale."""
    whole, _, decimals = text.partition(".")
    digits = whole + decimals
    if digits.isdigit():  # no power of ten
        return _decimal(int(digits), scale - len(decimals))
    match = _NUMBER.fullmatch(text)
    assert match is not None, "the scanner lets only numbers through"
    whole, decimals, power = match.groups(default="")
    if abs(int(power)) > limits.EXPONENT:
        return Fault(
            "limit.exponent",
            f"the power of ten {int(power)} is beyond {limits.EXPONENT}",
            "No value of a circuit is that large or small.",
        )
    return _decimal(int(whole + decimals), int(power) + scale - len(decimals))


def _attached(text: str, unit_word: str | None) -> Meaning | Fault:
    """A number with letters attached: a code, a prefix, or a unit."""
    code = _CODE.fullmatch(text)
    if code and code[2] in _CODE_LETTERS and not _NUMBER.fullmatch(text):
        return _code(code, unit_word)
    match = _NUMBER.match(text)
    assert match is not None, "the scanner starts such a token with a number"
    word = text[match.end() :]
    power, measure, known = _letters(word)
    number = _number(match[0], power)
    if isinstance(number, Fault):
        return number
    if unit_word is not None:
        return _prefix_before_unit(match[0], word, unit_word)
    if not known:
        return _unknown_unit(match[0], word, blank=False)
    if word == "K":
        return Meaning(number, None, word, kelvin=True)
    return Meaning(number, measure, word, radian=word.endswith("rad"))


def _letters(word: str) -> tuple[int, Measure | None, bool]:
    """Power of ten and measure of letters attached to a number, and whether they are known."""
    if word == "K":
        return 3, None, True
    found = unit_meaning(word)
    if found is not None:
        return *found, True
    if word == "R":
        return 0, OHM, True
    if word in PREFIXES:
        return PREFIXES[word], None, True
    return 0, None, False


def _code(code: re.Match[str], unit_word: str | None) -> Meaning | Fault:
    """A value code with the letter at the decimal mark."""
    whole, letter, decimals, attached = code.groups()
    power, measure = _CODE_LETTERS[letter]
    number = _decimal(int(whole + decimals), power - len(decimals))
    word = attached or unit_word
    if not word:
        return Meaning(number, measure)
    plain = _PREFIXABLE.get(word)
    if plain is None or measure not in (None, plain):
        prefix = "" if letter in "RLF" else letter.replace("K", "k")
        written = code[0] if attached else f"{code[0]} {word}"
        unit_word = word if prefix and word.startswith(prefix) else prefix + word
        return Fault(
            "value.spelling",
            f"{written} puts a second prefix or another unit on a value code",
            f"Write {whole}.{decimals} {unit_word}.",
        )
    return Meaning(number, plain)


def _prefix_before_unit(number: str, word: str, unit_word: str) -> Fault:
    whole = word + unit_word
    right = f"{number} {whole}" if unit_meaning(whole) else f"{number} {unit_word}"
    return Fault(
        "value.spelling",
        f"{number}{word} {unit_word} has a blank between prefix and unit",
        f"Write {right}.",
    )


_USUAL_SLIPS = {
    "ohms": "ohm", "meg": "M", "megohm": "Mohm", "megohms": "Mohm", "kiloohm": "kohm",
    "hz": "Hz", "khz": "kHz", "mhz": "MHz", "ghz": "GHz", "hertz": "Hz", "sec": "s",
    "seconds": "s", "volt": "V", "volts": "V", "amp": "A", "amps": "A", "ampere": "A",
    "amperes": "A", "farad": "F", "farads": "F", "henry": "H", "henrys": "H", "henries": "H",
    "siemens": "S", "watt": "W", "watts": "W", "db": "dB", "degree": "deg", "degrees": "deg",
    "radian": "rad", "radians": "rad", "percent": "%", "kelvin": "K", "kelvins": "K",
}  # fmt: skip


def _unknown_unit(number: str, word: str, *, blank: bool) -> Fault:
    if blank and word in PREFIXES:
        return Fault(
            "value.spelling",
            f"{word} alone is a prefix and must be attached to the number",
            f"Write {number}{word}, or name the unit too ({number} {word}F, {number} {word}H).",
        )
    if blank and word == "R":
        return Fault(
            "value.spelling",
            "R is a unit only in a value code, attached to the number",
            f"Write {number}R or {number} ohm; a product is written {number}*R.",
        )
    gap = " " if blank else ""
    right = near_unit(word)
    units = f"Units are {', '.join(UNIT_LIST)}; a product is written {number}*{word}."
    return Fault(
        "value.unit-unknown",
        f"{word} is not a unit",
        f"Write {number}{gap}{right}." if right else units,
    )


UNIT_LIST = ("ohm", "F", "H", "S", "Hz", "s", "V", "A", "W", "K", "dB", "deg", "rad", "V/rtHz",
             "A/rtHz", "V/V", "A/A", "ppm", "%")  # fmt: skip


def near_unit(word: str) -> str | None:
    """The unit that was probably meant."""
    folded = word.casefold()
    if folded in _USUAL_SLIPS:
        return _USUAL_SLIPS[folded]
    same = [item for item in _ALL_UNITS if item.casefold() == folded]
    if word[:1] == "K" and "k" + word[1:].lower() in _ALL_UNITS:
        return "k" + word[1:].lower()
    return same[0] if same else next(iter(get_close_matches(word, _ALL_UNITS, 1, 0.75)), None)
