"""The equation that a part's value solves where the level counts from the gain at the peak.

With |H|² = A(x)/B(x), x = ω², and g the squared gain wanted at the peak, g·B - A touches zero at
the peak: its discriminant in x is zero. There g = (A/B)(x0)/level, x0 the wanted cutoff.
"""

from __future__ import annotations

from typing import Any

from acsolve.algebra.factors import factors
from acsolve.algebra.ring import Polynomial, Ring
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import CutoffLevel, reference_of
from acsolve.analyses.level_ring import with_level
from acsolve.analyses.magnitude import Magnitude, magnitude
from acsolve.errors import AnalysisError, Diagnostic

_GAIN = "peak gain"  # no name of the format, so it meets none
_LARGEST_DEGREE = 8  # of |D|² in x
_LARGEST_ANSWER = 150  # degree of the equation in the value


def peak_equations(
    form: ClosedForm, place: int, level: CutoffLevel
) -> tuple[ClosedForm, list[Polynomial]]:
    """Polynomials over the form's basis (wider by the level), one of which is zero.

    `place` is that of the value among the generators; that of s stands for x = ω² at the cutoff.
    More than the values that are wanted solve them: at every stationary point the discriminant
    is zero, and ends of the frequency axis are peaks of their own.

    Raises
    ------
    AnalysisError
        [equations.budget] the equation would be too large.
    """
    wide, above, below = with_level(form, level)
    size = magnitude(wide)
    top, bottom = size.top * below, size.bottom * above
    found = [_put_in(powers, top, bottom) for powers in _touching(magnitude(form), place)]
    found += [
        bottom * end[0] - top * end[1]
        for end in (size.at_zero(), size.at_infinity())
        if end is not None and end[0] != 0
    ]
    reduced = [wide.basis.ring.reduced(item) for item in found]
    return wide, [item for item in reduced if item != 0]


def peak_gain(form: ClosedForm) -> float:
    """The gain at the peak of a form with numbers.

    Raises
    ------
    AnalysisError
        [question.no-reference] there is none.
    """
    gain = reference_of(magnitude(form), "peak").gain
    assert gain is not None, "a form with numbers has one"
    return gain


def _touching(size: Magnitude, place: int) -> list[dict[int, Polynomial]]:
    """The irreducible factors of the discriminant of g·B - A, by power of g."""
    form = size.form
    frequency = form.basis.s_index
    if frequency is None:
        return []
    degree = max(int(part.degrees()[frequency]) for part in (size.top, size.bottom))
    if degree > _LARGEST_DEGREE:
        raise _too_large(f"the response is of order {degree}, and {_LARGEST_DEGREE} is the most")
    ring = Ring((*form.basis.ring.names, _GAIN))
    top, bottom = (_widened(ring.context, part) for part in (size.top, size.bottom))
    last = len(ring.names) - 1
    touching = (ring.generator(last) * bottom - top).discriminant(ring.names[frequency])
    if touching == 0:
        return []
    degrees = touching.degrees()
    most = max(int(part.degrees()[place]) for part in (size.top, size.bottom))
    if int(degrees[place]) + int(degrees[last]) * most > _LARGEST_ANSWER:
        raise _too_large("the value occurs in too high a power")
    return [
        ring.by_power(factor, last)
        for factor, _ in factors(touching)[1]
        if factor.degrees()[last] > 0
    ]


def _put_in(powers: dict[int, Polynomial], top: Polynomial, bottom: Polynomial) -> Polynomial:
    """sum c_k·g^k with g = top/bottom, times the power of `bottom` that clears it."""
    context, highest = top.context(), max(powers)
    total = context.constant(0)
    for power, item in powers.items():
        total += _widened(context, item) * top**power * bottom ** (highest - power)
    return total


def _widened(context: Any, polynomial: Polynomial) -> Polynomial:
    """The polynomial in a ring whose first generators are its own; a last one it lacks is left."""
    size = len(context.names())
    return context.from_dict(
        {(*map(int, key), 0)[:size]: value for key, value in polynomial.terms()}
    )


def _too_large(reason: str) -> AnalysisError:
    return AnalysisError(
        Diagnostic(
            code="equations.budget",
            message=f"the equation for a value with the peak as reference is too large: {reason}",
            hint="Count the level from a stated gain, --reference 0.5, or vary the value with "
            "--over and look for its cutoffs.",
        )
    )
