"""Loops of prescribed voltages and cuts through prescribed currents.

Around a loop the voltages add up to zero, across a cut the currents do (Kirchhoff). Where
everything around a loop prescribes its voltage, or everything across a cut its current,
the prescriptions either contradict each other or leave something undetermined.
"""

from __future__ import annotations

from collections import deque
from collections.abc import Collection, Iterable, Iterator
from dataclasses import dataclass
from fractions import Fraction

from acsolve.circuit.expression import Expression
from acsolve.circuit.finding import finding, listed, pair_text
from acsolve.circuit.graph import (
    Branch,
    DisjointSets,
    Role,
    conducting_pairs,
    constant,
    current_branches,
    is_open,
    natural_key,
    reference_groups,
    sensing_pairs,
    voltage_branches,
)
from acsolve.circuit.netlist import GROUND, Netlist, Pair, Part
from acsolve.errors import Diagnostic

#: A loop as branches with the sign in which it runs through them.
Loop = tuple[tuple[Branch, int], ...]

#: Branches whose law holds voltages only and no other unknown. The laws around a loop of
#: these add up to 0 = 0 or to a contradiction.
_LAWS: tuple[Role, ...] = ("zero", "source", "inputs", "sense", "drive", "short")
#: Branches whose current occurs in no law but the current balances. A current around a
#: loop of these changes nothing, so it is not determined.
_FREE_CURRENTS: tuple[Role, ...] = ("zero", "source", "output", "drive", "short")
#: Shorts come first into the tree, so that a loop of shorts alone is found as one.
_ORDER: tuple[Role, ...] = ("zero", "source", "inputs", "sense", "output", "drive", "short")


def voltage_loops(netlist: Netlist, extra: Iterable[Branch] = ()) -> tuple[Loop, ...]:
    """Independent loops of branches of prescribed voltage.

    Parameters
    ----------
    netlist
        the circuit.
    extra
        branches that a question adds.

    """
    branches = [*voltage_branches(netlist), *extra]
    branches.sort(key=lambda branch: _ORDER.index(branch.role))
    loops: dict[frozenset[tuple[str, Role]], Loop] = {}
    for roles in (_LAWS, _FREE_CURRENTS):
        for loop in _closed(branch for branch in branches if branch.role in roles):
            key = frozenset((branch.name, branch.role) for branch, _ in loop)
            loops.setdefault(key, loop)
    return tuple(loops.values())


def _closed(branches: Iterable[Branch]) -> Iterator[Loop]:
    """The loop that each branch closes in the forest of those before it."""
    sets = DisjointSets()
    forest: dict[str, list[tuple[str, Branch, int]]] = {}
    for branch in branches:
        first, second = branch.first, branch.second
        if first == second:
            if branch.role != "zero":
                yield ((branch, 1),)
            continue
        sets.add(first, second)
        if sets.join(first, second):
            forest.setdefault(first, []).append((second, branch, 1))
            forest.setdefault(second, []).append((first, branch, -1))
        else:
            yield ((branch, 1), *_path(forest, second, first))


def _path(forest: dict[str, list[tuple[str, Branch, int]]], start: str, end: str) -> Loop:
    """The way from one node to another along the branches of a forest."""
    came: dict[str, tuple[str, Branch, int]] = {}
    waiting = deque([start])
    while end not in came:
        here = waiting.popleft()
        for there, branch, sign in forest[here]:
            if there not in came and there != start:
                came[there] = (here, branch, sign)
                waiting.append(there)
    way: list[tuple[Branch, int]] = []
    node = end
    while node != start:
        node, branch, sign = came[node]
        way.append((branch, sign))
    return tuple(reversed(way))


def _agree(netlist: Netlist, loop: Loop) -> bool:
    """Whether the amplitudes of the sources plainly add up to zero around a loop."""
    sums: dict[tuple[Expression | None, Expression | None], Fraction] = {}
    for branch, sign in loop:
        if branch.role == "source" and branch.part is not None:
            amplitude = branch.part.values["amplitude"].expression
            angle = branch.part.values.get("angle")
            known = constant(netlist, amplitude)
            if amplitude is None:
                return False
            key = (None if known is not None else amplitude, angle.expression if angle else None)
            sums[key] = sums.get(key, Fraction(0)) + sign * (1 if known is None else known)
    return not any(sums.values())


def loop_findings(netlist: Netlist) -> Iterator[Diagnostic]:
    """What the file's own loops of prescribed voltages mean."""
    for loop in voltage_loops(netlist):
        roles = {branch.role for branch, _ in loop}
        if roles == {"zero"}:
            yield _loop_of_shorts(loop)
        elif roles <= {"zero", "source"} and _agree(netlist, loop):
            yield _loop_that_agrees(loop)
        elif len(loop) == 1:
            yield _tied(loop[0][0])
        elif [branch.role for branch, _ in loop if branch.role != "zero"] == ["output"] * 2:
            yield _two_outputs(loop)
        else:
            yield _loop_that_disagrees(loop)


def _parts(loop: Loop) -> list[Part]:
    """The parts of a loop in order of name, each once."""
    parts = {branch.part.name: branch.part for branch, _ in loop if branch.part}
    return sorted(parts.values(), key=lambda part: natural_key(part.name))


def _words(branch: Branch) -> str:
    """A branch as a sentence names it."""
    match branch.role:
        case "output":
            return f"the output of {branch.name}"
        case "inputs":
            return f"the inputs of {branch.name}"
        case "sense":
            return f"the input of {branch.name}"
        case _:
            return branch.name


def _branches_text(branches: Iterable[Branch]) -> str:
    return listed(_words(item) for item in sorted(branches, key=lambda b: natural_key(b.name)))


def _loop_of_shorts(loop: Loop) -> Diagnostic:
    names = _branches_text(branch for branch, _ in loop)
    return finding(
        "graph.voltage-loop",
        f"{names} form a loop without impedance, so how a current divides between them "
        "is not determined",
        _parts(loop),
        hint="Leave one of them out, or give it a resistance.",
        severity="warning",
    )


def _loop_that_agrees(loop: Loop) -> Diagnostic:
    names = _branches_text(branch for branch, _ in loop)
    return finding(
        "graph.voltage-loop",
        f"{names} set the same voltage, so how a current divides between them is not determined",
        _parts(loop),
        hint="Leave one of them out, or put a resistance in series with it.",
        severity="warning",
    )


def _tied(branch: Branch) -> Diagnostic:
    """A branch of prescribed voltage with both ends on one node."""
    node = branch.first
    message = {
        "source": f"both ends of {branch.name} are on {node}, which shorts the source",
        "inputs": f"both inputs of the ideal op-amp {branch.name} are on {node}, "
        "so that nothing sets its output",
        "sense": f"both input terminals of {branch.name} are on {node}, "
        "so that its input current is not determined",
        "output": f"the output of {branch.name} and its reference are both {node}, "
        "which shorts the output",
    }[branch.role]
    return finding(
        "graph.voltage-loop",
        message,
        [branch.part] if branch.part else [],
        hint="Connect the two terminals to different nodes.",
        severity="error",
    )


def _two_outputs(loop: Loop) -> Diagnostic:
    outputs = [branch for branch, _ in loop if branch.role == "output"]
    names = listed(sorted((branch.name for branch in outputs), key=natural_key))
    nodes = listed(sorted({branch.second for branch in outputs}, key=natural_key))
    return finding(
        "graph.two-outputs",
        f"the outputs of {names} both set the voltage at {nodes}",
        _parts(loop),
        hint="Join outputs through resistances, or give the amplifiers an output resistance.",
        severity="error",
    )


def _loop_that_disagrees(loop: Loop) -> Diagnostic:
    names = _branches_text(branch for branch, _ in loop)
    return finding(
        "graph.voltage-loop",
        f"{names} form a loop of prescribed voltages without any impedance",
        _parts(loop),
        hint="Put a resistance in series with one of them, or take one out.",
        severity="error",
    )


def driven_loop_findings(netlist: Netlist, extra: Collection[Branch]) -> Iterator[Diagnostic]:
    """What a question's drive or short means where the voltage is prescribed already."""
    for loop in voltage_loops(netlist, extra):
        for branch, _ in loop:
            if branch.role in ("drive", "short"):
                others = _branches_text(item for item, _ in loop if item is not branch)
                yield _prescribed(branch, others, _parts(loop))
                break


def _prescribed(branch: Branch, others: str, parts: list[Part]) -> Diagnostic:
    pair = pair_text((branch.first, branch.second))
    if branch.role == "drive":
        pair = pair_text((branch.second, branch.first))  # its current enters the pair's first node
        message = f"the voltage at {pair} cannot be driven: it is set by {others} already"
        hint = "Drive a pair whose voltage is free, or drive a current into this one."
    else:
        message = f"the current into a short at {pair} is not determined: "
        message += f"the voltage there is set by {others} already"
        hint = "Put an ammeter where the current is wanted, and ask for its current."
    return finding("graph.voltage-loop", message, parts, hint=hint, severity="error")


def held_nodes(netlist: Netlist, extra: Iterable[Branch]) -> frozenset[str]:
    """The nodes whose potential against `gnd` sources, shorts and a drive prescribe."""
    sets = DisjointSets([GROUND])
    for branch in (*voltage_branches(netlist), *extra):
        if branch.role in ("zero", "source", "drive", "short"):
            sets.add(branch.first, branch.second)
            sets.join(branch.first, branch.second)
    ground = sets.root(GROUND)
    return frozenset(node for node in sets.parent if sets.root(node) == ground)


@dataclass(frozen=True, slots=True)
class Cut:
    """Nodes that only branches of prescribed current join to the rest of their group.

    `independent` says that all these currents are given from outside, so that nothing
    takes up their sum; else the voltage of the nodes is what is not determined.
    """

    nodes: tuple[str, ...]
    branches: tuple[Branch, ...]
    independent: bool


def current_cuts(
    netlist: Netlist,
    *,
    held: Collection[Pair] = (),
    drive: Branch | None = None,
    apart: Collection[str] = (),
) -> tuple[Cut, ...]:
    """The sets of nodes that are cut off by prescribed currents.

    Parameters
    ----------
    netlist
        the circuit.
    held
        pairs that a voltage drive or a short holds together.
    drive
        the branch of a current drive.
    apart
        names of parts that carry nothing.

    """
    branches = [item for item in current_branches(netlist) if item.name not in apart]
    if drive is not None:
        branches.append(drive)
    if not branches:
        return ()
    joined = [*held, *((item.first, item.second) for item in branches if item.role == "drive")]
    references = reference_groups(netlist, joined=joined, apart=apart)
    cuts: list[Cut] = []
    for independent in (True, False):
        sets = _held_together(netlist, held, independent)
        rest: dict[str, list[str]] = {}
        known = {node for cut in cuts for node in cut.nodes}
        for node in references.of:
            sets.add(node)
        fixed = {sets.root(node) for node in references.references}
        for node in references.of:
            if sets.root(node) not in fixed:
                rest.setdefault(sets.root(node), []).append(node)
        for nodes in rest.values():
            if known.isdisjoint(nodes):
                inside = set(nodes)
                across = [b for b in branches if (b.first in inside) != (b.second in inside)]
                names = tuple(sorted(nodes, key=natural_key))
                cuts.append(Cut(names, tuple(across), independent))
    return tuple(cuts)


def _held_together(netlist: Netlist, held: Iterable[Pair], independent: bool) -> DisjointSets:
    """Sets of nodes joined by more than prescribed currents.

    With `independent`, controlled currents count as joining; without, they do not, but a
    sensed voltage does, because it ties the levels of its two nodes together.
    """
    sets = DisjointSets(node for part in netlist.parts for node in part.nodes)
    for part in netlist.parts:
        if part.kind == "current_source" or is_open(netlist, part):
            continue
        pairs = list(conducting_pairs(part))
        if not independent and part.kind in ("transconductance", "current_amplifier"):
            pairs.pop()  # the output comes last
        sets.join_all(pairs)
    more = [*held] if independent else [*held, *(pair for _, pair in sensing_pairs(netlist))]
    for first, second in more:
        sets.add(first, second)
        sets.join(first, second)
    return sets
