"""Dimensions with unknowns: what unit an expression has, worked out from its use.

A measure is a product of powers of bases: volt, ampere, second, kelvin, decibel, angle,
and unknowns ("?fc") for symbols whose dimension their use decides. Multiplying measures
adds exponents, so an equation between two of them is linear and is solved for one unknown
at a time; the first use decides, a later one that disagrees is an error.
"""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

from acsolve.circuit import unit
from acsolve.circuit.unit import SIGNS, TRADE_NAMES, Dimension
from acsolve.source import Span

Measure = Mapping[str, Fraction]

PLAIN: Measure = {}
DECIBEL: Measure = {"dB": Fraction(1)}
DEGREE: Measure = {"angle": Fraction(1)}
_BASES = ("volt", "ampere", "second", "kelvin")


def measure_of(dimension: Dimension) -> Measure:
    """A dimension as a measure."""
    found = _KNOWN.get(dimension)
    return found if found is not None else _measure_of(dimension)


def _measure_of(dimension: Dimension) -> Measure:
    exponents = {base: getattr(dimension, base) for base in _BASES}
    return {base: exponent for base, exponent in exponents.items() if exponent}


_KNOWN: dict[Dimension, Measure] = {item: _measure_of(item) for item in TRADE_NAMES}

OHM = measure_of(unit.OHM)
FARAD = measure_of(unit.FARAD)
HERTZ = measure_of(unit.HERTZ)
SECOND = measure_of(unit.SECOND)
KELVIN = measure_of(unit.KELVIN)
PER_KELVIN = measure_of(unit.NONE / unit.KELVIN)


def times(left: Measure, right: Measure, power: Fraction | int = 1) -> Measure:
    """Left * right ** power."""
    result = dict(left)
    for base, exponent in right.items():
        total = result.get(base, Fraction(0)) + exponent * power
        if total:
            result[base] = total
        else:
            result.pop(base, None)
    return result


def raised(measure: Measure, exponent: Fraction) -> Measure:
    """Measure ** exponent."""
    return times(PLAIN, measure, exponent) if exponent else PLAIN


def unknown(name: str) -> Measure:
    """The measure of a symbol whose dimension is not known yet."""
    return {f"?{name}": Fraction(1)}


def words(measure: Measure) -> str:
    """A measure in trade words, plural: ohms, hertz, plain numbers."""
    if measure == DECIBEL:
        return "decibels"
    if measure == DEGREE:
        return "degrees"
    dimension = dimension_of(measure)
    if dimension in TRADE_NAMES and "dB" not in measure and "angle" not in measure:
        return TRADE_NAMES[dimension][1]
    signs = {"volt": "V", "ampere": "A", "second": "s", "kelvin": "K", "angle": "deg"}
    shown = [(signs.get(base, base.lstrip("?")), power) for base, power in measure.items()]
    return "·".join(sign if power == 1 else f"{sign}^{power}" for sign, power in shown)


def sign(measure: Measure) -> str:
    """The unit sign of a measure, empty where it has none of its own."""
    if measure == DECIBEL:
        return "dB"
    if measure == DEGREE:
        return "deg"
    return SIGNS.get(dimension_of(measure), "")


def dimension_of(measure: Measure) -> Dimension:
    """The physical dimension; unknowns, decibels and angles count as plain numbers."""
    zero = Fraction(0)
    return Dimension(*(measure.get(base, zero) for base in _BASES))


class Solver:
    """The unknown dimensions found so far, and where each was first used."""

    def __init__(self) -> None:
        self._solved: dict[str, Measure] = {}
        self.first_use: dict[str, Span] = {}

    def reduced(self, measure: Measure) -> Measure:
        """The measure with every solved unknown put in."""
        while True:
            known = next((base for base in measure if base in self._solved), None)
            if known is None:
                return measure
            power = measure[known]
            rest = {base: value for base, value in measure.items() if base != known}
            measure = times(rest, self._solved[known], power)

    def agree(self, left: Measure, right: Measure, span: Span) -> bool:
        """Make two measures equal by solving for an unknown; False where they differ."""
        difference = self.reduced(times(left, right, -1))
        if not difference:
            return True
        free = next((base for base in difference if base.startswith("?")), None)
        if free is None:
            return False
        power = difference[free]
        rest = {base: value for base, value in difference.items() if base != free}
        self._solved[free] = raised(rest, -1 / power)
        self.first_use.setdefault(free, span)
        return True
