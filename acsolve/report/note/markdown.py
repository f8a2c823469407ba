"""The note as Markdown: formulas in TeX, pictures as SVG inside the text."""

from __future__ import annotations

import re
from base64 import b64encode
from typing import Any

from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tex import tex
from acsolve.report.note.formula.tree import width
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

_LINE = 70.0  # digits of a displayed line
_SPECIAL = re.compile(r"([\\`*_{}\[\]<>#$|~&!])")
_HEADS = {"caution": "Caution", "safety": "Safety", "note": "Note"}


def markdown_page(document: Document) -> str:
    """The page; the same document gives the same text."""
    page = environment(autoescape=False).get_template("note.md")
    return page.render(
        title=escape_markdown(document.title),
        subtitle=escape_markdown(document.subtitle),
        date=None if document.date is None else escape_markdown(document.date),
        sections=[
            (
                "#" * item.section.level,
                item.number,
                escape_markdown(item.section.title),
                [_block(block) for block in item.section.blocks],
            )
            for item in numbered(document.sections)
        ],
    )


def escape_markdown(text: str) -> str:
    """A text that every reader shows as it is, on one line."""
    safe = _SPECIAL.sub(r"\\\1", " ".join(text.split(" ")).replace("\n", " "))
    safe = safe.replace("\\<", "&lt;").replace("\\>", "&gt;").replace("\\&", "&amp;")
    return re.sub(r"^(\s*)(\d+)\.(?=\s)", r"\1\2\\.", re.sub(r"^(\s*)([-+=])", r"\1\\\2", safe))


def _words(words: Words) -> str:
    return "".join(
        f"${tex(item.node).strip()}$" if isinstance(item, Math) else escape_markdown(item)
        for item in words
    )


def _block(block: Block) -> dict[str, Any]:
    match block:
        case Paragraph():
            return {"kind": "text", "text": _words(block.words)}
        case Remark():
            return {"kind": "text", "text": f"> **{_HEADS[block.kind]}.** {_words(block.words)}"}
        case Formula():
            notes = block.notes or ((),) * len(block.lines)
            pairs = zip(block.lines, notes, strict=True)
            written = [(_formula(line), _words(note)) for line, note in pairs]
            texts = [text for pair in written for text in pair if text]
            return {"kind": "text", "text": "\n\n".join(texts)}
        case Table():
            return {"kind": "text", "text": _table(block)}
        case Picture():
            data = b64encode(ink_svg(block.ink, block.description, fixed=True).encode()).decode()
            caption = escape_markdown(block.caption)
            return {
                "kind": "text",
                "text": f"![{caption}](data:image/svg+xml;base64,{data})\n\n{caption}",
            }
        case Code():
            longest = max(map(len, re.findall("~+", block.text)), default=0)
            fence = "~" * max(3, longest + 1)
            return {"kind": "text", "text": f"{fence}text\n{block.text}\n{fence}"}


def _formula(line: Chunks) -> str:
    rows: list[list[str]] = [[]]
    used = 0.0
    for chunk in line:
        size = width(chunk)
        if rows[-1] and used + size > _LINE:
            rows.append([])
            used = 3.0
        rows[-1].append(tex(chunk).strip())
        used += size
    if len(rows) == 1:
        return f"$$\n{' '.join(rows[0])}\n$$"
    first, *rest = (" ".join(row) for row in rows)
    lines = [f"& {first}", *(rf"& \quad {row}" for row in rest)]
    body = " \\\\\n".join(lines)
    return f"$$\n\\begin{{aligned}}\n{body}\n\\end{{aligned}}\n$$"


def _table(block: Table) -> str:
    sides = {"left": ":---", "right": "---:"}
    rows = [
        _row([_words(words) for words in block.head]),
        _row([sides[side] for side in block.sides]),
        *(_row([_words(words) for words in row]) for row in block.rows),
    ]
    return "\n".join([f"*{escape_markdown(block.caption)}*", "", *rows])


def _row(cells: list[str]) -> str:
    return f"| {' | '.join(cells)} |"
