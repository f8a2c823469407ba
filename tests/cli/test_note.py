"""`acsolve note`: HTML into a pipe, files as their ending says, numbers as JSON."""

from __future__ import annotations

import contextlib
import io
import json
from shutil import which

import pytest

import acsolve as library
from acsolve.cli.run import run
from acsolve.report.note import pdf
from tests.cli.runner import acsolve, circuit, process


def test_a_pipe_gets_html():
    """Without a terminal the page itself is written, in UTF-8 whatever the locale."""
    found = acsolve("note", circuit("level_float"))
    assert found.status == 0
    assert found.out == library.read(circuit("level_float")).note().html()
    piped = process("note", circuit("level_float"), env={"LC_ALL": "C", "PATH": "/usr/bin"})
    assert piped.out == found.out


def test_saved(tmp_path):
    """Each ending gets its kind of file; another one is refused before any work."""
    names = [tmp_path / f"note.{ending}" for ending in ("html", "md", "tex", "json")]
    saves = [item for name in names for item in ("--save", name)]
    found = acsolve("note", circuit("hum_notch"), *saves)
    assert found.status == 0
    heads = ["<!DOCTYPE html>", "# Hum notch", "\\documentclass", '{"format": 1']
    for name, head in zip(names, heads, strict=True):
        assert name.read_text(encoding="utf-8").startswith(head)
    wrong = acsolve("note", circuit("level_float"), "--save", tmp_path / "a.svg")
    assert wrong.status == 2
    assert (
        "save.ending"
        in acsolve("note", circuit("level_float"), "--save", tmp_path / "a.svg", "--json").out
    )


def test_values_variant_and_date_are_told():
    """What was set besides the file stands in the note, and in the command that repeats it."""
    given = ("--variant", "unloaded", "--let", "R3=33k", "--date", "spring tide")
    found = acsolve("note", circuit("hum_notch"), *given)
    for text in ("R3=33k", "spring tide", "“unloaded”", "--variant unloaded"):
        assert text in found.out
    assert "--date &#39;spring tide&#39;" in found.out


def test_json():
    """One document: the answers under their usual keys, and what only the note has."""
    found = acsolve("note", circuit("level_lowpass"), "--json")
    assert [item["kind"] for item in found.answers] == ["transfer", "cutoff", "step", "sweep"]
    told = json.loads(found.out)["note"]
    assert told["not_answered"] == ["tolerance", "goal"]
    assert told["parts"][0]["values"]["value"] == 107_000


@pytest.mark.skipif(
    not any(map(which, (*pdf.ENGINES, *pdf.BROWSERS))), reason="nothing here makes a PDF"
)
def test_pdf(tmp_path):
    """The PDF is one, and the same on a second run."""
    for name in ("a.pdf", "b.pdf"):
        assert acsolve("note", circuit("level_float"), "--save", tmp_path / name).status == 0
    content = (tmp_path / "a.pdf").read_bytes()
    assert content.startswith(b"%PDF")
    assert content == (tmp_path / "b.pdf").read_bytes()


@pytest.mark.skipif(not any(map(which, pdf.BROWSERS)), reason="no Chromium is installed")
def test_pdf_by_a_browser(monkeypatch):
    """Without a TeX engine the browser prints the page, the same on every run."""
    monkeypatch.setattr(pdf, "ENGINES", ())
    note = library.read(circuit("level_float")).note()
    first = note.content("pdf")
    assert first.startswith(b"%PDF")
    assert first == note.content("pdf")


def test_without_anything_that_makes_a_pdf(tmp_path, monkeypatch):
    """The error says what to install, and no file is left."""
    monkeypatch.setenv("PATH", str(tmp_path))
    found = acsolve("note", circuit("level_float"), "--save", tmp_path / "a.pdf")
    assert found.status == 1
    assert "texlive-latex-base" in found.err
    assert list(tmp_path.iterdir()) == []


class Terminal(io.StringIO):
    """A stream that says it is a terminal."""

    def isatty(self):
        """It is one."""
        return True


def test_a_terminal_is_told_to_save():
    """A page of mark-up is not thrown at a terminal."""
    err = io.StringIO()
    with contextlib.redirect_stdout(Terminal()) as out, contextlib.redirect_stderr(err):
        status = run(["note", str(circuit("level_float"))])
    assert status == 2
    assert out.getvalue() == ""
    assert "--save note.html" in err.getvalue()
