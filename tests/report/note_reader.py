"""Notes of the shipped circuits, made once, and small readers that judge their pages."""

from __future__ import annotations

import re
import subprocess
from functools import cache
from html.parser import HTMLParser
from pathlib import Path
from shutil import which

import acsolve

CIRCUITS = Path(__file__).parents[2] / "circuits"
NAMES = sorted(path.stem for path in CIRCUITS.glob("*.circuit"))

_VOID = {"meta", "br", "hr", "img", "link", "input"}
_ALONE = {"path", "rect"}  # of SVG, closed in their own tag


@cache
def note(name: str):
    """The note of a shipped circuit."""
    return acsolve.read(CIRCUITS / f"{name}.circuit").note()


class Page(HTMLParser):
    """What stands in an HTML page; tags must be closed in their order."""

    def __init__(self, text: str) -> None:
        super().__init__()
        self.tags: list[str] = []
        self.ids: list[str] = []
        self.addresses: list[str] = []
        self.words: list[str] = []
        self._open: list[str] = []
        self.feed(text)
        self.close()
        assert self._open == []

    def handle_starttag(self, tag, attrs):
        """Keep tag, ids and addresses."""
        self.tags.append(tag)
        for key, value in attrs:
            assert not key.startswith("on"), "no script in attributes"
            if key == "id":
                self.ids.append(value)
            if key in ("src", "href", "xlink:href", "action", "data"):
                self.addresses.append(value)
        if tag not in _VOID:
            self._open.append(tag)

    def handle_startendtag(self, tag, attrs):  # noqa: ARG002
        """Only drawn shapes close themselves."""
        assert tag in _ALONE, tag
        self.tags.append(tag)

    def handle_endtag(self, tag):
        """The innermost open tag must be the one that closes."""
        assert self._open[-1:] == [tag], f"</{tag}> closes {self._open[-1:]}"
        self._open.pop()

    def handle_data(self, data):
        """Keep what is shown."""
        if "style" not in self._open:
            self.words.append(data)

    @property
    def text(self) -> str:
        """The words of the page."""
        return " ".join(" ".join(self.words).split())


def latex_problems(text: str) -> list[str]:
    """Braces, environments and mathematics that do not close, signs that TeX would not take."""
    problems = []
    bare = re.sub(r"\\[\\{}$&#%_]", "", re.sub(r"(?<!\\)%[^\n]*", "", text))
    depth = 0
    for sign in bare:
        depth += (sign == "{") - (sign == "}")
        if depth < 0:
            problems.append("a brace closes too often")
            break
    if depth > 0:
        problems.append("a brace stays open")
    stack: list[str] = []
    body = re.sub(r"\\newenvironment\{\w+\}.*", "", text)
    for word, name in re.findall(r"\\(begin|end)\{(\w+)\}", body):
        if word == "begin":
            stack.append(name)
        elif not stack or stack.pop() != name:
            problems.append(f"{name} ends where it did not begin")
    problems += [f"{name} does not end" for name in stack]
    if bare.count("$") % 2:
        problems.append("mathematics stays open")
    problems += [f"U+{ord(x):04X}" for x in sorted(set(text)) if ord(x) > 0xFF]
    return problems


def typeset(text: str, folder: Path) -> float:
    """Compile LaTeX; points by which the worst line sticks out of its column."""
    program = which("pdflatex")
    assert program is not None, "asked for where TeX is installed"
    (folder / "note.tex").write_text(text, encoding="utf-8")
    flags = ["-interaction=batchmode", "-halt-on-error", "-no-shell-escape"]
    done = subprocess.run(  # noqa: S603 - a fixed command
        [program, *flags, "note.tex"], cwd=folder, capture_output=True, timeout=60, check=False
    )
    log = (folder / "note.log").read_text(encoding="utf-8", errors="replace")
    assert done.returncode == 0, log[-2000:]
    sizes = re.findall(r"Overfull \\hbox \(([\d.]+)pt", log)
    return max(map(float, sizes), default=0.0)
