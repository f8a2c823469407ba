"""All complex roots of a polynomial, certified, with exact multiplicities."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from math import lcm
from typing import Any

from acsolve.algebra.ball import precision

LARGEST_CERTIFIED = 160  # degree; isolation takes seconds above it (measured)


def complex_roots(coefficients: Sequence[Fraction]) -> list[tuple[complex, int]]:
    """Roots with their multiplicities, conjugates exact mirror images, sorted.

    Parameters
    ----------
    coefficients : exact, by rising power; the last is not zero.

    Returns
    -------
    (root, multiplicity), sorted by magnitude, then by rising imaginary part. Every root is
    within one unit of the last place of a double of the true one; a root on an axis is
    exactly on it.

    Notes
    -----
    python-flint isolates the roots of each square-free factor in complex balls (F.
    Johansson, "Arb: efficient arbitrary-precision midpoint-radius interval arithmetic",
    IEEE Trans. Computers 66 (2017), doi:10.1109/TC.2017.2690633).
    """
    from flint import fmpz_poly

    whole = integer_coefficients(coefficients)
    zeros = next((power for power, value in enumerate(whole) if value), 0)
    found: list[tuple[complex, int]] = [(0j, zeros)] if zeros else []
    if len(whole) > zeros + 1:
        _, factors = fmpz_poly(whole[zeros:]).factor_squarefree()
        for factor, multiplicity in factors:
            found += [(root, int(multiplicity)) for root in _simple_roots(factor)]
    return sorted(found, key=lambda item: (abs(item[0]), item[0].imag, item[0].real))


def integer_coefficients(coefficients: Sequence[Fraction]) -> list[int]:
    """The coefficients times their common denominator."""
    common = lcm(*(value.denominator for value in coefficients)) if coefficients else 1
    return [int(value * common) for value in coefficients]


def root_balls(factor: Any, bits: int = 54) -> list[Any]:
    """The roots of a square-free integer polynomial as complex balls.

    Each part is exactly zero or known to a relative width of 2**-bits. Roots on the
    imaginary axis lie in the common factor of p(x) and p(-x), whose roots are symmetric to
    both axes: there, an isolated root whose ball meets an axis lies on it.
    """
    from flint import fmpz_poly

    mirrored = fmpz_poly([(-1) ** k * int(value) for k, value in enumerate(factor.coeffs())])
    symmetric = factor.gcd(mirrored)
    rest = factor / symmetric
    roots = _isolated(symmetric, bits, imaginary=True) if symmetric.degree() > 0 else []
    return roots + (_isolated(rest, bits, imaginary=False) if rest.degree() > 0 else [])


def _simple_roots(factor: Any) -> list[complex]:
    """The roots of a square-free integer polynomial to double precision, in exact pairs."""
    return mirrored_roots(root_balls(factor))


def _isolated(factor: Any, goal: int, *, imaginary: bool) -> list[Any]:
    """The roots, sharp in both parts; `imaginary` says whether some may lie on that axis."""
    for doubling in range(6):
        with precision((goal + 74) << doubling):
            balls = [root for root, _ in factor.complex_roots()]
            if all(is_sharp(ball, goal, imaginary=imaginary) for ball in balls):
                return [settled(ball, imaginary=imaginary) for ball in balls]
    raise ArithmeticError(f"the roots could not be separated at {(goal + 74) << 5} bits")


def is_sharp(ball: Any, goal: int, *, imaginary: bool) -> bool:
    """Whether both parts are known well enough, or are zero."""
    from flint import arb

    width = arb(2) ** -goal
    known = [
        zero or bool(part.rad() <= width * abs(part.mid()))
        for part, zero in (
            (ball.real, imaginary and ball.real.contains(0)),
            (ball.imag, ball.imag.contains(0)),
        )
    ]
    return all(known) and bool(abs(ball).rad() <= width * abs(ball).mid())


def settled(ball: Any, *, imaginary: bool) -> Any:
    """An isolated root on the axis that its ball meets: that part is zero."""
    from flint import acb

    real = 0 if imaginary and ball.real.contains(0) else ball.real
    return acb(real, 0 if ball.imag.contains(0) else ball.imag)


def mirrored_roots(balls: Sequence[Any]) -> list[complex]:
    """Doubles from settled balls, each pair from its upper half."""
    roots: list[complex] = []
    for ball in balls:
        real, imag = float(ball.real.mid()), float(ball.imag.mid())
        if ball.imag == 0:
            roots.append(complex(real, 0.0))
        elif imag > 0:
            roots += [complex(real, imag), complex(real, -imag)]
    return roots
