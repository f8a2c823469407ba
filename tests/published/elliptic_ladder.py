"""Elliptic low-pass ladders of odd order, computed from the theory to 60 digits.

Zeros of attenuation and of reflection from Jacobi's sn (W. Cauer, 1931; R. W. Daniels,
Approximation Methods for Electronic Filter Design, 1974, chapter 5), the ladder by Darlington's
impedance and the removal of one attenuation pole after the other (S. Darlington, J. Math.
Phys. 18 (1939)): a shunt capacitor shifts a zero of the impedance to the pole that is wanted,
a parallel resonator in series takes it out.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

import mpmath

MP = mpmath.mp.clone()
MP.dps = 80


@dataclass(frozen=True)
class EllipticLadder:
    """Shunt capacitors, and between them resonators (L, C) in series; source and load 1 ohm."""

    shunts: tuple[Fraction, ...]
    resonators: tuple[tuple[Fraction, Fraction], ...]
    zeros: tuple[float, ...]
    stop_db: float


def elliptic_ladder(order: int, ripple_db: float, modulus: float) -> EllipticLadder:
    """The ladder with its band edge at 1 rad/s and its stop band from 1/modulus on."""
    k = MP.mpf(modulus)
    quarter = MP.ellipk(k**2)
    steps = [2 * j * quarter / order for j in range(1, (order + 1) // 2)]
    reflected = [MP.ellipfun("sn", step, m=k**2).real for step in steps]
    notches = [1 / (k * value) for value in reflected]
    odd = _product(reflected, shift=True)  # s·prod(s² + r²)
    top = _product(notches)  # prod(s² + n²)
    at_edge = abs(MP.polyval(odd[::-1], 1j) / MP.polyval(top[::-1], 1j))
    ripple = MP.sqrt(MP.mpf(10) ** (MP.mpf(ripple_db) / 10) - 1)
    factor = ripple / at_edge
    reflection = [factor * value for value in odd]
    stop = abs(MP.polyval(reflection[::-1], 1j / k) / MP.polyval(top[::-1], 1j / k))
    hurwitz = _left_half(top, reflection)
    above = _added(hurwitz, reflection)
    below = _added(hurwitz, [-value for value in reflection])
    while abs(below[-1]) < MP.mpf(10) ** -60:
        below.pop()
    shunts, resonators = _removed(above, below, notches)
    return EllipticLadder(
        shunts, resonators, tuple(map(float, notches)), float(10 * MP.log10(1 + stop**2))
    )


def _product(values, *, shift: bool = False) -> list:
    """prod(s² + v²), times s with `shift`, by rising power."""
    whole = [MP.mpf(1)]
    for value in values:
        whole = _multiplied(whole, [value**2, MP.mpf(0), MP.mpf(1)])
    return [MP.mpf(0), *whole] if shift else whole


def _multiplied(first, second) -> list:
    total = [MP.mpf(0)] * (len(first) + len(second) - 1)
    for i, a in enumerate(first):
        for j, b in enumerate(second):
            total[i + j] += a * b
    return total


def _added(first, second) -> list:
    size = max(len(first), len(second))
    return [
        (first[k] if k < len(first) else MP.mpf(0)) + (second[k] if k < len(second) else MP.mpf(0))
        for k in range(size)
    ]


def _mirrored(values) -> list:
    return [value * (-1) ** power for power, value in enumerate(values)]


def _left_half(top, reflection) -> list:
    """The polynomial E with E(s)·E(-s) = N(s)·N(-s) + F(s)·F(-s), roots on the left."""
    whole = _added(_multiplied(top, _mirrored(top)), _multiplied(reflection, _mirrored(reflection)))
    roots = MP.polyroots(whole[::-1], maxsteps=500, extraprec=800)
    left = [root for root in roots if root.real < 0]
    found = [MP.mpc(1)]
    for root in left:
        found = _multiplied(found, [-root, MP.mpc(1)])
    scale = MP.sqrt(abs(whole[-1]))
    return [scale * value.real for value in found]


def _removed(above, below, notches) -> tuple[tuple, tuple]:
    """Elements of the impedance above/below, its pole at infinity in an odd branch."""
    admittance = (above, below)  # the dual of Darlington's impedance: a shunt comes first
    shunts, resonators = [], []
    for notch in _ordered(notches):
        place = MP.mpc(0, notch)
        top, bottom = admittance
        value = MP.polyval(top[::-1], place) / MP.polyval(bottom[::-1], place)
        shunt = (value / place).real
        shunts.append(_fraction(shunt))
        rest = _added(top, [-shunt * item for item in [MP.mpf(0), *bottom]])
        # Z = bottom/rest has a pole at the notch: Z = s·a/(s² + n²) + what is left
        quotient = _divided(rest, [notch**2, MP.mpf(0), MP.mpf(1)])
        a = (MP.polyval(bottom[::-1], place) / (place * MP.polyval(quotient[::-1], place))).real
        resonators.append((_fraction(a / notch**2), _fraction(1 / a)))
        left = _divided(
            _added(bottom, [-a * item for item in [MP.mpf(0), *quotient]]),
            [notch**2, MP.mpf(0), MP.mpf(1)],
        )
        admittance = (quotient, left)
    top, bottom = admittance
    last = top[-1] / bottom[-1] if len(top) > len(bottom) else top[1] / bottom[0]
    shunts.append(_fraction(last))
    return tuple(shunts), tuple(resonators)


def _ordered(notches) -> list:
    """An order in which the elements come out positive: the lowest in the middle."""
    ordered = sorted(notches)
    return ordered[1::2] + ordered[0::2][::-1]


def _divided(values, divisor) -> list:
    """The quotient; the remainder is rounding."""
    rest, found = list(values), []
    for power in range(len(values) - len(divisor), -1, -1):
        factor = rest[power + len(divisor) - 1] / divisor[-1]
        found.append(factor)
        for k, item in enumerate(divisor):
            rest[power + k] -= factor * item
    return found[::-1]


def _fraction(value) -> Fraction:
    return Fraction(int(MP.nint(value * MP.mpf(10) ** 40)), 10**40)
