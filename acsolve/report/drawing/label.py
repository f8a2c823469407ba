"""What stands beside a symbol: names, values, and how much room a text takes."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from acsolve.circuit import unit
from acsolve.circuit.expression import depends_on_s
from acsolve.circuit.netlist import Netlist, Part, bindings
from acsolve.circuit.value import Value
from acsolve.errors import EquationError
from acsolve.report.number import engineering

NAME_SIZE, VALUE_SIZE, SMALL_SIZE = 1.5, 1.35, 1.1
_DIGITS = 4
_LONGEST_NAME = 24

#: Share of the type size -> signs that wide sans-serif faces need no more for.
_WIDTHS = {
    0.33: " ',.IJijl·",
    0.37: "-/:;\\f|",
    0.43: "!()[]rt²³",
    0.51: '"*_`°',
    0.56: "?Lcsz",
    0.6: "Fkvxy",
    0.62: "PTYaeo",
    0.65: "$0123456789ESbdghnpqu{}µ√",
    0.7: "ABCKRVXZ",
    0.74: "U",
    0.8: "&DGHNOQΩ",
    0.87: "#+<=>M^w~±×−∞",
    0.96: "%",
}
_OF_SIGN = {sign: share for share, signs in _WIDTHS.items() for sign in signs}


def width(text: str, size: float) -> float:
    """Width of a text in grid units, on the wide side."""
    return size * sum(_OF_SIGN.get(sign, 1.0) for sign in text)


@dataclass(frozen=True, slots=True)
class Label:
    """The two lines beside a symbol; either may be empty."""

    name: str
    value: str = ""

    @property
    def width(self) -> float:
        """Room for the wider line."""
        return max(width(self.name, NAME_SIZE), width(self.value, VALUE_SIZE))


#: Kind -> attributes that are shown, the first that has a value; with their units.
_SHOWN: dict[str, tuple[tuple[str, str], ...]] = {
    "line": (("z0", "ohm"), ("delay", "s")),
    "constant_phase": (("coefficient", ""), ("exponent", "")),
}


def numbers(netlist: Netlist) -> Callable[[Value | None], float | None]:
    """A function that gives a value as a number, None where it is not one."""
    from acsolve.equations.evaluate import Evaluator, FloatArithmetic

    evaluate = Evaluator(bindings(netlist), FloatArithmetic())

    def number(value: Value | None) -> float | None:
        if value is None or value.expression is None or depends_on_s(value.expression):
            return None
        try:
            found = complex(evaluate(value.expression))
        except (EquationError, ArithmeticError):
            return None  # a symbol without a value: the name alone
        return found.real if found.imag == 0 else None

    return number


def labels(netlist: Netlist) -> Callable[[Part], Label]:
    """A function that gives the label of a part of the circuit."""
    number = numbers(netlist)

    def label(part: Part) -> Label:
        shown = _SHOWN.get(part.kind)
        if shown is None:
            shown = ((part.definition.principal or "", _unit_of(part)),)
        pieces = [
            print_signs(engineering(found, sign, _DIGITS))
            for name, sign in shown
            if (found := number(part.values.get(name))) is not None
        ]
        if part.kind == "transformer":
            pieces = _turns(number(part.values.get("ratio")))
        return Label(short(part.name), ", ".join(pieces))

    return label


def _turns(ratio: float | None) -> list[str]:
    """A ratio as 1 : 8 or 8 : 1."""
    if not ratio:
        return []
    more, less = (ratio, 1) if abs(ratio) >= 1 else (1, 1 / ratio)
    return [f"{more:.{_DIGITS}g} : {less:.{_DIGITS}g}".replace("-", "−")]


def short(name: str) -> str:
    """A name cut in its middle where it is very long."""
    half = _LONGEST_NAME // 2
    return name if len(name) <= _LONGEST_NAME else f"{name[:half]}…{name[-half + 1 :]}"


def print_signs(text: str) -> str:
    """A number with its unit in the signs of print: `4.7 µF`, `50 Ω`, `−3 V`."""
    number, blank, rest = text.partition(" ")
    if rest.endswith("ohm"):
        rest = rest.removesuffix("ohm") + "Ω"
    if rest.startswith("u"):
        rest = "µ" + rest[1:]
    return f"{number.replace('-', '−')}{blank}{rest}"


def _unit_of(part: Part) -> str:
    principal = part.definition.attribute(part.definition.principal or "")
    dimension = None if principal is None else principal.dimension
    return "" if dimension is None else unit.SIGNS.get(dimension, "")
