"""The network as pure data: parts, named quantities, ports, questions and variants.

Names are flat: the resistor R in the seventh copy of a cascade N1 is `N1[7].R`. In value
expressions, `Name("R1")` is the principal value of part R1, `Name("L1.quality")` another
attribute, `Name("fc")` a named quantity; a name whose value has no expression is a free
symbol.
"""

from __future__ import annotations

from collections.abc import Callable, Collection, Iterator, Mapping
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any, Literal

from acsolve.circuit.expression import names as names_in
from acsolve.circuit.kind import KINDS, Kind
from acsolve.circuit.value import Quantity, Value
from acsolve.source import Source, Span

if TYPE_CHECKING:
    from acsolve.ports.data import PortData

GROUND = "gnd"

#: A pair of nodes, (first, second): the voltage is V(first) - V(second), and current
#: enters the first. A single node stands against `gnd`.
Pair = tuple[str, str]

QuantityName = Literal["voltage-ratio", "current-ratio", "transimpedance", "transadmittance"]
QuestionKind = Literal[
    "transfer", "cutoff", "impedance", "two-port", "sweep", "step", "noise", "tolerance"
]


@dataclass(frozen=True, slots=True, kw_only=True)
class Part:
    """One part: its kind, the node of each terminal (in the kind's order), its values."""

    name: str
    kind: str
    nodes: tuple[str, ...]
    values: Mapping[str, Value] = field(default_factory=dict)
    file: str | None = None  # of a measured part, as the text names it
    span: Span | None = field(default=None, compare=False, repr=False)

    @property
    def definition(self) -> Kind:
        """The kind's row in the table of kinds."""
        return KINDS[self.kind]

    def node(self, terminal: str) -> str:
        """The node at a named terminal."""
        for item, node in zip(self.definition.terminals, self.nodes, strict=True):
            if item.name == terminal:
                return node
        raise KeyError(terminal)

    def value_name(self, attribute: str) -> str:
        """The name under which an attribute's value is referred to."""
        return self.name if attribute == self.definition.principal else f"{self.name}.{attribute}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Coupling:
    """Mutual inductance between two inductors, by coefficient k; first nodes are dotted."""

    first: str
    second: str
    coefficient: Value
    span: Span | None = field(default=None, compare=False, repr=False)

    @property
    def name(self) -> str:
        """The name under which the coefficient is referred to."""
        return f"k({self.first}, {self.second})"


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """A band of frequencies in hertz, as exact expressions."""

    low: Value
    high: Value


@dataclass(frozen=True, slots=True, kw_only=True)
class Level:
    """A level below the reference: in dB (`decibel`), or half power where that is None."""

    decibel: Value | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Question:
    """An `ask` line. `source` is None for a driving-point impedance or own sources.

    `options` holds what the line adds: quantity, levels, band, duration, reference
    resistance, under the words of the format.
    """

    kind: QuestionKind
    source: Pair | None = None
    target: Pair
    quantity: QuantityName | None = None
    levels: tuple[Level, ...] = ()
    band: Band | None = None
    duration: Value | None = None
    reference: Value | None = None
    ammeter: str | None = None  # a named ammeter as the target of a current
    span: Span | None = field(default=None, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Goal:
    """A limit that answers are judged against: below or above a level over a band."""

    source: Pair
    target: Pair
    band: Band
    side: Literal["below", "above"]
    level: Value
    span: Span | None = field(default=None, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Variant:
    """Other values, parts not fitted and nodes joined, for the same circuit."""

    name: str
    values: Mapping[str, Value] = field(default_factory=dict)
    absent: frozenset[str] = frozenset()
    joins: tuple[tuple[str, ...], ...] = ()
    span: Span | None = field(default=None, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Cascade:
    """Equal copies of a block, pin two of each at pin one of the next.

    Copy k (from 1) holds the parts from `start + (k - 1)*length`, `length` of them; its names
    begin with `name[k].`, and `name[k].pin` is the node between it and the next one. `near`
    and `far` are the nodes at the two ends; nothing but the copies touches what is between.
    """

    name: str
    count: int
    start: int
    length: int
    near: str
    far: str
    pin: str

    @property
    def stem(self) -> str:
        """How every name inside begins."""
        return f"{self.name}["


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """What a part of kind `cascade` consists of: `count` times these parts in a row.

    `near` and `far` are the nodes of the first copy; its other nodes are its own, or `gnd`.
    """

    parts: tuple[Part, ...]
    couplings: tuple[Coupling, ...]
    near: str
    far: str
    count: int


@dataclass(frozen=True, slots=True, kw_only=True)
class Netlist:
    """A whole circuit. `parts` are in file order, those not fitted left out.

    `cascades` are the rows of equal copies among them; `sections` is filled only where
    `acsolve.circuit.cascade.condensed` has put one part in the place of such a row.
    """

    title: str | None = None
    parts: tuple[Part, ...] = ()
    couplings: tuple[Coupling, ...] = ()
    quantities: Mapping[str, Quantity] = field(default_factory=dict)
    ports: Mapping[str, Pair] = field(default_factory=dict)
    questions: tuple[Question, ...] = ()
    goals: tuple[Goal, ...] = ()
    cautions: tuple[str, ...] = ()
    remarks: tuple[str, ...] = ()  # the comment lines at the head of the file
    variants: Mapping[str, Variant] = field(default_factory=dict)
    variant: str | None = None
    aliases: Mapping[str, str] = field(default_factory=dict)  # joined node -> the one kept
    source: Source | None = field(default=None, compare=False, repr=False)
    cascades: tuple[Cascade, ...] = field(default=(), compare=False, repr=False)
    sections: Mapping[str, Section] = field(default_factory=dict)
    folder: str | None = field(default=None, compare=False, repr=False)  # of the files it names
    data: Mapping[str, PortData] = field(default_factory=dict, repr=False)  # of measured parts
    _found: dict[str, Any] = field(init=False, default_factory=dict, compare=False, repr=False)

    def nodes(self) -> tuple[str, ...]:
        """All nodes, `gnd` first where it occurs, then in order of first appearance."""
        nodes: tuple[str, ...] = self._once("nodes", self._nodes)
        return nodes

    def node_set(self) -> frozenset[str]:
        """The nodes, and `gnd` in any case."""
        nodes: frozenset[str] = self._once("node set", lambda: frozenset((*self.nodes(), GROUND)))
        return nodes

    def _once(self, what: str, work_out: Callable[[], Any]) -> Any:
        """What follows from the parts, worked out when it is first asked for."""
        if what not in self._found:
            self._found[what] = work_out()
        return self._found[what]

    def _nodes(self) -> tuple[str, ...]:
        seen: dict[str, None] = {}
        for part in self.parts:
            for node in part.nodes:
                seen.setdefault(node)
        rest = [node for node in seen if node != GROUND]
        return ((GROUND,) if GROUND in seen else ()) + tuple(rest)

    def part(self, name: str) -> Part | None:
        """The part of that name, or None."""
        return next((part for part in self.parts if part.name == name), None)

    def resolve(self, node: str) -> str:
        """The node that a joined node became."""
        return self.aliases.get(node, node)

    def values(self) -> Iterator[tuple[str, Value]]:
        """Every named value of the circuit: quantities, parts, couplings."""
        for name, quantity in self.quantities.items():
            yield name, quantity.value
        for part in self.parts:
            for attribute, value in part.values.items():
                yield part.value_name(attribute), value
        for coupling in self.couplings:
            yield coupling.name, coupling.coefficient


def bindings(netlist: Netlist) -> Mapping[str, Value]:
    """Every named value by its name: what `Name` in an expression refers to."""
    return dict(netlist.values())


def with_values(netlist: Netlist, values: Mapping[str, Value]) -> Netlist:
    """A netlist in which the named values are replaced; unknown names are ignored."""
    parts = tuple(_part_with(part, values) for part in netlist.parts)
    quantities = {
        name: replace(item, value=values[name]) if name in values else item
        for name, item in netlist.quantities.items()
    }
    couplings = tuple(
        replace(item, coefficient=values[item.name]) if item.name in values else item
        for item in netlist.couplings
    )
    return replace(
        netlist,
        parts=parts,
        quantities=quantities,
        couplings=couplings,
        cascades=_untouched(netlist.cascades, {*values, *_mentioned(values)}),
    )


def _mentioned(values: Mapping[str, Value]) -> set[str]:
    """The names that some values refer to."""
    return {
        name
        for value in values.values()
        if value.expression is not None
        for name in names_in(value.expression)
    }


def _untouched(cascades: tuple[Cascade, ...], touched: Collection[str]) -> tuple[Cascade, ...]:
    """The cascades inside which none of the names lies: their copies are still equal."""
    return tuple(
        item for item in cascades if not any(name.startswith(item.stem) for name in touched)
    )


def _part_with(part: Part, values: Mapping[str, Value]) -> Part:
    new: dict[str, Value] = {}
    for attribute in part.definition.attributes:
        name = part.value_name(attribute.name)
        if name in values:
            new[attribute.name] = values[name]
    return replace(part, values={**part.values, **new}) if new else part


def with_absent(netlist: Netlist, names: frozenset[str]) -> Netlist:
    """A netlist without the named parts (not fitted) and couplings that need them."""
    if not names:
        return netlist
    parts = tuple(part for part in netlist.parts if part.name not in names)
    couplings = tuple(item for item in netlist.couplings if not {item.first, item.second} & names)
    gone = [place for place, part in enumerate(netlist.parts) if part.name in names]
    cascades = tuple(
        replace(item, start=item.start - sum(place < item.start for place in gone))
        for item in _untouched(netlist.cascades, names)
    )
    return replace(netlist, parts=parts, couplings=couplings, cascades=cascades)


def with_joins(netlist: Netlist, joins: tuple[tuple[str, ...], ...]) -> Netlist:
    """A netlist in which each group of nodes is one node, `gnd` kept where it is among them.

    Otherwise the first node of the group, after earlier joins, gives its name.
    """
    if not joins:
        return netlist
    aliases = dict(netlist.aliases)
    for group in joins:
        members = [aliases.get(node, node) for node in group]
        keep = GROUND if GROUND in members else members[0]
        moved = set(members) - {keep}
        for node, target in list(aliases.items()):
            if target in moved:
                aliases[node] = keep
        aliases.update(dict.fromkeys(moved, keep))

    def pair(item: Pair) -> Pair:
        return aliases.get(item[0], item[0]), aliases.get(item[1], item[1])

    parts = tuple(
        replace(part, nodes=tuple(aliases.get(node, node) for node in part.nodes))
        for part in netlist.parts
    )
    ports = {name: pair(item) for name, item in netlist.ports.items()}
    questions = tuple(
        replace(
            item,
            source=None if item.source is None else pair(item.source),
            target=pair(item.target),
        )
        for item in netlist.questions
    )
    goals = tuple(
        replace(item, source=pair(item.source), target=pair(item.target)) for item in netlist.goals
    )
    touched = {node for group in joins for node in group}
    cascades = tuple(
        replace(
            item,
            near=aliases.get(item.near, item.near),
            far=aliases.get(item.far, item.far),
        )
        for item in _untouched(netlist.cascades, touched)
    )
    return replace(
        netlist,
        parts=parts,
        ports=ports,
        questions=questions,
        goals=goals,
        aliases=aliases,
        cascades=cascades,
    )


def with_variant(netlist: Netlist, name: str) -> Netlist:
    """The netlist as its variant of that name says; KeyError where there is none."""
    variant = netlist.variants[name]
    changed = with_joins(
        with_absent(with_values(netlist, variant.values), variant.absent), variant.joins
    )
    return replace(changed, variant=name)
