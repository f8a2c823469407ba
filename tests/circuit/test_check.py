"""What is refused before anything is computed, one circuit at a time."""

from __future__ import annotations

import time

import pytest

from acsolve.circuit.check import check, check_question
from acsolve.circuit.netlist import Part
from acsolve.errors import frame
from acsolve.source import Source, Span

from .networks import (
    FOLLOWER,
    IN,
    INVERTER,
    LOW_PASS,
    OUT,
    ammeter,
    asked,
    capacitor,
    current,
    inductor,
    network,
    opamp,
    part,
    resistor,
    said,
    voltage,
)


@pytest.mark.parametrize(
    "parts",
    [
        LOW_PASS,
        INVERTER,
        FOLLOWER,
        (*LOW_PASS, voltage("V1", "gnd", "in")),
        (capacitor("C1", "in", "a"), capacitor("C2", "a", "out"), capacitor("C3", "out", "gnd")),
        (inductor("L1", "in", "out"), inductor("L2", "in", "out"), inductor("L3", "out", "gnd")),
        (
            part("T1", "transformer", "in", "gnd", "out", "x"),
            resistor("R1", "out", "x"),
            resistor("R2", "x", "gnd"),
        ),
        (
            part("A1", "transconductance", "in", "gnd", "out", "gnd"),
            capacitor("C1", "out", "gnd"),
        ),
        (current("J1", "gnd", "in"), *LOW_PASS),
        (ammeter("M1", "in", "x"), resistor("R1", "x", "out"), resistor("R2", "out", "gnd")),
        (part("W1", "line", "in", "out", "gnd", "gnd"),),
        # two op-amps whose outputs feed each other's inputs
        (
            resistor("R1", "in", "b"),
            resistor("R2", "b", "c"),
            resistor("R3", "c", "d"),
            capacitor("C1", "d", "e"),
            resistor("R4", "e", "gnd"),
            opamp("U1", "in", "c", "d"),
            opamp("U2", "e", "c", "b"),
            resistor("R5", "in", "out"),
        ),
    ],
)
def test_usual_circuits_pass_without_a_word(parts):
    """Filters, amplifiers, coils, transformers and lines give no diagnostic at all."""
    netlist = asked(*parts)
    assert check(netlist) == ()
    assert check_question(netlist, IN, OUT) == ()


def test_the_empty_network_is_fine():
    """Nothing is wrong with nothing."""
    assert check(network()) == ()


def test_feedback_only_through_another_op_amp_is_feedback():
    """A loop that closes through a second amplifier, into the plus input, is no fault."""
    netlist = asked(
        resistor("R1", "in", "n"),
        capacitor("C1", "n", "a"),
        opamp("U1", "gnd", "n", "a"),
        resistor("R2", "a", "m"),
        resistor("R3", "m", "out"),
        opamp("U2", "gnd", "m", "out"),
        opamp("U3", "out", "b", "c"),
        resistor("R4", "c", "d"),
        part("A1", "voltage_amplifier", "gnd", "d", "b", "gnd"),
        resistor("R5", "d", "gnd"),
    )
    assert check(netlist) == ()


def test_parallel_sources_are_refused_and_equal_ones_are_not():
    """Two voltages on one pair contradict each other unless they plainly are the same."""
    assert said(
        check(asked(voltage("V2", "gnd", "in"), voltage("V1", "gnd", "in"), *LOW_PASS))
    ) == [
        (
            "error",
            "graph.voltage-loop",
            "V1 and V2 form a loop of prescribed voltages without any impedance",
        )
    ]
    same = asked(voltage("V1", "gnd", "in", 5), voltage("V2", "in", "gnd", -5), *LOW_PASS)
    assert said(check(same)) == [
        (
            "warning",
            "graph.voltage-loop",
            "V1 and V2 set the same voltage, so how a current divides between them is not determined",
        )
    ]


@pytest.mark.parametrize("short", [resistor("R0", "in", "gnd", 0), ammeter("R0", "gnd", "in")])
def test_a_source_across_a_short_is_refused(short):
    """A voltage across zero ohm has no answer."""
    assert said(check(asked(voltage("V1", "gnd", "in", 1), short, *LOW_PASS))) == [
        (
            "error",
            "graph.voltage-loop",
            "R0 and V1 form a loop of prescribed voltages without any impedance",
        )
    ]


def test_a_loop_of_shorts_is_a_warning():
    """Between two shorts only the division of the current is open."""
    netlist = asked(
        ammeter("M1", "in", "x"),
        resistor("R0", "in", "x", 0),
        resistor("R1", "x", "out"),
        resistor("R2", "out", "gnd"),
    )
    assert said(check(netlist)) == [
        (
            "warning",
            "graph.voltage-loop",
            "M1 and R0 form a loop without impedance, "
            "so how a current divides between them is not determined",
        )
    ]


def test_a_loop_of_many_sources_names_its_members_only():
    """The loop that is reported is closed, whatever else hangs on it."""
    netlist = asked(
        voltage("V1", "gnd", "in"),
        voltage("V2", "in", "b"),
        voltage("V3", "b", "out"),
        voltage("V4", "in", "out"),
    )
    (found,) = check(netlist)
    assert found.message == "V2, V3 and V4 form a loop of prescribed voltages without any impedance"


def test_two_outputs_on_one_node_are_refused():
    """Two ideal outputs cannot both set one voltage."""
    netlist = asked(
        *INVERTER,
        resistor("R3", "in", "m"),
        resistor("R4", "m", "out"),
        opamp("U2", "gnd", "m", "out"),
    )
    assert said(check(netlist)) == [
        ("error", "graph.two-outputs", "the outputs of U1 and U2 both set the voltage at out")
    ]


def test_an_output_resistance_parts_two_outputs():
    """Outputs of finite gain behind a resistance may be joined."""
    netlist = asked(
        *INVERTER,
        resistor("R3", "in", "m"),
        resistor("R4", "m", "out"),
        opamp("U2", "gnd", "m", "out", open_loop_gain=100_000, output_resistance=50),
    )
    assert check(netlist) == ()


@pytest.mark.parametrize(
    ("item", "message"),
    [
        (
            opamp("U1", "in", "in", "out"),
            "both inputs of the ideal op-amp U1 are on in, so that nothing sets its output",
        ),
        (voltage("V1", "in", "in", 5), "both ends of V1 are on in, which shorts the source"),
        (
            part("F1", "current_amplifier", "in", "in", "out", "gnd"),
            "both input terminals of F1 are on in, so that its input current is not determined",
        ),
        (
            part("A1", "voltage_amplifier", "in", "gnd", "out", "out"),
            "the output of A1 and its reference are both out, which shorts the output",
        ),
    ],
)
def test_a_tied_branch_of_prescribed_voltage_is_refused(item, message):
    """Both ends on one node leave an unknown without a law."""
    load = resistor("R1", "in", "gnd"), resistor("R2", "out", "gnd")
    assert ("error", "graph.voltage-loop", message) in said(check(asked(item, *load)))


@pytest.mark.parametrize(
    ("item", "message"),
    [
        (resistor("R9", "gnd", "gnd"), "both ends of R9 are on gnd"),
        (current("J9", "in", "in", 5), "both ends of J9 are on in"),
        (voltage("V9", "in", "in", 0), "both ends of V9 are on in"),
        (part("T9", "transformer", "in", "gnd", "out", "out"), "a port of T9 is shorted at out"),
        (part("A9", "transconductance", "in", "in", "out", "gnd"), "both inputs of A9 are on in"),
    ],
)
def test_a_shorted_part_is_a_warning(item, message):
    """A part without any voltage across it does nothing."""
    assert said(check(asked(item, *LOW_PASS))) == [("warning", "graph.shorted", message)]


def test_an_ideal_op_amp_without_feedback_is_refused():
    """Unlimited gain without a way back has no answer; limited gain has a large one."""
    ideal = asked(
        resistor("R1", "in", "n"), resistor("R2", "n", "gnd"), opamp("U1", "gnd", "n", "out")
    )
    assert said(check(ideal)) == [
        (
            "error",
            "graph.no-feedback",
            "nothing leads from the output of the ideal op-amp U1 at out back to its inputs, "
            "so that its output is not determined",
        )
    ]
    real = opamp("U1", "gnd", "n", "out", open_loop_gain=1000)
    assert said(check(asked(*ideal.parts[:2], real))) == [
        (
            "warning",
            "graph.no-feedback",
            "nothing leads from the output of U1 at out back to its inputs",
        )
    ]


def test_feedback_to_plus_alone_is_a_warning():
    """Swapped inputs give the same ideal answer and an unstable amplifier."""
    netlist = asked(*INVERTER[:2], opamp("U1", "n", "gnd", "out"))
    assert said(check(netlist)) == [
        ("warning", "graph.positive-feedback", "the output of U1 leads back to its plus input only")
    ]


def test_a_floating_input_is_a_warning_of_the_file_and_an_error_of_the_question():
    """A sensed level that nothing sets matters only to questions that it acts on."""
    netlist = asked(
        *LOW_PASS,
        part("T1", "transformer", "in", "gnd", "s1", "s2"),
        resistor("R3", "s1", "s2"),
        opamp("U1", "s1", "amplified", "amplified"),
    )
    message = (
        "U1 senses the voltage between s1 and amplified, but no part and no reference joins them"
    )
    assert said(check(netlist)) == [("warning", "graph.floating", message)]
    assert check_question(netlist, IN, OUT) == ()
    assert said(check_question(netlist, IN, ("amplified", "gnd"))) == [
        ("error", "graph.floating", message)
    ]
    assert check_question(netlist, ("s1", "gnd"), ("amplified", "gnd")) == ()


def test_two_followers_on_a_floating_bridge_are_answered_with_a_warning():
    """A difference amplifier may cancel the level that nothing sets."""
    netlist = network(
        resistor("R1", "p", "n"),
        opamp("U1", "p", "a", "a"),
        opamp("U2", "n", "b", "b"),
        resistor("R2", "a", "x"),
        resistor("R3", "x", "out"),
        resistor("R4", "b", "y"),
        resistor("R5", "y", "gnd"),
        opamp("U3", "y", "x", "out"),
    )
    found = check_question(netlist, ("p", "n"), OUT)
    assert [(item.severity, item.code) for item in found] == [("warning", "graph.floating")] * 2
    assert found[0].message == (
        "U1 senses the voltage between p and a, "
        "but no part and no reference joins them: n and gnd count as zero volts"
    )


def test_a_node_with_one_connection_is_mentioned():
    """A lone end is a slip, unless it is a pin, an op-amp input or the end of a line."""
    netlist = asked(
        *LOW_PASS, resistor("R3", "out", "Out"), part("W1", "line", "out", "stub", "gnd", "gnd")
    )
    (found,) = check(netlist)
    assert said((found,)) == [("warning", "graph.dangling", "nothing but R3 is connected to Out")]
    assert found.hint == "Did you mean out?"
    assert found.where == "R3"


def test_a_file_that_asks_nothing_gets_notes_for_its_open_ends():
    """Where the pins are not known yet, an open end is only noted."""
    assert said(check(network(*LOW_PASS))) == [
        ("note", "graph.dangling", "nothing but R1 is connected to in")
    ]
    assert check(network(*LOW_PASS), asked=[IN]) == ()


def test_a_diagnostic_points_at_the_parts_of_the_loop():
    """The first part is marked, the others are labelled."""
    source = Source("mast.circuit", "V1 here\nV2 here")
    first, second = (
        Part(name=item.name, kind=item.kind, nodes=item.nodes, values=item.values, span=span)
        for item, span in (
            (voltage("V1", "gnd", "in"), Span(source, 0, 2)),
            (voltage("V2", "gnd", "in"), Span(source, 8, 10)),
        )
    )
    (found,) = check(asked(first, second, *LOW_PASS))
    assert frame(found) == (
        "graph.voltage-loop: V1 and V2 form a loop of prescribed voltages without any impedance\n"
        "  mast.circuit, line 1, column 1\n"
        "    V1 here\n"
        "    ^^\n"
        "  V2 is here:\n"
        "  mast.circuit, line 2, column 1\n"
        "    V2 here\n"
        "    ^^\n"
        "  Put a resistance in series with one of them, or take one out."
    )


def test_a_long_ladder_is_checked_in_nearly_linear_time():
    """Two thousand sections with an amplifier each take well under a few seconds."""
    parts: list[Part] = []
    for k in range(2000):
        parts += [
            resistor(f"R[{k}]", f"n[{k}]", f"m[{k}]"),
            resistor(f"S[{k}]", f"m[{k}]", f"n[{k + 1}]"),
            opamp(f"U[{k}]", "gnd", f"m[{k}]", f"n[{k + 1}]"),
        ]
    start = time.perf_counter()
    assert check(network(*parts), asked=[("n[0]", "gnd")]) == ()
    assert time.perf_counter() - start < 5
