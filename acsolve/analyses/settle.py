"""Rise, delay, overshoot and settling of an exponential sum, from its certified roots.

Times are counted from the step, levels from zero, the output before it. The time t that a
response passes a level first, or leaves a band around its final value last, is a root that is
isolated in balls. Beyond the times that are searched the exponential bound of what is left
shows that nothing more can come.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import factorial
from typing import Any

import numpy as np

from acsolve.algebra.ball import precision
from acsolve.algebra.bracket import Root, outermost
from acsolve.algebra.expsum import ExponentialSum, Shifted, Tail, bound_after, parts_of
from acsolve.algebra.residue import Term
from acsolve.algebra.summit import summit
from acsolve.algebra.taylor import Cell, enclosure, point, sign

_MOST = 40_000  # cells that one figure may cost
_BITS = 256


@dataclass(frozen=True, slots=True, kw_only=True)
class Figures:
    """What is told of a step, None where it does not exist; `reasons` say why, by its name.

    rise_s : from the first 10 % to the first 90 % of the final value.
    delay_s : to the first 50 %.
    settling_s : when it enters the band around the final value for good.
    overshoot : the largest value beyond the final one, as a share of it; at `peak_s`, None
        where there is none.
    """

    rise_s: float | None = None
    delay_s: float | None = None
    settling_s: float | None = None
    overshoot: float | None = None
    peak_s: float | None = None
    levels_s: tuple[float | None, float | None, float | None] = (None, None, None)
    reasons: tuple[tuple[str, str], ...] = ()


NAMES = ("rise_s", "delay_s", "settling_s", "overshoot")


def none_of_them(reason: str) -> Figures:
    """No figures, for one reason."""
    return Figures(reasons=tuple((name, reason) for name in NAMES))


_NOTHING = 2.0**-60  # of the final value: no overshoot to speak of
_LOOKED, _SAMPLES = Fraction(1, 1000), 1000  # where samples look for an overshoot
_EARLY, _ZOOMS = 40, 6  # in shortest time constants; how often the highest sample is zoomed at
_UNDECIDED = "it could not be told apart with certainty"


def figures(whole: ExponentialSum, *, band: Fraction) -> Figures:
    """The figures of a response that tends to a final value other than zero.

    Parameters
    ----------
    whole : the response; every term but the constant decays.
    band : half the width of the settling band as a share of the final value.
    """
    with precision(_BITS):
        worker = _Worker(whole)
        levels = tuple(worker.reached(Fraction(share, 100)) for share in (10, 50, 90))
        settled = worker.settled(band)
        over, peak = worker.overshoot()
    low, middle, high = levels
    found = {
        "rise_s": None if low is None or high is None else float(high - low),
        "delay_s": None if middle is None else float(middle),
        "settling_s": None if settled is None else float(settled),
        "overshoot": over,
    }
    return Figures(
        **found,
        peak_s=peak,
        levels_s=tuple(None if item is None else float(item) for item in (low, middle, high)),  # type: ignore[arg-type]
        reasons=tuple((name, _UNDECIDED) for name, value in found.items() if value is None),
    )


class _Worker:
    """One response: e(t) = y(t) - final, turned so that the final value is above zero."""

    def __init__(self, whole: ExponentialSum) -> None:
        self.whole = whole
        self.tail = Tail(whole)
        self.sign = 1 if whole.constant() > 0 else -1
        self.scale = _time_scale(self.tail.terms())

    def final(self) -> Any:
        """The final value, above zero."""
        return self.whole.constant() * self.sign

    def start(self) -> Any:
        """The value just after 0, turned likewise."""
        return self.whole.start() * self.sign

    def above(self, share: Fraction) -> Shifted:
        """y - share·final."""
        return Shifted(self.tail, lambda: self.final() * point(share - 1), self.sign)

    def reached(self, share: Fraction) -> Fraction | None:
        """When the response first reaches a share of its final value; 0 if by a jump."""
        jets = self.above(share)
        if not self.start() - self.final() * point(share) < 0:
            return Fraction(0)
        low = self._clear(jets)
        high = self.bounded_from(self.final() * point(1 - share))
        if low is None or high is None:
            return None
        found = outermost(jets, Cell(low, max(high, 2 * low)), last=False, most=_MOST)
        return found.cell.middle if isinstance(found, Root) else None

    def settled(self, band: Fraction) -> Fraction | None:
        """When |e| comes below band·final for good."""
        last: list[Fraction] = []
        edge = self.final() * point(band)
        high = self.bounded_from(edge)
        if high is None:
            return None
        for side in (1, -1):
            jets = self.above(1 + side * band)
            low = self._clear(jets)
            if low is None:
                return None
            if low >= high:
                continue
            found = outermost(jets, Cell(low, high), last=True, most=_MOST)
            if isinstance(found, Root):
                last.append(found.cell.middle)
            elif found is not None:
                return None
        return max(last, default=Fraction(0))

    def _clear(self, jets: Shifted) -> Fraction | None:
        """A time before which the function has no root."""
        low = Fraction(self.scale) / 16
        for _ in range(60):
            if sign(enclosure(jets, Cell(Fraction(0), low)).value):
                return low
            low /= 4
        return None

    def bounded_from(self, size: Any) -> Fraction | None:
        """A time from which |e| stays below a size above zero, nearly the first that shows it."""
        terms = self.tail.terms()
        if not size > 0:
            return None
        low, high = Fraction(0), Fraction(self.scale)
        if not terms or bound_after(terms, point(low)) < size:
            return high / 2**20
        for _ in range(4000):
            if bound_after(terms, point(high)) < size:
                break
            low, high = high, 2 * high
        else:
            return None
        for _ in range(12):
            middle = Fraction(float((low + high) / 2))
            if bound_after(terms, point(middle)) < size:
                high = middle
            else:
                low = middle
        return high

    def overshoot(self) -> tuple[float | None, float | None]:
        """The largest e/final and when; 0 and None where the final value is never passed."""
        terms = self.tail.terms()
        if not terms:
            return 0.0, None
        seen = self._seen_beyond()
        end, below = (seen, False) if seen is not None else self._end_of_search(terms)
        jets = self.above(Fraction(1))
        low = self._start_of_search(jets)
        if end is None or low is None:
            return None, None
        jump = self.start() - self.final()
        for _ in range(8):
            top = summit(jets, Cell(low, max(end, 2 * low)), most=_MOST)
            if not top.value.is_finite():
                return None, None
            if jump > 0 and jump > top.value:
                return _share(jump, self.final()), 0.0
            if not top.attained > 0 and not below:
                end *= 2
                continue
            if not top.attained > 0:
                nothing = not top.value > 0 and top.value < self.final() * _NOTHING
                return (0.0, None) if nothing else (None, None)
            needed = self.bounded_from(top.attained)
            if needed is None:
                return None, None
            if needed <= end:
                return _share(top.value, self.final()), float(top.tops[0].cell.middle)
            end = needed
        return None, None

    def _seen_beyond(self) -> Fraction | None:
        """From when on nothing is higher than what a few samples show; None where none is."""
        high = self.bounded_from(self.final() * point(_LOOKED))
        if high is None:
            return None
        steps = np.arange(1, _SAMPLES + 1) / _SAMPLES
        early = min(float(high), _EARLY * self.scale)  # a sharp resonance is highest at once
        times = np.concatenate([float(high) * steps, early * steps])
        for _ in range(_ZOOMS):
            place = float(times[np.argmax(self.sign * self.whole.values(times))])
            width = np.min(np.abs(times[times != place] - place))
            times = place + width * np.append(np.linspace(-0.99, 1, 41), 0)
        best = Fraction(place)
        return self.bounded_from(self.sign * self.tail(point(best), 0)[0])

    def _start_of_search(self, jets: Shifted) -> Fraction | None:
        """A time up to which the response runs one way, or stays below its final value."""
        low = Fraction(self.scale) / 2**20
        for _ in range(60):
            found = enclosure(jets, Cell(Fraction(0), low))
            if sign(found.slope) or sign(found.value) < 0:
                return low
            low /= 4
        return None

    def _end_of_search(self, terms: list[Term]) -> tuple[Fraction | None, bool]:
        """Where the search for the peak may end, and whether e is below zero from there on.

        A real pole that decays slowest, or as slowly as any and with the largest weight, keeps
        the sign of its term. Otherwise the final value is passed time and again, and the end is
        only a guess.
        """
        leading = slowest(terms)
        for lead in (item for item in leading if item.pole.real):
            after = dominates_from(lead, [item for item in terms if item is not lead])
            if after is not None:
                return after, bool(lead.weights[-1].real * self.sign < 0)
        pairs = [item for item in leading if not item.pole.real]
        if not pairs:
            return None, False
        rest = [item for item in terms if all(item is not other for other in leading)]
        after = dominates_from(pairs[0], rest)
        period = Fraction(float(7 / pairs[0].pole.place.imag.abs_lower()))
        return None if after is None else after + period, False


def _share(size: Any, final: Any) -> float:
    return float((size / final).mid())


def slowest(terms: list[Term]) -> list[Term]:
    """The terms that decay slowest: all whose rates are not told apart from the slowest.

    Rates that agree to some 250 bits are taken as equal. Were they not, it would show after
    2**200 time constants only, when what is left is beyond the range of doubles.
    """
    best = max(terms, key=lambda item: float(item.pole.place.real.mid()))
    rate = best.pole.place.real
    return [item for item in terms if not item.pole.place.real < rate]


def dominates_from(leading: Term, others: list[Term]) -> Fraction | None:
    """A time from which one term outweighs all others together, and its own lower powers.

    Everything is divided by the leading t^k·exp(Re p·t): what is left of the rest decays.
    """
    power = len(leading.weights) - 1
    rate = leading.pole.place.real
    rest = [
        (
            k - power,
            rate - part.place.real,
            abs(weight) * part.copies * factorial(power) / factorial(k),
        )
        for part in parts_of(others)
        for k, weight in enumerate(part.weights)
    ]
    rest += [
        (k - power, None, abs(weight) * factorial(power) / factorial(k))
        for k, weight in enumerate(leading.weights[:-1])
    ]
    time = Fraction(_time_scale([leading, *others]))
    if any(gap is None and count > 0 for count, gap, _ in rest):
        return None
    for _ in range(200):
        if _total(rest, point(time)) < abs(leading.weights[-1]):
            return time
        time *= 2
    return None


def _gap(rate: Any, other: Any) -> Any:
    """How much faster the other decays, None where they decay alike."""
    gap = rate - other
    return gap if gap > 0 else None


def _total(rest: list[tuple[int, Any, Any]], x: Any) -> Any:
    """A bound from x on of the sum of size·t^power·exp(-gap·t)."""
    from flint import arb

    total = arb(0)
    for power, gap, size in rest:
        highest = x.max(power / gap) if power > 0 else x
        decay = arb(1) if gap is None else (-gap * highest).exp()
        total = total + size * highest**power * decay
    return total


def _time_scale(terms: list[Term]) -> float:
    """The shortest time constant."""
    return 1 / max((float(abs(item.pole.place).mid()) for item in terms), default=1.0)
