"""Dense solutions, exact or in ball arithmetic: slow, plain, independent of the other engines."""

from __future__ import annotations

from collections.abc import Callable
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

    found = _solved(system, observed, driven, lambda entry: evaluate(entry, s), (acb, acb_mat))
    return acb("nan") if found is None else found


def exact_ratio(
    system: System, observed: Functional, driven: Functional, evaluate: Evaluator, s: Any
) -> Any | None:
    """The same over exact rationals, s real; None where the matrix is singular there.

    `evaluate` is over `RationalArithmetic`; python-flint solves by p-adic lifting.
    """
    from flint import fmpq, fmpq_mat

    return _solved(system, observed, driven, lambda entry: evaluate(entry, s), (fmpq, fmpq_mat))


def _solved(
    system: System,
    observed: Functional,
    driven: Functional,
    value: Callable[[Any], Any],
    field: tuple[Any, Any],
) -> Any | None:
    number, matrix = field
    size = len(system.unknowns)
    rows = [[number(0)] * size for _ in range(size)]
    for row, law in zip(rows, system.laws, strict=False):
        for column, entry in law.entries.items():
            row[column] = value(entry)
    for column, factor in driven.items():
        rows[-1][column] = number(factor)
    right = [[number(0)] for _ in range(size)]
    right[-1][0] = number(1)
    try:
        solution = matrix(rows).solve(matrix(right))
    except ZeroDivisionError:
        return None
    return sum((solution[column, 0] * factor for column, factor in observed.items()), number(0))
