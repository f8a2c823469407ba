"""The note as PDF, by what the machine has: a TeX engine, else a browser that prints."""

from __future__ import annotations

import os
import re
import subprocess
import tempfile
from pathlib import Path
from shutil import which

from acsolve.errors import AnalysisError, Diagnostic
from acsolve.report.note.html import html_page
from acsolve.report.note.latex import latex_page
from acsolve.report.note.model import Document

ENGINES = ("pdflatex", "lualatex", "xelatex")
BROWSERS = ("chromium", "chromium-browser", "google-chrome")
_PATIENCE = 120  # seconds
_DATE = re.compile(rb"/(CreationDate|ModDate)\s*\(D:[^)]*\)")


def pdf_bytes(document: Document) -> bytes:
    """The note as PDF; the same bytes on the same machine.

    Raises
    ------
    AnalysisError
        [note.pdf] nothing here makes a PDF.
    """
    reasons = []
    for name in ENGINES:
        program = which(name)
        if program is not None:
            found, reason = _typeset(program, latex_page(document))
            if found is not None:
                return found
            reasons.append(f"{name}: {reason}")
    for name in BROWSERS:
        program = which(name)
        if program is not None:
            found, reason = _printed(program, html_page(document))
            if found is not None:
                return found
            reasons.append(f"{name}: {reason}")
    raise AnalysisError(
        Diagnostic(
            code="note.pdf",
            message="no PDF could be made: "
            + ("; ".join(reasons) if reasons else "neither a TeX engine nor Chromium is installed"),
            hint="Install pdflatex (Debian: texlive-latex-base) or chromium, or save html and "
            "print it from a browser.",
        )
    )


def _typeset(program: str, text: str) -> tuple[bytes | None, str]:
    """Two runs, so that tables find their widths; no shell, a folder of its own."""
    with tempfile.TemporaryDirectory(prefix="acsolve-note-") as folder:
        source = Path(folder) / "note.tex"
        source.write_text(text, encoding="utf-8")
        command = [
            program,
            "-interaction=batchmode",
            "-halt-on-error",
            "-no-shell-escape",
            "note.tex",
        ]
        epoch = {"SOURCE_DATE_EPOCH": "0", "FORCE_SOURCE_DATE": "1"}
        for _ in range(2):
            reason = _run(command, folder, epoch)
            if reason is not None:
                return None, reason + _first_error(Path(folder) / "note.log")
        return _settled((Path(folder) / "note.pdf").read_bytes()), ""


def _first_error(log: Path) -> str:
    if not log.exists():
        return ""
    lines = log.read_text(encoding="utf-8", errors="replace").splitlines()
    return next((f" ({line[2:]})" for line in lines if line.startswith("! ")), "")


def _printed(program: str, text: str) -> tuple[bytes | None, str]:
    with tempfile.TemporaryDirectory(prefix="acsolve-note-") as folder:
        page, target = Path(folder) / "note.html", Path(folder) / "note.pdf"
        page.write_text(text, encoding="utf-8")
        command = [program, "--headless", "--disable-gpu", "--no-pdf-header-footer"]
        command += ["--no-sandbox"] if hasattr(os, "geteuid") and os.geteuid() == 0 else []
        command += [f"--user-data-dir={folder}/profile", f"--print-to-pdf={target}", page.as_uri()]
        reason = _run(command, folder, {})
        if reason is None and not target.exists():
            reason = "it made no file"
        return (None, reason) if reason is not None else (_settled(target.read_bytes()), "")


def _run(command: list[str], folder: str, more: dict[str, str]) -> str | None:
    """Run a program; None where it did well, else what went wrong."""
    try:
        done = subprocess.run(  # noqa: S603 - a fixed command, no shell
            command,
            cwd=folder,
            env={**os.environ, **more},
            capture_output=True,
            timeout=_PATIENCE,
            check=False,
            stdin=subprocess.DEVNULL,
        )
    except subprocess.TimeoutExpired:
        return f"it took more than {_PATIENCE} s"
    except OSError as error:
        return str(error.strerror)
    return None if done.returncode == 0 else f"it ended with status {done.returncode}"


def _settled(content: bytes) -> bytes:
    """Dates of making are set to one moment, of the same length."""

    def same(found: re.Match[bytes]) -> bytes:
        head = found[0].index(b"(D:") + 3
        room = len(found[0]) - head - 1
        return found[0][:head] + b"19700101000000Z00'00'"[:room].ljust(room, b"0") + b")"

    return _DATE.sub(same, content)
