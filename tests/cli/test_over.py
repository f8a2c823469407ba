"""`sweep --over`: families as text, JSON, tables, arrays and pictures."""

from __future__ import annotations

import csv

import numpy as np
import pytest

import acsolve as library
from tests.cli.runner import acsolve, circuit

FILE = circuit("strain_antialias")
ASK = ("--from", "amp", "--to", "adc")
AT = ("--at", "100Hz,1kHz")


def test_one_whole_answer_a_value():
    """Each member is a sweep of its own, with what makes it, and equals --let."""
    found = acsolve("sweep", FILE, *ASK, *AT, "--over", "R1=1k,3k3", "--json").answers
    assert [item["over"] for item in found] == [{"R1": 1000.0}, {"R1": 3300.0}]
    for item, value in zip(found, ("1k", "3k3"), strict=True):
        (alone,) = acsolve("sweep", FILE, *ASK, *AT, "--let", f"R1={value}", "--json").answers
        assert {key: item[key] for key in alone} == alone


def test_without_over_nothing_is_added():
    """A plain sweep has no key of a family."""
    (found,) = acsolve("sweep", FILE, *ASK, *AT, "--json").answers
    assert "over" not in found


def test_combinations():
    """Two --over give every pair, the first slowest."""
    found = acsolve("sweep", FILE, *ASK, *AT, "--over", "R1=1k,2k", "--over", "C2=1n,2n", "--json")
    assert [tuple(item["over"].values()) for item in found.answers] == [
        (1000, 1e-9), (1000, 2e-9), (2000, 1e-9), (2000, 2e-9),
    ]  # fmt: skip


def test_as_text():
    """A table of gains and one of phases, a column a value, within 80 columns."""
    shown = acsolve("sweep", FILE, *ASK, *AT, "--over", "R1=1k..10k:6")
    assert shown.status == 0
    lines = shown.out.splitlines()
    assert max(map(len, lines)) <= 80
    assert lines[3:7] == [
        "gain",
        "    R1     1 kohm  1.585 kohm  2.512 kohm  3.981 kohm   6.31 kohm",
        "100 Hz  -1.877 dB   -1.949 dB   -2.086 dB   -2.357 dB   -2.893 dB",
        " 1 kHz  -7.019 dB   -8.639 dB  -11.112 dB  -14.286 dB  -17.890 dB",
    ]
    assert lines[8] == "    R1     10 kohm"
    assert lines[12] == "phase"


def test_as_a_long_table(tmp_path):
    """CSV: the value in its own column, all frequencies of one after those of another."""
    name = tmp_path / "family.csv"
    assert acsolve("sweep", FILE, *ASK, *AT, "--over", "R1=1k,2k", "--save", name).status == 0
    with name.open(newline="") as stream:
        head, *rows = csv.reader(stream)
    assert head[:3] == ["R1 (ohm)", "frequency (Hz)", "real"]
    assert [(float(row[0]), float(row[1])) for row in rows] == [
        (1000, 100), (1000, 1000), (2000, 100), (2000, 1000),
    ]  # fmt: skip
    path = library.read(FILE).with_values(R1=2000).path("amp", "adc")
    assert [float(row[2]) for row in rows[2:]] == path.sweep("100Hz,1kHz").value.real.tolist()


def test_as_arrays(tmp_path):
    """NPZ: an axis of members before that of frequencies."""
    name = tmp_path / "family.npz"
    over = ("--over", "R1=1k..10k:4", "--over", "C2=1n,10n")
    assert acsolve("sweep", FILE, *ASK, *AT, *over, "--save", name).status == 0
    arrays = np.load(name)
    assert arrays["over_names"].tolist() == ["R1", "C2"]
    assert arrays["over_values"].shape == (8, 2)
    assert arrays["value"].shape == arrays["gain_db"].shape == (8, 2)
    values = dict(zip(("R1", "C2"), arrays["over_values"].T, strict=True))
    path = library.read(FILE).path("amp", "adc")
    np.testing.assert_allclose(
        arrays["value"], path.response(arrays["hertz"], values=values), rtol=1e-12
    )


@pytest.mark.parametrize("ending", ["svg", "png", "pdf"])
def test_as_a_picture(tmp_path, ending):
    """One curve a value; the same bytes on every run."""
    names = [tmp_path / f"{k}.{ending}" for k in (1, 2)]
    for name in names:
        done = acsolve("sweep", FILE, *ASK, "--over", "R1=1k..10k", "--save", name)
        assert done.status == 0, done.err
    assert names[0].read_bytes() == names[1].read_bytes()


def test_the_band_shows_every_member():
    """Without --band the poles of all members choose it."""
    found = acsolve("sweep", FILE, *ASK, "--over", "R1=1,1M", "--json").answers
    alone = [
        acsolve("sweep", FILE, *ASK, "--let", f"R1={value}", "--json").answers[0]
        for value in ("1", "1M")
    ]
    assert found[0]["hertz"] == found[1]["hertz"]
    assert found[0]["hertz"][0] == min(item["hertz"][0] for item in alone)
    assert found[0]["hertz"][-1] == max(item["hertz"][-1] for item in alone)


REFUSED = [
    (("--over", "R1=1k..10k:13", "--save", "a.svg"), "one picture cannot hold 13 curves that can be told apart"),
    (("--over", "R1=1 H"), "R1 is a resistor and needs ohms, got henries"),
    (("--over", "Rx=1"), "there is nothing named Rx in this circuit"),
    (("--over", "R1"), "R1 is not NAME = VALUES"),
]  # fmt: skip


@pytest.mark.parametrize(("options", "message"), REFUSED)
def test_what_is_refused(options, message, tmp_path, monkeypatch):
    """The call is wrong: status 2, one sentence, nothing saved."""
    monkeypatch.chdir(tmp_path)
    done = acsolve("sweep", FILE, *ASK, *options)
    assert done.status == 2
    assert message in done.err
    assert list(tmp_path.iterdir()) == []
