"""The whole network as one plain dense system of equations, solved by elimination.

Written from the text of the format and of the interface, sharing no code with the
library: every node has a potential, every port of every part a current, every node a
balance, and no node is the reference. What the equations leave open (the level of a
network that nothing ties to another) shows as a free unknown, so an answer is either
determined, or open, or there is none.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import Any, Literal

from acsolve.circuit.expression import (
    Call,
    Expression,
    Frequency,
    Name,
    Number,
    Pi,
    Power,
    Product,
    Quotient,
    Sum,
)
from acsolve.circuit.netlist import Netlist, Pair, Part

from .field import Field

Row = dict[str, Any]
State = Literal["determined", "open", "none"]


@dataclass(frozen=True)
class Answer:
    """The value of a question at one complex frequency.

    `regular` says that nothing in the network is open but the level of each conductive
    part of it, that no amplifier senses across two of these (`sensible`), and that the
    drive can act.
    """

    state: State
    value: Any
    regular: bool
    sensible: bool


class Values:
    """The numbers behind names and expressions, worked out in one field at one frequency."""

    def __init__(self, netlist: Netlist, field: Field, s: Any) -> None:
        self.field, self.s = field, s
        self.known: dict[str, Expression | None] = {
            name: item.value.expression for name, item in netlist.quantities.items()
        }
        for part in netlist.parts:
            for attribute, value in part.values.items():
                principal = attribute == part.definition.principal
                self.known[part.name if principal else f"{part.name}.{attribute}"] = (
                    value.expression
                )
        for item in netlist.couplings:
            self.known[f"k({item.first}, {item.second})"] = item.coefficient.expression

    def __call__(self, expression: Expression) -> Any:
        """The number that an expression stands for."""
        match expression:
            case Number(value):
                return self.field.number(value)
            case Name(name):
                inner = self.known.get(name)
                return self.field.symbol(name) if inner is None else self(inner)
            case Pi():
                return self.field.pi()
            case Frequency():
                return self.s
            case Sum(left, right):
                return self(left) + self(right)
            case Product(left, right):
                return self(left) * self(right)
            case Quotient(left, right):
                return self(left) / self(right)
            case Power(base, Number(exponent)) if exponent.denominator == 1:
                return self(base) ** exponent.numerator
            case Power(base, exponent):
                return self(base) ** self(exponent)
            case Call("sqrt", argument):
                return self.root(argument)
        raise NotImplementedError(expression)

    def root(self, expression: Expression) -> Any:
        """The square root of a product of positive quantities, or of s."""
        match expression:
            case Number(value):
                return self.field.root(value) if value else self.field.number(value)
            case Name(name):
                inner = self.known.get(name)
                return self.field.symbol_root(name) if inner is None else self.root(inner)
            case Product(left, right):
                return self.root(left) * self.root(right)
            case Quotient(left, right):
                return self.root(left) / self.root(right)
        return self(expression) ** self.field.number(Fraction(1, 2))

    def of(self, part: Part, attribute: str) -> Any:
        """An attribute's number; zero where the part does not have it."""
        if attribute not in part.values:
            return self.field.number(Fraction(0))
        principal = attribute == part.definition.principal
        return self(Name(part.name if principal else f"{part.name}.{attribute}"))


class Dense:
    """The equations of one question; `answer()` solves them."""

    def __init__(self, netlist: Netlist, field: Field, s: Any, *, replaced: Pair | None) -> None:
        self.field, self.s = field, s
        self.own_sources = replaced is None
        self.senses: list[Pair] = []
        self.one, self.zero = field.number(Fraction(1)), field.number(Fraction(0))
        self.value = Values(netlist, field, s)
        self.nodes: dict[str, str] = {}  # node -> another of its conductive set, or itself
        self.balances: dict[str, Row] = {}
        self.laws: list[tuple[Row, Any]] = []
        self.coils: dict[str, Row] = {}
        for part in netlist.parts:
            for node in part.nodes:
                self._node(node)
        for part in netlist.parts:
            source = part.kind in ("voltage_source", "current_source")
            if not (source and replaced is not None and set(part.nodes) == set(replaced)):
                _PARTS[part.kind](self, part)
        for item in netlist.couplings:
            mutual = (
                self.s
                * self.value(Name(f"k({item.first}, {item.second})"))
                * self.value.root(Name(item.first))
                * self.value.root(Name(item.second))
            )
            for here, there in ((item.first, item.second), (item.second, item.first)):
                self.coils[here][f"I({there})"] = -mutual

    def _node(self, node: str) -> None:
        self.nodes.setdefault(node, node)
        self.balances.setdefault(node, {})

    def _top(self, node: str) -> str:
        while self.nodes[node] != node:
            node = self.nodes[node]
        return node

    @property
    def sensible(self) -> bool:
        """Whether every sensed voltage is one between nodes of one conductive set."""
        return all(self._top(first) == self._top(second) for first, second in self.senses)

    @property
    def levels(self) -> int:
        """The number of conductive sets of nodes."""
        return sum(self._top(node) == node for node in self.nodes)

    def branch(self, name: str, first: str, second: str, *, joins: bool = True) -> str:
        """A current that flows from the first node through the branch to the second."""
        current = f"I({name})"
        for node, sign in ((first, self.one), (second, -self.one)):
            self._node(node)
            self._add(self.balances[node], current, sign)
        if joins:
            self.nodes[self._top(first)] = self._top(second)
        return current

    def voltage(self, first: str, second: str, factor: Any | None = None) -> Row:
        """factor · (V(first) - V(second))."""
        factor = self.one if factor is None else factor
        row: Row = {}
        self._add(row, f"V({first})", factor)
        self._add(row, f"V({second})", -factor)
        return row

    def _add(self, row: Row, name: str, factor: Any) -> None:
        row[name] = row.get(name, self.zero) + factor

    def law(self, *rows: Row, equals: Any | None = None) -> Row:
        """The sum of some rows equals a number."""
        total: Row = {}
        for row in rows:
            for name, factor in row.items():
                self._add(total, name, factor)
        self.laws.append((total, self.zero if equals is None else equals))
        return total

    def answer(self, observed: Row) -> Answer:
        """What the observed combination of unknowns is, if it is anything."""
        rows = [(row, self.zero) for row in self.balances.values()] + self.laws
        names = [f"V({node})" for node in self.nodes]
        names += sorted({name for row, _ in rows for name in row if name[0] == "I"})
        place = {name: column for column, name in enumerate(names)}
        matrix = [[self.zero] * (len(names) + 1) for _ in rows]
        for line, (row, right) in zip(matrix, rows, strict=True):
            for name, factor in row.items():
                line[place[name]] = factor
            line[-1] = right
        pivots = self._eliminate(matrix)
        if len(names) in pivots:
            return Answer("none", None, False, self.sensible)
        wanted = [self.zero] * (len(names) + 1)
        for name, factor in observed.items():
            wanted[place[name]] = factor
        for column, line in pivots.items():
            _subtract(wanted, line, column)
        regular = len(names) - len(pivots) == self.levels and self.sensible
        if any(not self.field.is_zero(item) for item in wanted[:-1]):
            return Answer("open", None, regular, self.sensible)
        return Answer("determined", -wanted[-1], regular, self.sensible)

    def _eliminate(self, matrix: list[list[Any]]) -> dict[int, list[Any]]:
        """Pivot rows by column; the last column stands for a contradiction."""
        pivots: dict[int, list[Any]] = {}
        width = len(matrix[0])
        left = list(matrix)
        for column in range(width):
            line = max(left, key=lambda row: _size(row[column]), default=None)
            if line is None or self.field.is_zero(line[column]):
                continue
            left = [row for row in left if row is not line]
            scaled = [item / line[column] for item in line]
            for row in left:
                _subtract(row, scaled, column)
            pivots[column] = scaled
        return pivots


def _size(value: Any) -> Any:
    return value.value != 0 if hasattr(value, "value") else abs(value)


def _subtract(row: list[Any], pivot: list[Any], column: int) -> None:
    factor = row[column]
    if _size(factor):
        for place in range(column, len(row)):
            if _size(pivot[place]):
                row[place] = row[place] - factor * pivot[place]


_PARTS: dict[str, Callable[[Dense, Part], None]] = {}


def _part(*kinds: str) -> Callable[[Callable[[Dense, Part], None]], Callable[[Dense, Part], None]]:
    def register(function: Callable[[Dense, Part], None]) -> Callable[[Dense, Part], None]:
        _PARTS.update(dict.fromkeys(kinds, function))
        return function

    return register


@_part("resistor", "inductor", "impedance", "ammeter")
def _in_ohms(net: Dense, part: Part) -> None:
    """V = Z·I; quality Q at f means the series resistance 2·pi·f·L/Q."""
    get = net.value.of
    match part.kind:
        case "resistor":
            impedance = get(part, "value") + net.s * get(part, "series_inductance")
        case "inductor":
            impedance = net.s * get(part, "value") + get(part, "series_resistance")
            if "quality" in part.values:
                impedance += _omega(net, part) * get(part, "value") / get(part, "quality")
        case "impedance":
            impedance = get(part, "value")
        case _:
            impedance = net.zero
    current = net.branch(part.name, *part.nodes)
    row = net.law(net.voltage(*part.nodes), {current: -impedance})
    net.coils[part.name] = row


def _omega(net: Dense, part: Part) -> Any:
    at = part.values["quality"].at_hertz
    assert at is not None
    return net.field.number(Fraction(2)) * net.field.pi() * net.value(at)


@_part("capacitor", "admittance", "constant_phase", "crystal")
def _in_siemens(net: Dense, part: Part) -> None:
    """I·(1 + Y·Z) = Y·V for an admittance Y with Z in series."""
    get = net.value.of
    series = net.zero
    match part.kind:
        case "capacitor":
            admittance = net.s * get(part, "value")
            loss = get(part, "series_resistance") + net.s * get(part, "series_inductance")
            series = admittance * loss
            if "quality" in part.values:  # Y times 1/(2·pi·f·C·Q), which C = 0 does not touch
                series += net.s / (_omega(net, part) * get(part, "quality"))
        case "admittance":
            admittance = get(part, "value")
        case "constant_phase":
            admittance = get(part, "coefficient") * net.s ** get(part, "exponent")
        case _:
            shunt = net.branch(f"{part.name} shunt", *part.nodes)
            across = net.s * get(part, "shunt_capacitance")
            net.law(net.voltage(*part.nodes, across), {shunt: -net.one})
            admittance = net.s * get(part, "motional_capacitance")
            arm = get(part, "motional_resistance") + net.s * get(part, "motional_inductance")
            series = admittance * arm
    shut = net.field.is_zero(admittance) and part.kind != "crystal"
    current = net.branch(part.name, *part.nodes, joins=not shut)
    net.law(net.voltage(*part.nodes, admittance), {current: -(net.one + series)})


@_part("voltage_source")
def _voltage_source(net: Dense, part: Part) -> None:
    """A source raises the potential from its first node to its second."""
    net.branch(part.name, *part.nodes)
    amplitude = net.value.of(part, "amplitude") if net.own_sources else net.zero
    net.law(net.voltage(part.nodes[1], part.nodes[0]), equals=amplitude)


@_part("current_source")
def _current_source(net: Dense, part: Part) -> None:
    """A source drives its current through itself from its first node to its second."""
    current = net.branch(part.name, *part.nodes, joins=net.own_sources)
    amplitude = net.value.of(part, "amplitude") if net.own_sources else net.zero
    net.law({current: net.one}, equals=amplitude)


@_part("opamp")
def _opamp(net: Dense, part: Part) -> None:
    """Ideal: equal inputs. Else one pole: A0/(1 + s·A0/w), w = 2·pi·(gain-bandwidth)."""
    plus, minus, out, ref = part.nodes
    get = net.value.of
    if "input_resistance" in part.values:
        current = net.branch(f"{part.name} in", plus, minus)
        net.law(net.voltage(plus, minus), {current: -get(part, "input_resistance")})
    delivered = net.branch(part.name, ref, out)
    gain, width = (item in part.values for item in ("open_loop_gain", "gain_bandwidth"))
    net.senses.append((plus, minus))
    if not gain and not width:
        net.law(net.voltage(plus, minus))
        return
    inverse = net.one / get(part, "open_loop_gain") if gain else net.zero
    if width:
        inverse += net.s / (
            net.field.number(Fraction(2)) * net.field.pi() * get(part, "gain_bandwidth")
        )
    net.law(
        net.voltage(out, ref, inverse),
        net.voltage(plus, minus, -net.one),
        {delivered: inverse * get(part, "output_resistance")},
    )


@_part("voltage_amplifier", "transconductance", "transresistance", "current_amplifier")
def _controlled(net: Dense, part: Part) -> None:
    """The controlled side delivers into `out`; a controlling current flows plus to minus."""
    plus, minus, out, ref = part.nodes
    gain = net.value.of(part, "gain")
    if part.kind in ("transresistance", "current_amplifier"):
        current = net.branch(f"{part.name} in", plus, minus)
        net.law(net.voltage(plus, minus))
        control: Row = {current: -gain}
    else:
        control = net.voltage(plus, minus, -gain)
        net.senses.append((plus, minus))
    delivered = net.branch(part.name, ref, out)
    if part.kind in ("voltage_amplifier", "transresistance"):
        net.law(net.voltage(out, ref), control)
    else:
        net.law({delivered: net.one}, control)


@_part("transformer", "gyrator")
def _two_port(net: Dense, part: Part) -> None:
    p1, p2, s1, s2 = part.nodes
    first = net.branch(f"{part.name} p", p1, p2)
    second = net.branch(f"{part.name} s", s1, s2)
    if part.kind == "transformer":  # no power is lost: V1·I1 + V2·I2 = 0
        ratio = net.value.of(part, "ratio")
        net.law(net.voltage(p1, p2), net.voltage(s1, s2, -ratio))
        net.law({second: net.one}, {first: ratio})
    else:
        g = net.value.of(part, "conductance")
        net.law({first: net.one}, net.voltage(s1, s2, -g))
        net.law({second: net.one}, net.voltage(p1, p2, g))


def answer(
    netlist: Netlist,
    field: Field,
    s: Any,
    *,
    source: Pair | None,
    target: Pair,
    quantity: str,
    ammeter: str | None = None,
) -> Answer:
    """The answer to a question as the interface words it, at one complex frequency.

    Without a source pair it is the voltage that the network's own sources cause.
    """
    net = Dense(netlist, field, s, replaced=source)
    if source is None:
        return net.answer(net.voltage(*target))
    drive = net.branch("(drive)", source[1], source[0])  # the current enters the first node
    by_voltage = quantity in ("voltage-ratio", "transadmittance")
    net.law(net.voltage(*source) if by_voltage else {drive: net.one}, equals=net.one)
    if quantity not in ("current-ratio", "transadmittance"):
        return net.answer(net.voltage(*target))
    if ammeter is not None:
        return net.answer({f"I({ammeter})": net.one})
    short = net.branch("(short)", *target)
    net.law(net.voltage(*target))
    return net.answer({short: net.one})


def evaluated(form: Any, field: Field, s: Any, values: Mapping[str, Any] | None = None) -> Any:
    """A closed form's ratio in a field, summed term by term."""
    points = [
        _generator(item.leaf, item.root, field, s, values or {}) for item in form.basis.generators
    ]
    sides = []
    for side in (form.numerator, form.denominator):
        total = field.number(Fraction(0))
        for exponents, coefficient in side.terms():
            term = field.number(Fraction(int(coefficient)))
            for point, exponent in zip(points, exponents, strict=False):
                if exponent:
                    term = term * point ** int(exponent)
            total = total + term
        sides.append(total)
    return sides[0] / sides[1]


def _generator(leaf: Expression, root: int, field: Field, s: Any, values: Mapping[str, Any]) -> Any:
    match leaf, root:
        case Name(name), 1:
            return values[name] if name in values else field.symbol(name)
        case Name(name), 2:
            return field.symbol_root(name)
        case Pi(), 1:
            return field.pi()
        case Pi(), _:
            return field.pi() ** field.number(Fraction(1, root))
        case Frequency(), 1:
            return s
        case Number(value), 2:
            return field.root(value)
        case Frequency(), _:
            return s ** field.number(Fraction(1, root))
    raise NotImplementedError(leaf)
