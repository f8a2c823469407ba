"""Partial fractions of a ratio of polynomials with real coefficients, in complex balls.

N(s)/D(s) = polynomial + sum over poles p and k of w_k/(s - p)^(k + 1). Multiplicities come from
a square-free factorisation, so they are exact; poles on the imaginary axis lie exactly on it.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from functools import lru_cache, partial
from math import lcm
from typing import Any

from acsolve.algebra.ball import precision, working_bits

Balls = Callable[[], Sequence[Any]]  # real coefficients by rising power, at the precision in force


class InseparableError(ArithmeticError):
    """Poles lie too close together to be told apart at the largest precision."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Factor:
    """A square-free factor of a denominator, without the root zero.

    `mirrored` says that p(-s) has the same roots: one whose ball meets an axis lies on it.
    `whole` are its coefficients where they are integers.
    """

    coefficients: Balls
    multiplicity: int
    mirrored: bool
    whole: tuple[int, ...] | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Ratio:
    """numerator/denominator; `zeros` counts the denominator's root zero, `factors` the others.

    `degrees` are those of numerator (-1 where it is zero) and denominator, `lowest` is the
    lowest power of the numerator.
    """

    numerator: Balls
    denominator: Balls
    zeros: int
    factors: tuple[Factor, ...]
    degrees: tuple[int, int]
    lowest: int


@dataclass(frozen=True, slots=True)
class Pole:
    """A pole, in the upper half plane or real; a complex one stands for its conjugate too.

    `side` is -1, 0 or 1: the sign of its real part, zero only where it is exactly on the axis.
    """

    place: Any
    multiplicity: int
    real: bool
    side: int


@dataclass(frozen=True, slots=True)
class Term:
    """Weights w_k of 1/(s - p)^(k + 1): w_k·t^k/k!·exp(p·t), with its conjugate if not real."""

    pole: Pole
    weights: tuple[Any, ...]


@dataclass(frozen=True, slots=True)
class Expansion:
    """The terms and the polynomial part, by rising power of s."""

    terms: tuple[Term, ...]
    direct: tuple[Any, ...]


def exact_ratio(top: Sequence[Fraction], bottom: Sequence[Fraction]) -> Ratio:
    """A ratio with rational coefficients, by rising power; the bottom's last is not zero."""
    from flint import fmpz_poly

    common = lcm(*(value.denominator for value in (*top, *bottom)))
    first, second = ([int(value * common) for value in part] for part in (top, bottom))
    zeros = next(power for power, value in enumerate(second) if value)
    factors: list[Factor] = []
    for factor, multiplicity in fmpz_poly(second[zeros:]).factor_squarefree()[1]:
        factors += _split(factor, int(multiplicity))
    return Ratio(
        numerator=partial(_balls, tuple(first)),
        denominator=partial(_balls, tuple(second)),
        zeros=zeros,
        factors=tuple(factors),
        degrees=(degree(first), len(second) - 1),
        lowest=next((power for power, value in enumerate(first) if value), 0),
    )


def _balls(values: Sequence[int]) -> list[Any]:
    from flint import arb

    return [arb(value) for value in values]


def degree(values: Sequence[int | Fraction]) -> int:
    """The highest power whose coefficient is not zero, -1 where there is none."""
    return max((power for power, value in enumerate(values) if value), default=-1)


def _split(factor: Any, multiplicity: int) -> list[Factor]:
    """A factor cut into the part that is symmetric to the imaginary axis and the rest."""
    from flint import fmpz_poly

    mirrored = fmpz_poly([(-1) ** k * int(value) for k, value in enumerate(factor.coeffs())])
    symmetric = factor.gcd(mirrored)
    found = []
    for part, mirror in ((symmetric, True), (factor / symmetric, False)):
        if part.degree() > 0:
            whole = tuple(int(value) for value in part.coeffs())
            found.append(
                Factor(
                    coefficients=partial(_balls, whole),
                    multiplicity=multiplicity,
                    mirrored=mirror,
                    whole=whole,
                )
            )
    return found


_MOST_BITS = 8192
_ISOLATED_BITS = 256
_MOST_STEPS = 12  # of Newton's, each of which doubles the digits


def at_start(ratio: Ratio) -> Any:
    """The value just after 0 of the function of time that the ratio is the transform of.

    The coefficient of 1/s in its expansion at infinity: the initial value theorem, whatever
    stands at 0 itself. Exactly zero where the degrees say so.
    """
    from flint import arb

    if ratio.degrees[0] < 0 or ratio.degrees[0] < ratio.degrees[1] - 1:
        return arb(0)
    return quotient([arb(0), *ratio.numerator()], list(ratio.denominator()))[0]


def poles(ratio: Ratio) -> list[Pole]:
    """All poles to about the precision in force, each once, complex ones by their upper half.

    Raises
    ------
    InseparableError
        no precision up to 8192 bits tells two of them, or one and the axis, apart.
    """
    from flint import acb

    found = [Pole(acb(0), ratio.zeros, real=True, side=0)] if ratio.zeros else []
    for factor in ratio.factors:
        found += _poles_of(factor)
    return found


def _poles_of(factor: Factor) -> list[Pole]:
    bits = working_bits() + 32
    while bits <= _MOST_BITS:
        with precision(bits):
            settled = [_settled(ball, factor) for ball in _isolated(factor)]
            if settled and None not in settled:
                return [pole for pole in settled if isinstance(pole, Pole)]
        bits *= 2
    raise InseparableError("two poles, or a pole and the axis, could not be told apart")


def _isolated(factor: Factor) -> list[Any]:
    """Isolating balls of all roots; none where the precision does not suffice."""
    from flint import acb_poly

    if factor.whole is not None:
        upper = (root for root in _whole_roots(factor.whole) if not root.imag < 0)
        return [_sharpened(root, factor.whole) for root in upper]
    try:
        rough = acb_poly(list(factor.coefficients())).roots()
        smallest = min(float(ball.abs_lower()) for ball in rough)
        if smallest <= 0:
            return []
        poly = acb_poly(list(factor.coefficients()))
        return list(poly.roots(tol=smallest * 2.0 ** -min(working_bits() - 40, 900)))
    except ValueError:
        return []


@lru_cache(maxsize=16)
def _whole_roots(whole: tuple[int, ...]) -> tuple[Any, ...]:
    """Isolating balls of the roots of an integer polynomial.

    Kept, since they take far longer than to be sharpened: 160 real roots take 16 s.
    """
    from flint import fmpz_poly

    poly: Any = fmpz_poly(list(whole))
    with precision(_ISOLATED_BITS):
        return tuple(root for root, _ in poly.complex_roots())


def _sharpened(root: Any, whole: tuple[int, ...]) -> Any:
    """An isolating ball narrowed to the precision in force, or as far as it goes.

    Newton's step from the middle, its slope taken over the whole ball, holds the root
    (R. E. Moore, Interval Analysis, 1966).
    """
    from flint import acb

    wanted = working_bits()
    if _is_narrow(root, wanted):
        return root
    with precision(2 * wanted + max(abs(value).bit_length() for value in whole)):
        poly, slope = _with_slope(whole, working_bits())
        for _ in range(_MOST_STEPS):
            middle = acb(root.real.mid(), root.imag.mid())
            step = middle - poly(middle) / slope(root)
            closer = acb(_common(root.real, step.real), _common(root.imag, step.imag))
            if not closer.is_finite() or not _is_narrow(closer, 0):
                break
            root = closer
            if _is_narrow(root, wanted):
                break
    return root


def _common(first: Any, second: Any) -> Any:
    """What two real balls that hold one number have in common; the first where it is exact."""
    if first.is_exact() or not second.is_finite():
        return first
    return second if second.rad() < first.rad() else first


def _is_narrow(ball: Any, bits: int) -> bool:
    """Whether a complex ball is known to so many bits of its size."""
    size = abs(ball).abs_lower()
    return bool(size > 0 and (ball.real.rad() + ball.imag.rad()) * 2**bits <= size)


@lru_cache(maxsize=4)
def _with_slope(whole: tuple[int, ...], bits: int) -> tuple[Any, Any]:
    """The polynomial and its derivative, their coefficients rounded to the precision in force."""
    from flint import acb_poly, fmpz_poly

    assert bits == working_bits(), "the bits are what the answer is kept by"
    poly = fmpz_poly(list(whole))
    return acb_poly(poly), acb_poly(poly.derivative())


def _settled(ball: Any, factor: Factor) -> Pole | bool | None:
    """The pole; False for one of the lower half plane, None where the ball is too wide."""
    from flint import acb, arb

    if ball.imag < 0:
        return False
    real = bool(ball.imag.contains(0))
    axis = bool(ball.real.contains(0))
    if axis and (not factor.mirrored or real):
        return None
    side = 0 if axis else (1 if ball.real > 0 else -1)
    place = acb(arb(0) if axis else ball.real, arb(0) if real else ball.imag)
    return Pole(place, factor.multiplicity, real=real, side=side)


def expand(ratio: Ratio) -> Expansion:
    """Partial fractions at the precision in force.

    Raises
    ------
    InseparableError
        as `poles`.

    Notes
    -----
    Around a pole p of multiplicity m, N(p + e) and D(p + e)/e^m, the latter as the product
    of its other roots, are series of m terms in e; their quotient holds the weights.
    """
    found = poles(ratio)
    top, bottom = list(ratio.numerator()), list(ratio.denominator())
    terms = tuple(_term(pole, found, top, bottom[-1]) for pole in found)
    if not all(weight.is_finite() for term in terms for weight in term.weights):
        raise InseparableError("two poles could not be told apart")
    return Expansion(terms, tuple(quotient(top, bottom)))


def _term(pole: Pole, every: Sequence[Pole], top: Sequence[Any], lead: Any) -> Term:
    from flint import acb

    count = pole.multiplicity
    below = [acb(lead)] + [acb(0)] * (count - 1)
    for other in every:
        copies = [other.place] if other.real else [other.place, other.place.conjugate()]
        for place in copies[1:] if other is pole else copies:
            for _ in range(other.multiplicity):
                below = _times_line(below, pole.place - place)
    quotient = _divided(around(top, pole.place, count), below)
    if pole.real:
        quotient = [acb(item.real) for item in quotient]
    return Term(pole, tuple(reversed(quotient)))


def _times_line(series: list[Any], constant: Any) -> list[Any]:
    """A truncated series times (constant + e)."""
    return [item * constant + (series[k - 1] if k else 0) for k, item in enumerate(series)]


def around(coefficients: Sequence[Any], place: Any, count: int) -> list[Any]:
    """The first Taylor coefficients of a polynomial around a place, by Horner's rule."""
    from flint import acb

    found = [acb(0)] * count
    for item in reversed(coefficients):
        found = _times_line(found, place)
        found[0] = found[0] + item
    return found


def _divided(top: Sequence[Any], bottom: Sequence[Any]) -> list[Any]:
    """The quotient of two series of the same length."""
    found: list[Any] = []
    for k, item in enumerate(top):
        rest = item
        for j in range(k):
            rest = rest - found[j] * bottom[k - j]
        found.append(rest / bottom[0])
    return found


def quotient(top: Sequence[Any], bottom: Sequence[Any]) -> list[Any]:
    """The polynomial part of top/bottom, by rising power."""
    rest, size = list(top), len(bottom) - 1
    while rest and rest[-1] == 0:
        rest.pop()
    found: list[Any] = []
    for power in range(len(rest) - 1, size - 1, -1):
        factor = rest[power] / bottom[-1]
        found.append(factor)
        for k, item in enumerate(bottom):
            rest[power - size + k] = rest[power - size + k] - factor * item
    return found[::-1]


def value_at(ratio: Ratio, s: Any) -> Any:
    """numerator/denominator at a complex ball."""
    top, bottom = (around(part(), s, 1)[0] for part in (ratio.numerator, ratio.denominator))
    return top / bottom


def expanded_at(expansion: Expansion, s: Any) -> Any:
    """The sum of an expansion at a complex ball: the same, worked out the other way."""
    from flint import acb

    total = acb(0)
    for power, item in enumerate(expansion.direct):
        total = total + item * s**power
    for term in expansion.terms:
        places: list[tuple[Any, Sequence[Any]]] = [(term.pole.place, term.weights)]
        if not term.pole.real:
            places.append((term.pole.place.conjugate(), [w.conjugate() for w in term.weights]))
        for place, weights in places:
            for k, weight in enumerate(weights):
                total = total + weight / (s - place) ** (k + 1)
    return total
