"""Roots of a polynomial up to degree four in closed form, its coefficients written as phrases.

Degree one and two as anyone writes them; degree three by Cardano, four by Ferrari, with the
principal values of all roots (J.-P. Tignol, Galois' Theory of Algebraic Equations, 2001,
chapters 2 and 3).
"""

from __future__ import annotations

import cmath
from collections.abc import Callable, Sequence
from dataclasses import dataclass

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.shape import rooted
from acsolve.equations.grouping import Writer
from acsolve.equations.phrase import product, root, total

LARGEST_DEGREE = 4


@dataclass(frozen=True, slots=True)
class Radical:
    """One root as a text; `branch` picks it among those that `values` lists."""

    text: str
    branch: int


def radicals(write: Writer, coefficients: Sequence[Polynomial]) -> list[Radical]:
    """All roots of a polynomial of degree one to four, coefficients by rising power."""
    makers: dict[int, Callable[..., list[str]]]
    makers = {2: _linear, 3: _quadratic, 4: _cubic, 5: _quartic}
    texts = makers[len(coefficients)](write, *coefficients)
    return [Radical(text, branch) for branch, text in enumerate(texts)]


def values(coefficients: Sequence[complex]) -> list[complex | None]:
    """The roots as numbers, in the order of `radicals`; None where a formula divides by zero."""
    makers: dict[int, Callable[..., list[complex]]]
    makers = {2: _linear_values, 3: _quadratic_values, 4: _cubic_values, 5: _quartic_values}
    try:
        return list(makers[len(coefficients)](*map(complex, coefficients)))
    except ZeroDivisionError:
        return [None] * (len(coefficients) - 1)


def _plain(value: complex) -> complex:
    """Without a zero that is negative: principal values take it for the lower side."""
    return complex(value.real, value.imag or 0.0)


def _sqrt(value: complex) -> complex:
    return cmath.sqrt(_plain(value))


def _linear(write: Writer, c0: Polynomial, c1: Polynomial) -> list[str]:
    return [str(write.ratio(-c0, c1))]


def _linear_values(c0: complex, c1: complex) -> list[complex]:
    return [-c0 / c1]


def _quadratic(write: Writer, c0: Polynomial, c1: Polynomial, c2: Polynomial) -> list[str]:
    outer, inner = rooted(c1 * c1 - 4 * c0 * c2)
    pieces = write.pieces(outer, 2 * c2)
    second = product([*pieces.top, root(write.grouped(inner))], pieces.bottom)
    first = write.ratio(-c1, 2 * c2)
    return [str(total([first, -second])), str(total([first, second]))]


def _quadratic_values(c0: complex, c1: complex, c2: complex) -> list[complex]:
    """Both roots, each without cancellation where the other would cancel."""
    inside = _sqrt(c1 * c1 - 4 * c0 * c2)
    away = -c1 - inside if (c1.conjugate() * inside).real >= 0 else -c1 + inside
    if away == 0:
        return [0j, 0j]
    one, other = away / (2 * c2), 2 * c0 / away
    return [one, other] if (c1.conjugate() * inside).real >= 0 else [other, one]


def _turn(branch: int) -> str:
    """A cube root of one as a text."""
    return ("1", "(sqrt(3)*I/2 - 1/2)", "(-sqrt(3)*I/2 - 1/2)")[branch]


def _cube(write: Writer, d0: Polynomial, d1: Polynomial) -> str:
    """The cube root of (d1 + sqrt(d1² - 4·d0³))/2."""
    power = write.spelling.power
    first = write.grouped(d1)
    if d0 == 0:
        return f"({first}){power}(1/3)"
    inside = write.grouped(d1 * d1 - 4 * d0**3)
    return f"(({first})/2 + sqrt({inside})/2){power}(1/3)"


def _cube_value(d0: complex, d1: complex) -> complex:
    inside = d1 if d0 == 0 else (d1 + _sqrt(d1 * d1 - 4 * d0**3)) / 2
    return 0j if inside == 0 else cmath.exp(cmath.log(_plain(inside)) / 3)


def _cubic(
    write: Writer, c0: Polynomial, c1: Polynomial, c2: Polynomial, c3: Polynomial
) -> list[str]:
    d0 = c2 * c2 - 3 * c3 * c1
    cube = _cube(write, d0, 2 * c2**3 - 9 * c3 * c2 * c1 + 27 * c3 * c3 * c0)
    lead, below = write.grouped(c2), write.grouped(3 * c3)
    found = []
    for branch in range(3):
        turned = f"{_turn(branch)}*{cube}"
        rest = "" if d0 == 0 else f" + ({write.grouped(d0)})/({turned})"
        found.append(f"-(({lead}) + {turned}{rest})/({below})")
    return found


def _cubic_values(c0: complex, c1: complex, c2: complex, c3: complex) -> list[complex]:
    d0 = c2 * c2 - 3 * c3 * c1
    cube = _cube_value(d0, 2 * c2**3 - 9 * c3 * c2 * c1 + 27 * c3 * c3 * c0)
    turns = [cmath.exp(2j * cmath.pi * branch / 3) * cube for branch in range(3)]
    return [-(c2 + turn + (d0 / turn if d0 else 0)) / (3 * c3) for turn in turns]


def _quartic(
    write: Writer,
    c0: Polynomial,
    c1: Polynomial,
    c2: Polynomial,
    c3: Polynomial,
    c4: Polynomial,
) -> list[str]:
    d0 = c2 * c2 - 3 * c3 * c1 + 12 * c4 * c0
    d1 = 2 * c2**3 - 9 * c3 * c2 * c1 + 27 * c3**2 * c0 + 27 * c4 * c1**2 - 72 * c4 * c2 * c0
    cube = _cube(write, d0, d1)
    rest = "" if d0 == 0 else f" + ({write.grouped(d0)})/{cube}"
    p = write.ratio(8 * c4 * c2 - 3 * c3 * c3, 8 * c4 * c4)
    q = write.ratio(c3**3 - 4 * c4 * c3 * c2 + 8 * c4 * c4 * c1, 8 * c4**3)
    middle = f"sqrt(-2*({p})/3 + ({cube}{rest})/({write.grouped(3 * c4)}))/2"
    lead = write.ratio(-c3, 4 * c4)
    power = write.spelling.power
    found = []
    for side, back in (("-", "+"), ("+", "-")):
        inside = f"-4*({middle}){power}2 - 2*({p}) {back} ({q})/({middle})"
        found += [f"({lead}) {side} {middle} {sign} sqrt({inside})/2" for sign in "-+"]
    return found


def _quartic_values(
    c0: complex, c1: complex, c2: complex, c3: complex, c4: complex
) -> list[complex]:
    d0 = c2 * c2 - 3 * c3 * c1 + 12 * c4 * c0
    d1 = 2 * c2**3 - 9 * c3 * c2 * c1 + 27 * c3**2 * c0 + 27 * c4 * c1**2 - 72 * c4 * c2 * c0
    cube = _cube_value(d0, d1)
    p = (8 * c4 * c2 - 3 * c3 * c3) / (8 * c4 * c4)
    q = (c3**3 - 4 * c4 * c3 * c2 + 8 * c4 * c4 * c1) / (8 * c4**3)
    middle = _sqrt(-2 * p / 3 + (cube + (d0 / cube if d0 else 0)) / (3 * c4)) / 2
    found = []
    for side in (-1, 1):
        inside = _sqrt(-4 * middle**2 - 2 * p - side * q / middle) / 2
        found += [-c3 / (4 * c4) + side * middle + sign * inside for sign in (-1, 1)]
    return found
