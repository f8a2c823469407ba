"""Two-ports as a person reads them: each set in closed form, laws, a table over frequency."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import numpy as np

from acsolve.report.entry import Entry
from acsolve.report.number import engineering, plain
from acsolve.report.sweep_text import fixed, shown_rows
from acsolve.report.table import aligned, labelled, wrapped

if TYPE_CHECKING:
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.port_answer import PortAnswer
    from acsolve.analyses.two_port import Matrix
    from acsolve.ports.sets import SetName

_LONGEST = 400  # characters of a closed form on a screen
_WIDE = 99.995  # decibels below zero from which one decimal must do
_PLACES = ("11", "12", "21", "22")


def two_port_lines(entry: Entry) -> list[str]:
    """The body of a two-port answer."""
    found = entry.two_port
    assert found is not None, "a two-port entry holds a two-port answer"
    lines: list[str] = []
    for name, matrix in found.forms.items():
        lines += [*([""] if lines else []), *_set_lines(name, matrix)]
    lines += [*([""] if lines else []), *labelled(_rows(found))]
    return lines + _table(found)


def _set_lines(name: str, matrix: Matrix | None) -> list[str]:
    if matrix is None:
        return [f"{_spelled(name)} parameters do not exist"]
    labels = tuple("ABCD") if name == "abcd" else tuple(f"{name}{place}" for place in _PLACES)
    forms = [form for row in matrix for form in row]
    return labelled(
        [(f"{label} =", _short(form)) for label, form in zip(labels, forms, strict=True)]
    )


def _spelled(name: str) -> str:
    return "ABCD" if name == "abcd" else name


def _short(form: ClosedForm) -> str:
    text = form.text()
    if len(text) <= _LONGEST:
        return text
    return f"{len(form.numerator)} over {len(form.denominator)} terms; --json gives all"


def _rows(found: PortAnswer) -> list[tuple[str, str]]:
    rows = []
    if found.references is not None:
        listed = [_reference(item) for item in found.references]
        rows.append(("reference", " and ".join(dict.fromkeys(listed))))
    if found.ports is not None:
        laws = found.ports.laws
        rows += [
            (name, _word(getattr(laws, name)))
            for name in ("reciprocal", "symmetric", "lossless", "passive")
        ]
        rows.append(("checked", _checked(found)))
    if found.port_condition == "assumed":
        rows.append(("holds", "where each pair's current returns at its second node"))
    if found.remark is not None:
        rows.append(("note", found.remark))
    return rows


def _reference(item: Any) -> str:
    from acsolve.circuit.expression import Number
    from acsolve.equations.write import Spelling, expression_text

    if isinstance(item, Number):
        return engineering(float(item.value), "ohm")
    return expression_text(item, Spelling({}))


def _word(law: bool | None) -> str:
    return "not proven" if law is None else "yes" if law else "no"


def _checked(found: PortAnswer) -> str:
    checks = [
        form.checked
        for matrix in found.forms.values()
        for row in matrix or ()
        for form in row
        if form.checked is not None
    ]
    worst = max((item.max_relative_error for item in checks), default=0.0)
    told = f"largest relative difference {plain(worst, 2)}" if worst else "no difference"
    return f"{len(checks)} closed forms against independent numeric solutions, {told}"


def _table(found: PortAnswer) -> list[str]:
    """One set over frequency: s where there is a reference, else the first that exists."""
    swept = found.sweep
    if swept is None:
        return []
    order: tuple[SetName, ...] = ("s", "abcd", "z", "y", "h", "g")
    name = next((item for item in order if swept.matrices.get(item) is not None), None)
    if name is None:
        return []
    matrix = np.asarray(swept.matrices[name])
    labels = tuple("ABCD") if name == "abcd" else tuple(f"{name}{place}" for place in _PLACES)
    head = ["frequency", *labels, *(["loss"] if found.insertion else [])]
    rows = []
    places = shown_rows(len(swept.hertz))
    for point in places:
        cells = [_cell(complex(value), name) for value in matrix[point].ravel()]
        if found.insertion is not None:
            cells.append(fixed(float(found.insertion.insertion_loss_db[point]), 2, "dB"))
        rows.append([engineering(float(swept.hertz[point]), "Hz"), *cells])
    lines = ["", *aligned([head, *rows], sides=["right"] * len(head))]
    sized = " in dB" if name == "s" else ""
    loss = "; insertion loss between the references" if found.insertion else ""
    more = f"magnitude{sized} <angle in degrees{loss}; --json gives every set"
    if len(places) < len(swept.hertz):
        more = f"{len(places)} of {len(swept.hertz)} points, {more} at all of them"
    return [*lines, "", *wrapped(f"{more[0].upper()}{more[1:]}.", 80)]


def _cell(value: complex, name: str) -> str:
    """Magnitude and angle: in dB for waves."""
    if not np.isfinite(value):
        return plain(float("nan") if np.isnan(value) else float("inf"))
    size = abs(value)
    angle = f"{np.degrees(np.angle(value)) + 0.0:.0f}"
    if name != "s":
        return f"{plain(size, 4)} <{angle}"
    if size == 0:
        return "-infinite"
    gain = 20 * np.log10(size)
    return f"{gain:.{1 if gain <= -_WIDE else 2}f} <{angle}"
