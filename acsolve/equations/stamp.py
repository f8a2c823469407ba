"""What each kind of part says about voltages and currents: one small stamp a kind.

A stamp writes into a `Board`: it adds terms to the current balances of the part's nodes
and, where the part needs a branch current, an unknown and a law of its own. Entries are
value expressions in `s`; no field is chosen here.

Sign conventions: a balance sums the currents that LEAVE a node into its parts; a branch
current flows through the part from its first to its second terminal, an output current
out of the part into the node at `out`.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import Protocol

from acsolve.circuit.expression import (
    MINUS_ONE,
    ONE,
    PI,
    ZERO,
    ElementName,
    Expression,
    Name,
    PortElement,
    S,
    add,
    call,
    depends_on_s,
    divide,
    is_zero,
    multiply,
    negate,
    number,
    power,
)
from acsolve.circuit.netlist import Coupling, Part


class Board(Protocol):
    """What a stamp may write to; `acsolve.equations.system` implements it."""

    def voltage(self, law: int, node: str, factor: Expression) -> None:
        """Add factor · V(node) to a law."""

    def current(self, law: int, branch: int, factor: Expression) -> None:
        """Add factor · I(branch) to a law."""

    def leave(self, node: str, branch: int, factor: Expression = ONE) -> None:
        """Let factor · I(branch) leave a node."""

    def conduct(self, node: str, other: str, factor: Expression) -> None:
        """Let factor · V(other) leave a node as a current."""

    def admit(self, pair: tuple[str, ...], admittance: Expression) -> None:
        """Let admittance · (V(first) - V(second)) flow from the first node to the second."""

    def branch(self, part: Part, suffix: str = "") -> int:
        """A new branch current of the part."""

    def law(self, part: Part, meaning: str) -> int:
        """A new equation, sum = 0, said in words."""

    def wants_branch(self, part: Part) -> bool:
        """Whether a resistor gets a branch current (else it is an admittance)."""

    def is_drive(self, part: Part) -> bool:
        """Whether an independent source acts in this question (else it is zero)."""

    def unity(self, law: int, factor: Expression) -> None:
        """Add a constant excitation term to a law."""

    def inject(self, node: str, factor: Expression) -> None:
        """Let a constant excitation current leave a node."""


Stamp = Callable[[Board, Part], None]

STAMPS: dict[str, Stamp] = {}


def _stamp(kind: str) -> Callable[[Stamp], Stamp]:
    def register(function: Stamp) -> Stamp:
        STAMPS[kind] = function
        return function

    return register


def value(part: Part, attribute: str) -> Expression | None:
    """A reference to an attribute's value, or None where the part has none."""
    return Name(part.value_name(attribute)) if attribute in part.values else None


def _needed(part: Part, attribute: str) -> Expression:
    expression = value(part, attribute)
    assert expression is not None, f"{part.name} was built without its {attribute}"
    return expression


def _in_s(part: Part, attribute: str) -> Expression:
    """The value itself where it varies with s: a name stands for what does not."""
    expression = part.values[attribute].expression
    if expression is not None and depends_on_s(expression):
        return expression
    return _needed(part, attribute)


def _at(part: Part, attribute: str) -> Expression:
    hertz = part.values[attribute].at_hertz
    assert hertz is not None, f"{part.name}.{attribute} was built without its frequency"
    return hertz


def through(board: Board, part: Part, first: str, second: str, suffix: str = "") -> int:
    """A branch current from first to second, entered in both balances."""
    branch = board.branch(part, suffix)
    board.leave(first, branch)
    board.leave(second, branch, MINUS_ONE)
    return branch


def across(board: Board, law: int, pair: tuple[str, ...], factor: Expression = ONE) -> None:
    """Add factor · (V(first) - V(second)) to a law."""
    first, second = pair
    board.voltage(law, first, factor)
    board.voltage(law, second, negate(factor))


def _series(
    board: Board, part: Part, nodes: tuple[str, ...], ratio: tuple[Expression, Expression]
) -> None:
    """Y·V - D·I = 0 for an impedance D/Y between two nodes."""
    top, bottom = ratio
    branch = through(board, part, nodes[0], nodes[1])
    law = board.law(part, f"law of {part.name}")
    across(board, law, nodes, bottom)
    board.current(law, branch, negate(top))


@_stamp("resistor")
def _resistor(board: Board, part: Part) -> None:
    resistance = _needed(part, "value")
    inductance = value(part, "series_inductance")
    if inductance is None and not board.wants_branch(part):
        board.admit(part.nodes, divide(ONE, resistance))
        return
    if inductance is not None:
        resistance = add(resistance, multiply(S, inductance))
    _series(board, part, part.nodes, (resistance, ONE))


@_stamp("inductor")
def _inductor(board: Board, part: Part) -> None:
    inductance = _needed(part, "value")
    impedance = multiply(S, inductance)
    resistance = value(part, "series_resistance")
    if resistance is not None:
        impedance = add(impedance, resistance)
    quality = value(part, "quality")
    if quality is not None:
        omega = multiply(multiply(number(2), PI), _at(part, "quality"))
        impedance = add(impedance, divide(multiply(omega, inductance), quality))
    _series(board, part, part.nodes, (impedance, ONE))


@_stamp("capacitor")
def _capacitor(board: Board, part: Part) -> None:
    susceptance = multiply(S, _needed(part, "value"))
    extra: Expression = ZERO  # s·C times the series impedance, finite also for C = 0
    resistance = value(part, "series_resistance")
    inductance = value(part, "series_inductance")
    quality = value(part, "quality")
    if resistance is not None:
        extra = add(extra, multiply(susceptance, resistance))
    if inductance is not None:
        extra = add(extra, multiply(susceptance, multiply(S, inductance)))
    if quality is not None:
        omega = multiply(multiply(number(2), PI), _at(part, "quality"))
        extra = add(extra, divide(S, multiply(omega, quality)))
    if is_zero(extra):
        board.admit(part.nodes, susceptance)
    else:
        _series(board, part, part.nodes, (add(ONE, extra), susceptance))


@_stamp("impedance")
def _impedance(board: Board, part: Part) -> None:
    _series(board, part, part.nodes, (_in_s(part, "value"), ONE))


@_stamp("admittance")
def _admittance(board: Board, part: Part) -> None:
    board.admit(part.nodes, _in_s(part, "value"))


@_stamp("constant_phase")
def _constant_phase(board: Board, part: Part) -> None:
    admittance = multiply(_needed(part, "coefficient"), power(S, _needed(part, "exponent")))
    board.admit(part.nodes, admittance)


@_stamp("voltage_source")
def _voltage_source(board: Board, part: Part) -> None:
    """The source raises the potential from left to right: V(b) - V(a) = E."""
    through(board, part, *part.nodes)
    law = board.law(part, f"voltage of {part.name}")
    across(board, law, part.nodes[::-1])
    if board.is_drive(part):
        board.unity(law, negate(_needed(part, "amplitude")))


@_stamp("current_source")
def _current_source(board: Board, part: Part) -> None:
    """The source drives its current from left to right through itself."""
    if board.is_drive(part):
        amplitude = _needed(part, "amplitude")
        board.inject(part.nodes[0], amplitude)
        board.inject(part.nodes[1], negate(amplitude))


@_stamp("ammeter")
def _ammeter(board: Board, part: Part) -> None:
    through(board, part, *part.nodes)
    law = board.law(part, f"no voltage across {part.name}")
    across(board, law, part.nodes)


def _output(board: Board, part: Part) -> int:
    """The current of a controlled output, from `ref` through the part into `out`."""
    return through(board, part, part.node("ref"), part.node("out"), suffix="")


@_stamp("opamp")
def _opamp(board: Board, part: Part) -> None:
    """Ideal: equal inputs. Otherwise A(s) with A0 and fT as given, and Rout, Rin."""
    plus, minus = part.node("plus"), part.node("minus")
    input_resistance = value(part, "input_resistance")
    if input_resistance is not None:
        branch = through(board, part, plus, minus, suffix=" input")
        law = board.law(part, f"input resistance of {part.name}")
        across(board, law, (plus, minus))
        board.current(law, branch, negate(input_resistance))
    branch = _output(board, part)
    gain, bandwidth = value(part, "open_loop_gain"), value(part, "gain_bandwidth")
    if gain is None and bandwidth is None:
        law = board.law(part, f"equal inputs of {part.name}")
        across(board, law, (plus, minus))
        return
    law = board.law(part, f"gain of {part.name}")
    top, bottom = opamp_gain(gain, bandwidth)
    across(board, law, (part.node("out"), part.node("ref")), bottom)
    across(board, law, (plus, minus), negate(top))
    output_resistance = value(part, "output_resistance")
    if output_resistance is not None:
        board.current(law, branch, multiply(bottom, output_resistance))


def opamp_gain(
    gain: Expression | None, bandwidth: Expression | None
) -> tuple[Expression, Expression]:
    """Open-loop gain of a one-pole amplifier as numerator and denominator.

    A0 alone: A0. fT alone: an integrator 2π·fT/s. Both: A0/(1 + s·A0/(2π·fT)).
    """
    if bandwidth is None:
        assert gain is not None, "an ideal op-amp has no gain to ask for"
        return gain, ONE
    unity = multiply(multiply(number(2), PI), bandwidth)
    if gain is None:
        return unity, S
    return multiply(gain, unity), add(unity, multiply(S, gain))


@_stamp("voltage_amplifier")
def _voltage_amplifier(board: Board, part: Part) -> None:
    _output(board, part)
    law = board.law(part, f"gain of {part.name}")
    across(board, law, (part.node("out"), part.node("ref")))
    across(board, law, (part.node("plus"), part.node("minus")), negate(_needed(part, "gain")))


@_stamp("transconductance")
def _transconductance(board: Board, part: Part) -> None:
    gain = _needed(part, "gain")
    plus, minus = part.node("plus"), part.node("minus")
    for node, sign in ((part.node("out"), negate(gain)), (part.node("ref"), gain)):
        board.conduct(node, plus, sign)
        board.conduct(node, minus, negate(sign))


def _sensed_current(board: Board, part: Part) -> int:
    plus, minus = part.node("plus"), part.node("minus")
    branch = through(board, part, plus, minus, suffix=" input")
    law = board.law(part, f"no voltage across the input of {part.name}")
    across(board, law, (plus, minus))
    return branch


@_stamp("transresistance")
def _transresistance(board: Board, part: Part) -> None:
    sensed = _sensed_current(board, part)
    _output(board, part)
    law = board.law(part, f"gain of {part.name}")
    across(board, law, (part.node("out"), part.node("ref")))
    board.current(law, sensed, negate(_needed(part, "gain")))


@_stamp("current_amplifier")
def _current_amplifier(board: Board, part: Part) -> None:
    sensed = _sensed_current(board, part)
    gain = _needed(part, "gain")
    board.leave(part.node("out"), sensed, negate(gain))
    board.leave(part.node("ref"), sensed, gain)


@_stamp("transformer")
def _transformer(board: Board, part: Part) -> None:
    ratio = _needed(part, "ratio")
    p1, p2, s1, s2 = part.nodes
    branch = through(board, part, p1, p2)
    board.leave(s1, branch, negate(ratio))
    board.leave(s2, branch, ratio)
    law = board.law(part, f"ratio of {part.name}")
    across(board, law, (p1, p2))
    across(board, law, (s1, s2), negate(ratio))


@_stamp("gyrator")
def _gyrator(board: Board, part: Part) -> None:
    g = _needed(part, "conductance")
    p1, p2, s1, s2 = part.nodes
    for node, plus, minus, factor in (
        (p1, s1, s2, g),
        (p2, s1, s2, negate(g)),
        (s1, p1, p2, negate(g)),
        (s2, p1, p2, g),
    ):
        board.conduct(node, plus, factor)
        board.conduct(node, minus, negate(factor))


@_stamp("line")
def _line(board: Board, part: Part) -> None:
    """Waves: what leaves one end is exp(-propagation) times what entered the other."""
    z0, travel = _needed(part, "z0"), call("exp", negate(propagation(part)))
    near, far, near_ref, far_ref = part.nodes
    first = through(board, part, near, near_ref, suffix=" near")
    second = through(board, part, far, far_ref, suffix=" far")
    ends = (((near, near_ref), first), ((far, far_ref), second))
    for (here, out), (there, into) in (ends, ends[::-1]):
        law = board.law(part, f"wave out of {part.name} at {here[0]}")
        across(board, law, here)
        board.current(law, out, negate(z0))
        across(board, law, there, negate(travel))
        board.current(law, into, negate(multiply(z0, travel)))


def propagation(part: Part) -> Expression:
    """Propagation exponent of a line: s·delay, plus the loss in nepers.

    `loss` (dB at f0) is the skin-effect law k·sqrt(s), with k chosen so that the
    attenuation at f0 is as stated: it grows with the square root of frequency and
    carries the phase that causality asks for. `constant_loss` is a plain attenuation.
    """
    exponent = multiply(S, _needed(part, "delay"))
    nepers_per_decibel = divide(call("ln", number(10)), number(20))
    constant = value(part, "constant_loss")
    if constant is not None:
        exponent = add(exponent, multiply(constant, nepers_per_decibel))
    loss = value(part, "loss")
    if loss is not None:
        nepers = multiply(loss, nepers_per_decibel)
        scale = call("sqrt", multiply(PI, _at(part, "loss")))
        exponent = add(exponent, divide(multiply(nepers, call("sqrt", S)), scale))
    return exponent


@_stamp("crystal")
def _crystal(board: Board, part: Part) -> None:
    """Motional R, L, C in series, with the shunt capacitance across."""
    resistance, inductance, capacitance, shunt = (
        _needed(part, f"{name}")
        for name in (
            "motional_resistance",
            "motional_inductance",
            "motional_capacitance",
            "shunt_capacitance",
        )
    )
    board.admit(part.nodes, multiply(S, shunt))
    susceptance = multiply(S, capacitance)
    arm = add(resistance, multiply(S, inductance))
    _series(board, part, part.nodes, (add(ONE, multiply(susceptance, arm)), susceptance))


@_stamp("cascade")
def _cascade(board: Board, part: Part) -> None:
    """Hybrid equations: what a far end returns to the near end vanishes in a long row."""
    near, far = part.nodes[:2]
    first = board.branch(part, " near")
    second = board.branch(part, " far")
    board.leave(near, first)
    board.leave(far, second, MINUS_ONE)
    entering = board.law(part, f"current into {part.name}")
    board.current(entering, first, MINUS_ONE)
    board.voltage(entering, near, PortElement(part.name, "g11"))
    board.current(entering, second, PortElement(part.name, "g12"))
    leaving = board.law(part, f"voltage out of {part.name}")
    board.voltage(leaving, far, MINUS_ONE)
    board.voltage(leaving, near, PortElement(part.name, "g21"))
    board.current(leaving, second, PortElement(part.name, "g22"))


WAVE_OHM = 50  # reference of the waves inside a measured part; answers do not depend on it


@_stamp("measured")
def _measured(board: Board, part: Part) -> None:
    """Waves at both ports: V = a + b, I = (a - b)/R, and b = S·a with the measured S."""
    near, far, ref = part.nodes
    per_ohm = divide(ONE, number(WAVE_OHM))
    ports = []
    for node, name in ((near, "near"), (far, "far")):
        into, back = (board.branch(part, f" {name} {way}") for way in ("into", "back"))
        for here, sign in ((node, per_ohm), (ref, negate(per_ohm))):
            board.leave(here, into, sign)
            board.leave(here, back, negate(sign))
        law = board.law(part, f"voltage of {part.name} at {node}")
        across(board, law, (node, ref))
        board.current(law, into, MINUS_ONE)
        board.current(law, back, MINUS_ONE)
        ports.append((into, back))
    (a1, b1), (a2, b2) = ports
    rows: tuple[tuple[int, ElementName, ElementName], ...]
    rows = (b1, "s11", "s12"), (b2, "s21", "s22")
    for own, first, second in rows:
        law = board.law(part, f"wave out of {part.name}")
        board.current(law, own, MINUS_ONE)
        board.current(law, a1, PortElement(part.name, first))
        board.current(law, a2, PortElement(part.name, second))


def mutual_inductance(coupling: Coupling) -> Expression:
    """M = k·sqrt(L1·L2)."""
    product = multiply(Name(coupling.first), Name(coupling.second))
    return multiply(Name(coupling.name), call("sqrt", product))
