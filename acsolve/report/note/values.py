"""Values of parts as numbers and as words."""

from __future__ import annotations

from acsolve.circuit.expression import Expression, Number, depends_on_s, names
from acsolve.circuit.netlist import Netlist, Part, bindings
from acsolve.circuit.unit import SIGNS
from acsolve.circuit.value import Tolerance, Value
from acsolve.equations.evaluate import Evaluator, FloatArithmetic
from acsolve.equations.write import Spelling, expression_text
from acsolve.errors import EquationError
from acsolve.report.note.model import Inline, Math
from acsolve.report.note.wording import SPACE, quantity, ratio, tree

_LONGEST = 60  # characters of an expression that stands beside its number


def number_of(value: Value, netlist: Netlist) -> float | None:
    """A value as a number; None where it is a symbol, or depends on frequency."""
    if value.expression is None or depends_on_s(value.expression):
        return None
    return _evaluated(value.expression, netlist)


def _evaluated(expression: Expression, netlist: Netlist) -> float | None:
    try:
        found = Evaluator(bindings(netlist), FloatArithmetic())(expression, None)
    except EquationError:
        return None
    return float(found.real)


def value_words(part: Part, attribute: str, netlist: Netlist) -> tuple[Inline, ...]:
    """A value with its unit; what it is made of besides, where that is short."""
    value = part.values.get(attribute)
    definition = part.definition.attribute(attribute)
    dimension = None if definition is None else definition.dimension
    unit = "" if dimension is None else SIGNS.get(dimension, "")
    return spelled(value, unit, netlist)


def spelled(value: Value | None, unit: str, netlist: Netlist) -> tuple[Inline, ...]:
    """A value in words: its number, its formula, or that it is a symbol."""
    if value is None or value.expression is None:
        return ("symbol",)
    number = number_of(value, netlist)
    found: list[Inline] = [] if number is None else [quantity(number, unit)]
    if not isinstance(value.expression, Number) and (names(value.expression) or number is None):
        text = expression_text(value.expression, Spelling({}))
        node = tree(text) if len(text) <= _LONGEST else None
        if node is not None:
            found += [" = ", Math(node)] if found else [Math(node)]
    if value.at_hertz is not None:
        hertz = _evaluated(value.at_hertz, netlist)
        found += [] if hertz is None else [f" at {quantity(hertz, 'Hz')}"]
    return tuple(found) or ("an expression",)


def tolerance_numbers(value: Value | None, netlist: Netlist) -> tuple[float, float] | None:
    """Lower and upper limit, relative to the nominal or in the value's own unit."""
    if value is None or value.tolerance is None:
        return None
    low, high = (_evaluated(item, netlist) for item in (value.tolerance.low, value.tolerance.high))
    return None if low is None or high is None else (low, high)


def tolerance_words(value: Value | None, unit: str, netlist: Netlist) -> str:
    """`±1 %`, `+80 % −20 %`; a dash where none is stated."""
    limits = tolerance_numbers(value, netlist)
    if value is None or value.tolerance is None or limits is None:
        return "–"
    low, high = (_limit(size, unit, value.tolerance) for size in limits)
    normal = ", normal" if value.tolerance.distribution == "normal" else ""
    if limits[0] == -limits[1]:
        return f"±{high}{normal}"
    return f"+{high} −{low.removeprefix('−')}{normal}"


def _limit(size: float, unit: str, tolerance: Tolerance) -> str:
    return f"{ratio(100 * size)}{SPACE}%" if tolerance.relative else quantity(size, unit)
