"""Netlist to text: what is written reads back as an equal netlist."""

from __future__ import annotations

from collections.abc import Iterator

from acsolve.circuit import unit
from acsolve.circuit.kind import LETTERS
from acsolve.circuit.netlist import Goal, Level, Netlist, Pair, Part, Question, Variant
from acsolve.circuit.unit import NONE, Dimension
from acsolve.circuit.value import Value
from acsolve.text.write_values import Expressions


def write(netlist: Netlist) -> str:
    """A circuit as text.

    Blocks, cascades and repetitions are written out, part by part. Where names have dots
    the text begins with `flattened`, and such names stand as they are.

    Parameters
    ----------
    netlist : the circuit, as read or as built in code, no variant applied

    Returns
    -------
    str: a text whose `parse` gives an equal netlist

    Examples
    --------
    >>> from acsolve.text import parse
    >>> print(write(parse("in -- R1 = 4k7 -- out").netlist), end="")
    in -- R1 = 4.7 kohm -- out

    """
    return "".join(f"{line}\n" for line in _Writer(netlist).lines())


def text_literal(text: str) -> str:
    """A text in double quotes, on one line."""
    shielded = text.replace("\\", "\\\\").replace('"', '\\"')
    return '"' + " ".join(shielded.splitlines()) + '"'


class _Writer:
    def __init__(self, netlist: Netlist) -> None:
        self._netlist = netlist
        self._parts = {part.name: part for part in netlist.parts}
        self._expressions = Expressions(dict(_dimensions(netlist)))

    def lines(self) -> Iterator[str]:
        netlist = self._netlist
        yield from (f"# {remark}".rstrip() for remark in netlist.remarks)
        if self._is_flat():
            yield "flattened"
        if netlist.title is not None:
            yield f"title {text_literal(netlist.title)}"
        yield from (f"caution {text_literal(text)}" for text in netlist.cautions)
        for name, item in netlist.quantities.items():
            value = item.value
            if value.expression is None:
                yield f"let {name}"
            else:
                yield f"let {name} = {self._quantity(value, item.dimension)}"
        yield from map(self._part, netlist.parts)
        for coupling in netlist.couplings:
            yield self._couple(coupling.first, coupling.second, coupling.coefficient)
        yield from (f"join {keep}, {node}" for node, keep in netlist.aliases.items())
        yield from (f"port {name} = {_pair(pair)}" for name, pair in netlist.ports.items())
        yield from map(self._question, netlist.questions)
        yield from map(self._goal, netlist.goals)
        for variant in netlist.variants.values():
            yield from self._variant(variant)

    def _is_flat(self) -> bool:
        netlist = self._netlist
        names = [*netlist.nodes(), *self._parts, *netlist.quantities]
        if netlist.aliases or any("." in name or "~" in name for name in names):
            return True
        return not self._named_nodes() <= {"gnd", *netlist.nodes()}

    def _named_nodes(self) -> set[str]:
        """Nodes that questions and the like name; their parts may not be fitted."""
        netlist = self._netlist
        pairs = [*netlist.ports.values()]
        for question in netlist.questions:
            pairs.append(question.target)
            pairs += [] if question.source is None else [question.source]
        for goal in netlist.goals:
            pairs += [goal.source, goal.target]
        joined = [group for item in netlist.variants.values() for group in item.joins]
        return {node for group in (*pairs, *joined) for node in group}

    # ------------------------------------------------------------ parts and values

    def _quantity(self, value: Value, dimension: Dimension) -> str:
        """A quantity has no place that tells its unit, so its own is always written."""
        return self._expressions.value(value, None if dimension.is_none else dimension)

    def _part(self, part: Part) -> str:
        kind = part.definition
        rest = {name: value for name, value in part.values.items() if name != kind.principal}
        principal = part.values.get(kind.principal or "")
        plain = principal is not None and principal.temperature_coefficient is None
        if LETTERS.get(part.name[0]) == kind.name and plain and not rest:
            left, right = part.nodes
            need = kind.attributes[0].dimension
            return f"{left} -- {part.name}{self._in_place(principal, need)} -- {right}"
        arguments = [
            f"{terminal.name} = {node}"
            for terminal, node in zip(kind.terminals, part.nodes, strict=True)
        ]
        if part.file is not None:
            arguments.append(f"file = {text_literal(part.file)}")
        arguments += self._attributes(part)
        return f"{part.name} : {kind.name}({', '.join(arguments)})"

    def _in_place(self, value: Value | None, need: Dimension | None) -> str:
        if value is None or value.expression is None:
            return ""
        return f" = {self._expressions.value(value, need)}"

    def _attributes(self, part: Part) -> Iterator[str]:
        for attribute in part.definition.attributes:
            value = part.values.get(attribute.name)
            if value is None:
                continue
            if value.expression is not None:
                written = self._expressions.value(value, attribute.dimension)
                yield f"{attribute.name} = {written}"
            if value.temperature_coefficient is not None:
                yield f"tc = {self._expressions.given(value.temperature_coefficient, NONE)}"

    def _couple(self, first: str, second: str, value: Value) -> str:
        head = f"couple {first}, {second}"
        if value.expression is None:
            return head
        return f"{head} = {self._expressions.value(value, NONE)}"

    # ------------------------------------------------------------ questions

    def _question(self, question: Question) -> str:
        words = [f"ask {question.kind}"]
        if question.source is not None:
            words.append(f"from {_pair(question.source)}")
        word = "into" if question.kind == "impedance" else "to"
        words.append(f"{word} {question.ammeter or _pair(question.target)}")
        if question.quantity is not None:
            words.append(f"as {question.quantity}")
        if question.levels:
            words.append("at " + ", ".join(map(self._level, question.levels)))
        if question.band is not None:
            words.append(self._band(question.band.low, question.band.high))
        if question.reference is not None:
            words.append(f"reference {self._expressions.value(question.reference, unit.OHM)}")
        if question.duration is not None:
            words.append(f"for {self._expressions.value(question.duration, unit.SECOND)}")
        return " ".join(words)

    def _level(self, level: Level) -> str:
        return "half power" if level.decibel is None else self._decibels(level.decibel)

    def _decibels(self, value: Value) -> str:
        assert value.expression is not None, "levels have a value"
        written = self._expressions.given(value.expression, None)
        return f"{written} dB" if not written.startswith("(") else written

    def _band(self, low: Value, high: Value) -> str:
        ends = [self._expressions.value(end, unit.HERTZ) for end in (low, high)]
        return f"over {' .. '.join(ends)}"

    def _goal(self, goal: Goal) -> str:
        return (
            f"goal from {_pair(goal.source)} to {_pair(goal.target)} "
            f"{self._band(goal.band.low, goal.band.high)} {goal.side} {self._decibels(goal.level)}"
        )

    # ------------------------------------------------------------ variants

    def _variant(self, variant: Variant) -> Iterator[str]:
        yield f"variant {text_literal(variant.name)}"
        couplings = {item.name: item for item in self._netlist.couplings}
        for name, value in variant.values.items():
            if name in couplings:
                item = couplings[name]
                yield f"    {self._couple(item.first, item.second, value)}"
            elif value.expression is not None:
                yield f"    {name} = {self._expressions.value(value, self._value_need(name))}"
        if variant.absent:
            yield f"    absent {', '.join(sorted(variant.absent))}"
        yield from (f"    join {', '.join(group)}" for group in variant.joins)
        yield "end"

    def _value_need(self, name: str) -> Dimension | None:
        """The dimension that a named value needs."""
        if name in self._netlist.quantities:
            return self._netlist.quantities[name].dimension
        for owner, attribute in ((name, None), tuple(name.rpartition(".")[::2])):
            part = self._parts.get(owner or "")
            if part is not None:
                row = part.definition.attribute(attribute or part.definition.principal or "")
                return None if row is None else row.dimension
        return None


def _dimensions(netlist: Netlist) -> Iterator[tuple[str, Dimension]]:
    """The dimension of every named value."""
    for name, item in netlist.quantities.items():
        yield name, item.dimension
    for part in netlist.parts:
        for attribute in part.definition.attributes:
            yield part.value_name(attribute.name), attribute.dimension or NONE


def _pair(pair: Pair) -> str:
    return pair[0] if pair[1] == "gnd" else f"({pair[0]}, {pair[1]})"
