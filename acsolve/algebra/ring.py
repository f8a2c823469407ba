"""Multivariate polynomials with exact integer coefficients, and ratios of them.

A `Ring` names its generators; elements are python-flint's `fmpz_mpoly`. A generator may
stand for a root of a quantity (`L1**(1/2)`, so that sqrt(L1·L2) is exact) or for the square
root of a prime, whose square is reduced.
"""

from __future__ import annotations

import copyreg
from collections.abc import Iterable
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache, reduce
from typing import Any, TypeAlias

import flint

Polynomial: TypeAlias = Any  # flint.fmpz_mpoly, which has no type stubs


@lru_cache(maxsize=64)
def _context(names: tuple[str, ...]) -> Any:
    """The library keeps contexts too, but looks them up several times more slowly."""
    return flint.fmpz_mpoly_ctx.get(names, "degrevlex")


def _polynomial(names: tuple[str, ...], terms: dict[tuple[int, ...], int]) -> Polynomial:
    """A polynomial from its pickled parts."""
    return flint.fmpz_mpoly_ctx.get(names, "degrevlex").from_dict(terms)


def _pickled(polynomial: Polynomial) -> tuple[Any, ...]:
    terms = {tuple(map(int, key)): int(value) for key, value in polynomial.terms()}
    return _polynomial, (tuple(polynomial.context().names()), terms)


# The library's polynomials do not pickle by themselves; answers that hold them must.
copyreg.pickle(flint.fmpz_mpoly, _pickled)


@dataclass(frozen=True, slots=True)
class Ring:
    """Integer polynomials in named generators, in a fixed order.

    `squares` maps the index of a generator to the integer its square equals.
    """

    names: tuple[str, ...]
    squares: tuple[tuple[int, int], ...] = ()

    @property
    def context(self) -> Any:
        """The library's context of this ring."""
        return _context(self.names or ("_",))

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


def cancel(numerator: Polynomial, denominator: Polynomial) -> tuple[Polynomial, Polynomial]:
    """Numerator and denominator without their common factor, integers included.

    The library's gcd is quick where there is nothing to find: 0.6 s for 22,288 over
    813,568 terms (measured), so no test goes before it.
    """
    common = numerator.gcd(denominator)
    if common.is_one():
        return numerator, denominator
    return numerator / common, denominator / common


def lowest_part(ring: Ring, polynomial: Polynomial, index: int) -> Polynomial:
    """The coefficient of the lowest power of one generator."""
    exponent = int(polynomial.term_content().monoms()[0][index])
    if exponent:
        polynomial = polynomial / ring.generator(index) ** exponent
    return polynomial.subs({ring.names[index]: 0})


def positive(
    numerator: Polynomial, denominator: Polynomial, leading: Polynomial
) -> tuple[Polynomial, Polynomial]:
    """Both with the sign that makes the part `leading` of the denominator positive.

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
