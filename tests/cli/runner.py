"""The command line as a function: arguments in, status and both outputs out."""

from __future__ import annotations

import contextlib
import io
import json
import subprocess
import sys
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from acsolve.cli.run import run

CIRCUITS = Path(__file__).parents[2] / "circuits"


@dataclass(frozen=True)
class Outcome:
    """What one run left behind."""

    status: int
    out: str
    err: str

    @property
    def document(self) -> dict[str, Any]:
        """The JSON document on standard output."""
        return json.loads(self.out, parse_constant=_refused)

    @property
    def answers(self) -> list[dict[str, Any]]:
        """The answers of the JSON document."""
        assert self.status == 0, self.err or self.out
        return self.document["answers"]


def _refused(token: str) -> None:
    raise AssertionError(f"{token} is no JSON number")


def acsolve(*arguments: object) -> Outcome:
    """Run a command line in this process."""
    out, err = io.StringIO(), io.StringIO()
    with contextlib.redirect_stdout(out), contextlib.redirect_stderr(err):
        status = run([str(item) for item in arguments])
    return Outcome(status, out.getvalue(), err.getvalue())


def process(*arguments: object, stdin: bytes = b"", **more: Any) -> Outcome:
    """Run the program as a process of its own, its output piped."""
    done = subprocess.run(  # noqa: S603 - our own program
        [sys.executable, "-m", "acsolve", *map(str, arguments)],
        input=stdin,
        capture_output=True,
        timeout=60,
        check=False,
        **more,
    )
    return Outcome(done.returncode, done.stdout.decode(), done.stderr.decode())


def circuit(name: str) -> Path:
    """A demonstration circuit."""
    return CIRCUITS / f"{name}.circuit"
