"""Random networks: every lumped kind of part, numbers and symbols, up to eight nodes."""

from __future__ import annotations

import itertools
from collections.abc import Sequence
from dataclasses import replace
from fractions import Fraction

from hypothesis import strategies as st

from acsolve.circuit.expression import (
    PI,
    Expression,
    Number,
    S,
    add,
    divide,
    multiply,
    number,
)
from acsolve.circuit.kind import KINDS
from acsolve.circuit.netlist import Coupling, Netlist, Pair, Part
from acsolve.circuit.value import Quantity, Value

NODES = ("gnd", "in", "a", "b", "out", "7", "n[1]", "n[2]")
PASSIVE = ("resistor", "inductor", "capacitor")
IMMITTANCES = (*PASSIVE, "impedance", "admittance", "crystal")
FOUR_TERMINALS = (
    "opamp",
    "voltage_amplifier",
    "transconductance",
    "transresistance",
    "current_amplifier",
    "transformer",
    "gyrator",
)
LUMPED = (*IMMITTANCES, "voltage_source", "current_source", "ammeter", *FOUR_TERMINALS)
SENSING = ("opamp", "voltage_amplifier", "transconductance")
QUANTITIES = (
    "voltage-ratio",
    "current-ratio",
    "transimpedance",
    "transadmittance",
    "impedance",
)

positives = st.builds(Fraction, st.integers(1, 40), st.integers(1, 12))
signed = st.builds(lambda size, sign: size * sign, positives, st.sampled_from([1, 1, 1, -1]))


def part(name: str, kind: str, *nodes: str, **values: int | Fraction | Expression | None) -> Part:
    """A part; numbers become exact values, None makes an attribute its own symbol."""
    return Part(
        name=name,
        kind=kind,
        nodes=nodes,
        values={key: Value(expression=_expression(item)) for key, item in values.items()},
    )


def _expression(item: int | Fraction | Expression | None) -> Expression | None:
    return number(item) if isinstance(item, int | Fraction) else item


def R(name: str, a: str, b: str, value: int | Fraction | Expression | None = None) -> Part:  # noqa: N802 - the reference designator
    """A resistor."""
    return part(name, "resistor", a, b, value=value)


def L(name: str, a: str, b: str, value: int | Fraction | Expression | None = None) -> Part:  # noqa: N802 - the reference designator
    """An inductor."""
    return part(name, "inductor", a, b, value=value)


def C(name: str, a: str, b: str, value: int | Fraction | Expression | None = None) -> Part:  # noqa: N802 - the reference designator
    """A capacitor."""
    return part(name, "capacitor", a, b, value=value)


def network(*parts: Part, **more) -> Netlist:
    """A netlist of parts."""
    return Netlist(parts=parts, **more)


def coupling(first: str, second: str, k: int | Fraction | None) -> Coupling:
    """A coupling of two inductors."""
    return Coupling(first=first, second=second, coefficient=Value(expression=_expression(k)))


_POSITIVE = positives.map(lambda number: Value(expression=Number(number)))
_SIGNED = signed.map(lambda number: Value(expression=Number(number)))
_SYMBOL = st.just(Value())
_ZERO = st.just(Value(expression=Number(Fraction(0))))


def plain_values(
    *, symbols: bool, sign: bool = False, odd: bool = False
) -> st.SearchStrategy[Value]:
    """A rational number or, where allowed, a symbol, zero or a negative number."""
    choices = [_SIGNED if sign or odd else _POSITIVE]
    if symbols:
        choices.append(_SYMBOL)
    if odd:
        choices.append(_ZERO)
    return st.one_of(choices)


@st.composite
def in_s(draw) -> Value:
    """A small rational function of s: a constant, a slope, or a one-pole section."""
    a, b, c = (number(draw(positives)) for _ in range(3))
    shapes = (
        a,
        multiply(a, S),
        divide(a, S),
        add(a, multiply(b, S)),
        divide(a, add(b, multiply(c, S))),
        divide(add(a, multiply(S, S)), add(b, multiply(c, S))),
    )
    return Value(expression=draw(st.sampled_from(shapes)))


_LOSSES = {
    "resistor": ("series_inductance",),
    "inductor": ("series_resistance", "quality"),
    "capacitor": ("series_resistance", "series_inductance", "quality"),
}
_CRYSTAL = tuple(item.name for item in KINDS["crystal"].attributes)
_OPAMP = ("open_loop_gain", "gain_bandwidth", "input_resistance", "output_resistance")


@st.composite
def lumped(
    draw, name: str, kind: str, nodes: Sequence[str], *, symbols: bool, odd: bool = False
) -> Part:
    """A part of one kind with drawn values, lossy now and then."""
    value = plain_values(symbols=symbols)
    values: dict[str, Value] = {}
    if kind in _LOSSES:
        values["value"] = draw(plain_values(symbols=symbols, odd=odd))
        for loss in draw(st.sets(st.sampled_from(_LOSSES[kind]))) if draw(st.booleans()) else ():
            at = number(draw(positives)) if loss == "quality" else None
            values[loss] = replace(draw(value), at_hertz=at)
    elif kind in ("impedance", "admittance"):
        values["value"] = draw(in_s())
    elif kind == "crystal":
        values = {item: draw(value) for item in _CRYSTAL}
    elif kind == "opamp":
        chosen = draw(st.sets(st.sampled_from(_OPAMP))) if draw(st.booleans()) else set()
        values = {item: draw(value) for item in _OPAMP if item in chosen}
    elif KINDS[kind].principal is not None:
        principal = KINDS[kind].principal or ""
        values[principal] = draw(plain_values(symbols=symbols, sign=True, odd=odd))
    return Part(name=name, kind=kind, nodes=tuple(nodes), values=values)


def _letter(kind: str) -> str:
    return {"resistor": "R", "inductor": "L", "capacitor": "C"}.get(kind, "X")


@st.composite
def connected(
    draw,
    *,
    tree: Sequence[str] = PASSIVE,
    extra: Sequence[str] = PASSIVE,
    symbols: bool = False,
    odd: bool = False,
    most_nodes: int = 6,
    most_extra: int = 5,
    grounded: bool = True,
) -> Netlist:
    """Parts that join all nodes as a tree, and more parts of any of the kinds given."""
    nodes = NODES[: draw(st.integers(2, most_nodes))]
    if not grounded:
        nodes = NODES[1 : 1 + len(nodes)]
    ends: list[tuple[str, list[str]]] = [
        (draw(st.sampled_from(tree)), [draw(st.sampled_from(nodes[:at])), nodes[at]])
        for at in range(1, len(nodes))
    ]
    for _ in range(draw(st.integers(0, most_extra))):
        kind = draw(st.sampled_from(extra))
        count = len(KINDS[kind].terminals)
        places = [draw(st.sampled_from(nodes)) for _ in range(count)]
        if count == 2 and places[0] == places[1]:
            places[1] = next(node for node in nodes if node != places[0])
        ends.append((kind, places))
    parts = [
        draw(lumped(f"{_letter(kind)}{at}", kind, places, symbols=symbols, odd=odd))
        for at, (kind, places) in enumerate(ends)
    ]
    couplings = () if odd else draw(_couplings(parts, symbols=symbols))
    return Netlist(parts=tuple(draw(st.permutations(parts))), couplings=couplings)


@st.composite
def _couplings(draw, parts: Sequence[Part], *, symbols: bool) -> tuple[Coupling, ...]:
    """Now and then one coupling of two inductors, physically possible, k = 1 included."""
    coils = [item.name for item in parts if item.kind == "inductor"]
    if len(coils) < 2 or not draw(st.booleans()):
        return ()
    size = draw(st.sampled_from([Fraction(1), Fraction(-1), Fraction(1, 2), Fraction(9, 10), None]))
    return (coupling(coils[0], coils[1], size if size is not None or symbols else 1),)


def any_lumped(
    *, symbols: bool, odd: bool = False, grounded: bool = True
) -> st.SearchStrategy[Netlist]:
    """A connected network of any lumped parts; `odd` ones may be zero or negative."""
    return connected(
        tree=(*PASSIVE, *IMMITTANCES),
        extra=(*LUMPED, *FOUR_TERMINALS, "opamp"),
        symbols=symbols,
        odd=odd,
        most_nodes=8,
        grounded=grounded,
    )


@st.composite
def scattered(draw) -> Netlist:
    """Any lumped parts between any nodes: floating, shorted and contradictory ones among them."""
    parts = []
    for at in range(draw(st.integers(1, 7))):
        kind = draw(st.sampled_from((*LUMPED, *PASSIVE, *FOUR_TERMINALS, "voltage_source")))
        places = [draw(st.sampled_from(NODES[:6])) for _ in KINDS[kind].terminals]
        parts.append(draw(lumped(f"{_letter(kind)}{at}", kind, places, symbols=True, odd=True)))
    return Netlist(parts=tuple(parts))


@st.composite
def islands(draw, *, symbols: bool = False) -> Netlist:
    """Two or three networks of R, L and C that only transformers join."""
    parts: list[Part] = []
    sides: list[tuple[str, ...]] = []
    for letter in "pqr"[: draw(st.integers(2, 3))]:
        count = draw(st.integers(2, 3))
        nodes = tuple(
            "gnd" if letter == "p" and at == 0 else f"{letter}{at}" for at in range(count)
        )
        sides.append(nodes)
        for at in range(1, count):
            kind = draw(st.sampled_from(PASSIVE))
            ends = [draw(st.sampled_from(nodes[:at])), nodes[at]]
            parts.append(draw(lumped(f"{_letter(kind)}{len(parts)}", kind, ends, symbols=symbols)))
        kind = draw(st.sampled_from(PASSIVE))
        parts.append(
            draw(
                lumped(f"{_letter(kind)}{len(parts)}", kind, [nodes[0], nodes[-1]], symbols=symbols)
            )
        )
    for first, second in itertools.pairwise(sides):
        places = [first[0], first[-1], second[0], second[-1]]
        ratio = draw(plain_values(symbols=symbols, sign=True))
        parts.append(
            Part(
                name=f"T{len(parts)}",
                kind="transformer",
                nodes=tuple(places),
                values={"ratio": ratio},
            )
        )
    return Netlist(parts=tuple(draw(st.permutations(parts))))


@st.composite
def pairs(draw, netlist: Netlist) -> Pair:
    """Two different nodes of a network."""
    first, second = draw(
        st.lists(st.sampled_from(netlist.nodes()), min_size=2, max_size=2, unique=True)
    )
    return first, second


def renamed(netlist: Netlist, names: dict[str, str]) -> Netlist:
    """The network with nodes renamed."""
    parts = tuple(
        replace(item, nodes=tuple(names.get(node, node) for node in item.nodes))
        for item in netlist.parts
    )
    return replace(netlist, parts=parts)


_SHARES = {"ohm": 1, "henry": 1, "farad": -1, "siemens": -1}
_SECONDS = {"henry": 1, "farad": 1}
_UNITS = {
    "resistor": "ohm",
    "inductor": "henry",
    "capacitor": "farad",
    "transconductance": "siemens",
    "transresistance": "ohm",
    "gyrator": "siemens",
    "series_resistance": "ohm",
    "series_inductance": "henry",
    "input_resistance": "ohm",
    "output_resistance": "ohm",
    "motional_resistance": "ohm",
    "motional_inductance": "henry",
    "motional_capacitance": "farad",
    "shunt_capacitance": "farad",
}


def scaled(
    netlist: Netlist, *, impedance: Fraction = Fraction(1), time: Fraction = Fraction(1)
) -> Netlist:
    """Every impedance times a factor, every time constant times another; no parts in s."""

    def value(item: Part, attribute: str) -> Value:
        old = item.values[attribute]
        unit = _UNITS.get(attribute) or (
            _UNITS.get(item.kind, "") if attribute == item.definition.principal else ""
        )
        factor = impedance ** _SHARES.get(unit, 0) * time ** _SECONDS.get(unit, 0)
        if attribute == "gain_bandwidth":
            factor = 1 / time
        at = old.at_hertz
        return replace(
            old,
            expression=None if old.expression is None else multiply(number(factor), old.expression),
            at_hertz=None if at is None else divide(at, number(time)),
        )

    parts = tuple(
        replace(item, values={name: value(item, name) for name in item.values})
        for item in netlist.parts
    )
    return replace(netlist, parts=parts)


def with_numbers(netlist: Netlist, values: dict[str, Fraction]) -> Netlist:
    """The network with numbers for its symbols."""
    from acsolve.circuit.netlist import with_values

    found = {
        name: replace(value, expression=Number(values[name]))
        for name, value in netlist.values()
        if value.expression is None
    }
    return with_values(netlist, found)


def hertz_value(hertz: Fraction, product: Fraction) -> Expression:
    """The part value product/(2·pi·hertz): R = 1/(2·pi·f·C), with pi kept exact."""
    return divide(number(product), multiply(multiply(number(2), PI), number(hertz)))


def quantity(name: str, expression: Expression | None) -> dict[str, Quantity]:
    """A named quantity of a netlist."""
    return {name: Quantity(name=name, value=Value(expression=expression))}
