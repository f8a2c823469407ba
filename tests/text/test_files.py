"""Files that cannot be read are told apart."""

from __future__ import annotations

import io
import os
import pickle
import subprocess
import sys

import pytest

from acsolve.errors import AcsolveError, TextError
from acsolve.text import limits, parse, read

GOOD = "in -- R1 = 4k7 -- out\n"


def code_of(call, *arguments, **more) -> str:
    """The code of the error that a call raises; it must carry a hint."""
    with pytest.raises(TextError) as caught:
        call(*arguments, **more)
    assert caught.value.hint
    return caught.value.code


def test_a_file_is_read_under_its_name(tmp_path):
    """A file is read, and messages call it by the path given."""
    path = tmp_path / "light.circuit"
    path.write_text(GOOD, encoding="utf-8")
    assert read(path).netlist == read(str(path)).netlist == parse(GOOD).netlist
    path.write_text("in -- R1 R2 -- out\n", encoding="utf-8")
    with pytest.raises(AcsolveError, match=r"light\.circuit, line 1, column 10"):
        read(path)


def test_standard_input():
    """A dash reads standard input."""
    assert read("-", stdin=io.BytesIO(GOOD.encode())).netlist == parse(GOOD).netlist


def test_a_missing_file_hints_at_its_neighbour(tmp_path):
    """The hint for a missing file names the circuit with the nearest name."""
    (tmp_path / "sluice_light.circuit").write_text(GOOD, encoding="utf-8")
    with pytest.raises(TextError) as caught:
        read(tmp_path / "sluce_light.circuit")
    assert caught.value.code == "file.missing"
    assert "sluice_light.circuit" in (caught.value.hint or "")


def test_a_directory(tmp_path):
    """A directory is no file."""
    assert code_of(read, tmp_path) == "file.unreadable"


@pytest.mark.skipif(os.geteuid() == 0, reason="root may read everything")
def test_a_file_without_permission(tmp_path):
    """A file that may not be read is told apart from a missing one."""
    path = tmp_path / "locked.circuit"
    path.write_text(GOOD, encoding="utf-8")
    path.chmod(0)
    assert code_of(read, path) == "file.unreadable"


def test_a_path_that_no_file_can_have():
    """A path with a zero character is unreadable, not a crash."""
    assert code_of(read, "a\0b") == "file.unreadable"


@pytest.mark.parametrize("content", [b"in -- \0 out", b"\x89PNG\x00\x01", b"in -- R1 -- \xff"])
def test_a_binary_file(tmp_path, content):
    """Zero bytes, and bytes that are no UTF-8, are told."""
    path = tmp_path / "picture.circuit"
    path.write_bytes(content)
    assert code_of(read, path) == "file.encoding"


@pytest.mark.parametrize("content", ["", "  \n\t\n", "\ufeff", "\ufeff\r\n"])
def test_an_empty_file(tmp_path, content):
    """A file of nothing but blanks is empty."""
    path = tmp_path / "empty.circuit"
    path.write_text(content, encoding="utf-8", newline="")
    assert code_of(read, path) == "file.empty"


def test_a_large_file_is_refused_by_its_size(tmp_path):
    """A file beyond the limit is refused before it is read."""
    path = tmp_path / "large.circuit"
    with path.open("wb") as stream:
        stream.truncate(limits.FILE_BYTES + 1)
    assert code_of(read, path) == "file.too-large"


def test_standard_input_is_bounded():
    """Standard input is read up to the limit and no further."""

    class Endless(io.RawIOBase):
        def read(self, size: int = -1) -> bytes:
            assert size > 0
            return b" " * size

    assert code_of(read, "-", stdin=Endless()) == "file.too-large"


def test_comments_alone_are_a_text():
    """A file of comments is a circuit without parts, and its remarks are kept."""
    netlist = parse("# Sluice light\n#\n# left bank\n\n# more\n").netlist
    assert netlist.parts == ()
    assert netlist.remarks == ("Sluice light", "", "left bank", "more")


def test_errors_travel_between_processes():
    """An error can be pickled with all its diagnostics."""
    with pytest.raises(AcsolveError) as caught:
        parse("in -- R1 R2 -- out")
    again = pickle.loads(pickle.dumps(caught.value))  # noqa: S301 - our own bytes
    assert str(again) == str(caught.value)


def test_importing_is_cheap():
    """Importing the text layer loads no library beyond the standard one."""
    heavy = "lark", "sympy", "numpy", "flint", "scipy", "networkx", "matplotlib"
    code = f"import sys, acsolve.text; print([m for m in {heavy} if m in sys.modules])"
    done = subprocess.run(  # noqa: S603 - our own interpreter and text
        [sys.executable, "-c", code], capture_output=True, text=True, check=True
    )
    assert done.stdout.strip() == "[]"
