"""What a drawing says: nets read back from its geometry, and where wires meet.

Two wires are joined where an end of one lies on the other; wires that cross in their middles
are not. All symbols for the reference node are one net.
"""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Iterable, Iterator

from acsolve.circuit.netlist import GROUND
from acsolve.report.drawing.model import Item
from acsolve.report.drawing.sheet import Point, Sheet, Symbol, Wire

Terminal = tuple[str, str]  # part, terminal


def nets(sheet: Sheet) -> frozenset[frozenset[Terminal]]:
    """The sets of terminals that wires join; the reference node is the terminal `("", "gnd")`."""
    parent: dict[object, object] = {}

    def root(item: object) -> object:
        parent.setdefault(item, item)
        while parent[item] != item:
            parent[item] = parent[parent[item]]
            item = parent[item]
        return item

    for wire, point in _touches(sheet.wires, _ends_and_pins(sheet)):
        parent[root(point)] = root((wire.start, wire.end))
    members: dict[object, set[Terminal]] = defaultdict(set)
    for symbol in sheet.symbols:
        if symbol.shape == "ground":
            parent[root(symbol.pins[0].at)] = root(GROUND)
    for symbol in sheet.symbols:
        if symbol.part is not None:
            for pin in symbol.pins:
                members[root(pin.at)].add((symbol.part, pin.terminal))
    members[root(GROUND)].add(("", GROUND))
    return frozenset(map(frozenset, members.values()))


def expected(items: Iterable[Item]) -> frozenset[frozenset[Terminal]]:
    """The sets of terminals that a circuit joins, to be compared with `nets`."""
    members: dict[str, set[Terminal]] = defaultdict(set)
    members[GROUND].add(("", GROUND))
    for item in items:
        for terminal, net in item.ends:
            members[net].add((item.name, terminal))
    return frozenset(map(frozenset, members.values()))


def _ends_and_pins(sheet: Sheet) -> set[Point]:
    found = {point for wire in sheet.wires for point in (wire.start, wire.end)}
    return found | {pin.at for symbol in sheet.symbols for pin in symbol.pins}


def _touches(wires: Iterable[Wire], points: Iterable[Point]) -> Iterator[tuple[Wire, Point]]:
    """Wires with the points that lie on them, looked up by row and column."""
    rows: dict[float, list[float]] = defaultdict(list)
    columns: dict[float, list[float]] = defaultdict(list)
    for x, y in points:
        rows[y].append(x)
        columns[x].append(y)
    for wire in wires:
        (x0, y0), (x1, y1) = wire.start, wire.end
        if y0 == y1:
            low, high = sorted((x0, x1))
            yield from ((wire, (x, y0)) for x in rows[y0] if low <= x <= high)
        else:
            low, high = sorted((y0, y1))
            yield from ((wire, (x0, y)) for y in columns[x0] if low <= y <= high)


def junctions(wires: Iterable[Wire], symbols: Iterable[Symbol]) -> set[Point]:
    """Points where three or more ways meet: ends of wires, wires that pass, pins."""
    listed = tuple(wires)
    ways: dict[Point, int] = defaultdict(int)
    for symbol in symbols:
        for pin in symbol.pins:
            ways[pin.at] += 1
    points = {point for wire in listed for point in (wire.start, wire.end)} | set(ways)
    for wire, point in _touches(listed, points):
        ways[point] += 1 if point in (wire.start, wire.end) else 2
    return {point for point, count in ways.items() if count >= 3}
