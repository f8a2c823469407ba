"""`acsolve cutoff` over a band: lines, constant-phase parts, and rational networks."""

from __future__ import annotations

import pytest

from .runner import CIRCUITS, acsolve

MAST = str(CIRCUITS / "mast_cable.circuit")
ENDS = ("--from", "send", "--to", "far_end")


def test_a_line_is_answered():
    """The text says that the answer is numeric, proven, and where."""
    found = acsolve("cutoff", MAST, *ENDS)
    assert found.status == 0
    assert "447.502 kHz, falling" in found.out
    assert "proven: none is missing from 64 Hz to 2.3 MHz (numeric, in ball" in found.out


def test_the_band_in_json():
    """`searched_hertz` and the method, here with and without a crossing in the band."""
    (found,) = acsolve("cutoff", MAST, *ENDS, "--band", "1kHz..1MHz", "--json").answers
    assert found["searched_hertz"] == [1000.0, 1e6]
    assert found["method"].startswith("numeric")
    assert found["complete"] is True
    assert [item["hertz"] for item in found["cutoffs"]] == [pytest.approx(447501.5224170693)]
    (none,) = acsolve("cutoff", MAST, *ENDS, "--band", "1kHz..100kHz", "--json").answers
    assert none["cutoffs"] == []
    assert none["complete"] is True


def test_a_rational_network_has_no_band_of_its_own():
    """Every frequency is meant, or the band that is named."""
    level = str(CIRCUITS / "level_lowpass.circuit")
    (every,) = acsolve("cutoff", level, "--json").answers[:1]
    assert every["searched_hertz"] is None
    hertz = every["cutoffs"][0]["hertz"]
    band = f"{hertz * 2}Hz..{hertz * 3}Hz"
    (part,) = acsolve("cutoff", level, "--band", band, "--json").answers[:1]
    assert part["cutoffs"] == []
    assert part["searched_hertz"] == pytest.approx([hertz * 2, hertz * 3])


def test_a_matched_line_looked_into():
    """A resistance: nothing to cross, although the formula over symbols is no polynomial."""
    found = acsolve("cutoff", MAST, "--into", "near_end")
    assert found.status == 0
    assert "75 ohm at 0 Hz" in found.out


def test_bands_that_are_none():
    """A search in equal ratios cannot start at 0 Hz."""
    found = acsolve("cutoff", MAST, *ENDS, "--band", "0Hz..1MHz")
    assert found.status == 2
    assert "sweep.band" in found.err


def test_the_answer_saved_as_a_table(tmp_path):
    """As any other cutoff."""
    table = tmp_path / "cutoffs.csv"
    assert acsolve("cutoff", MAST, *ENDS, "--save", str(table)).status == 0
    assert "447501.52241706" in table.read_text(encoding="utf-8")
