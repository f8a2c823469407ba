"""Points of a sweep that stand for a zero or pole on the axis, up to the rounding of their hertz.

A frequency in doubles is hardly ever a zero itself: 1/(2·pi·sqrt(L·C)) rounds, and what a
solution finds there, right as it is, is the distance of that rounding times the slope. Where
one Newton step to the root is no longer than four units in the last place of the frequency,
the root is what was meant.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

STEP = 2.0**-20  # relative, to a frequency near by: still a straight line, far beyond rounding
_ROUNDING = 2.0**-50


def beside_roots(value: NDArray[Any], moved: NDArray[Any]) -> NDArray[np.int8]:
    """1 where a zero, -1 where a pole lies within the rounding of the frequency, else 0.

    Parameters
    ----------
    value : the response at some frequencies, any unit.
    moved : the same at these frequencies times 1 + STEP.
    """
    with np.errstate(all="ignore"):  # what is not finite is neither
        here, there = np.abs(value), np.abs(moved)
        away = np.abs(moved - value)
        zero = (here > 0) & (here <= away * (_ROUNDING / STEP))
        pole = np.isfinite(here) & (there > 0) & (there <= here * (_ROUNDING / STEP))
    return np.asarray(zero.astype(np.int8) - pole.astype(np.int8))


def is_suspect(slope: NDArray[Any], omega: NDArray[Any]) -> NDArray[np.bool_]:
    """Where H'/H in seconds says that a root may be that near; omega in rad/s."""
    with np.errstate(all="ignore"):  # not a number is no
        return np.asarray(np.abs(slope) * omega >= 0.25 / _ROUNDING)
