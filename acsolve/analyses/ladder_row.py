"""How far the phase turns over a row of equal copies, without going through them one by one.

A copy with the chain matrix M turns a load Y into m(Y) = (C + D·Y)/(A + B·Y) and has the voltage
ratio V_near/V_far = A + B·Y. From the far end backwards the loads tend to the eigenvector
(1, y) of the larger eigenvalue of M; with the smaller one over it called r,

    product over N copies of (A + B·Y_k) = lambda^N · (1 + q·r^N)/(1 + q),

q telling how far the load at the end is from y (image parameters; O. J. Zobel, Bell System
Technical Journal 2, 1923). The turn of one copy that ends in y is a sum of principal angles like
that of any ladder, N times it is the turn of lambda^N, and 1 + q·r^k never leaves the right half
plane where |q| <= 1 and |r| <= 1, so that the rest is a principal angle too.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Any, NamedTuple

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.two_by_two import Matrix

Array = NDArray[Any]

_BEYOND = 1e-6  # how far |q| or |r| may be above one: round-off
_STEPS = 32  # copies that are gone through one by one, at most
_LEFT = 1e-3  # |real|/size of 1 + q·r^k beyond which it is in the left half plane


class Passed(NamedTuple):
    """What a ladder does to the phase, in radians, and the admittance seen into it."""

    turn: Array
    into: Array


@dataclass(frozen=True, slots=True, eq=False)
class Row:
    """A row of equal copies, seen from the side of the drive.

    one : what one copy does at s under a load, both of shape (points,).
    matrix : M - 1 of one copy at s; where it is `turned`, the drive stands at the far end.
    """

    one: Callable[[Array, Array], Passed]
    matrix: Callable[[Array], Matrix]
    count: int
    turned: bool

    def passed(self, s: Array, load: Array) -> Passed:
        """What the whole row does; not a number where this way does not tell.

        Where |q| is above one the first copies are gone through, until it is not.
        """
        turn, into = self._at_once(s, load, self.count)
        gone, here = np.zeros_like(turn), np.arange(len(turn))
        for steps in range(1, min(_STEPS, self.count)):
            open_ = np.isnan(turn[here])
            here, load, gone = here[open_], load[open_], gone[open_]
            if not len(here):
                break
            one = self.one(s[here], load)
            gone, load = gone + one.turn, one.into
            rest = self._at_once(s[here], load, self.count - steps)
            turn[here], into[here] = gone + rest.turn, rest.into
        return Passed(turn, into)

    def _at_once(self, s: Array, load: Array, count: int) -> Passed:
        with np.errstate(all="ignore"):
            first, b, _, last = self.matrix(s)
            a, d = (last, first) if self.turned else (first, last)
            shift = (a + d) / 2  # cosh of the image propagation function, less one
            root = np.sqrt(shift * (shift + 2))
            root = np.where((root.conjugate() * (1 + shift)).real < 0, -root, root)
            image, other = ((d - a) / 2 + root) / b, ((d - a) / 2 - root) / b
            ratio = (1 + shift - root) / (1 + shift + root)
            away = (load - image) / (other - load)
            far = (other - image) / (other - load)  # 1 + q; nothing cancels beside a short
            power = count * np.log(ratio)
            near = far + away * np.expm1(power)
            into = (image + away * np.exp(power) * other) / near
            unfit = np.maximum(np.abs(away), np.abs(ratio)) > 1 + _BEYOND
            unfit |= _is_left(far) | _is_left(near)
            turn = count * self.one(s, image).turn + np.angle(far) - np.angle(near)
        return Passed(np.where(unfit, np.nan, turn), np.where(unfit, np.nan, into))


def _is_left(value: Array) -> NDArray[np.bool_]:
    return np.asarray(value.real < -_LEFT * np.abs(value))
