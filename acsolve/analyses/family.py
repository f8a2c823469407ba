"""Families of circuits: one value, or several, in a few steps."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import exp, log

USUAL_STEPS = 5
MOST_STEPS = 200
_DIGITS, _FINE_DIGITS = 4, 15  # of a value between the edges, so that it is what is shown
_FINE = 0.01  # relative steps below this keep all their digits


@dataclass(frozen=True, slots=True, kw_only=True)
class Setting:
    """What a member of a family has in place of the circuit's value, in SI units."""

    name: str
    value: float
    unit: str = ""


def steps(first: Fraction, last: Fraction, count: int) -> list[Fraction]:
    """Values from one edge to the other, both included.

    In even ratios where both edges have one sign, else in even differences; those between
    are rounded to four digits, so that they can be written down.

    Parameters
    ----------
    first, last : the edges, different, in any order.
    count : at least 2.
    """
    if first * last > 0:
        rate = log(float(last / first)) / (count - 1)
        between = [float(first) * exp(k * rate) for k in range(1, count - 1)]
        fine = abs(rate) < _FINE
    else:
        step = float(last - first) / (count - 1)
        between = [float(first) + k * step for k in range(1, count - 1)]
        fine = abs(step) < _FINE * max(abs(float(first)), abs(float(last)))
    digits = _FINE_DIGITS if fine else _DIGITS
    return [first, *(Fraction(f"{value:.{digits}g}") for value in between), last]
