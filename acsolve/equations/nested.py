"""Elimination that writes names instead of multiplying out: the nested closed form.

Gaussian elimination of the equations from the far end of the network towards the drive.
Every entry that is more than a plain product gets a name, so the size grows with the
elimination's work (linearly for a ladder), not with the number of terms of the expanded
form. A pivot is an impedance or admittance of the network eliminated so far: for a ladder
the names are the continued fraction of W. Cauer (Arch. f. Elektrotechnik 17 (1926)).
"""

from __future__ import annotations

from collections import deque
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

from acsolve.circuit.expression import (
    ONE,
    ZERO,
    Expression,
    Name,
    Number,
    Product,
    Quotient,
    Sum,
    add,
    divide,
    multiply,
    names,
    negate,
    subtract,
    walk,
)
from acsolve.equations.system import DRIVE, Functional, System, Unknown

Probe = Callable[[Expression], int]

PRIME = (1 << 61) - 1  # images decide what is zero; a false zero has probability 2**-55
_LONGEST = 24  # operations in an entry before it gets a name of its own


@dataclass(frozen=True, slots=True)
class Step:
    """One named sub-expression over the parts, s and earlier names, with its meaning."""

    name: str
    expression: Expression
    meaning: str


@dataclass(frozen=True, slots=True)
class Nested:
    """The answer as named steps and a final expression over them."""

    steps: tuple[Step, ...]
    result: Expression


@dataclass(frozen=True, slots=True)
class _Entry:
    """sign · size, and the same modulo the prime, where zero is certain to be seen."""

    sign: int
    size: Expression
    image: int

    def expression(self) -> Expression:
        return self.size if self.sign > 0 else negate(self.size)


def _entry(expression: Expression, image: int) -> _Entry:
    """An entry with its leading sign split off."""
    if isinstance(expression, Number) and expression.value < 0:
        return _Entry(-1, Number(-expression.value), image)
    if isinstance(expression, Product) and isinstance(expression.left, Number):
        factor = expression.left.value
        if factor < 0:
            return _Entry(-1, multiply(Number(-factor), expression.right), image)
    return _Entry(1, expression, image)


def _quotient(first: _Entry, second: _Entry) -> _Entry:
    size = divide(first.size, second.size)
    image = first.image * pow(second.image, -1, PRIME) % PRIME
    return _Entry(first.sign * second.sign, size, image)


def _product(first: _Entry, second: _Entry) -> _Entry:
    size = multiply(first.size, second.size)
    return _Entry(first.sign * second.sign, size, first.image * second.image % PRIME)


def _difference(first: _Entry | None, second: _Entry) -> _Entry | None:
    """first - second, None where it is zero."""
    if first is None:
        return _Entry(-second.sign, second.size, -second.image % PRIME)
    image = (first.image - second.image) % PRIME
    if image == 0:
        return None
    combine = subtract if first.sign == second.sign else add
    return _Entry(first.sign, combine(first.size, second.size), image)


@dataclass(slots=True)
class _Work:
    """The matrix while it is eliminated, with the best pivot of each column kept at hand."""

    unknowns: tuple[Unknown, ...]
    meanings: tuple[str, ...]
    rows: list[dict[int, _Entry]]
    columns: dict[int, set[int]]
    taken: frozenset[str]
    distance: dict[int, int] = field(default_factory=dict)
    live_rows: set[int] = field(default_factory=set)
    best: dict[int, tuple[tuple[int, int, int, int, int], int]] = field(default_factory=dict)
    steps: list[Step] = field(default_factory=list)
    counts: dict[str, int] = field(default_factory=dict)


def nested(
    system: System,
    observed: Functional,
    driven: Functional,
    *,
    expand: Callable[[Expression], Expression],
    probe: Probe,
    taken: frozenset[str],
) -> Nested | None:
    """Observed over driven as named steps; None where the equations are singular.

    Parameters
    ----------
    system : n-1 laws in n unknowns.
    observed, driven : linear functions of the unknowns.
    expand : replaces names by values, down to symbols.
    probe : an expression as a number modulo 2**61 - 1, at one random point.
    taken : names already in use, which steps must not take.
    """
    work = _start(system, expand, probe, taken)
    _drive_last(work, driven)
    work.distance = _distances(work, system)
    work.live_rows = set(range(len(work.rows)))
    for column in range(len(work.unknowns)):
        _rate(work, column)
    pivots: list[tuple[int, int]] = []
    while work.live_rows:
        if not work.best:
            return None
        _, column = min((key, column) for column, (key, _) in work.best.items())
        pivot = (work.best[column][1], column)
        _eliminate(work, pivot)
        pivots.append(pivot)
    return _substitute(work, pivots, observed)


def _start(
    system: System,
    expand: Callable[[Expression], Expression],
    probe: Probe,
    taken: frozenset[str],
) -> _Work:
    rows = []
    for law in system.laws:
        entries = {column: expand(entry) for column, entry in law.entries.items()}
        rows.append(
            {k: _entry(item, image) for k, item in entries.items() if (image := probe(item))}
        )
    columns: dict[int, set[int]] = {k: set() for k in range(len(system.unknowns))}
    for place, row in enumerate(rows):
        for column in row:
            columns[column].add(place)
    return _Work(system.unknowns, tuple(law.meaning for law in system.laws), rows, columns, taken)


def _drive_last(work: _Work, driven: Functional) -> None:
    """Append the law "driven = 1"; its constant is kept in the column after the last."""
    constant = len(work.unknowns)
    row = {column: _Entry(sign, ONE, sign % PRIME) for column, sign in driven.items()}
    row[constant] = _Entry(-1, ONE, PRIME - 1)
    work.columns[constant] = set()
    for column in row:
        work.columns[column].add(len(work.rows))
    work.rows.append(row)
    work.meanings = (*work.meanings, "the drive is one")


def _distances(work: _Work, system: System) -> dict[int, int]:
    """Steps from the drive to each unknown over the equations; far unknowns go first."""
    start = [k for k, item in enumerate(system.unknowns) if item.name == DRIVE]
    start += list(work.rows[-1])
    seen = dict.fromkeys((k for k in start if k < len(work.unknowns)), 0)
    queue = deque(seen)
    while queue:
        column = queue.popleft()
        for row in work.columns[column]:
            for other in work.rows[row]:
                if other < len(work.unknowns) and other not in seen:
                    seen[other] = seen[column] + 1
                    queue.append(other)
    return seen


def _rate(work: _Work, column: int) -> None:
    """Note the best pivot of a column: least fill (Markowitz), then farthest from the drive."""
    live = [row for row in work.columns[column] if row in work.live_rows]
    constant = len(work.unknowns)
    best = None
    for row in live:
        width = len(work.rows[row]) - 1 - (constant in work.rows[row])
        key = (
            width * (len(live) - 1),
            -work.distance.get(column, 1 << 30),
            not _natural(work, row, column),
            column,
            row,
        )
        if best is None or key < best[0]:
            best = (key, row)
    if best is None:
        work.best.pop(column, None)
    else:
        work.best[column] = best


def _natural(work: _Work, row: int, column: int) -> bool:
    """Whether an unknown is taken from the equation that a person would take it from."""
    unknown = work.unknowns[column]
    meaning = work.meanings[row]
    if unknown.kind == "voltage":
        return meaning == f"current balance at {unknown.name}"
    return meaning == f"law of {unknown.name}"


def _eliminate(work: _Work, pivot: tuple[int, int]) -> None:
    row, column = pivot
    _name_pivot(work, row, column)
    work.live_rows.discard(row)
    work.best.pop(column)
    others = [place for place in work.columns[column] if place in work.live_rows]
    touched = {k for k in work.rows[row] if k != column}
    for place in others:
        factor = _quotient(work.rows[place].pop(column), work.rows[row][column])
        touched.update(work.rows[place])
        for k, entry in work.rows[row].items():
            if k != column:
                _subtract(work, (place, k), _product(factor, entry))
    work.columns[column] = {row}
    for k in touched:
        if k < len(work.unknowns) and k in work.best:
            _rate(work, k)


def _subtract(work: _Work, place: tuple[int, int], term: _Entry) -> None:
    """Entry minus term, dropped where it is zero, named where it has grown."""
    row, column = place
    after = _difference(work.rows[row].get(column), term)
    if after is None:
        del work.rows[row][column]
        work.columns[column].discard(row)
        return
    if column < len(work.unknowns) and sum(1 for _ in walk(after.size)) > _LONGEST:
        name = _named(work, "T", after.size, "an intermediate value")
        after = _Entry(after.sign, name, after.image)
    work.rows[row][column] = after
    work.columns[column].add(row)


def _name_pivot(work: _Work, row: int, column: int) -> None:
    """Give a pivot its name: Y at a node, Z of a branch, T otherwise."""
    entry = work.rows[row][column]
    if not isinstance(entry.size, Sum | Quotient):
        return
    unknown = work.unknowns[column]
    letter, meaning = "T", "an intermediate value"
    if _natural(work, row, column):
        letter = "Y" if unknown.kind == "voltage" else "Z"
        meaning = (
            f"admittance at {unknown.name}, all that lies beyond included"
            if letter == "Y"
            else f"impedance met by the current of {unknown.name}, all that lies beyond included"
        )
    work.rows[row][column] = _Entry(
        entry.sign, _named(work, letter, entry.size, meaning), entry.image
    )


def _named(work: _Work, letter: str, entry: Expression, meaning: str) -> Name:
    count = work.counts.get(letter, 0) + 1
    while f"{letter}{count}" in work.taken:
        count += 1
    work.counts[letter] = count
    work.steps.append(Step(f"{letter}{count}", entry, meaning))
    return Name(f"{letter}{count}")


def _substitute(work: _Work, pivots: list[tuple[int, int]], observed: Functional) -> Nested:
    """Back substitution from the drive outwards, only of what the answer needs."""
    constant = len(work.unknowns)
    needed = set(observed)
    for row, column in pivots:
        if column in needed:
            needed.update(k for k in work.rows[row] if k not in (column, constant))
    values: dict[int, _Entry] = {constant: _Entry(1, ONE, 1)}
    for row, column in reversed(pivots):
        if column in needed:
            value = _solved(work, row, column, values)
            if value is not None:
                values[column] = _value_named(work, column, value)
    total: _Entry | None = None
    for column, sign in sorted(observed.items()):
        if column in values:
            minus = _Entry(-sign * values[column].sign, values[column].size, 0)
            total = _difference_unchecked(total, minus)
    result = ZERO if total is None else total.expression()
    return Nested(_pruned(work.steps, result), result)


def _solved(work: _Work, row: int, column: int, values: Mapping[int, _Entry]) -> _Entry | None:
    """The unknown of a pivot from those found before; None where it is zero."""
    total: _Entry | None = None
    for k, entry in sorted(work.rows[row].items()):
        if k != column and k in values:
            total = _difference_unchecked(total, _product(entry, values[k]))
    return None if total is None else _quotient(total, work.rows[row][column])


def _difference_unchecked(first: _Entry | None, second: _Entry) -> _Entry:
    """first - second for values whose images are not carried."""
    if first is None:
        return _Entry(-second.sign, second.size, 1)
    combine = subtract if first.sign == second.sign else add
    return _Entry(first.sign, combine(first.size, second.size), 1)


def _value_named(work: _Work, column: int, value: _Entry) -> _Entry:
    if isinstance(value.size, Number | Name):
        return value
    unknown = work.unknowns[column]
    letter, what = ("V", "voltage at") if unknown.kind == "voltage" else ("I", "current of")
    name = _named(work, letter, value.size, f"{what} {unknown.name} for a drive of one")
    return _Entry(value.sign, name, value.image)


def _pruned(steps: list[Step], result: Expression) -> tuple[Step, ...]:
    """Only the steps that the result needs, in order."""
    needed = set(names(result))
    kept = []
    for step in reversed(steps):
        if step.name in needed:
            kept.append(step)
            needed |= names(step.expression)
    return tuple(reversed(kept))
