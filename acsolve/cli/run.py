"""One run of the program: every error becomes a message and an exit status, none a traceback."""

from __future__ import annotations

import os
import sys
from collections.abc import Sequence

import click

from acsolve import AcsolveError
from acsolve.cli.complaint import report
from acsolve.cli.status import ANSWERED, DEFECT, NO_ANSWER, PIPE_CLOSED, STOPPED, WRONG, status_of
from acsolve.cli.usage import usage_problem


def run(arguments: Sequence[str]) -> int:
    """Run a command line and return its exit status."""
    _plain_signs()
    as_json = "--json" in arguments
    try:
        status = _dispatch(arguments, as_json=as_json)
        sys.stdout.flush()
    except BrokenPipeError:
        return _pipe_closed()
    except KeyboardInterrupt:
        sys.stderr.write("acsolve: stopped\n")
        return STOPPED
    return status


def _plain_signs() -> None:
    """Signs that the terminal's encoding lacks are replaced, never an error."""
    for stream in (sys.stdout, sys.stderr):
        if hasattr(stream, "reconfigure"):
            stream.reconfigure(errors="replace")


def _dispatch(arguments: Sequence[str], *, as_json: bool) -> int:
    from acsolve.cli.group import program

    try:
        with program.make_context("acsolve", list(arguments), obj=tuple(arguments)) as context:
            status = program.invoke(context)
        return int(status or ANSWERED)
    except click.exceptions.Exit as leave:
        return leave.exit_code
    except click.UsageError as error:
        report([usage_problem(error, arguments)], as_json=as_json)
        return WRONG
    except AcsolveError as error:
        report(error.diagnostics, arguments=arguments, as_json=as_json)
        return status_of(error)
    except BrokenPipeError:
        raise
    except MemoryError:
        sys.stderr.write("acsolve: the answer does not fit into this machine's memory\n")
        return NO_ANSWER
    except Exception as error:
        if os.environ.get("ACSOLVE_DEBUG"):
            raise
        sys.stderr.write(_defect(error))
        return DEFECT


def _defect(error: Exception) -> str:
    text = " ".join(str(error).split())[:200]
    return (
        f"acsolve: a defect of acsolve itself ({type(error).__name__}: {text}); please report "
        "it with the file and this command line, and the output with ACSOLVE_DEBUG=1\n"
    )


def _pipe_closed() -> int:
    """Whoever read the output went away: leave quietly, also while streams are closed."""
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, sys.stdout.fileno())
    return PIPE_CLOSED
