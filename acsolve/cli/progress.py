"""A sign of life on standard error while long work goes on."""

from __future__ import annotations

import sys
from collections.abc import Iterator
from contextlib import contextmanager

_PATIENCE = 1.0  # seconds before anything is shown
_STEP = 0.5


@contextmanager
def progress(what: str) -> Iterator[None]:
    """Show `what` and the seconds passed, on a terminal only, after the first second."""
    if not sys.stderr.isatty():
        yield
        return
    from threading import Event, Thread

    done = Event()
    thread = Thread(target=_show, args=(what, done), daemon=True)
    thread.start()
    try:
        yield
    finally:
        done.set()
        thread.join()


def _show(what: str, done: object) -> None:
    from threading import Event
    from time import monotonic

    assert isinstance(done, Event)
    start, width = monotonic(), 0
    if done.wait(_PATIENCE):
        return
    while True:
        text = f"acsolve: {what}, {monotonic() - start:.0f} s"
        sys.stderr.write("\r" + text.ljust(width))
        sys.stderr.flush()
        width = len(text)
        if done.wait(_STEP):
            break
    sys.stderr.write("\r" + " " * width + "\r")
    sys.stderr.flush()
