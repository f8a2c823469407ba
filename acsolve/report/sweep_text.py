"""Sweeps as a table of a screen's length."""

from __future__ import annotations

from typing import TYPE_CHECKING

from acsolve.report.entry import Entry, unit_sign
from acsolve.report.json import status_words
from acsolve.report.number import engineering, plain
from acsolve.report.table import aligned, wrapped

if TYPE_CHECKING:
    from acsolve.analyses.proof import Verification
    from acsolve.analyses.sweep import Placement, Sweep

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
    return lines + remarks(entry)


def remarks(entry: Entry) -> list[str]:
    """What is unusual about a sweep, and what was proven of it."""
    assert entry.sweep is not None, "a sweep entry holds a sweep"
    placed = _placed_lines(entry.sweep.placed)
    return placed + _remarks(entry.sweep) + _verified_lines(entry.verified)


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


def _placed_lines(how: Placement | None) -> list[str]:
    """What straight lines between automatic points are worth, and where they end."""
    if how is None:
        return []
    axis = "linear frequency" if how.linear else "the logarithm of the frequency"
    text = f"Straight lines between the points over {axis} "
    text += f"are right within {how.gain_db:g} dB and {how.phase_deg:g} degrees; "
    if not how.complete:
        text = f"The most points of one sweep do not suffice for lines over {axis}; "
    text += (
        "no notch or peak is narrower than the points."
        if how.sure
        else "this is uncertain: not all poles and zeros are known, and a notch or peak that "
        "leaves no trace between two points may be missing."
    )
    if how.ends_hertz:
        listed = ", ".join(engineering(item, "Hz") for item in how.ends_hertz[:_ENDS])
        more = ", …" if len(how.ends_hertz) > _ENDS else ""
        text += f" They end beside what is infinite or too narrow for doubles, at {listed}{more}."
    return ["", *wrapped(text, 80)]


_ENDS = 6  # places where lines end that are told one by one


def _verified_lines(proven: Verification | None) -> list[str]:
    """How accurate the chosen points are proven to be, and which of them are not."""
    if proven is None:
        return []
    lines = [""]
    worst = proven.worst
    if worst is not None:
        where = engineering(worst.hertz, "Hz")
        text = (
            f"Proven in ball arithmetic of {proven.bits} bits at {_counted(proven.points)}: the "
            f"response is right within {worst.relative_error:.1e} relative (worst at {where})"
            f"{_besides(proven)}."
        )
        lines += wrapped(text, 80)
    else:
        lines.append("No point is proven.")
    for item in proven.unproven[:_UNPROVEN]:
        lines += wrapped(f"Not proven at {engineering(item.hertz, 'Hz')}: {item.reason}.", 80)
    if len(proven.unproven) > _UNPROVEN:
        lines.append(f"{_counted(len(proven.unproven) - _UNPROVEN)} more are not proven.")
    return lines


_UNPROVEN = 10  # points without a proof that are told one by one


def _besides(proven: Verification) -> str:
    """The largest errors of gain, phase and delay, as far as there are any."""
    errors = (
        ("gain", "gain_error_db", "dB"),
        ("phase", "phase_error_deg", "deg"),
        ("group delay", "group_delay_error_s", "s"),
    )
    found = [(word, proven.largest(name), unit) for word, name, unit in errors]
    told = [f"{word} {value:.1e} {unit}" for word, value, unit in found if value is not None]
    return f"; {', '.join(told)}" if told else ""


def _counted(count: int) -> str:
    return "1 point" if count == 1 else f"{count} points"


def _points(count: int) -> str:
    return "1 point is" if count == 1 else f"{count} points are"
