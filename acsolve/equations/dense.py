"""A dense solution in ball arithmetic: slow, plain, and independent of the other engines."""

from __future__ import annotations

from typing import Any

from acsolve.equations.evaluate import Evaluator
from acsolve.equations.system import Functional, System


def dense_ratio(
    system: System, observed: Functional, driven: Functional, evaluate: Evaluator, s: Any
) -> Any:
    """Observed over driven at one complex frequency, by Gaussian elimination of balls.

    Parameters
    ----------
    system : n-1 laws in n unknowns; the law "driven = 1" completes them.
    observed, driven : linear functions of the unknowns.
    evaluate : over `BallArithmetic`.
    s : complex frequency in rad/s, a ball.

    Returns
    -------
    acb : the ratio; not finite where the balls cannot tell the matrix from a singular one.
    """
    from flint import acb, acb_mat

    size = len(system.unknowns)
    rows = [[acb(0)] * size for _ in range(size)]
    for row, law in zip(rows, system.laws, strict=False):
        for column, entry in law.entries.items():
            row[column] = evaluate(entry, s)
    for column, factor in driven.items():
        rows[-1][column] = acb(factor)
    right = [[acb(0)] for _ in range(size)]
    right[-1][0] = acb(1)
    try:
        solution = acb_mat(rows).solve(acb_mat(right))
    except ZeroDivisionError:
        return acb("nan")
    return sum((solution[column, 0] * factor for column, factor in observed.items()), acb(0))
