"""Two-port parameters over frequency, each solved with its own ends open, shorted or loaded."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.port_ask import PortAsk, References, set_asks, without_port_sources
from acsolve.analyses.sweep import frozen, solver_for
from acsolve.analyses.two_port import check_pairs, no_reference, sets_of
from acsolve.circuit.netlist import Netlist, Pair
from acsolve.equations.numeric import float_values
from acsolve.equations.result import Solution, Status
from acsolve.errors import AnalysisError, Diagnostic, EquationError
from acsolve.ports.data import PortData
from acsolve.ports.sets import SetName

Array = NDArray[Any]

_NOWHERE = ("equations.singular", "equations.undriven")


@dataclass(frozen=True, slots=True, eq=False)
class PortSweep:
    """Two-port parameters at frequencies.

    hertz : shape (f,), in the order asked for.
    matrices : set -> parameters in SI units, shape (f, 2, 2), read-only; None where the set
        exists at no frequency. A parameter is infinite or not a number where it has none.
    reference : reference resistances in ohm, None where none were stated.
    error : the largest estimated relative error of a parameter.
    """

    hertz: Array
    matrices: Mapping[SetName, Array | None]
    reference: tuple[float, float] | None
    error: float

    def data(self, name: SetName = "s") -> PortData:
        """One set as data of a network, to be converted, put in a row, or saved.

        Raises
        ------
        AnalysisError
            [ports.no-set] the set does not exist; [ports.reference] s without a reference.
        """
        if name == "s" and self.reference is None:
            raise no_reference()
        found = self.matrices.get(name)
        if found is None:
            raise AnalysisError(
                Diagnostic(
                    code="ports.no-set",
                    message=f"this network has no {name} parameters",
                    hint="Ask for another set; s parameters always exist for passive networks.",
                )
            )
        reference = self.reference or (_UNSTATED, _UNSTATED)
        order = np.argsort(self.hertz)
        return PortData(self.hertz[order], found[order], name, np.array(reference))


_UNSTATED = 1.0  # ohm: no matter for any set but s, which is then refused


def port_sweep(
    netlist: Netlist,
    first: Pair,
    second: Pair,
    hertz: Array,
    *,
    references: References | None = None,
    sets: Sequence[SetName] | None = None,
) -> PortSweep:
    """Solve for the parameters of some sets over frequency.

    Parameters
    ----------
    netlist : the circuit, every value a number; its sources are set to zero.
    first, second : the two pairs.
    hertz : frequencies, shape (f,).
    references : reference resistances of the s parameters.
    sets : which sets; by default all that can be asked for.

    Raises
    ------
    AnalysisError
        [question.same-node], [ports.reference].
    EquationError
        [question.no-value]; [equations.singular] no set has an answer.
    """
    check_pairs(first, second)
    chosen = tuple(sets or sets_of(references))
    if "s" in chosen and references is None:
        raise no_reference()
    cleared = without_port_sources(netlist, first, second)
    hertz = np.array(hertz, dtype=float).ravel()
    found: dict[SetName, Array | None] = {}
    worst, reason = 0.0, None
    for name in chosen:
        try:
            found[name], error = _matrix(cleared, set_asks(first, second, name, references), hertz)
            worst = max(worst, error)
        except EquationError as stop:
            if stop.code not in _NOWHERE:
                raise
            found[name], reason = None, stop
    if reason is not None and all(item is None for item in found.values()):
        raise reason
    hertz.flags.writeable = False
    return PortSweep(hertz, found, _numbers(netlist, references), worst)


def _matrix(
    netlist: Netlist, asks: tuple[tuple[PortAsk, PortAsk], ...], hertz: Array
) -> tuple[Array | None, float]:
    """One set: a pass for each of its columns."""
    matrix = np.empty((len(hertz), 2, 2), dtype=complex)
    worst = 0.0
    for column in range(2):
        upper, lower = asks[0][column], asks[1][column]
        ask = replace(upper, beside=(lower.observes,))
        solution = solver_for(netlist, ask, hertz).solve(hertz)
        matrix[:, :, column] = solution.value().T
        worst = max(worst, _largest_error(solution))
        if len(hertz) and np.all(solution.status >= Status.POLE, axis=1).any():
            return None, worst
    return frozen(matrix), worst


def _largest_error(solution: Solution) -> float:
    usable = solution.status < Status.POLE
    return float(np.max(solution.error, where=usable, initial=0.0))


def _numbers(netlist: Netlist, references: References | None) -> tuple[float, float] | None:
    if references is None:
        return None
    evaluate = float_values(netlist)
    first, second = (float(np.real(evaluate(item, 0.0))) for item in references)
    return first, second
