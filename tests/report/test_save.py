"""Writing files: the old content or the whole new one, never a part."""

from __future__ import annotations

import os
import stat
from pathlib import Path

import pytest

from acsolve import AnalysisError, TextError
from acsolve.report.save import refuse_unfit, write_all


def test_new_files_are_whole(tmp_path):
    """Each name holds its content, and nothing else is left in the folder."""
    names = [str(tmp_path / "one.csv"), str(tmp_path / "two.csv")]
    write_all((name, b"x" * 10) for name in names)
    assert sorted(map(str, tmp_path.iterdir())) == names
    assert all(Path(name).read_bytes() == b"x" * 10 for name in names)


def test_a_failure_leaves_everything_as_it_was(tmp_path):
    """Where one of several files cannot be made, none is replaced."""
    old = tmp_path / "old.csv"
    old.write_text("old")

    def contents():
        yield str(old), b"new"
        raise MemoryError

    with pytest.raises(MemoryError):
        write_all(contents())
    assert old.read_text() == "old"
    assert list(tmp_path.iterdir()) == [old]


def test_a_folder_that_went_away_is_reported(tmp_path):
    """An error of the system is told in our words, with the file's name."""
    with pytest.raises(AnalysisError, match=r"gone/table\.csv cannot be saved") as caught:
        write_all([(str(tmp_path / "gone" / "table.csv"), b"")])
    assert caught.value.code == "save.failed"


def test_permissions_are_kept(tmp_path):
    """A replaced file keeps its permissions; a new one has the usual ones."""
    old = tmp_path / "old.csv"
    old.write_text("old")
    old.chmod(0o640)
    write_all([(str(old), b"new"), (str(tmp_path / "new.csv"), b"new")])
    assert stat.S_IMODE(old.stat().st_mode) == 0o640
    mask = os.umask(0)
    os.umask(mask)
    assert stat.S_IMODE((tmp_path / "new.csv").stat().st_mode) == 0o666 & ~mask


def test_a_link_stays_a_link(tmp_path):
    """The file behind a symbolic link is replaced, not the link."""
    target, link = tmp_path / "target.csv", tmp_path / "link.csv"
    target.write_text("old")
    link.symlink_to(target)
    write_all([(str(link), b"new")])
    assert link.is_symlink()
    assert target.read_text() == "new"


@pytest.mark.parametrize(
    ("name", "code"),
    [
        ("table.doc", "save.ending"),
        ("table", "save.ending"),
        ("gone/table.csv", "save.failed"),
        ("folder.csv", "save.failed"),
    ],
)
def test_unfit_names_are_refused_before_any_work(tmp_path, monkeypatch, name, code):
    """An unknown ending, a missing folder or a folder as file is refused at once."""
    (tmp_path / "folder.csv").mkdir()
    monkeypatch.chdir(tmp_path)
    with pytest.raises(TextError) as caught:
        refuse_unfit([name], "sweep")
    assert caught.value.code == code
