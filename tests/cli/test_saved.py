"""Saved files: whole or not there, and each ending its own form."""

from __future__ import annotations

import csv
import json

import numpy as np
import pytest

from acsolve.report import save
from tests.cli.runner import acsolve, circuit

LEVEL = circuit("level_float")


def test_every_ending_of_a_sweep(tmp_path):
    """One run saves a sweep in every form, and says so in one line."""
    names = [tmp_path / f"sweep.{ending}" for ending in save.ENDINGS["sweep"]]
    found = acsolve("sweep", LEVEL, *(item for name in names for item in ("--save", name)))
    assert found.status == 0
    assert found.out == f"saved {', '.join(map(str, names))}\n"
    assert all(name.stat().st_size > 0 for name in names)
    assert sorted(item.name for item in tmp_path.iterdir()) == sorted(n.name for n in names)


def test_csv_npz_and_json_hold_the_same_doubles(tmp_path):
    """No form of a sweep loses a digit."""
    paths = {ending: tmp_path / f"sweep.{ending}" for ending in ("csv", "npz", "json")}
    assert acsolve("sweep", LEVEL, *(x for p in paths.values() for x in ("--save", p))).status == 0
    with paths["csv"].open(newline="") as stream:
        head, *rows = csv.reader(stream)
    (answer,) = json.loads(paths["json"].read_text())["answers"]
    arrays = np.load(paths["npz"])
    assert head[:4] == ["frequency (Hz)", "real", "imag", "gain (dB)"]
    keys = ["hertz", "real", "imag", "gain_db", "phase_deg", "phase_delay_s", "group_delay_s"]
    for place, key in enumerate(keys):
        assert [float(row[place]) for row in rows] == answer[key]
        if key in arrays:
            assert arrays[key].tolist() == answer[key]
    assert arrays["value"].real.tolist() == answer["real"]


def test_csv_has_rfc_4180_line_ends_and_no_comment(tmp_path):
    """The table is one head and one row each, ended by CR LF."""
    name = tmp_path / "sweep.csv"
    acsolve("sweep", LEVEL, "--at", "1Hz,2Hz", "--save", name)
    assert name.read_bytes().count(b"\r\n") == 3
    assert b"#" not in name.read_bytes()


def test_saved_json_is_what_json_prints(tmp_path):
    """--save x.json and --json give the same document."""
    name = tmp_path / "answer.json"
    acsolve("transfer", LEVEL, "--save", name)
    assert name.read_text() == acsolve("transfer", LEVEL, "--json").out


def test_cutoffs_as_a_table(tmp_path):
    """Every crossing is one row, with its closed form."""
    name = tmp_path / "cutoffs.csv"
    assert acsolve("cutoff", LEVEL, "--save", name).status == 0
    with name.open(newline="") as stream:
        (row,) = csv.DictReader(stream)
    assert row["closed form (rad/s)"] == "1/(R1*C1)"
    assert float(row["frequency (Hz)"]) == pytest.approx(1.02614, rel=1e-5)


@pytest.mark.parametrize("ending", save.PICTURES)
@pytest.mark.parametrize(
    ("command", "name"),
    [
        ("transfer", "swell_filter"),
        ("cutoff", "strain_antialias"),
        ("impedance", "clock_crystal"),
        ("sweep", "hum_notch"),
    ],
)
def test_pictures(tmp_path, command, name, ending):
    """Every kind of answer that has a curve is drawn, in each form of picture."""
    file = tmp_path / f"picture.{ending}"
    found = acsolve(command, circuit(name), "--save", file)
    assert found.status == 0, found.err
    assert file.read_bytes()[:5] in (b"<?xml", b"\x89PNG\r", b"%PDF-")


def test_nothing_is_saved_where_a_question_fails(tmp_path):
    """A failed command leaves the old file as it was, and none beside it."""
    file = tmp_path / "cutoff.json"
    file.write_text("old")
    found = acsolve("cutoff", LEVEL, "--reference", "infinity", "--save", file)
    assert found.status == 1
    assert [(item.name, item.read_text()) for item in tmp_path.iterdir()] == [
        ("cutoff.json", "old")
    ]


def test_two_sweeps_do_not_fit_one_table(tmp_path):
    """A table holds one sweep; more are refused before anything is written."""
    file = tmp_path / "two.circuit"
    file.write_text(
        "in -- R1 = 1k -- out -- C1 = 1n -- gnd\n"
        "ask sweep from in to out over 1 Hz .. 1 kHz\nask sweep from out to in over 1 Hz .. 1 kHz\n"
    )
    found = acsolve("sweep", file, "--save", tmp_path / "two.csv")
    assert found.status == 2
    assert not (tmp_path / "two.csv").exists()
    assert acsolve("sweep", file, "--save", tmp_path / "two.json").status == 0


def test_help_lists_what_can_be_saved():
    """The error for an unknown ending lists the right ones."""
    assert "csv, npz, json, svg, png or pdf" in acsolve("sweep", LEVEL, "--save", "x").err
