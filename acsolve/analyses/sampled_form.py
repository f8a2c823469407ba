"""A closed form over many values of the parts: coefficients once a sample, then all frequencies.

At s = jω a polynomial with real coefficients is its even powers plus j times its odd ones, so
that numerator and denominator over a block of samples and frequencies are products of two
small matrices: coefficients (samples, powers) times powers of ω (powers, frequencies).

What is checked at every point: with M(ω) the sum of the magnitudes of all terms of a
polynomial P, round-off changes P by less than (factors in a term + powers + few) · eps · M
(N. J. Higham, "Accuracy and Stability of Numerical Algorithms", 2002, section 5.1). Where
this allows a relative error above 1e-12 the point is left to elimination.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from math import frexp, ldexp, pi
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.closed_form import ClosedForm, generator_numbers
from acsolve.circuit.netlist import Netlist
from acsolve.equations.evaluate import FloatArithmetic
from acsolve.equations.sampled import sampled_values
from acsolve.equations.terms import Terms, compiled

Array: TypeAlias = NDArray[Any]

_EPS = float(np.finfo(float).eps)
_ALLOWED = 1e-12  # estimated relative error up to which a point is kept
_SQUARES = (1e-280, 1e280)  # squared magnitudes between which nothing is lost
_LARGEST_SHIFT = 900  # powers of two between numerator and denominator


@dataclass(frozen=True, slots=True, eq=False)
class Part:
    """Numerator or denominator over the frequencies.

    `turned` holds x ** k times the real and the imaginary part of j ** k, shapes
    (powers, frequencies), `plain` x ** k itself; `limit` is what M² may be at most, as a
    share of |P|², inverted.
    """

    terms: Terms
    powers: Array
    strictness: float

    def over(self, coefficients: Array) -> list[tuple[Array, Array] | None]:
        """Factors of the real and the imaginary part: (samples, some), (some, frequencies)."""
        count = len(self.powers)
        signs = np.array([1, 1j, -1, -1j])[np.arange(count) % 4]
        if np.iscomplexobj(coefficients):
            turned = coefficients * signs
            return [
                (np.ascontiguousarray(item), self.powers) for item in (turned.real, turned.imag)
            ]
        found: list[tuple[Array, Array] | None] = []
        for first, sign in ((0, signs.real), (1, signs.imag)):
            some = coefficients[:, first::2] * sign[first::2]
            found.append((some, self.powers[first::2]) if some.shape[1] else None)
        return found


@dataclass(frozen=True, slots=True, eq=False)
class SampledForm:
    """A closed form ready for samples of the values that are its symbols."""

    netlist: Netlist
    form: ClosedForm
    top: Part
    bottom: Part
    units: tuple[int, ...]

    @property
    def terms(self) -> int:
        """Terms of numerator and denominator."""
        return self.top.terms.count + self.bottom.terms.count

    @property
    def powers(self) -> int:
        """Powers of s of numerator and denominator."""
        return len(self.top.powers) + len(self.bottom.powers)

    def fill(self, values: Mapping[str, Array], answer: Array) -> Array:
        """Write the response of some samples; where it is not accurate, tell so.

        Parameters
        ----------
        values : name -> values in SI units, shape (samples,).
        answer : complex, shape (samples, frequencies), written to.

        Returns
        -------
        Places (sample, frequency) that are to be solved another way, shape (n, 2).
        """
        samples = len(answer)
        with np.errstate(all="ignore"):  # what is not finite is found by the check
            points = _points(self.netlist, self.form, values)
            scaled = [_in_unit(item, unit) for item, unit in zip(points, self.units, strict=True)]
            tops = self.top.terms.values(scaled, samples)
            bottoms = self.bottom.terms.values(scaled, samples)
            return _Block(self.top, tops, self.bottom, bottoms, answer).run()


_BLOCK = 12_800  # points in a block: a dozen arrays of it lie in the second cache (empirical)
_WIDEST_BLOCK = 3200  # frequencies in a block


class _Block:
    """Numerator and denominator over samples and frequencies, a block at a time."""

    def __init__(
        self,
        top: Part,
        tops: tuple[Array, Array],
        bottom: Part,
        bottoms: tuple[Array, Array],
        answer: Array,
    ) -> None:
        self._parts = ((top, tops), (bottom, bottoms))
        self._factors = [part.over(found[0]) for part, found in self._parts]
        self._answer = answer

    def run(self) -> Array:
        samples, points = self._answer.shape
        wide = max(1, min(points, _WIDEST_BLOCK))
        high = max(1, _BLOCK // wide)
        self._scratch = np.empty((7, high, wide))
        left = [np.empty((0, 2), dtype=int)]
        for row in range(0, samples, high):
            for column in range(0, points, wide):
                here = (slice(row, min(row + high, samples)), slice(column, column + wide))
                bad = self._block(*here)
                if bad is not None:
                    left.append(np.argwhere(bad) + np.array([row, column]))
        return np.concatenate(left)

    def _block(self, rows: slice, columns: slice) -> Array | None:
        """Fill one block; which of its points are not accurate, None where all are."""
        answer = self._answer[rows, columns]
        a, b, c, d, size, other, bound = self._scratch[:, : answer.shape[0], : answer.shape[1]]
        top = self._complex(0, rows, columns, (a, b))
        bottom = self._complex(1, rows, columns, (c, d))
        bad = self._unsure(0, rows, columns, top, (size, other, bound))
        worse = self._unsure(1, rows, columns, bottom, (size, other, bound))
        np.divide(1.0, size, out=size)  # 1/|denominator|²
        _quotient(top, bottom, size, other, answer)
        if bad is None or worse is None:
            return bad if worse is None else worse
        return bad | worse

    def _complex(
        self, which: int, rows: slice, columns: slice, out: tuple[Array, Array]
    ) -> list[Array | None]:
        """Real and imaginary part; None where it is zero everywhere."""
        found: list[Array | None] = []
        for factors, place in zip(self._factors[which], out, strict=True):
            if factors is None:
                found.append(None)
            else:
                left, right = factors
                found.append(np.matmul(left[rows], right[:, columns], out=place))
        return found

    def _unsure(
        self,
        which: int,
        rows: slice,
        columns: slice,
        found: Sequence[Array | None],
        scratch: tuple[Array, Array, Array],
    ) -> Array | None:
        """Points whose estimate is too large, None where there are none; `size` is |P|²."""
        size, other, bound = scratch
        (part, (_, sizes)) = self._parts[which]
        real, imaginary = found
        assert real is not None, "a polynomial has a term without s, be it zero"
        np.multiply(real, real, out=size)
        if imaginary is not None:
            np.multiply(imaginary, imaginary, out=other)
            np.add(size, other, out=size)
        np.matmul(sizes[rows], part.powers[:, columns], out=bound)
        bound *= part.strictness
        np.multiply(bound, bound, out=bound)
        low, high = _SQUARES
        if low < size.min() and size.max() < high and not (bound > size).any():
            return None
        nothing = (bound == 0) & (size == 0) & (which == 0)  # a zero of every term
        bad = ~((bound <= size) & (size > low) & (size < high) | nothing)
        return bad if bad.any() else None


def _quotient(
    top: Sequence[Array | None],
    bottom: Sequence[Array | None],
    inverse: Array,
    scratch: Array,
    answer: Array,
) -> None:
    """answer = (a + jb)·(c - jd)·inverse, where inverse = 1/|c + jd|²."""
    (a, b), (c, d) = top, bottom
    _dot(((a, c, 1), (b, d, 1)), inverse, scratch, answer.real)
    _dot(((b, c, 1), (a, d, -1)), inverse, scratch, answer.imag)


def _dot(
    pairs: Sequence[tuple[Array | None, Array | None, int]],
    inverse: Array,
    scratch: Array,
    out: Array,
) -> None:
    """The signed sum of products, times `inverse`, written to `out`."""
    known = [(x, y, sign) for x, y, sign in pairs if x is not None and y is not None]
    if not known:
        out[...] = 0
        return
    (x, y, sign), *rest = known
    np.multiply(x, y, out=scratch)
    if sign < 0:
        np.negative(scratch, out=scratch)
    for x, y, sign in rest:
        (np.add if sign > 0 else np.subtract)(scratch, x * y, out=scratch)
    np.multiply(scratch, inverse, out=out)


def sampled_form(
    netlist: Netlist, form: ClosedForm, values: Mapping[str, Array], hertz: Array
) -> SampledForm | None:
    """Prepare a closed form for samples of its symbols, over frequencies in hertz.

    Parameters
    ----------
    netlist : the circuit, the varied values symbols.
    form : its closed form.
    values : name -> values, shape (samples,), from which the units are chosen.
    hertz : shape (frequencies,).

    Returns
    -------
    None where the form is no ratio of polynomials in s, or its terms differ by more than
    doubles hold.
    """
    if not form.rational:
        return None
    with np.errstate(all="ignore"):  # odd samples only make poorer units
        points = _points(netlist, form, values)
        units = tuple(_unit(item) for item in points)
        frequency = _unit(2 * pi * hertz[hertz > 0])
    coefficients = form.coefficients()
    over, under = (compiled(item, units, frequency) for item in coefficients)
    if over is None or under is None:
        return None
    shift = over.top - under.top
    if abs(shift) > _LARGEST_SHIFT:
        return None
    x = 2 * pi * hertz * ldexp(1.0, -frequency)
    top, bottom = _part(over, x), _part(under, x)
    return SampledForm(netlist, form, _shifted(top, shift), bottom, units)


def _part(terms: Terms, x: Array) -> Part:
    count = len(terms.powers)
    powers = np.array([x**k for k in range(count)])
    roundings = terms.depth + count + 4
    return Part(terms, powers, 2 * roundings * _EPS / _ALLOWED)


def _shifted(part: Part, shift: int) -> Part:
    """The part with its numbers in units of one: the power of two goes to its powers of ω."""
    return Part(part.terms, part.powers * ldexp(1.0, shift), part.strictness)


def _points(netlist: Netlist, form: ClosedForm, values: Mapping[str, Array]) -> list[Any]:
    """The number, or one a sample, behind each generator of the form but s."""
    return generator_numbers(form, sampled_values(netlist, values), FloatArithmetic())


def _unit(numbers: Any) -> int:
    """The power of two that numbers are near to, in the mean of their logarithms."""
    size = np.abs(np.asarray(0.0 if numbers is None else numbers)).ravel()
    size = size[np.isfinite(size) & (size > 0)]
    if not len(size):
        return 0
    return frexp(float(np.exp(np.log(size).mean())))[1]


def _in_unit(number: Any, unit: int) -> Any:
    return None if number is None else number * ldexp(1.0, -unit)
