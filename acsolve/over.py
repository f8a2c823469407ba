"""Families of circuits from texts: `R1 = 1k .. 10k`, `C1 = 1 nF, 2n2, 4n7`."""

from __future__ import annotations

from collections.abc import Iterator, Mapping
from dataclasses import dataclass, replace
from itertools import product
from math import prod
from typing import TYPE_CHECKING, Any

from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import Netlist, bindings, with_values
from acsolve.circuit.unit import SIGNS
from acsolve.circuit.value import Value
from acsolve.given import dimension_of, number_of, refuse, texts_of, value_for

if TYPE_CHECKING:
    from acsolve.analyses.family import Setting
    from acsolve.door import Circuit

_HINT = "Write, say, R1 = 1k .. 10k (five steps), R1 = 1k .. 10k : 7, or R1 = 1k, 2k2."


@dataclass(frozen=True, slots=True, kw_only=True)
class Member:
    """One circuit of a family, with the settings that make it."""

    circuit: Circuit
    settings: tuple[Setting, ...]


def _combinations(given: Any, netlist: Netlist) -> Iterator[Mapping[str, Value]]:
    """The values of each member, by name: every combination, the first text slowest.

    Raises
    ------
    AnalysisError
        [option.value] a text is no family, names a value twice, or there are too many
        members; [question.unknown-name] the circuit has no value of that name.
    TextError
        codes of the text format for a value that does not read or has the wrong unit.
    """
    from acsolve.analyses.family import MOST_STEPS

    texts = texts_of(given, "families of values")
    axes: dict[str, list[Value]] = {}
    for text in [texts] if isinstance(texts, str) else texts:
        name, values = _axis(text, netlist)
        if name in axes:
            raise refuse("option.value", f"{name} is varied twice", "Name each value once.")
        axes[name] = values
    if not axes:
        raise refuse("option.value", "no value is varied", _HINT)
    count = prod(map(len, axes.values()))
    if count > MOST_STEPS:
        raise refuse(
            "option.value",
            f"the family has {count:,} members, and at most {MOST_STEPS} are taken",
            "Take fewer steps; `Path.response` takes arrays of any length.",
        )
    return (dict(zip(axes, chosen, strict=True)) for chosen in product(*axes.values()))


def _axis(text: str, netlist: Netlist) -> tuple[str, list[Value]]:
    """A name and its values."""
    name, sign, rest = (part.strip() for part in text.partition("="))
    if not (sign and name and rest):
        raise refuse("option.value", f"{text} is not NAME = VALUES", _HINT)
    if ".." in rest:
        values = _range(name, rest, netlist)
    else:
        values = [value_for(name, item.strip(), netlist) for item in rest.split(",")]
    old = bindings(netlist).get(name, Value())
    return name, [replace(item, at_hertz=item.at_hertz or old.at_hertz) for item in values]


def _range(name: str, text: str, netlist: Netlist) -> list[Value]:
    from acsolve.analyses.family import USUAL_STEPS, steps

    edges, sign, count = (part.strip() for part in text.partition(":"))
    ends = [value_for(name, item.strip(), netlist) for item in edges.split("..", 1)]
    first, last = (number_of(item, netlist) for item in ends)
    if first == last:
        raise refuse("option.value", f"{name} is varied from a value to itself", _HINT)
    number = _count(name, count) if sign else USUAL_STEPS
    return [replace(ends[0], expression=Number(item)) for item in steps(first, last, number)]


def _count(name: str, text: str) -> int:
    from acsolve.analyses.family import MOST_STEPS

    if not (text.isascii() and text.isdecimal() and len(text) < 9 and int(text) >= 2):
        raise refuse(
            "option.value",
            f"{text or 'nothing'} is no number of values of {name}",
            f"After the colon give a whole number from 2 to {MOST_STEPS}.",
        )
    return int(text)


def members(circuit: Circuit, given: Any) -> tuple[Member, ...]:
    """Every circuit of a family; raises as `Circuit.family`."""
    netlist = circuit.netlist
    return tuple(
        Member(circuit=circuit.with_read_values(changed), settings=_settings(netlist, changed))
        for changed in _combinations(given, netlist)
    )


def _settings(netlist: Netlist, changed: Mapping[str, Value]) -> tuple[Setting, ...]:
    """The settings of a member as numbers with their units."""
    from acsolve.analyses.family import Setting

    whole = with_values(netlist, changed)
    found = []
    for name, value in changed.items():
        dimension = dimension_of(name, netlist)
        unit = SIGNS.get(dimension, "") if dimension else ""
        number = number_of(value, whole)
        found.append(Setting(name=name, value=number.numerator / number.denominator, unit=unit))
    return tuple(found)
