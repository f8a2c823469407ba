"""Cutoffs as a person reads them."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from acsolve.report.entry import Entry, unit_sign
from acsolve.report.json import cutoff_names
from acsolve.report.number import angular, decibels, engineering, plain
from acsolve.report.table import labelled
from acsolve.report.transfer_text import checked_rows

if TYPE_CHECKING:
    from acsolve.analyses.cutoff import Cutoff, CutoffAnswer
    from acsolve.analyses.passband import FrequencyBand

_PLACES = {
    "dc": "at 0 Hz",
    "infinity": "at infinite frequency",
    "peak": "at the peak",
    "stated": "as stated",
}
_HALF_POWER = -3.0102999566398120
_LONGEST_FORMULA = 400


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
    half = abs(found.level_db - _HALF_POWER) < 1e-12
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
