"""Values that stand alone are read by the same grammar."""

from __future__ import annotations

from fractions import Fraction

import pytest

from acsolve.circuit import expression as ex
from acsolve.circuit import unit
from acsolve.circuit.netlist import Level
from acsolve.errors import AcsolveError, CircuitError, TextError
from acsolve.text import (
    parse,
    parse_band,
    parse_duration,
    parse_frequencies,
    parse_gain,
    parse_level,
    parse_pair,
    parse_value,
)

NETLIST = parse(
    """
    in -- R1 = 4k7 -- out
    out -- C1 = 10 nF -- x[1]
    x[1] -- Rq -- gnd
    out -- V1 : voltage_source(5 V) -- far
    far -- W1 : line(z0 = 50 ohm, delay = 1 ns, loss = 1 dB at 1 MHz) -- x[1]
    far -- Z1 : impedance(5 ohm) -- gnd
    block cell(a, b)
        a -- R = 5 ohm -- b
    end
    far -- N1 : 2 * cell -- gnd
    port sense = (in, x[1])
    join far, near
    near -- R7b -- gnd
    let fc = 2 kHz
    b1 -- R9 = (1 kohm*fc/(1 Hz)) -- gnd
    """
).netlist


def number(value) -> Fraction:
    """The number of a value."""
    assert isinstance(value.expression, ex.Number)
    return value.expression.value


@pytest.mark.parametrize(
    ("text", "pair"),
    [("out", ("out", "gnd")), ("in,out", ("in", "out")), ("(in, x[1])", ("in", "x[1]")),
     ("sense", ("in", "x[1]")), ("near", ("far", "gnd")), ("N1[1].b", ("N1[1].b", "gnd")),
     ("N1[2].a", ("N1[1].b", "gnd")), ("gnd,out", ("gnd", "out"))],
)  # fmt: skip
def test_pairs(text, pair):
    """A pair is a node, two nodes, or a port; joined nodes and pins are followed."""
    assert parse_pair(text, NETLIST) == pair


@pytest.mark.parametrize("text", ["outt", "in,", "a b", "", "0", "R1", "fc", "in out", "(in, out"])
def test_wrong_pairs(text):
    """What is no pair of the circuit is refused with a hint."""
    with pytest.raises(AcsolveError) as caught:
        parse_pair(text, NETLIST)
    assert caught.value.hint


def test_a_misspelt_node_is_named():
    """The hint for a misspelt node names the nearest one."""
    with pytest.raises(CircuitError) as caught:
        parse_pair("outt", NETLIST)
    assert "out" in caught.value.hint


def test_values_may_refer_to_the_circuit():
    """A value may be made of names of the circuit, and its unit is checked."""
    value = parse_value("2*R1 ± 5 %", dimension=unit.OHM, netlist=NETLIST)
    assert value.expression == ex.Product(ex.number(2), ex.Name("R1"))
    assert value.tolerance is not None
    assert parse_value("N1[2].R", netlist=NETLIST).expression == ex.Name("N1[2].R")
    with pytest.raises(TextError, match=r"value\.unit"):
        parse_value("fc", dimension=unit.OHM, netlist=NETLIST)
    with pytest.raises(CircuitError, match=r"name\.unknown"):
        parse_value("2*R7", dimension=unit.OHM, netlist=NETLIST)


def test_a_target_tells_the_unit():
    """With the name of a value, decibels, degrees and the frequency s are known to fit or not."""
    assert number(parse_value("45 deg", netlist=NETLIST, target="V1.angle")) == 45
    assert number(parse_value("3 dB at 2 MHz", netlist=NETLIST, target="W1.loss")) == 3
    assert parse_value("5 ohm + s*1 mH", netlist=NETLIST, target="Z1").expression is not None
    with pytest.raises(TextError, match="R1 is a resistor and needs ohms"):
        parse_value("3 dB", netlist=NETLIST, target="R1")


def test_absent_is_no_value():
    """`absent` leaves a part out and is refused as a value."""
    with pytest.raises(TextError, match=r"value\.absent"):
        parse_value("absent", netlist=NETLIST)


def test_bands():
    """A band is two frequencies with two points between them, the lower first."""
    band = parse_band("10Hz..1MHz")
    assert (number(band.low), number(band.high)) == (10, 10**6)
    assert parse_band("fc .. 2*fc", netlist=NETLIST).low.expression == ex.Name("fc")
    for wrong in ("1MHz..10Hz", "10Hz", "10 ohm .. 20 ohm", "10Hz-1MHz"):
        with pytest.raises(TextError):
            parse_band(wrong)


def test_frequencies():
    """Frequencies stand in a row with commas."""
    assert [number(item) for item in parse_frequencies("50Hz, 60 Hz,1k")] == [50, 60, 1000]
    with pytest.raises(TextError):
        parse_frequencies("50Hz, 60 ohm")


def test_levels():
    """A level is in dB; half power and -3 dB are one and the same."""
    assert parse_level("half power") == parse_level("half-power") == parse_level("-3dB") == Level()
    level = parse_level("-6dB").decibel
    assert level is not None
    assert number(level) == -6
    with pytest.raises(TextError, match=r"value\.level"):
        parse_level("-6")


def test_durations():
    """A duration is a time greater than zero."""
    assert number(parse_duration("5ms")) == Fraction(1, 200)
    for wrong in ("0 s", "-1 s", "5 Hz"):
        with pytest.raises(TextError):
            parse_duration(wrong)


def test_gains():
    """A gain is a ratio; decibels become one."""
    assert number(parse_gain("20dB")) == 10
    assert number(parse_gain("1/3")) == Fraction(1, 3)
    assert number(parse_gain("4.7kohm")) == 4700
    assert parse_gain("-3 dB").expression == ex.power(ex.number(10), ex.number(Fraction(-3, 20)))


@pytest.mark.parametrize("call", [parse_value, parse_band, parse_level, parse_duration, parse_gain])
@pytest.mark.parametrize("text", ["", "  ", "\n", "# only this"])
def test_nothing_is_refused(call, text):
    """An empty text is refused by every reader."""
    with pytest.raises(TextError):
        call(text)
