"""Poles, stability and wanted cutoffs at the command line: text, JSON, refusals."""

from __future__ import annotations

import json

import pytest

from .runner import acsolve

CIRCUIT = """
in -- C1 -- a -- L1 -- out -- R1 -- gnd
in -- R2 -- x -- C2 -- gnd
R1 = 1 kohm
C1 = 1 uF
L1 = 2 mH
R2 = 1 kohm
C2 = 3 uF
"""
PAIR = ("--from", "in", "--to", "out")


@pytest.fixture
def file(tmp_path):
    """The circuit as a file."""
    path = tmp_path / "edge.circuit"
    path.write_text(CIRCUIT, encoding="utf-8")
    return str(path)


def answer(*arguments: str) -> dict:
    """The one JSON answer."""
    found = acsolve(*arguments, "--json")
    assert found.status == 0, found.err
    (entry,) = json.loads(found.out)["answers"]
    return entry


def test_poles_come_with_what_they_mean(file):
    """Records agree with the plain list; hidden modes and stability stand beside them."""
    entry = answer("transfer", file, *PAIR, "--digits", "25")
    assert [item["value"] for item in entry["pole_records"]] == entry["poles"]
    assert all(len(item["digits"]) == 2 for item in entry["pole_records"])
    assert entry["roots_certified"] is True
    (mode,) = entry["hidden_modes"]
    assert mode["closed_form"] == "-1000/3"
    assert entry["stability"]["verdict"] == "stable"
    assert (entry["stability"]["left"], entry["stability"]["right"]) == (3, 0)
    assert entry["denominator_factors"][-1][1] == 1


def test_the_text_names_hidden_modes_and_stability(file):
    """Both stand in the text, within 80 columns."""
    found = acsolve("transfer", file, *PAIR)
    assert "hidden modes" in found.out
    assert "stable: every mode of the network decays" in found.out
    assert all(len(line) <= 80 for line in found.out.splitlines())


def test_bands_of_a_cutoff(file):
    """Bandwidth, geometric centre, peak and Q of the pass band."""
    entry = answer("cutoff", file, *PAIR)
    (band,) = entry["bands"]
    assert band["kind"] == "pass"
    assert band["centre_hertz"] == pytest.approx(band["extremum_hertz"], rel=1e-12)
    assert band["q"] * band["bandwidth_hertz"] == pytest.approx(band["centre_hertz"], rel=1e-15)
    assert "geometric mean" in acsolve("cutoff", file, *PAIR).out


def test_values_for_a_cutoff(file):
    """Both coils, in text and JSON, with their closed forms."""
    entry = answer("cutoff", file, *PAIR, "--value-for", "L1", "--at", "100Hz")
    assert entry["kind"] == "part-value"
    assert [item["closed_form"] for item in entry["values"]] == [
        "1/(w**2*C1) - R1/w",
        "1/(w**2*C1) + R1/w",
    ]
    assert entry["complete"] is True
    text = acsolve("cutoff", file, *PAIR, "--value-for", "L1", "--at", "100Hz").out
    assert "941.48 mH" in text
    assert "put back and solved again" in text


@pytest.mark.parametrize(
    "arguments",
    [
        ("cutoff", "--value-for", "L1"),
        ("cutoff", "--at", "1kHz"),
        ("cutoff", "--value-for", "L1", "--at", "1kHz", "--symbolic"),
        ("cutoff", "--degree", "7"),
        ("transfer", "--digits", "many"),
        ("transfer", "--digits", "5000"),
    ],
)
def test_options_that_do_not_fit(file, arguments):
    """Refused with a message and status 2."""
    command, *rest = arguments
    found = acsolve(command, file, *PAIR, *rest)
    assert found.status == 2
    assert "option.value" in found.err
