"""How long a response in time is worth looking at."""

from __future__ import annotations

from fractions import Fraction
from math import floor, log10, pi

from acsolve.algebra.expsum import ExponentialSum, bound_after
from acsolve.algebra.residue import Term
from acsolve.algebra.taylor import point

_ROUND = (1.0, 1.2, 1.5, 2.0, 2.5, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0)
_LEFT = 0.01  # of what decays, where nothing better says when it is over
_PERIODS = 5


def natural_span(curve: ExponentialSum, burst: Fraction | None, settling: float | None) -> Fraction:
    """A round time in seconds that shows what happens.

    Half as long again as it takes to settle; else until what decays has done so, a few periods
    of what goes on oscillating, a few doublings of what grows, whichever is longest.
    """
    if settling:
        return rounded_up(1.5 * settling)
    terms = curve.expansion().terms
    lengths = [_growth(term) for term in terms if term.pole.side > 0]
    if not lengths:
        lengths = [
            2 * pi * _PERIODS / float(term.pole.place.imag.mid())
            for term in terms
            if term.pole.side == 0 and not term.pole.real
        ]
        lengths += _decays([term for term in terms if term.pole.side < 0])
    longest = max(lengths, default=0.0)
    if burst is not None:
        longest = float(burst) + max(
            _decays([item for item in terms if item.pole.side < 0]), default=float(burst)
        )
    return rounded_up(longest or 1.0)


def _growth(term: Term) -> float:
    return 5 / float(term.pole.place.real.mid())


def _decays(terms: list[Term]) -> list[float]:
    """The time after which all of this stays below a hundredth of its bound at the start."""
    if not terms:
        return []
    slowest = max(float(-1 / term.pole.place.real.mid()) for term in terms)
    whole = bound_after(terms, point(Fraction(0)))
    if not whole > 0:
        return []
    time = Fraction(slowest) / 2**20
    while not bound_after(terms, point(time)) < whole * _LEFT:
        time = time * 5 / 4
    return [float(time)]


def rounded_up(seconds: float) -> Fraction:
    """The next round number of seconds."""
    power = floor(log10(seconds))
    size = seconds / 10.0**power
    digits = next((item for item in _ROUND if item >= size * (1 - 1e-9)), 10.0)
    return Fraction(str(digits)) * Fraction(10) ** power
