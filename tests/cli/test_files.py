"""Files that are no circuit: a clear error each, promptly."""

from __future__ import annotations

import os
from time import monotonic

import pytest

from tests.cli.runner import acsolve

PROMPT = 10.0  # seconds; far above what is measured, far below a hang


def refused(path: object, code: str) -> str:
    """The message for a file that is refused with a code."""
    start = monotonic()
    found = acsolve("transfer", path)
    assert monotonic() - start < PROMPT
    assert found.status == 2
    assert found.out == ""
    assert code in found.err
    assert "Traceback" not in found.err
    return found.err


def test_missing(tmp_path):
    """A file that is not there is named."""
    assert "nosuch.circuit" in refused(tmp_path / "nosuch.circuit", "file.missing")


def test_directory(tmp_path):
    """A directory is no file."""
    refused(tmp_path, "file.unreadable")


def test_binary(tmp_path):
    """Bytes that are no text are refused as such."""
    file = tmp_path / "binary.circuit"
    file.write_bytes(bytes(range(256)) * 40)
    refused(file, "file.encoding")


def test_empty(tmp_path):
    """An empty file is called empty."""
    file = tmp_path / "empty.circuit"
    file.touch()
    refused(file, "file.empty")


def test_huge(tmp_path):
    """A file beyond the limit is refused before it is read."""
    file = tmp_path / "huge.circuit"
    with file.open("wb") as stream:
        stream.truncate(1 << 30)
    refused(file, "file.too-large")


def test_ten_thousand_errors(tmp_path):
    """A flood of errors is cut after some dozens, and counted."""
    file = tmp_path / "flood.circuit"
    file.write_text("".join(f"a -- R{k} = 1 parsec -- b\n" for k in range(10_000)))
    message = refused(file, "value.")
    assert message.count("flood.circuit, line") <= 100
    assert "more problems" in message
    assert len(acsolve("transfer", file, "--json").document["errors"]) >= 100


@pytest.mark.skipif(os.geteuid() == 0, reason="the superuser may read every file")
def test_unreadable(tmp_path):
    """A file without read permission is refused."""
    file = tmp_path / "closed.circuit"
    file.write_text("a -- R1 -- gnd\n")
    file.chmod(0)
    refused(file, "file.unreadable")
