"""Vectors of numbers far outside a double's range: a mantissa and a power of two each.

A ladder in deep attenuation passes 1e-308 long before its answer stops meaning something:
-12,000 dB is a gain of 1e-600 with a perfectly good phase. Powers are taken out only after
several products, and vectors that were scaled together share one exponent object, so that most
sums need no alignment.
"""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

Vector: TypeAlias = NDArray[Any]  # complex or float
Exponent: TypeAlias = NDArray[np.int64]

_NOTHING = -(1 << 40)  # exponent of zero: below that of every number that occurs
_LOWEST = -1100  # a power of two that a double cannot hold any more
_PRODUCTS = 6  # products before the powers are taken out: 1e±50 each is within a double
_POWERS = np.ldexp(1.0, np.arange(_LOWEST, 1024))
_POWERS.flags.writeable = False


class Scaled:
    """mantissa · 2 ** exponent, element by element; shapes (points,) each."""

    __array_ufunc__ = None  # lets `vector * scaled` come here
    __slots__ = ("exponent", "mantissa", "products")

    def __init__(self, mantissa: Vector, exponent: Exponent, products: int = 0) -> None:
        self.mantissa = mantissa
        self.exponent = exponent
        self.products = products

    def __neg__(self) -> Scaled:
        return Scaled(-self.mantissa, self.exponent, self.products)

    def __mul__(self, factor: Any) -> Scaled:
        """Times a plain vector or number, or another scaled one."""
        if isinstance(factor, Scaled):
            return normal(self.mantissa * factor.mantissa, self.exponent + factor.exponent)
        if self.products < _PRODUCTS:
            return Scaled(self.mantissa * factor, self.exponent, self.products + 1)
        return normal(self.mantissa * factor, self.exponent)

    __rmul__ = __mul__

    def __add__(self, other: Any) -> Scaled:
        if not isinstance(other, Scaled):
            other = self._alike(other)
        products = max(self.products, other.products)
        if self.exponent is other.exponent:
            return Scaled(self.mantissa + other.mantissa, self.exponent, products)
        (first, second), top = aligned((self, other))
        return Scaled(first + second, top, products)

    __radd__ = __add__

    def __sub__(self, other: Any) -> Scaled:
        return self.__add__(-other)

    def __rsub__(self, other: Any) -> Scaled:
        return (-self).__add__(other)

    def __rtruediv__(self, other: float) -> Scaled:
        return self.inverse() * other

    def _alike(self, plain: Any) -> Scaled:
        """A plain vector or number as a scaled one."""
        mantissa = np.broadcast_to(np.asarray(plain, dtype=complex), self.mantissa.shape)
        return Scaled(mantissa, np.zeros(self.exponent.shape, dtype=np.int64))

    def inverse(self) -> Scaled:
        """1/self."""
        return normal(1.0 / self.mantissa, -self.exponent)

    def plain(self) -> Vector:
        """As a plain vector: 0 below a double's range, its largest power of two above."""
        return self.mantissa * power_of_two(self.exponent)


def normal(mantissa: Vector, exponent: Exponent) -> Scaled:
    """The same numbers with magnitudes between 1/2 and 1; zeros get the lowest exponent."""
    size = np.abs(mantissa)
    _, shift = np.frexp(size)
    moved = exponent + shift
    moved[size == 0] = _NOTHING
    return Scaled(mantissa * power_of_two(-shift), moved)


def power_of_two(exponent: NDArray[Any]) -> Vector:
    """2 ** exponent, 0 below a double's range and its largest power above."""
    return _POWERS.take(exponent - _LOWEST, mode="clip") * (exponent >= _LOWEST)


def aligned(items: Sequence[Scaled]) -> tuple[list[Vector], Exponent]:
    """Plain vectors on one common exponent, the largest of all at each point."""
    exponents = {id(item.exponent): item.exponent for item in items}
    distinct = list(exponents.values())
    top = distinct[0]
    if len(distinct) == 1:
        return [item.mantissa for item in items], top
    for exponent in distinct[1:]:
        top = np.maximum(top, exponent)
    shifts = {key: power_of_two(exponent - top) for key, exponent in exponents.items()}
    return [item.mantissa * shifts[id(item.exponent)] for item in items], top
