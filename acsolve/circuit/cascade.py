"""Rows of equal copies: found among the parts, and put away behind their two ends.

Between its two pins and `gnd` a copy is a two-port, and a row of equal ones is a power of it;
a question about nodes outside need not know what is inside. What is asked about inside stays
in sight: the copy that holds it is written out, and the rows before and after it are not.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Sequence
from dataclasses import dataclass, replace

from acsolve.circuit.expression import names, renamed
from acsolve.circuit.graph import reference_groups
from acsolve.circuit.netlist import GROUND, Cascade, Coupling, Netlist, Part, Section
from acsolve.circuit.value import Value

CASCADE = "cascade"  # the kind of the part that stands for a row; the format has no such kind
_FEWEST = 32  # copies that are worth a two-port (empirical)
#: Sources act on their own; measured parts get their data by their own names, copy by copy.
_WRITTEN_OUT = ("voltage_source", "current_source", "measured")


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """Copies that a text asked for: `count` of them from `near` to `far`, joined at `pin`."""

    name: str
    count: int
    near: str
    far: str
    pin: str


def cascades(netlist: Netlist, rows: Iterable[Row]) -> tuple[Cascade, ...]:
    """The rows whose copies are equal in kind, connection and value, with nothing attached.

    Every copy is compared with the first, so a value changed in one of them, a part left out or
    a node of theirs used elsewhere keeps the row as it was written.
    """
    long = [row for row in rows if row.count >= _FEWEST]
    if not long:
        return ()
    places = {part.name: place for place, part in enumerate(netlist.parts)}
    found = (_cascade(netlist, row, places) for row in long)
    return tuple(item for item in found if item is not None and _equal(netlist, item))


def _cascade(netlist: Netlist, row: Row, places: dict[str, int]) -> Cascade | None:
    first, second = f"{row.name}[1].", f"{row.name}[2]."
    inside = [place for name, place in places.items() if name.startswith(first)]
    following = [place for name, place in places.items() if name.startswith(second)]
    if not inside or len(inside) != len(following) or min(following) - min(inside) != len(inside):
        return None
    item = Cascade(
        name=row.name,
        count=row.count,
        start=min(inside),
        length=len(inside),
        near=netlist.resolve(row.near),
        far=netlist.resolve(row.far),
        pin=row.pin,
    )
    joined = any(node.startswith(item.stem) for node in (item.near, item.far))
    fits = item.start + item.count * item.length <= len(netlist.parts)
    return item if fits and not joined else None


def _equal(netlist: Netlist, item: Cascade) -> bool:
    """Whether all copies are equal, and nothing else touches or mentions their inside."""
    if not _is_two_port(netlist, item):
        return False
    if not all(_like_first(netlist, item, number) for number in range(1, item.count + 1)):
        return False
    if not _equally_coupled(netlist, item) or not _equal_quantities(netlist, item):
        return False
    stem = item.stem
    outside = list(_outside(netlist, item))
    if any(node.startswith(stem) for part in outside for node in part.nodes):
        return False
    values = [value for part in outside for value in part.values.values()]
    values += [
        quantity.value for name, quantity in netlist.quantities.items() if not name.startswith(stem)
    ]
    return not any(name.startswith(stem) for value in values for name in _mentions(value))


def _is_two_port(netlist: Netlist, item: Cascade) -> bool:
    """Whether a copy conducts between its pins and `gnd`, and its parts alone tell what it is."""
    copy = Netlist(parts=tuple(_copy(netlist, item, 1)), quantities=netlist.quantities)
    if any(part.kind in _WRITTEN_OUT for part in copy.parts) or GROUND not in copy.nodes():
        return False
    groups = reference_groups(copy)
    return all(
        node in groups.of and groups.shares_reference(node, GROUND) for node in _ends(item, 1)
    )


def _outside(netlist: Netlist, item: Cascade) -> Iterator[Part]:
    stop = item.start + item.count * item.length
    yield from netlist.parts[: item.start]
    yield from netlist.parts[stop:]


def _mentions(value: Value) -> frozenset[str]:
    given = [each for each in (value.expression, value.at_hertz) if each is not None]
    return frozenset(name for each in given for name in names(each))


def _copy(netlist: Netlist, item: Cascade, number: int) -> Sequence[Part]:
    """The parts of one copy."""
    start = item.start + (number - 1) * item.length
    return netlist.parts[start : start + item.length]


def _ends(item: Cascade, number: int) -> tuple[str, str]:
    """The near and the far node of one copy."""
    near = item.near if number == 1 else f"{item.name}[{number - 1}].{item.pin}"
    far = item.far if number == item.count else f"{item.name}[{number}].{item.pin}"
    return near, far


def _like_first(netlist: Netlist, item: Cascade, number: int) -> bool:
    """Whether a copy is the first one under other names."""
    before, after = f"{item.name}[1].", f"{item.name}[{number}]."
    nodes = dict(zip(_ends(item, 1), _ends(item, number), strict=True))
    for model, part in zip(_copy(netlist, item, 1), _copy(netlist, item, number), strict=True):
        if part.name != after + model.name.removeprefix(before) or part.kind != model.kind:
            return False
        for node, other in zip(model.nodes, part.nodes, strict=True):
            expected = nodes.get(node)
            if expected is None:
                if node != GROUND and not node.startswith(before):
                    return False
                expected = node if node == GROUND else after + node.removeprefix(before)
            if other != expected:
                return False
        if not _same_values(model, part, before, after):
            return False
    return True


def _same_values(model: Part, part: Part, before: str, after: str) -> bool:
    if model.values.keys() != part.values.keys():
        return False
    return all(
        _same(value, part.values[attribute], before, after)
        for attribute, value in model.values.items()
    )


def _same(model: Value, value: Value, before: str, after: str) -> bool:
    """Whether nominal values agree once the names of one copy are those of the other."""
    for first, second in (
        (model.expression, value.expression),
        (model.at_hertz, value.at_hertz),
    ):
        if first is None or second is None:
            if first is not second or first is model.expression:
                return False  # a part without a value is its own symbol, another in each copy
            continue
        own = {
            name: after + name.removeprefix(before)
            for name in names(first)
            if name.startswith(before)
        }
        if first is not second and (renamed(first, own) if own else first) != second:
            return False
    return True


def _equally_coupled(netlist: Netlist, item: Cascade) -> bool:
    """Whether the coils of every copy are coupled alike, and with no coil outside."""
    of_copy: dict[int, list[tuple[str, str, Value]]] = {}
    for coupling in netlist.couplings:
        pair = coupling.first, coupling.second
        if not any(name.startswith(item.stem) for name in pair):
            continue
        if not all(name.startswith(item.stem) for name in pair):
            return False
        first, second = (_number(name, item) for name in pair)
        if first != second:
            return False
        inner = [name.partition("].")[2] for name in pair]
        of_copy.setdefault(first, []).append((inner[0], inner[1], coupling.coefficient))
    lists = list(of_copy.values())
    return not lists or (len(lists) == item.count and all(each == lists[0] for each in lists))


def _equal_quantities(netlist: Netlist, item: Cascade) -> bool:
    """Whether the named quantities inside have the same values in every copy."""
    before = f"{item.name}[1]."
    inside = {
        name.removeprefix(before): quantity.value
        for name, quantity in netlist.quantities.items()
        if name.startswith(before)
    }
    for number in range(2, item.count + 1):
        after = f"{item.name}[{number}]."
        for name, value in inside.items():
            other = netlist.quantities.get(after + name)
            if other is None or not _same(value, other.value, before, after):
                return False
    return True


def _couplings(netlist: Netlist, item: Cascade) -> tuple[Coupling, ...]:
    """The couplings inside the first copy."""
    stem = f"{item.name}[1]."
    return tuple(coupling for coupling in netlist.couplings if coupling.first.startswith(stem))


# ---------------------------------------------------------------- put away


def condensed(netlist: Netlist, keep: Collection[str]) -> Netlist:
    """The netlist with one part in the place of each row of equal copies.

    Parameters
    ----------
    netlist : the circuit.
    keep : nodes and names of parts that must stay in sight.

    Returns
    -------
    Netlist
        the same object where there is nothing to put away.
    """
    shown = [item for item in netlist.cascades if {item.near, item.far} & {GROUND} == set()]
    shown = [item for item in shown if item.near != item.far]
    if not shown:
        return netlist
    parts: list[Part] = []
    sections: dict[str, Section] = {}
    place = 0
    for item in sorted(shown, key=lambda item: item.start):
        parts += netlist.parts[place : item.start]
        for first, last in _runs(item, keep):
            if last - first + 1 < _FEWEST:
                start, stop = (
                    item.start + (first - 1) * item.length,
                    item.start + last * item.length,
                )
                parts += netlist.parts[start:stop]
            else:
                part, section = _put_away(netlist, item, first, last)
                parts.append(part)
                sections[part.name] = section
        place = item.start + item.count * item.length
    parts += netlist.parts[place:]
    if not sections:
        return netlist
    hidden = tuple(item.stem for item in shown)
    couplings = netlist.couplings
    if couplings:
        seen = {part.name for part in parts}
        couplings = tuple(
            each for each in couplings if not each.first.startswith(hidden) or each.first in seen
        )
    return replace(netlist, parts=tuple(parts), couplings=couplings, sections=sections, cascades=())


def _runs(item: Cascade, keep: Collection[str]) -> Iterator[tuple[int, int]]:
    """Copies that stay together, as first and last number; a copy to keep is a run of its own."""
    wanted = sorted({_number(name, item) for name in keep if name.startswith(item.stem)})
    first = 1
    for number in wanted:
        if first < number:
            yield first, number - 1
        yield number, number
        first = number + 1
    if first <= item.count:
        yield first, item.count


def _number(name: str, item: Cascade) -> int:
    """The number of the copy that a name lies in."""
    return int(name[len(item.stem) :].partition("]")[0])


def _put_away(netlist: Netlist, item: Cascade, first: int, last: int) -> tuple[Part, Section]:
    """The part that stands for a run of copies, and what it consists of."""
    ends = _ends(item, first)[0], _ends(item, last)[1]
    near, far = _ends(item, 1)
    section = Section(
        parts=tuple(_copy(netlist, item, 1)),
        couplings=_couplings(netlist, item),
        near=near,
        far=far,
        count=last - first + 1,
    )
    whole = first == 1 and last == item.count
    name = item.name if whole else f"{item.name}[{first}..{last}]"
    return Part(name=name, kind=CASCADE, nodes=(*ends, GROUND), values={}), section
