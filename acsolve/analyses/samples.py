"""A response over arrays of part values: parameter sweeps and Monte Carlo without a loop.

Two ways lead to the same numbers. The closed form with the varied values as symbols costs a
few operations a point, since everything but powers of the frequency is worked out once a
sample. The elimination serves networks whose closed form is too large, or none. The cheaper
one by estimate is taken; what the closed form cannot give accurately is eliminated, and what
elimination cannot either is solved sample by sample as `sweep` solves it.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator, Mapping
from concurrent.futures import ThreadPoolExecutor
from dataclasses import replace
from fractions import Fraction
from typing import Any, Literal, TypeAlias

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.question import Ask, refuse_unreferenced
from acsolve.analyses.sample_values import samples_of
from acsolve.analyses.sampled_form import SampledForm, sampled_form
from acsolve.analyses.sweep import solver_for
from acsolve.analyses.transfer import closed_form
from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import Netlist, with_values
from acsolve.circuit.value import Value
from acsolve.equations.sampled import (
    Elimination,
    branches,
    prepared,
    sampled_values,
    with_symbols_for,
)
from acsolve.errors import Diagnostic, EquationError

Array: TypeAlias = NDArray[Any]
Way: TypeAlias = Literal["closed form", "elimination"]

_CLOSED_UNKNOWNS = 60  # beyond so many a closed form is neither quick to find nor accurate
_CLOSED_TERMS = 4000  # beyond so many it is not looked for
_WORTH_A_FORM = 0.1  # seconds of elimination that pay for finding a closed form (empirical)
_SECONDS_A_POINT = 12e-9  # of a block of the closed form, with its check (measured)
_SECONDS_A_POWER = 1e-9  # the same, more for each power of s
_SECONDS_A_TERM = 5e-9  # a sample and a term of a coefficient
_SECONDS_A_PRODUCT = 10e-9  # a point and a product of plain elimination (measured)
_SAMPLES_AT_ONCE, _POINTS_AT_ONCE = 4096, 1 << 20  # of one thread
_CHECKED = 4  # frequencies of each sample at which a plain elimination is checked
_NEAR = 1e-9  # relative: how near it must come there
_RANGE = 2.0**800  # beyond it, or below its inverse, a plain elimination is not believed
_MOST_ALONE = 10_000  # samples that may be solved one by one: some minutes


def responses(netlist: Netlist, ask: Ask, hertz: Array, given: Any) -> NDArray[np.complex128]:
    """The response over values as a caller gives them, shape (*samples, *hertz.shape).

    Frequency is the last axis: one sample's response lies together, as `response` gives it.
    Raises as `samples_of` and `responses_over`.
    """
    samples = samples_of(given, netlist, points=hertz.size)
    answer = responses_over(netlist, ask, hertz.ravel(), samples.values)
    return answer.reshape((*samples.shape, *hertz.shape))


def responses_over(
    netlist: Netlist,
    ask: Ask,
    hertz: Array,
    values: Mapping[str, Array],
    *,
    way: Way | None = None,
) -> NDArray[np.complex128]:
    """The response at every sample of some values and every frequency.

    Parameters
    ----------
    netlist : the circuit; what refers to a varied value follows it.
    ask : the question.
    hertz : frequencies from 0 upwards, shape (frequencies,).
    values : name -> values in SI units, finite, all of shape (samples,).
    way : the way to solve it, None for the cheaper one.

    Returns
    -------
    Complex, shape (samples, frequencies); infinite at a pole, as in a sweep.

    Raises
    ------
    EquationError
        [question.no-value] a value is a symbol and not among the varied; [equations.singular]
        and others of a sweep, for the first sample that has no answer; [equations.budget] too
        many samples would have to be solved one by one.

    Notes
    -----
    A closed form has an estimate of the relative error of every point, at most 1e-12; what is
    above it is eliminated with the estimate of a sweep, at most 1e-9. Plain elimination is
    compared with that at four frequencies of each sample (all, where there are eight at most);
    a sample that fails, and every point out of a double's range, is eliminated with it too.
    What is left then is solved as a sweep does, in balls at last.
    """
    samples = len(next(iter(values.values())))
    answer = np.empty((samples, len(hertz)), dtype=complex)
    if answer.size == 0:
        return answer
    free = with_symbols_for(netlist, values)
    elimination = _eliminating(free, ask, hertz, values)
    form = None
    if way != "elimination":
        form = _closed(free, ask, hertz, values, elimination, wanted=way is not None)
    left = _by_blocks(form, elimination, values, hertz, answer)
    _alone(netlist, ask, values, hertz, left, answer)
    return answer


def _eliminating(free: Netlist, ask: Ask, hertz: Array, values: Mapping[str, Array]) -> Elimination:
    evaluate = sampled_values(free, values)
    system = ask.system(free, branch_for=branches(evaluate))
    refuse_unreferenced(system, ask)
    return prepared(
        free,
        system,
        observed=ask.observed(system),
        driven=ask.driven(system),
        values=values,
        hertz=hertz,
    )


def _closed(
    free: Netlist,
    ask: Ask,
    hertz: Array,
    values: Mapping[str, Array],
    elimination: Elimination,
    *,
    wanted: bool,
) -> SampledForm | None:
    """The closed form, where there is one and it is the cheaper way, or the one wanted."""
    points = len(next(iter(values.values()))) * len(hertz)
    eliminated = points * elimination.plan.multiplications * _SECONDS_A_PRODUCT
    if not wanted and (eliminated < _WORTH_A_FORM or elimination.plan.size > _CLOSED_UNKNOWNS):
        return None
    try:
        found = closed_form(free, ask, budget=_CLOSED_TERMS)
    except EquationError:  # too large, or no answer: the elimination says which
        return None
    form = sampled_form(free, found, values, hertz)
    if form is None or wanted:
        return form
    return form if seconds(form, points, len(hertz)) < eliminated else None


def seconds(form: SampledForm, points: int, frequencies: int) -> float:
    """Estimated time of the closed form over samples and frequencies."""
    block = points * (_SECONDS_A_POINT + form.powers * _SECONDS_A_POWER)
    return block + points / frequencies * form.terms * _SECONDS_A_TERM


def _by_blocks(
    form: SampledForm | None,
    elimination: Elimination,
    values: Mapping[str, Array],
    hertz: Array,
    answer: Array,
) -> Array:
    """Fill the answer; places (sample, frequency) that are left, shape (n, 2)."""
    if form is None and elimination.plan.undetermined:
        _refuse_many(len(answer), hertz[0])
        return _whole(np.arange(len(answer)), len(hertz))
    rows = max(1, min(_SAMPLES_AT_ONCE, _POINTS_AT_ONCE // len(hertz)))

    def work(start: int) -> Array:
        here = slice(start, start + rows)
        some, part = {name: item[here] for name, item in values.items()}, answer[here]
        left = _plain(elimination, some, hertz, part) if form is None else form.fill(some, part)
        left = _with_check(elimination, some, hertz, left, part)
        return np.asarray(left + np.array([start, 0]))

    return np.concatenate(list(_in_threads(work, range(0, len(answer), rows))))


def _plain(
    elimination: Elimination, values: Mapping[str, Array], hertz: Array, answer: Array
) -> Array:
    """Eliminate; the places that may be wrong, shape (n, 2)."""
    samples, frequencies = answer.shape
    if frequencies <= 2 * _CHECKED:
        return _whole(np.arange(samples), frequencies)
    elimination.fill(values, hertz, answer)
    size = np.abs(answer)
    doubtful = ~((size > 1 / _RANGE) & (size < _RANGE))
    doubtful[_wrong(elimination, values, hertz, answer)] = True
    return np.argwhere(doubtful)


def _wrong(
    elimination: Elimination, values: Mapping[str, Array], hertz: Array, answer: Array
) -> Array:
    """Samples that err at one of a few frequencies, other ones for each sample."""
    samples, frequencies = answer.shape
    rows = np.repeat(np.arange(samples), _CHECKED)
    spread = np.arange(_CHECKED) * frequencies // _CHECKED
    columns = (np.arange(samples)[:, np.newaxis] + spread).ravel() % frequencies
    found, good = _solved(elimination, values, hertz, np.stack((rows, columns), axis=1))
    with np.errstate(all="ignore"):  # what is not finite is not near
        near = abs(answer[rows, columns] - found) <= _NEAR * abs(found)
    return np.unique(rows[~(good & near)])


def _solved(
    elimination: Elimination, values: Mapping[str, Array], hertz: Array, places: Array
) -> tuple[Array, Array]:
    """Answers at places, shape (n,), and which of them are accurate."""
    found, good = np.empty(len(places), dtype=complex), np.empty(len(places), dtype=bool)
    for start in range(0, len(places), elimination.block):
        here = slice(start, start + elimination.block)
        rows, columns = places[here].T
        some = {name: item[rows] for name, item in values.items()}
        found[here], good[here] = elimination.solve(some, hertz[columns])
    return found, good


def _with_check(
    elimination: Elimination, values: Mapping[str, Array], hertz: Array, left: Array, answer: Array
) -> Array:
    """Eliminate with a check at the places that are left; those that it leaves."""
    if elimination.plan.undetermined or not len(left):
        return left
    found, good = _solved(elimination, values, hertz, left)
    answer[left[good, 0], left[good, 1]] = found[good]
    return left[~good]


def _whole(rows: Array, frequencies: int) -> Array:
    """Every place of some samples."""
    columns = np.tile(np.arange(frequencies), len(rows))
    return np.stack((np.repeat(rows, frequencies), columns), axis=1)


def _in_threads(work: Callable[[int], Any], starts: range) -> Iterator[Any]:
    """Results of blocks in order; NumPy lets other threads run while it computes."""
    threads = min(len(starts), os.cpu_count() or 1)
    if threads < 2:
        yield from map(work, starts)
        return
    pool = ThreadPoolExecutor(threads)
    try:
        yield from pool.map(work, starts)
    finally:
        pool.shutdown(cancel_futures=True)


def _alone(
    netlist: Netlist,
    ask: Ask,
    values: Mapping[str, Array],
    hertz: Array,
    left: Array,
    answer: Array,
) -> None:
    """Solve what is left sample by sample, as a sweep does."""
    if not len(left):
        return
    left = left[np.lexsort((left[:, 1], left[:, 0]))]
    rows, starts = np.unique(left[:, 0], return_index=True)
    _refuse_many(len(rows), hertz[left[0, 1]])
    for row, places in zip(rows, np.split(left[:, 1], starts[1:]), strict=True):
        changed = {name: _number(netlist, name, item[row]) for name, item in values.items()}
        some = hertz[places]
        try:
            solver = solver_for(with_values(netlist, changed), ask, some)
        except EquationError as error:
            raise _at_sample(error, {name: item[row] for name, item in values.items()}) from error
        answer[row, places] = solver.solve(some).value()[0]


def _number(netlist: Netlist, name: str, value: float) -> Value:
    old = dict(netlist.values()).get(name, Value())
    return replace(old, expression=Number(Fraction(float(value))))


_MOST_NAMED = 3  # values that a message spells out


def _at_sample(error: EquationError, values: Mapping[str, float]) -> EquationError:
    listed = [f"{name} = {value:.6g}" for name, value in values.items()]
    more = ", …" if len(listed) > _MOST_NAMED else ""
    where = f"{', '.join(listed[:_MOST_NAMED])}{more}"
    return EquationError(
        replace(item, message=f"{item.message} (with {where})") for item in error.diagnostics
    )


def _refuse_many(count: int, hertz: float) -> None:
    if count <= _MOST_ALONE:
        return
    raise EquationError(
        Diagnostic(
            code="equations.budget",
            message=f"{count:,} samples have frequencies that need a solution of their own, "
            f"{hertz:.6g} Hz for one; at most {_MOST_ALONE:,} can have it",
            hint="Leave out frequencies where the network is singular, 0 Hz for one, or ask "
            "for fewer samples.",
        )
    )
