"""The band that shows a response: a decade beyond its slowest and its fastest feature."""

from __future__ import annotations

from collections.abc import Iterable
from math import ceil, floor, isfinite, log10, pi
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from acsolve.analyses.transfer import TransferAnswer

_WHOLE = (1.0, 1e6)  # hertz; shown where nothing depends on frequency


def landmarks(found: TransferAnswer) -> list[float] | None:
    """Frequencies in hertz where something happens; None where they are not known."""
    if found.roots is None:
        return None
    roots = (*found.roots.poles, *found.roots.zeros)
    return [abs(root) / (2 * pi) for root in roots]


def natural_band(hertz: Iterable[float]) -> tuple[float, float]:
    """Lowest and highest frequency to show, whole decades."""
    known = [value for value in hertz if isfinite(value) and value > 0]
    if not known:
        return _WHOLE
    low, high = floor(log10(min(known)) - 0.7), ceil(log10(max(known)) + 0.7)
    return 10.0**low, 10.0**high
