"""What the page writers share: numbered headings and the templates of the package."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

from acsolve.report.note.model import Section

if TYPE_CHECKING:
    from jinja2 import Environment


@dataclass(frozen=True, slots=True)
class Numbered:
    """A section with its number and a name to point at."""

    number: str
    anchor: str
    section: Section


def numbered(sections: Sequence[Section]) -> tuple[Numbered, ...]:
    """Sections with numbers: 1, 2, 2.1, …"""
    found, upper, lower = [], 0, 0
    for section in sections:
        if section.level == 2:
            upper, lower = upper + 1, 0
            text = str(upper)
        else:
            lower += 1
            text = f"{upper}.{lower}"
        found.append(Numbered(text, f"part-{text.replace('.', '-')}", section))
    return tuple(found)


def environment(*, autoescape: bool) -> Environment:
    """The templates that travel with the package; LaTeX's braces need marks of their own."""
    from jinja2 import Environment, PackageLoader, StrictUndefined

    return Environment(
        loader=PackageLoader("acsolve.report.note", "templates"),
        autoescape=autoescape,  # noqa: S701 - off only where the page is no HTML
        undefined=StrictUndefined,
        trim_blocks=True,
        lstrip_blocks=True,
        keep_trailing_newline=True,
        block_start_string="<%",
        block_end_string="%>",
        variable_start_string="<<",
        variable_end_string=">>",
        comment_start_string="<#",
        comment_end_string="#>",
    )
