"""Frequencies that a sweep must not step over: resonances and notches narrower than its grid.

Natural modes and zeros are the values of s at which the matrix G + s·C, closed by the drive or
by the observed quantity, is singular. Near a shift they are the inverse eigenvalues of
(G + shift·C)⁻¹·C, which plain NumPy finds.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.circuit.netlist import Netlist
from acsolve.equations.numeric import Numbers, PolynomialEntry
from acsolve.equations.solver import Solver
from acsolve.equations.system import Functional

Array = NDArray[Any]

_ALWAYS = 40  # unknowns up to which modes cost less than they may save
_LARGEST = 300
_NARROW = 0.5  # |real| / |imaginary| above which no grid misses a mode
_WIDTHS = (-3.0, -1.0, -0.3, 0.4, 1.0, 3.0)  # half widths beside a mode that are sampled
_BESIDE = 1e-6  # least relative distance from a mode: the slopes there say the rest
_REACH = 1e3  # a shift finds modes within this factor
_WITHOUT_RESONANCE = {"resistor", "capacitor", "voltage_source", "current_source", "ammeter"}


def landmarks(netlist: Netlist, solver: Solver, band: Array) -> Array:
    """Frequencies in hertz at and beside narrow modes and zeros up to the end of a band.

    Empty where the network is large, or where an entry is not of the form G + s·C.
    """
    size = solver.numbers.size
    plain = all(part.kind in _WITHOUT_RESONANCE for part in netlist.parts)
    if size > _LARGEST or (plain and size > _ALWAYS):
        return np.zeros(0)
    matrices = _matrices(solver.numbers)
    if matrices is None:
        return np.zeros(0)
    low, high = 2 * np.pi * band
    shifts = np.geomspace(low, high, 1 + int(np.log10(high / low) / 3))
    found = [_near(*matrices, shift) for shift in shifts]
    for functional in solver.observed:
        closed = _closed_by(functional, *matrices)
        found += [_near(*closed, shift) for shift in shifts]
    return _sampled(np.concatenate(found), high)


def _matrices(numbers: Numbers) -> tuple[Array, Array] | None:
    """G and C, dense, shape (size, size) each."""
    constant = np.zeros((numbers.size, numbers.size), dtype=complex)
    linear = np.zeros_like(constant)
    for row, column, which in zip(numbers.rows, numbers.columns, numbers.which, strict=True):
        entry = numbers.distinct[which]
        if not isinstance(entry, PolynomialEntry) or len(entry.coefficients) > 2:
            return None
        constant[row, column] = entry.coefficients[0]
        if len(entry.coefficients) == 2:
            linear[row, column] = entry.coefficients[1]
    return constant, linear


def _closed_by(functional: Functional, constant: Array, linear: Array) -> tuple[Array, Array]:
    """The matrices with the last row, "driven = 1", replaced by an observed quantity."""
    constant, linear = constant.copy(), linear.copy()
    constant[-1], linear[-1] = 0, 0
    for column, factor in functional.items():
        constant[-1, column] = factor
    return constant, linear


def _near(constant: Array, linear: Array, shift: float) -> Array:
    """Values of s within reach of a shift at which constant + s·linear is singular."""
    states = np.flatnonzero(linear.any(axis=0))
    try:
        solved = np.linalg.solve(constant + shift * linear, linear[:, states])
    except np.linalg.LinAlgError:
        return np.zeros(0, dtype=complex)
    inverse = np.linalg.eigvals(solved[states])
    inverse = inverse[np.abs(inverse) > 1 / (2 * _REACH * shift)]
    return shift - 1 / inverse


def _sampled(modes: Array, high: float) -> Array:
    modes = modes[np.isfinite(modes) & (np.abs(modes.real) < _NARROW * modes.imag)]
    width = np.maximum(np.abs(modes.real), _BESIDE * modes.imag)
    places = [modes.imag + factor * width for factor in _WIDTHS]
    omega = np.unique(np.concatenate(places))
    return omega[(omega > 0) & (omega < high)] / (2 * np.pi)
