"""Cutoffs in closed form: the squared-magnitude equation solved in ω² by radicals."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from itertools import pairwise, zip_longest
from typing import Any

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.band_formula import band_forms, edges_hold, edges_of, half_width
from acsolve.analyses.closed_form import ClosedForm, evaluate_polynomial, generator_numbers
from acsolve.analyses.cutoff import Cutoff, CutoffAnswer, CutoffLevel, Direction, Reference
from acsolve.analyses.level_ring import sign_for_positive, with_level
from acsolve.analyses.magnitude import ReferenceName, squared_magnitude
from acsolve.analyses.radicals import radicals, values
from acsolve.analyses.shape import natural_frequency
from acsolve.codes import Code
from acsolve.equations.evaluate import Evaluator, FloatArithmetic
from acsolve.equations.grouping import Writer
from acsolve.equations.phrase import total
from acsolve.errors import AnalysisError, Diagnostic

USUAL_DEGREE = 2
_AGREES = 1e-9  # a closed form and an isolated root of the same crossing, in doubles
_LONGEST = 200_000  # characters of a closed form; three RC sections take 77,000
_MOST_TERMS = 600  # of an equation above the second degree: its discriminant has their cube


@dataclass(frozen=True, slots=True)
class Formula:
    """One root ω = sqrt(x) as text, with the polynomial in x and which of its roots it is.

    `condition` is None where the root is real and positive for all positive parts.
    """

    text: str
    coefficients: tuple[Polynomial, ...]
    branch: int
    condition: str | None
    direction: Direction | None


@dataclass(frozen=True, slots=True)
class Equation:
    """level·reference²·|D|² - |N|² = 0 by rising power of x = ω², over a form's basis.

    `starts_above` says whether the gain is above the level below the lowest root; None where
    the parts decide.
    """

    form: ClosedForm
    coefficients: tuple[Polynomial, ...]
    starts_above: bool | None


def symbolic_cutoffs(
    form: ClosedForm,
    *,
    level: CutoffLevel,
    reference: ReferenceName | Fraction | None,
    degree: int = USUAL_DEGREE,
) -> CutoffAnswer:
    """The cutoffs of a form with free symbols, where the equation solves in radicals.

    Raises
    ------
    AnalysisError
        [question.no-value] the equation is of higher degree than `degree` in ω², or the
        reference is not a closed form of the parts.
    """
    shown, formulas = _formulas(form, level, reference, degree)
    if formulas is None:
        raise _no_formula(degree)
    conditions = dict.fromkeys(item.condition for item in formulas if item.condition)
    _, equation = _equation(form, level, reference)
    return CutoffAnswer(
        form=form,
        reference=shown,
        level_db=level.db,
        cutoffs=tuple(
            Cutoff(
                hertz=None,
                rad_per_s=None,
                closed_form=item.text,
                direction=item.direction,
                condition=item.condition,
            )
            for item in formulas
        ),
        complete=True,
        method="closed form of the squared-magnitude equation in ω²",
        remarks=tuple(conditions),
        band_forms=None if equation is None else band_forms(equation),
    )


def _no_formula(degree: int) -> AnalysisError:
    more = ", or ask for more with --degree 4" if degree < 4 else ""
    return AnalysisError(
        Diagnostic(
            code=_NO_VALUE,
            message="the cutoffs of this network have no closed form of reasonable size, "
            "and its parts have no values",
            hint=f"Give the parts values, in the file or with --let{more}.",
        )
    )


_NO_VALUE: Code = "question.no-value"


def with_formulas(
    answer: CutoffAnswer,
    formula: ClosedForm,
    *,
    level: CutoffLevel,
    reference: ReferenceName | Fraction | None,
    degree: int = USUAL_DEGREE,
) -> CutoffAnswer:
    """Numeric cutoffs with the closed form of each that agrees with it."""
    fixed = answer.reference.at if reference is None else reference
    _, formulas = _formulas(formula, level, fixed, degree)
    if not formulas:
        return answer
    equation = _equation(formula, level, fixed)[1]
    assert equation is not None, "it was solved"
    evaluate = formula.evaluator(FloatArithmetic())
    numbers = [(_number(item, equation.form, evaluate), item.text) for item in formulas]
    named = tuple(replace(item, closed_form=_matching(item, numbers)) for item in answer.cutoffs)
    lone = len(answer.bands) == 1 and len(answer.cutoffs) == 2
    return replace(answer, cutoffs=named, band_forms=band_forms(equation) if lone else None)


def _matching(cutoff: Cutoff, numbers: list[tuple[float | None, str]]) -> str | None:
    omega = cutoff.rad_per_s
    assert omega is not None
    for value, text in numbers:
        if value is not None and abs(value - omega) <= _AGREES * omega:
            return text
    return None


def _formulas(
    form: ClosedForm, level: CutoffLevel, reference: ReferenceName | Fraction | None, degree: int
) -> tuple[Reference, list[Formula] | None]:
    shown, equation = _equation(form, level, reference)
    if equation is None or len(equation.coefficients) > degree + 1:
        return shown, None
    if len(equation.coefficients) > 3 and sum(map(len, equation.coefficients)) > _MOST_TERMS:
        return shown, None
    found = _solve(equation)
    if any(len(item.text) > _LONGEST for item in found):
        return shown, None
    return shown, found


def _equation(
    form: ClosedForm, level: CutoffLevel, reference: ReferenceName | Fraction | None
) -> tuple[Reference, Equation | None]:
    form, *ratio = with_level(form, level)
    coefficients = form.coefficients()
    top, bottom = (_squared(form, part) for part in coefficients)
    ends = _references(coefficients, top, bottom)
    name = reference if reference is not None else _symbolic_shape(ends)
    constant = form.basis.ring.constant
    if isinstance(name, Fraction):
        shown = Reference(at="stated", gain=float(name))
        pair: tuple[Any, Any] | None = (constant(name.numerator**2), constant(name.denominator**2))
    else:
        shown = Reference(at=name or "dc", gain=None, hertz=0.0 if name == "dc" else None)
        pair = ends.get(name or "")
    if pair is None:
        return shown, None
    difference = [
        b * pair[0] * ratio[0] - a * pair[1] * ratio[1]
        for a, b in zip_longest(top, bottom, fillvalue=constant(0))
    ]
    return shown, primitive_equation(form, difference)


def _squared(form: ClosedForm, coefficients: list[Polynomial]) -> list[Polynomial]:
    return [form.basis.ring.reduced(value) for value in squared_magnitude(coefficients)]


def _references(
    coefficients: tuple[list[Polynomial], list[Polynomial]],
    top: list[Polynomial],
    bottom: list[Polynomial],
) -> dict[str, tuple[Polynomial, Polynomial]]:
    """|H|² at zero and infinite frequency and, of a second-order band-pass, at its peak."""
    found: dict[str, tuple[Polynomial, Polynomial]] = {}
    if bottom[0] != 0 and top[0] != 0:
        found["dc"] = (top[0], bottom[0])
    if len(top) == len(bottom) and top[-1] != 0:
        found["infinity"] = (top[-1], bottom[-1])
    above, below = coefficients
    if len(below) == 3 and len(above) == 2 and above[0] == 0 and below[0] != 0 and below[1] != 0:
        found["peak"] = (above[1] ** 2, below[1] ** 2)  # where c0 = c2·ω²: c1·s is left
    return found


def _symbolic_shape(ends: dict[str, Any]) -> ReferenceName | None:
    if "dc" in ends and "infinity" not in ends:
        return "dc"
    if "infinity" in ends and "dc" not in ends:
        return "infinity"
    if "dc" in ends and ends["dc"][0] * ends["infinity"][1] == ends["dc"][1] * ends["infinity"][0]:
        return "dc"
    return "peak" if "peak" in ends else None


def primitive_equation(form: ClosedForm, coefficients: list[Polynomial]) -> Equation:
    """Without the factor common to all coefficients and without zeros at the ends.

    The leading coefficient is made positive where its sign is certain.
    """
    while coefficients and coefficients[-1] == 0:
        coefficients.pop()
    while coefficients and coefficients[0] == 0:
        coefficients.pop(0)
    if not coefficients:
        return Equation(form, (), None)
    common = form.basis.ring.constant(0)
    for value in coefficients:
        common = common.gcd(value)
    start = sign_for_positive(form, coefficients[0])
    if sign_for_positive(form, coefficients[-1]) < 0:
        common = -common if sign_for_positive(form, common) >= 0 else common
    elif sign_for_positive(form, common) < 0:
        common = -common
    starts_above = {1: False, -1: True}.get(start)
    return Equation(form, tuple(value / common for value in coefficients), starts_above)


def _solve(equation: Equation) -> list[Formula]:
    """The roots ω of an equation of degree four at most in ω²."""
    form, poly = equation.form, equation.coefficients
    signs = [sign_for_positive(form, value) for value in poly]
    if len(poly) < 2 or all(sign > 0 for sign in signs) or all(sign < 0 for sign in signs):
        return []
    write = Writer(form.basis, form.spelled(safe=True))
    if len(poly) == 2:
        return _first_degree(equation, write)
    if len(poly) == 3:
        return _second_degree(equation, write)
    condition = _radicals_hold(signs)
    return [
        Formula(f"sqrt({item.text})", poly, item.branch, condition, None)
        for item in radicals(write, poly)
    ]


def _radicals_hold(signs: Sequence[int]) -> str:
    """When roots of third and fourth degree hold: by Descartes' rule of signs, as far as it goes.

    It says nothing where the parts decide on a coefficient's sign, 0 in `signs`.
    """
    if 0 not in signs and sum(a != b for a, b in pairwise(signs)) == 1:
        return (
            f"of the {len(signs) - 1} roots one is real and positive whatever the positive "
            "parts: that one holds, at this one crossing"
        )
    return "the roots hold where they are real and positive"


def _away(starts_above: bool | None) -> Direction | None:
    """The direction of the first crossing."""
    return None if starts_above is None else "falling" if starts_above else "rising"


def _first_degree(equation: Equation, write: Writer) -> list[Formula]:
    c, b = equation.coefficients
    text = str(natural_frequency(write, [-c, c, b]))
    form = equation.form
    certain = sign_for_positive(form, b) * sign_for_positive(form, c) < 0
    condition = None if certain else f"{text} holds where {write.ratio(-c, b)} > 0"
    return [Formula(text, (c, b), 0, condition, _away(equation.starts_above))]


def _second_degree(equation: Equation, write: Writer) -> list[Formula]:
    form, (c, b, a) = equation.form, equation.coefficients
    apart = _apart(equation, write)
    if apart is not None:
        return apart
    x = radicals(write, (c, b, a))
    if sign_for_positive(form, a) > 0 and sign_for_positive(form, c) < 0:
        return [Formula(f"sqrt({x[1].text})", (c, b, a), 1, None, _away(equation.starts_above))]
    inside = write.grouped(b * b - 4 * a * c)
    certain = sign_for_positive(form, b * b - 4 * a * c) > 0
    return [
        Formula(
            f"sqrt({item.text})",
            (c, b, a),
            item.branch,
            f"sqrt({item.text}) holds where "
            + ("" if certain else f"{inside} >= 0 and ")
            + f"{item.text} > 0",
            None,
        )
        for item in x
    ]


def _apart(equation: Equation, write: Writer) -> list[Formula] | None:
    """Both roots without one root inside another, where c and a are squares.

    With a = α², c = γ² and αγ > 0 the sum of both ω has the square (2αγ - b)/α², their
    difference (-2αγ - b)/α²: the edges of a band.
    """
    edges = edges_of(equation)
    if edges is None:
        return None
    form, (c, b, a) = equation.form, equation.coefficients
    if sign_for_positive(form, edges.narrow) < 0:
        return []
    condition = edges_hold(equation, edges, write)
    half = [half_width(write, item, 2 * edges.alpha) for item in (edges.wide, edges.narrow)]
    first = _away(equation.starts_above)
    second: Direction | None = {"falling": "rising", "rising": "falling"}.get(first or "")  # type: ignore[assignment]
    return [
        Formula(str(total([half[0], -half[1]])), (c, b, a), 0, condition, first),
        Formula(str(total([half[0], half[1]])), (c, b, a), 1, condition, second),
    ]


def _number(item: Formula, form: ClosedForm, evaluate: Evaluator) -> float | None:
    """The root as a number, None where it is not real and positive, or beyond doubles."""
    arithmetic = FloatArithmetic()
    points = generator_numbers(_all_of(form, item.coefficients), evaluate, arithmetic)
    try:
        numbers = [
            float(evaluate_polynomial(value, points, arithmetic)) for value in item.coefficients
        ]
        x = values(numbers)[item.branch]
    except OverflowError:
        return None
    if x is None or abs(x.imag) > _AGREES * abs(x) or x.real <= 0:
        return None
    return float(x.real**0.5)


def _all_of(form: ClosedForm, polynomials: tuple[Polynomial, ...]) -> ClosedForm:
    """A form in which every generator of some polynomials occurs."""
    whole = form.basis.ring.constant(1)
    for place in range(len(form.basis.generators)):
        if any(item != 0 and item.degrees()[place] > 0 for item in polynomials):
            whole = whole * form.basis.ring.generator(place)
    return replace(form, numerator=whole, origin=None)
