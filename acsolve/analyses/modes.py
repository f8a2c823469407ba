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
_FINEST = 1e-12  # least relative width of a mode: less is beyond its own accuracy
_WIDTHS = (-3.0, -1.0, -0.3, 0.4, 1.0, 3.0)  # half widths beside a mode that are sampled
_OWN_WIDTHS = (-100.0, -10.0, -3.0, -1.0, -0.3, 0.0, 0.3, 1.0, 3.0, 10.0, 100.0)
_BESIDE = 1e-6  # least relative distance from a mode: the slopes there say the rest
_AGREEMENT = 1e-7  # of the slope with all modes and zeros, relative to the sum of their sizes
_ASIDE = 0.9713  # keeps the shifts off frequencies that values round to
_REACH = 1e3  # a shift finds modes within this factor
_WITHOUT_RESONANCE = {"resistor", "capacitor", "voltage_source", "current_source", "ammeter"}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class NearAxis:
    """Natural modes and zeros in rad/s near the frequency axis, up to the end of a band.

    `complete` is false where some may be missing or wrong: the network is too large, an entry
    is no ratio of polynomials, the matrix is singular at a point from which they are sought,
    or all of them together do not give the slope H'/H that the solver finds.
    """

    modes: Array
    complete: bool


def landmarks(netlist: Netlist, solver: Solver, band: Array) -> Array:
    """Frequencies in hertz at and beside narrow modes and zeros up to the end of a band.

    Empty where the network is large, or where an entry is no ratio of polynomials.
    """
    plain = all(part.kind in _WITHOUT_RESONANCE for part in netlist.parts)
    modes = near_axis(solver, band, largest=_ALWAYS if plain else _LARGEST).modes
    width = np.maximum(np.abs(modes.real), _BESIDE * modes.imag)
    return _beside(modes, width, _WIDTHS, band)


def on_own_scale(modes: Array, band: Array) -> Array:
    """Frequencies in hertz at each mode and zero and beside it, in steps of its own damping."""
    width = np.maximum(np.abs(modes.real), _FINEST * modes.imag)
    return _beside(modes, width, _OWN_WIDTHS, band)


def near_axis(solver: Solver, band: Array, *, largest: int = _LARGEST) -> NearAxis:
    """The narrow modes and zeros of the first answer, in networks of up to so many unknowns."""
    ratios = [ratio_of(entry) for entry in solver.numbers.distinct]
    known = [item for item in ratios if item is not None]
    if solver.numbers.size > largest or len(known) < len(ratios):
        return NearAxis(modes=np.zeros(0, dtype=complex), complete=False)
    low, high = 2 * np.pi * band
    shifts = _ASIDE * np.geomspace(low, high, 1 + int(np.log10(high / low) / 3))
    poles, zeros = (
        [_pencil(solver.numbers, known, closing).inverses(float(shift)) for shift in shifts]
        for closing in (None, solver.observed[0])
    )
    found = [
        _modes(item, float(shift))
        for side in (poles, zeros)
        for item, shift in zip(side, shifts, strict=True)
        if item is not None
    ]
    modes = np.concatenate([np.zeros(0, dtype=complex), *found])
    modes = modes[np.isfinite(modes) & (np.abs(modes.real) < _NARROW * modes.imag)]
    return NearAxis(
        modes=modes[modes.imag < 2 * high], complete=_explain(solver, shifts, poles, zeros)
    )


def _modes(inverses: Array, shift: float) -> Array:
    """The values of s within reach of the shift from which they were found."""
    near = inverses[np.abs(inverses) > 1 / (2 * _REACH)]
    return np.asarray(shift * (1 - 1 / near))


def _explain(
    solver: Solver, shifts: Array, poles: Sequence[Array | None], zeros: Sequence[Array | None]
) -> bool:
    """Whether H'/H = sum 1/(s - zero) - sum 1/(s - pole), at s = j·shift for each shift.

    With the inverse eigenvalue v = shift/(shift - s0) the term 1/(s - s0) is
    v/(shift + (s - shift)·v), in which modes at infinity are exactly nothing.
    """
    slopes = solver.solve(shifts / (2 * np.pi)).slope[0]
    for shift, slope, below, above in zip(shifts, slopes, poles, zeros, strict=True):
        if below is None or above is None:
            return False
        terms = [v / (1 + (1j - 1) * v) for v in (above, below)]
        size = 1 + sum(float(np.abs(item).sum()) for item in terms)
        missing = abs(terms[0].sum() - terms[1].sum() - shift * slope)
        if not missing < _AGREEMENT * size:
            return False
    return True


def pencil_matrices(solver: Solver, closing: Any) -> tuple[Array, Array] | None:
    """G and C of the square matrix G + s·C, made linear in s; None where it is none.

    `closing` as in `_pencil`: None for the drive's own row, or the observed functional.
    """
    ratios = [ratio_of(entry) for entry in solver.numbers.distinct]
    known = [item for item in ratios if item is not None]
    if len(known) < len(ratios):
        return None
    return _pencil(solver.numbers, known, closing).whole()


@dataclass(frozen=True, slots=True, eq=False)
class _Pencil:
    """A square matrix of polynomials, with first powers of s only in its linearised form."""

    size: int
    terms: Terms

    def inverses(self, shift: float) -> Array | None:
        """shift/(shift - s) for the values of s at which the matrix is singular.

        None where it is singular at the shift itself, which tells nothing.
        """
        constant, linear = self._matrices(shift)
        states = np.flatnonzero(linear.any(axis=0))
        try:
            solved = np.linalg.solve(constant + linear, linear[:, states])
        except np.linalg.LinAlgError:
            return None
        if not np.isfinite(solved).all():
            return None
        among = solved[states]
        return np.asarray(np.linalg.eigvals(among if among.imag.any() else among.real))

    def whole(self) -> tuple[Array, Array]:
        """Constant and linear matrix in s, real where they are."""
        constant = np.zeros((self.size, self.size), dtype=complex)
        linear = np.zeros_like(constant)
        for (row, column), coefficients in self.terms.items():
            constant[row, column] = coefficients[0]
            linear[row, column] = coefficients[1] if len(coefficients) > 1 else 0
        if constant.imag.any() or linear.imag.any():
            return constant, linear
        return constant.real, linear.real

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


def _beside(modes: Array, width: Array, steps: Sequence[float], band: Array) -> Array:
    """Frequencies in hertz below the band's end, so many widths from each mode."""
    places = [modes.imag + factor * width for factor in steps]
    hertz = np.unique(np.concatenate(places)) / (2 * np.pi)
    return np.asarray(hertz[(hertz > 0) & (hertz < band[1])])
