"""Every code of the text layer is documented, and each example causes its code."""

from __future__ import annotations

import re
from pathlib import Path
from typing import get_args

import pytest

from acsolve.codes import Code
from acsolve.errors import AcsolveError
from acsolve.text import parse
from tests.text.test_limits import BEYOND

ROOT = Path(__file__).parents[2]
PAGE = (ROOT / "grammar" / "errors.md").read_text(encoding="utf-8")
LAYER = sorted((ROOT / "acsolve" / "text").glob("*.py"))
SECTIONS = dict(re.findall(r"^### (\S+)\n(.*?)(?=^##|\Z)", PAGE, re.MULTILINE | re.DOTALL))
EXAMPLES = {
    code: example[1]
    for code, section in SECTIONS.items()
    if (example := re.search(r"```circuit\n(.*?)```", section, re.DOTALL))
}
FILE_CODES = {code for code in get_args(Code) if code.startswith("file.")}


def raised_here() -> set[str]:
    """Every code that stands as a text in the layer's own files."""
    found: set[str] = set()
    for path in LAYER:
        texts = set(re.findall(r'"([a-z]+\.[a-z-]+)"', path.read_text(encoding="utf-8")))
        found |= texts & set(get_args(Code))
    return found


def codes_of(text: str) -> list[str]:
    """The codes that a text causes, warnings included where nothing is wrong."""
    try:
        return [item.code for item in parse(text).warnings]
    except AcsolveError as error:
        return [item.code for item in error.diagnostics]


def test_every_code_has_its_section():
    """The page holds exactly the codes that this layer raises."""
    assert set(SECTIONS) == raised_here()


@pytest.mark.parametrize("code", sorted(EXAMPLES))
def test_each_example_causes_its_code(code):
    """The example of a section causes the section's code and no other."""
    assert codes_of(EXAMPLES[code]) == [code]


def test_codes_without_an_example_are_tested_elsewhere():
    """A section has an example, or its code belongs to files or to sizes too long to print."""
    beyond = {*BEYOND, "limit.nodes"}
    assert set(SECTIONS) - set(EXAMPLES) == FILE_CODES | (beyond - set(EXAMPLES))


def test_every_section_says_something():
    """A section has a sentence of its own."""
    for code, section in SECTIONS.items():
        assert section.strip().split("\n")[0].endswith("."), code
