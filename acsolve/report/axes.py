"""Scales, ticks and labels of pictures; every label carries its unit."""

from __future__ import annotations

from math import ceil, floor, log10
from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.report.number import engineering

if TYPE_CHECKING:
    from matplotlib.axes import Axes

_SIGNS = {"ohm": "Ω"}
_INK = "#222222"


def picture_unit(unit: str) -> str:
    """A unit as pictures write it."""
    return _SIGNS.get(unit, unit)


def tick_text(value: float, unit: str, digits: int = 6) -> str:
    """A tick with its SI prefix and unit, in the signs of print: `10 kHz`, `4.7 µs`, `50 Ω`."""
    text = engineering(value, unit or "_", digits)
    number, _, rest = text.partition(" ")
    sign = picture_unit(rest.removeprefix(_prefix(rest, unit or "_")))
    prefix = _prefix(rest, unit or "_").replace("u", "µ")
    tail = f"{prefix}{sign}".removesuffix("_")
    return f"{number.replace('-', '−')} {tail}".rstrip()


def _prefix(text: str, unit: str) -> str:
    return text[: len(text) - len(unit)] if text.endswith(unit) else ""


def set_frequency_axis(axes: Axes, hertz: Any, *, linear: bool) -> None:
    """The frequency axis: its scale, its limits and its ticks in hertz."""
    from matplotlib.ticker import FuncFormatter

    known = np.asarray(hertz, dtype=float)
    if not linear:
        known = known[known > 0]
    axes.set_xlabel("frequency", color=_INK)
    if not known.size:
        return
    low, high = float(known.min()), float(known.max())
    if not linear:
        axes.set_xscale("log")
        _log_ticks(axes.xaxis, low, high)
    if low < high:
        axes.set_xlim(low, high)
    axes.xaxis.set_major_formatter(FuncFormatter(lambda value, _: tick_text(value, "Hz", 4)))


def set_magnitude_axis(axes: Axes, sizes: Any, unit: str) -> None:
    """The magnitude axis: dB of a ratio, or a unit on a logarithmic scale."""
    from matplotlib.ticker import FuncFormatter, MaxNLocator

    known = sizes[np.isfinite(sizes)]
    low, high = (float(known.min()), float(known.max())) if known.size else (0.0, 0.0)
    if not unit:
        axes.set_ylabel("gain (dB)", color=_INK)
        if high - low < 1e-9:
            axes.set_ylim(low - 1, high + 1)
        axes.yaxis.set_major_locator(MaxNLocator(nbins=7, steps=[1, 2, 3, 6, 10]))
        axes.yaxis.set_major_formatter(
            FuncFormatter(lambda value, _: f"{value:g}".replace("-", "−"))
        )
        return
    axes.set_ylabel("magnitude", color=_INK)
    if low > 0:
        axes.set_yscale("log")
        low, high = (low / 1.25, high * 1.25) if high < 1.02 * low else (low / 1.1, high * 1.1)
        axes.set_ylim(low, high)
        _log_ticks(axes.yaxis, low, high)
    axes.yaxis.set_major_formatter(FuncFormatter(lambda value, _: tick_text(value, unit, 4)))


_MOST_TICKS = 9


def log_ticks(low: float, high: float) -> list[float]:
    """Round values for a logarithmic axis: decades, or 1-2-5 steps where it is short."""
    first, last = floor(log10(low)), ceil(log10(high))
    step = max(1, ceil((last - first) / (_MOST_TICKS - 1)))
    sets: tuple[tuple[float, ...], ...] = ((1,), (1, 3), (1, 2, 5), tuple(range(1, 10)))
    best: list[float] = []
    for digits in sets if step == 1 else sets[:1]:
        start = step * floor(first / step)
        ticks = [digit * 10.0**power for power in range(start, last + 1, step) for digit in digits]
        inside = [tick for tick in ticks if low * (1 - 1e-9) <= tick <= high * (1 + 1e-9)]
        if len(inside) > _MOST_TICKS:
            break
        best = inside
        if len(inside) >= 4:
            break
    return best if len(best) >= 2 else even_ticks(low, high)


def even_ticks(low: float, high: float) -> list[float]:
    """Three to seven round values at even steps."""
    if high <= low:
        return [low]
    rough = (high - low) / 6
    power = 10.0 ** floor(log10(rough))
    step = next(item * power for item in (1, 2, 5, 10) if item * power >= rough)
    return [k * step for k in range(ceil(low / step), floor(high / step) + 1)]


def _log_ticks(axis: Any, low: float, high: float) -> None:
    from matplotlib.ticker import FixedLocator, NullFormatter

    axis.set_major_locator(FixedLocator(log_ticks(low, high)))
    first, last = floor(log10(low)), ceil(log10(high))
    minor = [d * 10.0**p for p in range(first, last + 1) for d in range(2, 10)]
    axis.set_minor_locator(FixedLocator(minor if last - first <= _MOST_TICKS else []))
    axis.set_minor_formatter(NullFormatter())


_DEGREE_STEPS = (5, 15, 30, 45, 90, 180, 360)


def degree_steps(low: float, high: float) -> list[float]:
    """Ticks of a phase axis: whole multiples of 5° to 360° (or more) around the range."""
    if high - low < 1:
        low, high = low - 5, high + 5
    step = next((item for item in _DEGREE_STEPS if (high - low) / item <= 5), None)
    if step is None:
        step = 360 * ceil((high - low) / (360 * 5))
    first, last = floor(low / step + 1e-6), ceil(high / step - 1e-6)
    return [float(k * step) for k in range(first, max(last, first + 1) + 1)]
