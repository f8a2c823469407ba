"""`acsolve draw`: SVG into a pipe, files as their ending says, geometry as JSON."""

from __future__ import annotations

import acsolve as library
from tests.cli.runner import acsolve, circuit


def test_a_pipe_gets_svg():
    """Without a terminal the drawing itself is written."""
    found = acsolve("draw", circuit("strain_bridge"))
    assert found.status == 0
    assert found.out == library.read(circuit("strain_bridge")).drawing().svg()


def test_a_variant_and_a_path():
    """The variant's parts are drawn, the signal from where the options say."""
    found = acsolve("draw", circuit("hum_notch"), "--variant", "low-cost build")
    assert "C₄" not in found.out
    assert found.out != acsolve("draw", circuit("hum_notch")).out
    turned = acsolve("draw", circuit("hum_notch"), "--from", "out", "--to", "line_in")
    assert turned.out == library.read(circuit("hum_notch")).drawing("out", "line_in").svg()


def test_saved(tmp_path):
    """Each ending gets its kind of file, and the summary tells what was drawn."""
    names = [tmp_path / f"bridge.{ending}" for ending in ("svg", "png", "pdf", "json")]
    saves = [item for name in names for item in ("--save", name)]
    found = acsolve("draw", circuit("seepage_tape"), *saves)
    assert found.status == 0
    assert all(name.stat().st_size > 1000 for name in names)
    assert "parts in boxes or between equal sections" in found.out
    assert acsolve("draw", circuit("level_float"), "--save", tmp_path / "a.csv").status == 2


def test_json():
    """The geometry: every part with its pins, wires with their node, dots and texts."""
    (answer,) = acsolve("draw", circuit("level_float"), "--json").answers
    assert answer["kind"] == "draw"
    parts = {item["part"] for item in answer["parts"]} - {None}
    assert parts == {"R1", "C1"}
    assert {wire["node"] for wire in answer["wires"]} == {"wiper", "out", "gnd"}
    assert not answer["condensed"]
    assert "4.7 µF" in {text["text"] for text in answer["texts"]}


def test_an_unknown_pair():
    """A pair that does not occur is refused as everywhere."""
    found = acsolve("draw", circuit("level_float"), "--from", "nowhere", "--to", "out")
    assert found.status != 0
    assert "nowhere" in found.err
