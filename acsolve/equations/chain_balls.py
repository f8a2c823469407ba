"""A row of equal two-ports in balls: the power of one copy's chain matrix, enclosed.

Balls have exponents of any size and tell what was lost, so the plain power serves; see `chain`.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any, TypeAlias

import numpy as np

from acsolve.algebra.ball import working_bits
from acsolve.algebra.two_by_two import Matrix, product, total
from acsolve.equations.chain import Chain
from acsolve.equations.numeric import Hybrid

Ball: TypeAlias = Any  # flint.acb

_GENERIC_HERTZ = np.array([13.7, 1.37e3, 1.37e5])  # only where nothing was swept before


@dataclass(slots=True, eq=False)
class BallChain:
    """A row of copies at single points; the last one is remembered."""

    chain: Chain
    last: tuple[Ball, int, Hybrid] | None = None

    def at(self, s: Ball) -> Hybrid:
        """Balls around the hybrid elements and their derivatives at s."""
        bits = working_bits()
        if self.last is None or self.last[0] is not s or self.last[1] != bits:
            self.last = (s, bits, self._work_out(s, bits))
        return self.last[2]

    def _work_out(self, s: Ball, bits: int) -> Hybrid:
        solvers = self.chain.prepared(_GENERIC_HERTZ)
        found = [solver.precise.enclosed(s, bits) for solver in solvers]
        _, (c, c1), (a, a1) = found[0]
        (b, b1), _, (d, d1) = found[1]
        count = self.chain.copy.count
        chain, slope = _power((a, b, c, d), (a1, b1, c1, d1), count)
        if self.chain.copy.reciprocal:
            turned = (a * 0 + 1, a * 0)
        else:
            back, back1 = found[2][0]
            whole, rate = back * a, back1 * a + back * a1
            turned = (whole**count, count * whole ** (count - 1) * rate)
        return _hybrid(chain, slope, turned)


def _power(base: Matrix, rate: Matrix, count: int) -> tuple[Matrix, Matrix]:
    """base ** count and its derivative, binary powers from the highest bit on."""
    found, slope = base, rate
    for bit in bin(count)[3:]:
        slope = total(product(slope, found), product(found, slope))
        found = product(found, found)
        if bit == "1":
            slope = total(product(slope, base), product(found, rate))
            found = product(found, base)
    return found, slope


def _hybrid(chain: Matrix, slope: Matrix, turned: tuple[Ball, Ball]) -> Hybrid:
    (a, b, c, _), (a1, b1, c1, _), (whole, whole1) = chain, slope, turned
    g11, g12, g21, g22 = c / a, whole / a, 1 / a, -b / a
    return Hybrid(
        {"g11": g11, "g12": g12, "g21": g21, "g22": g22},
        {
            "g11": (c1 - g11 * a1) / a,
            "g12": (whole1 - g12 * a1) / a,
            "g21": -g21 * a1 / a,
            "g22": -(b1 + g22 * a1) / a,
        },
    )


def ball_chains(chains: Mapping[str, Chain]) -> dict[str, BallChain]:
    """The same rows in balls; they share the elimination orders."""
    return {name: BallChain(chain) for name, chain in chains.items()}
