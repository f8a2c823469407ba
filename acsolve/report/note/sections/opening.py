"""The opening: what the note is for, what to be careful of, the schematic."""

from __future__ import annotations

from acsolve.report.note.facts import Facts
from acsolve.report.note.ink.schematic import schematic_ink
from acsolve.report.note.model import Block, Picture, Remark, Section, say
from acsolve.report.note.safety import dangers
from acsolve.report.note.wording import count, listed, sentence

_KINDS = {
    "transfer": "transfer function",
    "impedance": "impedance",
    "cutoff": "cutoffs",
    "sweep": "response over frequency",
    "step": "step response",
    "two-port": "two-port parameters",
}


def purpose(facts: Facts) -> Section:
    """The file's own words, its cautions, and what this note answers."""
    blocks: list[Block] = [say(text) for text in _paragraphs(facts.netlist.remarks)]
    kinds = list(dict.fromkeys(kind for item in facts.chapters for kind in item.kinds))
    if not facts.chapters:
        blocks.append(say("The circuit has no two nodes to ask about; this note lists its parts."))
    elif facts.own_questions:
        asked = listed([_KINDS[kind] for kind in kinds])
        blocks.append(say(f"This note answers what the circuit file asks: {asked}."))
    else:
        blocks.append(
            say(
                "The circuit file asks nothing that this version answers; this note answers the "
                "usual questions."
            )
        )
    if facts.variant is not None:
        blocks.append(say(f"It speaks of the circuit’s variant “{facts.variant}”."))
    if facts.changes:
        blocks.append(say(f"These values differ from the file: {', '.join(facts.changes)}."))
    if facts.unanswered:
        words = "; ".join(item.words for item in facts.unanswered)
        blocks.append(
            Remark(kind="note", words=(f"The file also asks, not answered in this note: {words}.",))
        )
    blocks += [Remark(kind="caution", words=(text,)) for text in facts.cautions]
    blocks += [Remark(kind="safety", words=(text,)) for text in dangers(facts)]
    blocks += [Remark(kind="note", words=(sentence(text),)) for text in facts.warnings]
    return Section(title="Purpose", blocks=tuple(blocks))


def _paragraphs(remarks: tuple[str, ...]) -> list[str]:
    """The comment lines at the head of the file, put together until a blank one."""
    found: list[list[str]] = [[]]
    for line in remarks:
        if line.strip():
            found[-1].append(line.strip())
        else:
            found.append([])
    return [" ".join(group) for group in found if group]


def schematic(facts: Facts) -> Section | None:
    """The circuit drawn from the file alone."""
    drawing = facts.drawing
    if drawing is None:
        words = f"The circuit could not be drawn: {facts.undrawn}." if facts.undrawn else ""
        return Section(title="Schematic", blocks=(say(words),)) if words else None
    hidden = len(drawing.hidden)
    more = (
        f" {count(hidden, 'part')} stand in rows or blocks that are drawn once." if hidden else ""
    )
    from acsolve.report.drawing.svg import description

    return Section(
        title="Schematic",
        blocks=(
            Picture(
                ink=schematic_ink(drawing),
                caption=f"The circuit, drawn from its file.{more}",
                description=description(drawing.sheet),
            ),
        ),
    )
