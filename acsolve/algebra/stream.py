"""Elimination along a plan that holds hardly anything: for a few components of one solution.

Each entry is worked out when it is first needed and every vector is dropped when it has served,
so that the vectors of a long network stay in the cache. Over doubles only; see `lu` for the
notation, and for the elimination that keeps what a check needs.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Mapping

import numpy as np

from acsolve.algebra.lu import Element, Factors, Vector, reciprocal
from acsolve.algebra.plan import Plan


def streamed(
    plan: Plan,
    entry: Callable[[int], Element],
    right: Mapping[int, Element],
    kept: Collection[int],
) -> Factors:
    """Eliminate along a plan; rows of U stay for the steps at the places `kept`.

    Parameters
    ----------
    plan : its first slots are the entries.
    entry : the element of the matrix in a slot, a number or a vector; asked once a slot.
    right : row -> element of the right-hand side; other rows are zero.
    """
    values: Vector = [None] * plan.slots
    forward: Vector = [None] * plan.size
    for row, element in right.items():
        forward[row] = element
    late = bytearray(b"\1") * plan.entries + bytearray(plan.fill)
    for place, step in enumerate(plan.steps):
        row, _, pivot, below, below_rows, rights, _, targets = step
        inverse = reciprocal(entry(pivot) if late[pivot] else values[pivot])
        for slot in rights:
            if late[slot]:
                late[slot], values[slot] = 0, entry(slot)
        pushed, at = forward[row], 0
        for number, slot in enumerate(below):
            minus = _minus(inverse, entry(slot) if late[slot] else values[slot])
            late[slot], values[slot] = 0, None
            for right_slot in rights:
                target = targets[at]
                at += 1
                term = minus * values[right_slot]
                if late[target]:
                    late[target] = 0
                    term += entry(target)
                elif values[target] is not None:
                    term += values[target]
                values[target] = term
            if pushed is not None:
                other = below_rows[number]
                term = minus * pushed
                if forward[other] is not None:
                    term += forward[other]
                forward[other] = term
        late[pivot], values[pivot] = 0, inverse
        if place not in kept:
            forward[row] = None
            for slot in (pivot, *rights):
                values[slot] = None
    return Factors(plan, values, forward)


def _minus(inverse: Element, element: Element) -> Element:
    """-inverse·element; a number changes its sign more cheaply than a vector."""
    if isinstance(element, np.ndarray):
        product = inverse * element
        return np.negative(product, out=product)
    return inverse * -element
