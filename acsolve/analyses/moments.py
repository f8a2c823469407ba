"""Moments of the impulse response, exactly, from the series of the response around s = 0.

H(s) = sum of m_k·(-s)^k/k!, m_k the integral of t^k·h(t). With H = N/D the centroid is
m_1/m_0 = d1/d0 - n1/n0, the delay of W. C. Elmore ("The transient response of damped linear
networks", J. Appl. Phys. 19 (1948) 55-63, doi:10.1063/1.1697872), and the second central moment
2·n2/n0 - (n1/n0)² - 2·d2/d0 + (d1/d0)²; sqrt(2·pi) times its root is his rise time.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import pi, sqrt
from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm, evaluate_polynomial, generator_numbers
from acsolve.analyses.shape import Quotient, quotient
from acsolve.equations.evaluate import BallArithmetic

_BITS = 256


@dataclass(frozen=True, slots=True)
class Exact:
    """An exact number: as text SymPy reads, and as a double where no symbol stands in it."""

    ratio: Quotient
    number: float | None

    def text(self, *, safe: bool = True) -> str:
        """The number or expression on one line."""
        return self.ratio.text(safe=safe)


@dataclass(frozen=True, slots=True, kw_only=True)
class Moments:
    """m_0, m_1 and m_2 of the impulse response, in the response's unit times s^k.

    delay : the centroid m_1/m_0 in seconds, Elmore's delay; None where m_0 is zero.
    variance : the second central moment in s², likewise.
    """

    raw: tuple[Exact, Exact, Exact]
    delay: Exact | None
    variance: Exact | None

    @property
    def elmore_rise_s(self) -> float | None:
        """sqrt(2·pi) times the root of the variance; None where that is negative or unknown."""
        found = None if self.variance is None else self.variance.number
        return None if found is None or found < 0 else sqrt(2 * pi * found)


def moments(form: ClosedForm) -> Moments | None:
    """The moments of a form that is rational in s, or None where it has a pole at 0 Hz.

    They are integrals only where all poles decay; the series exists without that.
    """
    top, bottom = form.coefficients()
    zero = form.basis.ring.constant(0)
    n0, n1, n2 = (*top, zero, zero)[:3]
    d0, d1, d2 = (*bottom, zero, zero)[:3]
    if d0 == 0:
        return None
    first = n1 * d0 - n0 * d1
    second = (n2 * d0 - n0 * d2) * d0 - first * d1
    raw = (
        _exact(form, n0, d0),
        _exact(form, -first, d0 * d0),
        _exact(form, 2 * second, d0 * d0 * d0),
    )
    if n0 == 0:
        return Moments(raw=raw, delay=None, variance=None)
    spread = (2 * n2 * n0 - n1 * n1) * d0 * d0 - (2 * d2 * d0 - d1 * d1) * n0 * n0
    return Moments(
        raw=raw,
        delay=_exact(form, -first, n0 * d0),
        variance=_exact(form, spread, n0 * n0 * d0 * d0),
    )


def _exact(form: ClosedForm, top: Polynomial, bottom: Polynomial) -> Exact:
    ratio = quotient(form, top, bottom)
    return Exact(ratio, None if form.symbols else exact_number(form, ratio.top, ratio.bottom))


def exact_number(form: ClosedForm, top: Polynomial, bottom: Polynomial) -> float:
    """A ratio of polynomials without s as a double; the form has no symbols."""
    with precision(_BITS):
        arithmetic = BallArithmetic()
        points: list[Any] = generator_numbers(form, form.evaluator(arithmetic), arithmetic)
        first, second = (evaluate_polynomial(item, points, arithmetic) for item in (top, bottom))
        return float((first / second).real.mid())
