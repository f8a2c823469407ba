"""What a numeric solution holds: one answer a point, each with its state and its error."""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum
from typing import Any

import numpy as np
from numpy.typing import NDArray


class Status(IntEnum):
    """How a point was answered."""

    OK = 0
    RE_SOLVED = 1  # again in another order or in balls, since the first try was inaccurate
    INEXACT = 2  # estimated error above 1e-9, in a network too large to solve again in balls
    LIMIT = 3  # the matrix is singular there and the answer has a limit
    ZERO = 4  # exactly zero: there is a gain of nothing and no phase
    POLE = 5  # infinite
    UNDEFINED = 6  # no answer and no limit

    def __str__(self) -> str:
        return self.name.lower().replace("_", "-")


@dataclass(frozen=True, slots=True, eq=False)
class Solution:
    """Answers of shape (observed, points), read-only: mantissa · 2 ** exponent each.

    `slope` is H'(s)/H(s) in seconds, `error` an estimate of the relative error of H,
    `status` holds values of `Status`.
    """

    mantissa: NDArray[np.complex128]
    exponent: NDArray[np.int64]
    slope: NDArray[np.complex128]
    error: NDArray[np.float64]
    status: NDArray[np.uint8]

    def value(self) -> NDArray[np.complex128]:
        """H as plain complex numbers: 0 below a double's range, infinite above it."""
        shift = np.clip(self.exponent, -5000, 5000).astype(np.int32)
        with np.errstate(over="ignore", under="ignore", invalid="ignore"):  # as promised above
            value = np.ldexp(self.mantissa.real, shift) + 1j * np.ldexp(self.mantissa.imag, shift)
        value[self.status == Status.POLE] = complex(np.inf, 0)
        return value

    def gain_db(self) -> NDArray[np.float64]:
        """20·log10|H|, right beyond a double's range; -inf at zeros, inf at poles."""
        with np.errstate(divide="ignore"):  # log10(0) is the -inf that a zero means
            gain = 20 * np.log10(np.abs(self.mantissa))
        gain = gain + self.exponent * (20 * np.log10(2.0))
        gain[self.status == Status.POLE] = np.inf
        return np.asarray(gain)

    def phase(self) -> NDArray[np.float64]:
        """Principal phase in radians; not a number at zeros and poles."""
        phase = np.angle(self.mantissa)
        phase[self.status >= Status.ZERO] = np.nan
        return phase

    def log_gain(self) -> NDArray[np.float64]:
        """Natural logarithm of |H|."""
        with np.errstate(divide="ignore"):  # as in gain_db
            return np.asarray(np.log(np.abs(self.mantissa)) + self.exponent * np.log(2.0))


def empty(observed: int, points: int) -> dict[str, NDArray[Any]]:
    """Writable arrays of a solution in progress, every point undefined."""
    shape = (observed, points)
    return {
        "mantissa": np.full(shape, complex(np.nan, np.nan)),
        "exponent": np.zeros(shape, dtype=np.int64),
        "slope": np.full(shape, complex(np.nan, np.nan)),
        "error": np.full(shape, np.inf),
        "status": np.full(shape, Status.UNDEFINED, dtype=np.uint8),
    }


def finished(arrays: dict[str, NDArray[Any]]) -> Solution:
    """The arrays as a solution, closed for writing."""
    for array in arrays.values():
        array.flags.writeable = False
    return Solution(**arrays)
