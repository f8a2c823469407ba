"""Whole texts: what good ones build, and what bad ones say, word for word."""

from __future__ import annotations

from pathlib import Path

import pytest

from acsolve.errors import AcsolveError, frame
from acsolve.text import parse, read, write
from tests.text.dump import dumped

CASES = Path(__file__).parent / "cases"
OK = sorted((CASES / "ok").glob("*.circuit"))
BAD = sorted((CASES / "bad").glob("*.circuit"))
CIRCUITS = sorted((Path(__file__).parents[2] / "circuits").glob("*.circuit"))


def ids(path: Path) -> str:
    """A case is named by its file."""
    return path.stem


@pytest.mark.parametrize("path", OK, ids=ids)
def test_a_good_text_builds_its_netlist(path, snapshot):
    """A good text gives the netlist of its snapshot, and the warnings."""
    reading = parse(path.read_text(encoding="utf-8"), name=path.name)
    warnings = "".join(f"{frame(item)}\n" for item in reading.warnings)
    snapshot(dumped(reading.netlist) + warnings, path.with_suffix(".netlist"))


@pytest.mark.parametrize("path", BAD, ids=ids)
def test_a_bad_text_is_told_what_is_wrong(path, snapshot):
    """A bad text raises the error frames of its snapshot, all of them."""
    with pytest.raises(AcsolveError) as caught:
        parse(path.read_text(encoding="utf-8"), name=path.name)
    snapshot(f"{type(caught.value).__name__}\n{caught.value}\n", path.with_suffix(".frames"))


@pytest.mark.parametrize("path", OK + CIRCUITS, ids=ids)
def test_what_is_written_reads_back_equal(path):
    """Writing a netlist and reading the text gives an equal netlist."""
    netlist = parse(path.read_text(encoding="utf-8")).netlist
    assert parse(write(netlist)).netlist == netlist


@pytest.mark.parametrize("path", OK, ids=ids)
@pytest.mark.parametrize("change", ["crlf", "bom", "cr", "no-last-line-end"])
def test_line_ends_and_marks_do_not_matter(path, change):
    """Line ends of every kind and a byte order mark change nothing."""
    text = path.read_text(encoding="utf-8")
    changed = {
        "crlf": text.replace("\n", "\r\n"),
        "cr": text.replace("\n", "\r"),
        "bom": "\ufeff" + text,
        "no-last-line-end": text.rstrip("\n"),
    }[change]
    assert parse(changed).netlist == parse(text).netlist


@pytest.mark.parametrize("path", CIRCUITS, ids=ids)
def test_every_shipped_circuit_reads(path):
    """Every circuit in the folder of examples reads."""
    assert read(path).netlist.parts


def test_every_bad_text_points_into_itself():
    """Every error of a bad text has a place inside the text, and a hint."""
    for path in BAD:
        with pytest.raises(AcsolveError) as caught:
            parse(path.read_text(encoding="utf-8"))
        for item in caught.value.diagnostics:
            assert item.span is not None, path.name
            assert 0 <= item.span.start <= item.span.end <= len(item.span.source.text)
            assert item.hint, path.name
