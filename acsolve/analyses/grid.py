"""Bands and frequency grids; whole decades come out as the doubles that were meant."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from math import ceil, floor, isfinite, log10

import numpy as np
from numpy.typing import NDArray

from acsolve.codes import Code
from acsolve.errors import AnalysisError, Diagnostic

MOST_POINTS = 10_000_000
PER_DECADE = 50  # where nothing else is asked for


@dataclass(frozen=True, slots=True)
class HertzBand:
    """Two edges in hertz, exact."""

    low: Fraction
    high: Fraction

    def __str__(self) -> str:
        return f"{_hertz(self.low)} .. {_hertz(self.high)}"


def logarithmic(
    band: HertzBand, *, per_decade: int | None = None, points: int | None = None
) -> NDArray[np.float64]:
    """Frequencies at equal ratios, both edges among them.

    Parameters
    ----------
    band : edges in hertz, both above zero.
    per_decade : points a decade, counted from the low edge (default 50); the last step
        before the high edge may be shorter.
    points : number of points in all, instead.

    Raises
    ------
    AnalysisError
        [sweep.band] the low edge is not above zero, or not below the high one;
        [sweep.points] the number of points is not sensible.

    """
    _check_band(band)
    if band.low <= 0:
        raise _refuse(
            "sweep.band",
            f"a logarithmic band starts above 0 Hz, got {band}",
            "Give a low edge above zero, or ask for a linear grid.",
        )
    if points is None:
        return _per_decade(band, PER_DECADE if per_decade is None else per_decade)
    _check_count(points)
    decades = _decades(band)
    ratio = np.arange(points) / (points - 1)
    grid = float(band.low) * 10.0 ** (decades * ratio)
    whole = round(decades)
    if band.low * Fraction(10) ** whole == band.high:
        _put_decades(grid, band.low, whole, Fraction(points - 1, whole))
    return _with_edges(grid, band)


def linear(band: HertzBand, *, points: int) -> NDArray[np.float64]:
    """Frequencies at equal distances, both edges among them; the low edge may be 0 Hz.

    Raises
    ------
    AnalysisError
        [sweep.band], [sweep.points] as for `logarithmic`.

    """
    _check_band(band)
    _check_count(points)
    return _with_edges(np.linspace(float(band.low), float(band.high), points), band)


def explicit(frequencies: list[Fraction]) -> NDArray[np.float64]:
    """The frequencies that were named, in the order in which they were named.

    Raises
    ------
    AnalysisError
        [sweep.points] there is none; [sweep.band] one is negative.

    """
    if not frequencies:
        raise _refuse("sweep.points", "there is no frequency to answer for", "Name at least one.")
    for item in frequencies:
        if item < 0:
            raise _refuse(
                "sweep.band",
                f"a frequency is negative: {_hertz(item)}",
                "Frequencies start at 0 Hz; a band is written 10Hz..100kHz, with two dots.",
            )
    return np.array([float(item) for item in frequencies])


def _per_decade(band: HertzBand, per_decade: int) -> NDArray[np.float64]:
    if per_decade < 1:
        raise _too_few(per_decade, 1, "points per decade")
    steps = _decades(band) * per_decade
    count = ceil(steps - 1e-9 * max(steps, 1)) + 1
    _check_most(count)
    grid = float(band.low) * 10.0 ** (np.arange(count) / per_decade)
    _put_decades(grid, band.low, floor((count - 1) / per_decade), Fraction(per_decade))
    return _with_edges(grid, band)


def _put_decades(grid: NDArray[np.float64], low: Fraction, decades: int, spacing: Fraction) -> None:
    """Write the whole decades above the low edge as exactly rounded numbers."""
    for decade in range(decades + 1):
        place = decade * spacing
        if place.denominator == 1 and place < len(grid):
            grid[int(place)] = float(low * 10**decade)


def _with_edges(grid: NDArray[np.float64], band: HertzBand) -> NDArray[np.float64]:
    grid[0], grid[-1] = float(band.low), float(band.high)
    return grid


def _decades(band: HertzBand) -> float:
    return log10(band.high / band.low)


def _check_band(band: HertzBand) -> None:
    if band.low < 0:
        raise _refuse(
            "sweep.band",
            f"a band starts at 0 Hz or above, got {band}",
            "Frequencies are not negative here: give the positive edges.",
        )
    if band.low >= band.high:
        raise _refuse(
            "sweep.band",
            f"a band goes from a lower to a higher frequency, got {band}",
            f"Write {_hertz(band.high)} .. {_hertz(band.low)}."
            if band.low > band.high
            else "Ask at a single frequency instead.",
        )
    if not all(isfinite(_as_float(edge)) for edge in (band.low, band.high)):
        raise _refuse("sweep.band", "an edge of the band is out of range", "Give smaller edges.")


def _as_float(value: Fraction) -> float:
    try:
        return float(value)
    except OverflowError:
        return float("inf")


def _check_count(points: int) -> None:
    if points < 2:
        raise _too_few(points, 2, "points")
    _check_most(points)


def _check_most(points: int) -> None:
    if points > MOST_POINTS:
        raise _refuse(
            "sweep.points",
            f"{points:,} points are more than the {MOST_POINTS:,} of one sweep",
            "Ask for fewer points, or for a part of the band.",
        )


def _too_few(points: int, least: int, what: str) -> AnalysisError:
    return _refuse(
        "sweep.points",
        f"expected at least {least} {what}, got {points}",
        f"Give a whole number from {least} upwards.",
    )


def _hertz(value: Fraction) -> str:
    return f"{_as_float(value):.12g} Hz"


def _refuse(code: Code, message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
