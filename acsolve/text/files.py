"""Files and texts into netlists: the way in."""

from __future__ import annotations

import os
import sys
from dataclasses import dataclass, replace
from pathlib import Path
from typing import BinaryIO, NoReturn

from acsolve.circuit.netlist import Netlist
from acsolve.codes import Code
from acsolve.errors import Diagnostic, TextError
from acsolve.memory import nothing_collected
from acsolve.source import Source
from acsolve.text import limits


@dataclass(frozen=True, slots=True)
class Reading:
    """A netlist, no variant applied, and the warnings met on the way."""

    netlist: Netlist
    warnings: tuple[Diagnostic, ...] = ()


def parse(text: str, *, name: str = "text", folder: str | None = None) -> Reading:
    r"""Read a circuit from a text.

    Parameters
    ----------
    text : str, the circuit in the text format
    name : str, default "text", what messages call it
    folder : str, where files that the text names are looked for, when an answer needs them

    Returns
    -------
    Reading: the netlist and its warnings

    Raises
    ------
    TextError
        [file.empty, syntax.*, value.*, limit.*] spelling, values or sizes are wrong; all
        problems of the text are in it.
    CircuitError
        [name.*, kind.*, chain.*, …] only names, kinds or structure are wrong.

    Examples
    --------
    >>> reading = parse("in -- R1 = 4k7 -- out\nout -- C1 = 10 nF -- gnd")
    >>> [part.name for part in reading.netlist.parts]
    ['R1', 'C1']

    """
    from acsolve.text.build import build
    from acsolve.text.parsing import statements
    from acsolve.text.problems import Problems

    source = Source(name, text.replace("\r\n", "\n").replace("\r", "\n"))
    if not text.strip("\ufeff \t\r\n"):
        _fail("file.empty", f"{name} is empty", "Write at least one chain: in -- R1 -- out.")
    if len(text) > limits.FILE_BYTES:
        _too_large(name, len(text))
    problems = Problems(source)
    with nothing_collected():
        netlist = build(source, statements(source, problems), problems)
    warnings = problems.finish()
    return Reading(replace(netlist, remarks=_remarks(source.text), folder=folder), warnings)


def _remarks(text: str) -> tuple[str, ...]:
    """The comment lines at the head of a text, without their sign."""
    found = []
    for line in text.lstrip("\ufeff").split("\n"):
        stripped = line.strip()
        if stripped.startswith("#"):
            found.append(stripped[1:].strip())
        elif stripped:
            break
    return tuple(found)


def read(path: str | os.PathLike[str], *, stdin: BinaryIO | None = None) -> Reading:
    """Read a circuit from a file; `-` is standard input.

    Parameters
    ----------
    path : path of the file, or "-"
    stdin : binary stream read for "-", default the process's standard input

    Returns
    -------
    Reading: the netlist and its warnings

    Raises
    ------
    TextError
        [file.missing, file.unreadable, file.encoding, file.empty, file.too-large], and as
        `parse`.
    CircuitError
        as `parse`.

    """
    if os.fspath(path) == "-":
        stream = stdin if stdin is not None else sys.stdin.buffer
        return _decoded(stream.read(limits.FILE_BYTES + 1), "standard input", ".")
    name = os.fspath(path)
    return _decoded(_content(Path(path), name), name, str(Path(name).parent))


def _content(path: Path, name: str) -> bytes:
    """The bytes of a file, refused by size before they are read."""
    try:
        if path.is_dir():
            _fail("file.unreadable", f"{name} is a directory", "Name a file in it.")
        with path.open("rb") as stream:
            size = os.fstat(stream.fileno()).st_size
            if size > limits.FILE_BYTES:
                _too_large(name, size)
            return stream.read(limits.FILE_BYTES + 1)
    except FileNotFoundError:
        _fail("file.missing", f"there is no file {name}", _near_file(path))
    except TextError:
        raise
    except (OSError, ValueError) as stop:
        reason = stop.strerror if isinstance(stop, OSError) else str(stop)
        _fail("file.unreadable", f"{name} cannot be read: {reason}", "Check its permissions.")


def _near_file(path: Path) -> str:
    """A hint that names a circuit of nearly the same name."""
    from acsolve.text.words import nearest

    try:
        names = [item.name for item in path.parent.iterdir() if item.suffix == ".circuit"]
    except OSError:
        names = []
    near = nearest(path.name, sorted(names)[:1000])
    return f"Did you mean {path.parent / near}?" if near else "Check the name and the directory."


def _decoded(content: bytes, name: str, folder: str) -> Reading:
    if len(content) > limits.FILE_BYTES:
        _too_large(name, len(content))
    if b"\0" in content:
        _fail("file.encoding", f"{name} is not a text: it contains zero bytes",
              "A circuit is a UTF-8 text file; this looks like a binary one.")  # fmt: skip
    try:
        text = content.decode("utf-8")
    except UnicodeDecodeError as stop:
        line = content.count(b"\n", 0, stop.start) + 1
        _fail("file.encoding", f"{name} is not UTF-8: line {line} has a byte that is none",
              "Save the file as UTF-8.")  # fmt: skip
    return parse(text, name=name, folder=folder)


def _too_large(name: str, size: int) -> NoReturn:
    most = limits.FILE_BYTES // 2**20
    _fail("file.too-large", f"{name} has {size:,} bytes; the limit is {most} MiB",
          "Describe repeated parts with repeat and block.")  # fmt: skip


def _fail(code: Code, message: str, hint: str) -> NoReturn:
    raise TextError(Diagnostic(code=code, message=message, hint=hint)) from None
