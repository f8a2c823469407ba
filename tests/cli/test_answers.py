"""The JSON of every command: its keys, and values that agree with each other."""

from __future__ import annotations

from itertools import pairwise
from math import isclose, log10, pi

import pytest

from tests.cli.runner import acsolve, circuit

SHARED = {"kind", "title", "quantity", "variant", "cautions", "warnings"}
FORM = {
    "expression",
    "numerator",
    "denominator",
    "order",
    "form",
    "at_zero",
    "at_infinity",
    "standard_form",
    "poles",
    "zeros",
    "checked",
    "symbols",
}


def one(*arguments: object) -> dict:
    """The one answer of a command."""
    (found,) = acsolve(*arguments, "--json").answers
    return found


def test_document_names_its_format():
    """Every answer stands in a document of format 1."""
    document = acsolve("transfer", circuit("level_float"), "--json").document
    assert document["format"] == 1
    assert set(document) == {"format", "answers"}


def test_transfer_has_every_key():
    """A transfer carries its pairs, its form, its limits, its roots and its check."""
    found = one("transfer", circuit("level_float"))
    assert set(found) >= SHARED | FORM | {"from", "to"}
    assert found["from"] == ["wiper", "gnd"]
    assert found["to"] == ["out", "gnd"]
    assert found["quantity"] == "voltage-ratio"
    assert found["form"] == "expanded"
    assert found["numerator"] == ["10000"]
    assert found["denominator"] == ["1551", "10000"]
    assert found["order"] == 1
    assert (found["at_zero"], found["at_infinity"]) == ("1", "0")
    assert found["standard_form"]["tau"] == "1551/10000"
    assert found["checked"]["points"] >= 2
    assert found["checked"]["max_relative_error"] < 1e-12


def test_impedance_names_the_pair_it_looks_into():
    """An impedance has `into` instead of `from` and `to`."""
    found = one("impedance", circuit("level_float"), "--into", "out")
    assert set(found) >= SHARED | FORM | {"into"}
    assert found["into"] == ["out", "gnd"]
    assert found["quantity"] == "impedance"
    assert found["kind"] == "impedance"
    assert "from" not in found


def test_nested_form_lists_its_steps():
    """A nested form has named steps and no polynomials."""
    found = one("transfer", circuit("five_sections"), "--nested")
    assert found["form"] == "nested"
    assert found["numerator"] is None
    assert all(len(step) == 2 for step in found["steps"])


def test_cutoff_has_every_key():
    """A cutoff carries its reference, its level and each crossing in both units."""
    found = one("cutoff", circuit("level_float"))
    assert set(found) >= SHARED | {"from", "to", "reference", "level_db", "cutoffs", "touches"}
    assert set(found) >= {"complete", "method"}
    assert found["reference"] == {"at": "dc", "gain": 1.0, "hertz": 0.0}
    (crossing,) = found["cutoffs"]
    assert set(crossing) >= {"hertz", "rad_per_s", "closed_form", "direction"}
    assert crossing["closed_form"] == "1/(R1*C1)"
    assert crossing["direction"] == "falling"
    assert isclose(crossing["rad_per_s"], 2 * pi * crossing["hertz"], rel_tol=1e-14)
    assert found["complete"] is True
    assert found["touches"] == []


def test_symbolic_cutoff_has_no_numbers():
    """Without values a cutoff is its closed form alone."""
    found = one("cutoff", circuit("level_float"), "--symbolic")
    assert found["cutoffs"][0]["hertz"] is None
    assert found["cutoffs"][0]["closed_form"] == "1/(R1*C1)"


def test_levels_of_the_file_are_one_answer_each():
    """A question with two levels is answered twice, in order."""
    found = acsolve("cutoff", circuit("strain_antialias"), "--json").answers
    assert [round(item["level_db"], 3) for item in found] == [-3.010, -1.0, -20.0]


def test_level_on_the_command_line_replaces_those_of_the_file():
    """With --level every question is answered at that level."""
    found = acsolve("cutoff", circuit("strain_antialias"), "--level", "-6dB", "--json").answers
    assert {item["level_db"] for item in found} == {-6.0}


def test_sweep_columns_have_one_length():
    """Every column of a sweep has as many entries as there are frequencies."""
    found = one("sweep", circuit("level_float"), "--band", "1Hz..1kHz", "--points", "10/decade")
    keys = ["hertz", "real", "imag", "gain_db", "phase_deg", "phase_delay_s", "group_delay_s"]
    assert set(found) >= SHARED | {"from", "to", *keys}
    assert {len(found[key]) for key in keys} == {31}
    assert all(first < second for first, second in pairwise(found["hertz"]))
    for real, imag, gain in zip(found["real"], found["imag"], found["gain_db"], strict=True):
        assert isclose(20 * log10(abs(complex(real, imag))), gain, abs_tol=1e-9)


def test_sweep_at_single_frequencies():
    """--at answers at just those frequencies, whatever band the file asks."""
    found = one("sweep", circuit("mast_cable"), "--at", "10kHz, 1MHz")
    assert found["hertz"] == [1e4, 1e6]


def test_infinite_values_are_null():
    """A gain of nothing has no decibels and no phase in JSON, only null."""
    found = one("sweep", circuit("swell_filter"), "--from", "in", "--to", "band", "--at", "0Hz")
    assert found["gain_db"] == [None]
    assert found["real"] == [0.0]


def test_linear_band_may_start_at_zero():
    """--linear takes even steps, both edges among them."""
    found = one(
        "sweep", circuit("level_float"), "--band", "0Hz..10Hz", "--linear", "--points", "11"
    )
    assert found["hertz"] == pytest.approx(range(11))


def test_sweep_of_an_impedance():
    """--into sweeps the impedance of a pair."""
    found = one("sweep", circuit("level_float"), "--into", "out", "--at", "1Hz")
    assert found["into"] == ["out", "gnd"]
    assert found["quantity"] == "impedance"


def test_check_counts():
    """A check lists nodes and parts, and as many modes as the order says."""
    found = one("check", circuit("level_lowpass"))
    assert found["ok"] is True
    assert len(found["parts"]) == 5
    assert found["order"] == 2
    assert all(len(item["values"]) == item["order"] for item in found["modes"])
    assert {item["code"] for item in found["problems"]} == {"question.unanswered"}


def test_equations_are_square():
    """Matrix, unknowns, excitation and meanings have one size."""
    found = one("equations", circuit("level_float"))
    size = len(found["unknowns"])
    assert len(found["matrix"]) == size
    assert all(len(row) == size for row in found["matrix"])
    assert len(found["excitation"]) == len(found["meanings"]) == size


def test_variant_is_named():
    """An answer says which variant it is about."""
    found = one("cutoff", circuit("ping_bandpass"), "--variant", "stocked parts")
    assert found["variant"] == "stocked parts"


def test_cautions_stand_with_every_answer():
    """The safety remarks of a file are in JSON and in text."""
    found = acsolve("transfer", circuit("touch_network"), "--json").answers
    assert all(len(item["cautions"]) == 3 for item in found)
    assert acsolve("transfer", circuit("touch_network")).out.count("caution: ") == 3


def test_let_changes_a_value():
    """--let R1=… answers as if the file said so."""
    found = one("transfer", circuit("level_float"), "--let", "R1=1k", "--let", "C1=1uF")
    assert found["standard_form"]["tau"] == "1/1000"


def test_keep_leaves_one_symbol():
    """--keep C1 answers over C1 and the other values."""
    found = one("transfer", circuit("level_float"), "--keep", "C1")
    assert found["expression"] == "1/(1 + 33000*C1*s)"
    assert found["poles"] is None


def test_own_sources_are_used_without_from():
    """--to alone asks the response to the file's own sources."""
    found = one("sweep", circuit("strain_bridge"), "--to", "exc", "--at", "10Hz")
    assert found["from"] is None
    assert found["quantity"] == "response"
    assert found["real"][0] == pytest.approx(5)


def test_quantity_replaces_that_of_the_file():
    """--quantity without pairs applies to the file's own questions."""
    found = one("cutoff", circuit("touch_network"), "--quantity", "transimpedance")
    assert found["quantity"] == "transimpedance"
    assert found["cutoffs"][0]["hertz"] == pytest.approx(688.98, rel=1e-4)


def test_current_of_an_ammeter(tmp_path):
    """--through observes the current of a named ammeter, by ratio or by the file's source."""
    file = tmp_path / "loop.circuit"
    file.write_text(
        "V1 : voltage_source(a = gnd, b = in, amplitude = 5 V)\n"
        "in -- R1 = 1k -- x -- M1 : ammeter -- out -- C1 = 100n -- gnd\n"
    )
    ratio = one(
        "transfer", file, "--from", "in", "--through", "M1", "--quantity", "transadmittance"
    )
    assert ratio["through"] == "M1"
    assert ratio["at_infinity"] == "1/1000"
    assert one("transfer", file, "--through", "M1")["at_infinity"] == "1/200"
    assert "current of the ammeter M1" in acsolve("transfer", file, "--through", "M1").out
