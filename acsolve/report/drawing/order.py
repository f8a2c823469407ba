"""Which net stands left of which: the path of the signal, and everything else along it."""

from __future__ import annotations

import heapq
from collections import defaultdict
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass

from acsolve.circuit.netlist import GROUND
from acsolve.report.drawing.model import Item, Model

_AGAINST = 12  # cost of running into the output of an amplifier through its feedback
_ROUNDS = 60
_DRIVEN = ("out", "ref")


def components(model: Model) -> list[tuple[list[str], list[Item]]]:
    """Nets (without the rails) and items that hang together; that of the source first."""
    parent: dict[str, str] = {}

    def root(net: str) -> str:
        parent.setdefault(net, net)
        while parent[net] != net:
            parent[net] = parent[parent[net]]
            net = parent[net]
        return net

    aside = {GROUND, model.rail}
    for item in model.items:
        own = [net for net in item.nets if net not in aside]
        for net in own:
            parent[root(net)] = root(own[0])
    groups: dict[str, tuple[list[str], list[Item]]] = {}
    for net in parent:
        groups.setdefault(root(net), ([], []))[0].append(net)
    loose: list[Item] = []
    for item in model.items:
        own = [net for net in item.nets if net not in aside]
        (groups[root(own[0])][1] if own else loose).append(item)
    first = model.source[0] if model.source else None
    listed = sorted(groups.values(), key=lambda group: first not in group[0])
    return [*listed, *([([], loose)] if loose else [])]


def path(model: Model, nets: Sequence[str], items: Sequence[Item]) -> list[str]:
    """The nets of the signal path, from the source to the target.

    The shortest way through parts; running backwards into an amplifier's output costs more
    than running through the amplifier. Without a target in this group it ends farthest away.
    """
    ways = _ways(model, items)
    asked = [net for pair in (model.source, model.target) if pair for net in pair]
    start = next((net for net in asked if net in nets), None) or _outermost(nets, items)
    distance, before = _shortest(ways, start)
    ends = [net for net in (model.target or ()) if net in distance and net != start]
    end = ends[0] if ends else max(distance, key=lambda net: distance[net])
    found = [end]
    while found[-1] != start:
        found.append(before[found[-1]])
    return found[::-1] + _tail(ways, found[::-1], model.named)


def _tail(
    ways: Mapping[str, Mapping[str, int]], found: Sequence[str], named: Sequence[str]
) -> list[str]:
    """What goes on to further named nets behind the target, and meets the path nowhere else."""
    ahead = {net: dict(near) for net, near in ways.items() if net not in found[:-1]}
    for net in found[:-1]:
        ahead.get(found[-1], {}).pop(net, None)
    distance, before = _shortest(ahead, found[-1])
    reached = [net for net in distance if net not in found and net in named]
    if any(net in found[:-1] for net in distance) or not reached:
        return []
    tail = [max(reached, key=lambda net: distance[net])]
    while before[tail[-1]] != found[-1]:
        tail.append(before[tail[-1]])
    return tail[::-1]


def _outermost(nets: Sequence[str], items: Sequence[Item]) -> str:
    """A net that a source drives, else the first."""
    for item in items:
        if item.shape in ("voltage_source", "current_source"):
            return next((net for net in item.nets if net in nets), nets[0])
    return nets[0]


def _ways(model: Model, items: Iterable[Item]) -> Mapping[str, dict[str, int]]:
    """Net -> nets beside it, with the cost of going there."""
    ways: dict[str, dict[str, int]] = defaultdict(dict)
    driven = {
        net for item in items if item.sense for terminal, net in item.ends if terminal in _DRIVEN
    }

    def add(first: str, second: str, cost: int) -> None:
        if {first, second} & {GROUND, model.rail} or first == second:
            return
        ways[first][second] = min(cost, ways[first].get(second, cost))

    for item in items:
        ends = item.ends
        for terminal, net in ends:
            for other_terminal, other in ends:
                if item.sense:
                    if terminal in item.sense and other_terminal in _DRIVEN:
                        add(net, other, 1 if other_terminal == "out" else 2)
                    elif terminal == "out" or other_terminal not in item.sense:
                        add(net, other, 40)
                elif len(ends) == 4 and item.shape in ("transformer", "gyrator"):
                    add(net, other, 1 if terminal[1:] == other_terminal[1:] else 6)
                else:
                    add(net, other, _AGAINST if other in driven else 2)
    return ways


def _shortest(
    ways: Mapping[str, Mapping[str, int]], start: str
) -> tuple[dict[str, int], dict[str, str]]:
    distance, before = {start: 0}, {}
    queue = [(0, 0, start)]
    count = 0
    while queue:
        cost, _, net = heapq.heappop(queue)
        if cost > distance[net]:
            continue
        for other, step in ways.get(net, {}).items():
            if cost + step < distance.get(other, 1 << 30):
                count += 1
                distance[other], before[other] = cost + step, net
                heapq.heappush(queue, (cost + step, count, other))
    return distance, before


def columns(
    model: Model, nets: Sequence[str], items: Sequence[Item], trunk: Sequence[str]
) -> list[str]:
    """All nets of a group from left to right, the path in its own order.

    Other nets stand where their neighbours draw them (each at the mean of its neighbours, the
    path held fast), and what an amplifier senses stands before what it drives.
    """
    fixed = {net: float(place) for place, net in enumerate(trunk)}
    for pair in (model.source, model.target):
        if pair and pair[0] in fixed and pair[1] in nets:
            fixed.setdefault(pair[1], fixed[pair[0]] + 0.3)
    near: dict[str, list[str]] = defaultdict(list)
    for item in items:
        for net in item.nets:
            near[net] += [other for other in item.nets if other != net and other in nets]
    place = {net: fixed.get(net, len(trunk) / 2) for net in nets}
    for _ in range(_ROUNDS):
        for net in nets:
            if net not in fixed and near[net]:
                place[net] = sum(place[other] for other in near[net]) / len(near[net])
        _push(items, place, fixed)
    return sorted(nets, key=lambda net: (place[net], net not in fixed, nets.index(net)))


def _push(items: Iterable[Item], place: dict[str, float], fixed: Mapping[str, float]) -> None:
    """Move what is sensed before what is driven, where the path leaves room."""
    for item in items:
        if not item.sense:
            continue
        driven = [net for terminal, net in item.ends if terminal in _DRIVEN]
        out = next((net for net in driven if net in fixed), driven[0] if driven else None)
        sensed = [n for t, n in item.ends if t in item.sense and n in place and n != out]
        if out not in place or not sensed:
            continue
        if out in fixed:
            for net in sensed:
                if net not in fixed:
                    place[net] = min(place[net], place[out] - 0.4)
        else:
            place[out] = max(place[out], max(place[net] for net in sensed) + 0.4)


# ---------------------------------------------------------------- chains

_MOST_HANGING = 4  # items at a net that lead nowhere else


@dataclass(frozen=True, slots=True)
class Chains:
    """Nets in a row, each joined to the one before and the one behind and to nothing else.

    What leads nowhere else (a trap of a coil and a capacitor, say) hangs at its net. `on` holds
    what is attached to each net, what hangs there included; `nets` are those that no such thing
    hides. The ends of a chain may be joined to more.
    """

    rows: tuple[tuple[str, ...], ...]
    on: Mapping[str, Sequence[Item]]
    nets: frozenset[str]


def chains(model: Model) -> Chains:
    """All chains of nets, the longest that there are."""
    on, near = _attached(model)
    hanging = {net: list(items) for net, items in on.items()}
    for net in list(near):
        _fold(net, near, hanging, model.named)
    found: list[tuple[str, ...]] = []
    seen: set[tuple[str, str]] = set()
    for start in near:
        if len(near[start]) == 2 and start not in model.named:
            continue
        for second in near[start]:
            if (start, second) not in seen:
                chain = _walk(start, second, near, model.named)
                seen |= {(chain[0], chain[1]), (chain[-1], chain[-2])}
                found.append(tuple(chain))
    return Chains(tuple(found), hanging, frozenset(near))


def _attached(model: Model) -> tuple[dict[str, list[Item]], dict[str, dict[str, None]]]:
    """What is attached to each net, and its neighbours in order."""
    on: dict[str, list[Item]] = {}
    near: dict[str, dict[str, None]] = {}
    for item in model.items:
        own = list(dict.fromkeys(net for net in item.nets if net not in (GROUND, model.rail)))
        for net in own:
            on.setdefault(net, []).append(item)
            near.setdefault(net, {}).update((other, None) for other in own if other != net)
    return on, near


def _fold(
    net: str,
    near: dict[str, dict[str, None]],
    hanging: dict[str, list[Item]],
    named: Sequence[str],
) -> None:
    """Hang a net that leads nowhere else at its only neighbour, with all that is on it."""
    while net in near and len(near[net]) == 1 and net not in named:
        (other,) = near[net]
        if len(near[other]) < 3 or len(hanging[net]) > _MOST_HANGING:
            return
        known = {id(item) for item in hanging[other]}
        hanging[other] += [item for item in hanging[net] if id(item) not in known]
        del near[other][net], near[net]
        net = other


def _walk(
    start: str, second: str, near: Mapping[str, Mapping[str, None]], named: Sequence[str]
) -> list[str]:
    """A chain of nets with two neighbours each, up to one that has more or fewer, or a name."""
    chain = [start, second]
    while len(near[chain[-1]]) == 2 and chain[-1] not in named:
        following = next((net for net in near[chain[-1]] if net != chain[-2]), None)
        if following is None or following == start:
            break
        chain.append(following)
    return chain
