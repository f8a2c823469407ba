"""Poles and zeros as generalised eigenvalues, where polynomials are too large to certify.

Natural modes are the values of s at which the matrix G + s·C of the network is singular; the
zeros of an answer those at which it is with the observed quantity in place of the drive.
Nothing here is proven: each value comes with an estimate of its error.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.modes import pencil_matrices
from acsolve.analyses.pole_record import RootRecord, RootTable
from acsolve.analyses.question import Ask
from acsolve.analyses.sweep import solver_for
from acsolve.circuit.netlist import Netlist

Array = NDArray[Any]

LARGEST = 700  # unknowns: dense eigenvalues of two pencils in about half a minute (measured)
_USELESS = 0.1  # relative error above which an eigenvalue is noise, or one at infinity
_EPSILON = 2.0**-52


def estimated_tables(netlist: Netlist, ask: Ask) -> tuple[RootTable, RootTable] | None:
    """Natural modes, as poles, and zeros of an answer; None where the matrix allows none.

    Values that the answer does not show are among both. Those whose estimated error exceeds
    a tenth of their size are left out: they are noise, or lie at infinity.
    """
    solver = solver_for(netlist, ask, np.array([1.0]))
    if solver.numbers.size > LARGEST:
        return None
    pencils = [pencil_matrices(solver, closing) for closing in (None, solver.observed[0])]
    if pencils[0] is None or pencils[1] is None:
        return None
    poles, zeros = (_table(*pencil) for pencil in pencils if pencil is not None)
    return poles, zeros


def _table(constant: Array, linear: Array) -> RootTable:
    values, errors = eigenvalues(constant, linear)
    order = np.lexsort((values.real, values.imag, np.abs(values)))
    records = tuple(
        RootRecord(multiplicity=1, value=complex(values[place]), error=float(errors[place]))
        for place in order
    )
    return RootTable(records, (), certified=False)


def eigenvalues(constant: Array, linear: Array) -> tuple[Array, Array]:
    """The finite s at which constant + s·linear is singular, and estimates of their errors.

    Parameters
    ----------
    constant, linear : square matrices; rows are scaled here, and s to a common size.

    Notes
    -----
    QZ (C. B. Moler, G. W. Stewart, SIAM J. Numer. Anal. 10 (1973)). With right and left
    vectors x and y the first-order error is |y||r|/|y*·C·x| for the residual r, not below the
    rounding of the sums in it (V. Frayssé, V. Toumazou, Numer. Linear Algebra Appl. 5 (1998)).
    """
    from scipy.linalg import eig

    unit = _scale(constant, linear)
    first, second = constant, linear * unit
    largest = np.maximum(np.abs(first), np.abs(second)).max(axis=1, keepdims=True)
    largest[largest == 0] = 1
    first, second = first / largest, second / largest
    ratio, left, right = eig(first, -second, left=True, right=True, homogeneous_eigvals=True)
    finite = np.abs(ratio[1]) > _EPSILON * np.abs(ratio[0])
    value = ratio[0, finite] / ratio[1, finite]
    left, right = left[:, finite], right[:, finite]
    residual = np.linalg.norm(first @ right + (second @ right) * value, axis=0)
    sizes = np.abs(first) @ np.abs(right) + (np.abs(second) @ np.abs(right)) * np.abs(value)
    residual = np.maximum(residual, _EPSILON * np.linalg.norm(sizes, axis=0))
    slope = np.abs(np.einsum("ij,ij->j", left.conj(), second @ right))
    with np.errstate(divide="ignore"):
        error = residual * np.linalg.norm(left, axis=0) / slope
    kept = error < _USELESS * np.abs(value)
    return value[kept] * unit, error[kept] * unit


def _scale(constant: Array, linear: Array) -> float:
    """A typical size of s: the geometric mean over the rows that hold both."""
    sizes = [np.abs(item).max(axis=1) for item in (constant, linear)]
    both = (sizes[0] > 0) & (sizes[1] > 0)
    if not both.any():
        return 1.0
    return float(np.exp(np.mean(np.log(sizes[0][both] / sizes[1][both]))))
