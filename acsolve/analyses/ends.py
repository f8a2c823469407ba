"""The gain at 0 Hz and towards infinite frequency of forms that are not rational in s."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass
from fractions import Fraction
from functools import partial
from math import lcm
from typing import Any, Literal

from acsolve.algebra.ball import precision
from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm, evaluate_polynomial, generator_numbers
from acsolve.analyses.gain_series import ball_of
from acsolve.circuit.expression import (
    Call,
    Expression,
    Number,
    Power,
    Product,
    S,
    Sum,
    children,
)
from acsolve.equations.evaluate import Evaluator
from acsolve.equations.exact import Generator
from acsolve.equations.leaf import monomial
from acsolve.equations.series import SeriesArithmetic, coefficients, near_zero, terms

_BITS = 256
_MOST_TERMS = 1000  # of the series at 0 Hz: exponents finer than 1/200 are not looked into

#: `none`: the gain tends to nothing there (a line without loss); `unknown`: not found out.
EndKind = Literal["value", "zero", "infinite", "none", "unknown"]


@dataclass(frozen=True, slots=True)
class End:
    """What |H|² is, or tends to, at one end of the frequency axis.

    `squared` gives the value as a ball at the precision in force, where there is one.
    """

    kind: EndKind
    squared: Callable[[], Any] | None = None


def at_zero(form: ClosedForm) -> End:
    """The limit at 0 Hz, from both parts as series in a root of s.

    Proven: a coefficient counts as zero only where its ball is exactly zero, for each power
    of the irrational constants apart.
    """
    root = _root(form)
    if 5 * root > _MOST_TERMS:
        return End("unknown")
    try:
        with precision(_BITS):
            first, second = (_leading(groups) for groups in _series(form, root))
    except ValueError:  # a function divides by zero at 0 Hz
        return End("unknown")
    if first is None or second is None:
        return End("zero") if form.numerator == 0 else End("unknown")
    if first != second:
        return End("zero" if first > second else "infinite")
    return End("value", partial(_value_at_zero, form, root, first))


#: A constant and the series that it multiplies.
_Group = tuple[Any, list[Any]]


def _series(form: ClosedForm, root: int) -> list[list[_Group]]:
    """Numerator and denominator over z = s^(1/root), terms with the same constants together."""
    count = 5 * root
    arithmetic = SeriesArithmetic()
    with terms(count):
        points = generator_numbers(
            form, form.evaluator(arithmetic), arithmetic, near_zero(root, count)
        )
        return [
            [
                (constant, coefficients(evaluate_polynomial(part, points, arithmetic), count - 1))
                for constant, part in _by_constant(form, polynomial, points)
            ]
            for polynomial in (form.numerator, form.denominator)
        ]


def _by_constant(
    form: ClosedForm, polynomial: Polynomial, points: list[Any]
) -> list[tuple[Any, Polynomial]]:
    """The polynomial by its powers of generators that do not depend on s."""
    groups: dict[tuple[int, ...], dict[tuple[int, ...], Any]] = {}
    fixed = [not item.varies for item in form.basis.generators]
    for exponents, value in polynomial.terms():
        both = list(zip(exponents, fixed, strict=False))
        key = tuple(int(exponent) if still else 0 for exponent, still in both)
        rest = tuple(0 if still else int(exponent) for exponent, still in both)
        groups.setdefault(key, {})[rest + tuple(exponents[len(rest) :])] = value
    found = []
    for key, part in groups.items():
        constant = ball_of(Fraction(1))
        for exponent, number in zip(key, points, strict=True):
            constant = constant * number**exponent if exponent else constant
        found.append((constant, form.basis.ring.context.from_dict(part)))
    return found


def _coefficient(groups: list[_Group], place: int) -> Any:
    from flint import acb

    return sum((constant * values[place] for constant, values in groups), acb(0))


def _value_at_zero(form: ClosedForm, root: int, place: int) -> Any:
    top, bottom = (_coefficient(groups, place) for groups in _series(form, root))
    return abs(top / bottom) ** 2


def _leading(groups: list[_Group]) -> int | None:
    """The lowest power whose coefficient is not zero; None where that is not certain."""
    for place in range(len(groups[0][1]) if groups else 0):
        if not _coefficient(groups, place).contains(0):
            return place
        if not all(values[place].is_zero() for _, values in groups):
            return None
    return None


def _root(form: ClosedForm) -> int:
    """q such that every power of s in the form is a power of z = s^(1/q)."""
    found, halves = 1, 1
    for item, used in zip(form.basis.generators, form.used(), strict=True):
        if used and item.varies:
            found = lcm(found, item.root)
            for inner in _inside(item.leaf):
                if isinstance(inner, Power) and isinstance(inner.exponent, Number):
                    found = lcm(found, inner.exponent.value.denominator)
                if isinstance(inner, Call) and inner.function == "sqrt":
                    halves = 2
    return lcm(found, halves)


def _inside(expression: Expression) -> Iterator[Expression]:
    yield expression
    for child in children(expression):
        yield from _inside(child)


@dataclass(frozen=True, slots=True)
class _Tail:
    """How a generator behaves as s goes to j·infinity.

    `power`: |g| grows as omega ** power. `turns`: its phase goes round for ever, its size is
    `size`. `dies`: it vanishes faster than any power.
    """

    power: Fraction = Fraction(0)
    turns: bool = False
    dies: bool = False
    size: Any = None


def at_infinity(form: ClosedForm) -> End:
    """The limit at infinite frequency, from the terms that grow fastest in both parts."""
    with precision(_BITS):
        tails = _tails(form)
        if tails is None:
            return End("unknown")
        top, bottom = (_fastest(form, part, tails) for part in (form.numerator, form.denominator))
        if top is None:
            return End("zero") if bottom is not None and bottom.floor > 0 else End("unknown")
        if bottom is None or not bottom.floor > 0:
            return End("unknown")
        if top.power < bottom.power:
            return End("zero")
        if top.power > bottom.power:
            return End("infinite" if top.floor > 0 else "unknown")
        if top.turns or bottom.turns:
            return End("none")
        return End("value", partial(_value_at_infinity, form, tails))


def _value_at_infinity(form: ClosedForm, tails: list[_Tail | None]) -> Any:
    top, bottom = (_fastest(form, part, tails) for part in (form.numerator, form.denominator))
    assert top is not None, "found before at another precision"
    assert bottom is not None, "found before at another precision"
    return abs(top.plain / bottom.plain) ** 2


@dataclass(frozen=True, slots=True)
class _Fastest:
    """The terms that grow fastest: sum of those without a turning phase, and a lower bound."""

    power: Fraction
    plain: Any
    floor: Any
    turns: bool


def _fastest(
    form: ClosedForm, polynomial: Polynomial, tails: list[_Tail | None]
) -> _Fastest | None:
    """None where every term dies."""
    from flint import acb, arb

    numbers = _constants(form)
    groups: dict[Fraction, list[tuple[Any, bool]]] = {}
    for exponents, coefficient in polynomial.terms():
        value, power, turns, dies = acb(int(coefficient)), Fraction(0), False, False
        for exponent, tail, number in zip(exponents, tails, numbers, strict=False):
            if not exponent:
                continue
            if tail is None:
                value = value * number ** int(exponent)
                continue
            power += int(exponent) * tail.power
            turns, dies = turns or tail.turns, dies or tail.dies
            if tail.turns:
                value = value * tail.size ** int(exponent)
        if not dies:
            groups.setdefault(power, []).append((value, turns))
    if not groups:
        return None
    power = max(groups)
    plain = sum((value for value, turns in groups[power] if not turns), acb(0))
    waves = sum((abs(value) for value, turns in groups[power] if turns), arb(0))
    return _Fastest(power, plain, abs(plain) - waves, any(turns for _, turns in groups[power]))


def _constants(form: ClosedForm) -> list[Any]:
    evaluate = form.evaluator(SeriesArithmetic())
    numbers: list[Any] = []
    for item, used in zip(form.basis.generators, form.used(), strict=True):
        if not used or item.varies:
            numbers.append(None)
            continue
        value = evaluate(item.leaf)
        numbers.append(value if item.root == 1 else value.root(item.root))
    return numbers


def _tails(form: ClosedForm) -> list[_Tail | None] | None:
    """By generator, None for constants; None altogether where one is not understood."""
    evaluate = form.evaluator(SeriesArithmetic())
    found: list[_Tail | None] = []
    for item, used in zip(form.basis.generators, form.used(), strict=True):
        tail = _tail(item, evaluate) if used and item.varies else None
        if used and item.varies and tail is None:
            return None
        found.append(tail)
    return found


def _tail(item: Generator, evaluate: Evaluator) -> _Tail | None:
    match item.leaf:
        case leaf if leaf == S:
            return _Tail(Fraction(1, item.root))
        case Power(base, Number(exponent)) if base == S and exponent > 0:
            return _Tail(exponent / item.root)
        case Call("exp", argument) if item.root == 1:
            return _exponential(argument, evaluate)
        case _:
            return None


def _exponential(argument: Expression, evaluate: Evaluator) -> _Tail | None:
    """exp of real multiples of powers of s: the highest power with a real part decides."""
    from flint import acb

    powers = powers_of_s(argument, evaluate)
    if powers is None or any(
        power < 0 or not value.imag.is_zero() for power, value in powers.items()
    ):
        return None
    for power in sorted((item for item in powers if item > 0), reverse=True):
        if power.denominator == 1 and power.numerator % 2 == 1:
            continue  # an imaginary exponent: phase alone
        quarter = evaluate_number(power / 2)
        real = powers[power].real * quarter.cos_pi().real
        return _Tail(dies=True) if real < 0 else None
    return _Tail(turns=True, size=powers.get(Fraction(0), acb(0)).exp())


def evaluate_number(value: Fraction) -> Any:
    """A rational number as a complex ball."""
    return SeriesArithmetic().number(value)


def powers_of_s(expression: Expression, evaluate: Evaluator) -> dict[Fraction, Any] | None:
    """A sum of powers of s as power -> coefficient, a ball; None where it is none."""
    match expression:
        case Sum(left, right):
            first, second = powers_of_s(left, evaluate), powers_of_s(right, evaluate)
            if first is None or second is None:
                return None
            for power, value in second.items():
                first[power] = first[power] + value if power in first else value
            return first
        case Product(Number(factor), Sum() as inner):
            found = powers_of_s(inner, evaluate)
            number = evaluate_number(factor)
            return None if found is None else {key: item * number for key, item in found.items()}
    single = monomial(expression)
    if single is None:
        return None
    value, power = evaluate_number(single.coefficient), Fraction(0)
    for leaf, exponent in single.powers.items():
        if leaf == S:
            power = exponent
        elif any(inner == S for inner in _inside(leaf)):
            return None
        else:
            value = value * SeriesArithmetic().power(evaluate(leaf), evaluate_number(exponent))
    return {power: value}
