"""One question over many values of the parts: planned once, eliminated for blocks of points.

A point is a sample of values together with a frequency. The entries of the matrix hold one
number a point where they depend on what varies; the elimination and its error estimate are
those of a sweep (`acsolve.equations.replay`).
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping
from dataclasses import dataclass, replace
from math import pi
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.lu import backward, factor, needed_steps
from acsolve.algebra.plan import Plan, plan_elimination
from acsolve.circuit.netlist import Netlist, Part, bindings, with_values
from acsolve.circuit.value import Value
from acsolve.equations.evaluate import Evaluator, FloatArithmetic, angle_name
from acsolve.equations.numeric import Entry, FunctionEntry, Numbers, PolynomialEntry, numbers
from acsolve.equations.replay import Replayed, replay, replay_scaled
from acsolve.equations.system import Functional, System

Array: TypeAlias = NDArray[Any]

_ACCURATE = 1e-9  # as for a sweep: an estimated relative error above this is no answer
_RANGE = 2.0**800  # likewise: beyond it powers of two are carried along
_BYTES = 1 << 21  # working set of one block: about the second cache (empirical)
_BLOCK = (64, 2048)  # points in a block, least and most
_WIDE = 4  # blocks are so much longer without a check, which needs less room
_OFF_GRID = (0.9713, 1.0171, 1.0373)  # keeps the plan's samples off special frequencies


def with_symbols_for(netlist: Netlist, names: Mapping[str, Any]) -> Netlist:
    """The netlist in which the named values are symbols: none of them opens or shorts."""
    known = bindings(netlist)
    free = {name: replace(known.get(name, Value()), expression=None) for name in names}
    return with_values(netlist, free)


def sampled_values(netlist: Netlist, values: Mapping[str, Array]) -> Evaluator:
    """An evaluator over arrays of values; the amplitude of a source is turned by its angle."""
    arithmetic = FloatArithmetic()
    evaluate = Evaluator(bindings(netlist), arithmetic, overrides=values)
    known = bindings(netlist)
    for name, numbers_ in values.items():
        if angle_name(name) in known:
            evaluate.set(name, numbers_ * arithmetic.rotation(evaluate.name(angle_name(name))))
    return evaluate


def branches(evaluate: Evaluator) -> Callable[[Part], bool]:
    """Which resistors need a branch current: those that have no finite conductance somewhere."""

    def takes(part: Part) -> bool:
        with np.errstate(all="ignore"):  # a division by zero is what is looked for
            conductance = np.divide(1.0, evaluate.name(part.name))
        return not bool(np.all(np.isfinite(conductance)))

    return takes


@dataclass(frozen=True, slots=True, eq=False)
class Elimination:
    """The prepared question; the varied values are symbols of the netlist."""

    netlist: Netlist
    system: System
    observed: Functional
    driven: Functional
    plan: Plan

    @property
    def block(self) -> int:
        """Points that are solved together."""
        return int(np.clip(_BYTES // (16 * (self.plan.slots + 3 * self.plan.size)), *_BLOCK))

    def numbers(self, values: Mapping[str, Array]) -> Numbers:
        """The entries of the matrix for values of shape (points,)."""
        return _numbers(self.netlist, self.system, self.driven, values)

    def fill(self, values: Mapping[str, Array], hertz: Array, answer: Array) -> None:
        """Write the response of some samples at all frequencies; nothing is checked.

        What depends on the samples alone is worked out once a sample, what depends on the
        frequency alone once a frequency.

        Parameters
        ----------
        values : name -> values in SI units, shape (samples,).
        hertz : shape (frequencies,).
        answer : complex, shape (samples, frequencies), written to.
        """
        upright = {name: item[:, np.newaxis] for name, item in values.items()}
        wide = max(1, min(len(hertz), _WIDE * self.block))
        high = max(1, _WIDE * self.block // wide)
        steps = needed_steps(self.plan, self.observed)
        with np.errstate(all="ignore"):  # what is not finite is the caller's to find
            entries = self.numbers(upright)
            for row in range(0, len(answer), high):
                some = _some(entries, slice(row, row + high), self.netlist, upright)
                for column in range(0, len(hertz), wide):
                    s = 2j * pi * hertz[column : column + wide]
                    here = answer[row : row + high, column : column + wide]
                    here[...] = self._quick(some, s, steps)

    def _quick(self, entries: Numbers, s: Array, steps: Collection[int]) -> Any:
        factors = factor(self.plan, entries.at(s), {entries.size - 1: 1.0}, kept=steps)
        x = backward(factors, steps)
        return sum(
            x[column] * float(item)
            for column, item in self.observed.items()
            if x[column] is not None
        )

    def solve(self, values: Mapping[str, Array], hertz: Array) -> tuple[Array, Array]:
        """Answers at points and which of them are accurate, both of shape (points,).

        Parameters
        ----------
        values : name -> values in SI units, shape (points,).
        hertz : frequencies, shape (points,).

        Notes
        -----
        Each point has an estimate of its relative error; "accurate" is at most 1e-9.
        """
        s = 2j * pi * hertz
        with np.errstate(all="ignore"):  # a point without an answer is told by its estimate
            entries = self.numbers(values)
        plain = replay(entries, self.plan, [self.observed], s)
        found, good = _answers(plain)
        size = np.abs(found)
        inside = (size > 1 / _RANGE) & (size < _RANGE) | (plain.error[0] == 0)
        beyond = np.flatnonzero(~inside)
        if len(beyond):
            there = {name: item[beyond] for name, item in values.items()}
            with np.errstate(all="ignore"):  # as above
                entries = self.numbers(there)
            carried = replay_scaled(entries, self.plan, [self.observed], s[beyond])
            found[beyond], good[beyond] = _answers(carried)
        return found, good


def _answers(replayed: Replayed) -> tuple[Array, Array]:
    """The values as plain complex numbers, and which of them can be believed."""
    shift = np.clip(replayed.exponent[0], -5000, 5000).astype(np.int32)
    mantissa = replayed.mantissa[0]
    with np.errstate(all="ignore"):  # zero below a double's range, infinite above it
        value = np.ldexp(mantissa.real, shift) + 1j * np.ldexp(mantissa.imag, shift)
    return value, (replayed.error[0] <= _ACCURATE) & np.isfinite(mantissa)


def _some(entries: Numbers, here: slice, netlist: Netlist, values: Mapping[str, Array]) -> Numbers:
    """The entries for some of the samples, which stand upright: shape (samples, 1)."""
    evaluate = sampled_values(netlist, {name: item[here] for name, item in values.items()})

    def part(entry: Entry) -> Entry:
        if isinstance(entry, FunctionEntry):
            return replace(entry, evaluate=evaluate)
        assert isinstance(entry, PolynomialEntry), "rows of equal copies are not condensed here"
        return PolynomialEntry(
            tuple(
                item[here] if isinstance(item, np.ndarray) else item for item in entry.coefficients
            )
        )

    return replace(entries, distinct=tuple(map(part, entries.distinct)))


def _numbers(
    netlist: Netlist, system: System, driven: Functional, values: Mapping[str, Array]
) -> Numbers:
    laws = enumerate(system.laws)
    places = [(row, column) for row, law in laws for column in law.entries]
    return numbers(system, driven, sampled_values(netlist, values), places=places)


def prepared(
    netlist: Netlist,
    system: System,
    *,
    observed: Functional,
    driven: Functional,
    values: Mapping[str, Array],
    hertz: Array,
) -> Elimination:
    """Plan the elimination for samples of values, shape (samples,), over frequencies.

    The order is chosen from the entries at a few samples and frequencies. A plan with
    `undetermined` columns solves nothing.
    """
    samples = len(next(iter(values.values())))
    chosen = np.unique(np.linspace(0, samples - 1, 3).astype(int))
    positive = np.sort(hertz[hertz > 0]) if np.any(hertz > 0) else np.array([1.0])
    low_to_high = positive[[0, len(positive) // 2, -1]] * _OFF_GRID
    s = 2j * pi * np.tile(low_to_high, len(chosen))
    points = {name: np.repeat(item[chosen], 3) for name, item in values.items()}
    with np.errstate(all="ignore"):  # a sample out of range only makes a poorer order
        entries = _numbers(netlist, system, driven, points)
        found = np.array([np.broadcast_to(item, s.shape) for item in entries.at(s)], dtype=complex)
    found[~np.isfinite(found)] = 0
    plan = plan_elimination(entries.rows, entries.columns, found, size=entries.size)
    return Elimination(netlist, system, observed, driven, plan)
