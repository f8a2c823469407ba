"""A family of curves: a sequence of colours from dark to light, named beside the axes."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from acsolve.report.axes import tick_text
from acsolve.report.entry import Entry
from acsolve.report.plot import Curve

LARGEST_FAMILY = 12

#: From dark to light, told apart with any colour vision: lightness rises along the way, and
#: blue turns to ochre, the two hues that every kind of colour vision keeps.
_RAMP = (
    (0x1B, 0x2A, 0x5E),
    (0x35, 0x5F, 0x9A),
    (0x5E, 0x82, 0x8C),
    (0xA8, 0x86, 0x2F),
    (0xD9, 0xA1, 0x0B),
)
_DASHES: tuple[Any, ...] = ("solid", (0, (7, 2)), (0, (2, 1.6)), (0, (8, 2, 1.6, 2)))
_DIGITS = 4


def family_curves(entries: Sequence[Entry]) -> tuple[Curve, ...]:
    """One curve a member, in their order."""
    return tuple(
        Curve(entry.sweep, _label(entry), line=_line(place, len(entries)))
        for place, entry in enumerate(entries)
        if entry.sweep is not None
    )


def family_names(entries: Sequence[Entry]) -> str:
    """What the curves are told apart by."""
    return ", ".join(item.name for item in entries[0].over)


def _label(entry: Entry) -> str:
    return ", ".join(tick_text(item.value, item.unit, _DIGITS) for item in entry.over)


def _line(place: int, count: int) -> tuple[str, Any]:
    """Colour and dashes of one of so many curves; neighbours never share their dashes."""
    at = place / max(count - 1, 1) * (len(_RAMP) - 1)
    first = min(int(at), len(_RAMP) - 2)
    share = at - first
    mixed = [
        round(a + share * (b - a)) for a, b in zip(_RAMP[first], _RAMP[first + 1], strict=True)
    ]
    return "#{:02x}{:02x}{:02x}".format(*mixed), _DASHES[place % len(_DASHES)]
