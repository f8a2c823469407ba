"""Values of parts and named quantities: nominal expression, tolerance, conditions."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import Literal

from acsolve.circuit.expression import Expression
from acsolve.circuit.unit import NONE, Dimension
from acsolve.source import Span

Distribution = Literal["uniform", "normal"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Tolerance:
    """Limits around a nominal value: `low` <= 0 <= `high`, both as expressions.

    With `relative` they are fractions of the nominal (0.05 for 5 %), else absolute in
    the value's own unit. `normal` means limits at three sigma, truncated there.
    """

    low: Expression
    high: Expression
    relative: bool
    distribution: Distribution = "uniform"


@dataclass(frozen=True, slots=True, kw_only=True)
class Value:
    """What a place holds: an expression in SI units, or None for "its own symbol"."""

    expression: Expression | None = None
    tolerance: Tolerance | None = None
    temperature_coefficient: Expression | None = None  # 1/K
    at_hertz: Expression | None = None  # "quality = 110 at 455 kHz", "loss = 2 dB at 10 MHz"
    span: Span | None = field(default=None, compare=False, repr=False)


@dataclass(frozen=True, slots=True, kw_only=True)
class Quantity:
    """A named quantity (`let fc = 1 kHz`) or a declared symbol (`let R, C`)."""

    name: str
    value: Value
    dimension: Dimension = NONE
    span: Span | None = field(default=None, compare=False, repr=False)
