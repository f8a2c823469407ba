"""Where a signal can get to: through conduction, coupling, and from inputs to outputs.

The nodes of the network, `gnd` left out (its potential is zero, nothing passes through
it), fall into islands inside which signals go both ways. From island to island they go
one way, from the inputs of an amplifier to its output. The graph claims too many paths
rather than too few: what it calls out of reach has the answer zero exactly.
"""

from __future__ import annotations

from collections.abc import Collection, Iterable, Iterator, Mapping
from dataclasses import dataclass

from acsolve.circuit.graph import DisjointSets, constant, is_open
from acsolve.circuit.netlist import GROUND, Netlist, Pair, Part

_ONE_WAY = (
    "opamp",
    "voltage_amplifier",
    "transconductance",
    "transresistance",
    "current_amplifier",
)


@dataclass(frozen=True, slots=True)
class Reach:
    """The islands of a network and the one-way links between them.

    `islands` gives the number of each node's island (`gnd` has none), `onward` the
    islands that the amplifiers lead to from each, `loops` the number of the loop that
    each island lies in: two islands with the same number reach each other.
    """

    islands: Mapping[str, int]
    onward: tuple[frozenset[int], ...]
    loops: tuple[int, ...]

    def same_island(self, first: str, second: str) -> bool:
        """Whether signals go both ways between two nodes without any amplifier."""
        island = self.islands.get(first)
        return island is not None and island == self.islands.get(second)

    def same_loop(self, first: str, second: str) -> bool:
        """Whether each of two nodes reaches the other."""
        here, there = self.islands.get(first), self.islands.get(second)
        return here is not None and there is not None and self.loops[here] == self.loops[there]

    def reached(self, nodes: Iterable[str]) -> frozenset[int]:
        """The islands that a signal at some nodes gets to."""
        found = {self.islands[node] for node in nodes if node in self.islands}
        open_ends = list(found)
        while open_ends:
            for island in self.onward[open_ends.pop()] - found:
                found.add(island)
                open_ends.append(island)
        return frozenset(found)

    def leads(self, source: Iterable[str], target: Iterable[str]) -> bool:
        """Whether a signal at some of the first nodes gets to any of the second ones."""
        return self.led_to(source, target) > 0

    def led_to(self, source: Iterable[str], target: Iterable[str]) -> int:
        """The number of second nodes that a signal at some of the first nodes gets to."""
        found = self.reached(source)
        return sum(self.islands.get(node) in found for node in target)


def reach(
    netlist: Netlist, *, joined: Collection[Pair] = (), held: Collection[str] = frozenset()
) -> Reach:
    """The islands and links of a network, its current sources taken as open.

    Parameters
    ----------
    netlist
        the circuit.
    joined
        pairs of nodes between which signals go both ways besides.
    held
        nodes whose potential is prescribed: like `gnd`, they let nothing through.

    """
    still = {GROUND, *held}
    sets = DisjointSets(node for part in netlist.parts for node in part.nodes)
    for pair in joined:
        sets.add(*pair)
    for cluster in (*_clusters(netlist), *joined):
        first = None
        for node in cluster:
            if node in still:
                continue
            if first is not None:
                sets.join(first, node)
            first = node
    numbers: dict[str, int] = {}
    islands = {
        node: numbers.setdefault(sets.root(node), len(numbers))
        for node in sets.parent
        if node not in still
    }
    onward = _links(netlist, islands, len(numbers))
    return Reach(islands, onward, _loops(onward))


def _clusters(netlist: Netlist) -> Iterator[tuple[str, ...]]:
    """Sets of nodes between which signals go both ways."""
    for part in netlist.parts:
        if part.kind in _ONE_WAY:
            yield from _two_way_pairs(part)
        elif part.kind != "current_source" and not is_open(netlist, part):
            yield part.nodes
    if netlist.couplings:
        parts = {part.name: part for part in netlist.parts}
        for item in netlist.couplings:
            if constant(netlist, item.coefficient.expression) != 0:
                yield parts[item.first].nodes + parts[item.second].nodes


def _two_way_pairs(part: Part) -> Iterator[Pair]:
    """The pairs inside an amplifier; a current output does not carry its voltage to `ref`."""
    if part.kind in ("transresistance", "current_amplifier") or "input_resistance" in part.values:
        yield part.nodes[0], part.nodes[1]
    if part.kind not in ("transconductance", "current_amplifier"):
        yield part.nodes[2], part.nodes[3]


def _links(netlist: Netlist, islands: Mapping[str, int], count: int) -> tuple[frozenset[int], ...]:
    """From the inputs of each amplifier to its outputs."""
    onward: list[set[int]] = [set() for _ in range(count)]
    for part in netlist.parts:
        if part.kind in _ONE_WAY:
            outputs = {islands[node] for node in part.nodes[2:] if node in islands}
            for node in part.nodes[:2]:
                if node in islands:
                    onward[islands[node]] |= outputs
    return tuple(frozenset(item) for item in onward)


def _loops(onward: tuple[frozenset[int], ...]) -> tuple[int, ...]:
    """Number of the strongly connected set of each island.

    S. R. Kosaraju's two passes (M. Sharir, 1981), without recursion: note the islands in
    the order in which a walk leaves them for good, then walk backwards from the last.
    """
    backward: list[list[int]] = [[] for _ in onward]
    for here, links in enumerate(onward):
        for there in links:
            backward[there].append(here)
    numbers = [-1] * len(onward)
    for start in reversed(_leaving_order(onward)):
        open_ends = [start] if numbers[start] < 0 else []
        while open_ends:
            island = open_ends.pop()
            numbers[island] = start
            open_ends.extend(item for item in backward[island] if numbers[item] < 0)
    return tuple(numbers)


def _leaving_order(onward: tuple[frozenset[int], ...]) -> list[int]:
    """The islands in the order in which a depth-first walk has done with them."""
    order: list[int] = []
    seen = [False] * len(onward)
    for start in range(len(onward)):
        stack = [] if seen[start] else [(start, iter(onward[start]))]
        seen[start] = True
        while stack:
            island, links = stack[-1]
            step = next((item for item in links if not seen[item]), None)
            if step is None:
                order.append(island)
                stack.pop()
            else:
                seen[step] = True
                stack.append((step, iter(onward[step])))
    return order
