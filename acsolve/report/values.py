"""Closed forms as numbers: coefficients, limits and the quantities of a standard form."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from decimal import Decimal
from math import inf, nan
from typing import TYPE_CHECKING, Any

from acsolve.algebra.ball import precision
from acsolve.errors import EquationError

if TYPE_CHECKING:
    from acsolve.algebra.ring import Polynomial
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.shape import Limit

_BITS = 256


@dataclass(frozen=True, slots=True)
class Coefficients:
    """Numerator and denominator by rising power of s; the denominator's lowest is 1.

    A coefficient beyond a double's range is a decimal.
    """

    top: tuple[complex | Decimal, ...]
    bottom: tuple[complex | Decimal, ...]


def coefficients(form: ClosedForm) -> Coefficients | None:
    """The coefficients as numbers; None where a symbol has no value or s is not alone."""
    if not form.rational:
        return None
    top, bottom = form.coefficients()
    with precision(_BITS):
        first, second = balls(form, top), balls(form, bottom)
        if first is None or second is None:
            return None
        unit = next(value for value, exact in zip(second, bottom, strict=True) if exact != 0)
        if unit.contains(0):
            return None
        return Coefficients(
            tuple(_wide(value / unit) for value in first),
            tuple(_wide(value / unit) for value in second),
        )


def balls(form: ClosedForm, polynomials: list[Polynomial]) -> list[Any] | None:
    """Polynomials without s as balls; None where a symbol has no value."""
    from acsolve.analyses.closed_form import evaluate_polynomial, generator_numbers
    from acsolve.equations.evaluate import BallArithmetic

    arithmetic = BallArithmetic()
    try:
        points = generator_numbers(form, form.evaluator(arithmetic), arithmetic)
    except EquationError:
        return None
    return [evaluate_polynomial(item, points, arithmetic) for item in polynomials]


def _wide(ball: Any) -> complex | Decimal:
    """A number of any size: a double where it fits, else a decimal of ten digits."""
    found = as_complex(ball)
    lost = found == 0 and not ball.contains(0)
    if not lost and abs(found) < inf:
        return found
    mantissa, _, exponent = ball.real.mid().mid_rad_10exp(10)
    return Decimal(int(mantissa)).scaleb(int(exponent))


def as_complex(ball: Any) -> complex:
    """The midpoint of a ball; a part that the ball cannot tell from zero is zero."""
    return complex(*(_double(part) for part in (ball.real, ball.imag)))


def _double(part: Any) -> float:
    if not part.is_finite():
        return nan
    if part.contains(0):
        return 0.0
    try:
        return float(part.mid())
    except OverflowError:
        return inf


def limit_number(limit: Limit) -> complex | None:
    """A limit as a number; None where it is not one or a symbol has no value."""
    if limit is None or limit == "oo":
        return None
    if limit == "0":
        return 0j
    with precision(_BITS):
        pair = balls(limit.form, [limit.top, limit.bottom])
        if pair is None or pair[1].contains(0):
            return None
        return as_complex(pair[0] / pair[1])


def standard_numbers(form: ClosedForm, names: Mapping[str, object]) -> dict[str, complex]:
    """Numbers for the named quantities of the standard form.

    With the denominator 1 + d1·s + d2·s²: w0 = 1/sqrt(d2), q = sqrt(d2)/d1; of first order
    tau = d1, w0 = 1/d1. `k` is a ratio of two coefficients, chosen by the shape.
    """
    found = coefficients(form)
    if found is None or any(value.imag for value in found.bottom):
        return {}
    top = [complex(value) for value in found.top]
    bottom = [float(value.real) for value in found.bottom]
    numbers: dict[str, complex] = {}
    if len(bottom) == 2:
        numbers = {"tau": bottom[1], "w0": 1 / bottom[1]}
    elif len(bottom) == 3 and bottom[2] > 0:
        numbers = {"w0": bottom[2] ** -0.5}
        numbers["q"] = bottom[2] ** 0.5 / bottom[1] if bottom[1] else inf
    present = [power for power, value in enumerate(top) if value]
    place = present[0] if len(present) == 1 else 0
    if place < len(bottom) and bottom[place]:
        numbers["k"] = top[place] / bottom[place]
    return {name: numbers[name] for name in names if name in numbers}
