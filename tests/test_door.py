"""The Python door: what it takes, what it refuses in its own words, what it hands out."""

from __future__ import annotations

import pickle
from datetime import timedelta
from fractions import Fraction

import numpy as np
import pytest

import acsolve
from acsolve import AcsolveError

TEXT = """
title "Sluice filter"
amp -- R1 = 1 kohm -- out -- R2 = 9 kohm -- tail
out -- C1 = 1 uF -- gnd
tail -- M1 : ammeter -- gnd
variant "cold"
  R1 = 2 kohm
end
variant "bare"
  C1 = absent
end
"""
TEXT = TEXT.replace("-- M1 : ammeter --", "-- M1 --").replace("title", "M1 : ammeter\ntitle", 1)


@pytest.fixture(scope="module")
def circuit():
    """A divider with a meter at its foot, and two variants."""
    return acsolve.parse(TEXT)


@pytest.fixture(scope="module")
def path(circuit):
    """From the amplifier to the output."""
    return circuit.path("amp", "out")


def values(circuit):
    """Every value of a circuit by its name."""
    return {name: value.expression for name, value in circuit.netlist.values()}


def refused(code, call):
    """The error that a call raises, with its code, a message and a hint."""
    with pytest.raises(AcsolveError) as caught:
        call()
    assert caught.value.code == code, caught.value.message
    assert caught.value.message
    assert caught.value.hint
    return caught.value


def test_variants_start_from_the_drawn_circuit(circuit):
    """A variant taken of a variant is the variant of the circuit as drawn, and None undoes it."""
    cold = circuit.with_variant("cold")
    assert circuit.with_variant("bare").with_variant("cold") == cold
    assert cold.with_variant(None) == circuit


def test_values_win_over_variants(circuit):
    """A caller's value stays through every variant, whichever was given first."""
    one = circuit.with_values(R1="3k").with_variant("cold")
    other = circuit.with_variant("cold").with_values(R1="3k")
    assert one == other
    assert one.variant == "cold"
    assert values(other.with_variant(None)) == values(circuit.with_values(R1=3000))


def test_without(circuit):
    """A part that is not fitted is in neither the drawn circuit nor a variant."""
    less = circuit.with_variant("cold").without("C1")
    assert "C1" not in less.parts
    assert "C1" not in less.with_variant(None).parts
    assert "R1" in refused("question.unknown-name", lambda: circuit.without("R11")).hint
    made = circuit.with_values(R2="2*R1")
    refused("name.absent", lambda: made.without("R1"))


@pytest.mark.parametrize("call", [
    lambda c: c.path("amp", "out", quantity="voltage"),
    lambda c: c.path("amp", "out", ammeter="M1"),
    lambda c: c.path("amp", ammeter="M1", quantity="voltage-ratio"),
    lambda c: c.with_values({1: "1 nF"}),
    lambda c: c.with_values([1]),
    lambda c: c.with_values(R1=None),
    lambda c: c.with_values(R1=float("nan")),
    lambda c: c.with_values(R1=np.inf),
    lambda c: c.with_values(R1=np.array([1.0])),
    lambda c: c.with_values(R1=1j),
    lambda c: c.with_values(R1=True),
    lambda c: c.path("amp", "out").assume(None),
    lambda c: c.path("amp", "out").simplify((1, 1000), within="much"),
    lambda c: c.path("amp", "out").simplify((1, 1000), within=None),
    lambda c: c.path("amp", "out").cutoffs(1e9),
    lambda c: c.path("amp", "out").cutoffs(float("nan")),
    lambda c: c.path("amp", "out").closed_form(keep=5),
    lambda c: c.path("amp", "out").closed_form(budget="x"),
    lambda c: c.asked("in"),
    lambda _: acsolve.parse(b"in -- R1 -- out"),
    lambda _: acsolve.parse(None),
    lambda _: acsolve.read(3.4),
    lambda _: acsolve.read(b"a.circuit"),
])  # fmt: skip
def test_what_is_no_value_is_refused(circuit, call):
    """What is no value of its place is refused as such, never by another exception."""
    refused("option.value", lambda: call(circuit))


@pytest.mark.parametrize("call", [
    lambda c: c.path(1, 2),
    lambda c: c.path(("amp", "out", "gnd"), "tail"),
    lambda c: c.path(("amp", 1), "tail"),
    lambda c: c.path("amp"),
    lambda c: c.looking_into(None),
])  # fmt: skip
def test_what_is_no_pair_is_refused(circuit, call):
    """What names no pair of nodes is refused when it is asked."""
    refused("question.no-pair", lambda: call(circuit))


def test_pairs(circuit):
    """A list of two names is a pair; unknown and equal nodes are refused alike in every form."""
    assert circuit.path(["amp", "gnd"], "out") == circuit.path(("amp", "gnd"), "out")
    for pair in ("aml", "aml,gnd", ("aml", "gnd")):
        refused("name.unknown-node", lambda pair=pair: circuit.path(pair, "out"))
    refused("question.same-node", lambda: circuit.path("amp", "amp"))
    refused("question.same-node", lambda: circuit.path("amp", "out,out"))
    refused("question.unknown-name", lambda: circuit.path("amp", ammeter="M9"))
    assert circuit.path("amp", ammeter="M1").ask.ammeter == "M1"


def test_quantities_are_listed(circuit):
    """A misspelt quantity is refused, and the four are named."""
    hint = refused("option.value", lambda: circuit.path("amp", "out", quantity="gain")).hint
    for name in ("voltage-ratio", "current-ratio", "transimpedance", "transadmittance"):
        assert name in hint


def test_keep(path):
    """Names to keep are one name, names between commas, or several; unknown ones are refused."""
    assert path.closed_form(keep="R1").symbols == path.closed_form(keep=["R1"]).symbols
    both = path.closed_form(keep="R1, C1")
    assert str(both) == str(path.closed_form(keep=("C1", "R1")))
    assert "R1" in refused("question.unknown-name", lambda: path.closed_form(keep="R11")).hint


@pytest.mark.parametrize("given", [
    None, True, 1j, "10 V .. 1 MHz", b"1", timedelta(1), {1.0: 2}, {1.0}, [True, 1.0], [1, [2, 3]],
    [None], ["10 Hz"], float("nan"), float("inf"), -1.0, 10**400, [10**400], object(),
    np.ma.masked_array([1.0, 2.0], mask=[True, False]), np.array([1], dtype="timedelta64[s]"),
])  # fmt: skip
def test_what_is_no_frequency(path, given):
    """What is no finite frequency from 0 Hz upwards is refused by every question over frequency."""
    for ask in (path.response, path.sweep, path.circuit.frequencies):
        with pytest.raises(AcsolveError) as caught:
            ask(given)
        assert caught.value.code == ("value.unit" if isinstance(given, str) else "sweep.band")


def test_frequencies(path):
    """Numbers of every kind and texts are the same frequencies, and shapes stay."""
    want = path.response([10.0, 20.0])
    for given in ("10 Hz, 20 Hz", (10, 20), range(10, 21, 10), iter([10.0, 20.0]),
                  [Fraction(10), 20], np.array([10, 20]), (hertz for hertz in (10, 20))):  # fmt: skip
        assert np.array_equal(path.response(given), want)
    assert path.response(10).shape == ()
    assert path.response([[10.0], [20.0]]).shape == (2, 1)
    assert np.array_equal(path.circuit.frequencies([1, 2]), [1.0, 2.0])
    assert len(path.sweep("10 Hz .. 1 kHz", points=5).hertz) == 5
    for given in ([1.0, 2.0], "10 Hz, 20 Hz"):
        refused("sweep.points", lambda given=given: path.sweep(given, points=5))
        refused("sweep.points", lambda given=given: path.sweep(given, linear=True))


@pytest.mark.parametrize("number", [
    np.float64(2200.0), np.float32(2200.0), np.int64(2200), np.array(2200.0), Fraction(2200),
])  # fmt: skip
def test_numbers_of_other_types(circuit, number):
    """A NumPy scalar or an array without axes is the number that it holds."""
    assert circuit.with_values(R1=number) == circuit.with_values(R1=2200)
    assert circuit.with_values(R1=np.float64(0.1)) == circuit.with_values(R1=Fraction(1, 10))


def test_levels_and_references(path):
    """NumPy scalars are levels and references; a reference that is not above zero is refused."""
    level, half = path.cutoffs(np.float64(-6.0)), path.cutoffs(reference=np.float32(0.5))
    assert level.cutoffs == path.cutoffs(-6).cutoffs
    assert half.cutoffs == path.cutoffs(reference=0.5).cutoffs
    for given in (0, -1, "-1", np.float64(-1)):
        refused("question.no-reference", lambda given=given: path.cutoffs(reference=given))


def test_bands_and_shares(path):
    """A band is a text or two numbers, a share a number or a text in percent."""
    one = path.simplify("1 Hz .. 1 kHz", within=0.01)
    other = path.simplify((1, 1000), within="1%")
    assert str(one.form) == str(other.form)
    for band in ((1000, 1), (1, 2, 3), None, 5, (1, float("nan")), (1, 10**400), (-1, 5)):
        refused("sweep.band", lambda band=band: path.simplify(band))


def test_short_forms(circuit, path):
    """Circuits and paths show themselves in one short line."""
    assert repr(circuit) == 'Circuit("Sluice filter": 4 parts, 4 nodes)'
    cold = circuit.with_variant("cold")
    assert repr(cold) == 'Circuit("Sluice filter", variant "cold": 4 parts, 4 nodes)'
    assert str(path) == "Path(voltage-ratio from (amp, gnd) to (out, gnd))"
    assert str(circuit.looking_into("amp")) == "Path(impedance into (amp, gnd))"


def test_hashes_and_pickles(circuit, path):
    """Equal circuits and paths hash alike, and both survive pickling."""
    again = acsolve.parse(TEXT)
    assert (again, hash(again)) == (circuit, hash(circuit))
    assert {again.path("amp", "out"): 1}[path] == 1
    assert pickle.loads(pickle.dumps(path)) == path  # noqa: S301 - our own bytes


def test_answer_types():
    """Every public name is there, the types of answers too, and no other."""
    for name in acsolve.__all__:
        assert getattr(acsolve, name) is not None
        assert name in dir(acsolve)
    with pytest.raises(AttributeError):
        _ = acsolve.Answer
