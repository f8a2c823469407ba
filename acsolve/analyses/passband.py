"""Bands between two cutoffs: bandwidth, centre, quality factor and the extremum inside."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
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
    """

    kind: Literal["pass", "stop"]
    low: float
    high: float
    extremum: float | None = None

    @property
    def width(self) -> float:
        """The bandwidth."""
        return self.high - self.low

    @property
    def centre(self) -> float:
        """The geometric mean of the edges."""
        return sqrt(self.low) * sqrt(self.high)

    @property
    def q(self) -> float | None:
        """Centre over bandwidth; None where both edges are one number."""
        return self.centre / self.width if self.width else None


def bands(cutoffs: Sequence[Cutoff], size: Magnitude | None = None) -> tuple[FrequencyBand, ...]:
    """The bands of some cutoffs in rising order; `size` locates their extrema exactly.

    The pass band below a first falling cutoff and that above a last rising one are none:
    they have one edge.
    """
    pairs = [
        (first.hertz, second.hertz, first.direction == "rising")
        for first, second in pairwise(cutoffs)
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
        )
        for low, high, rises in pairs
    )


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
