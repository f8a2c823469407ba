"""Responses in time as a person reads them."""

from __future__ import annotations

import re
from math import hypot, pi
from typing import TYPE_CHECKING

from acsolve.report.entry import Entry, unit_sign
from acsolve.report.number import engineering, hertz, plain
from acsolve.report.table import aligned, labelled
from acsolve.report.transfer_text import limit_words
from acsolve.report.values import standard_numbers

if TYPE_CHECKING:
    from acsolve.analyses.step import Mode, StepAnswer
    from acsolve.analyses.time_formula import TimeFormula

_ROWS = 11  # of the table of the curve
_MODES = 8
_LONGEST = 160  # characters of a formula that is shown

_LABELS = {
    "rise_s": "rise, 10 to 90 %",
    "delay_s": "delay to 50 %",
    "settling_s": "settled",
    "overshoot": "overshoot",
}


def step_lines(entry: Entry) -> list[str]:
    """The body of a response in time."""
    found = entry.step
    assert found is not None, "a step entry holds a response in time"
    unit = response_unit(entry)
    rows = [*_drive_rows(found), *_formula_rows(found), *_limit_rows(found, unit)]
    rows += [*_figure_rows(found), *_steady_rows(found, unit), *_moment_rows(found)]
    rows += [*_mode_rows(found, unit), *(("remark", text) for text in found.remarks)]
    rows += _checked_rows(found)
    lines = labelled(rows)
    return lines if found.seconds is None else [*lines, "", *_table(found, unit)]


def response_unit(entry: Entry) -> str:
    """The unit of the response to a drive of one; an impulse has one for each second besides."""
    unit = unit_sign(entry.ask) if entry.ask else ""
    if entry.step is not None and entry.step.drive.kind == "impulse":
        return f"{unit or '1'}/s"
    return unit


def _drive_rows(found: StepAnswer) -> list[tuple[str, str]]:
    drive = found.drive
    if drive.hertz is None:
        return []
    length = "going on" if drive.cycles is None else f"{plain(float(drive.cycles))} cycles"
    return [("driven by", f"a sine of {engineering(float(drive.hertz), 'Hz')} from 0 on, {length}")]


def _formula_rows(found: StepAnswer) -> list[tuple[str, str]]:
    """The closed form in time: each case, then the names that stand in them."""
    from acsolve.analyses.time_formula import time_formulas

    if found.formulas is None or found.drive.kind == "sine":
        return []
    rows: list[tuple[str, str]] = []
    for case in found.formulas.cases:
        rows += _case_rows(case, found)
    spelled = time_formulas(found.written, band=found.band, safe=False) or found.formulas
    numbers = _numbers(found)
    for name, text in spelled.parts.items():
        words = [text] if len(text) <= _LONGEST and re.search("[A-Za-z]", text) else []
        words += [numbers[name]] if name in numbers else [] if words else [text]
        rows.append((f"  {name}", " = ".join(words)))
    return rows


def _case_rows(case: TimeFormula, found: StepAnswer) -> list[tuple[str, str]]:
    texts = case.texts(safe=False)
    kind = "impulse" if found.drive.kind == "impulse" else "step"
    condition = f"  for {case.condition}" if case.condition and found.form.symbols else ""
    rows = [("y(t), t > 0", texts[kind] + condition)]
    rows += [(f"  {name}", texts[name]) for name in case.helpers]
    if kind == "step" and found.form.symbols:
        rows += [(f"  {_LABELS.get(name, 'peak at')}", texts[name]) for name in case.figures]
    return rows


def _numbers(found: StepAnswer) -> dict[str, str]:
    """The named parts as numbers, where they have some."""
    if found.form.symbols or found.formulas is None:
        return {}
    raw = standard_numbers(found.form, dict.fromkeys(found.formulas.parts))
    units = {"tau": "s", "w0": "rad/s"}
    shown = {}
    for name, value in raw.items():
        if name == "w0":
            shown[name] = f"{plain(value.real)} rad/s  ({engineering(hertz(value.real), 'Hz')})"
        else:
            shown[name] = engineering(value.real, units.get(name, ""))
    if found.drive.kind == "step":
        ends = {"y_0": found.initial_value, "y_end": found.final_value}
        shown |= {name: plain(value) for name, value in ends.items() if value is not None}
    return {name: text for name, text in shown.items() if name in found.formulas.parts}


def _limit_rows(found: StepAnswer, unit: str) -> list[tuple[str, str]]:
    """Just after 0, and for ever after."""
    if found.form.symbols:
        if found.drive.kind != "step":
            return []
        last, first = (limit_words(item, unit) for item in found.limits)
        return [("just after 0", first), ("final value", last)]
    rows = [
        (f"at 0 itself, {_order(place)}", f"area {plain(value)}")
        for place, value in enumerate(found.impulses)
    ]
    assert found.initial_value is not None, "an answer with numbers has one"
    rows.append(("just after 0", engineering(found.initial_value, unit)))
    if found.final_value is None:
        return [*rows, ("final value", f"none: {found.final_reason}")]
    return [*rows, ("final value", engineering(found.final_value, unit))]


def _order(place: int) -> str:
    return "an impulse" if place == 0 else f"derivative {place} of an impulse"


def _figure_rows(found: StepAnswer) -> list[tuple[str, str]]:
    if found.form.symbols or found.drive.kind != "step":
        return []
    reasons = dict(found.figures.reasons)
    if len(set(reasons.values())) == 1 and len(reasons) == len(_LABELS):
        if found.final_value is None:
            return []
        return [("rise, delay, settling", f"none: {next(iter(reasons.values()))}")]
    rows = []
    for name, label in _LABELS.items():
        value = getattr(found, name)
        if name == "settling_s":
            label = f"settled within {plain(100 * float(found.band))} %"  # noqa: PLW2901
        if value is None:
            rows.append((label, f"unknown: {reasons.get(name, '')}"))
        elif name != "overshoot":
            rows.append((label, engineering(value, "s")))
        else:
            rows.append((label, _overshoot(found, value)))
    return rows


def _overshoot(found: StepAnswer, value: float) -> str:
    if found.peak_s is None:
        return "none"
    return f"{plain(100 * value)} % of the final value, at {engineering(found.peak_s, 's')}"


def _steady_rows(found: StepAnswer, unit: str) -> list[tuple[str, str]]:
    steady = found.steady
    if steady is None:
        return []
    return [
        ("steady amplitude", engineering(steady.amplitude, unit)),
        ("steady phase", f"{plain(steady.phase_deg)} deg"),
        ("delay of the sine", engineering(steady.delay_s, "s")),
        ("group delay there", engineering(steady.group_delay_s, "s")),
    ]


def _moment_rows(found: StepAnswer) -> list[tuple[str, str]]:
    """Elmore's delay and, as he defined it without overshoot only, his rise time."""
    from acsolve.analyses.moments import moments

    if found.moments is None or found.moments.delay is None or found.stable is False:
        return []
    written = moments(found.written) or found.moments
    rows = []
    for label, item, own, unit in (
        ("Elmore delay", written.delay, found.moments.delay, "s"),
        ("variance", written.variance, found.moments.variance, "s^2"),
    ):
        assert item is not None, "both have a delay"
        assert own is not None, "both have a delay"
        text = item.text(safe=False)
        words = [text] if len(text) <= _LONGEST and re.search("[A-Za-z]", text) else []
        if own.number is not None:
            number = f"{plain(own.number)} {unit}" if "^" in unit else engineering(own.number, unit)
            words.append(number)
        rows.append((label, " = ".join(words) or "a long expression, see --json"))
    if found.moments.elmore_rise_s is not None and found.overshoot == 0:
        rows.append(("Elmore rise time", engineering(found.moments.elmore_rise_s, "s")))
    return rows


def _mode_rows(found: StepAnswer, unit: str) -> list[tuple[str, str]]:
    """Every mode in words, the slowest first."""
    words = [_mode_text(mode, unit) for mode in found.modes]
    shown = words[:_MODES]
    if len(words) > _MODES:
        shown.append(f"… and {len(words) - _MODES} more; --json gives all of them")
    return [("modes" if place == 0 else "", text) for place, text in enumerate(shown)]


def _mode_text(mode: Mode, unit: str) -> str:
    weight = mode.weights[0]
    real, turning = mode.rate.real, mode.rate.imag
    if turning:
        size = 2 * hypot(weight.real, weight.imag)
        head = f"{engineering(size, unit)}, {engineering(turning / (2 * pi), 'Hz')}"
    else:
        head = engineering(weight.real, unit)
    if real:
        word = "grows" if real > 0 else "decays"
        head += f", {word} with {engineering(abs(1 / real), 's')}"
    elif not turning:
        head += ", stays"
    return head + _powers(len(mode.weights) - 1)


def _powers(count: int) -> str:
    if not count:
        return ""
    return ", and a part with t" if count == 1 else f", and parts with t to t^{count}"


def _checked_rows(found: StepAnswer) -> list[tuple[str, str]]:
    if found.checked is None or found.form.symbols:
        return []
    error = found.checked.max_relative_error
    return [
        (
            "checked",
            f"modes against the closed form at {found.checked.points} points, largest relative "
            f"difference {plain(error, 2)}",
        )
    ]


def _table(found: StepAnswer, unit: str) -> list[str]:
    """The curve at a few of its points."""
    from acsolve.report.sweep_text import shown_rows

    assert found.seconds is not None, "there is a curve"
    assert found.value is not None, "there is a curve"
    places = shown_rows(len(found.seconds), _ROWS)
    rows = [["time", "response"]]
    rows += [
        [engineering(float(found.seconds[k]), "s"), engineering(float(found.value[k]), unit)]
        for k in places
    ]
    lines = aligned(rows, sides=("right", "right"), gap=3)
    more = f"{len(places)} of {len(found.seconds)} points; --save FILE.csv or --json gives all."
    return [*lines, "", more] if len(places) < len(found.seconds) else lines
