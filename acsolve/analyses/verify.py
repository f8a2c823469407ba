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
from acsolve.analyses.engine_check import engine_difference
from acsolve.circuit.expression import Frequency, Name, S
from acsolve.circuit.netlist import Netlist, Part, bindings
from acsolve.circuit.value import Value
from acsolve.equations.dense import dense_ratio, exact_ratio
from acsolve.equations.evaluate import (
    Arithmetic,
    BallArithmetic,
    Evaluator,
    InexactError,
    RationalArithmetic,
)
from acsolve.equations.system import System
from acsolve.errors import Diagnostic, EquationError

POINTS = 3
_AGREEMENT = 1e-12  # far above the balls' width, far below any slip in a formula
_BITS = (192, 768)
_LARGEST_DENSE = 450  # unknowns; above it a dense solution takes longer than the answer


@dataclass(frozen=True, slots=True)
class _Point:
    """One complex frequency (rad/s, as a rational pair) and values for free symbols."""

    real: Fraction
    imag: Fraction
    symbols: Mapping[str, Fraction]


def check_closed_form(netlist: Netlist, form: ClosedForm, *, size: int) -> Checked:
    """Compare a closed form with a dense numeric solution at random points.

    Exactly, over the rationals, where the values allow it; else in complex balls. Large
    networks are compared with the numeric engine, in doubles. `size` is the number of
    unknowns of the equations that the form came from.

    Raises
    ------
    EquationError
        [equations.check-failed] if they differ: a defect of this program, never shown as
        an answer.
    """
    if size > _LARGEST_DENSE:
        checked, limit = _engine_check(netlist, form), _ENGINE_AGREEMENT
    else:
        checked = _exact_check(netlist, form) or _ball_check(netlist, form)
        limit = _AGREEMENT
    if checked.max_relative_error > limit:
        raise EquationError(
            Diagnostic(
                code="equations.check-failed",
                message="the closed form disagrees with an independent numeric solution "
                f"(relative difference {checked.max_relative_error:.2g})",
                hint="This is a defect of acsolve; please report the circuit.",
            )
        )
    return checked


def _exact_check(netlist: Netlist, form: ClosedForm) -> Checked | None:
    """At random whole numbers, s real: equality of two rationals. None where not rational.

    Two different rational functions agree at a random point with a probability below
    degree over range, for each point (J. T. Schwartz, J. ACM 27 (1980),
    doi:10.1145/322217.322225).
    """
    if any(not isinstance(item.leaf, Name | Frequency) for item in form.basis.generators):
        return None
    random = Random(20)  # noqa: S311 - reproducible points, no secret
    terms = len(form.numerator) + len(form.denominator)
    count, limit = next(points for most, *points in _EXACT_POINTS if terms <= most)
    try:
        values = bindings(netlist)
        plain = _evaluator(values, RationalArithmetic(), {})
        system = form.ask.system(netlist, branch_for=lambda part: _zero_value(part, plain))
        points = [_random_point(form, random, limit) for _ in range(count)]
        agreed = [_agrees_exactly(values, form, system, point) for point in points]
    except InexactError:
        return None
    return Checked(count, 0.0) if all(agreed) else Checked(count, inf)


def _random_point(form: ClosedForm, random: Random, limit: int) -> list[int]:
    """A whole number for each generator."""
    return [random.randrange(2, limit) for _ in form.basis.generators] or [1]


def _agrees_exactly(
    values: Mapping[str, Value], form: ClosedForm, system: System, point: list[int]
) -> bool:
    arithmetic = RationalArithmetic()
    top, bottom = (int(part(*point)) for part in (form.numerator, form.denominator))
    numbers = {
        item.leaf: arithmetic.number(Fraction(value**item.root))
        for item, value in zip(form.basis.generators, point, strict=False)
    }
    overrides = {leaf.name: value for leaf, value in numbers.items() if isinstance(leaf, Name)}
    there = exact_ratio(
        system,
        form.ask.observed(system),
        form.ask.driven(system),
        _evaluator(values, arithmetic, overrides),
        numbers.get(S, arithmetic.number(Fraction(1))),
    )
    if there is None or bottom == 0:  # a pole of the answer, met by chance
        return there is None and bottom == 0
    return bool(there * bottom == top)


def _evaluator(
    values: Mapping[str, Value], arithmetic: Arithmetic, overrides: Mapping[str, Any]
) -> Evaluator:
    """Over the circuit's values; a symbol that no equation holds may be any number.

    It is none that values are likely to be divided by, as 1 is in R0/(k - 1).
    """
    some = arithmetic.number(_UNHELD)
    unheld = {name: some for name, value in values.items() if value.expression is None}
    return Evaluator(values, arithmetic, overrides={**unheld, **overrides})


_UNHELD = Fraction(1_000_003, 1_009)

#: Up to so many terms: points, and the range of their whole numbers. A wrong form of degree
#: 30 passes with a probability below 1e-9, 1e-5 and 1e-2; evaluation costs as much as the form.
_EXACT_POINTS = ((1_000, 2, 1 << 20), (20_000, 1, 1 << 22), (inf, 1, 1 << 12))


def _zero_value(part: Part, evaluate: Evaluator) -> bool:
    return bool(evaluate.name(part.value_name("value")) == 0)


_ENGINE_AGREEMENT = 1e-9  # what the numeric engine itself promises


def _engine_check(netlist: Netlist, form: ClosedForm) -> Checked:
    """At frequencies from well below to the middle of the poles, in doubles."""
    import numpy as np
    from flint import acb

    points = _points(form)
    hertz = np.array([float(point.imag) / 2**8 for point in points])
    names = form.basis.free_names
    values = {name: float(points[0].symbols[name]) for name in names}
    arithmetic = BallArithmetic()
    here = []
    with precision(_BITS[1]):
        overrides = {name: arithmetic.number(Fraction(value)) for name, value in values.items()}
        evaluate = form.evaluator(arithmetic, overrides)
        for value in hertz:
            s = acb(0, 2) * arithmetic.pi() * arithmetic.number(Fraction(value))
            here.append(complex(form.at(s, evaluate, arithmetic)))
    worst = engine_difference(netlist, form.ask, hertz, values, np.array(here))
    return Checked(len(points), worst)


def _ball_check(netlist: Netlist, form: ClosedForm) -> Checked:
    worst, count = 0.0, 0
    for point in _points(form):
        error = next(
            (found for bits in _BITS if (found := _difference(netlist, form, point, bits)) < inf),
            inf,
        )
        worst, count = max(worst, error), count + 1
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
        overrides = {name: arithmetic.number(value) for name, value in point.symbols.items()}
        evaluate = _evaluator(bindings(netlist), arithmetic, overrides)
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
