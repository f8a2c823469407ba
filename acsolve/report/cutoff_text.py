"""Cutoffs as a person reads them."""

from __future__ import annotations

import re
from itertools import pairwise
from typing import TYPE_CHECKING

from acsolve.report.entry import Entry, unit_sign
from acsolve.report.json import cutoff_names
from acsolve.report.number import HALF_POWER_DB, angular, decibels, engineering, plain
from acsolve.report.table import labelled
from acsolve.report.transfer_text import checked_rows

if TYPE_CHECKING:
    from acsolve.analyses.cutoff import Cutoff, CutoffAnswer
    from acsolve.analyses.passband import FrequencyBand
    from acsolve.analyses.roll_off import RollOff

_PLACES = {
    "dc": "at 0 Hz",
    "infinity": "at infinite frequency",
    "peak": "at the peak",
    "stated": "as stated",
}
_LONGEST_FORMULA = 400
_CORNERS_SHOWN = 6
_LONGEST_CORNER = 64  # characters of a closed form beside its number


def cutoff_lines(entry: Entry) -> list[str]:
    """The body of a cutoff answer."""
    found = entry.cutoff
    assert found is not None, "a cutoff entry holds a cutoff answer"
    unit = unit_sign(entry.ask) if entry.ask else ""
    rows = [("reference", _reference(found, unit)), ("level", _level(found, unit))]
    if not found.cutoffs and not found.touches:
        rows.append(("cutoff", "none"))
    for item in found.cutoffs:
        rows += _cutoff_rows(entry, item)
    for touch in found.touches:
        where = f"{engineering(touch.hertz, 'Hz')}  ({angular(touch.rad_per_s)})"
        rows.append(("touches", f"{where}, meets the level without crossing it"))
    for band in found.bands:
        rows += _band_rows(band)
    rows += [*_band_form_rows(entry, found), *_corner_rows(entry, found)]
    rows.append(("complete", _proof(found)))
    rows += [("remark", readable(entry, remark)) for remark in found.remarks]
    return labelled([*rows, *(checked_rows(found.form) if found.form is not None else ())])


def _reference(found: CutoffAnswer, unit: str) -> str:
    reference = found.reference
    place = _PLACES[reference.at]
    if reference.at == "peak" and reference.hertz is not None:
        place = f"at the peak, {engineering(reference.hertz, 'Hz')}"
    if reference.gain is None:
        return f"the gain {place}"
    return f"{engineering(reference.gain, unit)} {place}"


def _level(found: CutoffAnswer, unit: str) -> str:
    half = abs(found.level_db - HALF_POWER_DB) < 1e-12
    words = f"half power, {decibels(found.level_db)}" if half else decibels(found.level_db)
    gain = found.reference.gain
    if gain is None:
        return words
    return f"{words}: {engineering(gain * 10 ** (found.level_db / 20), unit)}"


def _cutoff_rows(entry: Entry, item: Cutoff) -> list[tuple[str, str]]:
    formula = readable(entry, item.closed_form) if item.closed_form else None
    if formula is not None and len(formula) > _LONGEST_FORMULA:
        formula = "a long closed form, see --json" if item.hertz is None else None
    direction = f", {item.direction}" if item.direction else ""
    if item.hertz is None or item.rad_per_s is None:
        rows = [("cutoff", f"w = {formula}{direction}")]
        return [*rows, ("", "in rad/s; divide by 2*pi for hertz")]
    rows = [("cutoff", f"{engineering(item.hertz, 'Hz')}{direction}")]
    number = angular(item.rad_per_s)
    return [*rows, ("", f"w = {formula} = {number}" if formula else f"w = {number}")]


def _band_rows(item: FrequencyBand) -> list[tuple[str, str]]:
    """Bandwidth, centre and quality factor of what lies between two cutoffs."""
    q = "" if item.q is None else f", Q = {plain(item.q)}"
    rows = [(f"{item.kind} band", f"{engineering(item.width, 'Hz')} wide{q}")]
    rows.append(("", f"centre (geometric mean) {engineering(item.centre, 'Hz')}"))
    if item.extremum is not None:
        word = "peak" if item.kind == "pass" else "deepest"
        rows.append(("", f"{word} at {engineering(item.extremum, 'Hz')}"))
    return rows


def _band_form_rows(entry: Entry, found: CutoffAnswer) -> list[tuple[str, str]]:
    """Width, centre and quality factor of a lone band in closed form."""
    forms = found.band_forms
    if forms is None:
        return []
    width, centre, q = (readable(entry, text) for text in (forms.width, forms.centre, forms.q))
    if max(map(len, (width, centre, q))) > _LONGEST_FORMULA:
        return []
    label = "" if found.bands else "band"
    return [
        (label, f"width w = {width}, centre w = {centre}, in rad/s"),
        ("", f"Q = {q}"),
    ]


def _corner_rows(entry: Entry, found: CutoffAnswer) -> list[tuple[str, str]]:
    """Corners of the asymptotes with the slopes on either side."""
    tail = found.roll_off
    if tail is None:
        return []
    low, high = tail.ends_db
    if tail.slopes_db is None:
        ends = f"{low} dB/decade towards 0 Hz, {high} dB/decade towards infinite frequency"
        return [*_corner_form_rows(entry, tail), ("slopes", ends)]
    if not tail.corners:
        return [("slope", f"{low} dB/decade throughout")] if low else []
    if len(tail.corners) > _CORNERS_SHOWN:
        first, last = (engineering(tail.corners[k].hertz or 0.0, "Hz") for k in (0, -1))
        words = f"{len(tail.corners)} from {first} to {last}, slope {low} to {high} dB/decade"
        return [("corners", words), ("", "--json gives all of them")]
    rows = []
    for corner, slopes in zip(tail.corners, pairwise(tail.slopes_db), strict=True):
        place = engineering(corner.hertz or 0.0, "Hz")
        rows.append(("corner", f"{place}, slope {slopes[0]} to {slopes[1]} dB/decade"))
        if corner.closed_form is not None and len(corner.closed_form) <= _LONGEST_CORNER:
            number = angular(corner.rad_per_s or 0.0)
            rows.append(("", f"w = {readable(entry, corner.closed_form)} = {number}"))
    return rows


def _corner_form_rows(entry: Entry, tail: RollOff) -> list[tuple[str, str]]:
    rows = []
    for corner in tail.corners:
        text = readable(entry, corner.closed_form or "")
        if len(text) > _LONGEST_FORMULA:
            text = "a long closed form, see --json"
        rows.append(("corner", f"w = {text}, slope {corner.change_db:+d} dB/decade above"))
        if corner.condition is not None and len(corner.condition) <= _LONGEST_FORMULA:
            rows.append(("", f"where {readable(entry, corner.condition)}"))
    return rows


def readable(entry: Entry, text: str) -> str:
    """A closed form with the file's own names and `^` for powers."""
    names = {safe: name for name, safe in cutoff_names(entry).items()}
    spelled = re.sub(r"[A-Za-z_]\w*", lambda match: names.get(match[0], match[0]), text)
    return spelled.replace("**", "^")


def _proof(found: CutoffAnswer) -> str:
    where = "" if found.searched is None else f" from {_band(found.searched)}"
    if found.complete:
        numeric = " (numeric, in ball arithmetic)" if found.method.startswith("numeric") else ""
        return f"proven: none is missing{where}{numeric}"
    return f"not proven{where}, there may be more ({found.method})"


def _band(edges: tuple[float, float]) -> str:
    low, high = (engineering(edge, "Hz") for edge in edges)
    return f"{low} to {high}"
