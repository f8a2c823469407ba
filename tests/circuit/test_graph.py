"""Groups of nodes, names in order, ideal branches and the ways of a signal."""

from __future__ import annotations

import networkx as nx
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.circuit.expression import ZERO, Name
from acsolve.circuit.graph import (
    conducting_pairs,
    current_branches,
    is_short,
    natural_key,
    reference_groups,
    voltage_branches,
)
from acsolve.circuit.netlist import Netlist, Part
from acsolve.circuit.reach import reach
from acsolve.circuit.value import Quantity, Value

from .dense import groups
from .networks import (
    NODES,
    ammeter,
    anything,
    capacitor,
    current,
    inductor,
    network,
    opamp,
    part,
    passive,
    resistor,
    voltage,
)


def _sets(netlist: Netlist, **more) -> set[frozenset[str]]:
    return {frozenset(nodes) for nodes in reference_groups(netlist, **more).members()}


def test_numbers_inside_names_count_as_numbers():
    """R2 stands before R10, and an index before a longer one."""
    names = ["R10", "n[10]", "R2", "n[9]", "R", "2", "10", "R2b", "m[1, 12]", "m[1, 2]"]
    wanted = ["2", "10", "R", "R2", "R2b", "R10", "m[1, 2]", "m[1, 12]", "n[9]", "n[10]"]
    assert sorted(names, key=natural_key) == wanted


@given(st.lists(st.text(alphabet="aR10[]_٣²", max_size=8)))
def test_any_names_can_be_ordered(names):
    """The key orders all texts, and different texts differently."""
    keys = sorted({natural_key(name) for name in names})
    assert len(keys) == len(set(names))


def test_the_empty_network_has_no_group():
    """Nothing has no nodes and no reference."""
    found = reference_groups(network())
    assert found.references == ()
    assert dict(found.of) == {}


def test_gnd_is_the_reference_of_its_group_and_group_zero():
    """Wherever gnd appears, its group is number 0 and counts against gnd."""
    found = reference_groups(network(resistor("R1", "x", "y"), resistor("R2", "a", "gnd")))
    assert found.references == ("gnd", "x")
    assert found.of["a"] == 0
    assert found.reference("y") == "x"


def test_a_group_off_gnd_takes_its_first_node_in_natural_order():
    """The reference of a floating group does not depend on the order of parts."""
    parts = [resistor("R1", "n10", "n9"), resistor("R2", "n9", "n2")]
    for order in (parts, parts[::-1]):
        assert reference_groups(network(*order)).references == ("n2",)


@pytest.mark.parametrize(
    ("item", "expected"),
    [
        (opamp("U", "a", "b", "c"), ["a", "b", "c gnd"]),
        (opamp("U", "a", "b", "c", input_resistance=1), ["a b", "c gnd"]),
        (part("A", "voltage_amplifier", "a", "b", "c", "d"), ["a", "b", "c d"]),
        (part("A", "transconductance", "a", "b", "c", "d"), ["a", "b", "c d"]),
        (part("A", "transresistance", "a", "b", "c", "d"), ["a b", "c d"]),
        (part("A", "current_amplifier", "a", "b", "c", "d"), ["a b", "c d"]),
        (part("T", "transformer", "a", "b", "c", "d"), ["a b", "c d"]),
        (part("T", "gyrator", "a", "b", "c", "d"), ["a b", "c d"]),
        (part("W", "line", "a", "b", "c", "d"), ["a c", "b d"]),
        (part("X", "crystal", "a", "b"), ["a b"]),
        (capacitor("C", "a", "b"), ["a b"]),
        (capacitor("C", "a", "b", 0), ["a", "b"]),
        (current("J", "a", "b"), ["a b"]),
    ],
    ids=lambda item: item.kind if isinstance(item, Part) else "",
)
def test_each_kind_joins_what_its_currents_flow_between(item, expected):
    """Sensing terminals join nothing, ports are separate, an open part carries nothing."""
    assert _sets(network(item)) == {frozenset(words.split()) for words in expected}


def test_coupled_inductors_join_only_their_own_nodes():
    """Flux carries a signal from coil to coil, but no current."""
    netlist = network(inductor("L1", "a", "b"), inductor("L2", "c", "d"), couplings=(("L1", "L2"),))
    assert _sets(netlist) == {frozenset("ab"), frozenset("cd")}
    assert reach(netlist).same_island("a", "d")


def test_a_question_joins_its_pairs_and_sets_sources_apart():
    """A drive ties two groups together; a current source of zero ties nothing."""
    netlist = network(current("J1", "gnd", "a"), resistor("R1", "b", "c"))
    assert _sets(netlist, joined=[("a", "c")], apart={"J1"}) == {
        frozenset({"gnd"}),
        frozenset("abc"),
    }
    assert reference_groups(netlist, joined=[("b", "new")]).shares_reference("c", "new")


@settings(derandomize=True, deadline=None)
@given(anything(), st.booleans(), st.lists(st.sampled_from(NODES), min_size=2, max_size=2))
def test_groups_are_the_connected_components_of_conduction(netlist, sources, pair):
    """Union-find agrees with a component search in a graph library."""
    names = [item.name for item in netlist.parts if item.kind == "current_source"]
    joined = [(pair[0], pair[1])]
    found = reference_groups(netlist, joined=joined, apart=() if sources else names)
    assert {node: found.reference(node) for node in found.of} == groups(
        netlist, joined, sources=sources
    )
    assert all(found.of[node] == at for at, node in enumerate(found.references))


def test_zero_is_seen_through_named_quantities():
    """A resistor whose value is a quantity of zero is a short; a symbol is none."""
    quantities = {
        "Rz": Quantity(name="Rz", value=Value(expression=Name("zero"))),
        "zero": Quantity(
            name="zero",
            value=Value(expression=ZERO),
        ),
        "loop": Quantity(name="loop", value=Value(expression=Name("loop"))),
    }
    parts = [resistor(name, "a", "b", Name(name)) for name in ("Rz", "loop", "unknown")]
    netlist = network(*parts, quantities=quantities)
    assert [is_short(netlist, item) for item in parts] == [True, False, False]


def test_a_coupled_coil_of_zero_is_not_taken_for_a_short():
    """An inductor of zero is a short only where nothing else shapes its voltage."""
    coils = [inductor("L1", "a", "b", 0), inductor("L2", "c", "d", 0)]
    assert is_short(network(*coils), coils[0])
    assert not is_short(network(*coils, couplings=(("L1", "L2"),)), coils[0])


def test_ideal_branches_are_listed_with_their_roles():
    """Every prescribed voltage and current of a network is found, in file order."""
    netlist = network(
        voltage("V1", "gnd", "a"),
        voltage("V2", "gnd", "b", 0),
        ammeter("M1", "a", "b"),
        resistor("R1", "a", "b"),
        opamp("U1", "a", "b", "c"),
        opamp("U2", "a", "b", "c", open_loop_gain=9, output_resistance=5),
        part("F1", "current_amplifier", "a", "b", "c", "d"),
        current("J1", "gnd", "a"),
    )
    roles = [(item.name, item.role) for item in voltage_branches(netlist)]
    assert roles == [
        ("V1", "source"),
        ("V2", "zero"),
        ("M1", "zero"),
        ("U1", "inputs"),
        ("U1", "output"),
        ("F1", "sense"),
    ]
    assert [(item.name, item.first, item.second) for item in current_branches(netlist)] == [
        ("F1", "d", "c"),
        ("J1", "gnd", "a"),
    ]


def test_a_signal_passes_an_amplifier_one_way_and_gnd_not_at_all():
    """From input to output only; two networks that share gnd alone hear nothing of each other."""
    netlist = network(
        resistor("R1", "in", "gnd"),
        part("A1", "voltage_amplifier", "in", "gnd", "out", "gnd"),
        resistor("R2", "out", "gnd"),
    )
    ways = reach(netlist)
    assert ways.leads(["in"], ["out"])
    assert not ways.leads(["out"], ["in"])
    assert not ways.same_loop("in", "out")
    assert not ways.leads(["gnd"], ["gnd"])


@settings(derandomize=True, deadline=None)
@given(anything())
def test_loops_of_signals_are_the_strongly_connected_sets(netlist):
    """Two nodes lie in one loop just where each leads to the other."""
    ways = reach(netlist)
    graph = nx.DiGraph()
    graph.add_nodes_from(range(len(ways.onward)))
    graph.add_edges_from((here, there) for here, more in enumerate(ways.onward) for there in more)
    found: dict[int, set[int]] = {}
    for island, loop in enumerate(ways.loops):
        found.setdefault(loop, set()).add(island)
    assert sorted(map(sorted, found.values())) == sorted(
        map(sorted, nx.strongly_connected_components(graph))
    )


@settings(derandomize=True, deadline=None)
@given(passive())
def test_a_connected_passive_network_is_one_group(netlist):
    """All nodes of a connected network share one reference."""
    found = reference_groups(netlist)
    assert len(found.references) == 1
    assert all(len(list(conducting_pairs(item))) == 1 for item in netlist.parts)
