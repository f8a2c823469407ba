"""What is wrong with a network before anything is computed, and with a question put to it.

An error says that no question has a unique answer, whatever is driven and observed; what
depends on the question is a warning here and is judged again, with the question, by
`check_question`. The checks are linear in the size of the network, up to logarithms.
"""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import replace
from typing import Literal

from acsolve.circuit.check_loops import (
    Cut,
    current_cuts,
    driven_loop_findings,
    held_nodes,
    loop_findings,
)
from acsolve.circuit.check_signals import (
    feedback_findings,
    floating_findings,
    floating_in_question,
    loose_senses,
    no_reference_finding,
    started,
    unreachable_finding,
)
from acsolve.circuit.finding import finding, listed
from acsolve.circuit.graph import (
    Branch,
    conducting_pairs,
    current_sources,
    is_ideal,
    is_zero,
    reference_groups,
)
from acsolve.circuit.netlist import GROUND, Netlist, Pair, Part, QuantityName
from acsolve.circuit.reach import reach
from acsolve.errors import Diagnostic, Severity

AskedFor = QuantityName | Literal["impedance", "response", "two-port"]

_DRIVES_VOLTAGE = ("voltage-ratio", "transadmittance")
_OBSERVES_CURRENT = ("current-ratio", "transadmittance")


def check(netlist: Netlist, *, asked: Iterable[Pair] = ()) -> tuple[Diagnostic, ...]:
    """The network's own faults and oddities, sorted by place.

    Parameters
    ----------
    netlist
        the circuit, its variant chosen.
    asked
        pairs that are asked about besides those of the file.

    Returns
    -------
    tuple of Diagnostic
        [graph.shorted] a part with both ends on one node; [graph.voltage-loop] prescribed
        voltages in a loop; [graph.two-outputs] outputs that drive one node;
        [graph.current-cutset] prescribed currents with no other way;
        [graph.no-feedback], [graph.positive-feedback] op-amps; [graph.floating] a sensed
        voltage that nothing defines; [graph.dangling] a node with one connection.

    """
    pins = file_pairs(netlist) | {_resolved(netlist, pair) for pair in asked}
    severity: Severity = "warning" if pins else "note"
    cuts = current_cuts(netlist, held=pins)
    found = [
        *_shorted(netlist),
        *loop_findings(netlist),
        *(_cut_off(cut, "warning") for cut in cuts),
        *feedback_findings(netlist, reach(netlist, joined=pins)),
        *floating_findings(netlist, reference_groups(netlist, joined=pins), severity=severity),
        *_dangling(netlist, {node for pair in pins for node in pair}, cuts, severity),
    ]
    return tuple(sorted(found, key=lambda item: item.sort_key))


def file_pairs(netlist: Netlist) -> set[Pair]:
    """The pairs that the file names: ports, questions and goals."""
    pairs = set(netlist.ports.values())
    for question in netlist.questions:
        pairs |= {question.target} | ({question.source} if question.source else set())
    for goal in netlist.goals:
        pairs |= {goal.source, goal.target}
    return {_resolved(netlist, pair) for pair in pairs}


def _resolved(netlist: Netlist, pair: Pair) -> Pair:
    return netlist.resolve(pair[0]), netlist.resolve(pair[1])


def _shorted(netlist: Netlist) -> Iterator[Diagnostic]:
    """Parts whose ends are on one node; prescribed voltages are left to the loops."""
    for part in netlist.parts:
        if part.definition.two_terminal:
            stiff = part.kind == "voltage_source" and not is_zero(netlist, part, "amplitude")
            if part.nodes[0] == part.nodes[1] and not stiff:
                yield _without_effect(part, f"both ends of {part.name} are on {part.nodes[0]}")
        elif part.kind in ("transformer", "gyrator", "line"):
            for first, second in conducting_pairs(part):
                if first == second:
                    yield _without_effect(part, f"a port of {part.name} is shorted at {first}")
        elif part.nodes[0] == part.nodes[1] and _senses_voltage(part):
            yield _without_effect(part, f"both inputs of {part.name} are on {part.nodes[0]}")


def _senses_voltage(part: Part) -> bool:
    amplifier = part.kind in ("voltage_amplifier", "transconductance")
    return amplifier or (part.kind == "opamp" and not is_ideal(part))


def _without_effect(part: Part, message: str) -> Diagnostic:
    return finding(
        "graph.shorted",
        message,
        [part],
        hint="Connect the two terminals to different nodes, or take the part out.",
        severity="warning",
    )


def _cut_off(cut: Cut, severity: Severity) -> Diagnostic:
    """A cut of prescribed currents in words."""
    nodes = listed(cut.nodes)
    names = listed("the drive" if not branch.part else branch.name for branch in cut.branches)
    if cut.independent:
        message = f"the current of {names} into {nodes} has no way on"
    else:
        message = f"nothing but the current of {names} joins {nodes} to the rest, "
        message += "so that its voltage is not determined"
    return finding(
        "graph.current-cutset",
        message,
        [branch.part for branch in cut.branches if branch.part],
        hint=f"Give the current a way from {cut.nodes[0]}, through a load resistance for instance.",
        severity=severity,
    )


_OPEN_ENDS = ("opamp", "line")  # an open input is judged as floating, an open stub is usual


def _dangling(
    netlist: Netlist, pins: set[str], cuts: Iterable[Cut], severity: Severity
) -> Iterator[Diagnostic]:
    """Nodes at which one terminal stands alone."""
    alone: dict[str, tuple[Part, int] | None] = {}
    for part in netlist.parts:
        for place, node in enumerate(part.nodes):
            alone[node] = None if node in alone else (part, place)
    known = pins | {node for cut in cuts for node in cut.nodes} | {GROUND}
    spellings: dict[str, list[str]] = {}
    for node in alone:
        spellings.setdefault(node.casefold().replace("_", ""), []).append(node)
    for node, found in alone.items():
        if found is None or node in known:
            continue
        part, place = found
        if part.kind in _OPEN_ENDS or (place < 2 and _senses_voltage(part)):
            continue
        alike = [name for name in spellings[node.casefold().replace("_", "")] if name != node]
        if node.casefold() in _MEANT_AS_GROUND:
            alike = [GROUND]
        yield finding(
            "graph.dangling",
            f"nothing but {part.name} is connected to {node}",
            [part],
            hint=f"Did you mean {alike[0]}?" if alike else "Connect the node, or ask about it.",
            severity=severity,
        )


_MEANT_AS_GROUND = ("gnd", "ground", "earth", "0")  # the format's word is gnd, spelled so


def check_question(
    netlist: Netlist,
    source: Pair | None,
    target: Pair,
    *,
    quantity: AskedFor = "voltage-ratio",
    ammeter: str | None = None,
) -> tuple[Diagnostic, ...]:
    """What stands against one question, beyond what `check` says of the network.

    Parameters
    ----------
    netlist
        the circuit.
    source
        the driven pair; None lets the file's own sources act.
    target
        the observed pair.
    quantity
        what is driven and observed: a voltage ratio unless stated; `impedance` drives a
        current into the target and observes its voltage.
    ammeter
        the ammeter whose current is observed instead of a short across the target.

    Returns
    -------
    tuple of Diagnostic
        [graph.no-reference] the observed voltage is not defined; [graph.voltage-loop] the
        driven voltage, or the short, is fixed already; [graph.current-cutset] a current has
        no way, or leaves undetermined what is observed; [graph.floating] a sensed level is
        not defined; [graph.unreachable] the answer is zero, a warning.

    """
    target = _resolved(netlist, target)
    source = target if quantity == "impedance" else source and _resolved(netlist, source)
    meter = netlist.part(ammeter) if ammeter else None
    observed: Pair = (meter.nodes[0], meter.nodes[1]) if meter else target
    shorted = quantity in _OBSERVES_CURRENT and meter is None
    posed = _posed(netlist, source)
    extra = []
    if source is not None:
        extra.append(Branch("drive", source[1], source[0]))
    if shorted:
        extra.append(Branch("short", *target))
    return tuple(_against(posed, source, observed, extra, voltage=quantity in _DRIVES_VOLTAGE))


def _posed(netlist: Netlist, source: Pair | None) -> Netlist:
    """The network of a question: its drive replaces the file's sources across the same pair."""
    if source is None:
        return netlist
    replaced = {
        part.name
        for part in netlist.parts
        if part.kind == "voltage_source" and set(part.nodes) == set(source)
    }
    return replace(netlist, parts=tuple(p for p in netlist.parts if p.name not in replaced))


def _against(
    netlist: Netlist, source: Pair | None, target: Pair, extra: list[Branch], *, voltage: bool
) -> Iterator[Diagnostic]:
    """The findings on a question; `extra` holds its drive and its short."""
    apart = current_sources(netlist) if source else frozenset()
    pairs = [(branch.first, branch.second) for branch in extra]
    stiff = [branch for branch in extra if voltage or branch.role == "short"]
    drive = None if voltage or not source else extra[0]
    alone = [(node, node) for node in target]  # known to the groups even where no part is
    groups = reference_groups(netlist, joined=[*pairs, *alone], apart=apart)
    holding = [(branch.first, branch.second) for branch in stiff]
    ways = reach(netlist, joined=[*alone, *holding])
    yield from driven_loop_findings(netlist, stiff)
    for cut in current_cuts(netlist, held=holding, drive=drive, apart=apart):
        if cut.independent or ways.leads(cut.nodes, target):
            yield _cut_off(cut, "error")
    loose = loose_senses(netlist, groups)
    if loose:
        observes_voltage = not any(branch.role == "short" for branch in extra)
        held = held_nodes(netlist, stiff) if observes_voltage else frozenset()
        acting = reach(netlist, joined=[*alone, *holding], held=held)
        yield from floating_in_question(loose, groups, acting, target)
    undefined = tuple(no_reference_finding(groups, target))
    yield from undefined
    if not undefined and source != target:
        yield from unreachable_finding(started(netlist, source), source, target, ways)
