"""The garbage collector, held back while millions of small lasting objects are made."""

from __future__ import annotations

import gc
from collections.abc import Iterator
from contextlib import contextmanager


@contextmanager
def nothing_collected() -> Iterator[None]:
    """Hold the cyclic garbage collector back.

    Nothing that a reader or an elimination makes is garbage yet, so every pass over it is lost:
    a third to half of the time for a large network. Nor is it looked through at the end: freezing
    and thawing moves it to the collector's oldest generation, where lasting objects belong.
    """
    running = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if running:
            if not gc.get_freeze_count():  # what somebody else has frozen stays so
                gc.freeze()
                gc.unfreeze()
            gc.enable()
