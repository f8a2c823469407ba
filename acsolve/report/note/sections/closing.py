"""What was checked, and how the note is made again."""

from __future__ import annotations

from hashlib import sha256

from acsolve.report.entry import question_text
from acsolve.report.note.facts import Chapter, Facts
from acsolve.report.note.model import Block, Code, Section, Table, Words, cell, say
from acsolve.report.note.wording import ratio

_SMALLEST = 1e-30  # below it two numbers agree to more digits than anyone counts


def checks(facts: Facts) -> Section:
    """Closed forms against independent numeric solutions, and the sweep's own estimate."""
    rows = [row for chapter in facts.chapters for row in _rows(chapter)]
    blocks: list[Block] = []
    if rows:
        blocks += [
            say(
                "Each closed form was compared with an independent numeric solution: the classical "
                "nodal equations, solved dense in ball arithmetic at complex frequencies (and at "
                "random values where parts are symbols)."
            ),
            Table(
                head=(("What",), ("Points",), ("Largest relative difference",)),
                rows=tuple(rows),
                sides=("left", "right", "right"),
                caption="Checks.",
            ),
        ]
    errors = [float(item.table.error.max()) for item in facts.chapters if item.table is not None]
    if errors:
        blocks.append(
            say(
                "Numbers over frequency come from a solution of their own; the largest relative "
                f"error estimated at the tabulated points is {_difference(max(errors))}."
            )
        )
    for chapter in facts.chapters:
        for what, reason in chapter.refused:
            blocks.append(
                say(f"No answer for {what} of the {question_text(chapter.ask)}: {reason}.")
            )
    return Section(title="What was checked", blocks=tuple(blocks) or (say("Nothing was asked."),))


def _difference(value: float) -> str:
    if value and value < _SMALLEST:
        return f"below {ratio(_SMALLEST)}"
    return ratio(value, 2)


def _rows(chapter: Chapter) -> list[tuple[Words, ...]]:
    words = question_text(chapter.ask)
    found = []
    if chapter.transfer is not None and chapter.transfer.form.checked is not None:
        found.append((f"Closed form, {words}", chapter.transfer.form.checked))
    if chapter.formula is not None and chapter.formula.checked is not None:
        same = chapter.transfer is not None and chapter.transfer.form is chapter.formula
        if not same:
            found.append((f"Closed form over symbols, {words}", chapter.formula.checked))
    if chapter.steps is not None and chapter.steps.checked is not None:
        found.append((f"Named steps, {words}", chapter.steps.checked))
    if chapter.in_time and chapter.in_time[0].checked is not None:
        found.append((f"Modes in time, {words}", chapter.in_time[0].checked))
    if chapter.two_port is not None:
        for name, matrix in chapter.two_port.forms.items():
            listed = [form.checked for row in matrix or () for form in row if form.checked]
            if listed:
                worst = max(listed, key=lambda item: item.max_relative_error)
                found.append((f"{'ABCD' if name == 'abcd' else name} parameters", worst))
    return [
        (cell(text), cell(str(item.points)), cell(_difference(item.max_relative_error)))
        for text, item in found
    ]


def origin(facts: Facts) -> Section:
    """Version, hash and text of the input: the note can be made again from them."""
    blocks: list[Block] = [say(f"Made by acsolve {facts.version}.")]
    if facts.text is not None:
        blocks += [
            say(
                f"Input {facts.name}, SHA-256 of its text (UTF-8, line ends as \\n):",
            ),
            Code(text=input_hash(facts.text)),
        ]
        options = "".join(f" --let {_quoted(change)}" for change in facts.changes)
        if facts.variant is not None:
            options += f" --variant {_quoted(facts.variant)}"
        if facts.date is not None:
            options += f" --date {_quoted(facts.date)}"
        blocks += [
            say("The same version makes the same note, byte for byte, from this command:"),
            Code(text=f"acsolve note {_quoted(facts.name)}{options}"),
            say("and this text:"),
            Code(text=facts.text.rstrip("\n")),
        ]
    return Section(title="How to make this note again", blocks=tuple(blocks))


def input_hash(text: str) -> str:
    """The SHA-256 of a file's text, as 64 hexadecimal digits."""
    return sha256(text.encode("utf-8", "surrogatepass")).hexdigest()


def _quoted(text: str) -> str:
    from shlex import quote

    return quote(text)
