"""A family of sweeps as tables: a row a frequency, a column a member."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING

from acsolve.report.entry import Entry, unit_sign
from acsolve.report.number import engineering
from acsolve.report.sweep_text import fixed, remarks, shown_rows
from acsolve.report.table import Side, aligned, wrapped

if TYPE_CHECKING:
    from acsolve.analyses.sweep import Sweep

_COLUMNS = 5  # members beside each other in 80 columns
_LONGEST = 20  # rows of each table
_DIGITS = 4  # of a setting
_RIGHT: Side = "right"


def family_lines(entries: Sequence[Entry]) -> list[str]:
    """The body of a family's answer: gains, then phases, thinned evenly where it is long."""
    sweeps = [_sweep(entry) for entry in entries]
    unit = unit_sign(entries[0].ask) if entries[0].ask else ""
    places = shown_rows(len(sweeps[0].hertz), _LONGEST)

    def gain(found: Sweep, place: int) -> str:
        value = float(found.gain_db[place])
        if unit and value < _LARGEST_DECIBEL:
            return engineering(10 ** (value / 20), unit, 5, even=True)
        return fixed(value, 3, "dB")

    def phase(found: Sweep, place: int) -> str:
        return fixed(float(found.phase_deg[place]), 2, "deg")

    lines: list[str] = []
    for word, cell in (("magnitude" if unit else "gain", gain), ("phase", phase)):
        lines += [*([""] if lines else []), word]
        lines += _tables(entries, places, cell)
    count = len(sweeps[0].hertz)
    if len(places) < count:
        lines += ["", f"{len(places)} of {count} points; --save FILE.csv or --json gives all."]
    return lines + _remarks(entries)


_LARGEST_DECIBEL = 6000


def _sweep(entry: Entry) -> Sweep:
    assert entry.sweep is not None, "a member of a family holds a sweep"
    return entry.sweep


def setting_names(entry: Entry) -> list[str]:
    """The names that are varied."""
    return [setting.name for setting in entry.over]


def setting_texts(entry: Entry) -> list[str]:
    """What makes a member, without the names."""
    return [engineering(item.value, item.unit, _DIGITS) for item in entry.over]


def _tables(
    entries: Sequence[Entry], places: Sequence[int], cell: Callable[[Sweep, int], str]
) -> list[str]:
    """Tables of a few members each, under each other."""
    lines: list[str] = []
    hertz = _sweep(entries[0]).hertz
    for first in range(0, len(entries), _COLUMNS):
        some = entries[first : first + _COLUMNS]
        texts = zip(*map(setting_texts, some), strict=True)
        rows = [[name, *row] for name, row in zip(setting_names(some[0]), texts, strict=True)]
        for place in places:
            values = [cell(_sweep(entry), place) for entry in some]
            rows.append([engineering(float(hertz[place]), "Hz"), *values])
        lines += [*([""] if first else []), *aligned(rows, sides=[_RIGHT] * (len(some) + 1))]
    return lines


def _remarks(entries: Sequence[Entry]) -> list[str]:
    """What is to be said of single members."""
    lines: list[str] = []
    for entry in entries:
        found = [line for line in remarks(entry) if line]
        if found:
            names, texts = setting_names(entry), setting_texts(entry)
            head = ", ".join(f"{a} = {b}" for a, b in zip(names, texts, strict=True))
            lines += ["", *wrapped(f"{head}: {' '.join(found)}", 80)]
    return lines
