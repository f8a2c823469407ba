"""Frequencies that a sweep must not step over: resonances and notches narrower than its grid.

Natural modes and zeros are the values of s at which the matrix, closed by the drive or by the
observed quantity, is singular. Its entries are ratios of polynomials; further unknowns make
them linear: w with D(s)·w = x_j for a denominator D in column j, and u_1 = s·x, u_2 = s·u_1, …
for powers. Near a shift, the values of s are then the inverse eigenvalues of
(G + shift·C)⁻¹·C, which plain NumPy finds.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from acsolve.circuit.netlist import Netlist
from acsolve.equations.numeric import Numbers
from acsolve.equations.rational import Ratio, ratio_of
from acsolve.equations.solver import Solver

Array = NDArray[Any]
Terms: TypeAlias = dict[tuple[int, int], tuple[complex, ...]]  # place -> coefficients

_ALWAYS = 40  # unknowns up to which modes cost less than they may save
_LARGEST = 300
_NARROW = 0.5  # |real| / |imaginary| above which no grid misses a mode
_WIDTHS = (-3.0, -1.0, -0.3, 0.4, 1.0, 3.0)  # half widths beside a mode that are sampled
_BESIDE = 1e-6  # least relative distance from a mode: the slopes there say the rest
_REACH = 1e3  # a shift finds modes within this factor
_WITHOUT_RESONANCE = {"resistor", "capacitor", "voltage_source", "current_source", "ammeter"}


def landmarks(netlist: Netlist, solver: Solver, band: Array) -> Array:
    """Frequencies in hertz at and beside narrow modes and zeros up to the end of a band.

    Empty where the network is large, or where an entry is no ratio of polynomials.
    """
    plain = all(part.kind in _WITHOUT_RESONANCE for part in netlist.parts)
    if solver.numbers.size > (_ALWAYS if plain else _LARGEST):
        return np.zeros(0)
    ratios = [ratio_of(entry) for entry in solver.numbers.distinct]
    known = [item for item in ratios if item is not None]
    if len(known) < len(ratios):
        return np.zeros(0)
    low, high = 2 * np.pi * band
    shifts = np.geomspace(low, high, 1 + int(np.log10(high / low) / 3))
    closings = [None, *solver.observed]
    pencils = [_pencil(solver.numbers, known, closing) for closing in closings]
    found = [pencil.near(float(shift)) for pencil in pencils for shift in shifts]
    return _sampled(np.concatenate(found), high)


@dataclass(frozen=True, slots=True, eq=False)
class _Pencil:
    """A square matrix of polynomials, with first powers of s only in its linearised form."""

    size: int
    terms: Terms

    def near(self, shift: float) -> Array:
        """Values of s within reach of a shift at which the matrix is singular."""
        constant, linear = self._matrices(shift)
        states = np.flatnonzero(linear.any(axis=0))
        try:
            solved = np.linalg.solve(constant + linear, linear[:, states])
        except np.linalg.LinAlgError:
            return np.zeros(0, dtype=complex)
        if not np.isfinite(solved).all():
            return np.zeros(0, dtype=complex)
        inverse = np.linalg.eigvals(solved[states])
        inverse = inverse[np.abs(inverse) > 1 / (2 * _REACH)]
        return np.asarray(shift * (1 - 1 / inverse))

    def _matrices(self, shift: float) -> tuple[Array, Array]:
        """Constant and linear matrix in s/shift, rows scaled to a largest entry of 1."""
        constant = np.zeros((self.size, self.size), dtype=complex)
        linear = np.zeros_like(constant)
        for (row, column), coefficients in self.terms.items():
            constant[row, column] = coefficients[0]
            linear[row, column] = coefficients[1] * shift if len(coefficients) > 1 else 0
        largest = np.maximum(np.abs(constant), np.abs(linear)).max(axis=1, keepdims=True)
        largest[largest == 0] = 1
        return constant / largest, linear / largest


def _pencil(numbers: Numbers, ratios: Sequence[Ratio], closing: Any) -> _Pencil:
    """The matrix as it is (closing None) or with its last row replaced by a functional."""
    terms: Terms = {}
    size = numbers.size
    divided: dict[tuple[int, tuple[complex, ...]], int] = {}
    for row, column, which in zip(numbers.rows, numbers.columns, numbers.which, strict=True):
        if row == numbers.size - 1 and closing is not None:
            continue
        top, bottom = ratios[which]
        place = column
        if len(bottom) > 1 or bottom[0] != 1:
            place = divided.setdefault((column, bottom), size)
            size += place == size
        terms[row, place] = top
    for (column, bottom), place in divided.items():
        terms[place, place], terms[place, column] = bottom, (-1.0,)
    for column, factor in (closing or {}).items():
        terms[numbers.size - 1, column] = (float(factor),)
    return _linearised(size, terms)


def _linearised(size: int, terms: Terms) -> _Pencil:
    """The same roots with first powers only: s^k·x is s·u for u = s^(k-1)·x, an unknown more."""
    linear: Terms = {}
    powers: dict[tuple[int, int], int] = {}

    def power(column: int, degree: int) -> int:
        nonlocal size
        if degree == 0:
            return column
        place = powers.get((column, degree))
        if place is None:
            lower = power(column, degree - 1)
            place = powers[column, degree] = size
            size += 1
            linear[place, place], linear[place, lower] = (1.0,), (0.0, -1.0)
        return place

    for (row, column), coefficients in terms.items():
        linear[row, column] = coefficients[:2]
        for degree, item in enumerate(coefficients[2:], start=1):
            if item:
                linear[row, power(column, degree)] = (0.0, item)
    return _Pencil(size, linear)


def _sampled(modes: Array, high: float) -> Array:
    modes = modes[np.isfinite(modes) & (np.abs(modes.real) < _NARROW * modes.imag)]
    width = np.maximum(np.abs(modes.real), _BESIDE * modes.imag)
    places = [modes.imag + factor * width for factor in _WIDTHS]
    omega = np.unique(np.concatenate(places))
    return np.asarray(omega[(omega > 0) & (omega < high)] / (2 * np.pi))
