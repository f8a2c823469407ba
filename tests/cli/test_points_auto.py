"""`sweep --points auto` on the screen and in JSON."""

from __future__ import annotations

import json

from tests.cli.runner import acsolve, circuit


def test_json_tells_what_lines_are_worth():
    """The key `placed` holds the promise; it is null where the points were asked for."""
    call = ("sweep", circuit("strain_antialias"), "--from", "amp", "--to", "adc", "--json")
    run = acsolve(*call, "--band", "10Hz..1MHz", "--points", "auto")
    (answer,) = json.loads(run.out)["answers"]
    assert answer["placed"] == {
        "within_db": 0.01,
        "within_deg": 0.1,
        "axis": "logarithmic",
        "sure": True,
        "complete": True,
        "ends_hertz": [],
    }
    run = acsolve(*call, "--band", "10Hz..1MHz", "--points", "5")
    assert json.loads(run.out)["answers"][0]["placed"] is None


def test_text_tells_what_is_uncertain_and_where_lines_end():
    """A line has no list of poles; a complete notch ends the lines at its frequency."""
    call = ("--band", "20Hz..100kHz", "--points", "auto")
    run = acsolve("sweep", circuit("mast_cable"), *call)
    assert "this is uncertain" in run.out
    run = acsolve("sweep", circuit("hum_notch"), *call, "--linear")
    words = " ".join(run.out.split())
    assert "over linear frequency are right within 0.01 dB and 0.1 degrees" in words
    assert "too narrow for doubles, at 49.7982 Hz." in words
