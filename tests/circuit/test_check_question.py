"""What stands against a question, given where it drives and what it observes."""

from __future__ import annotations

from acsolve.circuit.check import check, check_question

from .networks import (
    IN,
    INVERTER,
    LOW_PASS,
    OUT,
    ammeter,
    asked,
    current,
    errors,
    network,
    part,
    resistor,
    said,
    voltage,
)


def test_a_current_without_a_way_is_refused_when_it_acts():
    """A source in series with a source contradicts Kirchhoff once both act; set to zero, they are open."""
    netlist = asked(*LOW_PASS, current("J1", "gnd", "x", 1), current("J2", "x", "in", 2))
    assert said(check(netlist)) == [
        ("warning", "graph.current-cutset", "the current of J1 and J2 into x has no way on")
    ]
    assert errors(check_question(netlist, None, OUT, quantity="response")) == [
        "graph.current-cutset"
    ]
    assert check_question(netlist, IN, OUT) == ()


def test_an_open_current_output_has_no_voltage_but_a_current():
    """The voltage at an unloaded transconductance is unlimited, its short-circuit current is not."""
    netlist = network(
        resistor("R1", "in", "gnd"), part("A1", "transconductance", "in", "gnd", "out", "gnd")
    )
    assert said(check_question(netlist, IN, OUT)) == [
        (
            "error",
            "graph.current-cutset",
            "nothing but the current of A1 joins out to the rest, "
            "so that its voltage is not determined",
        )
    ]
    assert check_question(netlist, IN, OUT, quantity="transadmittance") == ()
    assert errors(check_question(netlist, None, OUT, quantity="impedance")) == [
        "graph.current-cutset"
    ]


def test_a_drive_whose_current_cannot_return_is_refused():
    """A current driven from one network into another that nothing joins has no way back."""
    netlist = network(*LOW_PASS, resistor("R9", "x", "y"))
    assert said(check_question(netlist, ("in", "x"), OUT, quantity="transimpedance")) == [
        ("error", "graph.current-cutset", "the current of the drive into x and y has no way on")
    ]


def test_a_driven_pair_whose_voltage_is_set_already_is_refused():
    """An ideal output does not give way to a drive; the impedance there is zero, though."""
    netlist = asked(*INVERTER)
    assert said(check_question(netlist, OUT, IN)) == [
        (
            "error",
            "graph.voltage-loop",
            "the voltage at out cannot be driven: it is set by the output of U1 already",
        )
    ]
    assert check_question(netlist, None, OUT, quantity="impedance") == ()
    assert said(check_question(netlist, IN, OUT, quantity="transadmittance")) == [
        (
            "error",
            "graph.voltage-loop",
            "the current into a short at out is not determined: "
            "the voltage there is set by the output of U1 already",
        )
    ]


def test_the_drive_replaces_the_source_at_its_own_pair():
    """A file that draws its source can be asked from the source's nodes."""
    netlist = network(voltage("V1", "gnd", "in"), *LOW_PASS)
    assert check_question(netlist, IN, OUT) == ()
    assert check_question(netlist, IN, OUT, quantity="transimpedance") == ()
    assert check_question(netlist, None, OUT, quantity="response") == ()


def test_a_pair_without_a_common_reference_is_refused():
    """The voltage between two networks that nothing joins is not defined."""
    netlist = network(part("T1", "transformer", "in", "gnd", "a", "b"), resistor("R1", "a", "b"))
    (found,) = check_question(netlist, IN, ("a", "gnd"))
    assert said((found,)) == [
        (
            "error",
            "graph.no-reference",
            "the voltage between a and gnd is not defined: no part and no reference joins them",
        )
    ]
    assert found.hint == "Ask about two nodes of the same part of the network."
    assert check_question(netlist, IN, ("a", "b")) == ()
    (other,) = check_question(netlist, IN, ("b", "gnd"))
    assert other.hint == "Ask about two nodes of the same part of the network, (b, a) for instance."


def test_a_network_without_gnd_can_be_asked_between_any_two_nodes():
    """A floating bridge has answers; against gnd it has none."""
    netlist = network(resistor("R1", "a", "b"), resistor("R2", "b", "c"), resistor("R3", "c", "a"))
    assert check_question(netlist, ("a", "c"), ("b", "c")) == ()
    assert errors(check_question(netlist, ("a", "c"), ("b", "gnd"))) == ["graph.no-reference"]


def test_an_answer_that_is_zero_for_want_of_a_way_is_a_warning():
    """Backwards through an amplifier, or across gnd, no signal gets."""
    netlist = network(
        resistor("R1", "in", "gnd"),
        part("A1", "voltage_amplifier", "in", "gnd", "x", "gnd"),
        resistor("R2", "x", "out"),
        resistor("R3", "out", "gnd"),
    )
    assert check_question(netlist, IN, OUT) == ()
    assert said(check_question(netlist, OUT, IN)) == [
        (
            "warning",
            "graph.unreachable",
            "no signal gets from out to in, so the answer is zero",
        )
    ]


def test_an_ammeter_is_observed_in_its_own_branch():
    """The current of a named ammeter asks for no short."""
    netlist = network(*INVERTER, ammeter("M1", "out", "x"), resistor("R3", "x", "gnd"))
    assert check_question(netlist, IN, ("out", "x"), quantity="transadmittance", ammeter="M1") == ()
