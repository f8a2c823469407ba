"""Values that put a cutoff at a wanted frequency: for people and as JSON values."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING, Any

from acsolve.report.entry import Entry
from acsolve.report.json import number
from acsolve.report.number import decibels, engineering, plain
from acsolve.report.table import labelled

if TYPE_CHECKING:
    from acsolve.analyses.value_equation import PartValue
    from acsolve.analyses.value_for import ValueAnswer

_PLACES = {
    "dc": "the gain at 0 Hz",
    "infinity": "the gain at infinite frequency",
    "peak": "the gain at the peak",
    "stated": "the stated gain",
}
_LONGEST = 400
_NOTHING = 1e-15


def _answer(entry: Entry) -> ValueAnswer:
    assert entry.part_value is not None, "a part-value entry holds such an answer"
    return entry.part_value


def part_value_body(entry: Entry) -> dict[str, Any]:
    """The keys of a `part-value` answer; values in SI units."""
    found = _answer(entry)
    return {
        "name": found.name,
        "hertz": number(found.hertz),
        "level_db": number(found.level_db),
        "reference": found.reference,
        "values": [
            {
                "value": number(item.value),
                "closed_form": item.closed_form,
                "condition": item.condition,
                "gain_error": number(item.gain_error),
            }
            for item in found.values
        ],
        "complete": found.complete,
        "omega": found.omega_name,
        "remarks": list(found.remarks),
        "symbols": dict(found.symbols),
    }


def part_value_lines(entry: Entry) -> list[str]:
    """The body of the answer as text."""
    found = _answer(entry)
    below = f"{decibels(found.level_db)} against {_PLACES[found.reference]}"
    rows = [("wanted", f"{below} at {engineering(found.hertz, 'Hz')}")]
    if not found.values:
        rows.append((found.name, "none"))
    for item in found.values:
        rows += _rows(found, item)
    if any(item.closed_form for item in found.values):
        rows.append(("with", f"{found.omega_name} = 2*pi times the wanted frequency"))
    proof = "proven: no positive value is missing" if found.complete else "not proven"
    rows += [("complete", proof), *(("remark", _readable(found, text)) for text in found.remarks)]
    return labelled(rows)


def _rows(found: ValueAnswer, item: PartValue) -> list[tuple[str, str]]:
    from acsolve.circuit.unit import SIGNS

    text = None if item.closed_form is None else _readable(found, item.closed_form)
    if text is not None and len(text) > _LONGEST:
        text = "a long closed form, see --json"
    if item.value is None:
        rows = [(found.name, text or "")]
    else:
        unit = "" if found.dimension is None else SIGNS.get(found.dimension, "")
        rows = [(found.name, engineering(item.value, unit)), *([("", f"= {text}")] if text else [])]
        if item.gain_error is not None:
            small = item.gain_error < _NOTHING
            error = "to the last digit" if small else f"within {plain(item.gain_error, 2)}"
            rows.append(("", f"put back and solved again: the gain is met {error}"))
    if item.condition is not None:
        rows.append(("", f"where {_readable(found, item.condition)}"))
    return rows


def _readable(found: ValueAnswer, text: str) -> str:
    names = dict(found.symbols)
    spelled = re.sub(r"[A-Za-z_]\w*", lambda match: names.get(match[0], match[0]), text)
    return spelled.replace("**", "^")
