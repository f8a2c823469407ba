"""Two-port parameters over frequency, insertion loss, equivalents: laws and closed forms."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings

import acsolve
from acsolve import AcsolveError, converted
from tests import strategies

SETS = ("z", "y", "h", "g", "abcd", "s")
HERTZ = np.geomspace(1e3, 1e9, 25)

LADDER = """
a -- L1 = 0.7 uH -- m -- L2 = 1.2 uH -- b
m -- C1 = 300 pF -- gnd
b -- C2 = 120 pF -- gnd
"""


def deviation(found, expected):
    """Largest difference relative to the largest element of each matrix."""
    size = abs(expected).max(axis=(1, 2), keepdims=True)
    return np.max(abs(found - expected) / np.where(size == 0, 1, size))


@pytest.mark.parametrize("reference", [50, (50, 75)])
@pytest.mark.parametrize(
    "text",
    [
        LADDER,
        "a -- T1 : line(z0 = 80 ohm, delay = 3 ns) -- b\na -- C1 = 20 pF -- gnd",
        "T1 : transformer(p1 = a, p2 = gnd, s1 = m, s2 = gnd, ratio = 3)\nm -- L1 = 1 uH -- b",
        "G1 : gyrator(p1 = a, p2 = gnd, s1 = b, s2 = gnd, conductance = 10 mS)\nb -- C1 = 1 nF -- a",
    ],
    ids=["ladder", "line", "transformer", "gyrator"],
)
def test_lossless_networks_are_unitary(text, reference):
    """S†·S is one within 1e-12, at every frequency."""
    s = acsolve.parse(text).two_port("a", "b", reference=reference).sweep(HERTZ).matrices["s"]
    product = np.conj(np.swapaxes(s, 1, 2)) @ s
    assert abs(product - np.eye(2)).max() < 1e-12


def test_numbers_agree_with_closed_forms():
    """Each set, solved with its own ends, is its closed form."""
    found = acsolve.parse(LADDER).two_port("a", "b", reference=("50 ohm", "75 ohm"))
    swept = found.sweep(HERTZ)
    assert swept.error < 1e-9
    for name in SETS:
        forms = [[form.response(HERTZ) for form in row] for row in found.matrix(name)]
        expected = np.moveaxis(np.array(forms), 2, 0)
        assert deviation(swept.matrices[name], expected) < 1e-9, name


@settings(derandomize=True, deadline=None, max_examples=40)
@given(netlist=strategies.any_lumped(symbols=False))
def test_s_converted_is_s_solved(netlist):
    """S parameters solved between their references are those converted from the other sets."""
    circuit = acsolve.Circuit(netlist)
    nodes = [node for node in circuit.nodes if node != "gnd"]
    if "gnd" not in circuit.nodes or len(nodes) < 2:
        return
    hertz = np.array([3.0, 700.0, 2e5])
    try:
        swept = circuit.two_port(nodes[0], nodes[-1], reference=(50, 600)).sweep(hertz)
    except AcsolveError as error:
        if error.code not in ("equations.singular", "equations.undriven", "equations.evaluation"):
            raise
        return
    s = swept.matrices["s"]
    if s is None or not np.isfinite(s).all():
        return
    for name, matrix in swept.matrices.items():
        if matrix is None or name == "s" or not np.isfinite(matrix).all():
            continue
        one, two = converted(matrix, name, "s", reference=[50, 600]), s
        back = converted(s, "s", name, reference=[50, 600])
        # a set loses digits where it is nearly singular: either direction may be the good one
        lost = min(deviation(one, two), deviation(back, matrix))
        assert lost < 1e-6, (name, lost)


def test_sets_that_do_not_exist_are_none():
    """A series resistor has no z and a transformer no z and y, at any frequency."""
    series = acsolve.parse("a -- R1 = 5 ohm -- b").two_port("a", "b").sweep([1.0, 10.0])
    assert series.matrices["z"] is None
    assert series.matrices["y"] is not None
    with pytest.raises(AcsolveError) as caught:
        series.data("z")
    assert caught.value.code == "ports.no-set"
    with pytest.raises(AcsolveError) as caught:
        series.data("s")
    assert caught.value.code == "ports.reference"


def test_cascades_of_computed_blocks():
    """S of the whole is the cascade of its parts, with different references in between."""
    first = "a -- L1 = 0.7 uH -- m\nm -- C1 = 300 pF -- gnd\n"
    second = "m -- L2 = 1.2 uH -- b\nb -- R2 = 600 ohm -- gnd\n"
    whole = acsolve.parse(first + second).two_port("a", "b", reference=(50, 75))
    left = acsolve.parse(first).two_port("a", "m", reference=(50, 20))
    right = acsolve.parse(second).two_port("m", "b", reference=(90, 75))
    row = left.cascade(right, HERTZ)
    assert deviation(row.matrix, whole.data(HERTZ).matrix) < 1e-11
    chain = left.data(HERTZ, "abcd").matrix @ right.data(HERTZ, "abcd").matrix
    assert deviation(chain, whole.data(HERTZ, "abcd").matrix) < 1e-9


def test_insertion_loss_by_its_definition():
    """Power in the load without the network over power with it, from three plain circuits."""
    network = "a -- L1 = 0.7 uH -- b\nb -- C1 = 300 pF -- gnd\na -- R9 = 900 ohm -- gnd\n"
    found = acsolve.parse(network).two_port("a", "b")
    answer = found.insertion(HERTZ, "50 ohm", 200)
    inserted = f"e -- Rs = 50 ohm -- a\nb -- RL = 200 ohm -- gnd\n{network}"
    circuit = acsolve.parse(inserted)
    with_it = circuit.path("e", "b").response(HERTZ)
    ratio = with_it / (200 / 250)
    np.testing.assert_allclose(answer.ratio, ratio, rtol=1e-11)
    np.testing.assert_allclose(answer.insertion_loss_db, -20 * np.log10(abs(ratio)), atol=1e-10)
    np.testing.assert_allclose(answer.insertion_gain_db, -answer.insertion_loss_db)
    form = found.insertion_ratio(50, 200)
    np.testing.assert_allclose(form.response(HERTZ), ratio, rtol=1e-11)
    into_load = abs(with_it) ** 2 / 200
    available = 1 / (4 * 50)
    np.testing.assert_allclose(answer.transducer_gain_db, 10 * np.log10(into_load / available))
    current = circuit.path("e", "a").response(HERTZ)
    taken = np.real(current * np.conj((1 - current) / 50))
    np.testing.assert_allclose(answer.power_gain_db, 10 * np.log10(into_load / taken), atol=1e-7)


def test_available_gain_is_that_of_the_equivalent():
    """Available power behind the network from its Thévenin equivalent."""
    text = "e -- Rs = 50 ohm -- a\na -- R1 = 30 ohm -- b\nb -- C1 = 1 nF -- gnd\n"
    circuit = acsolve.parse(text)
    seen = circuit.equivalent("b", source="e", hertz=HERTZ)
    behind = abs(seen.voltage) ** 2 / (4 * seen.impedance.real)
    answer = circuit.without("Rs").two_port("a", "b").insertion(HERTZ, 50, 75)
    expected = 10 * np.log10(behind * 4 * 50)
    np.testing.assert_allclose(answer.available_gain_db, expected, atol=1e-6)


def test_a_pad_loses_six_decibels():
    """The 6 dB pad between 50 ohm: its loss to its parts' rounding."""
    text = "in -- R1 = 16.61 ohm -- m -- R2 = 16.61 ohm -- out\nm -- R3 = 66.93 ohm -- gnd"
    found = acsolve.parse(text).two_port("in", "out").insertion([1e3], 50, 50)
    assert abs(found.insertion_loss_db[0] - 6) < 1e-3
    np.testing.assert_allclose(found.transducer_gain_db, found.insertion_gain_db)


def test_equivalents_in_closed_form():
    """Thévenin and Norton of a loaded divider, by own sources and by a driven pair."""
    text = "V1 : voltage_source\ngnd -- V1 -- a\na -- R1 -- b\nb -- R2 -- gnd"
    found = acsolve.parse(text).equivalent("b")
    assert [str(item) for item in (found.voltage, found.impedance)] == [
        "V1*R2/(R1 + R2)",
        "R1*R2/(R1 + R2)",
    ]
    assert [str(item) for item in (found.current, found.admittance)] == [
        "V1/R1",
        "(R1 + R2)/(R1*R2)",
    ]
    driven = acsolve.parse("a -- R1 -- b\nb -- R2 -- gnd").equivalent("b", source="a")
    assert str(driven.voltage) == "R2/(R1 + R2)"
    assert str(driven.impedance) == "R1*R2/(R1 + R2)"
    by_current = acsolve.parse("a -- R1 -- b\nb -- R2 -- gnd").equivalent(
        "b", source="a", drive="current"
    )
    assert str(by_current.voltage) == "R2"
    assert str(by_current.impedance) == "R2"


def test_equivalents_of_ideal_sources():
    """An ideal source is its own equivalent: one of the two does not exist."""
    text = "V1 : voltage_source = 5 V\ngnd -- V1 -- a\na -- R1 = 7 ohm -- gnd"
    stiff = acsolve.parse(text).equivalent("a")
    assert str(stiff.voltage) == "5"
    assert str(stiff.impedance) == "0"
    assert stiff.current is None
    assert stiff.admittance is None
    forced = acsolve.parse(
        "J1 : current_source = 2 A\ngnd -- J1 -- a\na -- A1 : ammeter -- b"
    ).equivalent("b")
    assert forced.voltage is None
    assert str(forced.current) == "2"
    assert str(forced.admittance) == "0"


def test_the_equivalent_predicts_any_load():
    """Voltage and impedance of a pair tell the response with a load there."""
    text = "V1 : voltage_source = 3 V\ngnd -- V1 -- a\na -- R1 = 50 ohm -- b\nb -- C1 = 1 nF -- c\n"
    text += "c -- L1 = 2 uH -- gnd\nb -- R2 = 1 kohm -- c\n"
    seen = acsolve.parse(text).equivalent("b,c", hertz=HERTZ)
    loaded = acsolve.parse(f"{text}b -- RL = 33 ohm -- c")
    expected = loaded.path(None, "b,c").response(HERTZ)
    np.testing.assert_allclose(seen.voltage * 33 / (33 + seen.impedance), expected, rtol=1e-9)
    np.testing.assert_allclose(seen.current / (1 / 33 + seen.admittance), expected, rtol=1e-9)
