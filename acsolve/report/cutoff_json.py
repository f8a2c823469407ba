"""Cutoffs as JSON values."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from acsolve.report.entry import Entry
from acsolve.report.json import closed_form_check, cutoff_names, number, replaced_names

if TYPE_CHECKING:
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.passband import FrequencyBand


def cutoff_body(entry: Entry) -> dict[str, Any]:
    """The keys of a cutoff answer."""
    found = entry.cutoff
    assert found is not None, "a cutoff entry holds a cutoff answer"
    checked = None if found.form is None else found.form.checked
    return {
        "reference": {
            "at": found.reference.at,
            "gain": number(found.reference.gain),
            "hertz": number(found.reference.hertz),
        },
        "level_db": number(found.level_db),
        "cutoffs": [
            {
                "hertz": number(item.hertz),
                "rad_per_s": number(item.rad_per_s),
                "closed_form": item.closed_form,
                "direction": item.direction,
                "condition": item.condition,
            }
            for item in found.cutoffs
        ],
        "bands": [_band(item) for item in found.bands],
        "band_forms": _band_forms(found),
        **_roll_off(found),
        "touches": [
            {"hertz": number(item.hertz), "rad_per_s": number(item.rad_per_s)}
            for item in found.touches
        ],
        "complete": found.complete,
        "method": found.method,
        "searched_hertz": None if found.searched is None else list(found.searched),
        "remarks": list(found.remarks),
        "checked": None if checked is None else closed_form_check(checked),
        "symbols": replaced_names(cutoff_names(entry)),
    }


def _band(item: FrequencyBand) -> dict[str, Any]:
    """A band between two cutoffs; its centre is the geometric mean of the edges."""
    return {
        "kind": item.kind,
        "low_hertz": number(item.low),
        "high_hertz": number(item.high),
        "bandwidth_hertz": number(item.width),
        "centre_hertz": number(item.centre),
        "extremum_hertz": number(item.extremum),
        "q": number(item.q),
    }


def _band_forms(found: CutoffAnswer) -> dict[str, str | None] | None:
    """Width and centre in rad/s and the quality factor of a lone band, in closed form."""
    forms = found.band_forms
    if forms is None:
        return None
    return {
        "width_rad_per_s": forms.width,
        "centre_rad_per_s": forms.centre,
        "q": forms.q,
        "condition": forms.condition,
    }


def _roll_off(found: CutoffAnswer) -> dict[str, Any]:
    """Corners of the asymptotes and slopes between them; null where they are not known."""
    tail = found.roll_off
    if tail is None:
        return {"corners": None, "slopes_db_per_decade": None, "end_slopes_db_per_decade": None}
    return {
        "corners": [
            {
                "hertz": number(item.hertz),
                "rad_per_s": number(item.rad_per_s),
                "closed_form": item.closed_form,
                "condition": item.condition,
                "change_db_per_decade": item.change_db,
            }
            for item in tail.corners
        ],
        "slopes_db_per_decade": None if tail.slopes_db is None else list(tail.slopes_db),
        "end_slopes_db_per_decade": list(tail.ends_db),
    }
