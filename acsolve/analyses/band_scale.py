"""The band in which a network's response changes, from its own time scales."""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise
from math import inf, isfinite, log2, pi

import numpy as np

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.grid import HertzBand
from acsolve.circuit.expression import Call, Number, Power, S
from acsolve.equations.evaluate import Evaluator, FloatArithmetic
from acsolve.equations.exact import Generator
from acsolve.equations.numeric import FunctionEntry
from acsolve.equations.result import Status
from acsolve.equations.solver import Solver

_UNKNOWN = HertzBand(Fraction(1, 1000), Fraction(10**12))  # where nothing says more
_BEYOND = 3.0  # decades on either side of the time scales
_WAVES = 25.0  # times 1/delay (rad/s): some eight half-waves on the shortest line
_GRID = np.logspace(-7, 17, 24 * 50 + 1)  # rad/s


def band_of_form(form: ClosedForm, level_db: float) -> HertzBand:
    """From three decades below the lowest corner to three above the highest, more for deep levels.

    The corners are those of the magnitudes' asymptotes (the Newton polygon of numerator and
    denominator, other functions of s taken as one). Where lines or other functions never
    settle, it ends 25 times above the frequency at which the shortest has turned by one
    radian, or a decade above the highest corner.
    """
    evaluate = Evaluator(form.values, FloatArithmetic())
    powers = [_power(item) for item in form.basis.generators]
    corners: list[float] = []
    for polynomial in (form.numerator, form.denominator):
        corners += _corners(form, polynomial, powers, evaluate)
    turns = [
        _turn(item, evaluate)
        for item, used, power in zip(form.basis.generators, form.used(), powers, strict=True)
        if used and item.varies and power is None
    ]
    found = [item for item in (*corners, *turns) if isfinite(item) and item > 0]
    if not found:
        return _UNKNOWN
    finest = min((power for power in powers if power), default=Fraction(1))
    beyond = 10 ** min(_BEYOND + abs(level_db) / 20 / min(float(finest), 1.0), 12.0)
    high = max(found) * beyond
    if turns:
        known = [item for item in turns if isfinite(item)]
        high = max(
            [10 * item for item in corners] + [_WAVES * item for item in known] + [min(found)]
        )
    return _rounded(min(found) / beyond / (2 * pi), high / (2 * pi))


def _rounded(low: float, high: float) -> HertzBand:
    """The band with two digits, outwards."""
    edges = []
    for value, up in ((low, False), (high, True)):
        step = Fraction(10) ** (int(np.floor(np.log10(value))) - 1)
        count = Fraction(value) // step
        edges.append((count + up) * step)
    return HertzBand(*edges)


def _power(item: Generator) -> Fraction | None:
    """How the generator grows with s; None where it is another function of it."""
    if not item.varies:
        return Fraction(0)
    match item.leaf:
        case leaf if leaf == S:
            return Fraction(1, item.root)
        case Power(base, Number(exponent)) if base == S:
            return exponent / item.root
        case _:
            return None


def _corners(
    form: ClosedForm, polynomial: Polynomial, powers: list[Fraction | None], evaluate: Evaluator
) -> list[float]:
    """Angular frequencies at which the largest term changes, from the upper hull of log|c|."""
    sizes: dict[Fraction, float] = {}
    constants = [
        None if item.varies or not used else abs(complex(evaluate(item.leaf))) ** (1 / item.root)
        for item, used in zip(form.basis.generators, form.used(), strict=True)
    ]
    for exponents, coefficient in polynomial.terms():
        power, size = Fraction(0), log2(abs(int(coefficient)))
        for exponent, grows, number in zip(exponents, powers, constants, strict=False):
            power += int(exponent) * (grows or 0)
            if exponent and number:
                size += int(exponent) * log2(number)
        sizes[power] = max(size, sizes.get(power, -inf))
    hull: list[tuple[float, float]] = []
    for power in sorted(sizes):
        here = (float(power), sizes[power])
        while len(hull) > 1 and _slope(hull[-2], hull[-1]) <= _slope(hull[-1], here):
            hull.pop()
        hull.append(here)
    exponents_of_two = [-_slope(first, second) for first, second in pairwise(hull)]
    return [2.0**item for item in exponents_of_two if abs(item) < 1000]


def _slope(first: tuple[float, float], second: tuple[float, float]) -> float:
    return (second[1] - first[1]) / (second[0] - first[0])


def _turn(item: Generator, evaluate: Evaluator) -> float:
    """Where a function's argument has grown to one, or doubled from its value at low frequency."""
    leaf = item.leaf
    inner = (
        leaf.argument if isinstance(leaf, Call) else leaf.base if isinstance(leaf, Power) else leaf
    )
    with np.errstate(all="ignore"):  # what is out of range is no place looked for
        size = np.abs(np.broadcast_to(np.asarray(evaluate(inner, 1j * _GRID)), _GRID.shape))
    start = size[0] if isfinite(size[0]) else 0.0
    wanted = 1.0 if start < 0.1 else 2 * start
    above = np.flatnonzero(size >= wanted)
    return float(_GRID[above[0]]) if len(above) and above[0] else inf


_STEEP = 0.02  # of the power of omega that the gain follows


def band_of_solver(solver: Solver) -> HertzBand:
    """Where the slope of the gain differs from what it is at both ends, a decade wider.

    Beside lines, whose response never settles, no further than some turns of phase.
    """
    hertz = np.logspace(-6, 14, 20 * 8 + 1)
    solution = solver.solve(hertz)
    slope = -solution.slope[0].imag * 2 * pi * hertz
    good = (solution.status[0] < Status.ZERO) & np.isfinite(slope)
    if any(isinstance(entry, FunctionEntry) for entry in solver.numbers.distinct):
        turned = np.abs(solution.slope[0].real) * 2 * pi * hertz > _WAVES
        good &= np.cumsum(good & turned) == 0
    if not good.any():
        return _UNKNOWN
    hertz, slope = hertz[good], slope[good]
    low = np.flatnonzero(np.abs(slope - slope[0]) > _STEEP)
    high = np.flatnonzero(np.abs(slope - slope[-1]) > _STEEP)
    if not len(low) or not len(high):
        return _UNKNOWN
    return _rounded(hertz[low[0]] / 10, hertz[high[-1]] * 10)
