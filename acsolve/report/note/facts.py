"""What a note tells: the answers to a circuit's questions, one chapter for each pair asked."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any, Literal

if TYPE_CHECKING:
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.equations import Equations
    from acsolve.analyses.nested import NestedForm
    from acsolve.analyses.pole_record import PoleAnswer
    from acsolve.analyses.port_answer import PortAnswer
    from acsolve.analyses.question import Ask
    from acsolve.analyses.step import StepAnswer
    from acsolve.analyses.sweep import Sweep
    from acsolve.analyses.transfer import TransferAnswer
    from acsolve.circuit.netlist import Netlist
    from acsolve.errors import Diagnostic
    from acsolve.report.drawing.drawing import Drawing


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class EndPart:
    """A resistor of the file that is the path's source or load.

    `gain_db` is the response at the table's frequencies without it, in dB.
    """

    name: str
    role: Literal["source", "load"]
    gain_db: Any


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
    ends: tuple[EndPart, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Chapter:
    """All that is told about one pair of nodes.

    `formula` is the answer with every part a symbol, where that is short enough to be worked
    out, `steps` the same as named steps where nobody would read it multiplied out;
    `curves` are what pictures show, one for each band asked for, `table` the response at the
    frequencies that matter.
    `refused` says what has no answer, with the reason; `problems` are the reasons why what the
    file asks has none.
    """

    ask: Ask
    kinds: tuple[str, ...]
    transfer: TransferAnswer | None = None
    formula: ClosedForm | None = None
    steps: NestedForm | None = None
    poles: PoleAnswer | None = None
    equations: Equations | None = None
    cutoffs: tuple[CutoffAnswer, ...] = ()
    curves: tuple[Sweep, ...] = ()
    table: Sweep | None = None
    loading: Loading | None = None
    in_time: tuple[StepAnswer, ...] = ()
    two_port: PortAnswer | None = None
    refused: tuple[tuple[str, str], ...] = ()
    problems: tuple[Diagnostic, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Unanswered:
    """A question of the file that this version has no answer to, in the file's words."""

    kind: str
    words: str


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
    unanswered: tuple[Unanswered, ...] = ()
