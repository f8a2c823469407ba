"""A closed form cut in two, the terms that stay and those that go, and the error of the cut."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm, normalised
from acsolve.equations.evaluate import Arithmetic, Evaluator, Scalar
from acsolve.equations.write import polynomial_text

Side = Literal["numerator", "denominator"]
SIDES: tuple[Side, Side] = ("numerator", "denominator")

Exponents = tuple[int, ...]


@dataclass(frozen=True, slots=True)
class Term:
    """One term of a closed form: an integer times a product of powers of the generators.

    `varying` holds the exponents of the generators that depend on frequency alone (s, as a
    rule): the terms of one side that share it are one coefficient.
    """

    side: Side
    varying: Exponents
    exponents: Exponents
    coefficient: int


def terms(form: ClosedForm) -> tuple[Term, ...]:
    """Every term of numerator and denominator, by rising power of s."""
    varies = [item.varies for item in form.basis.generators]
    found = []
    for side in SIDES:
        for exponents, coefficient in getattr(form, side).terms():
            whole = tuple(int(item) for item in exponents)
            varying = tuple(
                item if place < len(varies) and varies[place] else 0
                for place, item in enumerate(whole)
            )
            found.append(Term(side, varying, whole, int(coefficient)))
    return tuple(
        sorted(found, key=lambda item: (SIDES.index(item.side), item.varying, item.exponents))
    )


@dataclass(frozen=True, slots=True)
class Dropped:
    """One term that went: which coefficient it stood in, and the term as text."""

    place: str
    term: str

    def __str__(self) -> str:
        return f"{self.term} ({self.place})"


@dataclass(frozen=True, slots=True, eq=False)
class Cut:
    """An exact closed form and which of its terms stay; on each side at least one does."""

    exact: ClosedForm
    kept: tuple[Term, ...]
    dropped: tuple[Term, ...]

    def polynomial(self, side: Side, *, kept: bool) -> Polynomial:
        """The sum of the kept or of the dropped terms of one side."""
        chosen = self.kept if kept else self.dropped
        return self.exact.basis.ring.context.from_dict(
            {item.exponents: item.coefficient for item in chosen if item.side == side}
        )

    def approximate(self) -> ClosedForm:
        """The closed form of the kept terms, common factors removed; not checked."""
        if not self.dropped:
            return self.exact
        top, bottom = (self.polynomial(side, kept=True) for side in SIDES)
        exact = self.exact
        return normalised(exact.ask, exact.basis, top, bottom, exact.values)

    def listed(self) -> tuple[Dropped, ...]:
        """The dropped terms as texts, numerator first, by rising power of s."""
        spelling = self.exact.spelled(safe=False)
        basis = self.exact.basis
        found = []
        for item in self.dropped:
            inner = tuple(a - b for a, b in zip(item.exponents, item.varying, strict=True))
            variable = basis.ring.context.from_dict({item.varying: 1})
            body = basis.ring.context.from_dict({inner: item.coefficient})
            power = polynomial_text(variable, basis, spelling)
            place = f"{item.side}, {power}" if any(item.varying) else f"{item.side}, constant term"
            found.append(Dropped(place, polynomial_text(body, basis, spelling)))
        return tuple(found)


def cut(form: ClosedForm, dropped: Iterable[Term]) -> Cut:
    """The closed form without some of its terms."""
    gone = frozenset(dropped)
    every = terms(form)
    return Cut(
        form,
        tuple(item for item in every if item not in gone),
        tuple(item for item in every if item in gone),
    )


def generator_value(
    form: ClosedForm, place: int, evaluate: Evaluator, arithmetic: Arithmetic, s: Scalar = None
) -> Scalar:
    """The number that the generator at a place stands for."""
    item = form.basis.generators[place]
    number = evaluate(item.leaf, s)
    if item.root == 1:
        return number
    return arithmetic.power(number, arithmetic.number(Fraction(1, item.root)))


class Powers:
    """Products of powers of generators as numbers, each power worked out once.

    Without `s` only for products that do not depend on frequency.
    """

    def __init__(
        self, form: ClosedForm, evaluate: Evaluator, arithmetic: Arithmetic, s: Scalar = None
    ) -> None:
        self._form = form
        self._evaluate = evaluate
        self._arithmetic = arithmetic
        self._s = s
        self._known: dict[tuple[int, int], Scalar] = {}

    def product(self, exponents: Exponents) -> Scalar | None:
        """The product, or None where it is empty."""
        result: Scalar | None = None
        for place, exponent in enumerate(exponents):
            if exponent:
                factor = self._power(place, exponent)
                result = factor if result is None else result * factor
        return result

    def _power(self, place: int, exponent: int) -> Scalar:
        key = (place, exponent)
        if key not in self._known:
            if exponent == 1:
                self._known[key] = generator_value(
                    self._form, place, self._evaluate, self._arithmetic, self._s
                )
            else:
                self._known[key] = self._power(place, 1) ** exponent
        return self._known[key]


Coefficients = Mapping[Exponents, Scalar]


class _Sum:
    """Terms gathered by what varies with frequency; big integers are scaled down alike."""

    def __init__(self, chosen: Sequence[Term], scale: int) -> None:
        self._groups: dict[Exponents, list[tuple[Exponents, Fraction]]] = {}
        for item in chosen:
            inner = tuple(a - b for a, b in zip(item.exponents, item.varying, strict=True))
            number = Fraction(item.coefficient, scale)
            self._groups.setdefault(item.varying, []).append((inner, number))

    def coefficients(self, powers: Powers, arithmetic: Arithmetic) -> Coefficients:
        found = {}
        for varying, members in self._groups.items():
            total: Scalar = None
            for inner, number in members:
                product = powers.product(inner)
                value = arithmetic.number(number)
                value = value if product is None else value * product
                total = value if total is None else total + value
            found[varying] = total
        return found


def summed(coefficients: Coefficients, powers: Powers) -> Scalar:
    """The sum of coefficients times what varies with frequency."""
    total: Scalar = 0
    for varying, value in coefficients.items():
        product = powers.product(varying)
        total = total + (value if product is None else value * product)
    return total


def scale_of(form: ClosedForm, side: Side) -> int:
    """A power of two near the largest coefficient of one side: it keeps doubles in range."""
    sizes = [int(coefficient).bit_length() for coefficient in getattr(form, side).coeffs()]
    return 1 << max(0, max(sizes, default=0) - 1)


def side_coefficients(
    form: ClosedForm, side: Side, evaluate: Evaluator, arithmetic: Arithmetic
) -> Coefficients:
    """The coefficients of one side as numbers, all scaled alike."""
    chosen = [item for item in terms(form) if item.side == side]
    powers = Powers(form, evaluate, arithmetic)
    return _Sum(chosen, scale_of(form, side)).coefficients(powers, arithmetic)


class ErrorFormula:
    """The relative error (H~ - H)/H of a cut, in any arithmetic.

    With N = N~ + n and D = D~ + d (n and d what is dropped), x = d/D~ and y = n/N:
    H~/H - 1 = (N - n)/N · (D~ + d)/D~ - 1 = x - y·(1 + x). Small where n and d are small,
    without cancellation, and free of N (of D~) where nothing is dropped from it.
    """

    def __init__(self, split: Cut) -> None:
        self.form = split.exact
        self._sums: list[tuple[_Sum, _Sum] | None] = []
        for side in SIDES:
            gone = [item for item in split.dropped if item.side == side]
            stay = [item for item in split.kept if item.side == side]
            whole = [*stay, *gone] if side == "numerator" else stay
            scale = scale_of(self.form, side)
            self._sums.append((_Sum(gone, scale), _Sum(whole, scale)) if gone else None)

    def coefficients(
        self, evaluate: Evaluator, arithmetic: Arithmetic
    ) -> list[tuple[Coefficients, Coefficients] | None]:
        """What does not depend on frequency: dropped and divisor of each side."""
        powers = Powers(self.form, evaluate, arithmetic)
        found: list[tuple[Coefficients, Coefficients] | None] = []
        for pair in self._sums:
            if pair is None:
                found.append(None)
            else:
                gone, divisor = (item.coefficients(powers, arithmetic) for item in pair)
                found.append((gone, divisor))
        return found

    def at(
        self,
        coefficients: Sequence[tuple[Coefficients, Coefficients] | None],
        evaluate: Evaluator,
        arithmetic: Arithmetic,
        s: Scalar,
    ) -> Scalar:
        """The complex relative error at s (rad/s)."""
        powers = Powers(self.form, evaluate, arithmetic, s)
        y, x = (
            None if pair is None else summed(pair[0], powers) / summed(pair[1], powers)
            for pair in coefficients
        )
        if y is None:
            return 0 * s if x is None else x
        return -y if x is None else x - y * (1 + x)
