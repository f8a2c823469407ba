"""What the answers take for granted."""

from __future__ import annotations

from acsolve.circuit.netlist import Netlist, Part
from acsolve.report.entry import question_text
from acsolve.report.note.facts import Facts
from acsolve.report.note.model import Block, Inline, Section, say
from acsolve.report.note.wording import name

_MOST = 6  # op-amps that are named
_DRIVES = {
    "voltage-ratio": "an ideal voltage source drives, the output is left open",
    "current-ratio": "an ideal current source drives, the output is shorted or an ammeter",
    "transimpedance": "an ideal current source drives, the output is left open",
    "transadmittance": "an ideal voltage source drives, the output is shorted or an ammeter",
    "impedance": "an ideal source drives the pair, and the impedance is its voltage over the "
    "current that enters, whichever of the two is given",
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
        *_values(facts.netlist),
    ]
    for chapter in facts.chapters:
        words = question_text(chapter.ask)
        drive = _DRIVES[chapter.ask.quantity]
        blocks.append(say(f"{words[0].upper()}{words[1:]}: {drive}."))
    if any(chapter.ask.source is not None for chapter in facts.chapters) and _has_sources(facts):
        blocks.append(say("Sources of the file that do not drive are set to zero."))
    kinds = {part.kind for part in facts.netlist.parts}
    ideal = [part for part in facts.netlist.parts if part.kind == "opamp" and _is_ideal(part)]
    if ideal:
        names: list[Inline] = []
        for part in ideal[:_MOST]:
            names += [", " if names else "", name(part.name)]
        if len(ideal) > _MOST:
            names = ["Op-amps without stated gain"]
        verbs = ("holds its", "takes") if len(ideal) == 1 else ("hold their", "take")
        blocks.append(say(*names, f" {verbs[0]} inputs equal and {verbs[1]} no current: ideal."))
    if "transformer" in kinds:
        blocks.append(say("Transformers are ideal but for what the file states beside them."))
    return Section(title="Assumptions", blocks=tuple(dict.fromkeys(blocks)))


def _values(netlist: Netlist) -> list[Block]:
    """Whether numbers stand for the parts, and what their tolerances do."""
    values = [value for part in netlist.parts for value in part.values.values()]
    if not any(value.expression is not None for value in values):
        return [say("The parts are symbols: what is told holds for all positive values.")]
    if any(value.tolerance is not None for value in values):
        return [
            say(
                "Values are nominal; tolerances are listed with the parts and do not enter the "
                "numbers."
            )
        ]
    return [say("Values are nominal.")]


def _is_ideal(part: Part) -> bool:
    return not {"open_loop_gain", "gain_bandwidth"} & part.values.keys()


def _has_sources(facts: Facts) -> bool:
    return any(part.kind.endswith("_source") for part in facts.netlist.parts)
