"""The table of parts: value, tolerance, where it stands and what it does there."""

from __future__ import annotations

import re
from collections.abc import Iterable

from acsolve.circuit.netlist import GROUND, Netlist, Part
from acsolve.circuit.unit import SIGNS
from acsolve.report.note.facts import Facts
from acsolve.report.note.model import Block, Inline, Section, Table, Words, say
from acsolve.report.note.values import spelled, tolerance_words, value_words
from acsolve.report.note.wording import SPACE, count, name

_MOST = 60
_ALIKE = 4  # so many equal parts of one row of sections are told together
_INDEX = re.compile(r"\[\d+\]")


def parts(facts: Facts) -> Section:
    """Every part; equal ones of a row of sections in one line."""
    netlist = facts.netlist
    groups = _grouped(netlist)
    rows = tuple(_row(group, netlist) for group in groups[:_MOST])
    blocks: list[Block] = [
        Table(
            head=(("Part",), ("Kind",), ("Between",), ("Value",), ("Tolerance",)),
            rows=rows,
            sides=("left", "left", "left", "left", "left"),
            caption="Parts with their nominal values.",
        )
    ]
    if len(groups) > _MOST:
        blocks.append(
            say(
                f"{count(len(groups) - _MOST, 'further line')} left out; the file "
                "at the end has every part."
            )
        )
    blocks += _quantities(netlist)
    return Section(title="Parts", blocks=tuple(blocks))


def _grouped(netlist: Netlist) -> list[list[Part]]:
    """Parts that differ in their index only, together where there are several."""
    groups: dict[object, list[Part]] = {}
    for part in netlist.parts:
        stem = _INDEX.sub("[]", part.name)
        told = [repr(value_words(part, attribute, netlist)) for attribute in part.values]
        key = (stem, part.kind, *told) if stem != part.name else part.name
        groups.setdefault(key, []).append(part)
    found: list[list[Part]] = []
    for group in groups.values():
        found += [group] if len(group) >= _ALIKE else [[part] for part in group]
    return found


def _row(group: list[Part], netlist: Netlist) -> tuple[Words, ...]:
    part = group[0]
    principal = part.definition.principal
    value = None if principal is None else part.values.get(principal)
    unit = _unit(part, principal)
    own: Words = (name(part.name),)
    place: Words = (_place(part),)
    if len(group) > 1:
        own = (name(part.name), " … ", name(group[-1].name), f" ({count(len(group), 'part')})")
        place = ("one in each section",)
    return (
        own,
        (_kind(part),),
        place,
        _values(part, netlist),
        (tolerance_words(value, unit, netlist),),
    )


def _unit(part: Part, attribute: str | None) -> str:
    found = None if attribute is None else part.definition.attribute(attribute)
    return "" if found is None or found.dimension is None else SIGNS.get(found.dimension, "")


def _kind(part: Part) -> str:
    words = part.kind.replace("_", " ")
    if part.definition.two_terminal and part.kind not in ("voltage_source", "current_source"):
        return f"{words}, to ground" if GROUND in part.nodes else f"{words}, in line"
    return words


def _place(part: Part) -> str:
    if part.definition.two_terminal:
        return ", ".join(part.nodes)
    pins = zip(part.definition.terminals, part.nodes, strict=True)
    return ", ".join(f"{item.name}{SPACE}{node}" for item, node in pins)


def _values(part: Part, netlist: Netlist) -> Words:
    """The principal value first, further attributes with their names."""
    if part.file is not None:
        return (f"measured, file {part.file}",)
    found: list[Inline] = []
    principal = part.definition.principal
    order = sorted(part.values, key=lambda item: item != principal)
    for attribute in order:
        found += ["; "] if found else []
        if attribute != principal:
            found.append(f"{attribute.replace('_', ' ')} ")
        found += value_words(part, attribute, netlist)
    if principal is not None and principal not in part.values:
        found = ["symbol", *(["; ", *found] if found else [])]
    return tuple(found) or ("ideal",)


def _quantities(netlist: Netlist) -> Iterable[Block]:
    """Named quantities and couplings, where there are some."""
    rows: list[tuple[Words, ...]] = []
    for item in netlist.quantities.values():
        unit = SIGNS.get(item.dimension, "")
        tolerance = tolerance_words(item.value, unit, netlist)
        rows.append(((name(item.name),), spelled(item.value, unit, netlist), (tolerance,)))
    for coupling in netlist.couplings:
        own: Words = ("coupling of ", name(coupling.first), " and ", name(coupling.second))
        tolerance = tolerance_words(coupling.coefficient, "", netlist)
        rows.append((own, spelled(coupling.coefficient, "", netlist), (tolerance,)))
    if not rows:
        return []
    return [
        Table(
            head=(("Quantity",), ("Value",), ("Tolerance",)),
            rows=tuple(rows[:_MOST]),
            sides=("left", "left", "left"),
            caption="Quantities that several parts share, and couplings.",
        )
    ]
