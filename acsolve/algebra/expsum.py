"""Sums of polynomials times exponentials: real functions of time that can be enclosed.

y(t) = sum over terms of w_k·t^k/k!·exp(p·t), a complex term with its conjugate. Terms are kept
as balls of any precision; doubles are used where an estimate says that they suffice.
"""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from math import comb, factorial
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.ball import precision, working_bits
from acsolve.algebra.residue import Expansion, Ratio, Term, at_start, expand
from acsolve.algebra.taylor import point

_MOST_GUARD = 4096
_LOST = 40  # of the bits that were asked for
_PRECISIONS = (160, 320, 640, 1280, 2560)
_RELATIVE = 2.0**-42  # estimated error of doubles above which balls are used
_NOTHING = 2.0**-900  # of the size of its terms: a value that no precision tells from zero
_BLOCK = 1 << 20  # numbers held at once while terms are summed up


@dataclass(frozen=True, slots=True)
class Part:
    """A term at the precision of the moment: exponent p, weights, 2 for a pair, else 1."""

    place: Any
    weights: tuple[Any, ...]
    copies: int


class ExponentialSum:
    """The inverse Laplace transform of a ratio, for t > 0, its polynomial part left out.

    Expansions are worked out once for each precision.
    """

    def __init__(self, ratio: Ratio) -> None:
        self.ratio = ratio
        self._known: dict[int, Expansion] = {}
        self._guard = 0  # bits that are lost in the products of many poles

    def __reduce__(self) -> tuple[Any, ...]:
        """Pickled as the ratio alone: expansions are worked out again where they are needed."""
        return ExponentialSum, (self.ratio,)

    def expansion(self) -> Expansion:
        """Partial fractions at the precision in force or better."""
        bits = next((item for item in _PRECISIONS if item >= working_bits() + 16), _PRECISIONS[-1])
        while bits not in self._known:
            with precision(bits + self._guard):
                found = expand(self.ratio)
                sharp = _sharp(found, bits)  # radii would be rounded up at less precision
            if self._guard >= _MOST_GUARD or sharp:
                self._known[bits] = found
            else:
                self._guard = 2 * self._guard or bits
        return self._known[bits]

    def start(self) -> Any:
        """The value just after 0, at the precision in force, from the ends of the polynomials."""
        return at_start(self.ratio)

    def constant(self) -> Any:
        """The term that neither grows nor decays, at the precision in force; 0 without one."""
        from flint import arb

        for term in self.expansion().terms:
            if term.pole.real and term.pole.side == 0:
                return term.weights[0].real
        return arb(0)

    def values(self, seconds: NDArray[np.float64]) -> NDArray[np.float64]:
        """The function at times t >= 0, any shape, right to about 2**-42 relative."""
        flat = np.asarray(seconds, dtype=float).ravel()
        with precision(128):
            parts = [_Doubles.of(part) for part in parts_of(self.expansion().terms)]
        found = np.zeros(len(flat))
        step = max(1, _BLOCK // max(1, sum(len(part.weights) for part in parts)))
        for start in range(0, len(flat), step):
            block = slice(start, start + step)
            found[block] = self._block(flat[block], parts)
        return found.reshape(np.shape(seconds))

    def _block(self, seconds: NDArray[np.float64], parts: Sequence[_Doubles]) -> Any:
        total, doubt = np.zeros(len(seconds)), np.zeros(len(seconds))
        with np.errstate(all="ignore"):  # what is not finite is worked out in balls
            for part in parts:
                value, error = part.values(seconds)
                total, doubt = total + value, doubt + error
            unsure = ~(doubt <= _RELATIVE * np.abs(total)) | (seconds == 0)
        for place in np.flatnonzero(unsure):
            total[place] = self.value(Fraction(float(seconds[place])))
        return total

    def value(self, seconds: Fraction) -> float:
        """The function at one time, from balls, right to the last place or two."""
        if seconds == 0:
            with precision(128):
                return nearest(self.start())
        found = float("nan")
        for bits in (128, 256, 512, 1024, 2048):
            with precision(bits):
                ball = self(point(seconds), 0)[0]
                if not ball.is_finite():
                    continue
                found = nearest(ball)
                if ball.rad() <= abs(ball).mid() * 2.0**-53:
                    break
                if abs(ball) < self.size(point(seconds)).abs_upper() * _NOTHING:
                    return 0.0
        return found

    def __call__(self, x: Any, order: int) -> list[Any]:
        """Taylor coefficients 0 to `order` over the real ball x, each an enclosure."""
        return taylor(self.expansion().terms, x, order)

    def size(self, x: Any) -> Any:
        """The sum of the sizes of all terms over the real ball x."""
        return size_of(self.expansion().terms, x)


def _sharp(expansion: Expansion, bits: int) -> bool:
    """Whether the highest weight of every pole, which is not zero, is known to these bits."""
    return all(
        term.weights[-1].abs_upper() - term.weights[-1].abs_lower()
        <= term.weights[-1].abs_lower() * 2.0 ** (_LOST - bits)
        for term in expansion.terms
    )


@dataclass(frozen=True, slots=True)
class Tail:
    """An exponential sum without its constant term, as jets."""

    whole: ExponentialSum

    def terms(self) -> list[Term]:
        """Its terms at the precision in force."""
        found = []
        for term in self.whole.expansion().terms:
            if term.pole.real and term.pole.side == 0:
                if len(term.weights) > 1:
                    found.append(Term(term.pole, (term.weights[0] * 0, *term.weights[1:])))
                continue
            found.append(term)
        return found

    def __call__(self, x: Any, order: int) -> list[Any]:
        """Taylor coefficients over the real ball x."""
        return taylor(self.terms(), x, order)

    def size(self, x: Any) -> Any:
        """The sum of the sizes of all terms."""
        return size_of(self.terms(), x)


@dataclass(frozen=True, slots=True)
class Shifted:
    """sign·f(t) - level, the level a real ball that is made at the precision in force."""

    inner: Tail
    level: Callable[[], Any]
    sign: int = 1

    def __call__(self, x: Any, order: int) -> list[Any]:
        """Taylor coefficients over the real ball x."""
        found = [self.sign * item for item in self.inner(x, order)]
        found[0] = found[0] - self.level()
        return found

    def size(self, x: Any) -> Any:
        """The sum of the sizes of all terms and of the level."""
        return self.inner.size(x) + abs(self.level())


def parts_of(terms: Sequence[Term]) -> list[Part]:
    """The terms with how many conjugates each stands for."""
    return [Part(term.pole.place, term.weights, 1 if term.pole.real else 2) for term in terms]


def taylor(terms: Sequence[Term], x: Any, order: int) -> list[Any]:
    """Taylor coefficients 0 to `order` of a sum of terms over the real ball x."""
    from flint import acb, arb

    total = [arb(0)] * (order + 1)
    for part in parts_of(terms):
        grown = (part.place * x).exp() * part.copies
        series = [acb(1)]
        for k in range(1, order + 1):
            series.append(series[-1] * part.place / k)
        inner = _polynomial_at(part.weights, x)
        for k in range(order + 1):
            item = acb(0)
            for j, weight in enumerate(inner[: k + 1]):
                item = item + weight * series[k - j]
            total[k] = total[k] + (grown * item).real
    return total


def _polynomial_at(weights: Sequence[Any], x: Any) -> list[Any]:
    """Taylor coefficients at x of the sum of w_k·t^k/k!."""
    if len(weights) == 1:
        return [weights[0]]
    return [
        sum(weights[k] * x ** (k - j) * comb(k, j) / factorial(k) for k in range(j, len(weights)))
        for j in range(len(weights))
    ]


def size_of(terms: Sequence[Term], x: Any) -> Any:
    """The sum of |w_k|·t^k/k!·exp(Re p·t) over the real ball x."""
    from flint import arb

    total = arb(0)
    for part in parts_of(terms):
        inner = sum(abs(w) * abs(x) ** k / factorial(k) for k, w in enumerate(part.weights))
        total = total + inner * (part.place.real * x).exp() * part.copies
    return total


def bound_after(terms: Sequence[Term], x: Any) -> Any:
    """A real ball above |sum| at every time from x on; infinite where a term does not decay."""
    from flint import arb

    total = arb(0)
    for part in parts_of(terms):
        rate = -part.place.real
        for k, weight in enumerate(part.weights):
            if k and bool(weight == 0):
                continue
            if not rate > 0:
                return arb("inf")
            highest = x.max(arb(k) / rate)  # where t^k·exp(-rate·t) is largest
            size = abs(weight) * highest**k / factorial(k) * (-rate * highest).exp()
            total = total + size * part.copies
    return total


@dataclass(frozen=True, slots=True)
class _Doubles:
    """A part in doubles."""

    place: complex
    weights: tuple[complex, ...]
    copies: int

    @classmethod
    def of(cls, part: Part) -> _Doubles:
        """The nearest doubles."""
        weights = tuple(complex(w) / factorial(k) for k, w in enumerate(part.weights))
        return cls(complex(part.place), weights, part.copies)

    def values(self, seconds: NDArray[np.float64]) -> tuple[Any, Any]:
        """The part at times, and an estimate of its error."""
        grown = self.copies * np.exp(self.place * seconds)
        inner, size = np.zeros(len(seconds), dtype=complex), np.zeros(len(seconds))
        for weight in reversed(self.weights):
            inner = inner * seconds + weight
            size = size * seconds + abs(weight)
        error = 2.0**-52 * (4 + np.abs(self.place) * seconds) * size * np.abs(grown)
        return (inner * grown).real, error


def nearest(ball: Any) -> float:
    """A real ball's middle as a double; infinite where it is beyond the range of doubles."""
    middle = ball.mid()
    if abs(middle) > 1.7976931348623157e308:
        return float("inf") if middle > 0 else float("-inf")
    return float(middle)
