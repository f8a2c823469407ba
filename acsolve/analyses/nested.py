"""The nested closed form: named sub-expressions, for networks too large to multiply out."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from random import Random
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from acsolve.analyses.closed_form import Checked, in_doubles
from acsolve.analyses.engine_check import engine_difference
from acsolve.analyses.question import Ask, no_unique_solution, refuse_unreferenced
from acsolve.circuit.expression import (
    Expression,
    Name,
    Number,
    Power,
    Product,
    Quotient,
    Sum,
    names,
)
from acsolve.circuit.graph import natural_key
from acsolve.circuit.netlist import Netlist, Part, bindings
from acsolve.circuit.value import Value
from acsolve.equations.evaluate import Arithmetic, Evaluator, FloatArithmetic, Scalar
from acsolve.equations.exact import Expander, Symbols, exact_system, with_symbols
from acsolve.equations.naming import safe_names
from acsolve.equations.nested import PRIME, Step, nested
from acsolve.equations.write import Spelling, expression_text
from acsolve.errors import Diagnostic, EquationError
from acsolve.shown import Shown

_NARROW = 6  # columns open at once up to which branch currents read best (a ladder has 3)


@dataclass(frozen=True, slots=True, eq=False, repr=False)
class NestedForm(Shown):
    """An answer as steps, each over the parts, s and earlier steps, and a result over them.

    Exact like the expanded form, of a size that grows with the elimination's work.
    """

    ask: Ask
    steps: tuple[Step, ...]
    result: Expression
    values: Mapping[str, Value] = field(repr=False)
    checked: Checked | None = None

    @property
    def symbols(self) -> tuple[str, ...]:
        """The free symbols that occur, in natural order."""
        own = {step.name for step in self.steps}
        found = {name for item in self._expressions() for name in names(item)} - own
        return tuple(sorted(found, key=natural_key))

    def _expressions(self) -> list[Expression]:
        return [*(step.expression for step in self.steps), self.result]

    def spelled(self, *, safe: bool) -> Spelling:
        """The spelling of symbols and steps, for people or safe for SymPy's parser."""
        if not safe:
            return Spelling({})
        return Spelling(safe_names([*self.symbols, *(step.name for step in self.steps)]), "**")

    def step_texts(self, *, safe: bool = False) -> list[tuple[str, str]]:
        """(name, expression) of each step as text."""
        spelling = self.spelled(safe=safe)
        return [
            (spelling.name(step.name), expression_text(step.expression, spelling))
            for step in self.steps
        ]

    def text(self, *, safe: bool = False) -> str:
        """The result over the steps, as text."""
        return expression_text(self.result, self.spelled(safe=safe))

    def at(self, s: Scalar, evaluate: Evaluator, arithmetic: Arithmetic) -> Scalar:
        """The value at complex frequencies s (rad/s), in the evaluator's arithmetic."""
        del arithmetic
        for step in self.steps:
            evaluate.set(step.name, evaluate(step.expression, s))
        return evaluate(self.result, s)

    def response(self, hertz: ArrayLike) -> NDArray[np.complex128]:
        """The complex response at frequencies in hertz; same shape as `hertz`.

        A step may be singular where the answer has a limit (at 0 Hz, say): such points are
        evaluated in balls. Elsewhere steps are in doubles, so digits that cancel are lost;
        `Path.response` is checked point by point.

        Raises
        ------
        EquationError
            [question.no-value] if a symbol has no value.
        """
        return in_doubles(self, np.asarray(hertz, dtype=float))

    def as_sympy(self) -> tuple[list[tuple[Any, Any]], Any]:
        """Steps as (symbol, expression) and the result, as SymPy objects."""
        from acsolve.analyses.sympy_edge import nested_to_sympy

        return nested_to_sympy(self)

    def __repr__(self) -> str:
        return f"NestedForm({len(self.steps)} steps, {self.text()})"

    def __str__(self) -> str:
        lines = [f"{name} = {text}" for name, text in self.step_texts()]
        return "\n".join([*lines, self.text()])


def nested_form(netlist: Netlist, ask: Ask, symbols: Symbols | None = None) -> NestedForm:
    """The nested closed form that answers a question, checked like the expanded one.

    Raises
    ------
    EquationError
        [equations.singular] the network has no unique solution.
    """
    expand = Expander(bindings(netlist), symbols or Symbols())
    asked = with_symbols(netlist, symbols or Symbols())
    system = ask.system(asked)
    refuse_unreferenced(system, ask)
    if exact_system(system, expand).plan.width > _NARROW:
        system = ask.system(asked, branch_for=lambda part: _plainly_zero(part, expand))
    probe = _Probe()
    taken = frozenset(bindings(netlist))
    observed, driven = ask.observed(system), ask.driven(system)
    found = nested(system, observed, driven, expand=expand, probe=probe, taken=taken)
    if found is None:
        raise no_unique_solution()
    form = NestedForm(ask, found.steps, found.result, bindings(netlist))
    return replace(form, checked=_check(asked, form))


def _plainly_zero(part: Part, expand: Expander) -> bool:
    value = expand(Name(part.value_name("value")))
    return isinstance(value, Number) and value.value == 0


class _Probe:
    """Expressions as numbers modulo a prime, at one random point, the same on every run."""

    def __init__(self) -> None:
        self._random = Random(20)  # noqa: S311 - reproducible, no secret
        self._known: dict[Expression, int] = {}

    def __call__(self, expression: Expression) -> int:
        match expression:
            case Number(value):
                return value.numerator * pow(value.denominator, -1, PRIME) % PRIME
            case Sum(left, right):
                return (self(left) + self(right)) % PRIME
            case Product(left, right):
                return self(left) * self(right) % PRIME
            case Quotient(left, right):
                return self(left) * pow(self(right), -1, PRIME) % PRIME
            case Power(base, Number(exponent)) if exponent.denominator == 1:
                return pow(self(base), exponent.numerator, PRIME)
            case _:
                if expression not in self._known:
                    self._known[expression] = self._random.randrange(1, PRIME)
                return self._known[expression]


_POINTS = 3
_AGREEMENT = 1e-9


def _check(netlist: Netlist, form: NestedForm) -> Checked:
    """Against the numeric engine at random frequencies, symbols at random values."""
    random = Random(20)  # noqa: S311 - reproducible points, no secret
    values = {name: 0.5 + random.random() for name in form.symbols}
    hertz = np.array([10 ** random.uniform(-2, 0) for _ in range(_POINTS)])
    arithmetic = FloatArithmetic()
    evaluate = Evaluator(form.values, arithmetic, overrides=values)
    here = np.asarray(form.at(2j * np.pi * hertz, evaluate, arithmetic), dtype=complex)
    worst = engine_difference(netlist, form.ask, hertz, values, here)
    if not worst <= _AGREEMENT:
        raise EquationError(
            Diagnostic(
                code="equations.check-failed",
                message="the nested form disagrees with an independent numeric solution "
                f"(relative difference {worst:.2g})",
                hint="This is a defect of acsolve; please report the circuit.",
            )
        )
    return Checked(_POINTS, worst)
