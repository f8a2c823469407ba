"""The last, densely filled part of an elimination as a tree of small dense matrices.

A plan eliminates one unknown after another. Where the fill is heavy, unknowns that see the
same others are eliminated together instead: each such block has a dense front, the sum of its
own entries and of what its children in the tree leave over (I. S. Duff and J. K. Reid, "The
multifrontal solution of indefinite sparse symmetric linear systems", ACM Trans. Math. Softw.
9, 1983). Blocks are merged where an estimate of the time says that this pays (relaxed
amalgamation). The pattern is taken as symmetric, which circuit equations nearly are. Like a
plan, fronts are pure data.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import NDArray

from acsolve.algebra.plan import Plan

Indices = NDArray[np.int64]
Cost = Callable[[int, int], float]  # of a block: pivots, width -> seconds


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Front:
    """One block. Unknowns of the dense part are numbered 0 to m-1 in the plan's order.

    pivots, others : eliminated here, and seen by these; the front's lines in this order.
    own : first and last+1 of its entries in `Fronts.slots`.
    own_at : flat position of each in the front, row by row.
    children : (number of the front, flat position here of each number that it leaves over).
    """

    pivots: Indices
    others: Indices
    own: tuple[int, int]
    own_at: Indices
    children: tuple[tuple[int, Indices], ...]

    @property
    def width(self) -> int:
        """Lines of the front."""
        return len(self.pivots) + len(self.others)


@dataclass(frozen=True, slots=True, eq=False, kw_only=True)
class Fronts:
    """A plan cut in two: first its light steps, one by one, then blocks.

    light : a plan of the light steps alone; it leaves the other slots eliminated so far.
    rows, columns : of the matrix, for the unknowns of the dense part.
    slots : where the light steps leave the entries of the blocks.
    blocks : children before parents.
    """

    light: Plan
    rows: tuple[int, ...]
    columns: tuple[int, ...]
    slots: tuple[int, ...]
    blocks: tuple[Front, ...]

    @property
    def largest(self) -> int:
        """Lines of the largest block."""
        return max((front.width for front in self.blocks), default=0)

    @property
    def stored(self) -> int:
        """Numbers a point that the blocks keep."""
        return sum(len(front.pivots) * (2 * front.width) for front in self.blocks)


def light_steps(plan: Plan, most: int) -> list[bool]:
    """Steps of at most so many updates that wait for no heavier one, by place."""
    light = [len(step.targets) <= most for step in plan.steps]
    for step, seen, kept in zip(plan.steps, _seen(plan), range(len(light)), strict=True):
        if not light[kept] and step.targets:
            for place in seen:
                light[place] = False
    return light


def _seen(plan: Plan) -> Iterable[set[int]]:
    """For each step the places of the lines that it updates, of rows and of columns."""
    row_place = {step.row: place for place, step in enumerate(plan.steps)}
    column_place = {step.column: place for place, step in enumerate(plan.steps)}
    for step in plan.steps:
        yield {row_place[row] for row in step.below_rows} | {
            column_place[column] for column in step.right_columns
        }


@dataclass(slots=True)
class _Block:
    """A block while blocks are merged, by places of the plan."""

    pivots: list[int]
    others: set[int]
    children: list[int]

    def size(self) -> tuple[int, int]:
        return len(self.pivots), len(self.pivots) + len(self.others)


def cut(plan: Plan, light: Sequence[bool], cost: Cost) -> Fronts:
    """Blocks for all steps that are not light, merged where `cost` falls."""
    blocks = _merged(_tree(plan, light), cost)
    return _numbered(plan, light, blocks)


def _tree(plan: Plan, light: Sequence[bool]) -> dict[int, _Block]:
    """One block for each step, by place; a block's parent is the first of its others."""
    blocks: dict[int, _Block] = {}
    left: dict[int, set[int]] = {}
    for place, seen in enumerate(_seen(plan)):
        if light[place]:
            continue
        others = (seen | left.pop(place, set())) - {place}
        block = blocks.setdefault(place, _Block([], set(), []))
        block.pivots, block.others = [place], others
        if others:
            parent = min(others)
            left.setdefault(parent, set()).update(others)
            blocks.setdefault(parent, _Block([], set(), [])).children.append(place)
    return dict(sorted(blocks.items()))


def _merged(blocks: dict[int, _Block], cost: Cost) -> dict[int, _Block]:
    """Each block takes in the children that are cheaper inside it."""
    for block in blocks.values():
        waiting = sorted(block.children, key=lambda place: blocks[place].size()[1])
        block.children = []
        while waiting:
            place = waiting.pop()
            child = blocks[place]
            pivots, width = block.size()
            more = len(child.pivots)
            together = cost(pivots + more, width + more)
            if together <= cost(pivots, width) + cost(*child.size()):
                block.pivots = sorted(child.pivots + block.pivots)
                block.children += child.children
                child.pivots = []
            else:
                block.children.append(place)
    return {place: block for place, block in blocks.items() if block.pivots}


def _numbered(plan: Plan, light: Sequence[bool], blocks: dict[int, _Block]) -> Fronts:
    heavy = [place for place, is_light in enumerate(light) if not is_light]
    number = {place: at for at, place in enumerate(heavy)}
    steps = tuple(step for step, is_light in zip(plan.steps, light, strict=True) if is_light)
    live = set(range(plan.entries)).union(*(step.targets for step in steps))
    order = {place: at for at, place in enumerate(blocks)}
    slots: list[int] = []
    fronts: list[Front] = []
    lines_of: dict[int, dict[int, int]] = {}
    for place, block in blocks.items():
        others = sorted(block.others)
        lines = lines_of[place] = {at: k for k, at in enumerate(block.pivots + others)}
        own = _own(plan, block.pivots, lines, live)
        fronts.append(
            Front(
                pivots=_indices(number[at] for at in block.pivots),
                others=_indices(number[at] for at in others),
                own=(len(slots), len(slots) + len(own)),
                own_at=_indices(own.values()),
                children=tuple(
                    (order[child], _spots(blocks[child].others, lines)) for child in block.children
                ),
            )
        )
        slots += own
    return Fronts(
        light=replace(plan, steps=steps),
        rows=tuple(plan.steps[place].row for place in heavy),
        columns=tuple(plan.steps[place].column for place in heavy),
        slots=tuple(slots),
        blocks=tuple(fronts),
    )


def _indices(items: Iterable[int]) -> Indices:
    return np.fromiter(items, dtype=np.int64)


def _own(
    plan: Plan, pivots: Sequence[int], lines: dict[int, int], live: set[int]
) -> dict[int, int]:
    """Slot -> flat position, for what the light steps leave in these rows and columns."""
    row_line = {plan.steps[place].row: line for place, line in lines.items()}
    column_line = {plan.steps[place].column: line for place, line in lines.items()}
    width = len(lines)
    found: dict[int, int] = {}
    for place in pivots:
        step, line = plan.steps[place], lines[place]
        found[step.pivot] = line * (width + 1)
        for slot, row in zip(step.below, step.below_rows, strict=True):
            found[slot] = row_line[row] * width + line
        for slot, column in zip(step.right, step.right_columns, strict=True):
            found[slot] = line * width + column_line[column]
    return {slot: at for slot, at in found.items() if slot in live}


def _spots(others: set[int], lines: dict[int, int]) -> Indices:
    """Flat positions in the parent of a child's remainder."""
    at = _indices(lines[place] for place in sorted(others))
    return (at[:, None] * len(lines) + at).ravel()
