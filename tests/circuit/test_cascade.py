"""Rows of equal copies: which are found, and what stays in sight."""

import pytest

import acsolve
from acsolve.circuit.cascade import condensed

SECTION = """
block section(a, b)
    a -- R -- b
    b -- C -- gnd
    R = 100 ohm
    C = 1 nF
end
"""


def netlist(*lines: str, block: str = SECTION):
    """The netlist of a row of 40 sections with more lines below."""
    text = "\n".join((block, "src -- N1 : 40 * section(R = 120 ohm) -- far", *lines, ""))
    return acsolve.parse(text).netlist


def test_a_row_of_equal_copies_is_found_and_put_away():
    """Outside, one part is left; inside, every name of the first copy."""
    whole = netlist("far -- RL -- gnd", "RL = 1 kohm")
    (row,) = whole.cascades
    assert (row.name, row.count, row.length) == ("N1", 40, 2)
    short = condensed(whole, {"src", "far"})
    assert [part.name for part in short.parts] == ["N1", "RL"]
    assert [part.name for part in short.sections["N1"].parts] == ["N1[1].R", "N1[1].C"]
    assert short.sections["N1"].count == 40


@pytest.mark.parametrize(
    "lines",
    [
        ("N1[7].C = 2 nF",),
        ("N1[7].C = absent",),
        ("N1[7].b -- Rx -- gnd", "Rx = 1 kohm"),
        ("let k = 2", "far -- Rx -- gnd", "Rx = 2*N1[7].R"),
        ("join N1[7].b, far",),
    ],
)
def test_copies_that_differ_or_are_used_from_outside_stay_as_written(lines):
    """A value changed, a part left out, a node used, a value mentioned, nodes joined."""
    assert netlist(*lines).cascades == ()


def test_a_changed_value_ends_the_row_and_another_does_not():
    """Values given later are compared as those of the file are."""
    circuit = acsolve.Circuit(netlist("far -- RL -- gnd", "RL = 1 kohm"))
    assert circuit.with_values(RL="2 kohm").netlist.cascades
    assert not circuit.with_values({"N1[7].C": "2 nF"}).netlist.cascades
    assert not circuit.with_values(RL="2*N1[3].R").netlist.cascades
    (row,) = circuit.without("RL").netlist.cascades
    assert row.start == 0


def test_parts_before_a_row_may_be_left_out():
    """The copies are still where the row says."""
    text = (
        SECTION
        + "src -- R0 -- a0 -- N1 : 40 * section -- far\nR0 = 1 ohm\na0 -- C0 -- gnd\nC0 = 1 pF\n"
    )
    changed = acsolve.parse(text).without("C0").netlist
    (row,) = changed.cascades
    assert changed.parts[row.start].name == "N1[1].R"
    assert [part.name for part in condensed(changed, ()).parts] == ["R0", "N1"]


def test_what_is_asked_about_stays_in_sight():
    """The copy that holds a node is written out between the two runs around it."""
    short = condensed(netlist(), {"src", "N1[36].b"})
    assert [part.name for part in short.parts][:4] == [
        "N1[1..35]",
        "N1[36].R",
        "N1[36].C",
        "N1[37].R",
    ]
    assert short.sections["N1[1..35]"].count == 35


def test_inner_names_symbols_and_quantities_are_compared():
    """A symbol is another one in each copy; a quantity inside may be given a value outside."""
    inner = SECTION.replace("C = 1 nF", "let k = 3\n    C = k*1 nF")
    assert netlist(block=inner).cascades
    assert netlist("N1[7].k = 4", block=inner).cascades == ()
    assert netlist(block=SECTION.replace("    C = 1 nF\n", "")).cascades == ()


def test_coupled_coils_belong_to_their_copy():
    """Equal couplings come along; a coupling across copies, or another one, does not."""
    block = """
block section(a, b)
    a -- L1 -- m
    m -- L2 -- b
    m -- C -- gnd
    couple L1, L2 = 0.3
    L1, L2 = 1 mH
    C = 1 nF
end
"""
    line = "src -- N1 : 40 * section -- far"
    whole = acsolve.parse(f"{block}\n{line}\n").netlist
    assert whole.cascades
    short = condensed(whole, {"src", "far"})
    assert short.couplings == ()
    assert len(short.sections["N1"].couplings) == 1
    across = acsolve.parse(f"{block}\n{line}\ncouple N1[3].L2, N1[4].L1 = 0.1\n").netlist
    assert across.cascades == ()


def test_sources_and_sections_off_ground_stay_as_written():
    """Only a two-port between its pins and gnd, without sources, can be put away."""
    series = SECTION.replace("b -- C -- gnd", "a -- C -- b")
    assert netlist(block=series).cascades == ()
    driven = SECTION.replace("end", "    b -- E1 : voltage_source(amplitude = 1 V) -- gnd\nend")
    assert netlist(block=driven).cascades == ()
