"""Amplifiers in the network: sensed levels that float, and missing or wrong feedback."""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection, Iterator

from acsolve.circuit.finding import finding, listed, pair_text
from acsolve.circuit.graph import Groups, is_ideal, sensing_pairs
from acsolve.circuit.netlist import GROUND, Netlist, Pair, Part
from acsolve.circuit.reach import Reach
from acsolve.errors import Diagnostic, Severity

_LEVEL_HINT = (
    "Connect one node of each side to a common node such as gnd; a large resistance will do."
)


def floating_findings(
    netlist: Netlist, groups: Groups, *, severity: Severity
) -> Iterator[Diagnostic]:
    """Sensing pairs between two sets of nodes whose levels nothing ties together."""
    for part, pair in loose_senses(netlist, groups):
        yield _floating(part, pair, severity)


def loose_senses(netlist: Netlist, groups: Groups) -> list[tuple[Part, Pair]]:
    """The sensing pairs whose nodes lie in different groups."""
    return [
        (part, pair) for part, pair in sensing_pairs(netlist) if not groups.shares_reference(*pair)
    ]


def _floating(part: Part, pair: Pair, severity: Severity) -> Diagnostic:
    return finding(
        "graph.floating",
        f"{part.name} senses the voltage between {pair[0]} and {pair[1]}, "
        "but no part and no reference joins them",
        [part],
        hint=_LEVEL_HINT,
        severity=severity,
    )


def floating_in_question(
    loose: Collection[tuple[Part, Pair]], groups: Groups, reach: Reach, target: Pair
) -> Iterator[Diagnostic]:
    """Sensing pairs without a common level that act on what is observed.

    One amplifier that senses a floating set of nodes makes the answer depend on a level
    that nothing sets: an error. Where several sense it, or where it acts on both observed
    nodes, the level may cancel (two input followers before a difference amplifier): a
    warning that says which node counts as zero.
    """
    users = Counter(frozenset(groups.of[node] for node in pair) for _, pair in loose)
    for part, pair in loose:
        ends = reach.led_to(part.nodes[2:], target)
        if not ends:
            continue
        if ends == 1 and users[frozenset(groups.of[node] for node in pair)] == 1:
            yield _floating(part, pair, "error")
        else:
            yield _taken_as_zero(part, pair, groups)


def _taken_as_zero(part: Part, pair: Pair, groups: Groups) -> Diagnostic:
    levels = listed(dict.fromkeys(groups.reference(node) for node in pair))
    return finding(
        "graph.floating",
        f"{part.name} senses the voltage between {pair[0]} and {pair[1]}, "
        f"but no part and no reference joins them: {levels} count as zero volts",
        [part],
        hint=_LEVEL_HINT,
        severity="warning",
    )


def feedback_findings(netlist: Netlist, reach: Reach) -> Iterator[Diagnostic]:
    """Op-amps whose output cannot act on their inputs, or on the plus input alone."""
    for part in netlist.parts:
        if part.kind != "opamp":
            continue
        plus, minus, *ends = part.nodes
        if len(set(ends)) == 1 or plus == minus:
            continue  # shorted; said elsewhere
        back_to = [
            node for node in (plus, minus) if any(reach.same_loop(end, node) for end in ends)
        ]
        if not back_to:
            yield _without_feedback(part)
        elif minus not in back_to and any(reach.same_island(end, plus) for end in ends):
            yield _positive_feedback(part)


def _without_feedback(part: Part) -> Diagnostic:
    ideal = is_ideal(part)
    name = f"the ideal op-amp {part.name}" if ideal else part.name
    return finding(
        "graph.no-feedback",
        f"nothing leads from the output of {name} at {part.nodes[2]} back to its inputs"
        + (", so that its output is not determined" if ideal else ""),
        [part],
        hint="Close the feedback to its minus input"
        + (", or give it an open_loop_gain." if ideal else " if it is not meant to run open."),
        severity="error" if ideal else "warning",
    )


def _positive_feedback(part: Part) -> Diagnostic:
    return finding(
        "graph.positive-feedback",
        f"the output of {part.name} leads back to its plus input only",
        [part],
        hint="Swap plus and minus if the amplifier is to be stable.",
        severity="warning",
    )


def unreachable_finding(
    sources: Collection[str], source: Pair | None, target: Pair, reach: Reach
) -> Iterator[Diagnostic]:
    """A warning where no signal gets from where it starts to what is observed."""
    if reach.leads(sources, target):
        return
    start = pair_text(source) if source else "the sources of the circuit"
    yield finding(
        "graph.unreachable",
        f"no signal gets from {start} to {pair_text(target)}, so the answer is zero",
        hint="Look for a missing connection between them.",
        severity="warning",
    )


def no_reference_finding(groups: Groups, target: Pair) -> Iterator[Diagnostic]:
    """An error where the voltage of the observed pair is not defined."""
    first, second = target
    if groups.shares_reference(first, second):
        return
    yield finding(
        "graph.no-reference",
        f"the voltage between {first} and {second} is not defined: "
        "no part and no reference joins them",
        hint=f"Ask about two nodes of the same part of the network{_instead(groups, target)}.",
        severity="error",
    )


def _instead(groups: Groups, target: Pair) -> str:
    """A pair that would do: the node that was named against its own reference."""
    first, second = target
    reference = groups.reference(first)
    if second != GROUND or reference == first:
        return ""
    return f", {pair_text((first, reference))} for instance"


def started(netlist: Netlist, source: Pair | None) -> frozenset[str]:
    """The nodes at which a question's signal starts: the driven pair, or all sources."""
    if source is not None:
        return frozenset(source)
    own = ("voltage_source", "current_source")
    return frozenset(node for part in netlist.parts if part.kind in own for node in part.nodes)
