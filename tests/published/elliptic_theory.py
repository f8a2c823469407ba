"""Characteristic polynomials of elliptic low-passes of any order, to 80 digits.

Zeros of attenuation and of reflection from Jacobi's sn (W. Cauer, 1931; R. W. Daniels,
Approximation Methods for Electronic Filter Design, 1974, chapter 5). In an even order no zero
of transmission lies at infinity, and the reflection is not zero at 0: no ladder without
coupling has that. The trade's two ways out move points along x = ω² and leave the edge at 1:

    plain : nothing moved;
    open  : x -> x·(n - 1)/(n - x) moves the highest notch n to infinity;
    matched : x -> (x - r)·(n - 1)/((n - x)·(1 - r)) moves the lowest zero of reflection r to 0
        besides, so that source and load may be equal.

Polynomials are lists by rising power.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal

import mpmath

MP = mpmath.mp.clone()
MP.dps = 80

Kind = Literal["plain", "open", "matched"]


@dataclass(frozen=True)
class Characteristic:
    """Loss |H0/H|² = 1 + |F/N|²: `reflection` F, `top` N, and `hurwitz` E with |E|² = |N|² + |F|².

    `notches` are the zeros of N in rad/s, `stop_db` is the plain prototype's, `moved` takes
    x = ω² of the plain prototype to that of this one.
    """

    notches: tuple
    reflection: list
    top: list
    hurwitz: list
    stop_db: float
    moved: Callable


def characteristic(
    order: int, ripple_db: float, modulus: float, kind: Kind = "plain"
) -> Characteristic:
    """The polynomials with the band edge at 1 rad/s; the plain stop band starts at 1/modulus."""
    k = MP.mpf(modulus)
    reflected = _reflected(order, k)
    notches = [1 / (k**2 * x) for x in reflected]
    plain = _ratio_at(1 / k**2, reflected, notches, odd=order % 2)
    ripple = MP.sqrt(MP.mpf(10) ** (MP.mpf(ripple_db) / 10) - 1)
    stop = ripple * abs(plain / _ratio_at(1, reflected, notches, odd=order % 2))
    moved = _moved(kind, min(reflected), max(notches))
    here = [moved(x) for x in reflected]
    kept = [moved(x) for x in notches if kind == "plain" or x != max(notches)]
    odd, top = product(here, shift=bool(order % 2)), product(kept)
    factor = ripple / abs(_at(odd, 1j) / _at(top, 1j))
    reflection = [factor * value for value in odd]
    return Characteristic(
        tuple(MP.sqrt(x) for x in kept),
        reflection,
        top,
        left_half(top, reflection),
        float(10 * MP.log10(1 + stop**2)),
        moved,
    )


def stop_edge(order: int, modulus, kind: Kind) -> MP.mpf:
    """Where the stop band starts."""
    k = MP.mpf(modulus)
    lowest = min(_reflected(order, k))
    return MP.sqrt(_moved(kind, lowest, 1 / (k**2 * lowest))(1 / k**2))


def _reflected(order: int, k) -> list:
    """Zeros of reflection above 0, as x = ω²."""
    quarter = MP.ellipk(k**2)
    places = range(1, order // 2 + 1)
    steps = [(2 * j if order % 2 else 2 * j - 1) * quarter / order for j in places]
    return [MP.ellipfun("sn", step, m=k**2).real ** 2 for step in steps]


def _moved(kind: Kind, lowest, highest) -> Callable:
    if kind == "plain":
        return lambda x: x
    low = lowest if kind == "matched" else 0
    scale = (highest - 1) / (1 - low)
    return lambda x: (x - low) * scale / (highest - x)


def _ratio_at(x, reflected, notches, *, odd) -> MP.mpf:
    value = MP.sqrt(x) if odd else MP.mpf(1)
    for zero, pole in zip(reflected, notches, strict=True):
        value *= (x - zero) / (x - pole)
    return value


def _at(values, place):
    return MP.polyval(values[::-1], place)


def product(squares, *, shift: bool = False) -> list:
    """prod(s² + x), times s with `shift`."""
    whole = [MP.mpf(1)]
    for square in squares:
        whole = multiplied(whole, [square, MP.mpf(0), MP.mpf(1)])
    return [MP.mpf(0), *whole] if shift else whole


def multiplied(first, second) -> list:
    """The product of two polynomials."""
    total = [MP.mpf(0)] * (len(first) + len(second) - 1)
    for i, a in enumerate(first):
        for j, b in enumerate(second):
            total[i + j] += a * b
    return total


def added(first, second, scale=1) -> list:
    """The first plus `scale` times the second."""
    total = [MP.mpf(0)] * max(len(first), len(second))
    for k, value in enumerate(first):
        total[k] += value
    for k, value in enumerate(second):
        total[k] += scale * value
    return total


def divided(values, divisor) -> list:
    """The quotient; the remainder is rounding."""
    rest, found = list(values), []
    for power in range(len(values) - len(divisor), -1, -1):
        factor = rest[power + len(divisor) - 1] / divisor[-1]
        found.append(factor)
        for k, item in enumerate(divisor):
            rest[power + k] -= factor * item
    return found[::-1]


def trimmed(values) -> list:
    """Without leading coefficients that are rounding."""
    largest = max(map(abs, values))
    kept = list(values)
    while len(kept) > 1 and abs(kept[-1]) < largest * MP.mpf(10) ** -50:
        kept.pop()
    return kept


def left_half(top, reflection) -> list:
    """The polynomial E with E(s)·E(-s) = N(s)·N(-s) + F(s)·F(-s), roots on the left."""
    whole = added(multiplied(top, _mirrored(top)), multiplied(reflection, _mirrored(reflection)))
    roots = MP.polyroots(whole[::-1], maxsteps=500, extraprec=800)
    found = [MP.mpc(1)]
    for root in roots:
        if root.real < 0:
            found = multiplied(found, [-root, MP.mpc(1)])
    scale = MP.sqrt(abs(whole[-1]))
    return [scale * value.real for value in found]


def _mirrored(values) -> list:
    return [value * (-1) ** power for power, value in enumerate(values)]
