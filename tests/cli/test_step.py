"""`acsolve step`: JSON, text, files, pictures and refusals."""

from __future__ import annotations

import csv
import io
import json
from math import log

import numpy as np
import pytest

from tests.cli.runner import acsolve, circuit

RC = "in -- R1 -- out -- C1 -- gnd\n"


@pytest.fixture
def single(tmp_path):
    """A single pole of 1 ms that asks its own step."""
    file = tmp_path / "single.circuit"
    file.write_text(RC + "R1 = 1 kohm\nC1 = 1 uF\nask step from in to out for 5 ms\n")
    return file


@pytest.fixture
def symbols(tmp_path):
    """The same without numbers."""
    file = tmp_path / "symbols.circuit"
    file.write_text(RC + "ask step from in to out\n")
    return file


def one(*arguments):
    """The only answer of a command line."""
    (found,) = acsolve(*arguments, "--json").answers
    return found


def spaced(text):
    """A text with one blank wherever it has several, or a new line."""
    return " ".join(text.split())


def test_json_keys(single):
    """The keys of the contract, from the file's own question."""
    found = one("step", single)
    assert found["kind"] == "step"
    assert (found["from"], found["to"]) == (["in", "gnd"], ["out", "gnd"])
    assert len(found["seconds"]) == len(found["value"]) == 501
    assert found["seconds"][-1] == 5e-3
    assert found["final_value"] == 1
    assert found["initial_value"] == 0
    assert found["rise_s"] == pytest.approx(1e-3 * log(9), rel=1e-15)
    assert found["delay_s"] == pytest.approx(1e-3 * log(2), rel=1e-15)
    assert found["settling_s"] == pytest.approx(1e-3 * log(50), rel=1e-15)
    assert found["settling_band"] == 0.02
    assert found["overshoot"] == 0
    assert found["moments"]["delay_exact"] == "R1*C1"
    assert found["closed_forms"]["parts"] == {"tau": "R1*C1", "k": "1"}
    assert found["reasons"] == {}
    assert found["modes"][1] == {"rate": [-1000.0, 0.0], "weights": [[-1.0, 0.0]]}


def test_options(single):
    """Length, points, band and drive are taken from the command line."""
    found = one("step", single, "--for", "8ms", "--points", "9", "--settle", "5%")
    assert found["seconds"] == pytest.approx(np.arange(9) * 1e-3)
    assert found["settling_s"] == pytest.approx(1e-3 * log(20), rel=1e-15)
    found = one("step", single, "--drive", "impulse", "--points", "2")
    assert found["value"][0] == 1000
    assert set(found["reasons"]) == {"rise_s", "delay_s", "settling_s", "overshoot"}
    found = one("step", single, "--drive", "1kHz", "--cycles", "2.5")
    assert (found["drive"], found["drive_hertz"], found["drive_cycles"]) == ("sine", 1000, 2.5)
    assert found["steady"]["delay_s"] == pytest.approx(np.arctan(2 * np.pi) / 2000 / np.pi)


def test_null_and_why(tmp_path):
    """No final value, no figures: null, and the reason in words."""
    file = tmp_path / "lossless.circuit"
    file.write_text("in -- L1 -- out -- C1 -- gnd\nL1 = 1 mH\nC1 = 1 nF\n")
    found = one("step", file, "--from", "in", "--to", "out")
    assert found["final_value"] is None
    assert found["rise_s"] is found["settling_s"] is found["overshoot"] is None
    assert "oscillating" in found["reasons"]["final_value"]
    text = spaced(acsolve("step", file, "--from", "in", "--to", "out").out)
    assert "final value none: the response goes on oscillating" in text
    assert "y(t), t > 0 k*(1 - cos(w0*t))" in text


def test_symbols(symbols):
    """With symbols: the closed form, both ends and the moments, no curve."""
    found = one("step", symbols)
    assert found["seconds"] is None
    assert found["final_exact"] == "1"
    assert found["closed_forms"]["cases"][0]["step"] == "k*(1 - exp(-t/tau))"
    text = spaced(acsolve("step", symbols).out)
    assert "y(t), t > 0 k*(1 - exp(-t/tau))" in text
    assert "rise, 10 to 90 % log(9)*tau" in text


def test_text_fits_the_screen():
    """Every line of a long answer is within 80 columns."""
    text = acsolve("step", circuit("hydrophone_lowpass")).out
    assert max(map(len, text.splitlines())) <= 80
    assert "settled within 2 %" in text


def test_saved_files(single, tmp_path):
    """CSV, NPZ and JSON hold the same curve in full precision."""
    names = [tmp_path / f"step.{ending}" for ending in ("csv", "npz", "json")]
    saved = [part for name in names for part in ("--save", name)]
    assert acsolve("step", single, *saved).status == 0
    rows = list(csv.reader(io.StringIO(names[0].read_text())))
    assert rows[0] == ["time (s)", "response"]
    table = np.array(rows[1:], dtype=float)
    with np.load(names[1]) as arrays:
        assert np.array_equal(arrays["seconds"], table[:, 0])
        assert np.array_equal(arrays["value"], table[:, 1])
    (answer,) = json.loads(names[2].read_text())["answers"]
    assert answer["value"] == table[:, 1].tolist()


@pytest.mark.parametrize("ending", ["svg", "png", "pdf"])
def test_pictures_are_the_same_each_time(single, tmp_path, ending):
    """A picture is drawn, and twice the same."""
    first, second = (tmp_path / f"{name}.{ending}" for name in "ab")
    for name in (first, second):
        assert acsolve("step", single, "--save", name).status == 0
    assert first.read_bytes() == second.read_bytes()
    assert len(first.read_bytes()) > 5_000


def test_several_curves_in_one_picture(tmp_path):
    """Two questions of one file are two curves; a CSV holds one."""
    file = tmp_path / "two.circuit"
    file.write_text(
        "in -- R1 -- a -- C1 -- gnd\na -- R2 -- out -- C2 -- gnd\nR1, R2 = 1 kohm\nC1, C2 = 1 uF\n"
        "ask step from in to a for 5 ms\nask step from in to out for 5 ms\n"
    )
    assert acsolve("step", file, "--save", tmp_path / "both.svg").status == 0
    refused = acsolve("step", file, "--save", tmp_path / "both.csv")
    assert refused.status == 2
    assert "a csv file holds one step" in refused.err


def test_no_picture_of_symbols(symbols, tmp_path):
    """Symbols have no curve: refused, and nothing is written."""
    for ending in ("svg", "csv", "npz"):
        outcome = acsolve("step", symbols, "--save", tmp_path / f"x.{ending}")
        assert outcome.status == 1
        assert "question.no-value" in outcome.err
    assert not list(tmp_path.glob("x.*"))


@pytest.mark.parametrize(
    ("options", "code"),
    [
        (("--cycles", "5"), "option.value"),
        (("--drive", "1kHz", "--cycles", "1.3"), "option.value"),
        (("--drive", "5mV"), "value.unit"),
        (("--for", "5mH"), "value.unit"),
        (("--for", "0s"), "value.positive"),
        (("--points", "50/decade"), "sweep.points"),
        (("--settle", "wide"), "option.value"),
    ],
)
def test_wrong_calls(single, options, code):
    """What does not fit is refused with status 2 and its code."""
    outcome = acsolve("step", single, *options)
    assert outcome.status == 2
    assert outcome.err.startswith(code)


def test_a_line_is_refused():
    """No residues, no answer: status 1."""
    outcome = acsolve("step", circuit("mast_cable"), "--from", "send", "--to", "far_end")
    assert outcome.status == 1
    assert "equations.not-rational" in outcome.err


def test_check_says_nothing_of_a_step(single):
    """An `ask step` line is answered now, so a check has nothing to remark."""
    assert one("check", single)["problems"] == []
