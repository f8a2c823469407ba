"""Gain, phase, phase delay and group delay over frequency, each point checked."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from acsolve.analyses.beside import STEP, beside_roots, is_suspect
from acsolve.analyses.ladder_phase import Ladder, ladder_of
from acsolve.analyses.modes import landmarks
from acsolve.analyses.phase import at, at_zero_hertz, below, continuous, nearest, track
from acsolve.analyses.question import Ask, refuse_unreferenced
from acsolve.circuit.cascade import condensed
from acsolve.circuit.netlist import Netlist, Pair
from acsolve.equations.chain import chains
from acsolve.equations.chain_balls import ball_chains
from acsolve.equations.measured import MeasuredBalls, has_measured, measured, refuse_outside
from acsolve.equations.numeric import TwoPort, ball_values, float_values, takes_branch
from acsolve.equations.precise import Local
from acsolve.equations.result import Solution, Status
from acsolve.equations.solver import Solver, prepare
from acsolve.errors import AnalysisError, Diagnostic, EquationError
from acsolve.memory import nothing_collected
from acsolve.shown import Shown

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class Placement:
    """What straight lines between the points of a sweep are worth.

    gain_db, phase_deg : the most that they err, in dB and degrees, where `complete`.
    linear : whether they are straight over linear frequency, or over its logarithm.
    sure : no notch or peak is missed, since every mode and zero near the axis is known;
        otherwise the error was estimated from slopes and points between, on a finer start.
    complete : false where the largest number of points was reached first.
    ends_hertz : zeros and poles on the axis, or so near to it that doubles end first. The
        lines hold up to a relative distance of 1e-12 beside them, and say nothing within.
    """

    gain_db: float
    phase_deg: float
    linear: bool
    sure: bool
    complete: bool
    ends_hertz: tuple[float, ...]


@dataclass(frozen=True, slots=True, eq=False)
class Sweep(Shown):
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
    placed : how the points were placed, where they were not named; None where they were.
    beside : 1 where a zero, -1 where a pole lies within the rounding of the frequency, else 0:
        value, phase and delays, right as they are, tell of that rounding only. None where it
        was not looked at.

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
    placed: Placement | None = None
    beside: NDArray[np.int8] | None = None

    def as_meant(self) -> Sweep:
        """The same with what `beside` says: 0 or infinite there, and no phase or delay.

        For tables at 1/(2·pi·sqrt(L·C)) and the like, where a reader means the zero itself.
        """
        if self.beside is None or not self.beside.any():
            return self
        zero, pole = self.beside > 0, self.beside < 0

        def changed(column: Array, at_zero: complex, at_pole: complex) -> Array:
            return frozen(np.where(zero, at_zero, np.where(pole, at_pole, column)))

        nan = np.nan
        return replace(
            self,
            value=changed(self.value, 0, complex(np.inf, 0)),
            gain_db=changed(self.gain_db, -np.inf, np.inf),
            phase_deg=changed(self.phase_deg, nan, nan),
            phase_delay_s=changed(self.phase_delay_s, nan, nan),
            group_delay_s=changed(self.group_delay_s, nan, nan),
        )

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
    refuse_nowhere(solution)
    phase, settled = _phase(netlist, ask, solver, solution, ordered)
    columns = columns_of(ordered, solution, phase)
    columns["beside"] = _beside(solver, solution, ordered)
    arrays = {name: frozen(column[back].reshape(shape)) for name, column in columns.items()}
    return Sweep(settled=settled, placed=None, **arrays)


def _beside(solver: Solver, solution: Solution, hertz: Array) -> Array:
    """`Sweep.beside`; only where the slope raises a suspicion a point near by is solved."""
    found = np.zeros(len(hertz), dtype=np.int8)
    near = np.flatnonzero(is_suspect(solution.slope[0], 2 * np.pi * hertz))
    if len(near):
        moved = solver.solve(hertz[near] * (1 + STEP)).value()[0]
        found[near] = beside_roots(solution.value()[0, near], moved)
    return found


def response(
    netlist: Netlist, ask: Ask, hertz: ArrayLike, *, checked: bool = True
) -> NDArray[np.complex128]:
    """The complex response alone; the shape of `hertz` is kept.

    Without the check only points that are not finite, or out of a double's range, are looked at.
    """
    wanted, shape = _checked(hertz)
    solver = solver_for(netlist, ask, wanted)
    value = solver.solve(wanted).value() if checked else solver.quick(wanted)
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
    with nothing_collected():
        return _prepared(netlist, ask, hertz, targets)


def _prepared(netlist: Netlist, ask: Ask, hertz: Array, targets: Sequence[Pair] | None) -> Solver:
    """With rows of copies put away; written out where a copy has no chain matrix."""
    short = condensed(netlist, _asked_about(ask, targets))
    if short is netlist:
        return _as_it_stands(netlist, ask, hertz, targets)
    try:
        return _as_it_stands(short, ask, hertz, targets)
    except EquationError:  # nothing gets through a copy forwards, or the network itself is at fault
        return _as_it_stands(netlist, ask, hertz, targets)


def _as_it_stands(short: Netlist, ask: Ask, hertz: Array, targets: Sequence[Pair] | None) -> Solver:
    rows, parts = chains(short), measured(short)
    values = float_values(short, ports={**rows, **parts})
    system = ask.system(short, branch_for=lambda part: takes_branch(values, part))
    if targets is None:
        refuse_unreferenced(system, ask)
    observed = (
        ask.all_observed(system) if targets is None else [system.voltage(pair) for pair in targets]
    )
    refuse_outside(parts, hertz)
    in_balls: dict[str, TwoPort] = {**ball_chains(rows)}
    in_balls.update({name: MeasuredBalls(port) for name, port in parts.items()})
    return prepare(
        system,
        observed=observed,
        driven=ask.driven(system),
        hertz=hertz,
        values=values,
        balls=lambda: ball_values(short, ports=in_balls),
    )


def _asked_about(ask: Ask, targets: Sequence[Pair] | None) -> set[str]:
    """The nodes and parts that a question names: they stay in sight in a row of copies."""
    pairs = [ask.source or (), ask.target, *(targets or ())]
    return {name for pair in pairs for name in pair} | {ask.ammeter or ""}


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


def refuse_nowhere(solution: Solution) -> None:
    """Refuse what has no answer at any frequency: the drive cannot be what is asked."""
    if solution.status.size and np.all(solution.status == Status.UNDEFINED):
        raise EquationError(
            Diagnostic(
                code="equations.undriven",
                message="the equations have no solution with this drive at any frequency",
                hint="Look for a short or another ideal source across the driven pair.",
            )
        )


def frozen(array: Array) -> Array:
    """The array, closed for writing."""
    array.flags.writeable = False
    return array


def _phase(
    netlist: Netlist, ask: Ask, solver: Solver, solution: Solution, hertz: Array
) -> tuple[Array, bool]:
    """Continuous phase in radians at the frequencies, which ascend."""
    positive = hertz > 0
    usable = positive & (solution.status[0] < Status.ZERO)
    phase = np.full(len(hertz), np.nan)
    if has_measured(netlist):
        phase[usable] = np.unwrap(solution.phase()[0, usable])
        return phase, False  # 0 Hz, from where phase is counted, may not have been measured
    turned = by_ladder(ladder_of(netlist, ask), hertz[usable], solution.phase()[0, usable])
    if turned is not None and positive.all():
        phase[usable] = turned
        return phase, True
    start = solver.near_zero()[0]
    if start is None or start.vanishes:
        return phase, start is not None
    phase[hertz == 0] = at_zero_hertz(start)
    if turned is not None:
        phase[usable] = turned
        return phase, True
    phase[usable], settled = _tracked(netlist, solver, solution, start, hertz=hertz, usable=usable)
    return phase, settled


def by_ladder(ladder: Ladder | None, hertz: Array, angle: Array) -> Array | None:
    """Continuous phase at frequencies of known principal phase; None where it must be tracked."""
    if ladder is None:
        return None
    about = ladder.phase(hertz)
    return nearest(about, angle) if np.isfinite(about).all() else None


def _tracked(
    netlist: Netlist,
    solver: Solver,
    solution: Solution,
    start: Local,
    *,
    hertz: Array,
    usable: Array,
) -> tuple[Array, bool]:
    """Continuous phase at the usable frequencies, followed from 0 Hz."""
    positive = hertz[hertz > 0]
    if not len(positive):
        return np.zeros(0), True
    known = track(solution, hertz, 0)

    def solve(omega: Array) -> Any:
        frequencies = omega / (2 * np.pi)
        return track(solver.solve(frequencies), frequencies, 0)

    marks = landmarks(netlist, solver, positive[[0, -1]])
    extra = np.concatenate([below(float(positive[0])), marks])
    known, turned, settled = continuous(known.merged(solve(2 * np.pi * extra)), solve, start)
    return at(known, turned, 2 * np.pi * hertz[usable], solution.phase()[0, usable]), settled


def columns_of(hertz: Array, solution: Solution, phase: Array) -> dict[str, Array]:
    """The arrays of a `Sweep` by name, at ascending frequencies; `phase` in radians."""
    omega = 2 * np.pi * hertz
    usable = solution.status[0] < Status.ZERO
    group = np.where(usable, 0.0 - solution.slope[0].real, np.nan)
    with np.errstate(all="ignore"):  # 0/0 at 0 Hz, replaced below
        delay = 0.0 - phase / omega
    still = (hertz == 0) & (phase == 0)
    delay[still] = group[still]
    delay[~np.isfinite(delay)] = np.nan
    return {
        "hertz": hertz,
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
