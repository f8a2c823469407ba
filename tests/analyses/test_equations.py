"""The equations to read: solved by plain elimination, they give the closed form's answer."""

from __future__ import annotations

from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.analyses.equations import Equations, equations
from acsolve.circuit.netlist import Netlist
from acsolve.equations.exact import Symbols
from tests.reference.dense import Values, answer
from tests.reference.field import Residues
from tests.strategies import C, L, R, any_lumped, connected, network, pairs, part

from .test_transfer_laws import PASSIVE, gnd


def solution(found: Equations, netlist: Netlist) -> dict[str, object] | None:
    """The unknowns modulo a prime, with 1 V for E; None where the matrix is singular."""
    field = Residues(5)
    value = Values(netlist, field, field.symbol("s"))
    value.known = {}  # the entries hold nothing but free symbols and numbers
    zero, one = field.number(Fraction(0)), field.number(Fraction(1))
    rows = []
    for row, right in zip(found.matrix, found.excitation, strict=True):
        line = [value(row[k]) if k in row else zero for k in range(found.size)]
        plain = str(right) == "Name(name='E')"
        rows.append([*line, one if plain else value(right)])
    for column in range(found.size):
        at = next((k for k in range(column, len(rows)) if not field.is_zero(rows[k][column])), None)
        if at is None:
            return None
        rows[column], rows[at] = rows[at], rows[column]
        rows[column] = [item / rows[column][column] for item in rows[column]]
        for k, row in enumerate(rows):
            if k != column:
                rows[k] = [a - row[column] * b for a, b in zip(row, rows[column], strict=True)]
    return {name: row[-1] for name, row in zip(found.unknowns, rows, strict=True)}


def voltage(values, first: str, second: str):
    """A voltage of the solution; a reference has no unknown and is zero."""
    zero = Residues(5).number(Fraction(0))
    assert values is not None
    return values.get(f"V({first})", zero) - values.get(f"V({second})", zero)


@settings(max_examples=35)
@given(st.data(), st.booleans())
def test_the_matrix_solves_to_the_voltage_ratio(data, symbols):
    """A·x = z with 1 V at the drive gives every node the dense reference's potential."""
    netlist = data.draw(any_lumped(symbols=symbols))
    source = data.draw(pairs(netlist))
    field = Residues(5)
    s = field.symbol("s")
    found = equations(netlist, drive=source)
    assert len(found.matrix) == len(found.excitation) == len(found.meanings) == found.size
    values = solution(found, netlist)
    for node in netlist.nodes():
        target = (node, source[1])
        if node == source[1]:
            continue
        expected = answer(netlist, field, s, source=source, target=target, quantity="voltage-ratio")
        if values is None:
            assert not expected.regular
        elif expected.sensible and expected.regular and expected.state == "determined":
            assert voltage(values, *target) == expected.value


@settings(max_examples=40)
@given(st.data(), st.booleans())
def test_the_matrix_solves_to_what_the_sources_cause(data, symbols):
    """Without a drive, the excitation holds the file's sources and x is what they cause."""
    netlist = data.draw(
        connected(
            extra=(*PASSIVE, "voltage_source", "current_source", "transformer"), symbols=symbols
        )
    )
    field = Residues(5)
    s = field.symbol("s")
    target = data.draw(pairs(netlist))
    expected = answer(netlist, field, s, source=None, target=target, quantity="voltage-ratio")
    found = equations(netlist)
    values = solution(found, netlist)
    if values is None:
        assert not expected.regular
    elif expected.state == "determined" and expected.regular:
        assert voltage(values, *target) == expected.value


@settings(max_examples=40)
@given(st.data())
def test_admittance_matrices_of_passive_networks_are_symmetric(data):
    """Of R, C and L alone the part of the matrix that relates nodes to nodes is symmetric."""
    netlist = data.draw(connected(symbols=True))
    found = equations(netlist)
    nodes = [k for k, name in enumerate(found.unknowns) if name[0] == "V"]
    rows = [
        next(
            at
            for at, said in enumerate(found.meanings)
            if said == f"current balance at {name[2:-1]}"
        )
        for name in found.unknowns
        if name[0] == "V"
    ]
    field = Residues(9)
    value = Values(netlist, field, field.symbol("s"))
    for i, row in enumerate(rows):
        for j, column in enumerate(nodes):
            assert value(found.entry(row, column)) == value(found.entry(rows[j], nodes[i]))


def test_a_section_reads_as_the_textbook_writes_it():
    """The nodal equations of a single RC section, cell by cell."""
    netlist = network(R("R1", "in", "out"), C("C1", "out", "gnd"))
    found = equations(netlist, drive=gnd("in"))
    assert found.unknowns == ("V(in)", "V(out)", "I(E)")
    assert found.cells() == [
        ["1/R1", "-1/R1", "-1"],
        ["-1/R1", "s*C1 + 1/R1", "0"],
        ["1", "0", "0"],
    ]
    assert found.references == ("gnd",)
    assert found.symbols() == ("C1", "E", "R1")


def test_a_zero_resistor_takes_a_branch_current():
    """A resistor of 0 ohm has no admittance: its current is an unknown of its own."""
    found = equations(network(R("R1", "in", "out", 0), L("L1", "out", "gnd", 1)), drive=gnd("in"))
    assert "I(R1)" in found.unknowns
    symbolic = equations(
        network(R("R1", "in", "out", 0), L("L1", "out", "gnd", 1)),
        drive=gnd("in"),
        symbols=Symbols(symbolic=True),
    )
    assert "I(R1)" not in symbolic.unknowns


@pytest.mark.parametrize("name", ["drive", "short"])
def test_a_node_may_be_called_drive(name):
    """The unknown of a node is called after the node, whatever its name."""
    found = equations(network(R("R1", "in", name), R("R2", name, "gnd")), drive=gnd("in"))
    assert found.unknowns == (f"V({name})", "V(in)", "I(E)") or found.unknowns == (
        "V(in)",
        f"V({name})",
        "I(E)",
    )


def test_sympy_matrices_say_the_same():
    """The SymPy matrices hold the same entries, and solve to the closed form."""
    import sympy

    netlist = network(
        R("R1", "in", "out"), part("U1", "opamp", "gnd", "out", "x", "gnd"), C("C1", "out", "x")
    )
    found = equations(netlist, drive=gnd("in"))
    matrix, unknowns, excitation = found.as_sympy()
    solved = dict(zip(unknowns, matrix.LUsolve(excitation), strict=True))
    ratio = sympy.simplify(solved[sympy.Symbol("V(x)")] / excitation[found.size - 1])
    table = {str(item): item for item in ratio.free_symbols}
    assert set(table) == {"C1", "R1", "s"}
    assert sympy.simplify(ratio + 1 / (table["R1"] * table["C1"] * table["s"])) == 0
