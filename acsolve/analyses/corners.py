"""Asymptotes of the gain between the corners of a numeric response."""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, log10, pi

from acsolve.algebra.ball import precision
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.enclosed import ball_coefficients
from acsolve.analyses.poles import PolesZeros

_BITS = 256


@dataclass(frozen=True, slots=True)
class Segment:
    """Between two corners |H| tends to scale·ω**power, far from either.

    Frequencies in hertz, 0 and infinity at the ends; `scale` in units of the answer.
    """

    low: float
    high: float
    scale: float
    power: int

    @property
    def slope_db(self) -> int:
        """Slope in decibels a decade."""
        return 20 * self.power

    def gain_db(self, hertz: float) -> float:
        """The asymptote at a frequency, in decibels."""
        return 20 * (log10(self.scale) + self.power * log10(2 * pi * hertz))


def segments(form: ClosedForm, roots: PolesZeros) -> tuple[Segment, ...]:
    """The asymptotes from 0 Hz upwards, a corner at the magnitude of each pole and zero.

    Notes
    -----
    Bode's construction (H. W. Bode, Network Analysis and Feedback Amplifier Design, 1945):
    past a zero r the asymptote rises by ω/|r|, past a pole it falls by |r|/ω.
    """
    steps = [(abs(root), 1) for root in roots.zeros if root]
    steps += [(abs(root), -1) for root in roots.poles if root]
    power = sum(not root for root in roots.zeros) - sum(not root for root in roots.poles)
    scale, low = _lowest(form), 0.0
    found = []
    for corner, step in sorted(steps):
        if corner > low:
            found.append(Segment(low / (2 * pi), corner / (2 * pi), scale, power))
            low = corner
        scale, power = scale * corner ** (-step), power + step
    return (*found, Segment(low / (2 * pi), inf, scale, power))


def _lowest(form: ClosedForm) -> float:
    """|ratio of the lowest coefficients|."""
    with precision(_BITS):
        first, second = (
            next(value for value in ball_coefficients(form, part) if value != 0)
            for part in (form.numerator, form.denominator)
        )
        return abs(float((first / second).mid()))
