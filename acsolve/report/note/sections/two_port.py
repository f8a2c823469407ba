"""Two-port parameters: each set in closed form, the network's laws, numbers over frequency."""

from __future__ import annotations

from typing import Any

from acsolve.circuit.expression import Number
from acsolve.report.note.facts import Chapter
from acsolve.report.note.formula.split import Chunks
from acsolve.report.note.formula.tree import Symbol
from acsolve.report.note.model import Block, Formula, Section, say
from acsolve.report.note.wording import lines, listed, quantity

_PLACES = ("11", "12", "21", "22")
_LONGEST = 240
_LAWS = ("reciprocal", "symmetric", "lossless", "passive")


def two_port(chapter: Chapter) -> Section | None:
    """Every set that exists, and what holds for the network."""
    found = chapter.two_port
    if found is None:
        return None
    blocks: list[Block] = []
    if found.references is not None:
        shown = [
            quantity(float(item.value), "ohm") if isinstance(item, Number) else str(item)
            for item in found.references
        ]
        blocks.append(say(f"The s parameters refer to {listed(list(dict.fromkeys(shown)))}."))
    missing = []
    for name, matrix in found.forms.items():
        spelled = "ABCD" if name == "abcd" else name
        if matrix is None:
            missing.append(spelled)
            continue
        blocks += _set(spelled, matrix)
    if missing:
        blocks.append(say(f"The {listed(missing)} parameters do not exist for this network."))
    if found.ports is not None:
        blocks.append(say(_laws(found.ports.laws)))
    if found.remark is not None:
        blocks.append(say(f"{found.remark[:1].upper()}{found.remark[1:]}."))
    return Section(title="Parameters", level=3, blocks=tuple(blocks))


def _set(name: str, matrix: Any) -> list[Block]:
    labels = tuple("ABCD") if name == "ABCD" else tuple(f"{name}_{place}" for place in _PLACES)
    written: list[Chunks] = []
    for label, form in zip(labels, (form for row in matrix for form in row), strict=True):
        text = form.text()
        if len(text) > _LONGEST:
            return [
                say(f"The {name} parameters are too long to read; the command two-port has them.")
            ]
        written += lines(Symbol(label), text)
    return [say(f"The {name} parameters:"), Formula(lines=tuple(written))]


def _laws(laws: Any) -> str:
    words = []
    for law in _LAWS:
        held = getattr(laws, law)
        words.append(f"{law}: {'not proven' if held is None else 'yes' if held else 'no'}")
    return f"The network’s laws: {'; '.join(words)}."
