"""A question prepared for numbers: planned once, then solved at as many points as wanted."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Mapping, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import cache, partial
from math import pi
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.fronts import Fronts
from acsolve.algebra.lu import needed_steps
from acsolve.algebra.plan import Plan, plan_elimination
from acsolve.algebra.route import Route, choose_route
from acsolve.equations.balance import Balance, balances
from acsolve.equations.evaluate import Evaluator
from acsolve.equations.late import Late
from acsolve.equations.numeric import Numbers, numbers
from acsolve.equations.precise import Local, Precise
from acsolve.equations.replay import Replayed, replay, replay_quick, replay_scaled
from acsolve.equations.result import Solution, Status, empty, finished
from acsolve.equations.system import Functional, System
from acsolve.errors import Diagnostic, EquationError

Array = NDArray[Any]

_ACCURATE = 1e-9  # an estimated relative error above this is solved again
_RANGE = 2.0**800  # answers (or their inverses) beyond this are solved with powers of two
_WORTH_A_PLAN = 16  # failing points that pay for a plan of their own (empirical)
_BYTES = 1 << 28  # working set of one block of points: larger blocks gain nothing (empirical)
_BLOCK = (32, 4096)  # points in a block, least and most
_FEW_POINTS, _MOST_BYTES = 256, 1 << 30  # fewer points than these are worth so much memory
_IN_HAND = 64  # vectors of a streamed elimination besides those it is asked to hold
_ACCEPTABLE = 1e-5  # the same, where balls would cost too much
_BALL_BUDGET = 3_000_000  # entries times points that may be solved in balls: some ten seconds
_ZEROS_ENOUGH = 3  # exact zeros in a row after which all failing points count as zero


@dataclass(frozen=True, slots=True, eq=False)
class Solver:
    """The prepared question; `print(solver.plan)` shows order, cost and route."""

    numbers: Numbers
    plan: Plan
    observed: tuple[Functional, ...]
    precise: Precise
    route: Route
    balances: Callable[[], Mapping[int, Balance]]  # rows to be checked part by part
    late: Callable[[], Late]  # elements for what is not checked

    def solve(self, hertz: Array) -> Solution:
        """Answers at frequencies in hertz, shape (points,), each checked.

        Notes
        -----
        Points whose estimated error is above 1e-9, or that are not finite, are solved again:
        with powers of two carried along, then in an order chosen from their own values, and
        at last in balls, by a limit where the matrix is singular.

        """
        hertz = np.asarray(hertz, dtype=float)
        arrays, spare = (empty(len(self.observed), len(hertz)) for _ in range(2))
        _steady_memory()
        fronts = self.route.fronts
        for here, answer in self._attempts(self.plan, hertz, np.arange(len(hertz)), fronts):
            _keep(arrays, here, answer, Status.OK)
            _keep(spare, here, answer, Status.INEXACT)
        failing = _failing(arrays)
        order = self.plan.order
        for _ in range(2):
            if len(failing) < _WORTH_A_PLAN:
                break
            plan = _plan(self.numbers, _spread(hertz[failing]))
            if plan.undetermined or plan.order == order:
                break
            order = plan.order
            for here, answer in self._attempts(plan, hertz, failing):
                _keep(arrays, here, answer, Status.RE_SOLVED)
            failing = _failing(arrays)
        if len(failing) * self.plan.slots > _BALL_BUDGET:
            _adopt(arrays, spare)
            failing = _failing(arrays)[: max(_BALL_BUDGET // self.plan.slots, 1)]
        self._point_by_point(hertz, failing, arrays)
        return finished(arrays)

    def quick(self, hertz: Array) -> NDArray[np.complex128]:
        """Plain values, shape (observed, points), without slope and without a check.

        For many solutions of one circuit; points that are not finite or out of a double's
        range are solved with the check, and only these.
        """
        hertz = np.asarray(hertz, dtype=float)
        values = np.empty((len(self.observed), len(hertz)), dtype=complex)
        fronts = self.route.fronts
        route = fronts or self.late()
        length = _block_length(self.plan, fronts) if fronts else self._streamed_length()
        _steady_memory()
        for start in range(0, len(hertz), length):
            here = slice(start, start + length)
            s = 2j * pi * hertz[here]
            values[:, here] = replay_quick(self.numbers, self.plan, self.observed, s, route=route)
        size = np.abs(values)
        bad = np.flatnonzero(~((size > 1 / _RANGE) & (size < _RANGE)).all(axis=0))
        if len(bad):
            values[:, bad] = self.solve(hertz[bad]).value()
        return values

    def _streamed_length(self) -> int:
        """Points in a block where only what the observed quantities need is held."""
        wanted = {column for c in self.observed for column in c}
        held = sum(len(self.plan.steps[at].right) + 2 for at in needed_steps(self.plan, wanted))
        least, most = _BLOCK
        return int(np.clip(_BYTES // (16 * (held + _IN_HAND)), least, most))

    def near_zero(self) -> list[Local | None]:
        """H near 0 Hz: its order and leading coefficient, for each functional."""
        arrays = empty(len(self.observed), 1)
        for here, answer in self._attempts(self.plan, np.zeros(1), np.arange(1)):
            _keep(arrays, here, answer, Status.OK)
        if np.all(arrays["status"] == Status.OK) and np.all(arrays["mantissa"] != 0):
            return [
                Local(0.0, complex(m), int(e), complex(slope))
                for m, e, slope in zip(
                    arrays["mantissa"][:, 0],
                    arrays["exponent"][:, 0],
                    arrays["slope"][:, 0],
                    strict=True,
                )
            ]
        return self.precise.beside(Fraction(0))

    def _attempts(
        self, plan: Plan, hertz: Array, wanted: Array, fronts: Fronts | None = None
    ) -> Iterator[tuple[Array, Replayed]]:
        """Solve some points, block by block; those out of a double's range with powers of two."""
        length, balances = _block_length(plan, fronts), self.balances()
        for start in range(0, len(wanted), length):
            here = wanted[start : start + length]
            s = 2j * pi * hertz[here]
            plain = replay(self.numbers, plan, self.observed, s, fronts=fronts, balances=balances)
            yield here, plain
            size = np.abs(plain.mantissa)
            inside = (size > 1 / _RANGE) & (size < _RANGE) | (plain.error == 0)
            beyond = np.flatnonzero(~inside.all(axis=0))
            if len(beyond):
                yield (
                    here[beyond],
                    replay_scaled(self.numbers, plan, self.observed, s[beyond], balances=balances),
                )

    def _point_by_point(self, hertz: Array, failing: Array, arrays: dict[str, Array]) -> None:
        zeros = 0
        for number, place in enumerate(failing):
            if zeros >= _ZEROS_ENOUGH:
                _keep_zeros(arrays, failing[number:])
                return
            locals_ = self.precise.at(Fraction(float(hertz[place])))
            rows = np.flatnonzero(arrays["status"][:, place] == Status.UNDEFINED)
            found = [locals_[row] for row in rows]
            vanish = all(item is not None and item.vanishes for item in found)
            zeros = zeros + 1 if vanish else 0
            for row, item in zip(rows, found, strict=True):
                _keep_local(arrays, int(row), int(place), item)


def prepare(
    system: System,
    *,
    observed: Sequence[Functional],
    driven: Functional,
    hertz: Array,
    values: Evaluator,
    balls: Callable[[], Evaluator],
) -> Solver:
    """Evaluate the circuit's values, plan the elimination and choose how to run it.

    Parameters
    ----------
    system : the equations of the circuit for the question.
    observed : what is asked for, each a linear function of the unknowns.
    driven : what is set to 1.
    hertz : where the solver will be used; a few of these are the samples of the plan, and
        their number decides between single steps and dense blocks.
    values : the circuit's values in doubles.
    balls : makes the same in balls, at the working precision of the moment.

    Raises
    ------
    EquationError
        [question.no-value] a value is a symbol; [equations.singular] no frequency
        determines some unknowns.

    """
    entries = numbers(system, driven, values)
    hertz = np.asarray(hertz, dtype=float)
    plan = _plan(entries, _spread(hertz))
    if plan.undetermined:
        plan = _plan(entries, _GENERIC)
    if plan.undetermined:
        raise _singular(system, plan)
    route = choose_route(plan, len(hertz))
    plan = replace(plan, remark=str(route))
    places = tuple(zip(entries.rows, entries.columns, strict=True))
    precise = Precise(
        plan,
        lambda: numbers(system, driven, balls(), places=places),
        tuple(observed),
    )
    by_parts = cache(partial(balances, system, entries, values))
    late = cache(partial(Late, entries))
    return Solver(entries, plan, tuple(observed), precise, route, by_parts, late)


_GENERIC = np.array([0.0137, 13.7, 13.7e3, 13.7e6])  # hertz, where nothing better is known
_OFF_GRID = (0.9713, 1.0171, 1.0373)  # keeps the samples off frequencies that values round to


def _spread(hertz: Array) -> Array:
    """Low, middle and high of the frequencies, slightly moved."""
    positive = np.sort(hertz[(hertz > 0) & np.isfinite(hertz)])
    if not len(positive):
        return _GENERIC
    middle = positive[len(positive) // 2]
    return np.array([positive[0], middle, positive[-1]]) * _OFF_GRID


def _plan(entries: Numbers, hertz: Array) -> Plan:
    s = 2j * pi * hertz
    with np.errstate(all="ignore"):  # a sample out of range only makes a poorer order
        samples = entries.table(s)
    samples[~np.isfinite(samples)] = 0
    return plan_elimination(entries.rows, entries.columns, samples, size=entries.size)


def _singular(system: System, plan: Plan) -> EquationError:
    unknown = str(system.unknowns[plan.undetermined[0]])
    return EquationError(
        Diagnostic(
            code="equations.singular",
            message=f"the equations do not determine {unknown} at any frequency",
            hint="Look for a loop of ideal voltage sources or shorts, a node that nothing "
            "conducts to, or an op-amp without feedback.",
        )
    )


def _steady_memory() -> None:
    """Keep the allocator from giving back what the next vectors need at once.

    The common allocator on Linux returns the top of its heap whenever more than 128 kB are free
    there, and the next vector pays for fresh pages: half the time of a long ladder (measured).
    Freeing one large block, never touched, raises that limit; elsewhere this does nothing.
    """
    np.empty(1 << 24, dtype=np.uint8)


def _block_length(plan: Plan, fronts: Fronts | None) -> int:
    """Points that are solved together: many, but with a working set that caches like.

    Where that would leave a few only, the work of each step outweighs that of its numbers, and
    more memory is taken.
    """
    least, most = _BLOCK
    dense = 0 if fronts is None else fronts.stored
    point = 16 * (plan.slots + dense + 3 * plan.size)
    few = np.clip(_MOST_BYTES // point, least, _FEW_POINTS)
    return int(np.clip(_BYTES // point, few, most))


def _failing(arrays: dict[str, Array]) -> Array:
    return np.flatnonzero((arrays["status"] == Status.UNDEFINED).any(axis=0))


def _keep(arrays: dict[str, Array], here: Array, answer: Replayed, status: Status) -> None:
    """Take over the answers that are accurate and not yet known."""
    limit = _ACCEPTABLE if status == Status.INEXACT else _ACCURATE
    good = (answer.error <= limit) & np.isfinite(answer.slope) & np.isfinite(answer.mantissa)
    good &= (np.abs(answer.mantissa) > 1 / _RANGE) & (np.abs(answer.mantissa) < _RANGE) | (
        answer.error == 0
    )
    rows, columns = np.nonzero(good & (arrays["status"][:, here] == Status.UNDEFINED))
    places = here[columns]
    zero = answer.mantissa[rows, columns] == 0
    for name in ("mantissa", "exponent", "slope", "error"):
        arrays[name][rows, places] = getattr(answer, name)[rows, columns]
    arrays["status"][rows, places] = np.where(zero, Status.ZERO, status)


def _adopt(arrays: dict[str, Array], spare: dict[str, Array]) -> None:
    """Take over what is known less well, where nothing better was found."""
    taken = (arrays["status"] == Status.UNDEFINED) & (spare["status"] != Status.UNDEFINED)
    for name, array in arrays.items():
        array[taken] = spare[name][taken]


def _keep_zeros(arrays: dict[str, Array], places: Array) -> None:
    """Fill what is not known yet with zeros."""
    rows, columns = np.nonzero(arrays["status"][:, places] == Status.UNDEFINED)
    for name in ("mantissa", "exponent", "slope", "error"):
        arrays[name][rows, places[columns]] = 0
    arrays["status"][rows, places[columns]] = Status.ZERO


def _keep_local(arrays: dict[str, Array], row: int, place: int, item: Local | None) -> None:
    if item is None:
        return
    vanishes = item.vanishes or item.order > 0
    arrays["mantissa"][row, place] = 0 if vanishes else item.mantissa
    arrays["exponent"][row, place] = 0 if vanishes else item.exponent
    arrays["slope"][row, place] = item.slope
    arrays["error"][row, place] = 0.0
    arrays["status"][row, place] = (
        Status.ZERO
        if vanishes
        else Status.POLE
        if item.order < 0
        else Status.LIMIT
        if item.singular
        else Status.RE_SOLVED
    )
