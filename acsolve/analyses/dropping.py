"""Which terms of a closed form can go: tried one after another, the smallest first."""

from __future__ import annotations

from collections import Counter
from collections.abc import Sequence
from fractions import Fraction
from math import inf

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cut import SIDES, Powers, Side, Term, scale_of, terms
from acsolve.analyses.spread import Spread
from acsolve.equations.evaluate import FloatArithmetic, Scalar

Complex = NDArray[np.complex128]
Floats = NDArray[np.float64]


class Samples:
    """Every term of a closed form at sampled frequencies and values, in doubles."""

    def __init__(self, form: ClosedForm, spread: Spread, hertz: Floats, places: Floats) -> None:
        arithmetic = FloatArithmetic()
        columns = [places[:, k : k + 1] for k in range(places.shape[1])]
        self._shape = (len(places), len(hertz))
        with np.errstate(all="ignore"):
            evaluate = spread.evaluator(arithmetic, columns)
            s = 2j * np.pi * hertz[np.newaxis, :]
            self._powers = Powers(form, evaluate, arithmetic, s)
        self._scales = {side: scale_of(form, side) for side in SIDES}
        self.terms = terms(form)
        self._totals = {side: self.total(self._of(side)) for side in SIDES}

    def _of(self, side: Side) -> list[Term]:
        return [item for item in self.terms if item.side == side]

    def value(self, term: Term) -> Complex:
        """One term, scaled as its side is; shape (samples, frequencies)."""
        found: Scalar = FloatArithmetic().number(
            Fraction(term.coefficient, self._scales[term.side])
        )
        inner = tuple(a - b for a, b in zip(term.exponents, term.varying, strict=True))
        with np.errstate(all="ignore"):
            for exponents in (inner, term.varying):  # columns first: few products are full
                product = self._powers.product(exponents)
                found = found if product is None else found * product
        return np.broadcast_to(np.asarray(found, dtype=complex), self._shape)

    def total(self, chosen: Sequence[Term]) -> Complex:
        """The sum of some terms of one side."""
        total = np.zeros(self._shape, dtype=complex)
        for item in chosen:
            total += self.value(item)
        return total

    def share(self, side: Side, dropped: Complex) -> float:
        """The largest part of a whole side that something makes up."""
        with np.errstate(all="ignore"):
            sizes = np.abs(dropped / self._totals[side])
        return float(np.max(np.where(np.isfinite(sizes), sizes, np.where(dropped == 0, 0, inf))))

    def error(self, gone: dict[Side, Complex | None]) -> float:
        """The largest relative error where the sums `gone` are dropped (None: nothing)."""
        n, d = gone["numerator"], gone["denominator"]
        with np.errstate(all="ignore"):
            x = 0 if d is None else d / (self._totals["denominator"] - d)
            y = 0 if n is None else n / self._totals["numerator"]
            sizes = np.abs(x - y * (1 + x))
        return float(np.max(np.where(np.isfinite(sizes), sizes, inf)))


def droppable(samples: Samples, limit: float) -> tuple[Term, ...]:
    """Terms that can go together at an error of at most `limit` over the samples.

    Single terms and whole coefficients are tried in the order of the largest share of their
    side that they make up; what raises the error above the limit stays. A coefficient whose
    terms cancel is small as a whole though its terms are not.
    """
    gone: dict[Side, Complex | None] = dict.fromkeys(SIDES)
    dropped: dict[Term, None] = {}
    left = Counter(item.side for item in samples.terms)
    for share, side, members in _candidates(samples):
        if share > _HOPELESS * limit:
            break
        new = [item for item in members if item not in dropped]
        if not new or left[side] == len(new):
            continue
        before = gone[side]
        more = samples.total(new)
        trial = {**gone, side: more if before is None else before + more}
        if samples.error(trial) <= limit:
            gone = trial
            dropped.update(dict.fromkeys(new))
            left[side] -= len(new)
    return tuple(dropped)


_HOPELESS = 4  # times the limit: nothing dropped before can make up for so large a share


def _candidates(samples: Samples) -> list[tuple[float, Side, tuple[Term, ...]]]:
    """Single terms and whole coefficients of more than one, smallest share first."""
    groups: dict[tuple[Side, tuple[int, ...]], list[Term]] = {}
    for item in samples.terms:
        groups.setdefault((item.side, item.varying), []).append(item)
    found: list[tuple[float, int, Side, tuple[Term, ...]]] = []
    for (side, _), members in groups.items():
        for item in members:
            found.append((samples.share(side, samples.value(item)), len(found), side, (item,)))
        if len(members) > 1:
            whole = samples.share(side, samples.total(members))
            found.append((whole, len(found), side, tuple(members)))
    found.sort(key=lambda item: item[:2])
    return [(share, side, members) for share, _, side, members in found]
