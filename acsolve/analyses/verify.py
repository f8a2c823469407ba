"""The check of a closed form: a dense ball solution that shares neither form nor method."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from math import inf
from random import Random
from typing import Any

from acsolve.algebra.ball import precision, relative_difference
from acsolve.analyses.closed_form import Checked, ClosedForm
from acsolve.circuit.netlist import Netlist, Part, bindings
from acsolve.equations.dense import dense_ratio
from acsolve.equations.evaluate import BallArithmetic, Evaluator
from acsolve.errors import Diagnostic, EquationError

POINTS = 3
_AGREEMENT = 1e-12  # far above the balls' width, far below any slip in a formula
_BITS = (192, 768)
_LARGEST_DENSE = 120  # unknowns; above it the numeric engine checks instead


@dataclass(frozen=True, slots=True)
class _Point:
    """One complex frequency (rad/s, as a rational pair) and values for free symbols."""

    real: Fraction
    imag: Fraction
    symbols: Mapping[str, Fraction]


def check_closed_form(netlist: Netlist, form: ClosedForm) -> Checked:
    """Compare a closed form with a dense numeric solution at a few random points.

    Raises
    ------
    EquationError
        [equations.check-failed] if they differ: a defect of this program, never shown as
        an answer.
    """
    worst, count = 0.0, 0
    for point in _points(form):
        error = next(
            (found for bits in _BITS if (found := _difference(netlist, form, point, bits)) < inf),
            inf,
        )
        worst, count = max(worst, error), count + 1
    if worst > _AGREEMENT:
        raise EquationError(
            Diagnostic(
                code="equations.check-failed",
                message="the closed form disagrees with an independent numeric solution "
                f"(relative difference {worst:.2g})",
                hint="This is a defect of acsolve; please report the circuit.",
            )
        )
    return Checked(count, worst)


def _points(form: ClosedForm) -> list[_Point]:
    """Random points near the network's own time scale, the same on every run."""
    random = Random(20)  # noqa: S311 - reproducible points, no secret
    scale = _time_scale(form)
    names = form.basis.free_names
    points = []
    for _ in range(POINTS):
        symbols = {name: Fraction(random.randrange(1 << 10, 1 << 12), 1 << 10) for name in names}
        real, imag = (Fraction(random.randrange(1 << 8, 1 << 12), 1 << 10) for _ in range(2))
        points.append(_Point(real * scale, imag * scale, symbols))
    return points


def _time_scale(form: ClosedForm) -> Fraction:
    """A frequency near the middle of the poles, from the end coefficients where numeric."""
    numbers = form.numbers()
    if numbers is None:
        return Fraction(1) if form.symbols else Fraction(10**4)
    present = [(power, value) for power, value in enumerate(numbers[1]) if value]
    (low, first), (high, last) = present[0], present[-1]
    if low == high:
        return Fraction(10**4)
    from math import log2

    ratio = abs(first / last)
    bits = (log2(ratio.numerator) - log2(ratio.denominator)) / (high - low)
    return Fraction(2) ** round(bits)


def _difference(netlist: Netlist, form: ClosedForm, point: _Point, bits: int) -> float:
    """Relative difference at one point, infinite where the balls are too wide to tell."""
    with precision(bits):
        arithmetic = BallArithmetic()
        values = bindings(netlist)
        overrides = {name: arithmetic.number(value) for name, value in point.symbols.items()}
        evaluate = Evaluator(values, arithmetic, overrides=overrides)
        s = _complex(arithmetic, point)
        here = form.at(s, evaluate, arithmetic)
        system = form.ask.system(netlist, branch_for=lambda part: _is_zero(part, evaluate))
        there = dense_ratio(system, form.ask.observed(system), form.ask.driven(system), evaluate, s)
        return relative_difference(here, there)


def _is_zero(part: Part, evaluate: Evaluator) -> bool:
    return bool(evaluate.name(part.value_name("value")).contains(0))


def _complex(arithmetic: BallArithmetic, point: _Point) -> Any:
    from flint import acb

    return arithmetic.number(point.real) + arithmetic.number(point.imag) * acb(0, 1)
