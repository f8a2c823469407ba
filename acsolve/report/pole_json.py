"""Poles, zeros, hidden modes and stability as JSON values."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from acsolve.report.json import complex_number, number

if TYPE_CHECKING:
    from acsolve.analyses.pole_record import PoleAnswer, RootRecord, RootTable
    from acsolve.analyses.stability import Stability


def pole_body(found: PoleAnswer) -> dict[str, Any]:
    """The keys that stand beside `poles` and `zeros`; null where something is not known."""
    tables = [item for item in (found.poles, found.zeros) if item is not None]
    return {
        "pole_records": _records(found.poles),
        "zero_records": _records(found.zeros),
        "hidden_modes": _records(found.hidden),
        "roots_certified": all(item.certified for item in tables) if tables else None,
        "numerator_factors": _factors(found.zeros),
        "denominator_factors": _factors(found.poles),
        "stability": None if found.stability is None else stability_body(found.stability),
    }


def _records(table: RootTable | None) -> list[dict[str, Any]] | None:
    return None if table is None else [_record(item) for item in table.roots]


def _record(item: RootRecord) -> dict[str, Any]:
    return {
        "value": None if item.value is None else complex_number(item.value),
        "multiplicity": item.multiplicity,
        "closed_form": item.closed_form,
        "w0": number(item.w0),
        "w0_closed_form": item.w0_form,
        "q": number(item.q),
        "q_closed_form": item.q_form,
        "damping_ratio": number(item.damping),
        "time_constant_s": number(item.tau),
        "digits": None if item.digits is None else list(item.digits),
        "estimated_error": number(item.error),
    }


def _factors(table: RootTable | None) -> list[list[Any]] | None:
    if table is None or not table.certified:
        return None
    return [[item.text, item.multiplicity] for item in table.factors]


def stability_body(found: Stability) -> dict[str, Any]:
    """The verdict, what it rests on, and how many modes lie where."""
    planes = found.planes
    return {
        "verdict": found.verdict,
        "order": found.order,
        "conditions": list(found.conditions),
        "left": None if planes is None else planes.left,
        "on_axis": None if planes is None else planes.axis,
        "right": None if planes is None else planes.right,
        "method": found.method,
        "reason": found.reason,
    }
