"""A drawing read back with plain geometry, sharing no code with what drew it."""

from __future__ import annotations

from itertools import combinations

from acsolve.circuit.netlist import GROUND, Netlist
from acsolve.report.drawing.sheet import Box, Point, Sheet

Terminal = tuple[str, str]


def read_nets(sheet: Sheet) -> set[frozenset[Terminal]]:
    """Sets of (part, terminal) that the lines join; ("", "gnd") is the reference node."""
    groups: list[set[Point]] = [{wire.start, wire.end} for wire in sheet.wires]
    pins = [pin.at for symbol in sheet.symbols for pin in symbol.pins]
    points = [point for group in groups for point in group] + pins
    for wire, group in zip(sheet.wires, list(groups), strict=True):
        group |= {point for point in points if _on(point, wire.start, wire.end)}
    grounds = {item.pins[0].at for item in sheet.symbols if item.shape == "ground"}
    groups += [{point} for point in pins] + ([grounds] if grounds else [])
    merged = _merged(groups)
    found: dict[int, set[Terminal]] = {}
    for symbol in sheet.symbols:
        for pin in symbol.pins if symbol.part is not None else ():
            place = next(k for k, group in enumerate(merged) if pin.at in group)
            found.setdefault(place, set()).add((symbol.part, pin.terminal))
    earth = next((k for k, group in enumerate(merged) if group & grounds), -1)
    found.setdefault(earth, set()).add(("", GROUND))
    return {frozenset(item) for item in found.values()}


def _merged(groups: list[set[Point]]) -> list[set[Point]]:
    of: dict[Point, set[Point]] = {}
    for group in groups:
        whole = set(group)
        for point in group:
            whole |= of.get(point, set())
        for point in whole:
            of[point] = whole
    return list({id(group): group for group in of.values()}.values())


def circuit_nets(netlist: Netlist, shown: set[str]) -> set[frozenset[Terminal]]:
    """The same sets from the circuit itself, of the parts that are shown.

    A terminal that stays on the node it takes by default is not drawn.
    """
    of: dict[str, set[Terminal]] = {GROUND: {("", GROUND)}}
    for part in netlist.parts:
        for terminal, node in zip(part.definition.terminals, part.nodes, strict=True):
            if part.name in shown and (terminal.default is None or node != terminal.default):
                of.setdefault(node, set()).add((part.name, terminal.name))
    return {frozenset(item) for item in of.values()}


def only(nets: set[frozenset[Terminal]], shown: set[str]) -> set[frozenset[Terminal]]:
    """Nets without the terminals of parts that stand for others."""
    kept = {"", *shown}
    return {frozenset(t for t in net if t[0] in kept) for net in nets} - {frozenset()}


def overlaps(sheet: Sheet) -> list[str]:
    """Everything that lies on something else, found pair by pair."""
    wires = [(wire, _box(wire.start, wire.end)) for wire in sheet.wires]
    shapes = [(f"{item.shape} {item.part}", item.box) for item in sheet.symbols]
    texts = [(item.text, item.box) for item in sheet.texts if item.role != "pin"]
    found = [
        f"{a} on {b}"
        for (a, first), (b, second) in combinations(shapes + texts, 2)
        if _share_area(first, second)
    ]
    found += [
        f"{wire} through {name}"
        for wire, line in wires
        for name, box in shapes + texts
        if _runs_through(line, box)
    ]
    for (one, a), (two, b) in combinations(wires, 2):
        if one.net != two.net and _touch(a, b) and not _cross(a, b):
            found.append(f"{one} touches {two}")
        if _along(a, b):
            found.append(f"{one} lies on {two}")
    found += [f"{wire} is slanted" for wire, box in wires if box[0] != box[2] and box[1] != box[3]]
    return found


def wrong_dots(sheet: Sheet) -> set[Point]:
    """Dots that are missing, or that join fewer than three ways."""
    ways: dict[Point, int] = {}
    pins = [pin.at for symbol in sheet.symbols for pin in symbol.pins]
    ends = [point for wire in sheet.wires for point in (wire.start, wire.end)]
    for point in {*pins, *ends}:
        ways[point] = pins.count(point) + ends.count(point)
        ways[point] += 2 * sum(
            _on(point, wire.start, wire.end) and point not in (wire.start, wire.end)
            for wire in sheet.wires
        )
    return {point for point, count in ways.items() if count >= 3} ^ set(sheet.dots)


def _box(start: Point, end: Point) -> Box:
    (a, c), (b, d) = sorted((start[0], end[0])), sorted((start[1], end[1]))
    return a, b, c, d


def _on(point: Point, start: Point, end: Point) -> bool:
    left, top, right, bottom = _box(start, end)
    return left <= point[0] <= right and top <= point[1] <= bottom


def _share_area(a: Box, b: Box) -> bool:
    return min(a[2], b[2]) > max(a[0], b[0]) and min(a[3], b[3]) > max(a[1], b[1])


def _runs_through(line: Box, box: Box) -> bool:
    if line[1] == line[3]:
        return box[1] < line[1] < box[3] and min(line[2], box[2]) > max(line[0], box[0])
    return box[0] < line[0] < box[2] and min(line[3], box[3]) > max(line[1], box[1])


def _touch(a: Box, b: Box) -> bool:
    return min(a[2], b[2]) >= max(a[0], b[0]) and min(a[3], b[3]) >= max(a[1], b[1])


def _cross(a: Box, b: Box) -> bool:
    """Whether two lines cross at right angles, both going on beyond the crossing."""
    level, upright = (a, b) if a[1] == a[3] else (b, a)
    return level[0] < upright[0] < level[2] and upright[1] < level[1] < upright[3]


def _along(a: Box, b: Box) -> bool:
    same_row = a[1] == a[3] == b[1] == b[3] and min(a[2], b[2]) > max(a[0], b[0])
    return same_row or (a[0] == a[2] == b[0] == b[2] and min(a[3], b[3]) > max(a[1], b[1]))
