"""What stands before and behind a path: impedances at both ends, and the file's own end parts."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterator, Sequence
from typing import Any

import numpy as np

from acsolve.analyses.beside import STEP, beside_roots
from acsolve.errors import AcsolveError
from acsolve.report.note.facts import EndPart, Loading
from acsolve.report.note.values import number_of

_READ_PARTS = 8  # up to which impedances over symbols are looked for
_READ_TERMS = 2_000
_TELLING = ("equations.singular", "equations.undriven")
_SOURCE = re.compile(r"src|source|gen|send|^R_?[sg]\d*$", re.IGNORECASE)
_DRIVES = {"voltage-ratio": "voltage", "transimpedance": "current", "response": "voltage"}


def loading(path: Any, hertz: Sequence[float]) -> Loading | None:
    """Impedances at both ends over frequency, for every answer that is an open voltage.

    A current through a shorted output has no load to speak of, nor has an impedance.
    """
    ask, circuit = path.ask, path.circuit
    drive = _DRIVES.get(ask.quantity)
    if drive is None or ask.observes_current:
        return None
    source_side = None
    if ask.source is not None:
        try:
            source_side = _meant(circuit.looking_into(ask.source).response, hertz)
        except AcsolveError as error:
            if error.code not in _TELLING:
                raise

    def behind(places: list[float]) -> Any:
        return circuit.equivalent(
            ask.target, source=ask.source, drive=drive, hertz=places
        ).impedance

    forms = _forms(circuit, ask, drive)
    return Loading(
        source_side=source_side,
        load_side=_meant(behind, hertz),
        source_form=forms[0],
        load_form=forms[1],
        ends=tuple(_ends(path, hertz)),
    )


def _meant(impedance: Callable[[list[float]], Any], hertz: Sequence[float]) -> Any:
    """Impedances over frequency: exactly zero or infinite where the rounding hides that."""
    number = len(hertz)
    both = impedance([*hertz, *(value * (1 + STEP) for value in hertz)])
    if both is None:
        return None
    found = np.array(both[:number])
    beside = beside_roots(found, both[number:])
    found[beside > 0], found[beside < 0] = 0, complex(np.inf, 0)
    return found


def _forms(circuit: Any, ask: Any, drive: str) -> tuple[Any, Any]:
    """Both impedances over symbols, where that is short."""
    if len(circuit.parts) > _READ_PARTS:
        return None, None
    first = None
    try:
        if ask.source is not None:
            looked = circuit.looking_into(ask.source)
            first = looked.closed_form(symbolic=True, budget=_READ_TERMS)
        second = circuit.equivalent(
            ask.target, source=ask.source, drive=drive, symbolic=True
        ).impedance
    except AcsolveError:
        return None, None
    return first, second


def _ends(path: Any, hertz: Sequence[float]) -> Iterator[EndPart]:
    """The file's own source resistance and load, each with the gain without it.

    A resistor across the output is a load. One in line right behind the drive belongs to the
    filter as a rule; it is a source's where its name says so, or where it equals the load.
    """
    circuit, ask = path.circuit, path.ask
    resistors = [part for part in circuit.netlist.parts if part.kind == "resistor"]
    loads = [part for part in resistors if set(part.nodes) == set(ask.target)]
    values = {number_of(part.values["value"], circuit.netlist) for part in loads if part.values}
    if ask.quantity == "voltage-ratio":
        for part in resistors:
            if part in loads or not part.values or not _is_first(part, circuit, ask.source):
                continue
            alike = number_of(part.values["value"], circuit.netlist) in values
            if alike or _SOURCE.search(part.name):
                yield from _without(
                    path, part.name, "source", lambda name: circuit.with_values({name: 0}), hertz
                )
    for part in loads if ask.target != ask.source else ():
        yield from _without(path, part.name, "load", circuit.without, hertz)


def _is_first(part: Any, circuit: Any, source: Any) -> bool:
    """Whether a part alone leads away from the driven node."""
    for node, other in (source, source[::-1]):
        at = [item for item in circuit.netlist.parts if node in item.nodes]
        if node != "gnd" and at == [part] and other not in part.nodes:
            return True
    return False


def _without(
    path: Any, name: str, role: Any, change: Any, hertz: Sequence[float]
) -> Iterator[EndPart]:
    """The gain over frequency without a part; nothing where the rest has no answer."""
    ask = path.ask
    try:
        changed = change(name)
        other = changed.path(
            ask.source, ask.target, quantity=None if ask.source is None else ask.quantity
        )
        swept = other.sweep(list(hertz)).as_meant()
    except AcsolveError:
        return
    yield EndPart(name=name, role=role, gain_db=swept.gain_db)
