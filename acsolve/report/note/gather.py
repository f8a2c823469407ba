"""From a circuit to the facts of its note: every question asked once, nothing solved here."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from typing import Any

from acsolve.errors import AcsolveError
from acsolve.report.entry import pair_text
from acsolve.report.note.chapters import Asked, chapters
from acsolve.report.note.facts import Facts, Unanswered
from acsolve.report.note.values import number_of
from acsolve.report.note.wording import SPACE, quantity, ratio

_LATER = ("noise", "tolerance")


def gather(
    circuit: Any, version: str, *, changes: Sequence[str] = (), date: str | None = None
) -> Facts:
    """The facts of a circuit's note.

    Parameters
    ----------
    circuit : an `acsolve.Circuit`; its own methods give every answer.
    version : of this program.
    changes : what was set besides the file, as `NAME=VALUE`.
    date : shown in the note as it stands; none is made up.
    """
    netlist = circuit.netlist
    drawing, undrawn = _drawn(circuit)
    source = netlist.source
    asked = _asked(circuit)
    return Facts(
        netlist=netlist,
        title=circuit.title or "Untitled circuit",
        variant=circuit.variant,
        cautions=tuple(circuit.cautions),
        warnings=_warnings(circuit),
        chapters=chapters(circuit, asked),
        drawing=drawing,
        undrawn=undrawn,
        name="" if source is None else source.name.replace("\\", "/").rsplit("/", 1)[-1],
        text=None if source is None else source.text,
        version=version,
        changes=tuple(changes),
        date=date,
        own_questions=any(item.kind not in _LATER for item in circuit.questions),
        unanswered=tuple(_unanswered(circuit)),
    )


def _warnings(circuit: Any) -> tuple[str, ...]:
    found = [*circuit.warnings, *(i for i in circuit.problems() if i.severity != "note")]
    return tuple(dict.fromkeys(item.message for item in found))


def _unanswered(circuit: Any) -> Iterable[Unanswered]:
    """Questions about noise and tolerance, and goals: named, since no command answers them."""
    found = [(item.kind, item) for item in circuit.questions if item.kind in _LATER]
    found += [("goal", item) for item in circuit.netlist.goals]
    for kind, item in found:
        words = kind if item.source is None else f"{kind} from {pair_text(item.source)}"
        words += f" to {pair_text(item.target)}"
        if item.band is not None:
            words += _band(circuit, item.band)
        if kind == "goal":
            limit = number_of(item.level, circuit.netlist)
            words += f", {item.side}" + ("" if limit is None else f" {ratio(limit)}{SPACE}dB")
        yield Unanswered(kind=kind, words=words)


def _band(circuit: Any, band: Any) -> str:
    try:
        low, high = circuit.band(band)
    except AcsolveError:  # an edge without a value is told as nothing
        return ""
    return f", {quantity(low, 'Hz')} to {quantity(high, 'Hz')}"


def _drawn(circuit: Any) -> tuple[Any, str | None]:
    try:
        return circuit.drawing(), None
    except AcsolveError as error:
        return None, error.message


def _asked(circuit: Any) -> list[Asked]:
    """The file's questions, those about one pair together; or sensible ones."""
    groups: dict[Any, Asked] = {}
    for question in circuit.questions:
        if question.kind in _LATER:
            continue
        path = circuit.asked(question)
        ports = question.kind == "two-port"
        key = (path.ask, (question.reference, question.band) if ports else None)
        known = groups.get(key, Asked(path, ()))
        groups[key] = Asked(path, (*known.questions, question))
    if groups:
        return list(groups.values())
    return [Asked(path, (None,)) for path in _sensible(circuit)]


def _sensible(circuit: Any) -> Iterable[Any]:
    """Where nothing is asked: between two ports, else by own sources, else first to last node."""
    ports = list(circuit.netlist.ports)
    nodes = [node for node in circuit.nodes if node != "gnd"]
    sources = [part for part in circuit.netlist.parts if part.kind.endswith("_source")]
    if len(ports) >= 2:
        return [circuit.path(ports[0], ports[1])]
    if ports:
        return [circuit.looking_into(ports[0])]
    if sources and nodes:
        return [circuit.path(None, nodes[-1])]
    if len(nodes) >= 2:
        return [circuit.path(nodes[0], nodes[-1])]
    return [circuit.looking_into(nodes[0])] if nodes else []
