"""The box of values that tolerances allow, each limit counted from its nominal value.

A name inside an expression stands for the nominal value of a part; a named quantity with a
tolerance carries it into every part computed from it. So each name gets two values: the one
that it has itself, and the nominal one that others see.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from types import MappingProxyType

from acsolve.analyses.closed_form import ClosedForm
from acsolve.circuit.expression import (
    ONE,
    Expression,
    Name,
    add,
    multiply,
    names,
    rebuild,
)
from acsolve.circuit.graph import natural_key
from acsolve.circuit.netlist import Netlist, bindings
from acsolve.circuit.value import Value
from acsolve.equations.evaluate import Arithmetic, Evaluator, Scalar, angle_name
from acsolve.equations.exact import Symbols


@dataclass(frozen=True, slots=True, eq=False)
class Spread:
    """Values, and the names among them that lie between limits rather than at a number.

    `values` refers to the deviation of each of `names` from its nominal value.
    """

    values: Mapping[str, Value]
    names: tuple[str, ...] = ()
    limits: tuple[tuple[Expression, Expression], ...] = ()
    relative: tuple[bool, ...] = ()

    def evaluator(self, arithmetic: Arithmetic, places: Sequence[Scalar]) -> Evaluator:
        """An evaluator with each of `names` at a place from 0 (low limit) to 1 (high)."""
        nominal = Evaluator(self.values, arithmetic)
        deviations = {}
        for name, (low, high), place in zip(self.names, self.limits, places, strict=True):
            first, last = nominal(low), nominal(high)
            deviations[_deviation(name)] = first + (last - first) * place
        return Evaluator(self.values, arithmetic, overrides=deviations)

    def nominal_places(self, arithmetic: Arithmetic) -> list[Scalar]:
        """The places of the nominal values: between the limits, at deviation zero."""
        nominal = Evaluator(self.values, arithmetic)
        places = []
        for low, high in self.limits:
            first, last = nominal(low), nominal(high)
            places.append(-first / (last - first) if last != first else first * 0)
        return places


def _deviation(name: str) -> str:
    return f"{name} deviation"  # no name of a circuit holds a blank outside brackets


def _seen(name: str) -> str:
    return f"{name} nominal"


def fixed(values: Mapping[str, Value]) -> Spread:
    """Every value at its nominal number."""
    return Spread(values)


def spread(form: ClosedForm, netlist: Netlist) -> Spread:
    """The box of the values behind a closed form's symbols, within their tolerances."""
    given = bindings(netlist)
    reached = _reached(form.symbols, given)
    chosen = sorted((name for name in reached if given[name].tolerance), key=natural_key)
    if not chosen:
        return fixed(given)
    values: dict[str, Value] = {}
    for name, value in given.items():
        if value.expression is None:
            values[name] = value
            continue
        nominal = rebuild(value.expression, lambda item: _inner(item, given, netlist))
        values[_seen(name)] = Value(expression=nominal)
        values[name] = replace(value, expression=_spread_out(name, nominal, value))
    sides = [given[name].tolerance for name in chosen]
    return Spread(
        MappingProxyType(values),
        tuple(chosen),
        tuple((side.low, side.high) for side in sides if side),
        tuple(side.relative for side in sides if side),
    )


def _inner(item: Name, given: Mapping[str, Value], netlist: Netlist) -> Expression:
    """What a name inside an expression stands for."""
    valued = item.name in given and given[item.name].expression is not None
    return Name(_seen(item.name)) if valued and item.name not in netlist.quantities else item


def _spread_out(name: str, nominal: Expression, value: Value) -> Expression:
    if value.tolerance is None:
        return nominal
    if value.tolerance.relative:
        return multiply(nominal, add(ONE, Name(_deviation(name))))
    return add(nominal, Name(_deviation(name)))


def _reached(symbols: Sequence[str], given: Mapping[str, Value]) -> frozenset[str]:
    """The symbols and every name that their values are computed from."""
    found: set[str] = set()
    waiting = list(symbols)
    while waiting:
        name = waiting.pop()
        if name in found or name not in given:
            continue
        found.add(name)
        expression = given[name].expression
        waiting += [*(names(expression) if expression else ()), angle_name(name)]
    return frozenset(found)


def spread_symbols(netlist: Netlist) -> Symbols:
    """All symbolic, and what must stay a symbol for tolerances to mean what the file says.

    A part computed from others keeps a symbol of its own where it has a tolerance, or where
    it is computed from a part that has one (of which it sees the nominal value only).
    """
    return Symbols(symbolic=True, keep=_own_symbols(netlist))


def _own_symbols(netlist: Netlist) -> frozenset[str]:
    given = bindings(netlist)
    loose = {name for name, value in given.items() if value.tolerance} - set(netlist.quantities)
    keep = set()
    for name, value in given.items():
        inside = names(value.expression) if value.expression is not None else frozenset()
        if inside and (value.tolerance or inside & loose):
            keep.add(name)
    return frozenset(keep)


def hidden(form: ClosedForm, netlist: Netlist) -> tuple[str, ...]:
    """Names whose tolerance a closed form cannot show, as they are no symbols in it."""
    given = bindings(netlist)
    needed = _own_symbols(netlist) | {name for name, value in given.items() if value.tolerance}
    return tuple(sorted(needed - set(form.basis.free_names), key=natural_key))
