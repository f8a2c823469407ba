"""What the answers take for granted."""

from __future__ import annotations

from acsolve.report.entry import question_text
from acsolve.report.note.facts import Facts
from acsolve.report.note.model import Block, Section, say

_DRIVES = {
    "voltage-ratio": "an ideal voltage source drives, the output is left open",
    "current-ratio": "an ideal current source drives, the output is shorted or an ammeter",
    "transimpedance": "an ideal current source drives, the output is left open",
    "transadmittance": "an ideal voltage source drives, the output is shorted or an ammeter",
    "impedance": "an ideal current source drives the pair that is looked into",
    "response": "the file’s own sources drive",
    "two-port": "both pairs are ports of an otherwise untouched network",
}


def assumptions(facts: Facts) -> Section:
    """The model, the drive and what stands at both ends."""
    blocks: list[Block] = [
        say(
            "This note describes an ideal linear model: what a part does beyond its stated values "
            "(saturation, drift, stray coupling, noise, breakdown) is not in it."
        ),
        say(
            "Values are nominal; tolerances are listed with the parts and do not enter the numbers."
        ),
    ]
    for chapter in facts.chapters:
        words = question_text(chapter.ask)
        drive = _DRIVES[chapter.ask.quantity]
        blocks.append(say(f"{words[0].upper()}{words[1:]}: {drive}."))
    if any(chapter.ask.source is not None for chapter in facts.chapters) and _has_sources(facts):
        blocks.append(say("Sources of the file that do not drive are set to zero."))
    kinds = {part.kind for part in facts.netlist.parts}
    if "opamp" in kinds:
        blocks.append(
            say("Op-amps without stated gain hold their inputs equal and take no current.")
        )
    if "transformer" in kinds:
        blocks.append(say("Transformers are ideal but for what the file states beside them."))
    return Section(title="Assumptions", blocks=tuple(dict.fromkeys(blocks)))


def _has_sources(facts: Facts) -> bool:
    return any(part.kind.endswith("_source") for part in facts.netlist.parts)
