"""Published cases: their rows, and the questions that a row puts to its circuit file."""

from __future__ import annotations

import json
from dataclasses import dataclass, field
from functools import cache
from pathlib import Path as File
from typing import Any, Literal

import numpy as np

import acsolve
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import CutoffAnswer
from acsolve.analyses.poles import PolesZeros
from acsolve.analyses.step import StepAnswer
from acsolve.circuit.expression import Number

FOLDER = File(__file__).parent
#: A response is asked of both engines: the exact closed form and the numeric sweep.
ENGINES = ("closed form", "sweep")

Pair = str | tuple[str, str]
Quantity = Literal["voltage-ratio", "transimpedance"]


@dataclass(frozen=True, slots=True, eq=False)
class Row:
    """One published number; `name` is the case and the row's place in it, from 1."""

    name: str
    case: str
    title: str
    quantity: str
    value: Any  # a number, or [real, imaginary]
    unit: str
    tolerance: float
    given: dict[str, Any] = field(repr=False)

    @property
    def words(self) -> str:
        """The quantity in words with its unit: what the table of quantities is keyed by."""
        return f"{self.quantity} [{self.unit}]"

    @property
    def hertz(self) -> float:
        """The row's frequency; 0 Hz where it states none."""
        return float(self.given.get("frequency_Hz", 0.0))

    @property
    def wanted(self) -> complex:
        """The published number; a pole or zero is complex."""
        return complex(*self.value) if isinstance(self.value, list) else self.value

    def agrees(self, found: Any) -> bool:
        """Whether a number found lies within the row's own tolerance, phases modulo 360."""
        error = found - self.wanted
        if self.unit == "degree":
            error = (error + 180) % 360 - 180
        return bool(abs(error) <= self.tolerance)


@cache
def rows() -> tuple[Row, ...]:
    """Every row of every case, in the order of the file."""
    cases = json.loads((FOLDER / "cases.json").read_text(encoding="utf-8"))
    return tuple(
        Row(
            name=f"{case['id']}-{place:02}",
            case=case["id"],
            title=case["title"],
            given=given,
            **{key: given[key] for key in ("quantity", "value", "unit", "tolerance")},
        )
        for case in cases
        for place, given in enumerate(case["rows"], start=1)
    )


@cache
def circuit(case: str, variant: str | None = None) -> acsolve.Circuit:
    """A case's circuit file, read once."""
    if variant is not None:
        return circuit(case).with_variant(variant)
    return acsolve.read(FOLDER / "circuits" / f"{case}.circuit")


@dataclass(frozen=True, slots=True)
class Asked:
    """A question as a key: two pairs and a quantity, or one pair for an impedance."""

    case: str
    variant: str | None
    source: Pair | None
    target: Pair
    quantity: Quantity = "voltage-ratio"

    def path(self) -> acsolve.Path:
        """The question at the door."""
        here = circuit(self.case, self.variant)
        if self.source is None:
            return here.looking_into(self.target)
        return here.path(self.source, self.target, quantity=self.quantity)

    def at(self, hertz: Any, engine: str) -> Any:
        """The complex response by one of the engines."""
        if engine == "sweep":
            return self.path().response(hertz)
        return closed_form(self).response(np.asarray(hertz, dtype=float))

    def delay(self, hertz: float) -> float:
        """The group delay in seconds."""
        return float(self.path().sweep([hertz]).group_delay_s[0])


@cache
def closed_form(asked: Asked) -> ClosedForm:
    """The closed form of a question, solved once."""
    return asked.path().closed_form()


@cache
def roots(asked: Asked) -> PolesZeros:
    """Poles and zeros of a question."""
    found = asked.path().transfer().roots
    assert found is not None
    return found


@cache
def cutoffs(asked: Asked, reference: Literal["peak"] | None = None) -> CutoffAnswer:
    """The half-power frequencies of a question, proven complete."""
    found = asked.path().cutoffs(reference=reference)
    assert found.complete
    return found


@cache
def stepped(asked: Asked) -> StepAnswer:
    """The step response of a question."""
    return asked.path().step()


@dataclass(frozen=True, slots=True)
class Bench:
    """A case on the bench: what its file asks, by one engine."""

    case: str
    engine: str

    def transfer(self, variant: str | None = None) -> Asked:
        """The first transfer that the file asks for."""
        question = next(item for item in circuit(self.case).questions if item.kind == "transfer")
        quantity = question.quantity or "voltage-ratio"
        return Asked(self.case, variant, question.source, question.target, quantity)

    def ratio(self, source: Pair, target: Pair, variant: str | None = None) -> Asked:
        """A voltage ratio between pairs that the row names."""
        return Asked(self.case, variant, source, target)

    def impedance(self, variant: str | None = None, pair: Pair | None = None) -> Asked:
        """The impedance that the file asks for, or that of another pair."""
        if pair is None:
            questions = circuit(self.case).questions
            pair = next(item.target for item in questions if item.kind == "impedance")
        return Asked(self.case, variant, None, pair)

    def at(self, asked: Asked, hertz: Any) -> Any:
        """The complex response by this engine."""
        return asked.at(hertz, self.engine)

    def part(self, name: str) -> float:
        """The value of a part in SI units, 0 where it is not in the circuit."""
        found = circuit(self.case).netlist.part(name)
        if found is None:
            return 0.0
        value = found.values["value"].expression
        assert isinstance(value, Number)
        return float(value.value)

    def total(self, letter: str) -> float:
        """The sum of all parts whose names start with a letter."""
        names = circuit(self.case).parts
        return sum(self.part(name) for name in names if name.startswith(letter))
