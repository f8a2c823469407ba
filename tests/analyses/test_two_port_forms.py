"""Two-port parameters in closed form: textbook networks, exact laws, the sets against each other."""

from __future__ import annotations

import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st

import acsolve
from acsolve import AcsolveError
from tests import strategies

SETS = ("z", "y", "h", "g", "abcd", "s")


def two_port(text, first, second, **options):
    """Two pairs of a circuit given as text."""
    return acsolve.parse(text).two_port(first, second, **options)


def texts(matrix):
    """The closed forms of a set as text."""
    return None if matrix is None else [[str(form) for form in row] for row in matrix]


def sympy_matrix(matrix):
    """A set as a SymPy matrix."""
    return sympy.Matrix([[form.as_sympy() for form in row] for row in matrix])


def test_a_series_part_has_no_impedances():
    """Z of a lone series resistor does not exist; its chain matrix is (1, R; 0, 1)."""
    found = two_port("a -- R1 -- b", "a", "b", reference=50)
    assert found.z is None
    assert texts(found.y) == [["1/R1", "-1/R1"], ["-1/R1", "1/R1"]]
    assert texts(found.abcd) == [["1", "R1"], ["0", "1"]]
    assert texts(found.s)[1][0] == "100/(100 + R1)"


def test_a_shunt_part_has_no_admittances():
    """Y of a lone shunt capacitor does not exist."""
    found = two_port("a -- A1 : ammeter -- b; a -- C1 -- gnd".replace("; ", "\n"), "a", "b")
    assert found.y is None
    assert texts(found.z) == [["1/(C1*s)"] * 2] * 2
    assert texts(found.abcd) == [["1", "0"], ["C1*s", "1"]]


def test_an_ideal_transformer_has_neither():
    """Its pairs float against each other; h, g, ABCD and s exist."""
    found = two_port("T1 : transformer(p1 = a, p2 = b, s1 = c, s2 = d)", "a,b", "c,d", reference=50)
    assert found.z is None
    assert found.y is None
    assert texts(found.h) == [["0", "T1"], ["-T1", "0"]]
    assert texts(found.abcd) == [["T1", "0"], ["0", "1/T1"]]
    assert texts(found.s)[0][0] == "(-1 + T1^2)/(1 + T1^2)"
    assert found.port_condition == "assumed"
    assert found.laws.lossless
    assert found.laws.reciprocal


def test_a_gyrator_is_lossless_and_not_reciprocal():
    """Z exists, h does not, and the determinant of ABCD is -1."""
    found = two_port("G1 : gyrator(p1 = a, p2 = gnd, s1 = b, s2 = gnd)", "a", "b", reference=50)
    assert texts(found.z) == [["0", "-1/G1"], ["1/G1", "0"]]
    assert found.h is None
    assert sympy.simplify(sympy_matrix(found.abcd).det()) == -1
    assert not found.laws.reciprocal
    assert found.laws.lossless
    assert found.laws.passive


def test_a_line_is_cosh_and_sinh():
    """ABCD of a line: cosh, z0·sinh, sinh/z0, cosh of its propagation exponent."""
    found = two_port("a -- T1 : line(z0 = 60 ohm, delay = 1 ns) -- b", "a", "b", reference=60)
    s = sympy.Symbol("s")
    angle = s / 10**9
    expected = sympy.Matrix(
        [[sympy.cosh(angle), 60 * sympy.sinh(angle)], [sympy.sinh(angle) / 60, sympy.cosh(angle)]]
    )
    difference = sympy_matrix(found.abcd) - expected
    assert difference.applyfunc(lambda item: item.rewrite(sympy.exp).simplify()).is_zero_matrix
    assert texts(found.s)[0][0] == "0"
    assert found.laws.lossless


@pytest.mark.parametrize(
    "text",
    [
        "in -- R1 -- out\nin -- R2 -- gnd\nout -- R3 -- gnd\nR1 = (R0*(k^2-1)/(2*k))\n"
        "R2, R3 = R0*(k+1)/(k-1)\nlet R0 = 50 ohm\nlet k",
        "in -- R1 -- m -- R2 -- out\nm -- R3 -- gnd\nR1, R2 = R0*(k-1)/(k+1)\n"
        "R3 = 2*R0*k/(k^2-1)\nlet R0 = 50 ohm\nlet k",
    ],
    ids=["pi", "tee"],
)
def test_matched_pads(text):
    """Attenuators from the design formulas: s11 = 0 and s21 = 1/k, exactly."""
    found = two_port(text, "in", "out", reference="50 ohm")
    assert texts(found.s) == [["0", "1/k"], ["1/k", "0"]]
    assert found.laws.symmetric
    assert not found.laws.lossless


def test_references_that_differ_and_are_named():
    """A transformer matches its references exactly; a reference may be a name of the file."""
    text = "T1 : transformer(p1 = a, p2 = gnd, s1 = b, s2 = gnd, ratio = 2)\nlet Z0"
    assert texts(two_port(text, "a", "b", reference=("200 ohm", 50)).s) == [["0", "1"], ["1", "0"]]
    named = two_port(f"{text}\na -- R1 = (8*Z0) -- gnd", "a", "b", reference=("4*Z0", "Z0"))
    assert texts(named.s)[0][0] == "-1/5"


def test_a_cascade_multiplies_exactly():
    """ABCD of two sections in a row is the product of theirs."""
    first = "a -- R1 -- b\nb -- C1 -- gnd\n"
    second = "b -- L2 -- c\nc -- R2 || C2 -- gnd\n"
    both = sympy_matrix(two_port(first + second, "a", "c").abcd)
    product = sympy_matrix(two_port(first, "a", "b").abcd) * sympy_matrix(
        two_port(second, "b", "c").abcd
    )
    assert sympy.simplify(both - product) == sympy.zeros(2, 2)


def test_own_sources_are_zero_and_those_across_a_port_go():
    """A voltage source elsewhere is a short, one across a port is taken out."""
    text = "a -- R1 -- b\nb -- R2 -- c\nV1 : voltage_source = 5 V\nc -- V1 -- gnd\n"
    assert texts(two_port(text, "a", "b").z) == [["R1 + R2", "R2"], ["R2", "R2"]]
    assert texts(two_port(text, "a", "c").abcd) == [["1", "R1 + R2"], ["0", "1"]]


@settings(derandomize=True, deadline=None, max_examples=25)
@given(netlist=strategies.any_lumped(symbols=True))
def test_laws_of_random_networks(netlist):
    """Every set is checked; sets are conversions of each other; reciprocity is determinant one."""
    circuit = acsolve.Circuit(netlist)
    nodes = [node for node in circuit.nodes if node != "gnd"]
    if "gnd" not in circuit.nodes or len(nodes) < 2:
        return
    found = circuit.two_port(nodes[0], nodes[-1], reference=50)
    try:
        sets = {name: found.matrix(name) for name in SETS}
    except AcsolveError as error:
        if error.code not in ("equations.singular", "equations.evaluation"):
            raise
        return
    for matrix in sets.values():
        for form in (form for row in matrix or () for form in row):
            assert form.checked is not None
            assert form.checked.max_relative_error < 1e-12
    numbers = {name: _at(matrix) for name, matrix in sets.items() if matrix}
    if "z" in numbers and "y" in numbers:
        assert _small(numbers["z"] * numbers["y"] - sympy.eye(2))
    if "abcd" in numbers:
        assert _small([numbers["abcd"].det() - 1]) == found.laws.reciprocal
    if "y" in numbers:
        assert _small(numbers["y"] - numbers["y"].T) == found.laws.reciprocal


def _small(numbers):
    return all(abs(item) < sympy.Float("1e-40") for item in numbers)


def _at(matrix):
    """A set at one point to 80 digits, each symbol a number of its own."""
    rows = []
    for row in matrix:
        values = []
        for form in row:
            expression = form.as_sympy()
            numbers = {
                item: sympy.Rational(3 + sum(map(ord, item.name)), 101)
                for item in expression.free_symbols
                if item.name != "s"
            }
            numbers[sympy.Symbol("s")] = sympy.Rational(7, 3)
            values.append(sympy.N(expression.subs(numbers), 80))
        rows.append(values)
    return sympy.Matrix(rows)


@settings(derandomize=True, deadline=None, max_examples=10)
@given(
    kinds=st.lists(st.sampled_from("LC"), min_size=1, max_size=5),
    references=st.sampled_from([50, (50, 200), (50, 75)]),
)
def test_lossless_ladders_are_known_as_such(kinds, references):
    """Ladders of L and C are lossless, reciprocal, passive; one resistor ends the first."""
    lines = []
    for place, kind in enumerate(kinds):
        lines.append(f"n{place} -- {kind}{place}a -- n{place + 1}")
        lines.append(f"n{place + 1} -- {'CL'['CL'.index(kind) - 1]}{place}b -- gnd")
    last = f"n{len(kinds)}"
    found = two_port("\n".join(lines), "n0", last, reference=references)
    assert (found.laws.lossless, found.laws.reciprocal, found.laws.passive) == (True, True, True)
    lossy = two_port("\n".join([*lines, f"{last} -- R1 -- gnd"]), "n0", last)
    assert (lossy.laws.lossless, lossy.laws.reciprocal) == (False, True)


def test_negative_parts_may_be_lossless_and_are_not_passive():
    """A negative capacitor takes no power at real frequencies, and is active all the same."""
    laws = two_port("a -- L1 -- b\nb -- C1 = (-1 nF) -- gnd", "a", "b").laws
    assert laws.lossless
    assert laws.passive is None


@pytest.mark.parametrize(
    ("first", "second", "options", "code"),
    [
        ("a", "a", {}, "question.same-node"),
        ("a,b", "b,a", {}, "question.same-node"),
        ("a,a", "b", {}, "question.same-node"),
        ("a", "nowhere", {}, "name.unknown-node"),
        ("a", "b", {"reference": 0}, "option.value"),
        ("a", "b", {"reference": -5}, "option.value"),
        ("a", "b", {"reference": (1, 2, 3)}, "option.value"),
        ("a", "b", {"reference": "5 F"}, "value.unit"),
        ("a", "b", {"reference": "-5 ohm"}, "value.positive"),
        ("a", "b", {"reference": "many"}, "name.unknown"),
    ],
)
def test_questions_that_are_not_well_put(first, second, options, code):
    """Pairs and references are refused at once."""
    with pytest.raises(AcsolveError) as caught:
        two_port("a -- R1 -- b", first, second, **options)
    assert caught.value.code == code


def test_s_needs_a_reference():
    """Without one there is an error that says how to state it."""
    with pytest.raises(AcsolveError, match="reference resistance"):
        _ = two_port("a -- R1 -- b", "a", "b").s


def test_budget_and_singular_networks():
    """A network of too many terms is refused, and one that nothing determines too."""
    ladder = "\n".join(f"n{k} -- R{k} -- n{k + 1}\nn{k + 1} -- C{k} -- gnd" for k in range(12))
    with pytest.raises(AcsolveError) as caught:
        _ = two_port(ladder, "n0", "n12", budget=50).z
    assert caught.value.code == "equations.budget"
    loop = "a -- R1 -- b\nE1 : voltage_amplifier(plus = a, minus = gnd, out = b, ref = gnd)\n"
    loop += "E2 : voltage_amplifier(plus = a, minus = gnd, out = b, ref = gnd)"
    with pytest.raises(AcsolveError) as caught:
        _ = two_port(loop, "a", "b").z
    assert caught.value.code == "equations.singular"
