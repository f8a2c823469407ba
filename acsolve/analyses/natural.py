"""Natural frequencies of a closed form, roughly: where its terms change places."""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise
from math import exp, isfinite, log, pi

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cut import SIDES, Side, side_coefficients
from acsolve.analyses.grid import HertzBand
from acsolve.equations.evaluate import Evaluator, FloatArithmetic


def natural_hertz(form: ClosedForm, evaluate: Evaluator) -> list[float]:
    """Sizes of poles and zeros in hertz, ascending, to within a small factor.

    `evaluate` works in doubles. Empty for a form that is no ratio of polynomials in s.

    Notes
    -----
    The slopes of the upper hull of (k, log|a_k|) over the coefficients a_k of s^k: the
    Newton polygon. For roots far apart they are the sizes of the roots.
    """
    if not form.rational or form.basis.s_index is None:
        return []
    found = [corner for side in SIDES for corner in _corners(form, side, evaluate)]
    return sorted(item / (2 * pi) for item in found)


def natural_band(form: ClosedForm, evaluate: Evaluator) -> HertzBand | None:
    """From a decade below to a decade above all natural frequencies; None where none is known.

    A form without any is the same at every frequency: then a decade around 1 kHz.
    """
    if not form.rational:
        return None
    corners = natural_hertz(form, evaluate) or [1e3]
    return HertzBand(Fraction(corners[0]) / 10, Fraction(corners[-1]) * 10)


def _corners(form: ClosedForm, side: Side, evaluate: Evaluator) -> list[float]:
    """Slopes of the upper hull of one side, as angular frequencies."""
    place = form.basis.s_index
    assert place is not None
    points = []
    for varying, value in side_coefficients(form, side, evaluate, FloatArithmetic()).items():
        size = abs(complex(value))
        if size > 0 and isfinite(size):
            points.append((varying[place], log(size)))
    hull: list[tuple[int, float]] = []
    for point in sorted(points):
        while len(hull) > 1 and _slope(hull[-1], point) >= _slope(hull[-2], hull[-1]):
            hull.pop()
        hull.append(point)
    slopes = [-_slope(a, b) for a, b in pairwise(hull)]
    return [exp(item) for item in slopes if abs(item) < _LARGEST]


_LARGEST = 600.0  # logarithm of an angular frequency that a double still holds with ease


def _slope(first: tuple[int, float], second: tuple[int, float]) -> float:
    return (second[1] - first[1]) / (second[0] - first[0])
