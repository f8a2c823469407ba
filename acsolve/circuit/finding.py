"""Diagnostics about the network: one way to build them, and how they name things."""

from __future__ import annotations

from collections.abc import Iterable

from acsolve.circuit.netlist import GROUND, Pair, Part
from acsolve.codes import Code
from acsolve.errors import Diagnostic, Label, Severity


def finding(
    code: Code, message: str, parts: Iterable[Part] = (), *, hint: str, severity: Severity
) -> Diagnostic:
    """A diagnostic that points at the first part and labels the others."""
    involved = list(parts)
    first = involved[0] if involved else None
    return Diagnostic(
        code=code,
        message=message,
        span=first.span if first else None,
        where=first.name if first and first.span is None else None,
        hint=hint,
        labels=tuple(
            Label(part.span, f"{part.name} is here") for part in involved[1:] if part.span
        ),
        severity=severity,
    )


def listed(items: Iterable[str], limit: int = 8) -> str:
    """Names as a sentence lists them: "a, b and c"; a long list is cut."""
    names = list(dict.fromkeys(items))
    if len(names) > limit:
        names = [*names[: limit - 1], f"{len(names) - limit + 1} more"]
    *start, end = names
    return f"{', '.join(start)} and {end}" if start else end


def pair_text(pair: Pair) -> str:
    """A pair as the format writes it: the node alone where it stands against `gnd`."""
    first, second = pair
    if second == GROUND:
        return first
    return f"({first}, {second})"
