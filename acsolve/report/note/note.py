"""The note of a circuit: gathered once, written in any of its forms."""

from __future__ import annotations

import datetime as dt
import re
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from acsolve.errors import AnalysisError, Diagnostic
from acsolve.report.note.facts import Facts
from acsolve.report.note.model import Document

ENDINGS = ("html", "md", "tex", "pdf", "json")


@dataclass(frozen=True, slots=True, eq=False)
class Note:
    """A design note. `document` is its content, whatever it is written in."""

    facts: Facts
    document: Document

    def __repr__(self) -> str:
        return f"Note({self.document.title!r}: {len(self.document.sections)} sections)"

    @property
    def problems(self) -> tuple[Diagnostic, ...]:
        """Why questions of the file have no answer; nothing where all are answered."""
        if not self.facts.chapters:
            return (
                Diagnostic(
                    code="question.no-pair",
                    message="the circuit has no two nodes to ask about",
                    hint="Put parts between nodes, such as in -- R1 -- out.",
                ),
            )
        found = (item for chapter in self.facts.chapters for item in chapter.problems)
        return tuple(dict.fromkeys(found))

    def html(self) -> str:
        """One page with MathML and inline SVG; no script, nothing fetched."""
        from acsolve.report.note.html import html_page

        return html_page(self.document)

    def markdown(self) -> str:
        """Markdown with formulas in TeX and pictures inside the text."""
        from acsolve.report.note.markdown import markdown_page

        return markdown_page(self.document)

    def latex(self) -> str:
        """A LaTeX document that compiles as it stands."""
        from acsolve.report.note.latex import latex_page

        return latex_page(self.document)

    def json(self) -> str:
        """Every number of the note."""
        from acsolve.report.note.json import note_json

        return note_json(self.facts)

    def content(self, ending: str) -> bytes:
        """The bytes of a file of that ending: html, md, tex, pdf or json.

        Raises
        ------
        AnalysisError
            [save.ending] none of these; [note.pdf] nothing here makes a PDF.
        """
        if ending == "pdf":
            from acsolve.report.note.pdf import pdf_bytes

            return pdf_bytes(self.document)
        forms = {"html": self.html, "md": self.markdown, "tex": self.latex, "json": self.json}
        if ending not in forms:
            raise AnalysisError(
                Diagnostic(
                    code="save.ending",
                    message=f"a note is not saved as .{ending}",
                    hint=f"The endings are {', '.join(ENDINGS)}.",
                )
            )
        return forms[ending]().encode("utf-8", "replace")

    def save(self, name: str | Path) -> None:
        """Write a file of the kind that its ending names.

        Raises
        ------
        AnalysisError
            [save.ending], [save.failed], [note.pdf].
        """
        from acsolve.report.save import ending, write_all

        write_all([(str(name), self.content(ending(str(name))))])

    def _repr_html_(self) -> str:
        from html import escape

        page = escape(self.html(), quote=True)
        return f'<iframe srcdoc="{page}" style="width:100%;height:40em;border:0"></iframe>'


def make_note(
    circuit: Any, version: str, *, changes: Sequence[str] = (), date: str | None = None
) -> Note:
    """The note of an `acsolve.Circuit`; the rest as `gather` takes it.

    Raises
    ------
    AnalysisError
        [option.value] the date is written as one, and there is no such day.
    """
    _check_date(date)
    from acsolve.report.note.build import build
    from acsolve.report.note.gather import gather

    facts = gather(circuit, version, changes=changes, date=date)
    return Note(facts, build(facts))


def _check_date(date: str | None) -> None:
    """Refuse a day that the calendar lacks; any other words are shown as they stand."""
    if date is None or not re.fullmatch(r"\d{4}-\d{2}-\d{2}", date):
        return
    try:
        dt.date.fromisoformat(date)
    except ValueError as error:
        raise AnalysisError(
            Diagnostic(
                code="option.value",
                message=f"there is no day {date}",
                hint="Write year, month and day, such as 2031-04-30, or words of your own.",
            )
        ) from error
