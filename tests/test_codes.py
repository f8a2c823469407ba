"""The page of messages lists every code, and every listed code is raised somewhere."""

from __future__ import annotations

import re
from pathlib import Path
from typing import get_args

from acsolve.codes import Code

ROOT = Path(__file__).parents[1]
PAGE = (ROOT / "grammar" / "errors.md").read_text(encoding="utf-8")
LISTED = set(re.findall(r"^### (\S+)$|^\| `(\S+)` \|", PAGE, re.MULTILINE))


def test_page_is_complete() -> None:
    """The page lists exactly the codes that a diagnostic can carry."""
    assert {first or second for first, second in LISTED} == set(get_args(Code))


def test_no_code_is_idle() -> None:
    """Every code is raised by some part of the program."""
    texts = [
        path.read_text(encoding="utf-8")
        for path in (ROOT / "acsolve").rglob("*.py")
        if path.name != "codes.py"
    ]
    idle = [code for code in get_args(Code) if not any(f'"{code}"' in text for text in texts)]
    assert not idle
