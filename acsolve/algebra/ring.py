"""Multivariate polynomials with exact integer coefficients, and ratios of them.

A `Ring` names its generators; elements are python-flint's `fmpz_mpoly`. A generator may
stand for a root of a quantity (`L1**(1/2)`, so that sqrt(L1·L2) is exact) or for the square
root of a prime, whose square is reduced.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import reduce
from math import gcd as integer_gcd
from random import Random
from typing import Any, TypeAlias

import flint

Polynomial: TypeAlias = Any  # flint.fmpz_mpoly, which has no type stubs


@dataclass(frozen=True, slots=True)
class Ring:
    """Integer polynomials in named generators, in a fixed order.

    `squares` maps the index of a generator to the integer its square equals.
    """

    names: tuple[str, ...]
    squares: tuple[tuple[int, int], ...] = ()

    @property
    def context(self) -> Any:
        """The library's context of this ring (cached there)."""
        return flint.fmpz_mpoly_ctx.get(self.names or ("_",), "degrevlex")

    def constant(self, value: int) -> Polynomial:
        """An integer as an element."""
        return self.context.constant(value)

    def generator(self, index: int) -> Polynomial:
        """The generator at an index."""
        return self.context.gen(index)

    def reduced(self, polynomial: Polynomial) -> Polynomial:
        """The polynomial with squares of root generators replaced by their integers."""
        for index, square in self.squares:
            if polynomial.degrees()[index] > 1:
                polynomial = polynomial % (self.generator(index) ** 2 - square)
        return polynomial

    def by_power(self, polynomial: Polynomial, index: int) -> dict[int, Polynomial]:
        """The coefficients of the powers of one generator: exponent -> polynomial."""
        groups: dict[int, dict[tuple[int, ...], Any]] = {}
        for exponents, coefficient in polynomial.terms():
            rest = (*exponents[:index], 0, *exponents[index + 1 :])
            groups.setdefault(int(exponents[index]), {})[rest] = coefficient
        return {
            exponent: self.context.from_dict(terms) for exponent, terms in sorted(groups.items())
        }


def common_denominator(ring: Ring, denominators: Iterable[Polynomial]) -> Polynomial:
    """The least common multiple of some polynomials."""
    return reduce(_lcm, denominators, ring.constant(1))


def _lcm(left: Polynomial, right: Polynomial) -> Polynomial:
    if right.is_one():
        return left
    return left * (right / left.gcd(right))


def content(polynomial: Polynomial) -> int:
    """The greatest common divisor of the integer coefficients."""
    common = 0
    for coefficient in polynomial.coeffs():
        common = integer_gcd(common, int(coefficient))
        if common == 1:
            break
    return common


def cancel(
    ring: Ring, numerator: Polynomial, denominator: Polynomial
) -> tuple[Polynomial, Polynomial]:
    """Numerator and denominator without their common factor.

    A univariate image at random integers tells first whether there can be one, which is
    cheap and never wrong in the direction that matters: a common factor of positive degree
    in a variable divides every image in which it does not vanish, so images coprime in
    every shared variable leave only an integer to remove.
    """
    if numerator == 0:
        return numerator, ring.constant(1)
    if _may_share(ring, numerator, denominator):
        common = numerator.gcd(denominator)
        return numerator / common, denominator / common
    common_integer = integer_gcd(content(numerator), content(denominator))
    if common_integer > 1:
        return numerator / common_integer, denominator / common_integer
    return numerator, denominator


_FEW_TERMS = 64  # below this the full gcd is as fast as the test (empirical)


def _may_share(ring: Ring, numerator: Polynomial, denominator: Polynomial) -> bool:
    if numerator.is_constant() or denominator.is_constant():
        return False
    if len(numerator) * len(denominator) < _FEW_TERMS**2:
        return True
    shared = [
        index
        for index, (first, second) in enumerate(
            zip(numerator.degrees(), denominator.degrees(), strict=True)
        )
        if first and second
    ]
    random = Random(len(numerator))  # noqa: S311 - a fixed seed: same input, same work
    points = [random.randrange(1 << 20, 1 << 21) for _ in ring.names]
    return any(_images_share(ring, numerator, denominator, index, points) for index in shared)


def _images_share(
    ring: Ring, first: Polynomial, second: Polynomial, index: int, points: Sequence[int]
) -> bool:
    others = {name: points[place] for place, name in enumerate(ring.names) if place != index}
    images = [polynomial.subs(others) for polynomial in (first, second)]
    for polynomial, image in zip((first, second), images, strict=True):
        if image.degrees()[index] < polynomial.degrees()[index]:
            return True  # the leading coefficient vanished here: this image proves nothing
    return bool(images[0].gcd(images[1]).degrees()[index] > 0)


def positive(
    numerator: Polynomial, denominator: Polynomial, leading: Polynomial
) -> tuple[Polynomial, Polynomial]:
    """Both with the sign that makes the coefficient part `leading` of the denominator positive.

    "Positive" means: more positive than negative terms, the first term deciding a draw.
    """
    signs = [1 if coefficient > 0 else -1 for coefficient in leading.coeffs()]
    if not signs:
        return numerator, denominator
    total = sum(signs) or signs[0]
    return (numerator, denominator) if total > 0 else (-numerator, -denominator)


def univariate(polynomial: Polynomial, index: int | None) -> list[Fraction] | None:
    """Coefficients by rising power of one generator (None: of none), or None if others occur."""
    coefficients: dict[int, Fraction] = {}
    for exponents, coefficient in polynomial.terms():
        if any(exponent for place, exponent in enumerate(exponents) if place != index):
            return None
        power = 0 if index is None else int(exponents[index])
        coefficients[power] = Fraction(int(coefficient))
    if not coefficients:
        return []
    return [coefficients.get(power, Fraction(0)) for power in range(max(coefficients) + 1)]
