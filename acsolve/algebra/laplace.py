"""Ratios of polynomials times the transform of what drives them: a step, a sine from 0 on."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.residue import Balls, Factor, Ratio, around, quotient


def over_s(ratio: Ratio) -> Ratio:
    """The ratio divided by s, which is cancelled where the numerator has a root zero."""
    if ratio.lowest:
        return replace(
            ratio,
            numerator=lambda: list(ratio.numerator())[1:],
            degrees=(ratio.degrees[0] - 1, ratio.degrees[1]),
            lowest=ratio.lowest - 1,
        )
    return replace(
        ratio,
        denominator=lambda: [0, *ratio.denominator()],
        zeros=ratio.zeros + 1,
        degrees=(ratio.degrees[0], ratio.degrees[1] + 1),
    )


def times_sine(ratio: Ratio, omega: Callable[[], Any]) -> Ratio:
    """The ratio times omega/(s² + omega²), the transform of sin(omega·t).

    A factor that has the root j·omega to as many digits as can be told is taken to have it.
    """
    factors: list[Factor] = []
    multiplicity = 1
    for factor in ratio.factors:
        rest = _without(factor, omega) if factor.mirrored else factor
        multiplicity += factor.multiplicity if rest is not factor else 0
        factors += [rest] if rest is not None else []
    sine = Factor(coefficients=_line(omega), multiplicity=multiplicity, mirrored=True)
    return Ratio(
        numerator=lambda: [item * omega() for item in ratio.numerator()],
        denominator=lambda: _product(ratio.denominator(), sine.coefficients()),
        zeros=ratio.zeros,
        factors=(*factors, sine),
        degrees=(ratio.degrees[0], ratio.degrees[1] + 2),
        lowest=ratio.lowest,
    )


def _line(omega: Callable[[], Any]) -> Balls:
    from flint import arb

    return lambda: [omega() ** 2, arb(0), arb(1)]


_ALIKE = 1024  # bits to which a root is compared with j·omega


def _without(factor: Factor, omega: Callable[[], Any]) -> Factor | None:
    """The factor divided by s² + omega² where that is a factor of it; None where it is all."""
    from flint import acb

    with precision(_ALIKE):
        if not around(factor.coefficients(), acb(0, omega()), 1)[0].contains(0):
            return factor
        if len(factor.coefficients()) == len(_line(omega)()):
            return None
    return Factor(
        coefficients=lambda: quotient(factor.coefficients(), _line(omega)()),
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
