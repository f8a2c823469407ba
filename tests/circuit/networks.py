"""Networks written in code, and random ones, for the tests of the graph and its checks."""

from __future__ import annotations

from fractions import Fraction

from hypothesis import strategies as st

from acsolve.circuit.expression import Expression, Number
from acsolve.circuit.kind import KINDS
from acsolve.circuit.netlist import Coupling, Netlist, Part, Question
from acsolve.circuit.value import Value
from acsolve.errors import Diagnostic


def part(name: str, kind: str, *nodes: str, **values: int | Expression | None) -> Part:
    """A part; a whole number is its value, None makes an attribute its own symbol."""
    return Part(
        name=name,
        kind=kind,
        nodes=nodes,
        values={key: Value(expression=_expression(item)) for key, item in values.items()},
    )


def _expression(item: int | Expression | None) -> Expression | None:
    return Number(Fraction(item)) if isinstance(item, int) else item


def resistor(name: str, a: str, b: str, value: int | Expression | None = None) -> Part:
    """A resistor."""
    return part(name, "resistor", a, b, value=value)


def capacitor(name: str, a: str, b: str, value: int | Expression | None = None) -> Part:
    """A capacitor."""
    return part(name, "capacitor", a, b, value=value)


def inductor(name: str, a: str, b: str, value: int | Expression | None = None) -> Part:
    """An inductor."""
    return part(name, "inductor", a, b, value=value)


def voltage(name: str, a: str, b: str, amplitude: int | Expression | None = None) -> Part:
    """A voltage source."""
    return part(name, "voltage_source", a, b, amplitude=amplitude)


def current(name: str, a: str, b: str, amplitude: int | Expression | None = None) -> Part:
    """A current source."""
    return part(name, "current_source", a, b, amplitude=amplitude)


def ammeter(name: str, a: str, b: str) -> Part:
    """An ammeter."""
    return part(name, "ammeter", a, b)


def opamp(name: str, plus: str, minus: str, out: str, ref: str = "gnd", **values: int) -> Part:
    """An op-amp, ideal where no value is given."""
    return part(name, "opamp", plus, minus, out, ref, **values)


def network(*parts: Part, couplings: tuple[tuple[str, str], ...] = (), **more) -> Netlist:
    """A netlist of parts, with couplings by pairs of names."""
    coupled = tuple(Coupling(first=a, second=b, coefficient=Value()) for a, b in couplings)
    return Netlist(parts=parts, couplings=coupled, **more)


IN, OUT = ("in", "gnd"), ("out", "gnd")


def asked(*parts: Part, **more) -> Netlist:
    """A netlist that asks for the transfer from `in` to `out`."""
    return network(*parts, questions=(Question(kind="transfer", source=IN, target=OUT),), **more)


def said(found: tuple[Diagnostic, ...]) -> list[tuple[str, str, str]]:
    """Severity, code and message of each diagnostic."""
    return [(item.severity, item.code, item.message) for item in found]


def errors(found: tuple[Diagnostic, ...]) -> list[str]:
    """The codes of the errors."""
    return [item.code for item in found if item.severity == "error"]


INVERTER = (
    resistor("R1", "in", "n"),
    resistor("R2", "n", "out"),
    opamp("U1", "gnd", "n", "out"),
)
FOLLOWER = (opamp("U1", "in", "out", "out"),)
LOW_PASS = (resistor("R1", "in", "out"), capacitor("C1", "out", "gnd"))

NODES = ("gnd", "a", "b", "c", "d", "e")
_ZERO_OR_SYMBOL = st.sampled_from([None, None, None, 0])


@st.composite
def passive(draw) -> Netlist:
    """A connected network of resistors, inductors and capacitors: always well-posed."""
    count = draw(st.integers(2, 7))
    names = (*draw(st.sampled_from([("gnd",), ()])), "a", "b", "c", "d", "e", "f", "g")
    nodes = names[:count]
    tree = [(draw(st.sampled_from(nodes[:at])), nodes[at]) for at in range(1, count)]
    ends = st.lists(st.sampled_from(nodes), min_size=2, max_size=2, unique=True).map(tuple)
    pairs = tree + draw(st.lists(ends, max_size=6))
    make = [draw(st.sampled_from([resistor, inductor, capacitor])) for _ in pairs]
    return network(*(make[at](f"Z{at}", *pair) for at, pair in enumerate(pairs)))


@st.composite
def anything(draw) -> Netlist:
    """A network of parts of any kind between few nodes: seldom well-posed."""
    kinds = st.sampled_from([*sorted(KINDS), "opamp", "opamp", "resistor", "resistor", "capacitor"])
    parts = []
    for at in range(draw(st.integers(1, 8))):
        kind = draw(kinds)
        count = len(KINDS[kind].terminals)
        nodes = [draw(st.sampled_from(NODES)) for _ in range(count)]
        values: dict[str, int | None] = {}
        if kind == "opamp":
            extras = ("open_loop_gain", "input_resistance", "output_resistance")
            values = dict.fromkeys(draw(st.sets(st.sampled_from(extras), max_size=2)))
            nodes[3] = draw(st.sampled_from(["gnd", "gnd", "gnd", "e"]))
        elif kind in ("resistor", "inductor", "capacitor", "voltage_source"):
            values = {KINDS[kind].principal or "": draw(_ZERO_OR_SYMBOL)}
        parts.append(part(f"P{at}", kind, *nodes, **values))
    coils = [item.name for item in parts if item.kind == "inductor"]
    couplings = ((coils[0], coils[1]),) if len(coils) > 1 and draw(st.booleans()) else ()
    return network(*parts, couplings=couplings)
