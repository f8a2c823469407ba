"""The note as one HTML page: MathML, inline SVG, no script, nothing fetched."""

from __future__ import annotations

from typing import Any

from acsolve.report.note.formula.mathml import math_element
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.ink.svg import ink_svg
from acsolve.report.note.model import (
    Block,
    Code,
    Document,
    Formula,
    Math,
    Paragraph,
    Picture,
    Remark,
    Table,
    Words,
)
from acsolve.report.note.pages import environment, numbered

_LARGE = 5  # columns from which rows are stacked on a narrow screen
_WHOLE = 16  # rows of a table that no page break parts from its caption
_HEADS = {"caution": "Caution", "safety": "Safety", "note": "Note"}


def html_page(document: Document) -> str:
    """The page; the same document gives the same text."""
    page = environment(autoescape=True).get_template("note.html")
    return page.render(
        document=document,
        sections=[
            (item, [_block(block) for block in item.section.blocks])
            for item in numbered(document.sections)
        ],
    )


def _words(words: Words) -> Any:
    from markupsafe import Markup, escape

    return Markup("").join(
        Markup(math_element(item.node)) if isinstance(item, Math) else escape(item)  # noqa: S704 - our own elements, names escaped
        for item in words
    )


def _plain(words: Words) -> str:
    """Words without mark-up, for labels of stacked rows."""
    from acsolve.report.drawing.name import split_name
    from acsolve.report.note.formula.tree import Symbol

    found = ""
    for item in words:
        if isinstance(item, Math):
            found += " ".join(split_name(item.node.name)) if isinstance(item.node, Symbol) else ""
        else:
            found += item
    return found


def _block(block: Block) -> dict[str, Any]:
    from markupsafe import Markup

    match block:
        case Paragraph():
            return {"kind": "paragraph", "words": _words(block.words)}
        case Remark():
            return {
                "kind": "remark",
                "class": block.kind,
                "head": _HEADS[block.kind],
                "words": _words(block.words),
            }
        case Formula():
            notes = [_words(words) for words in block.notes] or [None] * len(block.lines)
            written = [_line(line) for line in block.lines]
            return {"kind": "formula", "lines": list(zip(written, notes, strict=True))}
        case Table():
            heads = [_plain(words) for words in block.head]
            return {
                "kind": "table",
                "class": "stacked" if len(block.head) >= _LARGE else "",
                "whole": len(block.rows) <= _WHOLE,
                "caption": block.caption,
                "head": list(zip(block.sides, map(_words, block.head), strict=True)),
                "rows": [
                    list(zip(block.sides, heads, map(_words, row), strict=True))
                    for row in block.rows
                ],
            }
        case Picture():
            drawn = Markup(ink_svg(block.ink, block.description))  # noqa: S704 - texts are escaped
            return {"kind": "picture", "drawn": drawn, "caption": block.caption}
        case Code():
            return {"kind": "code", "text": block.text}


def _line(line: Chunks) -> list[Any]:
    from markupsafe import Markup

    return [Markup(math_element(chunk, display=True)) for chunk in line]  # noqa: S704 - as above
