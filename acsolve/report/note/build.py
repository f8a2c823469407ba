"""From the facts of a note to its document: one builder for each section, in a table."""

from __future__ import annotations

from collections.abc import Callable

from acsolve.report.entry import pair_text, question_text
from acsolve.report.note.facts import Chapter, Facts
from acsolve.report.note.model import Block, Document, Remark, Section, say
from acsolve.report.note.named import numbered_names
from acsolve.report.note.sections import (
    assumptions,
    closing,
    derivation,
    loading,
    opening,
    parts,
    response,
    result,
    roots,
    summary,
    times,
    two_port,
)

#: The parts of a chapter in the order in which a reviewer reads them.
CHAPTER: tuple[Callable[[Chapter], Section | None], ...] = (
    derivation.derivation,
    result.result,
    two_port.two_port,
    result.limits,
    roots.roots,
    loading.loading,
    response.response,
    times.step,
    response.numbers,
)
_BEFORE: tuple[Callable[[Facts], Section | None], ...] = (
    opening.purpose,
    opening.schematic,
    summary.results,
    parts.parts,
    assumptions.assumptions,
)
_AFTER = (closing.checks, closing.origin)


def build(facts: Facts) -> Document:
    """The document of a note."""
    sections: list[Section] = [found for make in _BEFORE if (found := make(facts)) is not None]
    for chapter in facts.chapters:
        sections += _chapter(chapter)
    sections += [make(facts) for make in _AFTER]
    variant = "" if facts.variant is None else f", variant “{facts.variant}”"
    return Document(
        title=facts.title,
        subtitle=f"Design note{variant}",
        date=facts.date,
        sections=numbered_names(sections),
    )


def _chapter(chapter: Chapter) -> list[Section]:
    words = question_text(chapter.ask)
    if chapter.ask.quantity == "two-port":
        source = chapter.ask.source
        assert source is not None, "a two-port has two pairs"
        words = (
            f"two-port parameters between {pair_text(source)} and {pair_text(chapter.ask.target)}"
        )
    inner = [found for make in CHAPTER if (found := make(chapter)) is not None]
    blocks: tuple[Block, ...] = tuple(
        Remark(kind="note", words=(f"No answer: {item.message}.",)) for item in chapter.problems
    )
    if not inner and not blocks:
        blocks = (say("There is no answer; the reasons stand with the checks."),)
    return [Section(title=f"{words[0].upper()}{words[1:]}", blocks=blocks), *inner]
