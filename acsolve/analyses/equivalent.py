"""Thévenin and Norton equivalents of a pair of nodes, driven by own sources or at another pair.

Everything the rest of a circuit can learn of a pair lies in one plane: the pair's voltage V,
the current I into its first node, and what drives. Held open, shorted, or not driven at all:

    open-circuit voltage = V/drive with I = 0,   short-circuit current = -I/drive with V = 0,
    impedance = V/I and admittance = I/V with no drive.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, Literal, TypeAlias

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.port_ask import PortAsk
from acsolve.analyses.sweep import frozen, solver_for
from acsolve.analyses.two_port import check_pairs, form_of, plane_of
from acsolve.circuit import unit
from acsolve.circuit.expression import MINUS_ONE, ONE
from acsolve.circuit.netlist import Netlist, Pair
from acsolve.circuit.unit import Dimension
from acsolve.equations.exact import Symbols
from acsolve.equations.plane import I1, I2, OWN, V1, V2, Combination
from acsolve.equations.result import Status
from acsolve.errors import AnalysisError, Diagnostic, EquationError

Array = NDArray[Any]

DriveName: TypeAlias = Literal["voltage", "current"]


@dataclass(frozen=True, slots=True, eq=False)
class Equivalent:
    """What a pair of nodes looks like from outside; None for what does not exist.

    voltage : between the open nodes, first against second (Thévenin).
    impedance : in series with it.
    current : out of the first node, through a short, into the second (Norton).
    admittance : across it.

    Closed forms, or over frequency complex arrays. With a driven pair, voltage and current
    are for one volt (or ampere) there; with own sources for their amplitudes.
    """

    voltage: Any
    impedance: Any
    current: Any
    admittance: Any


def equivalent_asks(
    pair: Pair, source: Pair | None, drive: DriveName = "voltage"
) -> Mapping[str, PortAsk]:
    """The question behind each field of `Equivalent`."""
    by = OWN if source is None else V1 if drive == "voltage" else I1
    driven, volts, amperes = ((by, ONE),), ((V2, ONE),), ((I2, ONE),)
    base = {OWN: unit.NONE, V1: unit.VOLT, I1: unit.AMPERE}[by]

    def ask(
        observes: Combination, drives: Combination, held: Combination, dimension: Dimension
    ) -> PortAsk:
        return PortAsk(
            source=source,
            target=pair,
            quantity="two-port",
            observes=observes,
            drives=drives,
            held=held,
            unit=dimension,
        )

    return {
        "voltage": ask(volts, driven, amperes, unit.VOLT / base),
        "impedance": ask(volts, amperes, driven, unit.OHM),
        "current": ask(((I2, MINUS_ONE),), driven, volts, unit.AMPERE / base),
        "admittance": ask(amperes, volts, driven, unit.SIEMENS),
    }


def equivalent(
    netlist: Netlist,
    pair: Pair,
    *,
    source: Pair | None = None,
    drive: DriveName = "voltage",
    symbols: Symbols | None = None,
) -> Equivalent:
    """The equivalent of a pair in closed form, each part checked.

    Parameters
    ----------
    netlist : the circuit; its own sources act where `source` is None, else they are zero.
    pair : the pair that is looked into.
    source : another pair that is driven.
    drive : by an ideal voltage or current.

    Raises
    ------
    AnalysisError
        [question.same-node].
    EquationError
        [equations.singular] the network has no unique solution; and as `plane_of`.
    """
    _check(pair, source)
    chosen = symbols or Symbols()
    found = plane_of(netlist, chosen, source, pair)
    asks = equivalent_asks(pair, source, drive)
    forms: dict[str, ClosedForm | None] = {
        name: form_of(netlist, chosen, found, ask) for name, ask in asks.items()
    }
    return Equivalent(**forms)


def equivalent_sweep(
    netlist: Netlist,
    pair: Pair,
    hertz: Array,
    *,
    source: Pair | None = None,
    drive: DriveName = "voltage",
) -> Equivalent:
    """The equivalent over frequency, each part an array of the shape of `hertz`."""
    _check(pair, source)
    hertz = np.asarray(hertz, dtype=float)
    asks = equivalent_asks(pair, source, drive)
    return Equivalent(**{name: _solved(netlist, ask, hertz) for name, ask in asks.items()})


def _solved(netlist: Netlist, ask: PortAsk, hertz: Array) -> Array | None:
    try:
        solution = solver_for(netlist, ask, hertz.ravel()).solve(hertz.ravel())
    except EquationError as stop:
        if stop.code != "equations.singular":
            raise
        return None
    if hertz.size and np.all(solution.status >= Status.POLE):
        return None
    return frozen(solution.value()[0].reshape(hertz.shape))


def _check(pair: Pair, source: Pair | None) -> None:
    if source is not None:
        check_pairs(source, pair)
    elif pair[0] == pair[1]:
        raise AnalysisError(
            Diagnostic(
                code="question.same-node",
                message=f"the pair ({pair[0]}, {pair[1]}) is one node",
                hint="Name two different nodes.",
            )
        )
