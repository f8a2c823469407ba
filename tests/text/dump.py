"""A netlist as readable lines, for snapshots."""

from __future__ import annotations

from collections.abc import Iterator

from acsolve.circuit import unit
from acsolve.circuit.netlist import Netlist
from acsolve.circuit.value import Value
from acsolve.text.write_values import Expressions


def dumped(netlist: Netlist) -> str:
    """Everything a netlist holds, one fact a line."""
    return "".join(f"{line}\n" for line in _lines(netlist))


def value_text(value: Value) -> str:
    """A value with its tolerance, numbers in SI units without a unit."""
    if value.expression is None:
        return "own symbol"
    words = [Expressions({}).text(value.expression, None)]
    if value.tolerance is not None:
        low, high = (
            Expressions({}).text(side, None) for side in (value.tolerance.low, value.tolerance.high)
        )
        kind = "relative" if value.tolerance.relative else "absolute"
        words.append(f"[{low} .. {high} {kind} {value.tolerance.distribution}]")
    if value.temperature_coefficient is not None:
        words.append(f"tc {Expressions({}).text(value.temperature_coefficient, None)}")
    if value.at_hertz is not None:
        words.append(f"at {Expressions({}).text(value.at_hertz, None)}")
    return " ".join(words)


def _lines(netlist: Netlist) -> Iterator[str]:
    yield from (f"remark {item}" for item in netlist.remarks)
    if netlist.title:
        yield f"title {netlist.title}"
    yield from (f"caution {item}" for item in netlist.cautions)
    for part in netlist.parts:
        yield f"{part.name} {part.kind} ({', '.join(part.nodes)})"
        yield from (f"    {name}: {value_text(value)}" for name, value in part.values.items())
    for item in netlist.couplings:
        yield f"{item.name}: {value_text(item.coefficient)}"
    for name, quantity in netlist.quantities.items():
        sign = unit.SIGNS.get(quantity.dimension, str(quantity.dimension)) or "plain"
        yield f"quantity {name} [{sign}]: {value_text(quantity.value)}"
    yield from (f"port {name} {pair}" for name, pair in netlist.ports.items())
    for question in netlist.questions:
        yield f"ask {question.kind} {question.source} to {question.target}"
        yield from _options(question)
    for goal in netlist.goals:
        band = f"{value_text(goal.band.low)} .. {value_text(goal.band.high)}"
        yield f"goal {goal.source} to {goal.target} {band} {goal.side} {value_text(goal.level)}"
    yield from (f"joined {node} -> {keep}" for node, keep in netlist.aliases.items())
    for variant in netlist.variants.values():
        yield f"variant {variant.name}"
        yield from (f"    {name}: {value_text(item)}" for name, item in variant.values.items())
        yield from (f"    absent {name}" for name in sorted(variant.absent))
        yield from (f"    join {group}" for group in variant.joins)


def _options(question) -> Iterator[str]:
    if question.quantity:
        yield f"    as {question.quantity}"
    for level in question.levels:
        yield f"    level {'half power' if level.decibel is None else value_text(level.decibel)}"
    if question.band:
        yield f"    over {value_text(question.band.low)} .. {value_text(question.band.high)}"
    if question.duration:
        yield f"    for {value_text(question.duration)}"
    if question.reference:
        yield f"    reference {value_text(question.reference)}"
    if question.ammeter:
        yield f"    ammeter {question.ammeter}"
