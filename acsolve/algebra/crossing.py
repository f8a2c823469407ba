"""Where a real rational function of x > 0 crosses or touches a level, with proof.

f(x) = A(x) - level·B(x), B >= 0: a root of odd multiplicity crosses, of even multiplicity
touches. Rational coefficients are factored square-free exactly; coefficients in balls are
isolated for the whole enclosure or not at all.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import partial
from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.real_roots import Isolated, UndecidedError, positive_roots, refined
from acsolve.algebra.roots import integer_coefficients


@dataclass(frozen=True, slots=True)
class Crossing:
    """A root x > 0; `rises` says whether f goes from negative to positive there.

    `rises` is None where f only touches zero. `value` is x to 60 bits.
    """

    value: Fraction
    rises: bool | None


@dataclass(frozen=True, slots=True)
class Crossings:
    """All roots in rising order; `complete` is True where none can be missing."""

    found: tuple[Crossing, ...]
    complete: bool


def exact_crossings(coefficients: Sequence[Fraction]) -> Crossings:
    """The positive roots of a polynomial with rational coefficients, by rising power."""
    from flint import arb_poly, fmpz_poly

    whole = integer_coefficients(coefficients)
    if not any(whole):
        return Crossings((), True)
    roots: list[tuple[Isolated, bool]] = []
    for factor, multiplicity in fmpz_poly(whole).factor_squarefree()[1]:
        integers = [int(value) for value in factor.coeffs()]
        evaluate = _evaluator(partial(arb_poly, factor))
        roots += [
            (refined(root, evaluate), multiplicity % 2 == 1) for root in positive_roots(integers)
        ]
    roots.sort(key=lambda item: item[0].low)
    lowest = next(value for value in whole if value)
    return Crossings(_directed(roots, start_positive=lowest > 0), True)


def _evaluator(make: Callable[[], Any]) -> Callable[[Any], Any]:
    def evaluate(x: Any) -> Any:
        return make()(x)

    return evaluate


def _directed(roots: list[tuple[Isolated, bool]], *, start_positive: bool) -> tuple[Crossing, ...]:
    """Directions from the sign at the start: it changes at each odd root."""
    positive, found = start_positive, []
    for root, odd in roots:
        value = (root.low + root.high) / 2
        found.append(Crossing(value, (not positive) if odd else None))
        positive ^= odd
    return tuple(found)


def enclosed_crossings(coefficients: Callable[[], Sequence[Any]]) -> Crossings:
    """The positive roots of a polynomial whose coefficients are known as balls.

    `coefficients` computes them at the precision in force. Proven for the enclosure, or
    `complete` is False and nothing is listed: a multiple root, say, is never certain.
    """
    return factored_crossings([(1, coefficients)], coefficients)


def factored_crossings(
    factors: Sequence[tuple[int, Callable[[], Sequence[Any]]]],
    whole: Callable[[], Sequence[Any]],
) -> Crossings:
    """The positive roots of a polynomial given by its square-free factors as balls.

    Parameters
    ----------
    factors : (multiplicity, coefficients by rising power at the precision in force).
    whole : the coefficients of the polynomial itself, for its sign near zero.
    """
    from flint import arb_poly

    roots: list[tuple[Isolated, bool]] = []
    for multiplicity, coefficients in factors:
        isolated = _decided(positive_roots, coefficients)
        if isolated is None:
            return Crossings((), complete=False)
        evaluate = _evaluator(partial(_read, arb_poly, coefficients))
        roots += [(refined(root, evaluate), multiplicity % 2 == 1) for root in isolated]
    start = _decided(_first_sign, whole)
    if start is None:
        return Crossings((), complete=False)
    roots.sort(key=lambda item: item[0].low)
    return Crossings(_directed(roots, start_positive=start > 0), complete=True)


def _read(kind: Callable[[Any], Any], coefficients: Callable[[], Sequence[Any]]) -> Any:
    return kind(list(coefficients()))


def _decided(
    work: Callable[[Sequence[Any]], Any], coefficients: Callable[[], Sequence[Any]]
) -> Any:
    """The result of some work at the first precision that decides it, or None."""
    for bits in (256, 1024, 4096):
        with precision(bits):
            try:
                return work(list(coefficients()))
            except UndecidedError:
                continue
    return None


def _first_sign(values: Sequence[Any]) -> int:
    for value in values:
        if value > 0:
            return 1
        if value < 0:
            return -1
        if not value == 0:  # a ball around zero is neither equal nor unequal to it
            raise UndecidedError("the sign near zero is not certain")
    return 0
