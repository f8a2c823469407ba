"""Closed forms in time of first- and second-order responses, in the names of the standard form.

With H = N/D of second order, w0² = d0/d2 and q·d1 = sqrt(d0·d2): e(t) = y(t) - y(infinite)
solves e'' + (w0/q)·e' + w0²·e = 0, so e = exp(-a·t)·(e0·C + (v + a·e0)·S) with a = w0/(2·q), e0
and v its value and slope at the start, and C, S = cos(wd·t), sin(wd·t)/wd for |q| > 1/2, 1 and t
for |q| = 1/2, cosh(wr·t), sinh(wr·t)/wr below. Each is compared with partial fractions, at
random numbers, before it is shown.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from fractions import Fraction
from typing import Any, Literal

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.moments import exact_number
from acsolve.analyses.shape import quotient, sign_of, standard_form
from acsolve.circuit.expression import (
    ONE,
    PI,
    ZERO,
    Expression,
    Name,
    add,
    call,
    divide,
    multiply,
    negate,
    number,
    power,
    subtract,
)
from acsolve.equations.write import Spelling, expression_text

CaseName = Literal[
    "first order", "oscillating", "critical", "damped", "without loss", "integrating"
]

#: When a case holds, as text; None where it always does.
CONDITIONS: dict[CaseName, str | None] = {
    "first order": None,
    "oscillating": "abs(q) > 1/2",
    "critical": "abs(q) = 1/2",
    "damped": "abs(q) < 1/2",
    "without loss": None,
    "integrating": None,
}

_T, _K, _TAU = Name("t"), Name("k"), Name("tau")
_W0, _Q, _A = Name("w0"), Name("q"), Name("a")
_START, _END, _SLOPE, _RAMP = Name("y_0"), Name("y_end"), Name("v_0"), Name("r")


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeFormula:
    """One case of a response in time, t > 0.

    step, impulse : expressions in `t` and the names of `parts` and `helpers`.
    weight : what stands before the impulse at t = 0 in the impulse response; ZERO for none.
    helpers : names that stand for expressions of others, `a = w0/(2*q)` say.
    figures : rise time, delay and the like where they have a closed form.
    """

    case: CaseName
    step: Expression
    impulse: Expression
    weight: Expression
    helpers: Mapping[str, Expression]
    figures: Mapping[str, Expression]

    @property
    def condition(self) -> str | None:
        """When it holds, None where it always does."""
        return CONDITIONS[self.case]

    def texts(self, *, safe: bool = True) -> dict[str, str]:
        """Every expression as text: `step`, `impulse`, the helpers and the figures."""
        spelling = Spelling({}, "**") if safe else Spelling({})
        regular = expression_text(self.impulse, spelling)
        impulse = regular
        if self.weight != ZERO:
            head = expression_text(multiply(self.weight, Name("delta(t)")), spelling)
            head = head.replace("delta(t)", "DiracDelta(t)") if safe else head
            impulse = head if self.impulse == ZERO else f"{head} + {regular}".replace("+ -", "- ")
        rest = {**self.helpers, **self.figures}
        return {
            "step": expression_text(self.step, spelling),
            "impulse": impulse,
            **{name: expression_text(item, spelling) for name, item in rest.items()},
        }


@dataclass(frozen=True, slots=True, kw_only=True)
class TimeFormulas:
    """The cases of one response with the named parts that they share, as text SymPy reads."""

    parts: Mapping[str, str]
    cases: tuple[TimeFormula, ...]

    def holding(self, form: ClosedForm) -> TimeFormulas:
        """Of several cases the one that holds for a form with numbers; all for one with symbols."""
        if len(self.cases) == 1 or form.symbols:
            return self
        (case,) = _cases(form, form.coefficients()[1])
        return replace(self, cases=tuple(item for item in self.cases if item.case == case))


def time_formulas(form: ClosedForm, *, band: Fraction, safe: bool = True) -> TimeFormulas | None:
    """The closed forms in time of a first- or second-order form, or None.

    With numbers only the case that holds is told.
    """
    if not form.rational or form.numerator == 0:
        return None
    top, bottom = form.coefficients()
    order = len(bottom) - 1
    if order not in (1, 2) or len(top) > len(bottom):
        return None
    zero = form.basis.ring.constant(0)
    padded = [*top, zero, zero][: order + 1]
    found = _chosen(form, padded, bottom, band=band, safe=safe)
    if found is not None:
        from acsolve.analyses.time_check import check_formulas

        check_formulas(form, found.cases, padded, bottom)
    return found


def _chosen(
    form: ClosedForm, top: list[Polynomial], bottom: list[Polynomial], *, band: Fraction, safe: bool
) -> TimeFormulas | None:
    def text(first: Polynomial, second: Polynomial) -> str:
        return quotient(form, first, second).text(safe=safe)

    if bottom[0] == 0:
        return _integrating(top, bottom, text)
    standard = standard_form(form, safe=safe)
    if standard is None:
        return None
    parts = {name: standard.parts[name] for name in _NEEDED[len(bottom) - 1]}
    named = standard.shape in ("low-pass", "high-pass") or (
        standard.shape == "band-pass" and bottom[1] != 0
    )
    parts |= {"k": standard.parts["k"]} if named else _ends(top, bottom, text)
    shape = standard.shape if named else "other"
    if len(bottom) == 2:
        parts.pop("v_0", None)
        return TimeFormulas(parts=parts, cases=(_first(shape, band),))
    if bottom[1] == 0:
        parts.pop("q")
        return TimeFormulas(parts=parts, cases=(second_order("without loss", shape),))
    cases = _cases(form, bottom)
    return TimeFormulas(parts=parts, cases=tuple(second_order(case, shape) for case in cases))


_NEEDED = {1: ("tau",), 2: ("w0", "q")}


def _ends(top: list[Polynomial], bottom: list[Polynomial], text: Any) -> dict[str, str]:
    """Start, end and first slope of the step response."""
    last = len(bottom) - 1
    slope = top[last - 1] * bottom[last] - top[last] * bottom[last - 1]
    return {
        "y_0": text(top[last], bottom[last]),
        "y_end": text(top[0], bottom[0]),
        "v_0": text(slope, bottom[last] ** 2),
    }


def _cases(form: ClosedForm, bottom: list[Polynomial]) -> tuple[CaseName, ...]:
    """Which cases may hold: the one that does with numbers, all three with symbols."""
    split = bottom[1] ** 2 - 4 * bottom[0] * bottom[2]
    if split == 0:
        return ("critical",)
    if sign_of(split) and form.numbers() is None and sign_of(split) > 0:
        return ("damped",)
    if form.symbols:
        return ("oscillating", "critical", "damped")
    return (
        ("damped",)
        if exact_number(form, split, form.basis.ring.constant(1)) > 0
        else ("oscillating",)
    )


def _first(shape: str, band: Fraction) -> TimeFormula:
    """First order: one exponential."""
    decay = call("exp", negate(divide(_T, _TAU)))
    if shape == "low-pass":
        step = multiply(_K, subtract(ONE, decay))
        impulse, weight = multiply(divide(_K, _TAU), decay), ZERO
        figures = {
            "rise_s": multiply(call("ln", number(9)), _TAU),
            "delay_s": multiply(call("ln", number(2)), _TAU),
            "settling_s": multiply(call("ln", number(1 / band)), _TAU),
        }
        return _formula("first order", step, impulse, weight, figures=figures)
    if shape == "high-pass":
        impulse = negate(multiply(divide(_K, _TAU), decay))
        return _formula("first order", multiply(_K, decay), impulse, _K)
    step = add(_END, multiply(subtract(_START, _END), decay))
    impulse = multiply(divide(subtract(_END, _START), _TAU), decay)
    return _formula("first order", step, impulse, _START)


def _formula(
    case: CaseName,
    step: Expression,
    impulse: Expression,
    weight: Expression,
    *,
    helpers: Mapping[str, Expression] | None = None,
    figures: Mapping[str, Expression] | None = None,
) -> TimeFormula:
    return TimeFormula(
        case=case,
        step=step,
        impulse=impulse,
        weight=weight,
        helpers=helpers or {},
        figures=figures or {},
    )


def _waves(case: CaseName) -> tuple[Expression, Expression, dict[str, Expression]]:
    """C, S and the helpers of a case."""
    square = multiply(number(4), power(_Q, number(2)))
    helpers: dict[str, Expression] = {"a": divide(_W0, multiply(number(2), _Q))}
    if case == "critical":
        return ONE, _T, helpers
    if case == "without loss":
        turned = multiply(_W0, _T)
        return call("cos", turned), divide(call("sin", turned), _W0), {}
    if case == "oscillating":
        name, under = Name("wd"), subtract(ONE, divide(ONE, square))
        first, second = "cos", "sin"
    else:
        name, under = Name("wr"), subtract(divide(ONE, square), ONE)
        first, second = "cosh", "sinh"
    helpers[name.name] = multiply(_W0, call("sqrt", under))
    turned = multiply(name, _T)
    return call(first, turned), divide(call(second, turned), name), helpers  # type: ignore[arg-type]


def second_order(case: CaseName, shape: str) -> TimeFormula:
    """Second order: e0·C + (v + a·e0)·S under one exponential, the plainest way it is written."""
    cosine, sine, helpers = _waves(case)
    rate = ZERO if case == "without loss" else _A
    decay = ONE if case == "without loss" else call("exp", negate(multiply(_A, _T)))
    square = power(_W0, number(2))
    lagged = multiply(rate, sine)
    if shape == "low-pass":
        step = multiply(_K, subtract(ONE, multiply(decay, add(cosine, lagged))))
        impulse = multiply(multiply(_K, square), multiply(decay, sine))
        return _formula(case, step, impulse, ZERO, helpers=helpers, figures=_peak(case))
    if shape == "high-pass":
        step = multiply(_K, multiply(decay, subtract(cosine, lagged)))
        twice = multiply(multiply(number(2), rate), cosine)
        rest = multiply(subtract(square, multiply(number(2), power(rate, number(2)))), sine)
        impulse = negate(multiply(_K, multiply(decay, add(twice, rest))))
        return _formula(case, step, impulse, _K, helpers=helpers)
    if shape == "band-pass":
        lead = multiply(multiply(number(2), rate), _K)
        step = multiply(lead, multiply(decay, sine))
        impulse = multiply(lead, multiply(decay, subtract(cosine, lagged)))
        return _formula(case, step, impulse, ZERO, helpers=helpers)
    gap = subtract(_START, _END)
    swing = multiply(add(_SLOPE, multiply(rate, gap)), sine)
    step = add(_END, multiply(decay, add(multiply(gap, cosine), swing)))
    pull = multiply(add(multiply(square, gap), multiply(rate, _SLOPE)), sine)
    impulse = multiply(decay, subtract(multiply(_SLOPE, cosine), pull))
    return _formula(case, step, impulse, _START, helpers=helpers)


def _peak(case: CaseName) -> dict[str, Expression]:
    """Overshoot and its time where a low-pass oscillates: exp(-pi·zeta/sqrt(1 - zeta²))."""
    if case != "oscillating":
        return {}
    width = call("sqrt", subtract(multiply(number(4), power(_Q, number(2))), ONE))
    return {
        "overshoot": call("exp", negate(divide(PI, width))),
        "peak_s": divide(PI, Name("wd")),
    }


def _integrating(top: list[Polynomial], bottom: list[Polynomial], text: Any) -> TimeFormulas:
    """A pole at 0 Hz: a ramp, with one exponential beside it or with none."""
    if len(bottom) == 2:
        parts = {"y_0": text(top[1], bottom[1]), "r": text(top[0], bottom[1])}
        step = add(_START, multiply(_RAMP, _T))
        return TimeFormulas(parts=parts, cases=(_formula("integrating", step, _RAMP, _START),))
    last = {"y_0": text(top[2], bottom[2])}
    if bottom[1] == 0:
        half = divide(power(_T, number(2)), number(2))
        step = add(add(_START, multiply(_SLOPE, _T)), multiply(_RAMP, half))
        impulse = add(_SLOPE, multiply(_RAMP, _T))
        parts = {**last, "v_0": text(top[1], bottom[2]), "r": text(top[0], bottom[2])}
        return TimeFormulas(parts=parts, cases=(_formula("integrating", step, impulse, _START),))
    decay = call("exp", negate(divide(_T, _TAU)))
    gap = subtract(_START, _END)
    step = add(add(_END, multiply(_RAMP, _T)), multiply(gap, decay))
    impulse = subtract(_RAMP, multiply(divide(gap, _TAU), decay))
    parts = {
        **last,
        "y_end": text(top[1] * bottom[1] - top[0] * bottom[2], bottom[1] ** 2),
        "r": text(top[0], bottom[1]),
        "tau": text(bottom[2], bottom[1]),
    }
    return TimeFormulas(parts=parts, cases=(_formula("integrating", step, impulse, _START),))
