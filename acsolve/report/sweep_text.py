"""Sweeps as a table of a screen's length."""

from __future__ import annotations

from typing import TYPE_CHECKING

from acsolve.report.entry import Entry, unit_sign
from acsolve.report.json import status_words
from acsolve.report.number import engineering, plain
from acsolve.report.table import aligned

if TYPE_CHECKING:
    from acsolve.analyses.sweep import Sweep

_LONGEST = 40  # rows on a screen


def sweep_lines(entry: Entry) -> list[str]:
    """The body of a sweep answer: a table, thinned evenly where it is long."""
    found = entry.sweep
    assert found is not None, "a sweep entry holds a sweep"
    unit = unit_sign(entry.ask) if entry.ask else ""
    count = len(found.hertz)
    places = shown_rows(count)
    head = ["frequency", "magnitude" if unit else "gain", "phase", "phase delay", "group delay"]
    rows = [_row(found, place, unit) for place in places]
    lines = aligned([head, *rows], sides=("right",) * 5, gap=3)
    if len(places) < count:
        lines += ["", f"{len(places)} of {count} points; --save FILE.csv or --json gives all."]
    return lines + _remarks(found)


def shown_rows(count: int, longest: int = _LONGEST) -> list[int]:
    """Which of so many rows are shown: all, or evenly spread ones with both ends."""
    if count <= longest:
        return list(range(count))
    return [round(k * (count - 1) / (longest - 1)) for k in range(longest)]


def _row(found: Sweep, place: int, unit: str) -> list[str]:
    gain = float(found.gain_db[place])
    size = (
        engineering(10 ** (gain / 20), unit, even=True)
        if unit and gain < 6000
        else fixed(gain, 3, "dB")
    )
    return [
        engineering(float(found.hertz[place]), "Hz"),
        size,
        fixed(float(found.phase_deg[place]), 2, "deg"),
        engineering(float(found.phase_delay_s[place]), "s", 5, even=True),
        engineering(float(found.group_delay_s[place]), "s", 5, even=True),
    ]


def fixed(value: float, places: int, unit: str) -> str:
    """A number with so many decimals, so that a column of them lines up."""
    if value != value or abs(value) == float("inf"):  # noqa: PLR0124 - not a number
        return plain(value)
    text = f"{value:.{places}f}"
    return f"{text.lstrip('-') if float(text) == 0 else text} {unit}"


def _remarks(found: Sweep) -> list[str]:
    words = status_words(found.status.tolist())
    lines = []
    zeros, poles = words.count("zero"), words.count("pole")
    undefined = words.count("undefined")
    for number, what in ((zeros, "zero"), (poles, "infinite"), (undefined, "without an answer")):
        if number:
            lines.append(f"{_points(number)} {what}.")
    if not found.settled:
        lines.append("The number of whole turns in the phase is not certain.")
    return ["", *lines] if lines else []


def _points(count: int) -> str:
    return "1 point is" if count == 1 else f"{count} points are"
