"""Gain, phase, phase delay and group delay over frequency, each point checked."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from acsolve.analyses.modes import landmarks
from acsolve.analyses.phase import at, at_zero_hertz, below, continuous, track
from acsolve.analyses.question import Ask, refuse_unreferenced
from acsolve.circuit.netlist import Netlist, Pair
from acsolve.equations.numeric import float_values, takes_branch
from acsolve.equations.result import Solution, Status
from acsolve.equations.solver import Solver, prepare
from acsolve.errors import AnalysisError, Diagnostic, EquationError

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, eq=False)
class Sweep:
    """A response over frequency; all arrays are read-only and of the same shape.

    hertz : in the order asked for.
    value : complex response in SI units; 0 below a double's range, infinite at a pole.
    gain_db : 20·log10|value|, right also where `value` is out of range; -inf at a zero.
    phase_deg : continuous from 0 Hz; see `acsolve.analyses.phase` for zeros on the axis.
    phase_delay_s : -phase/omega.
    group_delay_s : -d(phase)/d(omega), from the exact derivative of the response.
    status : values of `Status`.
    error : estimated relative error of `value`.
    settled : whether the number of turns in `phase_deg` is confirmed everywhere.

    Phase and delays are not a number at a zero or pole; delays also where they are infinite.
    """

    hertz: Array
    value: Array
    gain_db: Array
    phase_deg: Array
    phase_delay_s: Array
    group_delay_s: Array
    status: Array
    error: Array
    settled: bool

    def unusual(self) -> dict[str, int]:
        """How many points were not answered at the first try, by status."""
        kinds, counts = np.unique(self.status, return_counts=True)
        return {
            str(Status(int(kind))): int(count)
            for kind, count in zip(kinds, counts, strict=True)
            if kind != Status.OK
        }


def sweep(netlist: Netlist, ask: Ask, hertz: ArrayLike) -> Sweep:
    """Answer a question over frequency.

    Parameters
    ----------
    netlist : the circuit, every value a number.
    ask : what is driven and what is observed.
    hertz : frequencies in hertz, zero or positive, any order and shape.

    Raises
    ------
    AnalysisError
        [sweep.band] a frequency is negative or not finite.
    EquationError
        [question.no-value], [equations.singular], [equations.undriven]; a single frequency
        without an answer is a status.

    Notes
    -----
    Resonances and notches narrower than the grid are found from the natural modes and zeros
    where the entries are ratios of polynomials in s, up to 300 unknowns (40 in networks of R
    and C only). In larger networks and beside lines, one that lies wholly between two samples
    and leaves neither gain nor slope behind may be missed, and with it a turn of 360 degrees.

    """
    wanted, shape = _checked(hertz)
    ordered, back = np.unique(wanted, return_inverse=True)
    solver = solver_for(netlist, ask, ordered)
    solution = solver.solve(ordered)
    _refuse_nowhere(solution)
    phase, settled = _phase(netlist, solver, solution, ordered)
    columns = {"hertz": ordered, **_columns(ordered, solution, phase)}
    arrays = {name: _frozen(column[back].reshape(shape)) for name, column in columns.items()}
    return Sweep(settled=settled, **arrays)


def response(netlist: Netlist, ask: Ask, hertz: ArrayLike) -> NDArray[np.complex128]:
    """The complex response alone; the shape of `hertz` is kept."""
    wanted, shape = _checked(hertz)
    value = solver_for(netlist, ask, wanted).solve(wanted).value()
    return np.asarray(value[0].reshape(shape))


def responses(
    netlist: Netlist, ask: Ask, targets: Sequence[Pair], hertz: ArrayLike
) -> NDArray[np.complex128]:
    """Voltages at several pairs in one pass, shape (targets, *hertz.shape).

    The drive is that of `ask`; its own target is not looked at.
    """
    wanted, shape = _checked(hertz)
    value = solver_for(netlist, ask, wanted, targets=targets).solve(wanted).value()
    return np.asarray(value.reshape(len(targets), *shape))


def solver_for(
    netlist: Netlist, ask: Ask, hertz: Array, *, targets: Sequence[Pair] | None = None
) -> Solver:
    """Assemble and plan a question; `targets` observes voltages there instead of its own."""
    values = float_values(netlist)
    system = ask.system(netlist, branch_for=lambda part: takes_branch(values, part))
    if targets is None:
        refuse_unreferenced(system, ask)
    observed = (
        [ask.observed(system)] if targets is None else [system.voltage(pair) for pair in targets]
    )
    return prepare(netlist, system, observed=observed, driven=ask.driven(system), hertz=hertz)


def _checked(hertz: ArrayLike) -> tuple[Array, tuple[int, ...]]:
    wanted = np.asarray(hertz, dtype=float)
    if not np.all(np.isfinite(wanted) & (wanted >= 0)):
        raise AnalysisError(
            Diagnostic(
                code="sweep.band",
                message="a frequency is negative or not finite",
                hint="Give frequencies in hertz from 0 upwards.",
            )
        )
    return wanted.ravel().copy(), wanted.shape


def _refuse_nowhere(solution: Solution) -> None:
    """Refuse what has no answer at any frequency: the drive cannot be what is asked."""
    if solution.status.size and np.all(solution.status == Status.UNDEFINED):
        raise EquationError(
            Diagnostic(
                code="equations.undriven",
                message="the equations have no solution with this drive at any frequency",
                hint="Look for a short or another ideal source across the driven pair.",
            )
        )


def _frozen(array: Array) -> Array:
    array.flags.writeable = False
    return array


def _phase(
    netlist: Netlist, solver: Solver, solution: Solution, hertz: Array
) -> tuple[Array, bool]:
    """Continuous phase in radians at the frequencies, which ascend."""
    phase = np.full(len(hertz), np.nan)
    start = solver.near_zero()[0]
    if start is None or start.vanishes:
        return phase, start is not None
    phase[hertz == 0] = at_zero_hertz(start)
    positive = hertz > 0
    if not positive.any():
        return phase, True
    known = track(solution, hertz, 0)

    def solve(omega: Array) -> Any:
        frequencies = omega / (2 * np.pi)
        return track(solver.solve(frequencies), frequencies, 0)

    marks = landmarks(netlist, solver, hertz[positive][[0, -1]])
    extra = np.concatenate([below(float(hertz[positive][0])), marks])
    known, turned, settled = continuous(known.merged(solve(2 * np.pi * extra)), solve, start)
    usable = positive & (solution.status[0] < Status.ZERO)
    phase[usable] = at(known, turned, 2 * np.pi * hertz[usable], solution.phase()[0, usable])
    return phase, settled


def _columns(hertz: Array, solution: Solution, phase: Array) -> dict[str, Array]:
    """The arrays of a `Sweep`, by name, at ascending frequencies."""
    omega = 2 * np.pi * hertz
    usable = solution.status[0] < Status.ZERO
    group = np.where(usable, 0.0 - solution.slope[0].real, np.nan)
    with np.errstate(all="ignore"):  # 0/0 at 0 Hz, replaced below
        delay = 0.0 - phase / omega
    still = (hertz == 0) & (phase == 0)
    delay[still] = group[still]
    delay[~np.isfinite(delay)] = np.nan
    return {
        "value": solution.value()[0],
        "gain_db": solution.gain_db()[0],
        "phase_deg": np.degrees(phase),
        "phase_delay_s": delay,
        "group_delay_s": group,
        "status": solution.status[0],
        "error": solution.error[0],
    }


def order_at_zero(solver: Solver) -> list[float | None]:
    """Order of the zero (positive) or pole (negative) of each answer at 0 Hz."""
    return [None if item is None else item.order for item in solver.near_zero()]
