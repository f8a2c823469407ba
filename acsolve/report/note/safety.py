"""Where the work can hurt someone: what a note has to say about it."""

from __future__ import annotations

import re
from math import sqrt

from acsolve.circuit.netlist import Part
from acsolve.report.note.facts import Facts
from acsolve.report.note.values import number_of

AC_RMS, DC = 30.0, 60.0  # volts; touch is held to be without danger below these in dry places
_MAINS = re.compile(r"(?<![a-z])(mains|line_?voltage|live)(?![a-z])", re.IGNORECASE)
_USUAL = (
    "Capacitors keep their charge after switching off: discharge them through a resistor and "
    "measure before touching.",
    "Work on it isolated from the mains, switched off and secured; parts must have the voltage, "
    "power and insulation ratings that the place demands, which this note does not check.",
)
_LAW = (
    "Local codes and licensed practice decide what may be built, tested and connected; a "
    "calculation does not."
)


def dangers(facts: Facts) -> tuple[str, ...]:
    """The remarks that voltages, cautions and names of mains-connected parts call for."""
    high = [text for part in facts.netlist.parts if (text := _high(part, facts)) is not None]
    named = [part.name for part in facts.netlist.parts if _is_mains(part)]
    found = high[:6]
    if named:
        found.append(f"Named as connected to the mains: {', '.join(named[:8])}.")
    if not found and not facts.cautions:
        return ()
    return (*found, *_USUAL, _LAW)


def _high(part: Part, facts: Facts) -> str | None:
    """What a voltage source above the limits is, in words. Amplitudes are peak values."""
    if part.kind != "voltage_source":
        return None
    value = part.values.get("amplitude")
    amplitude = None if value is None else number_of(value, facts.netlist)
    if amplitude is None or isinstance(amplitude, complex):
        return None
    size = abs(amplitude)
    if size / sqrt(2) > AC_RMS or size > DC:
        return (
            f"{part.name} gives {size:.4g} V, as a peak value {size / sqrt(2):.4g} V rms: above "
            f"{AC_RMS:g} V rms or {DC:g} V dc a shock can kill."
        )
    return None


def _is_mains(part: Part) -> bool:
    """Whether the name of a part, or of a node it stands at, says so."""
    return any(_MAINS.search(text) for text in (part.name, *part.nodes))
