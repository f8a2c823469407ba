"""What callers hand to the door, as texts of the format or plain numbers, made exact."""

from __future__ import annotations

from difflib import get_close_matches
from fractions import Fraction
from typing import TYPE_CHECKING, Any

from acsolve.circuit import unit
from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import Netlist, Pair
from acsolve.circuit.unit import Dimension
from acsolve.circuit.value import Value
from acsolve.codes import Code
from acsolve.errors import AnalysisError, Diagnostic

if TYPE_CHECKING:
    from acsolve.analyses.cutoff import CutoffLevel
    from acsolve.analyses.magnitude import ReferenceName


def pair_of(given: str | tuple[str, str], netlist: Netlist) -> Pair:
    """A pair of nodes from a node's name, "a,b", a tuple or a port's name."""
    from acsolve.text import parse_pair

    if isinstance(given, tuple):
        first, second = given
        return netlist.resolve(first), netlist.resolve(second)
    return parse_pair(given, netlist)


def value_for(name: str, given: Any, netlist: Netlist) -> Value:
    """A value for a named part, attribute or quantity, its unit checked.

    Raises
    ------
    AcsolveError
        [question.unknown-name] no such name; codes of the text format for a text that
        does not read or has the wrong unit.
    """
    from acsolve.text import parse_value

    dimension = _dimension(name, netlist)
    if isinstance(given, str):
        return parse_value(given, dimension=dimension, netlist=netlist, target=name)
    return Value(expression=Number(exact(given)))


def exact(given: Any) -> Fraction:
    """A number as an exact fraction: a float stands for the decimal it prints as."""
    if isinstance(given, float):
        return Fraction(repr(given))
    if isinstance(given, int | Fraction):
        return Fraction(given)
    try:
        return Fraction(repr(float(given)))
    except (TypeError, ValueError):
        raise _refuse("option.value", f"{given!r} is not a number", "Give a number.") from None


def _dimension(name: str, netlist: Netlist) -> Dimension | None:
    quantity = netlist.quantities.get(name)
    if quantity is not None:
        return quantity.dimension
    known = list(netlist.quantities)
    for part in netlist.parts:
        for attribute in part.definition.attributes:
            full = part.value_name(attribute.name)
            if full == name:
                return attribute.dimension
            known.append(full)
    for coupling in netlist.couplings:
        if coupling.name == name:
            return unit.NONE
        known.append(coupling.name)
    near = get_close_matches(name, known, n=1)
    hint = f"Did you mean {near[0]}?" if near else "Name a part, an attribute or a quantity."
    raise _refuse("question.unknown-name", f"there is nothing named {name} in this circuit", hint)


def level_of(given: str | float | Fraction | None) -> CutoffLevel:
    """A level in decibels relative to the reference; None and -3 dB are half power."""
    from acsolve.analyses.cutoff import CutoffLevel, cutoff_level
    from acsolve.text import parse_level

    if given is None:
        return CutoffLevel()
    if not isinstance(given, str):
        return cutoff_level(exact(given))
    decibel = parse_level(given).decibel
    return CutoffLevel() if decibel is None else cutoff_level(_number(decibel, given))


def reference_of(given: str | float | Fraction | None) -> ReferenceName | Fraction | None:
    """`dc`, `infinity`, `peak`, a stated gain, or None to choose by the shape."""
    from acsolve.text import parse_gain

    match given:
        case None:
            return None
        case "dc" | "infinity" | "peak":
            return given
        case str():
            return _number(parse_gain(given), given)
        case _:
            return exact(given)


def _number(value: Value, given: str) -> Fraction:
    if isinstance(value.expression, Number):
        return value.expression.value
    raise _refuse("option.value", f"{given} is not a plain number", "Write a number, as 0.5.")


def _refuse(code: Code, message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
