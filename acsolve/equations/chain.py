"""A row of equal two-ports in doubles: repeated squaring of one copy's chain matrix.

A copy obeys V1 = A·V2 + B·I2, I1 = C·V2 + D·I2 with I2 leaving at its far end, and a row of N
copies the N-th power of that matrix M. The four elements of M are ratios of linear functions
of the copy's unknowns, as every answer is: with the far end open and with it shorted. Where a copy
hardly changes what it passes on (far below its corner) it is M - 1 that is worked out and
raised, so that nothing is lost beside the one; elsewhere M, times a power of two:

    (M² - 1) = 2·(M - 1) + (M - 1)²

What the network sees are the hybrid elements, of which only g12 and g21 leave a double's range.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from functools import partial
from math import pi
from typing import Any, NamedTuple, TypeAlias

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.scaled import Scaled, normal, power_of_two
from acsolve.algebra.two_by_two import Matrix, product, times, total
from acsolve.circuit.netlist import GROUND, Netlist, Pair, Part
from acsolve.circuit.value import Quantity
from acsolve.equations.numeric import Hybrid, ball_values, float_values, takes_branch
from acsolve.equations.result import Solution, Status
from acsolve.equations.solver import Solver, prepare
from acsolve.equations.system import DRIVE, SHORT, Functional, System, assemble

Array: TypeAlias = NDArray[Any]

_EPSILON = float(np.finfo(float).eps)
_ONE_WAY = frozenset(
    {
        "opamp",
        "voltage_amplifier",
        "transconductance",
        "transresistance",
        "current_amplifier",
        "gyrator",
    }
)


@dataclass(frozen=True, slots=True, eq=False)
class Copy:
    """One copy as a question of its own: its parts between `near`, `far` and `gnd`."""

    netlist: Netlist
    near: str
    far: str
    count: int

    @property
    def reciprocal(self) -> bool:
        """Whether the determinant of the chain matrix is one, by the kinds of its parts."""
        return not any(part.kind in _ONE_WAY for part in self.netlist.parts)

    def open_end(self) -> Asked:
        """A - 1, C and A, the far end free.

        Voltages count from the far node here: what a copy that passes nearly everything on
        takes away is then an unknown of its own, not the difference of two nearly equal ones.
        """
        turned = self._renamed({GROUND: _BOTTOM, self.far: GROUND})
        system = _assembled(turned, drive=(self.near, _BOTTOM))
        observed = [
            system.voltage((self.near, GROUND)),
            system.current(DRIVE),
            system.voltage((self.near, _BOTTOM)),
        ]
        return Asked(turned, system, observed, system.voltage((GROUND, _BOTTOM)))

    def shorted_end(self) -> Asked:
        """B, D - 1 and D, the far end shorted.

        What returns to `gnd` inside the copy flows through an ammeter, for the same reason.
        """
        turned = self._renamed({GROUND: _BOTTOM})
        back = Part(name=_RETURN, kind="ammeter", nodes=(_BOTTOM, GROUND))
        turned = replace(turned, parts=(*turned.parts, back))
        system = _assembled(turned, drive=(self.near, GROUND), short=(self.far, GROUND))
        observed = [
            system.voltage((self.near, GROUND)),
            system.current(_RETURN),
            system.current(DRIVE),
        ]
        return Asked(turned, system, observed, system.current(SHORT))

    def backwards(self) -> Asked:
        """I1/I2 with the near end shorted: the determinant over A."""
        system = _assembled(self.netlist, drive=(self.far, GROUND), short=(self.near, GROUND))
        return Asked(self.netlist, system, [system.current(SHORT)], system.current(DRIVE))

    def _renamed(self, names: Mapping[str, str]) -> Netlist:
        parts = tuple(
            replace(part, nodes=tuple(names.get(node, node) for node in part.nodes))
            for part in self.netlist.parts
        )
        return replace(self.netlist, parts=parts)


_BOTTOM = "the bottom"  # no node and no part can have such names
_RETURN = "the return"


class Asked(NamedTuple):
    """Equations of one copy, what is observed, and what that is divided by."""

    netlist: Netlist
    system: System
    observed: list[Functional]
    driven: Functional


def _assembled(netlist: Netlist, *, drive: Pair, short: Pair | None = None) -> System:
    values = float_values(netlist)
    return assemble(
        netlist,
        drive=drive,
        short=short,
        branch_for=lambda part: takes_branch(values, part),
    )


@dataclass(slots=True, eq=False)
class Chain:
    """A row of copies over blocks of points; the last block is remembered."""

    copy: Copy
    solvers: tuple[Solver, ...] = ()
    last: tuple[Array, Hybrid] | None = None

    def at(self, s: Array) -> Hybrid:
        """The hybrid elements at s = j·2π·f, shape (points,)."""
        if self.last is None or self.last[0] is not s:
            self.last = (s, self._work_out(np.asarray(s)))
        return self.last[1]

    def beside_one(self, s: Array) -> Matrix:
        """M - 1 of one copy at s = j·2π·f, each element of shape (points,)."""
        return _base(self._solved(s))[0].beside_one

    def _solved(self, s: Array) -> list[Solution]:
        hertz = s.imag / (2 * pi)
        return [solver.solve(hertz) for solver in self.prepared(hertz)]

    def _work_out(self, s: Array) -> Hybrid:
        with np.errstate(all="ignore"):  # a point without an answer is found by its not a number
            solutions = self._solved(s)
            base, error = _base(solutions)
            turned = self._determinant(solutions, base)
            plain = np.where(_is_near(base.beside_one), 0, self.copy.count * _spread(base))
            return _hybrid(s, power(base, self.copy.count), turned, error, plain)

    def prepared(self, hertz: Array) -> tuple[Solver, ...]:
        """One copy with its far end open, shorted, and (where it matters) driven backwards."""
        if not self.solvers:
            self.solvers = self._prepared(hertz)
        return self.solvers

    def _prepared(self, hertz: Array) -> tuple[Solver, ...]:
        asked = [self.copy.open_end(), self.copy.shorted_end()]
        if not self.copy.reciprocal:
            asked.append(self.copy.backwards())
        return tuple(
            prepare(
                item.system,
                observed=item.observed,
                driven=item.driven,
                hertz=hertz,
                values=float_values(item.netlist),
                balls=partial(ball_values, item.netlist),
            )
            for item in asked
        )

    def _determinant(self, solutions: list[Solution], base: Base) -> tuple[Scaled, Array]:
        """det(M) ** count and the derivative of its logarithm."""
        a = base.matrix[0]
        if self.copy.reciprocal:
            one = np.ones(len(a), dtype=complex)
            return Scaled(one, np.zeros(len(one), dtype=np.int64)), np.zeros_like(one)
        back = solutions[2]
        whole = normal(back.mantissa[0] * a, back.exponent[0].copy())
        rate = back.slope[0] + base.slope[0] / a
        rate[whole.mantissa == 0] = 0
        return _scaled_power(whole, self.copy.count), self.copy.count * rate


class Base(NamedTuple):
    """The chain matrix M of one copy: M itself, M - 1 where that is small, the derivative."""

    matrix: Matrix
    beside_one: Matrix
    slope: Matrix


def _base(solutions: list[Solution]) -> tuple[Base, Array]:
    """The chain matrix, and the largest relative error of an element."""
    (a1, c, a), (b, d1, d) = (
        [_value(solution, row) for row in range(3)] for solution in solutions[:2]
    )
    matrix = a[0], b[0], c[0], d[0]
    beside = a1[0], b[0], c[0], d1[0]
    error = np.max([solution.error.max(axis=0) for solution in solutions], axis=0)
    return Base(matrix, beside, (a1[1], b[1], c[1], d1[1])), error


def _value(solution: Solution, row: int) -> tuple[Array, Array]:
    """One answer and its derivative; not a number where there is none."""
    status = solution.status[row]
    value = solution.value()[row]
    value[status >= Status.POLE] = np.nan
    slope = solution.slope[row] * value
    slope[status == Status.ZERO] = np.nan  # zero here, not everywhere around
    if np.all(status == Status.ZERO):
        slope[:] = 0
    return value, slope


def power(base: Base, count: int) -> tuple[Matrix, Matrix, Array]:
    """M^count / 2^e, its derivative over the same power of two, and e.

    Notes
    -----
    Binary powers from the highest bit on: about 2·log2(count) products of 2 x 2 matrices.
    `near` are the points where the power so far is close to one: there M^n - 1 is carried.
    """
    near = _is_near(base.beside_one)
    found, rate = _chosen(near, base.beside_one, base.matrix), base.slope
    exponent = np.zeros(len(near), dtype=np.int64)
    near = near.astype(float)
    first = found
    for bit in bin(count)[3:]:
        double = 2 * near
        rate = total(times(rate, double), product(rate, found), product(found, rate))
        found = total(times(found, double), product(found, found))
        exponent = 2 * exponent
        if bit == "1":
            rate = total(
                times(total(rate, base.slope), near),
                product(rate, first),
                product(found, base.slope),
            )
            found = total(times(total(found, first), near), product(found, first))
        found, near = _left(found, near)
        found, rate, exponent = _shifted(found, rate, exponent, near)
        first = _chosen(near > 0, base.beside_one, base.matrix)
    return _left(found, near, all_=True)[0], rate, exponent


_NEAR = 0.25


def _spread(base: Base) -> Array:
    """How much a relative error of M weighs in the logarithm of its eigenvalue, to first order.

    With cosh(g) = (A + D)/2 it is the error of that over sinh(g): large at a band's edge.
    """
    a, _, _, d = map(np.abs, base.matrix)
    first, _, _, last = base.beside_one
    shift = (first + last) / 2
    return np.asarray(np.maximum((a + d) / 2 / np.abs(np.sqrt(shift * (shift + 2))), 1.0))


def _is_near(beside_one: Matrix) -> NDArray[np.bool_]:
    return np.asarray(_size(beside_one) < _NEAR)


def _left(found: Matrix, near: Array, *, all_: bool = False) -> tuple[Matrix, Array]:
    """One added where the power is no longer near one (or everywhere), and where it is still."""
    leaving = (near > 0) & (all_ | ~_is_near(found))
    one = leaving.astype(float)
    a, b, c, d = found
    return (a + one, b, c, d + one), np.where(leaving, 0.0, near)


def _chosen(near: Array, first: Matrix, second: Matrix) -> Matrix:
    a, b, c, d = (np.where(near, x, y) for x, y in zip(first, second, strict=True))
    return a, b, c, d


def _size(found: Matrix) -> Array:
    """The size of a matrix; b is an impedance and c an admittance: only their product counts."""
    a, b, c, d = map(np.abs, found)
    return np.asarray(np.maximum(np.maximum(a, d), np.sqrt(b) * np.sqrt(c)))


def _shifted(
    found: Matrix, rate: Matrix, exponent: Array, near: Array
) -> tuple[Matrix, Matrix, Array]:
    """The same with magnitudes between 1/2 and 1, as they are near one."""
    shift = np.where(near > 0, 0, np.frexp(_size(found))[1])
    factor = power_of_two(-shift)
    return times(found, factor), times(rate, factor), exponent + shift


def _scaled_power(base: Scaled, count: int) -> Scaled:
    found = base
    for bit in bin(count)[3:]:
        found = normal(found.mantissa * found.mantissa, 2 * found.exponent)
        if bit == "1":
            found = normal(found.mantissa * base.mantissa, found.exponent + base.exponent)
    return found


def _hybrid(
    s: Array,
    chain: tuple[Matrix, Matrix, Array],
    turned: tuple[Scaled, Array],
    error: Array,
    plain: Array,
) -> Hybrid:
    """The hybrid elements of the whole row from its chain matrix.

    What is off in one copy is off in all: N times its share of the logarithm, or of the whole
    where M itself was raised (`plain` times). The check of the whole network multiplies by three.
    """
    (a, b, c, _), (a1, b1, c1, _), exponent = chain
    determinant, turning = turned
    none = np.zeros_like(exponent)
    rate = a1 / a
    g11, g22 = c / a, -b / a
    g21 = Scaled(1 / a, -exponent)
    g12 = Scaled(determinant.mantissa / a, determinant.exponent - exponent)
    values = {"g11": Scaled(g11, none), "g12": g12, "g21": g21, "g22": Scaled(g22, none)}
    slopes = {
        "g11": Scaled((c1 - g11 * a1) / a, none),
        "g12": Scaled(g12.mantissa * (turning - rate), g12.exponent),
        "g21": Scaled(-rate * g21.mantissa, g21.exponent),
        "g22": Scaled(-(b1 + g22 * a1) / a, none),
    }
    nepers = np.abs(np.log(np.abs(a)) + exponent * np.log(2.0))
    share = np.abs(s * rate) + np.where(plain > 0, plain, nepers)
    own = np.where(plain > 0, _OWN_PLAIN, _OWN_NEAR)
    rough = (own * error + 3 * _EPSILON) * (_FEW + share)
    return Hybrid(values, slopes, rough)


_FEW = 4.0  # operations of the last step
_OWN_PLAIN = 0.1  # share of one copy's estimate that three of its deviations come to (empirical)
_OWN_NEAR = 1 / 3  # the same for M - 1


def chains(netlist: Netlist) -> Mapping[str, Chain]:
    """The rows of a condensed netlist, by the name of the part that stands for each."""
    return {name: Chain(copy) for name, copy in copies(netlist).items()}


def copies(netlist: Netlist) -> dict[str, Copy]:
    """One copy of each row; what its values refer to outside comes along as quantities."""
    if not netlist.sections:
        return {}
    outside = {name: Quantity(name=name, value=value) for name, value in netlist.values()}
    return {
        name: Copy(
            Netlist(parts=item.parts, couplings=item.couplings, quantities=outside),
            item.near,
            item.far,
            item.count,
        )
        for name, item in netlist.sections.items()
    }
