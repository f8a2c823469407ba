"""acsolve: exact solutions of linear AC circuits.

import acsolve

circuit = acsolve.read("antialias.circuit")
path = circuit.path("bridge", "out")
path.closed_form()
path.cutoffs()
path.response([10.0, 100.0])
"""

from importlib import import_module
from typing import TYPE_CHECKING, Any

from acsolve.door import Circuit, parse, read
from acsolve.draft import Draft
from acsolve.errors import (
    AcsolveError,
    AnalysisError,
    CircuitError,
    Diagnostic,
    EquationError,
    TextError,
    frame,
)
from acsolve.path import PairLike, Path
from acsolve.source import Source, Span

if TYPE_CHECKING:
    from acsolve.analyses.approximate import Approximation
    from acsolve.analyses.check import CheckAnswer
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.cutoff import Cutoff, CutoffAnswer
    from acsolve.analyses.equations import Equations
    from acsolve.analyses.equivalent import Equivalent
    from acsolve.analyses.insertion import Insertion
    from acsolve.analyses.nested import NestedForm
    from acsolve.analyses.port_sweep import PortSweep
    from acsolve.analyses.proof import Verification
    from acsolve.analyses.steady import SteadySine
    from acsolve.analyses.step import StepAnswer
    from acsolve.analyses.sweep import Sweep
    from acsolve.analyses.transfer import TransferAnswer
    from acsolve.equations.result import Status
    from acsolve.over import Member
    from acsolve.ports.convert import converted
    from acsolve.ports.data import PortData
    from acsolve.ports.touchstone import parse_touchstone, read_touchstone
    from acsolve.ports.write import touchstone_text
    from acsolve.report.note.note import Note
    from acsolve.two_port import TwoPort

__version__ = "0.1.0"

#: Types of answers and what reads and writes them, loaded when they are first asked for.
_ANSWERS = {
    "Approximation": "acsolve.analyses.approximate",
    "CheckAnswer": "acsolve.analyses.check",
    "ClosedForm": "acsolve.analyses.closed_form",
    "Cutoff": "acsolve.analyses.cutoff",
    "CutoffAnswer": "acsolve.analyses.cutoff",
    "Equations": "acsolve.analyses.equations",
    "Equivalent": "acsolve.analyses.equivalent",
    "Insertion": "acsolve.analyses.insertion",
    "Member": "acsolve.over",
    "NestedForm": "acsolve.analyses.nested",
    "Note": "acsolve.report.note.note",
    "PortData": "acsolve.ports.data",
    "PortSweep": "acsolve.analyses.port_sweep",
    "Status": "acsolve.equations.result",
    "SteadySine": "acsolve.analyses.steady",
    "StepAnswer": "acsolve.analyses.step",
    "Sweep": "acsolve.analyses.sweep",
    "TransferAnswer": "acsolve.analyses.transfer",
    "TwoPort": "acsolve.two_port",
    "Verification": "acsolve.analyses.proof",
    "converted": "acsolve.ports.convert",
    "parse_touchstone": "acsolve.ports.touchstone",
    "read_touchstone": "acsolve.ports.touchstone",
    "touchstone_text": "acsolve.ports.write",
}

__all__ = [
    "AcsolveError",
    "AnalysisError",
    "Approximation",
    "CheckAnswer",
    "Circuit",
    "CircuitError",
    "ClosedForm",
    "Cutoff",
    "CutoffAnswer",
    "Diagnostic",
    "Draft",
    "EquationError",
    "Equations",
    "Equivalent",
    "Insertion",
    "Member",
    "NestedForm",
    "Note",
    "PairLike",
    "Path",
    "PortData",
    "PortSweep",
    "Source",
    "Span",
    "Status",
    "SteadySine",
    "StepAnswer",
    "Sweep",
    "TextError",
    "TransferAnswer",
    "TwoPort",
    "Verification",
    "__version__",
    "converted",
    "frame",
    "parse",
    "parse_touchstone",
    "read",
    "read_touchstone",
    "touchstone_text",
]


def __getattr__(name: str) -> Any:
    """The type of an answer, its module loaded only now."""
    if name not in _ANSWERS:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(_ANSWERS[name]), name)


def __dir__() -> list[str]:
    """Every public name, the types of answers too."""
    return sorted({*globals(), *__all__})
