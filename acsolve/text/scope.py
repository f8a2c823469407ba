"""Names while a text is being built: scopes, drafts of parts, values still unread.

These objects change while the text is read and are gone when the netlist is made.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import NamedTuple

from acsolve.circuit.kind import Kind
from acsolve.source import Span
from acsolve.text.tree import Block, KindText, Place, Placed, ValueText

Turns = Mapping[str, int]  # index names of the repetitions around a statement

NO_TURNS: Turns = {}

#: Words of expressions, which name neither parts nor quantities.
RESERVED = frozenset(("s", "pi", "sqrt", "exp", "ln", "log10"))


class Given(NamedTuple):
    """A value as written, with the scope and repetition in which its names are understood."""

    text: ValueText
    scope: Scope
    turns: Turns
    span: Span  # of the name it is given to


@dataclass(slots=True, eq=False)
class Draft:
    """A part or a copy of a block, gathered from the statements that mention it."""

    local: str
    scope: Scope
    span: Span
    turns: Turns = field(default_factory=dict)
    ends: tuple[str, str] | None = None  # nodes left and right in a chain
    ends_span: Span | None = None
    kind: KindText | None = None
    kind_turns: Turns = field(default_factory=dict)
    value: ValueText | Placed | None = None  # given in place
    definition: Kind | None = None  # once known, for built-in kinds
    absent: bool = False

    @property
    def name(self) -> str:
        """The full name."""
        return self.scope.prefix + self.local

    @property
    def own_value(self) -> ValueText | None:
        """The value given in place, taken apart."""
        return self.value.value() if isinstance(self.value, Placed) else self.value


@dataclass(slots=True, eq=False)
class Named:
    """A named quantity, or a symbol where it has no value."""

    local: str
    scope: Scope
    given: ValueText | None
    turns: Turns
    span: Span

    @property
    def name(self) -> str:
        """The full name."""
        return self.scope.prefix + self.local


@dataclass(slots=True, eq=False)
class Scope:
    """The names of the file, or of one copy of a block."""

    prefix: str = ""
    parent: Scope | None = None
    block: Block | None = None
    pins: dict[str, str] = field(default_factory=dict)  # pin -> node outside
    arguments: dict[str, Given] = field(default_factory=dict)
    nodes: dict[str, Span] = field(default_factory=dict)
    drafts: dict[str, Draft] = field(default_factory=dict)
    quantities: dict[str, Named] = field(default_factory=dict)
    values: dict[str, Given] = field(default_factory=dict)
    ports: dict[str, Span] = field(default_factory=dict)
    reached: list[tuple[str, Place]] = field(default_factory=list)  # dotted nodes, to be checked
    depth: int = 0

    def node(self, local: str) -> str:
        """The full name of a node of this scope."""
        if local == "gnd":
            return local
        return self.pins.get(local) or self.prefix + local

    def clear(self) -> None:
        """Forget what refers back to this scope."""
        for table in (self.drafts, self.quantities, self.values, self.arguments):
            table.clear()

    @property
    def file(self) -> Scope:
        """The outermost scope."""
        scope = self
        while scope.parent is not None:
            scope = scope.parent
        return scope
