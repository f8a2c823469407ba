"""Every number of a note as JSON: the answers under their own keys, the tables besides."""

from __future__ import annotations

import json
from typing import Any

from acsolve.report.entry import Entry, Heading
from acsolve.report.json import FORMAT, answer, complex_number, numbers
from acsolve.report.note.facts import Chapter, Facts
from acsolve.report.note.safety import dangers
from acsolve.report.note.sections.closing import input_hash
from acsolve.report.note.values import number_of, tolerance_numbers


def note_json(facts: Facts) -> str:
    """One JSON document that ends with a line end."""
    heading = Heading(title=facts.title, variant=facts.variant, cautions=facts.cautions)
    entries = [entry for chapter in facts.chapters for entry in _entries(chapter, heading)]
    document = {
        "format": FORMAT,
        "answers": [answer(entry) for entry in entries],
        "note": {
            "title": facts.title,
            "variant": facts.variant,
            "cautions": list(facts.cautions),
            "safety": list(dangers(facts)),
            "parts": _parts(facts),
            "loading": [item for chapter in facts.chapters for item in _loading(chapter)],
            "refused": [
                {"what": what, "reason": reason}
                for chapter in facts.chapters
                for what, reason in chapter.refused
            ],
            "not_answered": [item.kind for item in facts.unanswered],
            "not_answered_questions": [item.words for item in facts.unanswered],
            "file": facts.name,
            "sha256": None if facts.text is None else input_hash(facts.text),
            "version": facts.version,
            "changes": list(facts.changes),
        },
    }
    return json.dumps(document, allow_nan=False, ensure_ascii=False) + "\n"


def _entries(chapter: Chapter, heading: Heading) -> list[Entry]:
    """The answers of a chapter in the order of the note."""
    ask, found = chapter.ask, []
    if chapter.transfer is not None:
        found.append(
            Entry(
                kind="impedance" if ask.quantity == "impedance" else "transfer",
                heading=heading,
                ask=ask,
                transfer=chapter.transfer,
                roots=chapter.poles,
            )
        )
    if chapter.two_port is not None:
        found.append(Entry(kind="two-port", heading=heading, ask=ask, two_port=chapter.two_port))
    found += [
        Entry(kind="cutoff", heading=heading, ask=ask, cutoff=item) for item in chapter.cutoffs
    ]
    found += [Entry(kind="step", heading=heading, ask=ask, step=item) for item in chapter.in_time]
    if chapter.table is not None:
        found.append(Entry(kind="sweep", heading=heading, ask=ask, sweep=chapter.table))
    return found


def _parts(facts: Facts) -> list[dict[str, Any]]:
    """Parts with their values in SI units; tolerances as the file states them."""
    netlist = facts.netlist
    found = []
    for part in netlist.parts:
        limits = {
            attribute: list(pair)
            for attribute, value in part.values.items()
            if (pair := tolerance_numbers(value, netlist)) is not None
        }
        found.append(
            {
                "name": part.name,
                "kind": part.kind,
                "nodes": list(part.nodes),
                "values": {key: number_of(value, netlist) for key, value in part.values.items()},
                "tolerances": limits,
            }
        )
    return found


def _loading(chapter: Chapter) -> list[dict[str, Any]]:
    found, table = chapter.loading, chapter.table
    if found is None or table is None:
        return []
    sides = {"z_in": found.source_side, "z_out": found.load_side}
    return [
        {
            "from": None if chapter.ask.source is None else list(chapter.ask.source),
            "to": list(chapter.ask.target),
            "quantity": chapter.ask.quantity,
            "hertz": numbers(table.hertz.tolist()),
            **{
                key: None if side is None else [complex_number(complex(value)) for value in side]
                for key, side in sides.items()
            },
            "ends": [
                {"part": item.name, "role": item.role, "gain_db": numbers(item.gain_db.tolist())}
                for item in found.ends
            ],
        }
    ]
