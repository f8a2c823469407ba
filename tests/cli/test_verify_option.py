"""`sweep --verify`: what is proven, how it is told, and what a wrong number looks like."""

from __future__ import annotations

import importlib
from dataclasses import replace

import pytest

import acsolve as door
from tests.cli.runner import CIRCUITS, acsolve, circuit, process

NOTCH = circuit("hum_notch")
BAND = ("--band", "10Hz..1kHz", "--points", "30")


def proven(*arguments: object) -> dict:
    """What the one sweep says under `verified`."""
    (found,) = acsolve("sweep", *arguments, "--json").answers
    return found["verified"]


def test_nothing_is_proven_unasked():
    """Without the option the key is null."""
    assert proven(NOTCH, *BAND) is None


@pytest.mark.parametrize(("value", "points"), [((), 7), (("3",), 3), (("20",), 20), (("all",), 30)])
def test_as_many_points_as_asked(value, points):
    """A handful, so many, or all; each list has as many entries."""
    found = proven(NOTCH, *BAND, "--verify", *value)
    assert found["points"] == points
    assert len(found["hertz"]) == len(found["relative_error"]) == points
    assert found["max_relative_error"] == max(found["relative_error"]) < 1e-12
    assert found["hertz"][0] == pytest.approx(10)
    assert found["bits"] >= 128
    assert found["unproven"] == []


def test_the_file_may_follow_the_bare_option():
    """`--verify FILE` takes the file for the file."""
    assert proven("--verify", NOTCH, *BAND)["points"] == 7
    assert process("sweep", "--verify", "-", *BAND, stdin=NOTCH.read_bytes()).status == 0


@pytest.mark.parametrize("value", ["lots", "0", "-3", "2.5"])
def test_no_number_of_points_is_refused(value):
    """What is neither a number nor all is refused as such, or as an unknown option."""
    found = acsolve("sweep", NOTCH, *BAND, "--verify", value)
    assert found.status == 2
    assert value in found.err


def test_text_tells_the_worst_point():
    """Below the table stands how many points, the largest error, where, and the bits."""
    text = acsolve("sweep", NOTCH, *BAND, "--verify").out
    told = " ".join(text.split("\n\n")[-1].split())
    assert told.startswith("Proven in ball arithmetic of 128 bits at 7 points: the response is")
    assert all(word in told for word in ("relative (worst at", "gain", "phase", "group delay"))
    assert max(map(len, text.splitlines())) <= 80


def test_text_tells_what_is_not_proven():
    """A point whose proof fails is named with the reason."""
    found = acsolve("sweep", circuit("level_float"), "--into", "out", "--at", "0Hz", "--verify")
    assert found.status == 0
    assert "No point is proven.\nNot proven at 0 Hz: " in found.out


def test_saved_sweeps_are_proven_on_the_screen(tmp_path):
    """With --save the proof is still told."""
    found = acsolve("sweep", NOTCH, *BAND, "--verify", "--save", tmp_path / "notch.csv")
    assert "Proven in ball arithmetic" in found.out
    assert (tmp_path / "notch.csv").exists()


@pytest.fixture
def _slipping(monkeypatch):
    """A sweep whose fourth value is off by 1e-8."""
    module = importlib.import_module("acsolve.analyses.sweep")
    right = module.sweep

    def slipping(*arguments: object, **named: object):
        found = right(*arguments, **named)
        value = found.value.copy()
        value[3] *= 1 + 1e-8
        return replace(found, value=value)

    monkeypatch.setattr(module, "sweep", slipping)


@pytest.mark.usefixtures("_slipping")
def test_a_wrong_number_is_an_error_and_saves_nothing(tmp_path):
    """A proven error above the estimate is this program's defect: status 1, no answer, no file."""
    name = tmp_path / "notch.csv"
    found = acsolve("sweep", NOTCH, *BAND, "--verify", "all", "--save", name)
    assert found.status == 1
    assert "proven wrong at " in found.err
    assert "defect of acsolve" in found.err
    assert "1e-08" in found.err
    assert not name.exists()
    errors = acsolve("sweep", NOTCH, *BAND, "--verify", "all", "--json").document["errors"]
    assert [item["code"] for item in errors] == ["equations.check-failed"]


@pytest.mark.usefixtures("_slipping")
def test_the_door_raises_for_a_wrong_number():
    """In Python a wrong sweep is an `EquationError`, as a wrong closed form is."""
    path = door.read(CIRCUITS / "hum_notch.circuit").path("line_in", "out")
    found = path.sweep("10 Hz .. 1 kHz", points=30)
    with pytest.raises(door.EquationError, match="proven wrong"):
        path.verify(found, points="all")


@pytest.mark.parametrize("points", [0, -1, True, 2.5, "some"])
def test_the_door_refuses_what_is_no_number(points):
    """The door checks its arguments."""
    path = door.read(CIRCUITS / "hum_notch.circuit").path("line_in", "out")
    with pytest.raises(door.AnalysisError, match="no number of points"):
        path.verify(path.sweep([50.0]), points=points)
    with pytest.raises(door.AnalysisError, match="no sweep"):
        path.verify([50.0])
