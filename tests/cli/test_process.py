"""The program as a process: pipes, signals, imports."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import time

import pytest

from tests.cli.runner import circuit, process

RC = b"in -- R1 = 1k -- out\nout -- C1 = 1n -- gnd\n"
HEAVY = ("sympy", "scipy", "matplotlib", "networkx", "rich", "typer", "IPython", "pandas")


def test_standard_input():
    """FILE - reads the circuit from standard input."""
    found = process("transfer", "-", "--from", "in", "--to", "out", stdin=RC)
    assert found.status == 0
    assert "H(s) = 1/(1 + 1e-6*s)" in found.out
    assert found.err == ""


def test_piped_output_is_plain():
    """Nothing but text and line ends goes into a pipe, whatever the terminal is."""
    found = process(
        "cutoff", circuit("level_float"), env={**os.environ, "TERM": "xterm", "FORCE_COLOR": "1"}
    )
    assert found.status == 0
    assert "\x1b" not in found.out + found.err


def test_ascii_terminal():
    """Signs that an encoding lacks are replaced, never an error."""
    found = process(
        "transfer",
        circuit("five_sections"),
        env={**os.environ, "PYTHONIOENCODING": "ascii", "PYTHONUTF8": "0"},
    )
    assert found.status == 0
    assert "? 9 more" in found.out


def test_statuses():
    """The process ends with the status of its answer."""
    assert process("transfer", "-", stdin=RC).status == 2
    assert process("cutoff", circuit("level_float"), "--reference", "infinity").status == 1


@pytest.mark.skipif(sys.platform == "win32", reason="pipes close otherwise there")
def test_closed_pipe_is_quiet():
    """A reader that goes away ends the program without a word."""
    with subprocess.Popen(  # noqa: S603 - our own program
        [sys.executable, "-m", "acsolve", "sweep", str(circuit("level_float")), "--json"],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
    ) as child:
        assert child.stdout is not None
        assert child.stderr is not None
        child.stdout.close()
        assert child.stderr.read() == b""
        assert child.wait(30) == 141


@pytest.mark.skipif(sys.platform == "win32", reason="signals differ there")
def test_interrupt_is_clean():
    """Ctrl-C while waiting for input ends with status 130 and no traceback."""
    with subprocess.Popen(
        [sys.executable, "-m", "acsolve", "transfer", "-"],
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
    ) as child:
        time.sleep(2)
        child.send_signal(signal.SIGINT)
        _, err = child.communicate(timeout=30)
    assert child.returncode == 130
    assert err in (b"acsolve: stopped\n", b"")


def loaded(code: str) -> list[str]:
    """Which heavy libraries a piece of code loads in a fresh interpreter."""
    script = (
        f"{code}\nimport sys\nprint(*[m for m in {HEAVY} if m in sys.modules], file=sys.stderr)"
    )
    done = subprocess.run(  # noqa: S603 - our own program
        [sys.executable, "-c", script], capture_output=True, text=True, timeout=60, check=True
    )
    return done.stderr.split()


def test_importing_the_library_is_cheap():
    """`import acsolve` loads no numeric, symbolic or drawing library at all."""
    assert loaded("import acsolve") == []
    assert loaded("import acsolve, sys; assert 'numpy' not in sys.modules") == []


@pytest.mark.parametrize(
    "arguments",
    [
        ("--help",),
        ("check", "level_float"),
        ("equations", "level_float"),
        ("transfer", "five_sections"),
        ("impedance", "clock_crystal"),
        ("cutoff", "level_float"),
        ("sweep", "level_float"),
        ("sweep", "level_float", "--json"),
    ],
)
def test_commands_load_nothing_heavy(arguments):
    """No command loads a library that its answer does not need."""
    first, *rest = arguments
    named = [str(circuit(item)) if not item.startswith("-") else item for item in rest]
    assert loaded(f"from acsolve.cli.run import run\nassert run({[first, *named]!r}) == 0") == []


def test_only_pictures_load_the_drawing_library(tmp_path):
    """Saving a picture is what loads matplotlib, and never its interactive part."""
    file = tmp_path / "sweep.svg"
    arguments = ["sweep", str(circuit("level_float")), "--save", str(file)]
    code = f"import sys\nfrom acsolve.cli.run import run\nrun({arguments!r})"
    assert "matplotlib" in loaded(code)
    assert loaded(f"{code}\nassert 'matplotlib.pyplot' not in sys.modules")
