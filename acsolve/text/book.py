"""Everything gathered from one text before the netlist is made."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import dataclass, field
from typing import NamedTuple

from acsolve.circuit.cascade import Row
from acsolve.source import Source
from acsolve.text import limits
from acsolve.text.problems import Problems
from acsolve.text.scope import Draft, Given, Named, Scope, Turns
from acsolve.text.tree import Block, Couple, Item, KindText, Nested, Path, ValueText


class Coupled(NamedTuple):
    """A statement that couples inductors."""

    names: list[str]
    statement: Couple
    scope: Scope
    turns: Turns


class Nodes:
    """Which nodes are one: a forest whose roots give the names."""

    def __init__(self) -> None:
        self.above: dict[str, str] = {}

    def find(self, node: str) -> str:
        """The name under which a node is kept."""
        root = node
        while root in self.above:
            root = self.above[root]
        while node != root:
            self.above[node], node = root, self.above[node]
        return root

    def unite(self, group: Iterable[str]) -> None:
        """Make the nodes of a group one; `gnd` gives its name, else the first node."""
        roots = list(dict.fromkeys(self.find(node) for node in group))
        keep = "gnd" if "gnd" in roots else roots[0]
        self.above.update({root: keep for root in roots if root != keep})

    def aliases(self) -> dict[str, str]:
        """Every joined node with the node it became."""
        return {node: self.find(node) for node in list(self.above)}


@dataclass(slots=True, eq=False)
class Book:
    """What the statements said, by full name."""

    source: Source
    problems: Problems
    flattened: bool = False
    blocks: dict[str, Block] = field(default_factory=dict)
    refused_blocks: set[str] = field(default_factory=set)  # those that contain themselves
    file: Scope = field(default_factory=Scope)
    parts: list[Draft] = field(default_factory=list)  # in file order, copies written out
    by_name: dict[str, Draft] = field(default_factory=dict)
    copies: dict[str, Draft] = field(default_factory=dict)  # block instances by full name
    scopes: list[Scope] = field(default_factory=list)
    overrides: dict[str, Given] = field(default_factory=dict)  # values given from outside
    override_ranks: dict[str, int] = field(default_factory=dict)
    met_overrides: set[str] = field(default_factory=set)
    left_out: set[str] = field(default_factory=set)  # full names of parts not fitted
    coupled: list[Coupled] = field(default_factory=list)
    rows: list[Row] = field(default_factory=list)  # copies in a row, at the level of the file
    nodes: Nodes = field(default_factory=Nodes)
    used: set[str] = field(default_factory=set)  # full names of quantities in use
    joins: list[list[str]] = field(default_factory=list)
    suspects: dict[tuple[str, str], list[tuple[Item, Path, Item]]] = field(default_factory=dict)
    asked: set[str] = field(default_factory=set)  # nodes that questions, ports and joins name
    steps: int = 0

    def step(self, statement: Nested | KindText) -> None:
        """Count statements as they are written out; refuse a text that grows too large."""
        self.steps += 1
        if self.steps > limits.EXPANSION:
            self.problems.refuse(
                "limit.expansion",
                f"written out, this text has more than {limits.EXPANSION:,} statements",
                statement.span,
                hint="Use fewer copies, or smaller ranges.",
            )

    def quantity(self, local: str, scope: Scope) -> Named | None:
        """The named quantity that a name stands for in a scope."""
        found = scope.quantities.get(local)
        return found if found is not None else self.file.quantities.get(local)

    def full_quantities(self) -> Iterator[Named]:
        """Every named quantity, file first, then copy by copy."""
        for scope in self.scopes:
            yield from scope.quantities.values()


def is_absent(value: ValueText | None) -> bool:
    """Whether a value says that the part is not fitted."""
    return value is not None and value.formula is None
