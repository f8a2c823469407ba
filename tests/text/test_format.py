"""Every statement of the format's description, and what it means."""

from __future__ import annotations

import re
from fractions import Fraction
from pathlib import Path

import pytest

from acsolve.circuit import expression as ex
from acsolve.circuit import unit
from acsolve.circuit.expression import Name, Number
from acsolve.circuit.kind import KINDS
from acsolve.circuit.netlist import with_variant
from acsolve.errors import AcsolveError
from acsolve.text import limits, parse


def parts(text: str) -> dict:
    """The parts of a text by name."""
    return {part.name: part for part in parse(text).netlist.parts}


def value(text: str, name: str = "R1", attribute: str = "value"):
    """The expression of a part's value; a number as a fraction."""
    found = parts(text)[name].values[attribute].expression
    return found.value if isinstance(found, Number) else found


def refused(text: str) -> list[str]:
    """The codes of the errors of a text."""
    with pytest.raises(AcsolveError) as caught:
        parse(text)
    return [item.code for item in caught.value.diagnostics]


def test_direction_is_left_to_right():
    """The left node of a part is its first terminal."""
    assert parts("a -- R1 -- b -- V1 : voltage_source(5 V) -- gnd")["V1"].nodes == ("b", "gnd")


def test_a_stated_kind_wins_over_the_letter():
    """A part named like a resistor is what its stated kind says."""
    found = parts("a -- Lamp -- b\nLamp : resistor(value = 5 ohm)\nb -- Cell : voltage_source -- a")
    assert found["Lamp"].kind == "resistor"
    assert found["Cell"].kind == "voltage_source"


def test_names_are_case_sensitive():
    """r1 and R1 are two nodes."""
    assert parts("r1 -- R2 -- r_1 -- R3 -- R_1x")["R3"].nodes == ("r_1", "R_1x")


def test_every_word_may_be_a_node():
    """Every word of the format but the reserved ones may be a node's name."""
    from acsolve.text.syntax import keywords

    words = [word for word in keywords() if word not in ("gnd", "end", "from", "to", "absent")]
    for number, word in enumerate(words):
        text = f"{word} -- R{number} -- x\nask transfer from {word} to x\njoin {word}, y\ny -- C1 -- gnd"
        assert parse(text).netlist.parts[0].nodes == (word, "x")


@pytest.mark.parametrize("word", ["end", "from", "to", "absent"])
def test_reserved_words_are_no_nodes(word):
    """A reserved word cannot be a node."""
    assert refused(f"a -- R1 -- {word}")


@pytest.mark.parametrize("word", ["s", "pi", "sqrt", "exp", "ln", "log10"])
def test_words_of_expressions_name_nodes_only(word):
    """A word of expressions may be a node, and no part and no quantity."""
    assert parts(f"{word} -- R1 -- b")["R1"].nodes == (word, "b")
    assert refused(f"a -- R1 -- b\nlet {word} = 5") == ["name.reserved"]
    assert refused(f"a -- {word} : ammeter -- b") == ["name.reserved"]


def test_nominal_names_keep_their_reference():
    """A name in an expression stays a reference; its tolerance does not come along."""
    text = "a -- R1 = 1 kohm ± 5 % -- b -- R2 = (2*R1) -- gnd"
    assert value(text, "R2") == ex.Product(ex.number(2), Name("R1"))
    assert parts(text)["R2"].values["value"].tolerance is None


def test_one_value_for_several_parts():
    """Parts in a row get the same value, each with its own tolerance."""
    found = parts("a -- R1 -- b -- R2 -- c\nR1, R2 = 4.7 kohm ± 1 %")
    assert found["R1"].values == found["R2"].values


def test_symbols_take_the_dimension_of_their_use():
    """A declared symbol has the dimension that its first use needs."""
    netlist = parse(
        "let x, tau, n\na -- R1 = (n*x) -- b -- R2 = (x) -- c -- C1 = (tau/x) -- gnd"
    ).netlist
    found = {name: item.dimension for name, item in netlist.quantities.items()}
    assert found == {"x": unit.OHM, "tau": unit.SECOND, "n": unit.NONE}


def test_bare_numbers_take_the_dimension_of_their_place():
    """A bare number, a bare sum and a bare term in a sum take the dimension their place needs."""
    assert value("a -- R1 = 50 -- b") == 50
    assert value("a -- R1 = (50 + 2*3) -- b") == 56
    assert value("let x = 5 ohm\na -- R1 = (x + 5) -- b") == ex.Sum(Name("x"), ex.number(5))
    assert refused("let f = 1 kHz\na -- R1 = (2*f) -- b") == ["value.unit"]


@pytest.mark.parametrize(
    ("text", "code"),
    [("a -- R1 = 5 V -- b", "value.unit"), ("a -- C1 = 5 s -- b", "value.unit"),
     ("a -- L1 = 5 deg -- b", "value.unit"), ("a -- R1 = 5 dB -- b", "value.unit"),
     ("a -- V1 : voltage_source(5 A) -- b", "value.unit"),
     ("ask sweep from a to b over 1 ohm .. 2 Hz\na -- R1 -- b", "value.unit"),
     ("ask step from a to b for 5 Hz\na -- R1 -- b", "value.unit"),
     ("ask two-port from a to b reference 5 F\na -- R1 -- b", "value.unit"),
     ("goal from a to b over 1 Hz .. 2 Hz below 5 V\na -- R1 -- b", "value.unit"),
     ("a -- L1 -- b -- L2 -- gnd\ncouple L1, L2 = 0.5 ohm", "value.unit"),
     ("a -- L1 -- b\nL1 : inductor(quality = 5 at 3 ohm)", "value.unit"),
     ("a -- R1 : resistor(5 ohm, tc = 5 V) -- b", "value.unit"),
     ("a -- Z1 : impedance(1/s) -- b", "value.unit"),
     ("a -- R1 = (ln(5 ohm)) -- b", "value.unit"), ("a -- R1 = (2^(3 V)) -- b", "value.unit")],
)  # fmt: skip
def test_dimensions_are_checked_everywhere(text, code):
    """A unit that does not fit its place is refused, wherever the place is."""
    assert refused(text) == [code]


def test_percent_with_its_sign():
    """Two signed percentages are the two limits of a tolerance."""
    tolerance = parts("a -- C1 = 10 uF +80 % -20 % -- b")["C1"].values["value"].tolerance
    assert (tolerance.low, tolerance.high) == (
        ex.number(Fraction(-1, 5)), ex.number(Fraction(4, 5))
    )  # fmt: skip


def test_absolute_and_relative_tolerances():
    """A tolerance in the unit of the value is absolute, one in percent relative."""
    found = parts("a -- R1 = 5 ohm ± 2 ohm -- b -- R2 = 5 ohm ± 2 % normal -- c")
    assert not found["R1"].values["value"].tolerance.relative
    assert found["R2"].values["value"].tolerance.relative
    assert found["R2"].values["value"].tolerance.distribution == "normal"


def test_a_let_with_a_tolerance_is_one_quantity():
    """The tolerance of a let stays with the let, and parts refer to it."""
    netlist = parse("let x = 5 ohm ± 1 %\na -- R1 = (x) -- b -- R2 = (x) -- c").netlist
    assert netlist.quantities["x"].value.tolerance is not None
    assert {part.values["value"].expression for part in netlist.parts} == {Name("x")}


def test_cascade_names():
    """Copies count from 1; a single copy has no number; junctions are pins."""
    block = "block cell(a, b)\n    a -- R -- m\n    m -- C -- b\nend\n"
    assert list(parts(block + "p -- N : 2 * cell -- q")) == ["N[1].R", "N[1].C", "N[2].R", "N[2].C"]
    assert list(parts(block + "p -- N : cell -- q")) == ["N.R", "N.C"]
    netlist = parse(block + "p -- N : 2 * cell -- q\nask transfer from N[2].a to N[1].m").netlist
    assert netlist.questions[0].source == ("N[1].b", "gnd")
    assert netlist.questions[0].target == ("N[1].m", "gnd")


def test_block_arguments_are_of_the_caller():
    """An argument is evaluated where the block is placed, its own name included."""
    block = "block cell(a, b)\n    a -- R = 1 ohm -- b\nend\n"
    text = block + "let R = 7 ohm\np -- N : cell(R = R) -- q"
    assert value(text, "N.R") == Name("R")


def test_overrides_win_over_arguments():
    """A value given to an inner part from outside wins over the argument and the block."""
    block = "block cell(a, b)\n    a -- R = 1 ohm -- b\nend\n"
    text = block + "p -- N : 3 * cell(R = 2 ohm) -- q\nN[2].R = 3 ohm"
    assert [value(text, f"N[{copy}].R") for copy in (1, 2, 3)] == [2, 3, 2]


def test_a_block_sees_only_what_it_may():
    """A block sees file-level lets and gnd, and neither nodes nor parts of the file."""
    block = "let w = 2 ohm\nblock cell(a, b)\n    a -- R = (w) -- out\n    out -- Q -- b\n    Q : ammeter\nend\n"
    netlist = parse(block + "p -- N : cell -- out\nout -- Rx -- gnd").netlist
    assert netlist.part("N.R").nodes == ("p", "N.out")
    assert refused("block c(a, b)\n    a -- R = (Rx) -- b\nend\np -- N : c -- q -- Rx -- gnd") == [
        "name.unknown"
    ]


def test_join():
    """Joined nodes are one; gnd keeps its name, else the first."""
    netlist = parse(
        "a -- R1 -- b\nc -- R2 -- d\njoin b, c\njoin d, gnd\njoin a, x\nx -- R3 -- gnd"
    ).netlist
    assert [part.nodes for part in netlist.parts] == [("a", "b"), ("b", "gnd"), ("a", "gnd")]
    assert netlist.aliases == {"c": "b", "d": "gnd", "x": "a"}


def test_variants_are_not_applied():
    """Reading leaves the nominal circuit; a variant is applied by name."""
    text = (
        "a -- R1 = 1 ohm -- b -- R2 = 2 ohm -- gnd\n"
        'variant "v"\n    R1 = 2*R2\n    R2 = absent\n    join a, b\nend'
    )
    assert refused(text) == ["name.absent"]
    text = text.replace("2*R2", "5 ohm")
    netlist = parse(text).netlist
    assert value(text) == 1
    assert [part.name for part in with_variant(netlist, "v").parts] == ["R1"]


def test_zero_and_negative_values():
    """Zero is a value like any other; a negative one is taken with a note."""
    assert value("a -- R1 = 0 -- b") == 0
    reading = parse("a -- R1 = -5 ohm -- b")
    assert [(item.code, item.severity) for item in reading.warnings] == [("value.negative", "note")]


def test_one_symbol_among_numbers_is_a_warning():
    """One part without a value among parts that have one is a warning."""
    text = "a -- R1 = 1 ohm -- b -- R2 = 2 ohm -- c -- R3 -- gnd"
    assert [item.code for item in parse(text).warnings] == ["value.lone-symbol"]
    assert parse(text.replace("R2 = 2 ohm", "R2")).warnings == ()


def test_couplings_of_three_are_every_pair():
    """Three names couple every pair, and the numbers must be possible together."""
    text = "a -- L1 -- b -- L2 -- c -- L3 -- gnd\ncouple L1, L2, L3 = "
    found = parse(text + "0.9").netlist.couplings
    assert [(item.first, item.second) for item in found] == [
        ("L1", "L2"),
        ("L1", "L3"),
        ("L2", "L3"),
    ]
    assert refused(text + "-0.6") == ["couple.impossible"]
    assert parse(text + "-0.5").netlist.couplings
    assert parse(text + "1").netlist.couplings


def test_sources():
    """An amplitude and an angle become two values; radians are degrees."""
    found = parts(
        "a -- V1 : voltage_source(5 V ∠ 30 deg) -- b -- I1 : current_source(1 A angle 1 rad) -- a"
    )
    assert found["V1"].values["angle"].expression == ex.number(30)
    assert found["I1"].values["angle"].expression == ex.Quotient(ex.number(180), ex.PI)


def test_chains_and_brackets():
    """Series and parallel signs place parts between nodes with names of their own."""
    found = parts("a -- R1 || (L1 + C1) -- b")
    assert found["R1"].nodes == ("a", "b")
    assert found["L1"].nodes == ("a", "L1~C1")
    assert found["C1"].nodes == ("L1~C1", "b")


def test_continued_lines():
    """A line goes on inside brackets and after --, comma, || and +."""
    text = "a --\n\n  R1 ||  # beside\n  R2 -- b\nR1,\nR2 = (\n 5 +\n 6)\nb -- R3 +\n R4 -- gnd"
    assert value(text) == 11
    assert len(parts(text)) == 4


def test_statements_end_with_their_line():
    """A line that does not go on ends its statement."""
    assert refused("a -- R1\n-- b") == ["chain.end", "chain.end"]


def test_the_examples_of_the_reference():
    """Every example of the reference page reads without an error or a warning."""
    page = (Path(__file__).parents[2] / "grammar" / "README.md").read_text(encoding="utf-8")
    examples = re.findall(r"```circuit\n(.*?)```", page, re.DOTALL)
    assert len(examples) > 5
    for example in examples:
        assert parse(example).warnings == ()


def test_the_reference_names_every_kind_and_limit():
    """The reference lists every kind with its attributes, and every limit."""
    page = (Path(__file__).parents[2] / "grammar" / "README.md").read_text(encoding="utf-8")
    rows = dict(re.findall(r"^\| `(\w+)` (\|.*)$", page, re.MULTILINE))
    assert set(rows) == set(KINDS)
    for kind in KINDS.values():
        for item in (*kind.terminals, *kind.attributes):
            assert re.search(rf"\b{item.name}\b", rows[kind.name]), (kind.name, item.name)
    section = page.partition("## Limits")[2]
    for name in vars(limits):
        number = getattr(limits, name)
        if name.isupper() and name not in ("FILE_BYTES", "SHAPES"):
            assert f"{number:,}" in section or str(number) in section, name


def test_the_cascade_of_the_description():
    """Two hundred sections, one of them with another capacitor."""
    text = """
    block section(a, b)
        a -- R -- b
        b -- C -- gnd
        R = 100 ohm
        C = 1 nF
    end

    src -- N1 : 200 * section(R = 120 ohm) -- far
    N1[7].C = 2 nF
    """
    found = parts(text)
    assert len(found) == 400
    assert found["N1[7].C"].values["value"].expression == ex.number(Fraction(2, 10**9))
    assert found["N1[8].C"].values["value"].expression == ex.number(Fraction(1, 10**9))
    assert {found[f"N1[{copy}].R"].values["value"].expression for copy in range(1, 201)} == {
        ex.number(120)
    }


def test_the_repetition_of_the_description():
    """A ladder of twenty sections."""
    text = """
    repeat k = 1 .. 20
        n[k-1] -- R[k] -- n[k]
        n[k]   -- C[k] -- gnd
    end
    """
    found = parts(text)
    assert len(found) == 40
    assert found["R[20]"].nodes == ("n[19]", "n[20]")


def test_a_block_may_be_left_out():
    """`absent` takes a whole block out, in the file and in a variant; a block has no value."""
    block = "block cell(a, b)\n    a -- R -- b\nend\np -- N : 2 * cell -- q -- R1 -- gnd\n"
    assert list(parts(block + "N = absent")) == ["R1"]
    netlist = parse(block + 'variant "v"\n    N = absent\nend').netlist
    assert [part.name for part in with_variant(netlist, "v").parts] == ["R1"]
    assert refused(block + "N = 5 ohm") == ["name.not-a-value"]


def test_an_angle_is_given_once():
    """An angle behind the amplitude and an attribute of that name contradict each other."""
    text = "a -- V1 : voltage_source(5 V ∠ 3 deg, angle = 4 deg) -- b"
    assert refused(text) == ["value.twice"]


def test_bare_tolerances():
    """A bare quantity may have a bare tolerance, and a named tolerance is a fraction."""
    netlist = parse("let x = 3 ± 1\na -- R1 = (x) -- b").netlist
    assert not netlist.quantities["x"].value.tolerance.relative
    found = parts("let tol = 0.02\na -- R1 = 5 ohm ± tol -- b")
    assert found["R1"].values["value"].tolerance.relative
    found = parts("let dR = 2 ohm\na -- R1 = 5 ohm ± dR -- b")
    assert not found["R1"].values["value"].tolerance.relative


def test_nodes_may_be_named_like_parts():
    """A node named like a part is taken where anything else shows that it is a node."""
    assert parse("L1 -- R1 -- L2 -- R2 -- L3\nL2 -- R3 -- gnd").netlist.parts
    assert parse("a -- R1 -- L2 -- R2 -- b\nask transfer from a to L2").netlist.parts
    assert refused("a -- R1 -- L2 -- R2 -- b") == ["chain.row"]


def test_joined_nodes_must_exist():
    """A join names nodes that stand somewhere."""
    assert refused("a -- R1 -- b\njoin a, c") == ["name.unknown-node"]
