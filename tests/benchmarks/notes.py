"""A note of two sections takes less than 3 s, one of a 200-section ladder less than 10 s.

Each in a process of its own, start and all imports included; wall and processor time, three runs.
"""

from __future__ import annotations

import resource
import subprocess
import sys
import tempfile
from pathlib import Path
from time import perf_counter

TWO = """in -- R1 = 1k -- m -- R2 = 10k -- out
m -- C1 = 100 nF -- gnd
out -- C2 = 10 nF -- gnd
ask transfer from in to out
ask cutoff from in to out
ask step from in to out
"""
LADDER = """block section(in, out)
    in -- R -- out
    out -- C -- gnd
    R = 1k
    C = 1 nF
end
head -- N1 : 200 * section -- tail
tail -- Rload = 100 kohm -- gnd
ask transfer from head to tail
ask cutoff from head to tail
"""


def timed(file: Path) -> tuple[float, float]:
    """Seconds on the wall and of the processor."""
    before = resource.getrusage(resource.RUSAGE_CHILDREN)
    start = perf_counter()
    page = file.with_suffix(".html")
    command = [sys.executable, "-m", "acsolve", "note", str(file), "--save", str(page)]
    subprocess.run(command, check=True, capture_output=True)  # noqa: S603 - this program
    wall = perf_counter() - start
    after = resource.getrusage(resource.RUSAGE_CHILDREN)
    used = after.ru_utime + after.ru_stime - before.ru_utime - before.ru_stime
    return wall, used


if __name__ == "__main__":
    with tempfile.TemporaryDirectory() as folder:
        for name, text, limit in (("two", TWO, 3.0), ("ladder", LADDER, 10.0)):
            file = Path(folder) / f"{name}.circuit"
            file.write_text(text, encoding="utf-8")
            runs = [timed(file) for _ in range(3)]
            told = ", ".join(f"{wall:.2f} s (processor {used:.2f} s)" for wall, used in runs)
            print(f"{name}, limit {limit:g} s: {told}")
