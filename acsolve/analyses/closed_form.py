"""A closed form: an exact ratio of polynomials in s and the parts, fit to read and to compute."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import Any, Protocol

import numpy as np
from numpy.typing import ArrayLike, NDArray

from acsolve.algebra.ball import precision
from acsolve.algebra.ring import Polynomial, cancel, lowest_part, positive, univariate
from acsolve.analyses.question import Ask
from acsolve.circuit.expression import S
from acsolve.circuit.value import Value
from acsolve.equations.evaluate import (
    Arithmetic,
    BallArithmetic,
    Evaluator,
    FloatArithmetic,
    Scalar,
)
from acsolve.equations.exact import Basis, Generator
from acsolve.equations.naming import safe_names
from acsolve.equations.write import Spelling, polynomial_text
from acsolve.shown import Shown


@dataclass(frozen=True, slots=True, eq=False)
class Checked:
    """A closed form against an independent numeric solution.

    `max_relative_error` over `points` complex frequencies (and random values for symbols),
    each solved in ball arithmetic by dense elimination of the classical nodal equations.
    """

    points: int
    max_relative_error: float


@dataclass(frozen=True, slots=True, eq=False, repr=False)
class Origin:
    """What a closed form was cancelled from, over its own basis.

    `driven` is the characteristic polynomial of the whole network as the question drives it
    (up to a factor without s); `removed` and `denominator` are what was taken out of it first
    and what was left then. `passive` says that no part can give more energy than it stored.
    """

    driven: Polynomial
    removed: Polynomial
    denominator: Polynomial
    passive: bool


@dataclass(frozen=True, slots=True, eq=False, repr=False)
class ClosedForm(Shown):
    """numerator/denominator, exact, common factors removed.

    Coefficients are integers over the symbols; the denominator's lowest power of s has a
    positive coefficient. `values` are the circuit's, for evaluation.
    """

    ask: Ask
    basis: Basis
    numerator: Polynomial
    denominator: Polynomial
    values: Mapping[str, Value] = field(repr=False)
    checked: Checked | None = None
    origin: Origin | None = None

    @property
    def rational(self) -> bool:
        """Whether it is a ratio of polynomials in s (a line, say, is not)."""
        return self.basis.rational_in_s or all(
            item.root == 1 and item.leaf == S
            for item, used in zip(self.basis.generators, self.used(), strict=True)
            if used and item.varies
        )

    @property
    def symbols(self) -> tuple[str, ...]:
        """The free symbols that occur in numerator or denominator."""
        present = [
            item for item, used in zip(self.basis.generators, self.used(), strict=True) if used
        ]
        return Basis(self.basis.ring, tuple(present)).free_names

    def used(self) -> tuple[bool, ...]:
        """For each generator whether it occurs."""
        both = zip(self.numerator.degrees(), self.denominator.degrees(), strict=True)
        return tuple(first > 0 or second > 0 for first, second in both)[
            : len(self.basis.generators)
        ]

    def coefficients(self) -> tuple[list[Polynomial], list[Polynomial]]:
        """Coefficients of numerator and denominator by rising power of s."""
        assert self.rational, "asked for polynomials in s of a form that has none"
        return self.by_power(self.numerator), self.by_power(self.denominator)

    def by_power(self, polynomial: Polynomial) -> list[Polynomial]:
        """Coefficients of one polynomial by rising power of s."""
        place = self.basis.s_index
        if place is None:
            return [polynomial]
        powers = self.basis.ring.by_power(polynomial, place)
        zero = self.basis.ring.constant(0)
        return [powers.get(power, zero) for power in range(max(powers, default=0) + 1)]

    def numbers(self) -> tuple[list[Fraction], list[Fraction]] | None:
        """Coefficients by rising power where all are rational numbers, else None."""
        place = self.basis.s_index
        if not self.rational:
            return None
        both = [univariate(polynomial, place) for polynomial in (self.numerator, self.denominator)]
        if both[0] is None or both[1] is None:
            return None
        return both[0], both[1]

    def spelled(self, *, safe: bool) -> Spelling:
        """The spelling of its symbols, for people or safe for SymPy's parser."""
        if not safe:
            return Spelling({})
        return Spelling(safe_names(self.symbols), "**")

    def text(self, *, safe: bool = False) -> str:
        """The closed form on one line, powers of s collected."""
        spelling = self.spelled(safe=safe)
        top = self.part_text(self.numerator, spelling)
        bottom = self.part_text(self.denominator, spelling)
        if bottom == "1":
            return top
        return f"{_as_factor(top)}/{_as_factor(bottom, divisor=True)}"

    def part_text(self, polynomial: Polynomial, spelling: Spelling) -> str:
        """Numerator or denominator, powers of s collected, lowest first."""
        if not self.rational:
            return polynomial_text(polynomial, self.basis, spelling)
        pieces = []
        for power, coefficient in enumerate(self.by_power(polynomial)):
            if coefficient != 0:
                text = polynomial_text(coefficient, self.basis, spelling)
                pieces.append(_with_power(text, power, spelling))
        return " + ".join(pieces).replace("+ -", "- ") or "0"

    def evaluator(
        self, arithmetic: Arithmetic, overrides: Mapping[str, Scalar] | None = None
    ) -> Evaluator:
        """An evaluator over the circuit's values."""
        return Evaluator(self.values, arithmetic, overrides=overrides)

    def at(self, s: Scalar, evaluate: Evaluator, arithmetic: Arithmetic) -> Scalar:
        """The value at a complex frequency s (rad/s), in the evaluator's arithmetic."""
        points = generator_numbers(self, evaluate, arithmetic, s)
        top = evaluate_polynomial(self.numerator, points, arithmetic)
        bottom = evaluate_polynomial(self.denominator, points, arithmetic)
        return top / bottom

    def response(self, hertz: ArrayLike) -> NDArray[np.complex128]:
        """The complex response at real frequencies in hertz; same shape as `hertz`.

        Points at which the polynomials leave a double's range, or the value is a limit, are
        evaluated in balls.

        Raises
        ------
        EquationError
            [question.no-value] if a symbol has no value.
        """
        return in_doubles(self, np.asarray(hertz, dtype=float))

    def __repr__(self) -> str:
        return f"ClosedForm({_shortened(self.text())})"

    def as_sympy(self) -> Any:
        """The closed form as a SymPy expression in `s` and positive symbols."""
        from acsolve.analyses.sympy_edge import closed_form_to_sympy

        return closed_form_to_sympy(self)

    def __str__(self) -> str:
        return self.text()


def evaluate_polynomial(
    polynomial: Polynomial, points: list[Scalar], arithmetic: Arithmetic
) -> Scalar:
    """A polynomial at given numbers for its generators."""
    total: Scalar = arithmetic.number(Fraction(0))
    powers: dict[tuple[int, int], Scalar] = {}
    for exponents, coefficient in polynomial.terms():
        term = arithmetic.number(Fraction(int(coefficient)))
        for place, exponent in enumerate(exponents):
            if exponent:
                key = (place, int(exponent))
                if key not in powers:
                    powers[key] = points[place] ** int(exponent)
                term = term * powers[key]
        total = total + term
    return total


_LONGEST_REPR = 200  # characters


def _shortened(text: str) -> str:
    return text if len(text) <= _LONGEST_REPR else f"{text[:_LONGEST_REPR]}…"


class Evaluated(Protocol):
    """An answer that can be evaluated at a complex frequency in any arithmetic."""

    @property
    def values(self) -> Mapping[str, Value]:
        """The circuit's values."""

    def at(self, s: Scalar, evaluate: Evaluator, arithmetic: Arithmetic) -> Scalar:
        """The value at s (rad/s)."""


def in_doubles(form: Evaluated, hertz: NDArray[np.float64]) -> NDArray[np.complex128]:
    """The response in doubles; where that is not finite, in balls just beside the point.

    The shift, 2**-700 of the frequency (2**-700 rad/s at zero), turns a removable
    singularity into its limit, far below the last place of a double.
    """
    arithmetic = FloatArithmetic()
    s = 2j * np.pi * hertz
    try:
        with np.errstate(all="ignore"):  # such points are found and mended below
            raw = form.at(s, Evaluator(form.values, arithmetic), arithmetic)
            result = np.array(np.broadcast_to(np.asarray(raw, dtype=complex), s.shape))
    except (OverflowError, ZeroDivisionError):
        result = np.full(s.shape, complex("nan"))
    for place in np.argwhere(~np.isfinite(result)):
        result[tuple(place)] = _beside(form, float(hertz[tuple(place)]))
    return result


def _beside(form: Evaluated, hertz: float) -> complex:
    """The value a hair beside a real frequency, infinite where it grows without bound."""
    from flint import acb, fmpq

    exact = Fraction(hertz)
    with precision(_BESIDE_BITS):
        arithmetic = BallArithmetic()
        omega = 2 * acb.pi() * acb(fmpq(exact.numerator, exact.denominator))
        shift = acb(2) ** -_SHIFT * (omega if hertz else 1)
        s = shift + acb(0, 1) * omega
        value = form.at(s, Evaluator(form.values, arithmetic), arithmetic)
        if not value.is_finite():
            return complex("nan")
        if value.abs_lower() > acb(2).real ** (_SHIFT // 2):
            return complex("inf")
        return complex(value)


_SHIFT = 700
_BESIDE_BITS = 4096


def generator_numbers(
    form: ClosedForm, evaluate: Evaluator, arithmetic: Arithmetic, s: Scalar | None = None
) -> list[Scalar]:
    """The number behind each generator that occurs (None for s where none is given)."""
    return [
        _point(item, s, evaluate, arithmetic)
        if used and (s is not None or not item.varies)
        else None
        for item, used in zip(form.basis.generators, form.used(), strict=True)
    ]


def _point(item: Generator, s: Scalar, evaluate: Evaluator, arithmetic: Arithmetic) -> Scalar:
    """The number that a generator stands for."""
    number = evaluate(item.leaf, s)
    if item.root > 1:
        return arithmetic.power(number, arithmetic.number(Fraction(1, item.root)))
    return number


def _as_factor(text: str, *, divisor: bool = False) -> str:
    simple = " " not in text and not (divisor and ("*" in text or "/" in text))
    return text if simple else f"({text})"


def _with_power(coefficient: str, power: int, spelling: Spelling) -> str:
    if power == 0:
        return coefficient
    variable = "s" if power == 1 else f"s{spelling.power}{power}"
    if coefficient == "1":
        return variable
    if coefficient == "-1":
        return f"-{variable}"
    if " " in coefficient:
        return f"{variable}*({coefficient})"
    return f"{coefficient}*{variable}"


def normalised(
    ask: Ask,
    basis: Basis,
    numerator: Polynomial,
    denominator: Polynomial,
    values: Mapping[str, Value],
) -> ClosedForm:
    """The closed form of a ratio: common factors removed, sign fixed, roots reduced."""
    ring = basis.ring
    top, bottom = cancel(numerator, denominator)
    place = basis.s_index
    leading = bottom if place is None else lowest_part(ring, bottom, place)
    top, bottom = positive(top, bottom, leading)
    return _over_s(ClosedForm(ask, basis, top, bottom, values))


def _over_s(form: ClosedForm) -> ClosedForm:
    """The form over s where it was over a root of s and only whole powers are left."""
    basis, place = form.basis, form.basis.s_index
    if place is None or basis.generators[place].root == 1:
        return form
    root, parts = basis.generators[place].root, []
    for polynomial in (form.numerator, form.denominator):
        terms = {}
        for exponents, coefficient in polynomial.terms():
            whole, rest = divmod(int(exponents[place]), root)
            if rest:
                return form
            terms[(*exponents[:place], whole, *exponents[place + 1 :])] = coefficient
        parts.append(basis.ring.context.from_dict(terms))
    generators = (*basis.generators[:place], Generator(S), *basis.generators[place + 1 :])
    return replace(
        form,
        basis=Basis(basis.ring, generators),
        numerator=parts[0],
        denominator=parts[1],
    )
