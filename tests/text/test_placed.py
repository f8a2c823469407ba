"""A part with a literal value between two nodes, read the short way: the same circuit, always."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

import acsolve
from acsolve.errors import AcsolveError
from acsolve.text.grow import recipe
from acsolve.text.scan import gathered, script, tokens
from acsolve.text.syntax import Template, syntax_of
from acsolve.text.tree import Chain, Placed

_LITERALS = st.sampled_from(
    ["100 ohm", "4k7", "4.7 kohm", "100", "1e3 ohm", "2.50 Mohm", "0R47", "3.3k", "5 mohm", "1K"]
)


def _tree(line: str) -> object:
    from acsolve.source import Source

    sheet = script(Source("text", line))
    found = gathered(sheet, list(tokens(line, 0, len(line))))
    template = syntax_of("statement", found.kinds)
    assert isinstance(template, Template)
    return recipe(template)(found)


@pytest.mark.parametrize(
    ("line", "short"),
    [
        ("a -- R1 = 100 ohm -- b", True),
        ("a -- R1 = 4k7 -- gnd", True),
        ("a -- R1 = 100 ohm -- b -- C1 = 1 nF -- gnd", False),
        ("a -- R1 = 100 ohm ± 1 % -- b", False),
        ("a -- R[1] = 100 ohm -- b", False),
        ("a -- R1 = -100 ohm -- b", False),
        ("a -- R1 -- b", False),
        ("a -- R1 = (2*R) -- b", False),
    ],
)
def test_only_the_plainest_chain_is_kept_whole(line: str, short: bool) -> None:
    """Tolerances, signs, indices, expressions and longer chains are taken apart at once."""
    assert isinstance(_tree(line), Placed if short else Chain)


@given(_LITERALS, st.sampled_from(["", "x"]))
def test_the_same_part_as_when_its_value_stands_apart(literal: str, end: str) -> None:
    """Value in place or in a line of its own: one circuit."""
    near = acsolve.parse(f"in -- R1 = {literal} -- out{end}\nout{end} -- C1 = 1 nF -- gnd")
    apart = acsolve.parse(f"in -- R1 -- out{end}\nout{end} -- C1 -- gnd\nR1 = {literal}\nC1 = 1 nF")
    assert near.netlist.parts == apart.netlist.parts


def test_spans_are_those_of_name_and_value() -> None:
    """Messages can point at the name and at the value."""
    part = acsolve.parse("in -- R1 = 4.7 kohm -- out\nout -- C1 -- gnd").netlist.parts[0]
    assert part.span is not None
    assert part.span.text == "R1"
    value = part.values["value"].span
    assert value is not None
    assert value.text == "4.7 kohm"


@pytest.mark.parametrize(
    ("text", "code", "place"),
    [
        ("a -- R1 = 1 ohm -- b\nb -- R1 = 2 ohm -- gnd", "part.twice", "R1"),
        ("a -- R1 = 1 ohm -- b\nR1 = 2 ohm", "value.twice", "R1"),
        ("a -- R1 = 1 nF -- b", "value.unit", "1 nF"),
        ("a -- R1 = 1 ohms -- b", "value.unit-unknown", "1 ohms"),
        ("let k = 3\na -- R1 = 2k -- b\nR2 = k", "value.two-readings", "2k"),
        ("a -- pi = 1 ohm -- b", "name.reserved", "pi"),
        ("a -- X1 = 1 ohm -- b", "kind.unstated", "X1"),
        ("repeat k = 1 .. 2\na -- R1 = 1 ohm -- b\nend", "repeat.unindexed", "R1"),
    ],
)
def test_mistakes_are_told_as_in_any_chain(text: str, code: str, place: str) -> None:
    """Code and place of each problem."""
    with pytest.raises(AcsolveError) as caught:
        acsolve.parse(text)
    found = [item for item in caught.value.diagnostics if item.code == code]
    assert found
    assert found[0].span is not None
    assert place in found[0].span.text


def test_a_kind_or_a_value_said_elsewhere_counts() -> None:
    """What other lines say of the part is heard."""
    circuit = acsolve.parse("a -- L1 = 5 ohm -- gnd\nL1 : resistor(series_inductance = 2 nH)")
    part = circuit.netlist.parts[0]
    assert part.kind == "resistor"
    assert set(part.values) == {"value", "series_inductance"}
    gone = acsolve.parse("a -- R1 = 5 ohm -- gnd\na -- R2 = 1 ohm -- gnd\nabsent R1")
    assert [item.name for item in gone.netlist.parts] == ["R2"]


def test_inside_a_block_arguments_win() -> None:
    """Each copy takes the values it is given."""
    text = """
        block section(a, b)
            a -- R = 100 ohm -- b
            b -- C = 1 nF -- gnd
        end
        in -- N1 : section(R = 120 ohm) -- out
    """
    values = {
        part.name: part.values["value"].expression for part in acsolve.parse(text).netlist.parts
    }
    same = acsolve.parse(
        "in -- A = 1 ohm -- out\nA : resistor\nout -- R = 120 ohm -- gnd\nout -- C = 1 nF -- gnd"
    )
    wanted = {part.name: part.values["value"].expression for part in same.netlist.parts}
    assert values["N1.R"] == wanted["R"]
    assert values["N1.C"] == wanted["C"]
