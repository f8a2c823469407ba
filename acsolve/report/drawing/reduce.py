"""Which items a circuit is drawn as: parts, rows of equal sections, or blocks."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Collection, Sequence
from dataclasses import dataclass, replace
from math import ceil

from acsolve.circuit.netlist import GROUND, Netlist, Pair
from acsolve.report.drawing.label import Label, labels, numbers, print_signs, short
from acsolve.report.drawing.model import Item, Model, asked_pairs, item_of
from acsolve.report.drawing.order import Chains, chains
from acsolve.report.number import plain

LARGEST = 60  # items beyond which blocks are drawn
_FEWEST = 8  # equal sections that are drawn as first, dots, last
_LONGEST_SECTION = 6
_GROUPS = 12
_NOTES = 5


def model_of(netlist: Netlist, source: Pair | None = None, target: Pair | None = None) -> Model:
    """What is to be drawn of a circuit, with the signal running from one pair to another."""
    if source is None and target is None:
        source, target = asked_pairs(netlist)
    label = labels(netlist)
    coupled = {name for item in netlist.couplings for name in (item.first, item.second)}
    items = [
        item_of(part, label, _marks(part.name in coupled, part.kind, part.values))
        for part in netlist.parts
    ]
    known = netlist.nodes()
    rail = source[1] if source and GROUND not in known and source[1] in known else GROUND
    model = Model(
        items=tuple(items),
        source=source,
        target=target,
        named=_named(netlist, source, target, {GROUND, rail}),
        rail=rail,
        notes=_notes(netlist),
    )
    model = _with_rows(model)
    if len(model.items) > LARGEST:
        model = _with_rows(_with_blocks(model))
    if len(model.items) > LARGEST:
        model = _with_groups(model)
    return model


def _marks(coupled: bool, kind: str, values: Collection[str]) -> tuple[str, ...]:
    real = {"open_loop_gain", "gain_bandwidth"} & set(values)
    return ("dot",) * coupled + ("ideal",) * (kind == "opamp" and not real)


def _named(
    netlist: Netlist, source: Pair | None, target: Pair | None, aside: Collection[str]
) -> tuple[str, ...]:
    """Nets whose names are shown: of the path, of every question and port."""
    pairs = [source, target, *netlist.ports.values()]
    pairs += [pair for item in netlist.questions for pair in (item.source, item.target)]
    asked = [net for pair in pairs if pair is not None for net in pair]
    return tuple(dict.fromkeys(net for net in asked if net not in aside))


def _notes(netlist: Netlist) -> tuple[str, ...]:
    """The couplings, in words."""
    number = numbers(netlist)
    found = []
    for item in netlist.couplings[:_NOTES]:
        text = f"{short(item.first)} and {short(item.second)} are coupled"
        size = number(item.coefficient)
        found.append(text if size is None else f"{text}, k = {print_signs(plain(size))}")
    more = len(netlist.couplings) - _NOTES
    return (*found, *([f"and {more} couplings more"] if more > 0 else []))


# ---------------------------------------------------------------- rows of equal sections


@dataclass(frozen=True, slots=True, kw_only=True)
class _Row:
    """Equal sections along a path: `count` of them, `period` steps each, from step `start`."""

    start: int
    period: int
    count: int


def _with_rows(model: Model) -> Model:
    """The model with every row of equal sections as first, dots, last."""
    items = list(model.items)
    found = chains(model)
    for chain in found.rows:
        steps = [_step(model, found, chain, place) for place in range(1, len(chain))]
        for row in _rows([step.likeness for step in steps], [step.is_end for step in steps]):
            first = row.start + row.period
            last = row.start + row.period * (row.count - 1)
            gone = [item for step in steps[first:last] for item in step.items]
            places = {id(item) for item in gone}
            at = next(k for k, item in enumerate(items) if id(item) in places)
            items = [item for item in items if id(item) not in places]
            items.insert(at, _dots(gone, chain[first], chain[last], row.count - 2))
    condensed = model.condensed or len(items) < len(model.items)
    return replace(model, items=tuple(items), condensed=condensed)


def _dots(gone: Sequence[Item], near: str, far: str, count: int) -> Item:
    names = tuple(name for item in gone for name in (item.hidden or (item.name,)))
    return Item(
        name=f"{gone[0].name} …",
        shape="dots",
        ends=(("near", near), ("far", far)),
        label=Label(f"{count} more alike"),
        hidden=names,
        signature=("dots", names),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Step:
    """What lies between two nets of a chain, with what hangs at the second.

    Equal steps have equal `likeness`. A row ends where the second net is named, or where
    something else is attached to it.
    """

    items: tuple[Item, ...]
    likeness: object
    is_end: bool


def _step(model: Model, found: Chains, chain: Sequence[str], place: int) -> _Step:
    first, second = chain[place - 1], chain[place]
    after = set(chain[place + 1 : place + 2])
    places = {GROUND: 0, model.rail: 1, first: 2, second: 3}
    held: list[tuple[Item, object]] = []
    is_end = second in model.named
    for item in found.on[second]:
        own = {*item.nets} & found.nets
        if own <= {first, second}:
            ends = tuple(places.get(net, -1) for net in item.nets)
            held.append((item, (repr(item.signature), ends)))
        elif not own <= {second, *after}:
            is_end = True
    likeness = tuple(sorted((kind for _, kind in held), key=repr))
    return _Step(items=tuple(item for item, _ in held), likeness=likeness, is_end=is_end)


def _rows(signatures: Sequence[object], ends: Sequence[bool]) -> list[_Row]:
    """Rows of equal sections, the longest reach first at each place."""
    found: list[_Row] = []
    start = 0
    while start < len(signatures):
        best = None
        for period in range(1, _LONGEST_SECTION + 1):
            end = start
            stop = next((k for k in range(start, len(ends)) if ends[k]), len(ends) - 1)
            while end + period <= stop and signatures[end] == signatures[end + period]:
                end += 1
            count = (end - start + period) // period
            if count >= _FEWEST and (best is None or count * period > best.count * best.period):
                best = _Row(start=start, period=period, count=count)
        if best is None:
            start += 1
        else:
            found.append(best)
            start += best.period * best.count
    return found


# ---------------------------------------------------------------- blocks


def _with_blocks(model: Model) -> Model:
    """The model with one box for each copy of a block of the file."""
    groups: dict[str, list[Item]] = defaultdict(list)
    for item in model.items:
        groups[item.name.partition(".")[0] if "." in item.name else item.name].append(item)
    return _boxed(model, list(groups.items()))


def _with_groups(model: Model) -> Model:
    """The model as boxes of parts that hang together, near ones in one box."""
    order = _by_nearness(model)
    size = ceil(len(order) / _GROUPS)
    pieces = [order[at : at + size] for at in range(0, len(order), size)]
    return _boxed(model, [(f"{short(p[0].name)} to {short(p[-1].name)}", p) for p in pieces])


def _by_nearness(model: Model) -> list[Item]:
    """Items in the order in which a walk from the source meets them."""
    on: dict[str, list[Item]] = defaultdict(list)
    aside = {GROUND, model.rail}
    for item in model.items:
        for net in dict.fromkeys(net for net in item.nets if net not in aside):
            on[net].append(item)
    start = [model.source[0]] if model.source and model.source[0] in on else []
    queue = dict.fromkeys([*start, *on])
    found: dict[int, Item] = {}
    for first in list(queue):
        waiting = [first]
        for net in waiting:
            for item in on.pop(net, []):
                found.setdefault(id(item), item)
                waiting += [other for other in item.nets if other in on]
    return list({**found, **{id(item): item for item in model.items}}.values())


def _boxed(model: Model, groups: Sequence[tuple[str, list[Item]]]) -> Model:
    """The model with each group of two items or more as one box with the nets it shares."""
    users: dict[str, int] = defaultdict(int)
    for _, group in groups:
        for net in {net for item in group for net in item.nets}:
            users[net] += 1
    kept = {GROUND, model.rail, *model.named}
    items: list[Item] = []
    for name, group in groups:
        if len(group) == 1:
            items += group
            continue
        nets = dict.fromkeys(net for item in group for net in item.nets)
        shared = [net for net in nets if users[net] > 1 or net in kept]
        items.append(_block(name, group, [net for net in shared if net != GROUND], GROUND in nets))
    return replace(model, items=tuple(items), condensed=True)


def _block(name: str, group: Sequence[Item], nets: Sequence[str], grounded: bool) -> Item:
    names = tuple(inner for item in group for inner in (item.hidden or (item.name,)))
    ends = [(net, net) for net in nets] + [(GROUND, GROUND)] * grounded
    return Item(
        name=name,
        shape="block",
        ends=tuple(ends),
        label=Label(short(name), f"{len(names)} parts"),
        hidden=names,
        signature=("block", tuple(item.signature for item in group)),
    )
