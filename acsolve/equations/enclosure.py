"""A response at single frequencies in complex balls: what encloses the exact answer.

Every value of the circuit, the frequency and pi enter as balls that hold them exactly or with
their rounding, so the ball that comes out holds the exact response, whatever the order of the
elimination. Small networks are solved dense by python-flint, large ones along an order of
their own, chosen with rows and columns counted backwards; neither is that of the sweep.
Nothing is left out of the equations that doubles would call zero.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any

import numpy as np

from acsolve.algebra.ball import precision
from acsolve.algebra.disc import Disc
from acsolve.algebra.lu import backward, factor, transposed
from acsolve.algebra.plan import Plan, plan_elimination
from acsolve.equations.evaluate import Evaluator
from acsolve.equations.numeric import Numbers, numbers
from acsolve.equations.system import Functional, System

_LARGEST_DENSE = 60  # unknowns: at most 0.1 s a point at 128 bits; it grows with the cube
_BITS = (128, 512, 2048)
_TRIES = ((128, False), *((bits, True) for bits in _BITS))  # and whether in discs, which cost five
_OFF_GRID = 1.0171  # keeps a sample off the resonances and the 0 Hz where a pivot vanishes
_VALUE_BITS = 80  # of a value that is told well enough: far more than a double holds
_SLOPE_WIDTH = 1e-18  # of the slope, against itself or against 1/omega


@dataclass(frozen=True, slots=True, kw_only=True)
class Enclosed:
    """Balls around H and around H'(s)/H(s) in seconds; the latter None where H is zero.

    `bits` is the precision that they were worked out with.
    """

    value: Any
    slope: Any
    bits: int


@dataclass(slots=True, kw_only=True)
class Enclosure:
    """A question prepared for balls.

    system, observed, driven : the equations, and the ratio that is asked for.
    evaluate : makes an evaluator of the circuit's values at the precision of the moment.
    """

    system: System
    observed: Functional
    driven: Functional
    evaluate: Callable[[], Evaluator]
    known: dict[int, Numbers] = field(default_factory=dict)
    plan: Plan | None = None

    def at(self, hertz: float) -> Enclosed | None:
        """The response at the exact value of a double, in hertz, 0 or more.

        Returns
        -------
        Enclosed or None : with 80 right bits where 2,048 working bits can tell that many,
            else as wide as they leave it; None where even these cannot tell the equations
            from singular ones.

        Notes
        -----
        Where a wanted unknown is determined though another is not (the drive's current into
        an inductor at 0 Hz), an order that never divides by what vanishes still proves it: the
        response is then continuous there, and the ball holds its limit.
        """
        found = None
        for bits, in_discs in _TRIES:
            if in_discs and bits == _BITS[0] and self._is_small():
                continue  # dense solutions know no discs
            with precision(bits):
                found = self._solved(hertz, bits, in_discs=in_discs)
                if found is not None and _is_narrow(found, hertz):
                    return found
        with precision(_BITS[-1]):
            for sample in () if found else (hertz, hertz * _OFF_GRID or _OFF_GRID):
                found = found or self._solved(hertz, _BITS[-1], plan=self._planned(sample))
        return found

    def _is_small(self) -> bool:
        return len(self.system.unknowns) <= _LARGEST_DENSE

    def _numbers(self, bits: int) -> Numbers:
        """The equations at a precision; the working precision must be that one."""
        if bits not in self.known:
            laws = self.system.laws
            places = [(row, column) for row, law in enumerate(laws) for column in law.entries]
            self.known[bits] = numbers(self.system, self.driven, self.evaluate(), places=places)
        return self.known[bits]

    def _planned(self, hertz: float) -> Plan:
        """An order for the elimination, rows and columns counted backwards."""
        equations = self._numbers(_BITS[0] if _BITS[0] in self.known else _BITS[-1])
        last = equations.size - 1
        samples = np.array([[complex(item)] for item in equations.at(_point(hertz))])
        samples[~np.isfinite(samples)] = 0
        return plan_elimination(
            [last - row for row in equations.rows],
            [last - column for column in equations.columns],
            samples,
            size=equations.size,
        )

    def _solved(
        self, hertz: float, bits: int, *, in_discs: bool = True, plan: Plan | None = None
    ) -> Enclosed | None:
        equations, s = self._numbers(bits), _point(hertz)
        if plan is None and self._is_small():
            pair = _dense(equations, self.observed, s)
        else:
            if plan is None:
                plan = self.plan = self.plan or self._planned(hertz)
            wrap = Disc if in_discs else _ball
            pair = None
            if not plan.undetermined:
                pair = _sparse(equations, plan, self.observed, s, wrap)
        if pair is None or not pair[0].is_finite():
            return None
        value, rate = pair
        return Enclosed(value=value, slope=None if value.is_zero() else rate / value, bits=bits)


def _point(hertz: float) -> Any:
    """s = 2π·j·hertz as a ball."""
    from flint import acb, arb, fmpq

    exact = Fraction(hertz)
    return acb(0, 2 * arb.pi() * arb(fmpq(exact.numerator, exact.denominator)))


def _is_narrow(found: Enclosed, hertz: float) -> bool:
    if found.slope is None:
        return True
    if found.value.rel_accuracy_bits() < _VALUE_BITS or not found.slope.is_finite():
        return False
    size = max(float(found.slope.abs_lower()), 1 / hertz if hertz else 0.0)
    return float(found.slope.rad()) <= _SLOPE_WIDTH * size


def _dense(equations: Numbers, observed: Functional, s: Any) -> tuple[Any, Any] | None:
    """H and dH/ds = c·x', from A·x = b and A·x' = -A'·x; None where singular."""
    from flint import acb, acb_mat

    size = equations.size
    matrix, right, moved = acb_mat(size, size), acb_mat(size, 1), acb_mat(size, 1)
    places = list(zip(equations.rows, equations.columns, strict=True))
    for place, entry in zip(places, equations.at(s), strict=True):
        matrix[place] = acb(entry)
    right[size - 1, 0] = acb(1)
    try:
        x = matrix.solve(right)
        for (row, column), slope in zip(places, equations.slopes(s), strict=True):
            if slope is not None:
                moved[row, 0] -= slope * x[column, 0]
        change = matrix.solve(moved)
    except ZeroDivisionError:
        return None
    value, rate = (
        sum((item[column, 0] * factor for column, factor in observed.items()), acb(0))
        for item in (x, change)
    )
    return value, rate


def _ball(number: Any) -> Any:
    from flint import acb

    return acb(number)


def _sparse(
    equations: Numbers, plan: Plan, observed: Functional, s: Any, wrap: Callable[[Any], Any]
) -> tuple[Any, Any]:
    """H and dH/ds = -y·A'·x with Aᵀ·y = c, along a plan that counts backwards.

    `wrap` makes of balls what is calculated with: balls, or discs.
    """
    last = equations.size - 1
    wanted = {last - column: wrap(_ball(item)) for column, item in observed.items()}
    values = [wrap(_ball(entry.at(s))) for entry in equations.distinct]
    entries = [values[which] for which in equations.which]
    factors = factor(plan, entries, {0: wrap(_ball(1))})
    x = backward(factors)
    y = transposed(factors, wanted)
    value = sum((x[at] * item for at, item in wanted.items() if x[at] is not None), wrap(_ball(0)))
    rate = wrap(_ball(0))
    for row, column, slope in zip(
        equations.rows, equations.columns, equations.slopes(s), strict=True
    ):
        first, second = y[last - row], x[last - column]
        if slope is not None and first is not None and second is not None:
            rate = rate - first * wrap(_ball(slope)) * second
    if isinstance(value, Disc):
        return value.ball(), rate.ball()
    return value, rate
