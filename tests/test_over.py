"""Families of circuits, as the door makes them from texts."""

from __future__ import annotations

import pytest

import acsolve
from acsolve.errors import AcsolveError

LOW_PASS = acsolve.parse("""
in -- R1 -- out
out -- C1 -- gnd
out -- R2 -- gnd
R1 = 1 kohm
R2 = 2*R1
C1 = 1 uF
""")


def settings(over) -> list[list[tuple[str, float, str]]]:
    """Name, value and unit of every member."""
    return [
        [(item.name, item.value, item.unit) for item in member.settings]
        for member in LOW_PASS.family(over)
    ]


def test_a_range_is_five_even_ratios():
    """1k .. 16k goes by factors of two."""
    found = [item[0][1] for item in settings("R1 = 1k .. 16k")]
    assert found == [1000, 2000, 4000, 8000, 16000]


def test_a_range_of_so_many():
    """The number after the colon counts the values, edges included."""
    assert settings("C1 = 1 nF .. 100 nF : 3") == [
        [("C1", 1e-9, "F")],
        [("C1", 1e-8, "F")],
        [("C1", 1e-7, "F")],
    ]


def test_a_list_is_read_as_the_format_reads_values():
    """Value codes, units and formulas of the circuit's names."""
    found = [item[0] for item in settings("R2 = 2k2, 470 ohm, 3*R1")]
    assert found == [("R2", 2200.0, "ohm"), ("R2", 470.0, "ohm"), ("R2", 3000.0, "ohm")]


def test_a_circle_of_values_is_told():
    """R2 is made of R1, so R1 cannot be made of R2."""
    with pytest.raises(AcsolveError) as caught:
        LOW_PASS.family("R1 = 3*R2")
    assert caught.value.code == "equations.evaluation"


def test_combinations_with_the_first_slowest():
    """Two families give every pair."""
    pairs = [tuple(value for _, value, _ in item) for item in settings(["R1=1,2", "C1=3,4,5"])]
    assert pairs == [(1, 3), (1, 4), (1, 5), (2, 3), (2, 4), (2, 5)]


def test_what_is_made_of_a_varied_value_follows():
    """R2 = 2*R1: the gain at 0 Hz stays two thirds."""
    for member in LOW_PASS.family("R1 = 1 .. 1M"):
        assert member.circuit.path("in", "out").response(0.0) == pytest.approx(2 / 3, rel=1e-12)


def test_a_member_is_the_circuit_with_that_value():
    """The same answer as `with_values` gives."""
    (member,) = LOW_PASS.family("R1 = 3k3")
    same = LOW_PASS.with_values(R1="3k3")
    assert member.circuit == same
    assert member.circuit.path("in", "out").response(100.0) == same.path("in", "out").response(
        100.0
    )


def test_the_frequency_of_a_quality_stays():
    """`quality = 50 at 10 kHz` keeps its frequency in every member."""
    circuit = acsolve.parse("""
        in -- L1 -- out
        out -- R1 -- gnd
        R1 = 1k
        L1 : inductor(value = 1 mH, quality = 50 at 10 kHz)
    """)
    first, second = (
        member.circuit.path("in", "out").response(1e4)
        for member in circuit.family("L1.quality = 20, 80")
    )
    assert abs(first) < abs(second)


REFUSED = [
    ("R1", "option.value", "R1 is not NAME = VALUES"),
    ("R1 =", "option.value", "R1 = is not NAME = VALUES"),
    ("R11 = 1", "question.unknown-name", "there is nothing named R11 in this circuit"),
    ("R1 = 1 H", "value.unit", "R1 is a resistor and needs ohms, got henries"),
    ("R1 = 1k .. 1k", "option.value", "R1 is varied from a value to itself"),
    ("R1 = 1k .. 2k : 1", "option.value", "1 is no number of values of R1"),
    ("R1 = 1k .. 2k :", "option.value", "nothing is no number of values of R1"),
    ("R1 = 1k .. 2k : 201", "option.value", "the family has 201 members, and at most 200 are taken"),
    (["R1 = 1", "R1 = 2"], "option.value", "R1 is varied twice"),
    ([], "option.value", "no value is varied"),
    (5, "option.value", "5 are no families of values"),
]  # fmt: skip


@pytest.mark.parametrize(("over", "code", "message"), REFUSED)
def test_what_is_refused(over, code, message):
    """Each is told in one sentence, with a remedy."""
    with pytest.raises(AcsolveError) as caught:
        LOW_PASS.family(over)
    assert (caught.value.code, caught.value.message) == (code, message)
    assert caught.value.hint
