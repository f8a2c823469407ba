"""Poles and zeros of a closed form with numeric values."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from acsolve.algebra.roots import LARGEST_CERTIFIED, complex_roots
from acsolve.analyses.closed_form import ClosedForm


@dataclass(frozen=True, slots=True)
class PolesZeros:
    """Poles and zeros in rad/s, a multiple one repeated, sorted by magnitude."""

    poles: tuple[complex, ...]
    zeros: tuple[complex, ...]


def poles_zeros(form: ClosedForm) -> PolesZeros | None:
    """Certified poles and zeros, or None where values are symbols or the order is too large."""
    numbers = form.numbers()
    if numbers is None:
        return _enclosed(form)
    top, bottom = numbers
    if max(len(top), len(bottom)) - 1 > LARGEST_CERTIFIED:
        return None
    return PolesZeros(_repeated(bottom), _repeated(top))


def _repeated(coefficients: list[Fraction]) -> tuple[complex, ...]:
    while coefficients and coefficients[-1] == 0:
        coefficients = coefficients[:-1]
    return tuple(
        root for root, multiplicity in complex_roots(coefficients) for _ in range(multiplicity)
    )


def _enclosed(form: ClosedForm) -> PolesZeros | None:
    """Values with pi or square roots: the same from enclosed coefficients."""
    from acsolve.analyses.enclosed import enclosed_roots

    if not form.rational or form.symbols:
        return None
    found = [enclosed_roots(form, part) for part in (form.denominator, form.numerator)]
    if found[0] is None or found[1] is None:
        return None
    return PolesZeros(found[0], found[1])
