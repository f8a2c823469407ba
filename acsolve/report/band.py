"""The band that shows a response, and frequencies close enough to draw its narrowest peak."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from math import ceil, floor, isfinite, log10, pi
from typing import TYPE_CHECKING

import numpy as np
from numpy.typing import NDArray

if TYPE_CHECKING:
    from acsolve.analyses.transfer import TransferAnswer

_WHOLE = (1.0, 1e6)  # hertz; shown where nothing depends on frequency
_PER_DECADE = 80
_STEPS = 40  # points on each side of a resonance
_MOST_ROOTS = 100
_SHARPEST = 1e-4  # half width over frequency that is drawn of a lossless resonance


def roots_of(found: TransferAnswer) -> tuple[complex, ...] | None:
    """Poles and zeros in rad/s together; None where they are not known."""
    return None if found.roots is None else (*found.roots.poles, *found.roots.zeros)


def natural_band(hertz: Iterable[float]) -> tuple[float, float]:
    """Lowest and highest frequency to show: whole decades beyond every given frequency."""
    known = [value for value in hertz if isfinite(value) and value > 0]
    if not known:
        return _WHOLE
    low, high = floor(log10(min(known)) - 0.7), ceil(log10(max(known)) + 0.7)
    return 10.0**low, 10.0**high


def drawn_frequencies(
    band: tuple[float, float], roots: Sequence[complex], marks: Iterable[float]
) -> NDArray[np.float64]:
    """Rising frequencies in hertz over a band, closer around resonances and at the marks.

    Around a root at -a ± jb rad/s they lie at b ± t, with t growing from a/10 by equal
    ratios, so that a peak or notch of any width is drawn with its true height; where a is
    zero the infinite peak is drawn as far as 80 dB or so.
    """
    low, high = band
    count = ceil(_PER_DECADE * log10(high / low)) + 1
    pieces = [np.geomspace(low, high, count), np.array(list(marks), dtype=float)]
    pieces += [_around(root) for root in roots[:_MOST_ROOTS] if root.imag > 0]
    every = np.unique(np.concatenate(pieces))
    return every[(every >= low) & (every <= high)]


def _around(root: complex) -> NDArray[np.float64]:
    """Frequencies in hertz around a resonance."""
    centre = root.imag / (2 * pi)
    narrow = abs(root.real) / (2 * pi) / 10 if root.real else _SHARPEST * centre
    away = np.geomspace(min(narrow, centre / 2), centre / 2, _STEPS)
    middle = [centre] if root.real else []
    return np.concatenate([centre - away, np.array(middle), centre + away])
