"""Closed forms whose numbers are not rational (pi, square roots): coefficients as balls."""

from __future__ import annotations

from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.ring import Polynomial
from acsolve.algebra.roots import LARGEST_CERTIFIED
from acsolve.analyses.closed_form import ClosedForm, evaluate_polynomial
from acsolve.equations.evaluate import BallArithmetic

_BITS = (256, 1024, 4096)


def ball_coefficients(form: ClosedForm, polynomial: Polynomial) -> list[Any]:
    """Coefficients by rising power of s as real balls, at the precision in force.

    Only for a form that is rational in s and has no free symbols.
    """
    arithmetic = BallArithmetic()
    evaluate = form.evaluator(arithmetic)
    place = form.basis.s_index
    points: list[Any] = []
    for index, item in enumerate(form.basis.generators):
        if index == place or not (polynomial.degrees()[index] > 0):
            points.append(None)
            continue
        number = evaluate(item.leaf)
        points.append(number if item.root == 1 else number.root(item.root))
    powers = {0: polynomial} if place is None else form.basis.ring.by_power(polynomial, place)
    zero = form.basis.ring.constant(0)
    return [
        evaluate_polynomial(powers.get(power, zero), points, arithmetic).real
        for power in range(max(powers, default=0) + 1)
    ]


def enclosed_roots(form: ClosedForm, polynomial: Polynomial) -> tuple[complex, ...] | None:
    """The roots in s of one polynomial of the form, multiple ones repeated; None where unsure.

    Multiplicities come from an exact square-free factorisation; the roots of each factor
    from its enclosed coefficients.
    """
    if polynomial == 0:
        return ()
    place = form.basis.s_index
    if place is None or polynomial.degrees()[place] == 0:
        return ()
    if polynomial.degrees()[place] > LARGEST_CERTIFIED:
        return None
    roots: list[complex] = []
    for factor, multiplicity in polynomial.factor_squarefree()[1]:
        if factor.degrees()[place] == 0:
            continue
        found = _roots_of(form, factor)
        if found is None:
            return None
        roots += [root for root in found for _ in range(int(multiplicity))]
    return tuple(sorted(roots, key=lambda root: (abs(root), root.imag, root.real)))


def _roots_of(form: ClosedForm, factor: Polynomial) -> list[complex] | None:
    from flint import acb_poly

    for bits in _BITS:
        with precision(bits):
            coefficients = ball_coefficients(form, factor)
            zeros = next(power for power, value in enumerate(coefficients) if value != 0)
            poly = acb_poly(coefficients[zeros:])
            if poly.degree() < 1:
                return [0j] * zeros
            try:
                rough = poly.roots()
                smallest = min(float(ball.abs_lower()) for ball in rough)
                balls = poly.roots(tol=smallest * 2.0**-60) if smallest > 0 else rough
            except ValueError:
                continue
            return [0j] * zeros + [_double(ball) for ball in balls]
    return None


def _double(ball: Any) -> complex:
    imag = 0.0 if ball.imag.contains(0) else float(ball.imag.mid())
    return complex(float(ball.real.mid()), imag)
