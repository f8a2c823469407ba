"""Polynomials whose coefficients are worked out for many values of the parts at once.

A closed form holds whole numbers of any length times powers of the symbols. Here each symbol
is measured in a power of two near its values, and so is the frequency: the terms are then of
a similar size, and doubles hold them whatever the units were.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from math import ldexp
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.ring import Polynomial

Array: TypeAlias = NDArray[Any]
Number: TypeAlias = Any  # a float, a complex number or an array of them, shape (samples,)

_WIDEST = 900  # powers of two between the largest and the smallest term


@dataclass(frozen=True, slots=True)
class Term:
    """weight times a product of generators, as (place, exponent)."""

    weight: float
    factors: tuple[tuple[int, int], ...]


@dataclass(frozen=True, slots=True)
class Terms:
    """A polynomial by rising power of the frequency; its numbers are in units of 2 ** top."""

    powers: tuple[tuple[Term, ...], ...]
    top: int

    @property
    def count(self) -> int:
        """How many terms there are."""
        return sum(map(len, self.powers))

    @property
    def depth(self) -> int:
        """The most factors in one term, powers counted."""
        terms = (term for power in self.powers for term in power)
        return max((sum(size for _, size in term.factors) for term in terms), default=0)

    def values(self, points: Sequence[Number], samples: int) -> tuple[Array, Array]:
        """Coefficients, shape (samples, powers), and the sums of their terms' magnitudes.

        Parameters
        ----------
        points : the number (or one a sample) behind each generator, in its unit; None where
            the generator does not occur.
        samples : how many samples there are.
        """
        kind = complex if any(np.iscomplexobj(item) for item in points) else float
        found = np.zeros((samples, len(self.powers)), dtype=kind)
        sizes = np.zeros((samples, len(self.powers)))
        products = _Products(points)
        positive = all(
            item is None or np.all(np.asarray(item) >= 0) for item in points if _real(item)
        )
        positive = positive and kind is float
        for place, power in enumerate(self.powers):
            one_sign = positive and len({term.weight > 0 for term in power}) <= 1
            for term in power:
                value = term.weight * products(term.factors)
                found[:, place] += value
                if not one_sign:
                    sizes[:, place] += abs(value)
            if one_sign:
                sizes[:, place] = abs(found[:, place])
        return found, sizes


def _real(item: Number) -> bool:
    return not np.iscomplexobj(item)


class _Products:
    """Products of powers; what a term shares with the one before is not multiplied again."""

    def __init__(self, points: Sequence[Number]) -> None:
        self._points = points
        self._powers: dict[tuple[int, int], Number] = {}
        self._factors: tuple[tuple[int, int], ...] = ()
        self._stack: list[Number] = []

    def __call__(self, factors: tuple[tuple[int, int], ...]) -> Number:
        shared = 0
        for old, new in zip(self._factors, factors, strict=False):
            if old != new:
                break
            shared += 1
        del self._stack[shared:]
        for factor in factors[shared:]:
            power = self._power(*factor)
            self._stack.append(self._stack[-1] * power if self._stack else power)
        self._factors = factors
        return self._stack[-1] if self._stack else 1.0

    def _power(self, place: int, exponent: int) -> Number:
        if exponent == 1:
            return self._points[place]
        key = (place, exponent)
        if key not in self._powers:
            self._powers[key] = self._power(place, exponent - 1) * self._points[place]
        return self._powers[key]


def compiled(
    coefficients: Sequence[Polynomial], units: Sequence[int], frequency: int
) -> Terms | None:
    """A polynomial by rising power of s as terms of doubles.

    Parameters
    ----------
    coefficients : of each power of s, without s.
    units : for each generator the power of two that its values are measured in.
    frequency : the same for s.

    Returns
    -------
    Terms, or None where its terms differ by more powers of two than doubles can hold.
    """
    listed = [list(_exact(item)) for item in coefficients]
    sizes = [
        number.bit_length()
        + power * frequency
        + sum(units[place] * exponent for place, exponent in factors)
        for power, terms in enumerate(listed)
        for number, factors in terms
    ]
    top = max(sizes, default=0)
    if sizes and top - min(sizes) > _WIDEST:
        return None
    shifts = iter(sizes)
    powers = tuple(
        tuple(Term(_double(number, next(shifts) - top), factors) for number, factors in terms)
        for terms in listed
    )
    return Terms(powers, top)


def _exact(polynomial: Polynomial) -> Iterator[tuple[int, tuple[tuple[int, int], ...]]]:
    """Whole number and factors of each term, like products beside each other."""
    found = (
        (tuple((place, int(size)) for place, size in enumerate(exponents) if size), int(number))
        for exponents, number in polynomial.terms()
    )
    for factors, number in sorted(found):
        yield number, factors


def _double(number: int, exponent: int) -> float:
    """number · 2 ** (exponent - its length in bits), correctly rounded."""
    return ldexp(number / (1 << number.bit_length()), exponent)
