"""Bands to show and frequencies to tabulate: band edges, cutoffs, peaks, decades, corners."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from math import ceil, floor, isfinite, log10, pi
from typing import TYPE_CHECKING, Any

import numpy as np

if TYPE_CHECKING:
    from acsolve.report.note.facts import Chapter

_MOST_ROWS = 16
_MOST_DECADES = 8
#: Relative distance from what is told already: of edges, cutoffs with their peaks, peaks as they
#: are drawn, decades, corners.
_APART = (1e-9, 1e-9, 0.02, 0.02, 0.15)
_ANYWHERE = 2  # ranks that are told outside the bands, too
_PEAK_DB = 0.5  # by which a peak stands above both ends of its band


def marks(cutoffs: Iterable[Any]) -> list[float]:
    """Every cutoff in hertz."""
    return [item.hertz for answer in cutoffs for item in answer.cutoffs if item.hertz is not None]


def is_besides(answer: Any, chapter: Chapter) -> bool:
    """Whether cutoffs count from a better reference than the rule's, told before them."""
    first = chapter.cutoffs[0].reference.at
    return first in ("dc", "infinity") and answer.reference.at in ("peak", "stated")


def best_first(chapter: Chapter) -> list[Any]:
    """The answers about cutoffs, those that count from the pass band first."""
    return sorted(chapter.cutoffs, key=lambda item: not is_besides(item, chapter))


def leading(chapters: Iterable[Chapter]) -> list[float]:
    """The frequencies of the first chapter that has such: its peak, or its first two cutoffs."""
    for chapter in chapters:
        for answer in best_first(chapter):
            if answer.reference.at == "peak" and answer.reference.hertz:
                return [answer.reference.hertz]
            if found := marks([answer]):
                return found[:2]
    return []


def telling(
    roots: Sequence[complex],
    cutoffs: Sequence[Any],
    curves: Sequence[Any],
    bands: Sequence[tuple[float, float]],
    also: Sequence[float] = (),
) -> list[float]:
    """The frequencies of a table, rising; of too many the less telling ones are left out.

    Parameters
    ----------
    roots : poles and zeros in rad/s.
    cutoffs : answers whose cutoffs and peaks are told.
    curves : responses over the bands that are shown.
    bands : in hertz, as the file asks for them.
    also : further frequencies in hertz.
    """
    edges = [(float(item.hertz.min()), float(item.hertz.max())) for item in curves]
    edges = edges or [(1.0, 1e6)]
    exact = [item.reference.hertz for item in cutoffs if item.reference.at == "peak"]
    ranked = [
        [edge for band in bands for edge in band],
        [*also, *marks(cutoffs), *(hertz for hertz in exact if hertz)],
        list(_peaks(curves)),
        [hertz for low, high in edges for hertz in _decades(low, high)],
        [abs(root) / (2 * pi) for root in roots],
    ]
    kept: list[float] = []
    for rank, listed in enumerate(ranked):
        apart = _APART[rank]
        for hertz in listed:
            inside = rank < _ANYWHERE or any(
                low * 0.999 <= hertz <= high * 1.001 for low, high in edges
            )
            if isfinite(hertz) and inside and _is_new(hertz, kept, apart):
                kept.append(hertz)
    return sorted(kept[:_MOST_ROWS]) or [edges[0][0]]


def _is_new(hertz: float, known: Sequence[float], apart: float) -> bool:
    return all(abs(hertz - other) > apart * max(hertz, other) for other in known)


def _decades(low: float, high: float) -> list[float]:
    """Whole decades within a band, not more than fit into a table."""
    first, last = ceil(log10(low) - 1e-9), floor(log10(high) + 1e-9)
    step = max(1, ceil((last - first + 1) / _MOST_DECADES))
    return [10.0**power for power in range(first, last + 1, step)]


def _peaks(curves: Sequence[Any]) -> Iterator[float]:
    """Where a gain is largest within its band, as it is drawn."""
    for curve in curves:
        gain = np.where(np.isfinite(curve.gain_db), curve.gain_db, -np.inf)
        if gain.max() > max(gain[0], gain[-1]) + _PEAK_DB:
            yield float(curve.hertz[int(gain.argmax())])
