"""Which way a plan is run: vectors step by step, or its dense part in blocks.

A step costs a call for each vector operation, whatever the number of points; a block costs few
calls, but moves and fills whole matrices. Which is cheaper is estimated from counts of
operations and measured times; only the ratios of these times matter.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from acsolve.algebra.fronts import Fronts, cut, light_steps
from acsolve.algebra.plan import Plan, Step

# Seconds, measured on a 2.5 GHz core with NumPy 2.3; a "point" entry is once for each point.
_CALL = 1.0e-6  # one vector operation: the call
_VECTOR = 1.2e-9  # one vector operation, a point
_BLOCK = 40e-6  # one block: the calls for one batch of points
_MATRIX = 4e-6  # one block, a point: the calls of the library inside
_PRODUCT = 0.7e-9  # one product of a matrix product
_MOVED = 8e-9  # one number handed to the parent
_FILLED = 3e-9  # one number of a front set and read
_INVERSE = (0.03e-6, 0.8e-9)  # of n x n: times n², times n³
_BATCH = 50  # points in a batch of blocks
_VECTOR_BLOCK = 1000  # points in a block of vectors, about
_ANALYSIS = 120e-6  # working out the blocks, an unknown

_LIGHT = (9, 36, 81, 144, 256)  # updates of a step up to which it may stay a light one


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Route:
    """How to run a plan at so many points. `fronts` is None for step by step.

    `stepwise` and `blockwise` are estimates in seconds; the second is None where blocks
    cannot pay for their own preparation.
    """

    points: int
    fronts: Fronts | None
    stepwise: float
    blockwise: float | None

    def __str__(self) -> str:
        by_steps = f"{self.stepwise:.2g} s"
        if self.fronts is None:
            reason = (
                "too little work for dense blocks"
                if self.blockwise is None
                else f"dense blocks {self.blockwise:.2g} s"
            )
            return f"run step by step: at {self.points} points about {by_steps}, {reason}"
        light = len(self.fronts.light.steps)
        return (
            f"run as {light} single steps, then {len(self.fronts.blocks)} dense blocks of up to "
            f"{self.fronts.largest} lines: at {self.points} points about {self.blockwise:.2g} s, "
            f"step by step {by_steps}"
        )


def choose_route(plan: Plan, points: int) -> Route:
    """The cheaper way to run a plan at so many points, by estimate."""
    stepwise = steps_cost(plan.steps, points)
    if stepwise < _ANALYSIS * plan.size or not _is_heavy(plan):
        return Route(points=points, fronts=None, stepwise=stepwise, blockwise=None)
    found = []
    for most in _LIGHT:
        fronts = cut(plan, light_steps(plan, most), lambda r, f: block_cost(r, f, points))
        found.append((blocks_cost(fronts, points), most, fronts))
    blockwise, _, fronts = min(found, key=lambda item: item[:2])
    chosen = fronts if blockwise < stepwise else None
    return Route(points=points, fronts=chosen, stepwise=stepwise, blockwise=blockwise)


def _is_heavy(plan: Plan) -> bool:
    return any(len(step.targets) > _LIGHT[0] for step in plan.steps)


def steps_cost(steps: Iterable[Step], points: int) -> float:
    """Seconds for steps over vectors: a product and a difference for each update."""
    operations = sum(2 * (len(step.targets) + len(step.below) + len(step.right)) for step in steps)
    calls = -(-points // _VECTOR_BLOCK)
    return operations * (_CALL * calls + _VECTOR * points)


def blocks_cost(fronts: Fronts, points: int) -> float:
    """Seconds for light steps and blocks together."""
    return steps_cost(fronts.light.steps, points) + sum(
        block_cost(len(front.pivots), front.width, points) for front in fronts.blocks
    )


def block_cost(pivots: int, width: int, points: int) -> float:
    """Seconds for one block: its inverse, two products, and what it hands on."""
    others = width - pivots
    inverse = _INVERSE[0] * pivots**2 + _INVERSE[1] * pivots**3
    products = _PRODUCT * pivots * others * (pivots + others)
    moved = _FILLED * width**2 + _MOVED * others**2
    calls = -(-points // _BATCH)
    return _BLOCK * calls + points * (_MATRIX + inverse + products + moved)
