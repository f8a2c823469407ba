"""From a closed form with numbers to the ratio whose partial fractions are its response in time."""

from __future__ import annotations

from functools import partial

from acsolve.algebra.factors import squarefree
from acsolve.algebra.residue import Factor, Ratio, exact_ratio
from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.enclosed import axis_part, ball_coefficients


def ratio_of(form: ClosedForm) -> Ratio:
    """The form, rational in s and without symbols, as numerator and factored denominator.

    Rational numbers are factored as such; where pi or square roots occur, the square-free
    factors come from the ring and their coefficients are balls.
    """
    numbers = form.numbers()
    if numbers is not None:
        return exact_ratio(*numbers)
    top, bottom = form.coefficients()
    factors: list[Factor] = []
    for factor, multiplicity in squarefree(form.denominator)[1]:
        factors += _split(form, factor, int(multiplicity))
    return Ratio(
        numerator=partial(ball_coefficients, form, form.numerator),
        denominator=partial(ball_coefficients, form, form.denominator),
        zeros=next(power for power, value in enumerate(bottom) if value != 0),
        factors=tuple(factors),
        degrees=(-1 if form.numerator == 0 else len(top) - 1, len(bottom) - 1),
        lowest=next((power for power, value in enumerate(top) if value != 0), 0),
    )


def _split(form: ClosedForm, factor: Polynomial, multiplicity: int) -> list[Factor]:
    """A square-free factor without the root zero, its part symmetric to the axis apart."""
    place = form.basis.s_index
    if place is None or factor.degrees()[place] == 0:
        return []
    s = form.basis.ring.context.gens()[place]
    if form.by_power(factor)[0] == 0:
        factor = factor / s
    symmetric = axis_part(form, factor)
    return [
        Factor(
            coefficients=partial(ball_coefficients, form, part),
            multiplicity=multiplicity,
            mirrored=mirror,
        )
        for part, mirror in ((symmetric, True), (factor / symmetric, False))
        if part.degrees()[place] > 0
    ]
