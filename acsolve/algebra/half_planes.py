"""How many roots of a real polynomial lie left of, on and right of the imaginary axis, exactly.

No root is computed. Roots that are symmetric to the axis lie in gcd(p(s), p(-s)), a polynomial
in s², and are counted there; the others by Routh's array in balls, all signs of its first
column certain. Where one of them is zero, by the Cauchy index of even over odd part, which
needs no exceptions (F. R. Gantmacher, The Theory of Matrices II, 1959, chapter XV).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.real_roots import UndecidedError, positive_roots
from acsolve.algebra.roots import integer_coefficients


@dataclass(frozen=True, slots=True)
class HalfPlanes:
    """Numbers of roots, multiple ones counted so often; `deepest` on the axis: multiplicity."""

    left: int
    axis: int
    right: int
    deepest: int = 0

    def __add__(self, other: HalfPlanes) -> HalfPlanes:
        return HalfPlanes(
            self.left + other.left,
            self.axis + other.axis,
            self.right + other.right,
            max(self.deepest, other.deepest),
        )

    def times(self, multiplicity: int) -> HalfPlanes:
        """The same roots, each so many times."""
        return HalfPlanes(
            self.left * multiplicity,
            self.axis * multiplicity,
            self.right * multiplicity,
            multiplicity if self.axis else 0,
        )


NO_ROOTS = HalfPlanes(0, 0, 0)


def half_planes(coefficients: Sequence[Fraction]) -> HalfPlanes:
    """Count the roots of a polynomial that is not zero, coefficients by rising power."""
    from flint import fmpz_poly

    total = NO_ROOTS
    whole = fmpz_poly(integer_coefficients(coefficients))
    for factor, multiplicity in whole.factor_squarefree()[1]:
        symmetric = factor.gcd(_mirrored(factor))
        simple = symmetric_count([int(value) for value in symmetric.coeffs()])
        total += (simple + _lopsided(factor / symmetric)).times(int(multiplicity))
    return total


def _mirrored(poly: Any) -> Any:
    """p(-s)."""
    kind: Any = type(poly)
    return kind([value if power % 2 == 0 else -value for power, value in enumerate(poly.coeffs())])


def symmetric_count(coefficients: Sequence[Any]) -> HalfPlanes:
    """Count the roots of a square-free polynomial in s², once times s where its lowest is zero.

    Coefficients are integers, or balls of which the sign can be told.

    Raises
    ------
    UndecidedError
        balls are too wide; never for integers.
    """
    zero = 1 if coefficients[0] == 0 else 0
    squares = list(coefficients[zero::2])
    turned = [value if power % 2 == 0 else -value for power, value in enumerate(squares)]
    pairs, on_axis = len(squares) - 1, len(positive_roots(turned))
    beside = pairs - on_axis
    axis = zero + 2 * on_axis
    return HalfPlanes(beside, axis, beside, 1 if axis else 0)


def _lopsided(poly: Any) -> HalfPlanes:
    """Count the roots of an integer polynomial without roots symmetric to the axis."""
    from flint import arb

    for bits in (128, 512, 2048):
        with precision(bits):
            try:
                return lopsided_count([arb(value) for value in poly.coeffs()])
            except UndecidedError:
                continue
    order = poly.degree()
    kind: Any = type(poly)
    even, odd = (
        kind(
            [
                (-1) ** (power // 2) * value if power % 2 == part else 0
                for power, value in enumerate(poly.coeffs())
            ]
        )
        for part in (0, 1)
    )
    upper, lower = (even, -odd) if order % 2 == 0 else (odd, even)
    difference = _cauchy_index(lower, upper)
    return HalfPlanes((order + difference) // 2, 0, (order - difference) // 2)


def lopsided_count(coefficients: Sequence[Any]) -> HalfPlanes:
    """Count the roots of a polynomial without roots symmetric to the axis, given as balls.

    Raises
    ------
    UndecidedError
        a sign in the first column of Routh's array is not certain, or that entry is zero.
    """
    order = len(coefficients) - 1
    upper, lower = list(coefficients[::-1][0::2]), list(coefficients[::-1][1::2])
    signs = [_certain(upper[0])]
    while lower:
        signs.append(_certain(lower[0]))
        ratio = upper[0] / lower[0]
        below = [
            value - ratio * (lower[place + 1] if place + 1 < len(lower) else 0)
            for place, value in enumerate(upper[1:])
        ]
        upper, lower = lower, below
    right = _changes(signs)
    return HalfPlanes(order - right, 0, right)


def _certain(value: Any) -> int:
    if value > 0:
        return 1
    if value < 0:
        return -1
    raise UndecidedError("a sign in Routh's array is not certain")


def _cauchy_index(lower: Any, upper: Any) -> int:
    """Jumps of lower/upper from -oo to +oo less those back, over the whole real line (Sturm)."""
    from flint import fmpq_poly

    chain = [fmpq_poly(upper), fmpq_poly(lower)]
    while chain[-1].degree() >= 0:
        remainder = -(chain[-2] % chain[-1])
        chain.append(_scaled(remainder))
    above = [1 if item[item.degree()] > 0 else -1 for item in chain[:-1]]
    below = [sign * (-1) ** item.degree() for sign, item in zip(above, chain, strict=False)]
    return _changes(below) - _changes(above)


def _changes(signs: Sequence[int]) -> int:
    return sum(a != b for a, b in pairwise(signs))


def _scaled(poly: Any) -> Any:
    """A positive multiple with small coefficients."""
    from flint import fmpq, fmpq_poly, fmpz_poly

    if poly.degree() < 0:
        return poly
    whole = fmpz_poly([int(value) for value in poly.numer().coeffs()])
    return fmpq_poly(whole) * fmpq(1, int(whole.content()))
