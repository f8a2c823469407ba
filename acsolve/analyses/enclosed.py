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


def axis_part(form: ClosedForm, polynomial: Polynomial) -> Polynomial:
    """The common factor of p(s) and p(-s), square-free: it holds every root on the jω axis."""
    place = form.basis.s_index
    mirrored = form.basis.ring.context.from_dict(
        {
            exponents: coefficient * (1 if place is None or exponents[place] % 2 == 0 else -1)
            for exponents, coefficient in polynomial.terms()
        }
    )
    part = form.basis.ring.constant(1)
    for factor, _ in polynomial.gcd(mirrored).factor_squarefree()[1]:
        part = part * factor
    return part


def axis_coefficients(form: ClosedForm, part: Polynomial) -> list[Any]:
    """From an `axis_part`, the polynomial in x = ω² whose positive roots lie on the jω axis."""
    values = ball_coefficients(form, part)
    lowest = next(power for power, value in enumerate(values) if value != 0)
    return [value * (-1) ** k for k, value in enumerate(values[lowest::2])]


def _roots_of(form: ClosedForm, factor: Polynomial) -> list[complex] | None:
    """The roots of a square-free factor, those on the imaginary axis apart."""
    symmetric = axis_part(form, factor)
    parts = [(symmetric, True), (factor / symmetric, False)]
    roots: list[complex] = []
    for part, imaginary in parts:
        if part.degrees()[form.basis.s_index or 0] > 0:
            found = _isolated(form, part, imaginary=imaginary)
            if found is None:
                return None
            roots += found
    return roots


def _isolated(form: ClosedForm, factor: Polynomial, *, imaginary: bool) -> list[complex] | None:
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
            unsure = not imaginary and any(ball.real.contains(0) for ball in balls)
            if not unsure or bits == _BITS[-1]:
                return [0j] * zeros + _mirrored(balls)
    return None


def _mirrored(balls: list[Any]) -> list[complex]:
    """Doubles from isolating balls: pairs exact mirror images, parts that may be zero are."""
    roots: list[complex] = []
    for ball in balls:
        real = 0.0 if ball.real.contains(0) else float(ball.real.mid())
        if ball.imag.contains(0):
            roots.append(complex(real, 0.0))
        elif ball.imag > 0:
            imag = float(ball.imag.mid())
            roots += [complex(real, -imag), complex(real, imag)]
    return roots
