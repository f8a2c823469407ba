"""Exit statuses of `acsolve note`: 1 where a question has no answer, 2 where the file asks none."""

from __future__ import annotations

import json

import pytest

import acsolve as library
from acsolve.errors import AcsolveError
from tests.cli.runner import acsolve, circuit

SYMBOLS = """
in -- R1 -- out -- C1 -- gnd
ask sweep from in to out over 1 Hz .. 1 kHz
ask impedance into in
"""


@pytest.fixture
def symbols(tmp_path):
    """A file with one question that has no answer, and one that has."""
    path = tmp_path / "symbols.circuit"
    path.write_text(SYMBOLS, encoding="utf-8")
    return path


def test_what_has_no_answer_is_status_one(symbols, tmp_path):
    """The note is written, since it says so; the reason stands on standard error."""
    target = tmp_path / "note.md"
    found = acsolve("note", symbols, "--save", target)
    assert found.status == 1
    assert "question.no-value" in found.err
    assert "not every question has an answer" in found.out
    text = target.read_text(encoding="utf-8")
    assert "No answer" in text
    assert "Impedance into" in text


def test_into_a_pipe_and_as_json(symbols):
    """The page still goes into a pipe; as JSON there are the errors alone."""
    piped = acsolve("note", symbols)
    assert piped.status == 1
    assert piped.out == library.read(symbols).note().html()
    found = acsolve("note", symbols, "--json")
    assert found.status == 1
    errors = json.loads(found.out)["errors"]
    assert [item["code"] for item in errors] == ["question.no-value"]


def test_a_file_without_a_circuit_is_status_two(tmp_path):
    """There is nothing to write a note about, so none is written."""
    path, target = tmp_path / "empty.circuit", tmp_path / "note.html"
    path.write_text('title "nothing"\n', encoding="utf-8")
    found = acsolve("note", path, "--save", target)
    assert found.status == 2
    assert "no two nodes" in found.err
    assert not target.exists()


def test_a_missing_folder_is_told_in_the_same_words(symbols, tmp_path):
    """By the command line and by Python: what is missing, and what to do."""
    target = tmp_path / "gone" / "note.md"
    found = acsolve("note", symbols, "--save", target)
    assert found.status == 2
    with pytest.raises(AcsolveError) as caught:
        library.read(symbols).note().save(target)
    assert caught.value.code == "save.failed"
    for text in (found.err, str(caught.value)):
        assert f"there is no folder {target.parent}" in text
        assert "Make the folder first." in text


def test_a_day_that_does_not_exist(tmp_path):
    """30 February is refused before any work; other words are shown as they stand."""
    target = tmp_path / "note.md"
    found = acsolve("note", circuit("level_float"), "--date", "2026-02-30", "--save", target)
    assert found.status == 2
    assert "there is no day 2026-02-30" in found.err
    assert not target.exists()
    for date in ("2028-02-29", "30 February, as the tide table has it"):
        assert date in library.read(circuit("level_float")).note(date=date).markdown()
