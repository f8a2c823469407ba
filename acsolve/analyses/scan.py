"""Cutoffs of networks too large for a closed form: certified where that is quick, else a scan.

The scan looks at many frequencies with the checked numeric engine, uses the slope at each to
look between them, and polishes every crossing by Newton's method. It proves nothing: two
crossings between neighbouring points that leave no trace in gain or slope may be missed.
"""

from __future__ import annotations

from collections.abc import Callable
from fractions import Fraction
from functools import partial
from math import log10, pi
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.ball import precision
from acsolve.analyses.band_cutoff import (
    Basis,
    answered,
    by_shape,
    checked_band,
    peak,
    stated,
)
from acsolve.analyses.band_scale import band_of_solver
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import (
    Cutoff,
    CutoffAnswer,
    CutoffLevel,
    Reference,
    no_reference,
)
from acsolve.analyses.ends import End
from acsolve.analyses.gain_series import SolvedResponse, solved_response
from acsolve.analyses.grid import HertzBand
from acsolve.analyses.magnitude import ReferenceName
from acsolve.analyses.question import Ask
from acsolve.analyses.sweep import solver_for
from acsolve.analyses.transfer import closed_form
from acsolve.circuit.netlist import Netlist
from acsolve.equations.exact import Symbols
from acsolve.equations.precise import Local
from acsolve.equations.result import Status
from acsolve.equations.solver import Solver
from acsolve.errors import EquationError

Array = NDArray[Any]

_METHOD = "numeric: a scan of the band with the slope at each point, not certified"
_CERTIFIED = 4_000  # products of an elimination up to which it is carried out in balls
_CERTIFIED_PARTS = 1_000
_SAMPLES = np.logspace(-3, 12, 7)  # hertz, to plan the elimination by
_PER_DECADE = 25  # at first, everywhere
_FINER = 8  # times as many where the gain is within reach of the level
_REACH_DB = 40.0
_BITS = 256
_ROUNDS = 4  # of points put where the slopes point at an extremum
_NEAR_DB = 6.0  # an extremum that may come this close to the level is looked at
_STEEP = 0.02
_DOUBLE = "The reference is known in double precision only, so nothing is proven."


_LARGEST_EXACT = 1_200  # unknowns; a ladder of so many takes some ten seconds to be exact
_BUDGET = 200_000  # terms of a form with numbers; a mesh of 6 by 6 nodes takes ten seconds


def form_or_none(netlist: Netlist, ask: Ask, symbols: Symbols) -> ClosedForm | None:
    """The closed form that cutoffs are counted on; None where `large_cutoffs` is to answer."""
    free = (
        symbols.symbolic
        or symbols.keep
        or any(value.expression is None for _, value in netlist.values())
    )
    if free:
        return closed_form(netlist, ask, symbols)
    if len(netlist.parts) > _LARGEST_EXACT or len(ask.system(netlist).unknowns) > _LARGEST_EXACT:
        return None
    try:
        return closed_form(netlist, ask, symbols, budget=_BUDGET)
    except EquationError as error:
        if error.code != "equations.budget":
            raise
        return None


def large_cutoffs(
    netlist: Netlist,
    ask: Ask,
    *,
    level: CutoffLevel,
    reference: ReferenceName | Fraction | None = None,
    band: HertzBand | None = None,
) -> CutoffAnswer:
    """Every frequency found in a band where the gain crosses a level below its reference.

    Parameters
    ----------
    netlist : the circuit, every value a number.
    level, reference, band : as for `acsolve.analyses.band_cutoff.band_cutoffs`.

    Raises
    ------
    AnalysisError
        [question.no-reference], [sweep.band].
    EquationError
        [question.no-value], [equations.singular].

    Notes
    -----
    Small networks with many lines are bracketed with proof, their equations eliminated in
    balls; the rest is a scan, never called complete.
    """
    solver = solver_for(netlist, ask, _SAMPLES)
    edges = band_of_solver(solver) if band is None else checked_band(band)
    response = _certified(netlist, ask)
    name: ReferenceName | None = None
    if isinstance(reference, Fraction):
        basis = stated(reference)
    else:
        proven = None if response is None else _proven_zero(response)
        ends = proven or _at_zero(solver), _at_infinity(solver, edges)
        name = reference or by_shape(*ends)
        if name == "peak":
            basis = _peak(solver, edges) if response is None else peak(response, edges)
        else:
            end = ends[name != "dc"]
            basis = _at_end(name, end, proven=end is proven)
    if response is not None:
        return answered(response, basis, level, edges)
    return _scanned(solver, basis, level, edges)


def _certified(netlist: Netlist, ask: Ask) -> SolvedResponse | None:
    """The response in balls, where that takes little."""
    if len(netlist.parts) > _CERTIFIED_PARTS:
        return None
    response = solved_response(netlist, ask, _SAMPLES)
    return response if response.cost <= _CERTIFIED else None


def _proven_zero(response: SolvedResponse) -> End | None:
    """The gain at 0 Hz in balls, where the equations are regular there."""
    with precision(_BITS):
        value = response.at_zero()
    if value is None or not value > 0:
        return None
    return End("value", response.at_zero)


def _at_zero(solver: Solver) -> End:
    local = solver.near_zero()[0]
    return End("unknown") if local is None else _end(local)


def _end(local: Local) -> End:
    if local.vanishes or local.order > 0:
        return End("zero")
    if local.order < 0:
        return End("infinite")
    return End("value", partial(_squared, local.mantissa, local.exponent))


def _squared(mantissa: complex, exponent: int) -> Any:
    from flint import acb, arb

    return abs(acb(mantissa)) ** 2 * arb(2) ** (2 * exponent)


def _at_infinity(solver: Solver, band: HertzBand) -> End:
    """From the power of frequency that the gain follows far above the band; seen, not proven."""
    hertz = float(band.high) * np.array([1e3, 1e6])
    solution = solver.solve(hertz)
    power = -solution.slope[0].imag * 2 * pi * hertz
    if not np.all(solution.status[0] < Status.ZERO) or np.ptp(power) > _STEEP:
        return End("unknown")
    if abs(power[-1]) > _STEEP:
        return End("zero" if power[-1] < 0 else "infinite")
    mantissa, exponent = solution.mantissa[0, -1], solution.exponent[0, -1]
    return End("value", partial(_squared, complex(mantissa), int(exponent)))


def _at_end(name: ReferenceName, end: End, *, proven: bool) -> Basis:
    where = "at 0 Hz" if name == "dc" else "at infinite frequency"
    if end.squared is None:
        kind = "not to be found" if end.kind == "unknown" else end.kind
        raise no_reference(f"the gain {where} is {kind}")
    with precision(_BITS):
        gain = float(end.squared().sqrt().mid())
    shown = Reference(at=name, gain=gain, hertz=0.0 if name == "dc" else None)
    return Basis(shown, end.squared, proven=proven, remarks=() if proven else (_DOUBLE,))


def _grid(band: HertzBand) -> Array:
    decades = log10(float(band.high)) - log10(float(band.low))
    return np.geomspace(float(band.low), float(band.high), int(decades * _PER_DECADE) + 2)


def _curve(solver: Solver, hertz: Array) -> tuple[Array, Array]:
    """Gain in dB, and its slope in dB by the natural logarithm of frequency."""
    solution = solver.solve(hertz)
    slope = -solution.slope[0].imag * 2 * pi * hertz * 20 / np.log(10)
    return solution.gain_db()[0], slope


def _peak(solver: Solver, band: HertzBand) -> Basis:
    """The largest gain of a grid, looked at more and more closely."""
    hertz = _grid(band)
    gain, _ = _curve(solver, hertz)
    if np.isposinf(gain).any():
        raise no_reference(f"the response has a pole on the frequency axis within {band}")
    for _ in range(8):
        top = int(np.nanargmax(gain))
        low, high = hertz[max(top - 1, 0)], hertz[min(top + 1, len(hertz) - 1)]
        hertz = np.geomspace(low, high, 65)
        gain, _ = _curve(solver, hertz)
    top = int(np.nanargmax(gain))
    if not np.isfinite(gain[top]):
        raise no_reference(f"the gain is zero within {band}")
    solution = solver.solve(hertz[[top]])
    squared = partial(_squared, complex(solution.mantissa[0, 0]), int(solution.exponent[0, 0]))
    shown = Reference(at="peak", gain=float(squared().sqrt().mid()), hertz=float(hertz[top]))
    return Basis(shown, squared, proven=False, remarks=(_DOUBLE,))


def _scanned(solver: Solver, basis: Basis, level: CutoffLevel, band: HertzBand) -> CutoffAnswer:
    wanted = float((10 * (basis.ball() * level.ball()).log() / _ten()).mid())

    def curve(hertz: Array) -> tuple[Array, Array]:
        gain, slope = _curve(solver, hertz)
        return gain - wanted, slope

    hertz = _grid(band)
    gain, slope = curve(hertz)
    for find in (_within_reach, *[_between] * _ROUNDS):
        extra = find(hertz, gain, slope)
        if len(extra):
            hertz, gain, slope = _merged((hertz, gain, slope), (extra, *curve(extra)))
    found = _crossings(curve, hertz, gain)
    remarks = () if found else (f"No crossing of this level was found within {band}.",)
    return CutoffAnswer(
        form=None,
        reference=basis.shown,
        level_db=level.db,
        cutoffs=tuple(found),
        complete=False,
        method=_METHOD,
        searched=(float(band.low), float(band.high)),
        remarks=remarks,
    )


def _ten() -> Any:
    from flint import arb

    return arb(10).log()


def _merged(first: tuple[Array, ...], second: tuple[Array, ...]) -> tuple[Array, ...]:
    joined = [np.concatenate(pair) for pair in zip(first, second, strict=True)]
    order = np.argsort(joined[0])
    return tuple(item[order] for item in joined)


def _within_reach(hertz: Array, gain: Array, slope: Array) -> Array:
    """More frequencies where the gain may come to the level before the next point."""
    step = np.diff(np.log(hertz))
    with np.errstate(all="ignore"):  # at zeros and poles there is no slope: they count as far
        near = np.minimum(np.abs(gain[:-1]), np.abs(gain[1:]))
        steep = np.maximum(np.abs(slope[:-1]), np.abs(slope[1:])) * step
        changes = np.sign(gain[:-1]) != np.sign(gain[1:])
        places = np.flatnonzero(changes | ~(near > _REACH_DB + 2 * steep))
    shares = np.arange(1, _FINER) / _FINER
    return np.asarray(
        np.exp(np.log(hertz[places])[:, None] + step[places][:, None] * shares).ravel()
    )


def _between(hertz: Array, gain: Array, slope: Array) -> Array:
    """Frequencies between neighbours of one sign whose slopes point at an extremum near zero."""
    u = np.log(hertz)
    step = np.diff(u)
    same = np.sign(gain[:-1]) == np.sign(gain[1:])
    towards = (np.sign(gain[:-1]) * slope[:-1] < 0) & (np.sign(gain[1:]) * slope[1:] > 0)
    with np.errstate(all="ignore"):  # zeros and poles have no slope: they are left out
        reach = np.minimum(np.abs(slope[:-1]), np.abs(slope[1:])) * step
        near = np.minimum(np.abs(gain[:-1]), np.abs(gain[1:])) < reach + _NEAR_DB
        share = np.abs(slope[:-1]) / (np.abs(slope[:-1]) + np.abs(slope[1:]))
    places = np.flatnonzero(same & towards & near & (step > 1e-9))
    return np.asarray(np.exp(u[places] + step[places] * np.clip(share[places], 0.05, 0.95)))


def _crossings(
    curve: Callable[[Array], tuple[Array, Array]], hertz: Array, gain: Array
) -> list[Cutoff]:
    """Every change of sign, polished by Newton's method within its bracket."""
    level = np.sign(np.where(np.isnan(gain), 0.0, gain))
    known = np.flatnonzero(level)
    changes = np.flatnonzero(level[known[:-1]] != level[known[1:]])
    low, high = np.log(hertz[known[changes]]), np.log(hertz[known[changes + 1]])
    rising = level[known[changes]] < 0
    u = (low + high) / 2
    for _ in range(60):
        if not len(u):
            break
        value, slope = curve(np.exp(u))
        below = (value < 0) == rising
        low, high = np.where(below, u, low), np.where(below, high, u)
        with np.errstate(all="ignore"):  # a step that is none is replaced by the middle
            step = u - value / slope
        inside = (step > low) & (step < high)
        after = np.where(inside, step, (low + high) / 2)
        moved = np.abs(after - u)
        u = np.where(value == 0, u, after)
        if np.all((moved < 1e-15) | (value == 0) | (high - low < 4e-16)):
            break
    return [
        Cutoff(
            hertz=float(item),
            rad_per_s=float(2 * pi * item),
            closed_form=None,
            direction="rising" if up else "falling",
        )
        for item, up in zip(np.exp(u), rising, strict=True)
    ]
