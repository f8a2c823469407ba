"""Closed forms in time against partial fractions at random numbers, each case with its own q."""

from __future__ import annotations

from collections.abc import Sequence
from fractions import Fraction
from random import Random
from typing import TYPE_CHECKING, Any

from acsolve.algebra.ball import precision, relative_difference
from acsolve.algebra.expsum import ExponentialSum
from acsolve.algebra.laplace import over_s
from acsolve.algebra.residue import exact_ratio
from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm
from acsolve.circuit.expression import Expression
from acsolve.equations.evaluate import BallArithmetic, Evaluator
from acsolve.errors import Diagnostic, EquationError

if TYPE_CHECKING:
    from acsolve.analyses.time_formula import TimeFormula

_BITS = 256
_TRIES = 2
_AGREES = 1e-30
_QUALITY = {"oscillating": Fraction(7, 3), "critical": Fraction(1, 2), "damped": Fraction(1, 5)}


def check_formulas(
    form: ClosedForm,
    cases: Sequence[TimeFormula],
    top: Sequence[Polynomial],
    bottom: Sequence[Polynomial],
) -> None:
    """Compare every case with the inverse transform of numbers put into the form.

    Raises
    ------
    EquationError
        [equations.check-failed] they disagree: a defect of ours.
    """
    random = Random(20_210)  # noqa: S311 - any numbers do, the same on every run
    for case in cases:
        for _ in range(_TRIES):
            first, second = _numbers(form, top, random), _numbers(form, bottom, random)
            if case.case in _QUALITY:
                stretch = Fraction(random.randint(1, 9), random.randint(1, 9))
                second[2] = second[0] * stretch**2
                second[1] = second[0] * stretch / _QUALITY[case.case]
            worst = _worst(case, first, second)
            if not worst < _AGREES:
                raise disagreement("formula in time", worst)


def _numbers(
    form: ClosedForm, coefficients: Sequence[Polynomial], random: Random
) -> list[Fraction]:
    """The coefficients with random positive numbers for whatever stands in them."""
    count = len(form.basis.ring.names) or 1
    chosen = [Fraction(random.randint(1, 40), random.randint(1, 12)) for _ in range(count)]
    found = []
    for polynomial in coefficients:
        total = Fraction(0)
        for exponents, coefficient in polynomial.terms():
            item = Fraction(int(coefficient))
            for value, exponent in zip(chosen, exponents, strict=False):
                item *= value ** int(exponent)
            total += item
        found.append(total)
    return found


def _worst(case: TimeFormula, top: list[Fraction], bottom: list[Fraction]) -> float:
    """The largest relative difference of step and impulse response at a few times."""
    with precision(_BITS):
        values = _named(top, bottom)
        ratio = exact_ratio(top, bottom)
        step, impulse = ExponentialSum(over_s(ratio)), ExponentialSum(ratio)
        scale = abs(bottom[-1] / bottom[-2]) if bottom[-2] else Fraction(1)
        errors = []
        for share in (Fraction(1, 3), Fraction(7, 5)):
            time = BallArithmetic().number(share * scale)
            for formula, whole in ((case.step, step), (case.impulse, impulse)):
                found = _evaluated(formula, case, {**values, "t": time})
                errors.append(relative_difference(found, whole(time.real, 0)[0]))
        return max(errors)


def _named(top: list[Fraction], bottom: list[Fraction]) -> dict[str, Any]:
    """The numbers behind the names of the standard form, from the coefficients."""
    number = BallArithmetic().number
    last = len(bottom) - 1
    found = {"y_0": number(top[last] / bottom[last])}
    present = [power for power, value in enumerate(top) if value]
    if last == 2:
        slope = (top[1] * bottom[2] - top[2] * bottom[1]) / bottom[2] ** 2
        found["v_0"] = number(slope)
    if bottom[0] == 0:
        lead = bottom[1] if bottom[1] else bottom[-1]
        found["r"] = number(top[0] / lead)
        if last == 2 and bottom[1]:
            found["tau"] = number(bottom[2] / bottom[1])
            found["y_end"] = number((top[1] * bottom[1] - top[0] * bottom[2]) / bottom[1] ** 2)
        return found
    found["y_end"] = number(top[0] / bottom[0])
    if last == 1:
        found["tau"] = number(bottom[1] / bottom[0])
    else:
        found["w0"] = number(bottom[0] / bottom[2]).sqrt()
        if bottom[1]:
            found["q"] = number(bottom[0] * bottom[2]).sqrt() / number(bottom[1])
    if len(present) == 1 and bottom[present[0]]:
        found["k"] = number(top[present[0]] / bottom[present[0]])
    return found


def _evaluated(formula: Expression, case: TimeFormula, values: dict[str, Any]) -> Any:
    """An expression in balls, with the helpers worked out first."""
    arithmetic = BallArithmetic()
    known = dict(values)
    for name, helper in case.helpers.items():
        known[name] = Evaluator({}, arithmetic, overrides=known)(helper)
    return Evaluator({}, arithmetic, overrides=known)(formula).real


def disagreement(what: str, error: float) -> EquationError:
    """The error where an answer in time fails its own check."""
    return EquationError(
        Diagnostic(
            code="equations.check-failed",
            message=f"the {what} disagrees with an independent evaluation "
            f"(relative difference {error:.2g})",
            hint="This is a defect of acsolve; please report the circuit.",
        )
    )
