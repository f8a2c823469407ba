"""Bands between two cutoffs: bandwidth, centre, quality factor and the extremum inside."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from itertools import pairwise
from math import pi, sqrt
from typing import TYPE_CHECKING, Literal

if TYPE_CHECKING:
    from acsolve.analyses.cutoff import Cutoff
    from acsolve.analyses.magnitude import Magnitude


@dataclass(frozen=True, slots=True, kw_only=True)
class FrequencyBand:
    """What lies between two neighbouring cutoffs, frequencies in hertz.

    kind : `pass` between a rising and a falling one, `stop` between a falling and a rising.
    centre : the geometric mean of the edges; `q` is centre over bandwidth.
    extremum : where the gain is largest in a pass band, smallest in a stop band; None where
        it is not known.
    bandwidth : the width where it is known better than as a difference of two doubles.
    """

    kind: Literal["pass", "stop"]
    low: float
    high: float
    extremum: float | None = None
    bandwidth: float | None = None

    @property
    def width(self) -> float:
        """The bandwidth."""
        return self.high - self.low if self.bandwidth is None else self.bandwidth

    @property
    def centre(self) -> float:
        """The geometric mean of the edges."""
        return sqrt(self.low) * sqrt(self.high)

    @property
    def q(self) -> float | None:
        """Centre over bandwidth; None where both edges are one number."""
        return self.centre / self.width if self.width else None


@dataclass(frozen=True, slots=True, kw_only=True)
class BandForms:
    """A lone band in closed form, as texts SymPy reads: angular frequencies, and Q.

    `condition` says when they hold, None where they always do.
    """

    width: str
    centre: str
    q: str
    condition: str | None = None


def bands(
    cutoffs: Sequence[Cutoff], size: Magnitude | None = None, exact: Sequence[Fraction] = ()
) -> tuple[FrequencyBand, ...]:
    """The bands of some cutoffs in rising order; `size` locates their extrema exactly.

    `exact` are the same cutoffs as ω², for the width of narrow bands.

    The pass band below a first falling cutoff and that above a last rising one are none:
    they have one edge.
    """
    known = [_width(*edges) for edges in pairwise(exact)]
    widths: Sequence[float | None] = known or [None] * len(cutoffs)
    pairs = [
        (first.hertz, second.hertz, first.direction == "rising", width)
        for (first, second), width in zip(pairwise(cutoffs), widths, strict=False)
        if first.hertz is not None
        and second.hertz is not None
        and first.direction != second.direction
    ]
    places = () if size is None or not pairs else _stationary(size)
    return tuple(
        FrequencyBand(
            kind="pass" if rises else "stop",
            low=low,
            high=high,
            extremum=_extremum(places, low, high, largest=rises),
            bandwidth=width,
        )
        for low, high, rises, width in pairs
    )


def _width(low: Fraction, high: Fraction) -> float:
    """sqrt(high) - sqrt(low) in hertz; it errs by what the edges do, 2**-60 of them."""
    from flint import arb, fmpq

    from acsolve.algebra.ball import precision

    with precision(256):
        first, second = (arb(fmpq(x.numerator, x.denominator)) for x in (low, high))
        return float(((second - first) / (first.sqrt() + second.sqrt()) / (2 * arb.pi())).mid())


def _stationary(size: Magnitude) -> Sequence[tuple[float, float]]:
    """(hertz, |H|²) at every frequency where the slope of |H|² is zero."""
    from acsolve.algebra.ball import precision

    found = size.stationary()
    if not found.complete:
        return ()
    with precision(256):
        return [
            (sqrt(float(item.value)) / (2 * pi), float(size.value(item.value).mid()))
            for item in found.found
        ]


def _extremum(
    places: Sequence[tuple[float, float]], low: float, high: float, *, largest: bool
) -> float | None:
    inside = [(value, hertz) for hertz, value in places if low <= hertz <= high]
    if not inside:
        return None
    return (max(inside) if largest else min(inside))[1]
