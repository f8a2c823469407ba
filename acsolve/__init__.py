"""acsolve: exact solutions of linear AC circuits.

import acsolve

circuit = acsolve.read("antialias.circuit")
path = circuit.path("bridge", "out")
path.closed_form()
path.cutoffs()
path.response([10.0, 100.0])
"""

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

__version__ = "0.1.0"

__all__ = [
    "AcsolveError",
    "AnalysisError",
    "Circuit",
    "CircuitError",
    "Diagnostic",
    "Draft",
    "EquationError",
    "PairLike",
    "Path",
    "Source",
    "Span",
    "TextError",
    "__version__",
    "frame",
    "parse",
    "read",
]
