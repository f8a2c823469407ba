"""Thévenin and Norton equivalents, as a person reads them and as JSON values."""

from __future__ import annotations

from collections.abc import Iterator
from typing import TYPE_CHECKING, Any

from acsolve.report.entry import EquivalentSet
from acsolve.report.formula import formula_lines
from acsolve.report.json import complex_number, numbers, replaced_names
from acsolve.report.number import complex_text, engineering
from acsolve.report.table import Side, aligned

if TYPE_CHECKING:
    from acsolve.analyses.closed_form import ClosedForm

_FIELDS = (
    ("voltage", "open-circuit voltage", "V(s)", "V"),
    ("current", "short-circuit current", "I(s)", "A"),
    ("impedance", "impedance", "Z(s)", "ohm"),
    ("admittance", "admittance", "Y(s)", "S"),
)


def equivalent_lines(found: EquivalentSet, columns: int | None) -> list[str]:
    """What does not exist is said so; the impedance itself stands above already."""
    lines = ["", "equivalent, driven by the file's own sources:"]
    for name, words, letter, _ in _FIELDS[:2]:
        form: ClosedForm | None = getattr(found.forms, name)
        if form is None:
            lines.append(f"  {words}: none, the network has no finite one")
        elif form.numerator == 0:
            lines.append(f"  {words}: 0, no source of the file acts on this pair")
        else:
            lines.append(f"  {words}")
            lines += [f"    {line}" for line in formula_lines(form, letter, columns=columns)]
    return [*lines, *_table(found)]


def _table(found: EquivalentSet) -> list[str]:
    if found.sweep is None:
        return []
    shown = [field for field in _FIELDS[:3] if getattr(found.sweep, field[0]) is not None]
    rows = [["frequency", *(words for _, words, _, _ in shown)]]
    for place, hertz in enumerate(found.hertz):
        row = [engineering(hertz, "Hz")]
        for name, _, _, unit in shown:
            row.append(complex_text(complex(getattr(found.sweep, name)[place]), unit))
        rows.append(row)
    sides: list[Side] = ["right"] * (len(shown) + 1)
    return ["", *aligned(rows, sides=sides, gap=3)]


def equivalent_body(found: EquivalentSet) -> dict[str, Any]:
    """The key `equivalent` of an impedance: expressions, and numbers where they are asked."""
    body: dict[str, Any] = dict(_written(found))
    names: dict[str, str] = {}
    for field in _FIELDS:
        form = getattr(found.forms, field[0])
        names |= {} if form is None else form.spelled(safe=True).names
    body["symbols"] = replaced_names(names)
    if found.sweep is not None:
        body["hertz"] = numbers(found.hertz)
        for name, *_ in _FIELDS:
            values = getattr(found.sweep, name)
            listed = None if values is None else [complex_number(item) for item in values.tolist()]
            body[f"{name}_at"] = listed
    return {"equivalent": body}


def _written(found: EquivalentSet) -> Iterator[tuple[str, str | None]]:
    for name, *_ in _FIELDS:
        form = getattr(found.forms, name)
        yield name, None if form is None else form.text(safe=True)
