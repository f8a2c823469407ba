"""The shapes after IEC 60617, as strokes; each drawn here from lines and arcs."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from acsolve.report.drawing.sheet import Pin, Point, Symbol


@dataclass(frozen=True, slots=True)
class Stroke:
    """A line through points; closed and filled where it says so."""

    points: tuple[Point, ...]
    closed: bool = False
    filled: bool = False


@dataclass(frozen=True, slots=True)
class Arc:
    """A part of a circle, from an angle on, in degrees counted from x towards y."""

    centre: Point
    radius: float
    start: float = 0.0
    sweep: float = 360.0
    filled: bool = False


@dataclass(frozen=True, slots=True)
class Sign:
    """A sign inside a shape, centred on a point."""

    text: str
    centre: Point
    size: float = 1.4


Primitive = Stroke | Arc | Sign


def primitives(symbol: Symbol) -> list[Primitive]:
    """The strokes of a symbol on the sheet."""
    if symbol.shape in _IN_LINE:
        left, top, right, bottom = symbol.box
        centre = ((left + right) / 2, (top + bottom) / 2)
        along = (bottom - top if symbol.turned else right - left) / 2
        drawn = [*_IN_LINE[symbol.shape](along), *_marks(symbol, along)]
        return [_placed(item, symbol, centre) for item in drawn]
    return _AS_BOX.get(symbol.shape, _plain_box)(symbol)


# ---------------------------------------------------------------- moving


def _placed(item: Primitive, symbol: Symbol, centre: Point) -> Primitive:
    """A primitive drawn from left to right around the origin, turned and moved into place."""

    def point(at: Point) -> Point:
        u, v = (-at[0], at[1]) if symbol.mirrored else at
        u, v = (-v, u) if symbol.turned else (u, v)
        return centre[0] + u, centre[1] + v

    if isinstance(item, Stroke):
        return Stroke(tuple(map(point, item.points)), item.closed, item.filled)
    if isinstance(item, Sign):
        return Sign(item.text, point(item.centre), item.size)
    start = 180 - item.start - item.sweep if symbol.mirrored else item.start
    return Arc(
        point(item.centre),
        item.radius,
        start + (90 if symbol.turned else 0),
        item.sweep,
        item.filled,
    )


def _marks(symbol: Symbol, half: float) -> list[Primitive]:
    """The dot at the first end of a coupled coil."""
    return [Arc((0.25 - half, 0.5), 0.2, filled=True)] if "dot" in symbol.marks else []


# ---------------------------------------------------------------- two terminals


def _bar(half: float) -> list[Primitive]:
    return [_frame(-half, -0.7, half, 0.7)]


def _letter_bar(letter: str) -> Callable[[float], list[Primitive]]:
    return lambda half: [*_bar(half), Sign(letter, (0, 0), 1.1)]


def _frame(left: float, top: float, right: float, bottom: float) -> Stroke:
    return Stroke(((left, top), (right, top), (right, bottom), (left, bottom)), closed=True)


def _coil(half: float) -> list[Primitive]:
    radius = half / 4
    return [Arc((-half + radius * (2 * k + 1), 0), radius, 180, 180) for k in range(4)]


def _plates(half: float) -> list[Primitive]:
    return [Stroke(((x, -1.5), (x, 1.5))) for x in (-half, half)]


def _chevrons(half: float) -> list[Primitive]:
    return [
        Stroke(((-half, -1.4), (-0.2, 0), (-half, 1.4))),
        Stroke(((0.2, -1.4), (half, 0), (0.2, 1.4))),
        Stroke(((-half, 0), (-0.2, 0))),
    ]


def _quartz(half: float) -> list[Primitive]:
    plates: list[Primitive] = [Stroke(((x, -1.0), (x, 1.0))) for x in (-half, half)]
    return [*plates, _frame(-0.55, -1.5, 0.55, 1.5)]


def _voltage(half: float) -> list[Primitive]:
    return [Arc((0, 0), half), Stroke(((-half, 0), (half, 0))), *_plus((0.75, -0.6))]


def _current(half: float) -> list[Primitive]:
    return [Arc((0, 0), half), Stroke(((0, -half), (0, half))), _head((half, 0), (1, 0))]


def _plus(at: Point) -> list[Primitive]:
    x, y = at
    return [Stroke(((x - 0.3, y), (x + 0.3, y))), Stroke(((x, y - 0.3), (x, y + 0.3)))]


def _minus(at: Point) -> list[Primitive]:
    return [Stroke(((at[0] - 0.3, at[1]), (at[0] + 0.3, at[1])))]


def _head(tip: Point, way: Point) -> Stroke:
    """A filled arrow head that ends in a point."""
    (x, y), (u, v) = tip, way
    back = (x - 0.8 * u, y - 0.8 * v)
    wings = ((back[0] - 0.35 * v, back[1] - 0.35 * u), (back[0] + 0.35 * v, back[1] + 0.35 * u))
    return Stroke((tip, *wings), closed=True, filled=True)


def _meter(half: float) -> list[Primitive]:
    return [Arc((0, 0), half), Sign("A", (0, 0))]


def _dots(half: float) -> list[Primitive]:
    return [Arc((x * half, 0), 0.22, filled=True) for x in (-0.5, 0.0, 0.5)]


_IN_LINE: dict[str, Callable[[float], list[Primitive]]] = {
    "resistor": _bar,
    "impedance": _letter_bar("Z"),
    "admittance": _letter_bar("Y"),
    "inductor": _coil,
    "capacitor": _plates,
    "constant_phase": _chevrons,
    "crystal": _quartz,
    "voltage_source": _voltage,
    "current_source": _current,
    "ammeter": _meter,
    "dots": _dots,
}

# ---------------------------------------------------------------- everything else


def _ground(symbol: Symbol) -> list[Primitive]:
    x, y = symbol.pins[0].at
    bars: list[Primitive] = [
        Stroke(((x - wide, y + low), (x + wide, y + low)))
        for wide, low in ((1.2, 0.4), (0.75, 0.8), (0.3, 1.2))
    ]
    return [Stroke(((x, y), (x, y + 0.4))), *bars]


def _terminal(symbol: Symbol) -> list[Primitive]:
    left, top, right, bottom = symbol.box
    centre = ((left + right) / 2, (top + bottom) / 2)
    x, y = symbol.pins[0].at
    inner = (centre[0] + (x - centre[0]) * 0.7, centre[1] + (y - centre[1]) * 0.7)
    return [Arc(centre, 0.35), Stroke((inner, (x, y)))]


def _plain_box(symbol: Symbol) -> list[Primitive]:
    return [_frame(*symbol.box)]


def _inward(pin: Pin, step: float) -> Point:
    return pin.at[0] + (step if pin.side == "left" else -step), pin.at[1]


def _pin(symbol: Symbol, terminal: str) -> Pin | None:
    return next((pin for pin in symbol.pins if pin.terminal == terminal), None)


def _input_signs(symbol: Symbol) -> list[Primitive]:
    found: list[Primitive] = []
    for terminal, sign in (("plus", _plus), ("minus", _minus)):
        pin = _pin(symbol, terminal)
        if pin is not None:
            found += sign(_inward(pin, 0.8))
    return found


def _amplifier(symbol: Symbol) -> list[Primitive]:
    """A rectangle with the qualifying triangle, and infinity where the gain is."""
    left, top, right, _ = symbol.box
    x, y = (left + right) / 2, top + 1.1
    start = x - (1.2 if "ideal" in symbol.marks else 0.5)
    triangle = Stroke(((start, y - 0.6), (start + 1.1, y), (start, y + 0.6)), closed=True)
    endless = [Sign("∞", (x + 0.8, y))] if "ideal" in symbol.marks else []
    ref = _pin(symbol, "ref")
    common = [Sign("ref", _inward(ref, 1.2), 1.1)] if ref is not None else []
    return [_frame(*symbol.box), triangle, *endless, *common, *_input_signs(symbol)]


def _controlled(symbol: Symbol) -> list[Primitive]:
    """A frame around what is sensed and the diamond of a controlled source."""
    drawn: list[Primitive] = [_frame(*symbol.box)]
    ends = [pin for pin in symbol.pins if pin.terminal in ("out", "ref")]
    inputs = [pin for pin in symbol.pins if pin.terminal in ("plus", "minus")]
    if symbol.shape in ("transresistance", "current_amplifier"):
        top, bottom = (_inward(pin, 1.2) for pin in inputs)
        drawn.append(Stroke((inputs[0].at, top, bottom, inputs[1].at)))
        drawn.append(_head((top[0], (top[1] + bottom[1]) / 2 + 0.4), (0, 1)))
    else:
        drawn += _input_signs(symbol)
    return [
        *drawn,
        *_diamond(ends, voltage=symbol.shape in ("voltage_amplifier", "transresistance")),
    ]


def _diamond(ends: Sequence[Pin], *, voltage: bool) -> list[Primitive]:
    out, ref = ends
    (x, y), (_, low) = _inward(out, 2.0), _inward(ref, 2.0)
    middle = (y + low) / 2
    edge = 1.3 if low > y else -1.3
    drawn: list[Primitive] = [
        Stroke((out.at, (x, y), (x, middle - edge))),
        Stroke(((x, middle + edge), (x, low), ref.at)),
        Stroke(
            ((x, middle - 1.3), (x + 1.3, middle), (x, middle + 1.3), (x - 1.3, middle)),
            closed=True,
        ),
    ]
    if voltage:
        side = 1 if out.side == "right" else -1
        return [
            *drawn,
            Stroke(((x, middle - 1.3), (x, middle + 1.3))),
            *_plus((x + side * 1.1, middle - edge)),
        ]
    way = (0, -1) if edge > 0 else (0, 1)
    return [
        *drawn,
        Stroke(((x - 1.3, middle), (x + 1.3, middle))),
        _head((x, middle - edge), way),
    ]


def _windings(symbol: Symbol) -> list[Primitive]:
    """Two windings beside each other, a dot at the first end of each."""
    drawn: list[Primitive] = []
    for first, second in (("p1", "p2"), ("s1", "s2")):
        start, end = _pin(symbol, first), _pin(symbol, second)
        if start is None or end is None:
            continue
        (x, y), (_, low) = _inward(start, 2.25), _inward(end, 2.25)
        radius = (low - y) / 8
        bulge = -90 if start.side == "left" else 90
        drawn += [Arc((x, y + radius * (2 * k + 1)), radius, bulge, 180) for k in range(4)]
        drawn += [Stroke((start.at, (x, y))), Stroke((end.at, (x, low)))]
        outward = -0.6 if start.side == "left" else 0.6
        drawn.append(Arc((x + outward, y + 0.6), 0.2, filled=True))
    return drawn


def _facing_arcs(symbol: Symbol) -> list[Primitive]:
    """Two arcs, and an arrow from the first pair of terminals to the second."""
    left, top, right, bottom = symbol.box
    x, y = (left + right) / 2, (top + bottom) / 2
    way = 1 if symbol.pins[0].side == "left" else -1
    return [
        _frame(*symbol.box),
        Stroke(((x - 1.2, y - 2.2), (x + 1.2, y - 2.2))),
        _head((x + 1.2 * way, y - 2.2), (way, 0)),
        Arc((x - 1.6, y), 1.2, -90, 180),
        Arc((x + 1.6, y), 1.2, 90, 180),
    ]


def _cable(symbol: Symbol) -> list[Primitive]:
    """A frame, the conductor through it, and the ring that says coaxial."""
    near, far = symbol.pins[0], symbol.pins[1]
    x = (symbol.box[0] + symbol.box[2]) / 2
    return [
        _frame(*symbol.box),
        Stroke((near.at, far.at)),
        Arc((x, near.at[1]), 0.8),
    ]


def _measured(symbol: Symbol) -> list[Primitive]:
    """A frame with S for its parameters; 1 and 2 number its ends."""
    left, top, right, bottom = symbol.box
    ends = [
        Sign(number, _inward(pin, 0.9), 1.1) for number, pin in zip("12", symbol.pins, strict=False)
    ]
    return [_frame(*symbol.box), *ends, Sign("S", ((left + right) / 2, (top + bottom) / 2), 2.0)]


_AS_BOX: dict[str, Callable[[Symbol], list[Primitive]]] = {
    "ground": _ground,
    "terminal": _terminal,
    "opamp": _amplifier,
    "voltage_amplifier": _controlled,
    "transconductance": _controlled,
    "transresistance": _controlled,
    "current_amplifier": _controlled,
    "transformer": _windings,
    "gyrator": _facing_arcs,
    "line": _cable,
    "measured": _measured,
}
