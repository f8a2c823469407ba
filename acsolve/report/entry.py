"""One answer with what it answers: the row that text, JSON, pictures and files are made from."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Literal

if TYPE_CHECKING:
    from acsolve.analyses.check import CheckAnswer
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.equations import Equations
    from acsolve.analyses.question import Ask
    from acsolve.analyses.sweep import Sweep
    from acsolve.analyses.transfer import TransferAnswer
    from acsolve.errors import Diagnostic

Kind = Literal["check", "equations", "transfer", "impedance", "cutoff", "sweep"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Heading:
    """What all answers about one circuit share."""

    title: str | None = None
    variant: str | None = None
    cautions: tuple[str, ...] = ()
    warnings: tuple[Diagnostic, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One answer. Exactly the field that its kind names is filled.

    `formula` is the same question with every part a symbol, where that is small: it gives
    the numbers of a standard form their formulas.
    """

    kind: Kind
    heading: Heading
    ask: Ask | None = None
    transfer: TransferAnswer | None = None
    formula: TransferAnswer | None = None
    cutoff: CutoffAnswer | None = None
    sweep: Sweep | None = None
    check: CheckAnswer | None = None
    equations: Equations | None = None


_WORDS = {
    "voltage-ratio": "voltage ratio",
    "current-ratio": "current ratio",
    "transimpedance": "transimpedance",
    "transadmittance": "transadmittance",
    "impedance": "impedance",
    "response": "response",
}
_LETTERS = {
    "voltage-ratio": "H",
    "current-ratio": "H",
    "transimpedance": "Z",
    "transadmittance": "Y",
    "impedance": "Z",
    "response": "V",
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
        return f"voltage at {seen}, driven by the file's own sources"
    return f"{_WORDS[ask.quantity]} from {pair_text(ask.source)} to {seen}"


def letter(ask: Ask) -> str:
    """The letter of the response: H, Z, Y or V."""
    return _LETTERS[ask.quantity]


def unit_sign(ask: Ask) -> str:
    """The unit of the response, as text; nothing for a ratio."""
    from acsolve.circuit.unit import SIGNS

    return SIGNS.get(ask.dimension, "")
