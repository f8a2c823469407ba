"""Corners, slopes and bands in closed form at the command line; values with a peak."""

from __future__ import annotations

import pytest

from .runner import acsolve

PAIR = ("--from", "in", "--to", "out")
BAND = "in -- L1 = 1 mH -- a -- C1 = 1 nF -- out\nout -- R1 = 50 -- gnd\n"
LAG = "in -- R1 = 9 kohm -- out\nout -- R2 = 1 kohm -- b -- C1 = 1 uF -- gnd\n"


@pytest.fixture
def file(tmp_path):
    """A circuit as a file."""

    def write(text: str):
        path = tmp_path / "edge.circuit"
        path.write_text(text, encoding="utf-8")
        return path

    return write


def test_a_band_with_its_corner(file):
    """Width, centre, Q and the corner, in numbers and in closed form."""
    path = file(BAND)
    (entry,) = acsolve("cutoff", path, *PAIR, "--json").answers
    assert entry["band_forms"]["width_rad_per_s"] == "R1/L1"
    assert entry["slopes_db_per_decade"] == [20, -20]
    assert entry["end_slopes_db_per_decade"] == [20, -20]
    (corner,) = entry["corners"]
    assert corner["closed_form"] == "1/sqrt(L1*C1)"
    assert corner["rad_per_s"] == pytest.approx(1e6, rel=1e-14)
    assert corner["change_db_per_decade"] == -40
    told = acsolve("cutoff", path, *PAIR).out
    assert "159.155 kHz, slope 20 to -20 dB/decade" in told
    assert "width w = R1/L1, centre w = 1/sqrt(L1*C1), in rad/s" in told
    assert max(map(len, told.splitlines())) <= 80


def test_corners_over_symbols(file):
    """Without an order, since values decide on it."""
    path = file(LAG)
    (entry,) = acsolve("cutoff", path, *PAIR, "--symbolic", "--reference", "dc", "--json").answers
    assert entry["slopes_db_per_decade"] is None
    assert [item["change_db_per_decade"] for item in entry["corners"]] == [-20, 20]
    assert all(item["hertz"] is None for item in entry["corners"])
    told = acsolve("cutoff", path, *PAIR, "--symbolic", "--reference", "dc").out
    assert "slope -20 dB/decade above" in told
    assert "0 dB/decade towards 0 Hz" in told


def test_many_corners_are_told_in_one_row(file):
    """More than six: from where to where, and the slopes at the ends."""
    lines, node = ["in -- R0 = 1 kohm -- n0"], "n0"
    for k in range(8):
        lines.append(f"n{k} -- C{k} = {k + 1} nF -- gnd")
        lines.append(f"n{k} -- R{k + 1} = {k + 2} kohm -- n{k + 1}")
        node = f"n{k + 1}"
    lines.append(f"{node} -- C9 = 1 nF -- gnd")
    path = file("\n".join(lines))
    told = acsolve("cutoff", path, "--from", "in", "--to", node).out
    assert "9 from " in told
    assert "slope 0 to -180 dB/decade" in told
    (entry,) = acsolve("cutoff", path, "--from", "in", "--to", node, "--json").answers
    assert len(entry["corners"]) == 9


def test_a_value_with_the_peak_as_reference(file):
    """The value that is told, put into the file, has its cutoff there."""
    path = file("in -- R1 = 100 ohm -- a -- L1 = 1 mH -- out\nout -- C1 = 1 uF -- gnd\n")
    asked = ("--value-for", "C1", "--at", "8kHz", "--reference", "peak")
    (entry,) = acsolve("cutoff", path, *PAIR, *asked, "--json").answers
    assert entry["complete"]
    assert entry["values"]
    for item in entry["values"]:
        let = ("--let", f"C1={item['value']!r}", "--reference", "peak")
        (again,) = acsolve("cutoff", path, *PAIR, *let, "--json").answers
        places = [each["hertz"] for each in again["cutoffs"]]
        assert any(place == pytest.approx(8000, rel=1e-9) for place in places)
