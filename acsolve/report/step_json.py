"""Responses in time as JSON values."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from acsolve.report.entry import Entry
from acsolve.report.json import closed_form_check, complex_number, number, numbers, replaced_names

if TYPE_CHECKING:
    from acsolve.analyses.moments import Exact
    from acsolve.analyses.step import StepAnswer


def step_body(entry: Entry) -> dict[str, Any]:
    """The keys of a response in time; null for what does not exist, `reasons` saying why."""
    from acsolve.analyses.shape import limit_text

    found = entry.step
    assert found is not None, "a step entry holds a response in time"
    return {
        "drive": found.drive.kind,
        "drive_hertz": _number(found.drive.hertz),
        "drive_cycles": _number(found.drive.cycles),
        "seconds": None if found.seconds is None else numbers(found.seconds.tolist()),
        "value": None if found.value is None else numbers(found.value.tolist()),
        "initial_value": number(found.initial_value),
        "final_value": number(found.final_value),
        "initial_exact": limit_text(found.limits[1]),
        "final_exact": limit_text(found.limits[0]),
        "impulses": numbers(found.impulses),
        "rise_s": number(found.rise_s),
        "delay_s": number(found.delay_s),
        "settling_s": number(found.settling_s),
        "settling_band": float(found.band),
        "overshoot": number(found.overshoot),
        "peak_s": number(found.peak_s),
        "levels_s": numbers_or_none(found.figures.levels_s),
        "reasons": _reasons(found),
        "stable": found.stable,
        "modes": [
            {
                "rate": complex_number(mode.rate),
                "weights": [complex_number(weight) for weight in mode.weights],
            }
            for mode in found.modes
        ],
        "closed_forms": _closed_forms(found),
        "moments": _moments(found),
        "steady": _steady(found),
        "remarks": list(found.remarks),
        "checked": None if found.checked is None else closed_form_check(found.checked),
        "symbols": replaced_names(found.written.spelled(safe=True).names),
    }


def numbers_or_none(values: tuple[float | None, ...]) -> list[float | None]:
    """A list of JSON numbers, null where there is none."""
    return [number(value) for value in values]


def _number(value: Any) -> float | None:
    return None if value is None else float(value)


def _reasons(found: StepAnswer) -> dict[str, str]:
    named = dict(found.figures.reasons)
    return named if found.final_reason is None else {"final_value": found.final_reason, **named}


def _closed_forms(found: StepAnswer) -> dict[str, Any] | None:
    if found.formulas is None:
        return None
    return {
        "parts": dict(found.formulas.parts),
        "cases": [
            {"case": case.case, "condition": case.condition, **case.texts(safe=True)}
            for case in found.formulas.cases
        ],
    }


def _moments(found: StepAnswer) -> dict[str, Any] | None:
    """Numbers and, with the parts as symbols where that is short, expressions."""
    from acsolve.analyses.moments import moments

    if found.moments is None:
        return None
    here, written = found.moments, moments(found.written) or found.moments
    return {
        "raw": [number(item.number) for item in here.raw],
        "raw_exact": [item.text() for item in written.raw],
        "delay_s": _value(here.delay),
        "delay_exact": _text(written.delay),
        "variance_s2": _value(here.variance),
        "variance_exact": _text(written.variance),
        "rise_s": number(here.elmore_rise_s),
    }


def _value(item: Exact | None) -> float | None:
    return None if item is None else number(item.number)


def _text(item: Exact | None) -> str | None:
    return None if item is None else item.text()


def _steady(found: StepAnswer) -> dict[str, float | None] | None:
    if found.steady is None:
        return None
    names = ("hertz", "amplitude", "phase_deg", "delay_s", "shift_s", "group_delay_s")
    return {name: number(getattr(found.steady, name)) for name in names}
