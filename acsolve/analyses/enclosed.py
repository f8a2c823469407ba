"""Closed forms whose numbers are not rational (pi, square roots): coefficients as balls."""

from __future__ import annotations

from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.factors import squarefree
from acsolve.algebra.ring import Polynomial
from acsolve.algebra.roots import LARGEST_CERTIFIED, is_sharp, mirrored_roots, settled
from acsolve.analyses.closed_form import ClosedForm, evaluate_polynomial
from acsolve.equations.evaluate import BallArithmetic

_BITS = (256, 1024, 4096, 16384)


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
    for factor, multiplicity in squarefree(polynomial)[1]:
        if factor.degrees()[place] == 0:
            continue
        found = factor_balls(form, factor)
        if found is None:
            return None
        roots += [root for root in mirrored_roots(found) for _ in range(int(multiplicity))]
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
    for factor, _ in squarefree(polynomial.gcd(mirrored))[1]:
        part = part * factor
    return part


def axis_coefficients(form: ClosedForm, part: Polynomial) -> list[Any]:
    """From an `axis_part`, the polynomial in x = ω² whose positive roots lie on the jω axis."""
    values = ball_coefficients(form, part)
    lowest = next(power for power, value in enumerate(values) if value != 0)
    return [value * (-1) ** k for k, value in enumerate(values[lowest::2])]


def factor_balls(form: ClosedForm, factor: Polynomial, bits: int = 54) -> list[Any] | None:
    """The roots in s of a square-free factor as complex balls, sharp to so many bits.

    Each part is exactly zero or known to a relative width of 2**-bits. None where 16384 bits
    do not decide on which side of the imaginary axis a root lies.
    """
    symmetric = axis_part(form, factor)
    parts = [(symmetric, True), (factor / symmetric, False)]
    roots: list[Any] = []
    for part, imaginary in parts:
        if part.degrees()[form.basis.s_index or 0] > 0:
            found = _isolated(form, part, bits, imaginary=imaginary)
            if found is None:
                return None
            roots += found
    return roots


def _isolated(
    form: ClosedForm, factor: Polynomial, goal: int, *, imaginary: bool
) -> list[Any] | None:
    from flint import acb, acb_poly

    for bits in _BITS:
        if bits < goal + 70:
            continue
        with precision(bits):
            coefficients = ball_coefficients(form, factor)
            zeros = next(power for power, value in enumerate(coefficients) if value != 0)
            poly = acb_poly(coefficients[zeros:])
            if poly.degree() < 1:
                return [acb(0)] * zeros
            try:
                rough = poly.roots()
                smallest = min(float(ball.abs_lower()) for ball in rough)
                sharp = acb(2) ** -(bits * 3 // 4) * smallest
                balls = poly.roots(tol=sharp.real.mid()) if smallest > 0 else rough
            except ValueError:
                continue
            if all(is_sharp(ball, goal, imaginary=imaginary) for ball in balls):
                return [acb(0)] * zeros + [settled(ball, imaginary=imaginary) for ball in balls]
    return None
