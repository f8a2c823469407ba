"""Ratios of polynomials times the transform of what drives them: a step, a sine from 0 on."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.residue import Balls, Factor, Ratio, around, quotient

Omega = Callable[[], Any]  # an angular frequency as a ball at the precision in force


# Coefficients are made when they are asked for, at the precision of that moment, by classes
# rather than closures: answers that hold them pickle.


@dataclass(frozen=True, slots=True)
class _OverS:
    """A polynomial that has the root zero, divided by s."""

    inner: Balls

    def __call__(self) -> Sequence[Any]:
        return list(self.inner())[1:]


@dataclass(frozen=True, slots=True)
class _TimesS:
    """A polynomial times s."""

    inner: Balls

    def __call__(self) -> Sequence[Any]:
        return [0, *self.inner()]


@dataclass(frozen=True, slots=True)
class _Turning:
    """s² + omega²."""

    omega: Omega

    def __call__(self) -> Sequence[Any]:
        from flint import arb

        return [self.omega() ** 2, arb(0), arb(1)]


@dataclass(frozen=True, slots=True)
class _Scaled:
    """A polynomial times omega."""

    inner: Balls
    omega: Omega

    def __call__(self) -> Sequence[Any]:
        return [item * self.omega() for item in self.inner()]


@dataclass(frozen=True, slots=True)
class _Product:
    """The product of two polynomials."""

    first: Balls
    second: Balls

    def __call__(self) -> Sequence[Any]:
        return _product(self.first(), self.second())


@dataclass(frozen=True, slots=True)
class _Quotient:
    """A polynomial divided by one of its factors."""

    whole: Balls
    factor: Balls

    def __call__(self) -> Sequence[Any]:
        return quotient(self.whole(), self.factor())


def over_s(ratio: Ratio) -> Ratio:
    """The ratio divided by s, which is cancelled where the numerator has a root zero."""
    if ratio.lowest:
        return replace(
            ratio,
            numerator=_OverS(ratio.numerator),
            degrees=(ratio.degrees[0] - 1, ratio.degrees[1]),
            lowest=ratio.lowest - 1,
        )
    return replace(
        ratio,
        denominator=_TimesS(ratio.denominator),
        zeros=ratio.zeros + 1,
        degrees=(ratio.degrees[0], ratio.degrees[1] + 1),
    )


def times_sine(ratio: Ratio, omega: Omega) -> Ratio:
    """The ratio times omega/(s² + omega²), the transform of sin(omega·t).

    A factor that has the root j·omega to as many digits as can be told is taken to have it.
    """
    factors: list[Factor] = []
    multiplicity = 1
    for factor in ratio.factors:
        rest = _without(factor, omega) if factor.mirrored else factor
        multiplicity += factor.multiplicity if rest is not factor else 0
        factors += [rest] if rest is not None else []
    turning = _Turning(omega)
    sine = Factor(coefficients=turning, multiplicity=multiplicity, mirrored=True)
    return Ratio(
        numerator=_Scaled(ratio.numerator, omega),
        denominator=_Product(ratio.denominator, turning),
        zeros=ratio.zeros,
        factors=(*factors, sine),
        degrees=(ratio.degrees[0], ratio.degrees[1] + 2),
        lowest=ratio.lowest,
    )


_ALIKE = 1024  # bits to which a root is compared with j·omega


def _without(factor: Factor, omega: Omega) -> Factor | None:
    """The factor divided by s² + omega² where that is a factor of it; None where it is all."""
    from flint import acb

    with precision(_ALIKE):
        if not around(factor.coefficients(), acb(0, omega()), 1)[0].contains(0):
            return factor
        if len(factor.coefficients()) == 3:
            return None
    return Factor(
        coefficients=_Quotient(factor.coefficients, _Turning(omega)),
        multiplicity=factor.multiplicity,
        mirrored=True,
    )


def _product(first: Sequence[Any], second: Sequence[Any]) -> list[Any]:
    from flint import arb

    found = [arb(0)] * (len(first) + len(second) - 1)
    for i, a in enumerate(first):
        for j, b in enumerate(second):
            found[i + j] = found[i + j] + a * b
    return found
