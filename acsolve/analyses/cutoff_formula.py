"""Cutoffs in closed form: the squared-magnitude equation of first or second degree in ω²."""

from __future__ import annotations

from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import zip_longest
from typing import Any

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import Cutoff, CutoffAnswer, CutoffLevel, Direction, Reference
from acsolve.analyses.magnitude import ReferenceName
from acsolve.codes import Code
from acsolve.equations.evaluate import Evaluator, FloatArithmetic
from acsolve.equations.write import Spelling, polynomial_text
from acsolve.errors import AnalysisError, Diagnostic

_AGREES = 1e-9  # a closed form and an isolated root of the same crossing, in doubles


@dataclass(frozen=True, slots=True)
class Formula:
    """One root ω = sqrt(x): as text, and as polynomials to evaluate it from.

    x = (-b ± sqrt(b² - 4ac)) / (2a), or -c/b where a is zero. `condition` is None where
    the root is real and positive for all positive values of the parts.
    """

    text: str
    coefficients: tuple[Polynomial, ...]  # c, b, a
    branch: int
    condition: str | None
    direction: Direction | None


def symbolic_cutoffs(
    form: ClosedForm, *, level: CutoffLevel, reference: ReferenceName | Fraction | None
) -> CutoffAnswer:
    """The cutoffs of a form with free symbols, where the equation solves in radicals.

    Raises
    ------
    AnalysisError
        [question.no-value] the equation is of too high a degree, or the reference or the
        level is not a closed form of the parts.
    """
    shown, formulas = _formulas(form, level, reference)
    if formulas is None:
        raise _no_formula(level)
    return CutoffAnswer(
        form=form,
        reference=shown,
        level_db=level.db,
        cutoffs=tuple(
            Cutoff(hertz=None, rad_per_s=None, closed_form=item.text, direction=item.direction)
            for item in formulas
        ),
        complete=True,
        method="closed form of the squared-magnitude equation in ω²",
        remarks=tuple(item.condition for item in formulas if item.condition),
    )


def _no_formula(level: CutoffLevel) -> AnalysisError:
    if level.exact is None:
        message = (
            f"a level of {level.db:g} dB is no rational ratio of powers, and parts have no values"
        )
        hint = "Ask for half power or a whole number of ten decibels, or give the parts values."
    else:
        message = (
            "the cutoffs of this network have no closed form of reasonable size, "
            "and its parts have no values"
        )
        hint = "Give the parts values, in the file or with --let."
    return AnalysisError(Diagnostic(code=_NO_VALUE, message=message, hint=hint))


_NO_VALUE: Code = "question.no-value"


def with_formulas(
    answer: CutoffAnswer,
    formula: ClosedForm,
    *,
    level: CutoffLevel,
    reference: ReferenceName | Fraction | None,
) -> CutoffAnswer:
    """Numeric cutoffs with the closed form of each that agrees with it."""
    fixed = answer.reference.at if reference is None else reference
    if fixed == "peak" or fixed == "stated":
        return answer
    _, formulas = _formulas(formula, level, fixed)
    if not formulas:
        return answer
    evaluate = formula.evaluator(FloatArithmetic())
    values = [(_number(item, formula, evaluate), item.text) for item in formulas]
    named = tuple(replace(item, closed_form=_matching(item, values)) for item in answer.cutoffs)
    return replace(answer, cutoffs=named)


def _matching(cutoff: Cutoff, values: list[tuple[float | None, str]]) -> str | None:
    omega = cutoff.rad_per_s
    assert omega is not None
    for value, text in values:
        if value is not None and abs(value - omega) <= _AGREES * omega:
            return text
    return None


def _formulas(
    form: ClosedForm, level: CutoffLevel, reference: ReferenceName | Fraction | None
) -> tuple[Reference, list[Formula] | None]:
    top, bottom = (_squared(form, part) for part in form.coefficients())
    shown, scaled = _levelled(form, top, bottom, level, reference)
    if scaled is None or len(scaled) > _LARGEST_DEGREE + 1:
        return shown, None
    single: Direction | None = None
    if level.db < 0:  # a response that crosses once leaves the side of its reference
        single = {"dc": "falling", "infinity": "rising"}.get(shown.at)  # type: ignore[assignment]
    return shown, _solve(form, scaled, single)


_LARGEST_DEGREE = 2


def _squared(form: ClosedForm, coefficients: list[Polynomial]) -> list[Polynomial]:
    from acsolve.analyses.magnitude import squared_magnitude

    return [form.basis.ring.reduced(value) for value in squared_magnitude(coefficients)]


def _levelled(
    form: ClosedForm,
    top: list[Polynomial],
    bottom: list[Polynomial],
    level: CutoffLevel,
    reference: ReferenceName | Fraction | None,
) -> tuple[Reference, list[Polynomial] | None]:
    """A - level·reference²·B by rising power of x, or None where it is no polynomial."""
    ends = _ends(top, bottom)
    name = reference if reference is not None else _symbolic_shape(ends)
    ratio = level.exact
    if isinstance(name, Fraction):
        shown = Reference(at="stated", gain=float(name))
        pair: tuple[Any, Any] | None = (
            form.basis.ring.constant(name.numerator**2),
            form.basis.ring.constant(name.denominator**2),
        )
    else:
        shown = Reference(at=name or "dc", gain=None, hertz=0.0 if name == "dc" else None)
        pair = ends.get(name or "")
    if pair is None or ratio is None or name == "peak":
        return shown, None
    first, second = pair
    difference = [
        a * second * ratio.denominator - b * first * ratio.numerator
        for a, b in zip_longest(top, bottom, fillvalue=form.basis.ring.constant(0))
    ]
    return shown, _primitive(form, difference)


def _ends(
    top: list[Polynomial], bottom: list[Polynomial]
) -> dict[str, tuple[Polynomial, Polynomial] | None]:
    """|H|² at zero and infinite frequency as (numerator, denominator); None where infinite."""
    found: dict[str, tuple[Polynomial, Polynomial] | None] = {}
    if bottom[0] != 0 and top[0] != 0:
        found["dc"] = (top[0], bottom[0])
    if len(top) == len(bottom) and top[-1] != 0:
        found["infinity"] = (top[-1], bottom[-1])
    return found


def _symbolic_shape(ends: dict[str, Any]) -> ReferenceName | None:
    if "dc" in ends and "infinity" not in ends:
        return "dc"
    if "infinity" in ends and "dc" not in ends:
        return "infinity"
    if "dc" in ends and ends["dc"][0] * ends["infinity"][1] == ends["dc"][1] * ends["infinity"][0]:
        return "dc"
    return None


def _primitive(form: ClosedForm, coefficients: list[Polynomial]) -> list[Polynomial]:
    """Without the factor common to all coefficients and without zeros at the ends."""
    while coefficients and coefficients[-1] == 0:
        coefficients.pop()
    while coefficients and coefficients[0] == 0:
        coefficients.pop(0)
    common = form.basis.ring.constant(0)
    for value in coefficients:
        common = common.gcd(value)
    if not coefficients:
        return []
    if not _all_negative(coefficients[-1]):
        common = -common
    return [-(value / common) for value in coefficients]


def _all_negative(polynomial: Polynomial) -> bool:
    return all(value < 0 for value in polynomial.coeffs())


def _all_positive(polynomial: Polynomial) -> bool:
    return polynomial != 0 and all(value > 0 for value in polynomial.coeffs())


def _solve(form: ClosedForm, poly: list[Polynomial], direction: Direction | None) -> list[Formula]:
    """Roots of c + b·x + a·x² = 0 with x = ω²; a (or b) has been made positive-leading."""
    spelling = form.spelled(safe=True)
    if len(poly) == 2:
        return _first_degree(form, poly, spelling, direction)
    if len(poly) == 3:
        return _second_degree(form, poly, spelling, direction)
    return []


def _first_degree(
    form: ClosedForm, poly: list[Polynomial], spelling: Spelling, direction: Direction | None
) -> list[Formula]:
    c, b = poly
    if _all_positive(b) and _all_positive(c):
        return []
    text = f"sqrt({_ratio(form, -c, b, spelling)})"
    root = _root_of_square(form, -c, b, spelling)
    certain = _all_positive(b) and _all_negative(c)
    condition = (
        None if certain else f"{root or text} holds where what stands under the root is positive"
    )
    return [Formula(root or text, (c, b), 0, condition, direction)]


def _root_of_square(
    form: ClosedForm, top: Polynomial, bottom: Polynomial, spelling: Spelling
) -> str | None:
    """sqrt(top/bottom) without a root where both are squares."""
    from flint.utils.flint_exceptions import DomainError

    from acsolve.analyses.shape import quotient, ratio_text

    ratio = quotient(form, top, bottom)
    try:
        first, second = ratio.top.sqrt(), ratio.bottom.sqrt()
    except DomainError:
        return None
    signs = [1 if all(v > 0 for v in item.coeffs()) else -1 for item in (first, second)]
    return ratio_text(form, first * signs[0], second * signs[1], spelling)


def _ratio(form: ClosedForm, top: Polynomial, bottom: Polynomial, spelling: Spelling) -> str:
    from acsolve.analyses.shape import quotient, ratio_text

    ratio = quotient(form, top, bottom)
    return ratio_text(form, ratio.top, ratio.bottom, spelling)


def _second_degree(
    form: ClosedForm, poly: list[Polynomial], spelling: Spelling, direction: Direction | None
) -> list[Formula]:
    c, b, a = poly
    if all(_all_positive(item) for item in poly):
        return []
    discriminant = polynomial_text(b * b - 4 * a * c, form.basis, spelling)
    minus_b = polynomial_text(-b, form.basis, spelling)
    twice_a = polynomial_text(2 * a, form.basis, spelling)
    lead = "" if b == 0 else f"{minus_b} "

    def text(sign: str) -> str:
        first = (
            f"{lead}{sign} sqrt({discriminant})" if lead or sign == "-" else f"sqrt({discriminant})"
        )
        return f"sqrt(({first})/({twice_a}))"

    if _all_positive(a) and _all_negative(c):
        return [Formula(text("+"), (c, b, a), 1, None, direction)]
    condition = "the roots hold where they are real and positive"
    return [
        Formula(text("-"), (c, b, a), -1, condition, None),
        Formula(text("+"), (c, b, a), 1, condition, None),
    ]


def _number(item: Formula, form: ClosedForm, evaluate: Evaluator) -> float | None:
    """The root as a number, None where it is not real and positive."""
    arithmetic = FloatArithmetic()
    from acsolve.analyses.closed_form import evaluate_polynomial, generator_numbers

    points = generator_numbers(form, evaluate, arithmetic)
    numbers = [float(evaluate_polynomial(value, points, arithmetic)) for value in item.coefficients]
    if len(numbers) == 2:
        x = -numbers[0] / numbers[1]
    else:
        c, b, a = numbers
        inside = b * b - 4 * a * c
        if inside < 0:
            return None
        x = (-b + item.branch * inside**0.5) / (2 * a)
    return x**0.5 if x > 0 else None
