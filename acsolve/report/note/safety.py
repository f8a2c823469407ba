"""Where the work can hurt someone: what a note has to say about it."""

from __future__ import annotations

import re
from collections.abc import Iterator
from math import sqrt

from acsolve.circuit.netlist import GROUND, Netlist, Part
from acsolve.report.note.facts import Facts
from acsolve.report.note.values import number_of
from acsolve.report.note.wording import listed

AC_RMS, DC = 30.0, 60.0  # volts; touch is held to be without danger below these in dry places
_MAINS = re.compile(r"(?<![a-z])(mains|line_?voltage|live)(?![a-z])", re.IGNORECASE)
_MOST = 12  # parts that are named
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
    found = [*high[:6], *_mains(facts.netlist)]
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


def _mains(netlist: Netlist) -> Iterator[str]:
    """Which names say mains, and every part that hangs on them by conductors and parts."""
    named = [part for part in netlist.parts if _MAINS.search(part.name)]
    nodes = [node for node in netlist.nodes() if _MAINS.search(node)]
    if not named and not nodes:
        return
    reached = {*nodes, *(node for part in named for node in part.nodes)} - {GROUND}
    parts = list(named)
    while True:
        more = [part for part in netlist.parts if part not in parts and _touches(part, reached)]
        if not more:
            break
        parts += more
        for part in more:
            for side in _sides(part):
                if not reached.isdisjoint(side):
                    reached |= set(side) - {GROUND}
    kept = [part.name for part in netlist.parts if part in parts]
    words = listed([f"“{text}”" for text in dict.fromkeys([*nodes, *(p.name for p in named)])])
    more_than = f" and {len(kept) - _MOST} more" if len(kept) > _MOST else ""
    yield (
        f"By its name {words} may be connected to the mains. On it hang, other than by ground: "
        f"{', '.join(kept[:_MOST])}{more_than}. Names may not tell everything: the list can be "
        "incomplete."
    )


def _touches(part: Part, reached: set[str]) -> bool:
    return not reached.isdisjoint(part.nodes)


def _sides(part: Part) -> tuple[tuple[str, ...], ...]:
    """The terminals of a part in groups that conduct; a transformer's windings do not."""
    if part.kind == "transformer":
        return part.nodes[:2], part.nodes[2:]
    return (part.nodes,)
