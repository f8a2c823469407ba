"""A two-port as a JSON value, under keys of its own."""

from __future__ import annotations

from collections.abc import Iterable
from math import isfinite
from typing import TYPE_CHECKING, Any

from acsolve.report.entry import Entry

if TYPE_CHECKING:
    from acsolve.analyses.insertion import Insertion
    from acsolve.analyses.port_answer import PortAnswer
    from acsolve.analyses.port_sweep import PortSweep
    from acsolve.analyses.two_port import Matrix

_SETS = ("z", "y", "h", "g", "abcd", "s")
_LAWS = ("reciprocal", "symmetric", "lossless", "passive")
_DECIBELS = (
    "insertion_loss_db",
    "insertion_gain_db",
    "transducer_gain_db",
    "power_gain_db",
    "available_gain_db",
)


def two_port_body(entry: Entry) -> dict[str, Any]:
    """Sets as 2 x 2 strings (null where a set does not exist), laws, and the sweep."""
    found = entry.two_port
    assert found is not None, "a two-port entry holds a two-port answer"
    laws = None if found.ports is None else found.ports.laws
    return {
        "reference_ohm": _references(found),
        **{name: _texts(found.forms.get(name)) for name in _SETS},  # type: ignore[call-overload]
        **{name: None if laws is None else getattr(laws, name) for name in _LAWS},
        "port_condition": found.port_condition,
        "checked": _checked(found),
        "symbols": _symbols(found),
        "remarks": [found.remark] if found.remark else [],
        "sweep": None if found.sweep is None else _sweep(found.sweep, found.insertion),
    }


def _references(found: PortAnswer) -> list[Any] | None:
    """Numbers, or texts where the references are no plain numbers."""
    from acsolve.circuit.expression import Number
    from acsolve.equations.write import Spelling, expression_text

    if found.references is None:
        return None
    return [
        float(item.value) if isinstance(item, Number) else expression_text(item, Spelling({}))
        for item in found.references
    ]


def _texts(matrix: Matrix | None) -> list[list[str]] | None:
    return None if matrix is None else [[form.text(safe=True) for form in row] for row in matrix]


def _forms(found: PortAnswer) -> list[Any]:
    return [form for matrix in found.forms.values() for row in matrix or () for form in row]


def _checked(found: PortAnswer) -> dict[str, Any] | None:
    checks = [form.checked for form in _forms(found) if form.checked is not None]
    if not checks:
        return None
    return {
        "points": min(item.points for item in checks),
        "max_relative_error": _number(max(item.max_relative_error for item in checks)),
    }


def _symbols(found: PortAnswer) -> dict[str, str]:
    names: dict[str, str] = {}
    for form in _forms(found):
        names |= form.spelled(safe=True).names
    return {safe: name for name, safe in names.items() if safe != name}


def _sweep(swept: PortSweep, between: Insertion | None) -> dict[str, Any]:
    """Each set as real and imaginary parts, 2 x 2 lists over frequency."""
    parameters = {
        name: None
        if matrix is None
        else {
            part: [[_numbers(getattr(matrix, part)[:, i, j]) for j in (0, 1)] for i in (0, 1)]
            for part in ("real", "imag")
        }
        for name, matrix in swept.matrices.items()
    }
    return {
        "hertz": _numbers(swept.hertz),
        "parameters": parameters,
        "max_estimated_error": _number(swept.error),
        "insertion": None
        if between is None or swept.reference is None
        else {
            "source_ohm": swept.reference[0],
            "load_ohm": swept.reference[1],
            **{name: _numbers(getattr(between, name)) for name in _DECIBELS},
        },
    }


def _number(value: float) -> float | None:
    return float(value) if isfinite(value) else None


def _numbers(values: Iterable[float]) -> list[float | None]:
    return [_number(float(value)) for value in values]
