"""What a note tells: the answers to a circuit's questions, one chapter for each pair asked."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.equations import Equations
    from acsolve.analyses.pole_record import PoleAnswer
    from acsolve.analyses.port_answer import PortAnswer
    from acsolve.analyses.question import Ask
    from acsolve.analyses.step import StepAnswer
    from acsolve.analyses.sweep import Sweep
    from acsolve.analyses.transfer import TransferAnswer
    from acsolve.circuit.netlist import Netlist
    from acsolve.report.drawing.drawing import Drawing


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Loading:
    """What stands before and behind a path: impedances in ohms at the table's frequencies.

    `source_side` looks into the driven pair, `load_side` back into the observed one with the
    drive's voltage (or current) at zero; None where there is no such thing.
    """

    source_side: Any
    load_side: Any
    source_form: ClosedForm | None = None
    load_form: ClosedForm | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Chapter:
    """All that is told about one pair of nodes.

    `formula` is the answer with every part a symbol, where that is short enough to read;
    `curve` is what the picture shows, `table` the response at the frequencies that matter.
    `refused` says what was asked and has no answer, with the reason.
    """

    ask: Ask
    kinds: tuple[str, ...]
    transfer: TransferAnswer | None = None
    formula: ClosedForm | None = None
    poles: PoleAnswer | None = None
    equations: Equations | None = None
    cutoffs: tuple[CutoffAnswer, ...] = ()
    curve: Sweep | None = None
    table: Sweep | None = None
    loading: Loading | None = None
    step: StepAnswer | None = None
    two_port: PortAnswer | None = None
    refused: tuple[tuple[str, str], ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Facts:
    """The whole content of a note before it is put into words."""

    netlist: Netlist
    title: str
    variant: str | None
    cautions: tuple[str, ...]
    warnings: tuple[str, ...]
    chapters: tuple[Chapter, ...]
    drawing: Drawing | None
    undrawn: str | None
    name: str
    text: str | None
    version: str
    changes: tuple[str, ...] = ()
    date: str | None = None
    own_questions: bool = True
    unanswered: tuple[str, ...] = field(default=())
