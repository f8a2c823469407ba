"""One answer with what it answers: the row that text, JSON, pictures and files are made from."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from itertools import groupby
from typing import TYPE_CHECKING, Literal

if TYPE_CHECKING:
    from acsolve.analyses.approximate import Approximation
    from acsolve.analyses.check import CheckAnswer
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.equations import Equations
    from acsolve.analyses.equivalent import Equivalent
    from acsolve.analyses.family import Setting
    from acsolve.analyses.pole_record import PoleAnswer
    from acsolve.analyses.port_answer import PortAnswer
    from acsolve.analyses.proof import Verification
    from acsolve.analyses.question import Ask
    from acsolve.analyses.step import StepAnswer
    from acsolve.analyses.sweep import Sweep
    from acsolve.analyses.transfer import TransferAnswer
    from acsolve.analyses.value_for import ValueAnswer
    from acsolve.errors import Diagnostic
    from acsolve.report.drawing.drawing import Drawing

Kind = Literal[
    "check",
    "equations",
    "transfer",
    "impedance",
    "part-value",
    "cutoff",
    "sweep",
    "step",
    "two-port",
    "draw",
    "note",
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Heading:
    """What all answers about one circuit share.

    `columns` is the width of the terminal they are shown on, None where there is none:
    formulas are then one line each, for other programs to pick up.
    """

    title: str | None = None
    variant: str | None = None
    cautions: tuple[str, ...] = ()
    warnings: tuple[Diagnostic, ...] = ()
    columns: int | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class EquivalentSet:
    """The equivalents of a pair in closed form and, where it was asked, at frequencies."""

    forms: Equivalent
    hertz: tuple[float, ...] = ()
    sweep: Equivalent | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One answer. Exactly the field that its kind names is filled.

    `formula` is the same question with every part a symbol, where that is small: it gives
    the numbers of a standard form their formulas. `roots` tell of its poles, zeros and
    stability. `readings` name the shapes the form is
    written in besides, `approximations` go with it, `verified` with a sweep. `equivalent`
    goes with an impedance.
    `over` says which member of a family a sweep is.
    """

    kind: Kind
    heading: Heading
    ask: Ask | None = None
    transfer: TransferAnswer | None = None
    formula: TransferAnswer | None = None
    roots: PoleAnswer | None = None
    readings: tuple[str, ...] = ()
    approximations: tuple[Approximation, ...] = ()
    equivalent: EquivalentSet | None = None
    cutoff: CutoffAnswer | None = None
    part_value: ValueAnswer | None = None
    sweep: Sweep | None = None
    step: StepAnswer | None = None
    two_port: PortAnswer | None = None
    drawing: Drawing | None = None
    over: tuple[Setting, ...] = ()
    verified: Verification | None = None
    check: CheckAnswer | None = None
    equations: Equations | None = None


def families(entries: Sequence[Entry]) -> list[tuple[Entry, ...]]:
    """Entries that belong to one family together, every other entry alone."""
    found: list[tuple[Entry, ...]] = []
    for _, group in groupby(enumerate(entries), lambda item: _key(*item)):
        found.append(tuple(entry for _, entry in group))
    return found


def _key(place: int, entry: Entry) -> tuple[object, ...]:
    if not entry.over:
        return (place,)
    return (entry.ask, tuple(setting.name for setting in entry.over))


_WORDS = {
    "voltage-ratio": "voltage ratio",
    "current-ratio": "current ratio",
    "transimpedance": "transimpedance",
    "transadmittance": "transadmittance",
    "impedance": "impedance",
    "response": "response",
    "two-port": "two-port",
}
_LETTERS = {
    "voltage-ratio": "H",
    "current-ratio": "H",
    "transimpedance": "Z",
    "transadmittance": "Y",
    "impedance": "Z",
    "response": "V",
    "two-port": "H",
}


def pair_text(pair: tuple[str, str]) -> str:
    """A pair of nodes in brackets."""
    return f"({pair[0]}, {pair[1]})"


def question_text(ask: Ask) -> str:
    """The question in words."""
    if ask.quantity == "impedance":
        return f"impedance looking into {pair_text(ask.target)}"
    seen = f"the ammeter {ask.ammeter}" if ask.ammeter else pair_text(ask.target)
    if ask.source is None:
        what = "current of" if ask.observes_current else "voltage at"
        return f"{what} {seen}, driven by the file's own sources"
    return f"{_WORDS[ask.quantity]} from {pair_text(ask.source)} to {seen}"


def curve_words(asks: Sequence[Ask]) -> tuple[str, tuple[str, ...]]:
    """What is common to several questions, and what tells them apart, in words."""
    if len(asks) == 1:
        return question_text(asks[0]), (question_text(asks[0]),)
    heads = {(ask.quantity, ask.source) for ask in asks}
    alike = len(heads) == 1 and asks[0].source is not None
    labels = [_target_text(ask) if alike else question_text(ask) for ask in asks]
    source = asks[0].source
    common = f"{_WORDS[asks[0].quantity]} from {pair_text(source)}" if alike and source else ""
    return common, tuple(_numbered(labels))


def _target_text(ask: Ask) -> str:
    return f"to the ammeter {ask.ammeter}" if ask.ammeter else f"to {pair_text(ask.target)}"


def _numbered(labels: Sequence[str]) -> list[str]:
    """Distinct names: repeated ones are numbered."""
    seen: dict[str, int] = {}
    named = []
    for label in labels:
        seen[label] = seen.get(label, 0) + 1
        named.append(label if seen[label] == 1 else f"{label} ({seen[label]})")
    return named


def letter(ask: Ask) -> str:
    """The letter of the response: H, Z, Y, V or I."""
    if ask.quantity == "response" and ask.observes_current:
        return "I"
    return _LETTERS[ask.quantity]


def unit_sign(ask: Ask) -> str:
    """The unit of the response, as text; nothing for a ratio."""
    from acsolve.circuit.unit import SIGNS

    return SIGNS.get(ask.dimension, "")
