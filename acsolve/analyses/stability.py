"""Stability by exact means: half planes counted for numbers, Hurwitz conditions for symbols."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from functools import partial
from typing import Any, Literal

from acsolve.algebra.ball import precision
from acsolve.algebra.factors import factors, squarefree
from acsolve.algebra.half_planes import (
    NO_ROOTS,
    HalfPlanes,
    half_planes,
    lopsided_count,
    symmetric_count,
)
from acsolve.algebra.real_roots import UndecidedError
from acsolve.algebra.ring import Polynomial, univariate
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.enclosed import axis_part, ball_coefficients
from acsolve.analyses.hidden import characteristic, degree_in_s
from acsolve.analyses.shape import sign_of
from acsolve.equations.grouping import Writer, factored
from acsolve.equations.phrase import product

Verdict = Literal["stable", "marginal", "unstable", "conditional", "undecided"]
_BITS = (256, 1024, 4096, 16384)
_LARGEST_ORDER = 4  # of a factor whose conditions are written out
_MOST_TERMS = 4_000  # of a characteristic polynomial that is factored over its symbols


@dataclass(frozen=True, slots=True, kw_only=True)
class Stability:
    """Whether the natural modes of a network decay.

    `stable`: all do. `marginal`: none grows, some persist. `unstable`: one grows.
    `conditional`: that depends on symbols, by `conditions` that must all hold, for positive
    parts. `undecided`: `reason` says why. `planes` counts the modes where values are numbers.
    """

    order: int
    verdict: Verdict
    method: str
    planes: HalfPlanes | None = None
    conditions: tuple[str, ...] = ()
    reason: str | None = None


def stability(form: ClosedForm, *, safe: bool = True) -> Stability | None:
    """The stability of the whole network behind a closed form, driven as its question says.

    None where the network is not described by polynomials in s. Judged on the
    characteristic polynomial before anything cancels.
    """
    whole = characteristic(form)
    if whole is None or form.origin is None:
        return None
    return judged(whole, passive=form.origin.passive, answer=form, safe=safe)


def judged(
    whole: ClosedForm, *, passive: bool, answer: ClosedForm | None = None, safe: bool = True
) -> Stability:
    """The stability that a characteristic polynomial, the form's numerator, decides.

    Multiple modes on the axis persist or grow, which the polynomial alone does not tell: in
    a `passive` network they persist, and where they are poles of the `answer` they grow.
    """
    if whole.symbols:
        return _symbolic(whole, passive=passive, safe=safe)
    planes = _counted(whole, whole.numerator)
    order = degree_in_s(whole)
    if planes is None:
        return Stability(order=order, verdict="undecided", method=_ENCLOSED, reason=_TOO_NEAR)
    verdict = _verdict(planes, passive=passive)
    reason = None
    if verdict == "undecided":
        reason = "multiple modes on the frequency axis persist or grow"
        if answer is not None:
            poles = _counted(answer, answer.denominator)
            if poles is not None and poles.deepest > 1:
                verdict, reason = "unstable", "the answer has a multiple pole on the axis"
    exact = univariate(whole.numerator, whole.basis.s_index) is not None
    return Stability(
        order=order,
        verdict=verdict,
        method=_EXACT if exact else _ENCLOSED,
        planes=planes,
        reason=reason,
    )


_TOO_NEAR = "a mode lies too near the frequency axis to tell its side"
_EXACT = "Routh's array, exact"
_ENCLOSED = "Routh's array over enclosed coefficients"
_SYMBOLIC = "Hurwitz conditions of each factor"


def _verdict(planes: HalfPlanes, *, passive: bool) -> Verdict:
    if planes.right:
        return "unstable"
    if not planes.axis:
        return "stable"
    return "marginal" if planes.deepest == 1 or passive else "undecided"


def _counted(form: ClosedForm, polynomial: Polynomial) -> HalfPlanes | None:
    """The half planes of a polynomial whose values are numbers; None where undecided."""
    numbers = univariate(polynomial, form.basis.s_index)
    if numbers is not None:
        return half_planes(numbers)
    total, place = NO_ROOTS, form.basis.s_index
    for factor, multiplicity in squarefree(polynomial)[1]:
        if place is None or factor.degrees()[place] == 0:
            continue
        symmetric = axis_part(form, factor)
        parts = ((symmetric, symmetric_count), (factor / symmetric, lopsided_count))
        for part, count in parts:
            found = _certain(partial(ball_coefficients, form, part), count)
            if found is None:
                return None
            total += found.times(int(multiplicity))
    return total


def _certain(
    coefficients: Callable[[], list[Any]], count: Callable[[list[Any]], HalfPlanes]
) -> HalfPlanes | None:
    for bits in _BITS:
        with precision(bits):
            values = coefficients()
            if len(values) == 1:
                return NO_ROOTS
            try:
                return count(values)
            except UndecidedError:
                continue
    return None


# ------------------------------------------------------------ symbols


def _symbolic(whole: ClosedForm, *, passive: bool, safe: bool) -> Stability:
    order = degree_in_s(whole)
    if len(whole.numerator) > _MOST_TERMS:
        return _unsettled(order, _TOO_LARGE, passive=passive)
    write = Writer(whole.basis, whole.spelled(safe=safe))
    place = whole.basis.s_index
    conditions: dict[str, None] = {}
    persists, reason = 0, None
    for factor, multiplicity in factors(whole.numerator)[1]:
        if place is None or factor.degrees()[place] == 0:
            continue
        found = _conditions(whole.by_power(factor), passive=passive)
        if found == _NEVER:
            return Stability(order=order, verdict="unstable", method=_SYMBOLIC, reason=_NEVER)
        if isinstance(found, str):
            reason = found
        elif found is None:
            persists = max(persists, int(multiplicity))
        else:
            conditions |= dict.fromkeys(_spelled(write, item) for item in found)
    if reason is not None:
        return _unsettled(order, reason, passive=passive)
    return _joined(order, tuple(conditions), 1 if passive and persists else persists)


def _unsettled(order: int, reason: str, *, passive: bool) -> Stability:
    if passive:
        reason = f"all parts are passive, so no mode grows; {reason}"
    return Stability(order=order, verdict="undecided", method=_SYMBOLIC, reason=reason)


def _joined(order: int, conditions: tuple[str, ...], persists: int) -> Stability:
    reason: str | None = None
    verdict: Verdict = "conditional" if conditions else "stable"
    if persists:
        reason = "some modes lie on the frequency axis whatever the values: they do not decay"
        verdict = "conditional" if conditions else "marginal" if persists == 1 else "undecided"
    return Stability(
        order=order, verdict=verdict, method=_SYMBOLIC, conditions=conditions, reason=reason
    )


_NEVER = "a mode grows whatever the values of the parts"
_TOO_HIGH = f"conditions are written out up to order {_LARGEST_ORDER} of a factor"
_TOO_LARGE = "the characteristic polynomial is too large to factor over its symbols"


def _conditions(coefficients: list[Polynomial], *, passive: bool) -> list[Polynomial] | str | None:
    """What must be positive for one irreducible factor; empty where it always is.

    None where its roots lie on the axis whatever the values; a text where a root lies right
    of it whatever they are, or where that is not written out.

    Notes
    -----
    Hurwitz's determinants with the reductions of Liénard and Chipart: all coefficients
    positive and, of order three, D2 > 0, of order four D3 > 0 (F. R. Gantmacher, The Theory
    of Matrices II, 1959, chapter XV, theorem 11). A coefficient that is zero means a root to
    the right, unless all odd ones are.
    """
    order = len(coefficients) - 1
    if all(value == 0 for value in coefficients[1::2]) or (order == 1 and coefficients[0] == 0):
        return _even(coefficients, passive=passive)
    if any(value == 0 for value in coefficients):
        return _NEVER
    if order > _LARGEST_ORDER:
        return _TOO_HIGH
    definite = [sign_of(value) for value in coefficients if sign_of(value)]
    turn = definite[0] if definite else coefficients[0]  # one sign for all is what counts
    oriented = [value * turn for value in coefficients]
    wanted = [*oriented[0 if definite else 1 :], *_determinants(oriented)]
    if any(sign_of(value) < 0 for value in wanted):
        return _NEVER
    return [value for value in wanted if sign_of(value) == 0]


def _even(coefficients: list[Polynomial], *, passive: bool) -> list[Polynomial] | str | None:
    """The same of a polynomial in s², or of s itself: its roots are symmetric to the axis."""
    if passive or len(coefficients) == 2:
        return None
    if len(coefficients) > 3:
        return "modes lie on the frequency axis or grow, in pairs"
    ends = coefficients[0] * coefficients[2]
    if sign_of(ends) == 0:
        return "two modes lie on the frequency axis, or one of them grows"
    return None if sign_of(ends) > 0 else _NEVER


def _determinants(c: list[Polynomial]) -> list[Polynomial]:
    """The Hurwitz determinant that counts beside positive coefficients."""
    if len(c) == 4:
        return [c[2] * c[1] - c[3] * c[0]]
    if len(c) == 5:
        return [c[3] * c[2] * c[1] - c[4] * c[1] ** 2 - c[3] ** 2 * c[0]]
    return []


def _spelled(write: Writer, value: Polynomial) -> str:
    """`… > 0` without the factors that are positive for positive parts."""
    found = factored(value)
    left = value.context().constant(1 if found.number > 0 else -1)
    for factor, exponent in found.sums:
        sign = sign_of(factor)
        if sign < 0 and exponent % 2:
            left = -left
        elif sign == 0:
            left = left * factor ** (2 - exponent % 2)
    return f"{product([write.grouped(left)])} > 0"
