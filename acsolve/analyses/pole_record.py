"""Poles and zeros one by one: exact where they can be, multiplicities, frequency and damping."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import ceil, inf, log2
from typing import Any

from acsolve.algebra.factors import factors, whole_text
from acsolve.algebra.ring import Polynomial, univariate
from acsolve.algebra.roots import (
    LARGEST_CERTIFIED,
    integer_coefficients,
    mirrored_roots,
    root_balls,
)
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.enclosed import factor_balls
from acsolve.analyses.hidden import degree_in_s, hidden, of_polynomial
from acsolve.analyses.shape import natural_frequency, quality, rooted, sign_of
from acsolve.analyses.stability import Stability, stability
from acsolve.equations.grouping import Writer
from acsolve.equations.phrase import Phrase, product, root, total
from acsolve.equations.write import Spelling
from acsolve.errors import AnalysisError, Diagnostic

MOST_DIGITS = 1_000
_MOST_TERMS = 2_000  # of a polynomial that is factored over its symbols
_DOUBLE = 54  # bits


@dataclass(frozen=True, slots=True, kw_only=True)
class RootRecord:
    """One pole, zero or mode s0, in rad/s.

    `closed_form`, `w0_form` and `q_form` are texts SymPy reads, of s0 itself, the natural
    frequency (rad/s) and the quality factor of its factor, where that is of first or second
    degree; of two roots that are known to be real the latter are left out. `digits` are real
    and imaginary part to as many digits as were asked for, each within one unit of the last.
    `error` bounds nothing: it is estimated, in rad/s, where the root is an eigenvalue that
    was not certified.
    """

    multiplicity: int
    value: complex | None = None
    closed_form: str | None = None
    w0_form: str | None = None
    q_form: str | None = None
    digits: tuple[str, str] | None = None
    error: float | None = None

    @property
    def w0(self) -> float | None:
        """The natural frequency |s0| in rad/s."""
        return None if self.value is None else abs(self.value)

    @property
    def damping(self) -> float | None:
        """The damping ratio -re(s0)/|s0|: 1 on the negative real axis, 0 on the imaginary one."""
        return None if not self.value else -self.value.real / abs(self.value)

    @property
    def q(self) -> float | None:
        """The quality factor of a complex pair, negative where it grows, infinite on the axis."""
        if self.value is None or self.value.imag == 0:
            return None
        return inf if self.value.real == 0 else abs(self.value) / (-2 * self.value.real)

    @property
    def tau(self) -> float | None:
        """The time constant -1/re(s0) in seconds, in which the mode falls to 1/e."""
        return None if self.value is None or self.value.real == 0 else -1 / self.value.real


@dataclass(frozen=True, slots=True)
class Factor:
    """A factor of numerator or denominator that cannot be split over the rationals."""

    text: str
    degree: int
    multiplicity: int


@dataclass(frozen=True, slots=True)
class RootTable:
    """The roots of one polynomial by rising magnitude, and its factors, those without s first.

    Over symbols `roots` holds those that have a closed form. `certified` is False where they
    are eigenvalues instead.
    """

    roots: tuple[RootRecord, ...]
    factors: tuple[Factor, ...]
    certified: bool = True


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class PoleAnswer:
    """Poles and zeros of an answer, hidden modes and stability of its network.

    Each is None where it is not known: `poles` and `zeros` of polynomials too large, `hidden`
    and `stability` where the network itself is not described by polynomials in s.
    """

    form: ClosedForm
    poles: RootTable | None
    zeros: RootTable | None
    hidden: RootTable | None
    stability: Stability | None


def pole_answer(form: ClosedForm, *, digits: int | None = None, safe: bool = True) -> PoleAnswer:
    """Everything about the poles and zeros of a closed form that exact means tell.

    Parameters
    ----------
    digits : of each part of each root, as text besides the doubles; at most 1,000.
    safe : whether texts are for SymPy's parser, with `I` for the imaginary unit, or for
        people, with `j`.

    Raises
    ------
    AnalysisError
        [option.value] the number of digits is none.

    Notes
    -----
    Factored over the rationals, symbols and all; roots of first- and second-degree factors
    in closed form, all numeric ones isolated in balls as `acsolve.algebra.roots` says.
    """
    if digits is not None and not 1 <= digits <= MOST_DIGITS:
        raise AnalysisError(
            Diagnostic(
                code="option.value",
                message=f"{digits} is no number of digits",
                hint=f"Give a whole number from 1 to {MOST_DIGITS:,}.",
            )
        )
    common = hidden(form)
    return PoleAnswer(
        form=form,
        poles=root_table(form, form.denominator, digits=digits, safe=safe),
        zeros=root_table(form, form.numerator, digits=digits, safe=safe),
        hidden=None
        if common is None
        else root_table(common, common.numerator, digits=digits, safe=safe),
        stability=stability(form, safe=safe),
    )


def root_table(
    form: ClosedForm, polynomial: Polynomial, *, digits: int | None = None, safe: bool = True
) -> RootTable | None:
    """The roots in s of a polynomial over a form's basis; None where it is too large."""
    whole = of_polynomial(form, polynomial)
    if not whole.rational:
        return None
    if polynomial == 0:
        return RootTable((), ())
    order = degree_in_s(whole)
    if len(polynomial) > _MOST_TERMS if whole.symbols else order > LARGEST_CERTIFIED:
        return None
    content, split = factors(polynomial)
    spelling = whole.spelled(safe=safe)
    listed = [Factor(whole_text(content), 0, 1)] if content != 1 or not split else []
    found: list[RootRecord] = []
    for factor, multiplicity in split:
        coefficients = whole.by_power(factor)
        degree, times = len(coefficients) - 1, int(multiplicity)
        listed.append(Factor(whole.part_text(factor, spelling), degree, times))
        if degree:
            records = _records(whole, factor, times, digits, spelling)
            if records is None:
                return None
            found += records
    listed.sort(key=lambda item: item.degree)
    found.sort(key=_rank)
    return RootTable(tuple(found), tuple(listed))


def _rank(record: RootRecord) -> tuple[float, float, float]:
    value = record.value
    return (0, 0, 0) if value is None else (abs(value), value.imag, value.real)


def _records(
    whole: ClosedForm, factor: Polynomial, times: int, digits: int | None, spelling: Spelling
) -> list[RootRecord] | None:
    """The roots of one irreducible factor."""
    texts = _texts(whole, factor, spelling)
    if whole.symbols:
        return [
            RootRecord(
                multiplicity=times,
                closed_form=text["closed_form"],
                w0_form=text.get("w0_form"),
                q_form=text.get("q_form"),
            )
            for text in texts
        ]
    bits = _DOUBLE if digits is None else max(_DOUBLE, ceil(digits * log2(10)) + 8)
    numbers = univariate(factor, whole.basis.s_index)
    balls: Sequence[Any] | None
    if numbers is None:
        balls = factor_balls(whole, factor, bits)
    else:
        from flint import fmpz_poly

        balls = root_balls(fmpz_poly(integer_coefficients(numbers)), bits)
    if balls is None:
        return None
    upper = [ball for ball in balls if ball.imag >= 0]
    ordered = sorted(upper, key=lambda ball: float(ball.real.mid()))
    records: list[RootRecord] = []
    for ball in ordered:
        values = sorted(mirrored_roots([ball]), key=lambda value: value.imag)
        for value in values:  # in the order of the closed forms: lower before upper
            text = texts[len(records)] if texts else {}
            records.append(
                RootRecord(
                    multiplicity=times,
                    value=value,
                    digits=None if digits is None else _digits(ball, digits, value.imag < 0),
                    closed_form=text.get("closed_form"),
                    w0_form=text.get("w0_form") if value.imag or len(texts) == 1 else None,
                    q_form=text.get("q_form") if value.imag else None,
                )
            )
    return records


def _digits(ball: Any, digits: int, below: bool) -> tuple[str, str]:
    first, second = (part.str(digits, radius=False) for part in (ball.real, ball.imag))
    return first, f"-{second}" if below else second


def _texts(whole: ClosedForm, factor: Polynomial, spelling: Spelling) -> list[dict[str, str]]:
    """The closed forms of the roots of a factor of degree one or two, the lower one first."""
    coefficients = whole.by_power(factor)
    write = Writer(whole.basis, spelling)
    if len(coefficients) == 2:
        c0, c1 = coefficients
        size = c0 if sign_of(c0) >= 0 else -c0
        below = c1 if sign_of(c1) >= 0 else -c1
        return [
            {
                "closed_form": str(write.ratio(-c0, c1)),
                "w0_form": str(write.ratio(size, below)),
            }
        ]
    if len(coefficients) != 3:
        return []
    if sign_of(coefficients[2]) < 0:
        coefficients = [-value for value in coefficients]
    named = {}
    if sign_of(coefficients[0] * coefficients[2]) > 0:
        named = {"w0_form": str(natural_frequency(write, coefficients))}
        if _is_pair(coefficients) is not False:
            named["q_form"] = str(quality(write, coefficients))
    return [
        {"closed_form": text, **named} for text in quadratic_roots(write, coefficients, spelling)
    ]


def _is_pair(coefficients: Sequence[Polynomial]) -> bool | None:
    """Whether a quadratic has complex roots; None where values decide."""
    c0, c1, c2 = coefficients
    sign = sign_of(c1 * c1 - 4 * c0 * c2)
    return None if sign == 0 else sign < 0


def quadratic_roots(
    write: Writer, coefficients: Sequence[Polynomial], spelling: Spelling
) -> tuple[str, str]:
    """Both roots of c0 + c1·s + c2·s², c2 not surely negative, the minus sign first."""
    c0, c1, c2 = coefficients
    inside = c1 * c1 - 4 * c0 * c2
    unit = []
    if _is_pair(coefficients):
        inside, unit = -inside, [Phrase("I" if spelling.power == "**" else "j")]
    outer, inner = rooted(inside)
    pieces = write.pieces(outer, 2 * c2)
    second = product([*pieces.top, root(write.grouped(inner)), *unit], pieces.bottom)
    first = write.ratio(-c1, 2 * c2)
    return str(total([first, -second])), str(total([first, second]))
