"""Current balances written with the voltages across the parts, for a check that sees their digits.

A node's own entry in the matrix is the sum of the admittances of all its parts, and rounding it
is as good as a small leak to ground at every node: along a ladder of N sections these leaks add
up to N^1.5 or N^2 roundings near 0 Hz, where the parts' own roundings come to N. So the balance
of a node is looked at part by part,

    sum of y_j·(V_i - V_j)  +  leak·V_i  +  whatever else flows,

in which no rounded sum stands. (The same thought keeps the elimination of Markov chains exact to
the last digits: W. K. Grassmann, M. I. Taksar and D. P. Heyman, Operations Research 33, 1985.)
"""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass

from acsolve.circuit.expression import MINUS_ONE, Expression, Product, Sum, add
from acsolve.equations.evaluate import Evaluator
from acsolve.equations.numeric import Entry, Numbers, entry_of
from acsolve.equations.system import System


@dataclass(frozen=True, slots=True)
class Balance:
    """One row: the place of the node's own voltage, those of its neighbours, and its leak.

    `across` are the places whose entry is minus an admittance that the own entry holds; `leak`
    is what the own entry holds besides, None where that is nothing.
    """

    own: int
    across: frozenset[int]
    leak: Entry | None


def balances(system: System, numbers: Numbers, evaluate: Evaluator) -> Mapping[int, Balance]:
    """The rows that can be read so; a sum of one term is as good as it stands."""
    found: dict[int, Balance] = {}
    for row, column in system.diagonals.items():
        entries = system.laws[row].entries
        if not isinstance(entries.get(column), Sum):
            continue
        places = {
            numbers.columns[place]: place
            for place in range(numbers.starts[row], numbers.starts[row + 1])
        }
        if column not in places:
            continue
        left = {id(term): term for term in _terms(entries[column])}
        across = frozenset(
            places[other]
            for other, entry in entries.items()
            if other != column and other in places and _taken(entry, left)
        )
        if across:
            found[row] = Balance(places[column], across, _sum(left, evaluate))
    return found


def _terms(expression: Expression) -> Iterator[Expression]:
    """The terms of a sum; sums of many parts lean to the left."""
    while isinstance(expression, Sum):
        yield expression.right
        expression = expression.left
    yield expression


def _taken(entry: Expression, left: dict[int, Expression]) -> bool:
    """Take the parts of an entry out of the node's own, where all of them are there."""
    parts = [
        term.right
        for term in _terms(entry)
        if isinstance(term, Product) and term.left is MINUS_ONE and id(term.right) in left
    ]
    if len(parts) < sum(1 for _ in _terms(entry)):
        return False
    for part in parts:
        del left[id(part)]
    return True


def _sum(left: Mapping[int, Expression], evaluate: Evaluator) -> Entry | None:
    whole: Expression | None = None
    for term in left.values():
        whole = term if whole is None else add(whole, term)
    return None if whole is None else entry_of(whole, evaluate)
