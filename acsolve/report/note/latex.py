"""The note as LaTeX that compiles as it stands: article, four packages of every installation."""

from __future__ import annotations

from acsolve.report.drawing.name import split_name
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tex import tex
from acsolve.report.note.formula.tree import Node, Row, Symbol, width
from acsolve.report.note.ink.latex import ink_latex
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
from acsolve.report.note.tex_escape import escape_code, escape_tex

_LINE = 440.0  # points of a line that columns may share
_LONG = 16.0  # digits of a formula in words that may be wider than its column
_GAP = 12.0
_HEADS = {"caution": "Caution", "safety": "Safety", "note": "Note"}
_COMMANDS = {2: "section", 3: "subsection"}


def latex_page(document: Document) -> str:
    """The page; the same document gives the same text."""
    page = environment(autoescape=False).get_template("note.tex")
    return page.render(
        title=escape_tex(document.title),
        subtitle=escape_tex(document.subtitle),
        date=None if document.date is None else escape_tex(document.date),
        sections=[
            (
                _COMMANDS[item.section.level],
                escape_tex(item.section.title),
                [_block(block) for block in item.section.blocks],
            )
            for item in numbered(document.sections)
        ],
    )


def _words(words: Words) -> str:
    return "".join(
        _inline(item.node) if isinstance(item, Math) else escape_tex(item) for item in words
    )


def _inline(node: Node) -> str:
    """A formula in running words; a name as long as a line is made to fit."""
    text = tex(node).strip()
    return rf"\notepiece{{{text}}}" if width(node) > _LONG else f"${text}$"


def _block(block: Block) -> str:
    match block:
        case Paragraph():
            return _words(block.words)
        case Remark():
            return rf"\noteremark{{{_HEADS[block.kind]}}}{{{_words(block.words)}}}"
        case Formula():
            notes = block.notes or ((),) * len(block.lines)
            return "\n".join(map(_formula, block.lines, notes))
        case Table():
            return _table(block)
        case Picture():
            return (
                f"\\begin{{center}}\n{ink_latex(block.ink)}\n\n"
                f"\\notecaption{{{escape_tex(block.caption)}}}\n\\end{{center}}"
            )
        case Code():
            return f"\\begin{{notecode}}\n{escape_code(block.text)}\n\\end{{notecode}}"


def _formula(line: Chunks, note: Words) -> str:
    chunks = " ".join(rf"\notepiece{{{tex(chunk).strip()}}}" for chunk in line)
    meaning = rf" \quad {{\small {_words(note)}}}" if note else ""
    return rf"\noteformula{{{chunks}{meaning}}}"


def _table(block: Table) -> str:
    widths = _widths(block)
    columns = "".join(
        rf">{{\ragged{'right' if side == 'left' else 'left'}\arraybackslash}}p{{{size:.0f}pt}}"
        for side, size in zip(block.sides, widths, strict=True)
    )
    head = " & ".join(rf"\textbf{{{_words(words)}}}" for words in block.head)
    rows = [" & ".join(_words(words) for words in row) + r" \\" for row in block.rows]
    body = "\n".join(rows)
    return (
        f"\\notecaption{{{escape_tex(block.caption)}}}\n"
        f"\\begin{{longtable}}[l]{{@{{}}{columns}@{{}}}}\n{head} \\\\ \\hline\n\\endhead\n"
        f"{body}\n\\end{{longtable}}"
    )


def _widths(block: Table) -> list[float]:
    """Columns share the line by what they hold; none gets more than it needs."""
    rows = [block.head, *block.rows]
    needs = [
        max(min(34.0, _length(row[place])) for row in rows) * 6.2 + 14
        for place in range(len(block.head))
    ]
    room = _LINE - _GAP * (len(needs) - 1)
    share = min(1.0, room / sum(needs))
    return [need * share for need in needs]


def _length(words: Words) -> float:
    return sum(_math_length(item.node) if isinstance(item, Math) else len(item) for item in words)


def _math_length(node: Node) -> float:
    if isinstance(node, Symbol):
        return float(sum(map(len, split_name(node.name))))
    return sum(map(_math_length, node.items)) if isinstance(node, Row) else width(node)
