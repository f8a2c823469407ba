"""The shapes a closed form is read in, and approximate forms, as a person reads them."""

from __future__ import annotations

from math import inf
from typing import TYPE_CHECKING

from acsolve.report.entry import Entry, letter
from acsolve.report.formula import LONGEST, formula_lines, hung
from acsolve.report.number import engineering, plain
from acsolve.report.table import labelled

if TYPE_CHECKING:
    from acsolve.analyses.approximate import Approximation
    from acsolve.analyses.closed_form import ClosedForm


def reading_lines(entry: Entry) -> list[str]:
    """Each shape that was asked for, under its name; a numeric form is read by its formula."""
    form = _readable(entry)
    if form is None or not entry.readings:
        return []
    from acsolve.analyses.reading import FORM_NAMES, reading

    lines: list[str] = []
    for name in FORM_NAMES:
        if name not in entry.readings:
            continue
        found = reading(form, name)
        lines += ["", f"{name}:"]
        if not found:
            lines.append("  this response has no such form")
        for line in found:
            lines += hung(f"  {line.label} = ", line.text)
        if name == "asymptotes":
            lines += _corners(entry)
    return lines


def _corners(entry: Entry) -> list[str]:
    """The asymptotes between corners, where all values are numbers."""
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.corners import segments

    answer = entry.transfer
    if answer is None or answer.roots is None or not isinstance(answer.form, ClosedForm):
        return []
    if answer.form.numerator == 0:
        return []
    lines = []
    for item in segments(answer.form, answer.roots):
        at = item.high if item.high < inf else item.low
        place = f", through {item.gain_db(at):.2f} dB at {_hertz(at)}" if 0 < at < inf else ""
        if item.low == 0 and item.high == inf:
            where = "everywhere"
        elif item.low == 0:
            where = f"below {_hertz(item.high)}"
        elif item.high == inf:
            where = f"above {_hertz(item.low)}"
        else:
            where = f"{_hertz(item.low)} .. {_hertz(item.high)}"
        slope = f"{item.slope_db:+d} dB/decade" if item.slope_db else "flat"
        lines.append(f"  {where}: {slope}{place}")
    return lines


def _readable(entry: Entry) -> ClosedForm | None:
    from acsolve.analyses.closed_form import ClosedForm

    answer = entry.formula or entry.transfer
    form = answer.form if answer is not None else None
    return form if isinstance(form, ClosedForm) else None


def approximation_lines(entry: Entry) -> list[str]:
    """Each approximate form with what went and how large its error is."""
    lines: list[str] = []
    for found in entry.approximations:
        lines += ["", *_approximation(found, letter(entry.ask) if entry.ask else "H")]
    return lines


def _approximation(found: Approximation, name: str) -> list[str]:
    lines = ["approximation"]
    lines += formula_lines(found.form, f"{name}~(s)")
    rows = [("assumed", _assumed(item)) for item in found.assumptions]
    rows.append(("dropped", _dropped(found)))
    rows += _error(found)
    judged = tuple(f"{item.assumption} " for item in found.assumptions)
    rows += [("note", text) for text in found.remarks if not text.startswith(judged)]
    return [*lines, *labelled(rows)]


def _assumed(item: object) -> str:
    from acsolve.analyses.approximate import Judged

    assert isinstance(item, Judged), "an approximation holds its assumptions judged"
    if item.ratio is None:
        return f"{item.assumption}"
    words = "holds" if item.holds else "does not hold"
    return f"{item.assumption}: {words}, the ratio is {plain(item.ratio)}"


def _dropped(found: Approximation) -> str:
    texts = [str(item) for item in found.dropped[:LONGEST]]
    if len(found.dropped) > LONGEST:
        texts.append(f"… {len(found.dropped) - LONGEST} more")
    return "; ".join(texts) or "nothing"


def _hertz(value: float) -> str:
    return engineering(value, "Hz")


def _error(found: Approximation) -> list[tuple[str, str]]:
    if found.largest_error is None or found.band is None:
        return [("largest error", "not measured: not every part has a value")]
    band = f"over {_hertz(float(found.band.low))} .. {_hertz(float(found.band.high))}"
    text = f"{100 * found.largest_error:.3g} % {band}"
    if found.at_hertz is not None:
        text += f", at {_hertz(found.at_hertz)}"
    rows = [("largest error", text)]
    if found.at_values:
        values = (f"{name} = {engineering(value, '')}" for name, value in found.at_values.items())
        rows.append(("", "with " + ", ".join(values)))
    bound = "no bound" if found.bound is None else f"below {100 * found.bound:.3g} %"
    return [*rows, ("proven", bound)]
