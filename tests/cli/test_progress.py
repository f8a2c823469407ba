"""The sign of life on standard error."""

from __future__ import annotations

import io
import time

from acsolve.cli import progress


class Terminal(io.StringIO):
    """A stream that calls itself a terminal."""

    def isatty(self) -> bool:
        """Always."""
        return True


def test_long_work_shows_itself_on_a_terminal(monkeypatch):
    """After a while the work is named, and wiped away at its end."""
    stream = Terminal()
    monkeypatch.setattr("sys.stderr", stream)
    monkeypatch.setattr(progress, "_PATIENCE", 0.01)
    with progress.progress("counting"):
        time.sleep(0.2)
    assert "acsolve: counting, 0 s" in stream.getvalue()
    assert stream.getvalue().endswith("\r")


def test_short_work_shows_nothing(monkeypatch):
    """Work that is done at once writes nothing."""
    stream = Terminal()
    monkeypatch.setattr("sys.stderr", stream)
    with progress.progress("counting"):
        pass
    assert stream.getvalue() == ""


def test_nothing_is_shown_in_a_pipe(monkeypatch):
    """Where standard error is no terminal nothing is written, however long it lasts."""
    stream = io.StringIO()
    monkeypatch.setattr("sys.stderr", stream)
    monkeypatch.setattr(progress, "_PATIENCE", 0.01)
    with progress.progress("counting"):
        time.sleep(0.05)
    assert stream.getvalue() == ""
