"""Phase over rows of equal copies: as if each copy were gone through, and as the formula says."""

from __future__ import annotations

from dataclasses import replace
from math import pi

import mpmath
import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.analyses.ladder_phase import Ladder, ladder_of
from tests.analyses.test_long_phase import exact

HERTZ = np.geomspace(1e-3, 1e9, 61)

RC = "a -- R = 1 kohm -- b\nb -- C = 1 nF -- gnd"
LOSSY = "a -- R = 1 ohm -- m -- L = 1 uH -- b\nb -- C = 1 nF || Rp = 1 Mohm -- gnd"
LC = "a -- L = 1 uH -- b\nb -- C = 1 nF -- gnd"
TEE = """a -- R1 = 1 kohm -- m -- R2 = 3 kohm -- b
    m -- C1 = 1 nF -- gnd
    m -- R3 = 2 kohm -- q
    q -- C3 = 4 nF -- gnd"""


def row(body: str, count: int, rest: str, source: str = "in", target: str = "far") -> Ladder:
    """The ladder of a row with something beside it, which must have kept the row."""
    circuit = acsolve.parse(f"block s(a, b)\n{body}\nend\nin -- N1 : {count} * s -- far\n{rest}")
    found = ladder_of(circuit.netlist, circuit.path(source, target).ask)
    assert found is not None
    assert found.rows
    return found


def copies_apart(ladder: Ladder) -> np.ndarray:
    """The phase with every copy gone through."""
    assert ladder.written_out is not None
    other = ladder.written_out()
    assert other is not None
    assert not other.rows
    return other.phase(HERTZ)


@pytest.mark.parametrize("body", [RC, LOSSY, LC, TEE])
@pytest.mark.parametrize("count", [32, 200])
@pytest.mark.parametrize(
    "rest",
    [
        "",
        "far -- RL = 30 ohm -- gnd",
        "far -- RL = 1 mohm -- gnd",
        "far -- CL = 10 uF -- gnd",
        "far -- LL = 1 mH || RL = 9 ohm -- gnd",
        "in -- Rg = 5 ohm -- gnd",
    ],
)
def test_a_row_turns_the_phase_as_its_copies_do(body, count, rest):
    """Nothing is asked of the written-out ladder, and both agree, over 12 decades."""
    found = row(body, count, rest)
    alone = replace(found, written_out=None)
    assert alone.phase(HERTZ) == pytest.approx(copies_apart(found), rel=1e-11, abs=1e-8)


def test_what_the_formula_cannot_tell_is_gone_through():
    """A load that reflects more than it gets (no law forbids that in lossy lines) is summed up."""
    found = row(LOSSY, 100, "far -- LL = 1 mH -- gnd")
    assert not np.isfinite(replace(found, written_out=None).phase(HERTZ)).all()
    assert found.phase(HERTZ) == pytest.approx(copies_apart(found), rel=1e-11, abs=1e-8)


def test_rows_seen_from_the_far_end_and_between_other_parts():
    """The drive may stand at either end, with parts before and behind."""
    rest = "far -- R9 = 1 kohm -- x\nx -- C9 = 1 nF -- gnd\nin -- Rg = 5 ohm -- src"
    for source, target in (("src", "x"), ("x", "src"), ("in", "x"), ("far", "in")):
        found = row(TEE, 50, rest, source, target)
        assert found.phase(HERTZ) == pytest.approx(copies_apart(found), rel=1e-11, abs=1e-8)


@settings(max_examples=40, deadline=None)
@given(
    st.lists(st.integers(1, 10**6), min_size=4, max_size=4),
    st.integers(32, 90),
    st.sampled_from("RLC"),
)
def test_random_copies_and_loads(values, count, load):
    """Any values: the row is the sum over its copies."""
    r, c, p, z = values
    body = f"a -- R = {r} mohm -- m -- L = {p} nH -- b\nb -- C = {c} pF -- gnd"
    unit = {"R": "mohm", "L": "nH", "C": "pF"}[load]
    found = row(body, count, f"far -- {load}9 = {z} {unit} -- gnd")
    assert found.phase(HERTZ) == pytest.approx(copies_apart(found), rel=1e-9, abs=1e-4)


def test_a_hundred_thousand_copies_against_the_two_port_formula():
    """Thousands of turns at a gain far below a double's range, at 50 digits."""
    circuit = acsolve.parse(f"block s(a, b)\n{RC}\nend\nin -- N1 : 100000 * s -- far")
    hertz = np.geomspace(1e-5, 1e9, 9) / (2 * pi)
    found = circuit.path("in", "far").sweep(hertz)
    for at, item in enumerate(hertz):
        expected = exact(100_000, float(item), rc=True)
        degrees = float(mpmath.degrees(expected.imag))
        assert found.phase_deg[at] == pytest.approx(degrees, rel=1e-11, abs=1e-6)
    assert found.settled


def test_two_rows_side_by_side_are_no_ladder():
    """A loop of rows is left to tracking."""
    circuit = acsolve.parse(
        f"block s(a, b)\n{RC}\nend\nin -- N1 : 40 * s -- far\nin -- N2 : 40 * s -- far"
    )
    assert ladder_of(circuit.netlist, circuit.path("in", "far").ask) is None
