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

from acsolve.door import Circuit, PairLike, Path, parse, read
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
from acsolve.source import Source, Span

if TYPE_CHECKING:
    from acsolve.analyses.approximate import Approximation
    from acsolve.analyses.check import CheckAnswer
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.cutoff import Cutoff, CutoffAnswer
    from acsolve.analyses.equations import Equations
    from acsolve.analyses.nested import NestedForm
    from acsolve.analyses.sweep import Sweep
    from acsolve.analyses.transfer import TransferAnswer
    from acsolve.equations.result import Status

__version__ = "0.1.0"

#: Types of answers, loaded when they are first asked for.
_ANSWERS = {
    "Approximation": "acsolve.analyses.approximate",
    "CheckAnswer": "acsolve.analyses.check",
    "ClosedForm": "acsolve.analyses.closed_form",
    "Cutoff": "acsolve.analyses.cutoff",
    "CutoffAnswer": "acsolve.analyses.cutoff",
    "Equations": "acsolve.analyses.equations",
    "NestedForm": "acsolve.analyses.nested",
    "Status": "acsolve.equations.result",
    "Sweep": "acsolve.analyses.sweep",
    "TransferAnswer": "acsolve.analyses.transfer",
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
    "NestedForm",
    "PairLike",
    "Path",
    "Source",
    "Span",
    "Status",
    "Sweep",
    "TextError",
    "TransferAnswer",
    "__version__",
    "frame",
    "parse",
    "read",
]


def __getattr__(name: str) -> Any:
    """The type of an answer, its module loaded only now."""
    if name not in _ANSWERS:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(import_module(_ANSWERS[name]), name)


def __dir__() -> list[str]:
    """Every public name, the types of answers too."""
    return sorted({*globals(), *__all__})
