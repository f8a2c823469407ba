"""Work on all cores, by threads that live only as long as the call.

NumPy lets other threads run while it computes, so threads pay where single calls are long, as
on batches of matrices. Nothing is started on import, no process is forked, and an interrupt
stops after the piece at hand.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Sequence
from typing import TypeVar

Item = TypeVar("Item")
Result = TypeVar("Result")


def cores() -> int:
    """Cores that this process may use."""
    if hasattr(os, "sched_getaffinity"):
        return len(os.sched_getaffinity(0))
    return os.cpu_count() or 1


def spread(work: Callable[[Item], Result], items: Sequence[Item]) -> list[Result]:
    """The results of `work` in the order of the items; in threads where there are several."""
    workers = min(cores(), len(items))
    if workers < 2:
        return [work(item) for item in items]
    from concurrent.futures import ThreadPoolExecutor

    pool = ThreadPoolExecutor(workers)
    try:
        return list(pool.map(work, items))
    finally:
        pool.shutdown(cancel_futures=True)
