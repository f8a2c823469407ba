"""Vectors of numbers far outside a double's range: a mantissa and a power of two each.

A ladder in deep attenuation passes 1e-308 long before its answer stops meaning something:
-12,000 dB is a gain of 1e-600 with a perfectly good phase.
"""

from __future__ import annotations

from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

Mantissa: TypeAlias = NDArray[Any]  # complex or float, magnitude about 1
Exponent: TypeAlias = NDArray[np.int64]

_NOTHING = -(1 << 40)  # exponent of zero: below that of every number that occurs
_GONE = -2000  # a term this many powers of two below another vanishes beside it


class Scaled:
    """mantissa · 2 ** exponent, element by element; shapes (points,) each."""

    __array_ufunc__ = None  # lets `vector * scaled` come here
    __slots__ = ("exponent", "mantissa")

    def __init__(self, mantissa: Mantissa, exponent: Exponent) -> None:
        self.mantissa = mantissa
        self.exponent = exponent

    @staticmethod
    def of(values: NDArray[Any]) -> Scaled:
        """A plain vector, with its powers of two taken out."""
        return _normal(values, np.zeros(len(values), dtype=np.int64))

    def __neg__(self) -> Scaled:
        return Scaled(-self.mantissa, self.exponent)

    def __mul__(self, other: Any) -> Scaled:
        if isinstance(other, Scaled):
            return _normal(self.mantissa * other.mantissa, self.exponent + other.exponent)
        return _normal(self.mantissa * other, self.exponent)

    __rmul__ = __mul__

    def __add__(self, other: Scaled) -> Scaled:
        top = np.maximum(self.exponent, other.exponent)
        return _normal(_lowered(self, top) + _lowered(other, top), top)

    def __sub__(self, other: Scaled) -> Scaled:
        return self + (-other)

    def size(self) -> Scaled:
        """|real part| + |imaginary part|."""
        return Scaled(np.abs(self.mantissa.real) + np.abs(self.mantissa.imag), self.exponent)

    def over(self, other: Scaled) -> NDArray[Any]:
        """The plain quotient, which must lie in a double's range (0 or infinite beyond)."""
        shift = np.clip(self.exponent - other.exponent, _GONE, -_GONE)
        return _shifted(self.mantissa / other.mantissa, shift)


def _lowered(item: Scaled, top: Exponent) -> Mantissa:
    return _shifted(item.mantissa, np.maximum(item.exponent - top, _GONE))


def _shifted(mantissa: Mantissa, exponent: Exponent) -> Mantissa:
    """mantissa · 2 ** exponent, in place of a complex ldexp."""
    if np.iscomplexobj(mantissa):
        parts = np.ascontiguousarray(mantissa).view(float).reshape(-1, 2)
        return np.ldexp(parts, exponent.astype(np.int32)[:, None]).view(complex).reshape(-1)
    return np.ldexp(mantissa, exponent.astype(np.int32))


def _normal(mantissa: Mantissa, exponent: Exponent) -> Scaled:
    """The same numbers with magnitudes between 1/2 and 2; zeros get the lowest exponent."""
    largest = np.maximum(np.abs(mantissa.real), np.abs(mantissa.imag))
    _, shift = np.frexp(largest)
    moved = exponent + shift
    moved[largest == 0] = _NOTHING
    return Scaled(_shifted(mantissa, -shift), moved)
