"""The assembly: one equation fewer than unknowns, whatever the parts and their order."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.analyses.question import transfer_ask
from acsolve.circuit.cascade import CASCADE
from acsolve.circuit.expression import ZERO
from acsolve.circuit.kind import KINDS
from acsolve.equations.stamp import STAMPS
from acsolve.equations.system import DRIVE, SHORT, assemble
from tests.strategies import R, any_lumped, network, pairs, scattered


def test_every_kind_has_a_stamp():
    """Every kind of the format has a stamp; a row of copies has one too, and is no such kind."""
    assert set(STAMPS) == {*KINDS, CASCADE}


@settings(max_examples=80)
@given(st.data(), st.booleans(), st.booleans())
def test_one_law_fewer_than_unknowns(data, connected, shorted):
    """Driven at a pair, any network has exactly one equation fewer than unknowns."""
    netlist = data.draw(any_lumped(symbols=True) if connected else scattered())
    if len(netlist.nodes()) < 2:
        return
    source, target = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    system = assemble(netlist, drive=source, short=target if shorted else None)
    assert len(system.laws) == len(system.unknowns) - 1
    assert len({str(item) for item in system.unknowns}) == len(system.unknowns)
    assert [system.positions[str(item)] for item in system.unknowns] == list(
        range(len(system.unknowns))
    )
    for law in system.laws:
        assert ZERO not in law.entries.values()
        assert all(0 <= column < len(system.unknowns) for column in law.entries)
    own = assemble(netlist, drive=None)
    assert len(own.laws) == len(own.unknowns) - 1


@settings(max_examples=40)
@given(st.data())
def test_assembly_does_not_depend_on_the_order_of_parts(data):
    """Parts in another order give the same unknowns, laws and entries."""
    netlist = data.draw(any_lumped(symbols=True))
    source = data.draw(pairs(netlist))
    first = assemble(netlist, drive=source)
    turned = type(netlist)(parts=netlist.parts[::-1], couplings=netlist.couplings)
    second = assemble(turned, drive=source)
    assert first.unknowns == second.unknowns
    assert [law.meaning for law in first.laws] == [law.meaning for law in second.laws]


def test_names_of_the_question_are_no_names_of_parts():
    """What a question adds is called what no part can be called: its names hold a blank."""
    for name in (DRIVE, SHORT):
        assert " " in name


def test_a_reference_has_no_unknown():
    """The voltage against the reference node is one unknown, against itself none."""
    netlist = network(R("R1", "in", "gnd"))
    system = transfer_ask(netlist, ("in", "gnd"), ("in", "gnd")).system(netlist)
    assert system.voltage(("in", "gnd")) == {system.positions["V(in)"]: 1}
    assert system.voltage(("in", "in")) == {}
