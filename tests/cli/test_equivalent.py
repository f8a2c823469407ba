"""Thévenin and Norton equivalents at the command line."""

from __future__ import annotations

import pytest

import acsolve as library

from .runner import acsolve

CIRCUIT = """
gnd -- Vs : voltage_source(amplitude = 12 V) -- feed
feed -- R1 -- out -- C1 -- gnd
gnd -- Is : current_source(amplitude = 3 mA) -- out
out -- L1 -- m -- R2 -- gnd
R1 = 1 kohm
C1 = 1 uF
L1 = 20 mH
R2 = 470 ohm
"""
AT = [50.0, 1000.0, 20e3]


@pytest.fixture
def file(tmp_path):
    """The circuit as a file."""
    path = tmp_path / "feed.circuit"
    path.write_text(CIRCUIT, encoding="utf-8")
    return path


def pairs(numbers) -> list[complex]:
    """Complex numbers of JSON."""
    return [complex(*item) for item in numbers]


def test_the_equivalent_stands_for_the_circuit(file):
    """V = Z·I and Y·Z = 1; with any load the voltage is what the whole circuit gives."""
    (entry,) = acsolve(
        "impedance", file, "--into", "out", "--equivalent", "--at", "50Hz,1kHz,20kHz", "--json"
    ).answers
    found = entry["equivalent"]
    assert found["hertz"] == AT
    assert found["impedance"] == entry["expression"]
    rows = [
        pairs(found[f"{name}_at"]) for name in ("voltage", "current", "impedance", "admittance")
    ]
    for volts, amperes, ohms, siemens in zip(*rows, strict=True):
        assert volts == pytest.approx(ohms * amperes, rel=1e-12)
        assert ohms * siemens == pytest.approx(1, rel=1e-12)
    loaded = library.parse(CIRCUIT + "\nout -- R9 = 330 ohm -- gnd")
    whole = loaded.path(None, "out").response(AT)
    expected = [volts * 330 / (ohms + 330) for volts, ohms in zip(rows[0], rows[2], strict=True)]
    assert list(whole) == pytest.approx(expected, rel=1e-12)


def test_symbols_of_the_sources_stay(file):
    """Over symbols both sources stand in the current, each by itself."""
    (entry,) = acsolve(
        "impedance", file, "--into", "out", "--equivalent", "--symbolic", "--json"
    ).answers
    found = entry["equivalent"]
    names = {"Vs", "Is", "R1"}
    back = {plain: safe for safe, plain in found["symbols"].items()}
    assert all(back.get(name, name) in found["current"] for name in names)
    assert "hertz" not in found


def test_text_says_what_acts(file, tmp_path):
    """Both halves in words; a pair that no source reaches has zero voltage."""
    told = acsolve("impedance", file, "--into", "out", "--equivalent").out
    assert "open-circuit voltage" in told
    assert "short-circuit current" in told
    quiet = tmp_path / "quiet.circuit"
    quiet.write_text("in -- R1 = 1 kohm -- gnd\n", encoding="utf-8")
    told = acsolve("impedance", quiet, "--into", "in", "--equivalent").out
    assert "open-circuit voltage: 0, no source of the file acts" in told


def test_a_pair_without_a_finite_current(tmp_path):
    """Across an ideal source no short-circuit current exists."""
    path = tmp_path / "stiff.circuit"
    path.write_text(
        "gnd -- Vs : voltage_source(amplitude = 2 V) -- out\nout -- R1 = 1 kohm -- gnd\n"
    )
    (entry,) = acsolve("impedance", path, "--into", "out", "--equivalent", "--json").answers
    assert entry["equivalent"]["voltage"] == "2"
    assert entry["equivalent"]["current"] is None
    assert entry["equivalent"]["impedance"] == "0"
    told = acsolve("impedance", path, "--into", "out", "--equivalent", "--at", "1kHz").out
    assert "short-circuit current: none" in told


def test_frequencies_alone_are_refused(file):
    """--at without --equivalent has nothing to say."""
    found = acsolve("impedance", file, "--into", "out", "--at", "50Hz")
    assert found.status == 2
    assert "--equivalent" in found.err
