"""Random networks: nothing well-posed is refused, and what is refused is singular."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.circuit.check import check, check_question
from acsolve.circuit.netlist import Pair

from .dense import Dense
from .networks import NODES, anything, errors, passive

_PAIRS = st.lists(st.sampled_from(NODES), min_size=2, max_size=2, unique=True).map(tuple)
_QUANTITIES = st.sampled_from(["voltage-ratio", "transimpedance", "transadmittance"])


@settings(derandomize=True, deadline=None, max_examples=200)
@given(passive(), st.data())
def test_no_connected_passive_network_is_refused(netlist, data):
    """Resistors, inductors and capacitors in one piece always have a unique answer."""
    nodes = netlist.nodes()
    pairs = st.lists(st.sampled_from(nodes), min_size=2, max_size=2, unique=True).map(tuple)
    source, target = data.draw(pairs), data.draw(pairs)
    assert Dense(netlist, source).value is not None
    assert errors(check(netlist)) == []
    assert errors(check_question(netlist, source, target)) == []
    assert errors(check_question(netlist, None, target, quantity="impedance")) == []


@settings(derandomize=True, deadline=None, max_examples=400)
@given(anything(), st.sampled_from(NODES[1:]), st.booleans(), st.integers(0, 99))
def test_what_the_network_check_refuses_is_singular_under_any_drive(netlist, node, volts, seed):
    """An error of the network means that no drive against gnd gives a unique answer."""
    drive: Pair = (node, "gnd")
    replaced = any(
        item.kind == "voltage_source" and set(item.nodes) == set(drive) for item in netlist.parts
    )
    if "gnd" in netlist.nodes() and not replaced and errors(check(netlist)):
        assert Dense(netlist, drive, voltage=volts, seed=seed).value is None


@settings(derandomize=True, deadline=None, max_examples=600)
@given(anything(), _PAIRS, _PAIRS, _QUANTITIES, st.integers(0, 99))
def test_what_a_question_is_refused_for_is_a_fact(netlist, source, target, quantity, seed):
    """Refused questions are singular or have an undefined level; zero answers are zero."""
    if errors(check(netlist)) or not {*source, *target} <= set(netlist.nodes()):
        return
    found = check_question(netlist, source, target, quantity=quantity)
    codes = {item.code for item in found}
    short = target if quantity == "transadmittance" else None
    options = {"voltage": quantity != "transimpedance", "short": short, "seed": seed}
    solved = Dense(netlist, source, **options)
    if solved.value is None:
        return
    assert set(errors(found)) <= {"graph.no-reference", "graph.floating"}
    undefined = solved.reference[target[0]] != solved.reference[target[1]]
    assert undefined == ("graph.no-reference" in codes)
    if not undefined and "graph.floating" not in codes:
        levels = {item: 5 + at for at, item in enumerate(NODES) if item != "gnd"}
        shifted = Dense(netlist, source, **options, levels=levels)
        observed = (
            (lambda item: item.value["I(short)"]) if short else lambda item: item.voltage(target)
        )
        assert observed(shifted) == observed(solved)
        if "graph.unreachable" in codes:
            assert observed(solved) == 0
