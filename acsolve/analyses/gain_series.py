"""|H|² and its distance from a level as Taylor series over intervals of frequency."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field
from fractions import Fraction
from typing import Any, Protocol

from acsolve.algebra.lu import backward, factor
from acsolve.algebra.plan import Plan
from acsolve.algebra.taylor import sign
from acsolve.analyses.closed_form import ClosedForm, evaluate_polynomial, generator_numbers
from acsolve.analyses.question import Ask
from acsolve.circuit.netlist import Netlist, bindings
from acsolve.equations.evaluate import Evaluator
from acsolve.equations.numeric import Numbers, ball_values, float_values, numbers, takes_branch
from acsolve.equations.series import SeriesArithmetic, coefficients, frequency, near_zero, terms
from acsolve.equations.solver import prepare
from acsolve.equations.system import Functional, System

_ROOT = 12  # of s, at 0 Hz


class Response(Protocol):
    """H = N/D near a real angular frequency."""

    @property
    def cost(self) -> int:
        """Products of series for one evaluation, roughly."""

    def parts(self, omega: Any, order: int) -> tuple[Any, Any]:
        """N and D as series in t about omega + t, omega a ball in rad/s."""


@dataclass(frozen=True, slots=True)
class FormResponse:
    """A closed form: numerator and denominator have no poles."""

    form: ClosedForm
    known: dict[int, Evaluator] = field(default_factory=dict)  # by precision

    @property
    def cost(self) -> int:
        """Terms of both polynomials, and the functions in them."""
        return len(self.form.numerator) + len(self.form.denominator) + 4 * sum(self.form.used())

    def parts(self, omega: Any, order: int) -> tuple[Any, Any]:
        """Numerator and denominator as series."""
        from flint import acb

        form, arithmetic = self.form, SeriesArithmetic()
        s = frequency(omega, order)
        try:
            points = generator_numbers(form, self._evaluator(), arithmetic, s)
        except ValueError:  # a function divides by what may be zero in so wide a ball
            return acb("nan"), acb("nan")
        top = evaluate_polynomial(form.numerator, points, arithmetic)
        return top, evaluate_polynomial(form.denominator, points, arithmetic)

    def _evaluator(self) -> Evaluator:
        found: Evaluator = at_precision(self.known, lambda: self.form.evaluator(SeriesArithmetic()))
        return found


def at_precision(known: dict[int, Any], make: Callable[[], Any]) -> Any:
    """What is made once for each working precision."""
    from flint import ctx

    if ctx.prec not in known:
        known[ctx.prec] = make()
    return known[ctx.prec]


@dataclass(frozen=True, slots=True)
class SolvedResponse:
    """The network's equations, eliminated for each series: no closed form is needed.

    H itself, so that a pole on the axis is not told from a place where the balls are too wide.
    """

    netlist: Netlist
    system: System
    driven: Functional
    observed: Functional
    plan: Plan
    places: tuple[tuple[int, int], ...]
    known: dict[int, Numbers] = field(default_factory=dict)

    @property
    def cost(self) -> int:
        """Products of the elimination."""
        return sum(len(step.targets) + len(step.right) + 1 for step in self.plan.steps)

    def parts(self, omega: Any, order: int) -> tuple[Any, Any]:
        """H as a series, over one."""
        from flint import acb

        return self._at(frequency(omega, order)), acb(1)

    def at_zero(self) -> Any | None:
        """|H|² at 0 Hz as a ball; None where the equations are singular there.

        Over s = z**12, so that roots of s up to the twelfth are powers.
        """
        with terms(_ROOT + 1):
            value = abs(coefficients(self._at(near_zero(_ROOT, _ROOT + 1)), 0)[0]) ** 2
        return value if value.is_finite() else None

    def _at(self, s: Any) -> Any:
        from flint import acb

        entries = at_precision(self.known, self._numbers).at(s)
        try:
            x = backward(factor(self.plan, entries, {self.plan.size - 1: acb(1)}))
        except ValueError:  # a pivot that may be zero: nothing is known over so wide a ball
            return acb("nan")
        found = [x[column] * k for column, k in self.observed.items() if x[column] is not None]
        return sum(found, acb(0))

    def _numbers(self) -> Numbers:
        evaluate = Evaluator(bindings(self.netlist), SeriesArithmetic())
        return numbers(self.system, self.driven, evaluate, places=self.places)


def solved_response(netlist: Netlist, ask: Ask, hertz: Any) -> SolvedResponse:
    """The response of a question, its elimination planned at a few frequencies in hertz."""
    values = float_values(netlist)
    system = ask.system(netlist, branch_for=lambda part: takes_branch(values, part))
    driven, observed = ask.driven(system), ask.observed(system)
    solver = prepare(
        system,
        observed=[observed],
        driven=driven,
        hertz=hertz,
        values=values,
        balls=lambda: ball_values(netlist),
    )
    places = tuple(zip(solver.numbers.rows, solver.numbers.columns, strict=True))
    return SolvedResponse(netlist, system, driven, observed, solver.plan, places)


@dataclass(frozen=True, slots=True)
class Gain:
    """|H|² over the angular frequency."""

    response: Response

    def __call__(self, x: Any, order: int) -> Sequence[Any]:
        """Its Taylor coefficients; not finite where the denominator may be zero."""
        from flint import arb

        top, bottom = squares(self.response, x, order)
        if bottom.coeffs() and sign(bottom.coeffs()[0]):
            return _padded(top / bottom, order)
        return [arb("nan")] * (order + 1)

    def size(self, x: Any) -> Any:
        """Its own value: there is no difference in it."""
        return self(x, 0)[0]


@dataclass(frozen=True, slots=True)
class Distance:
    """|N|² - level·|D|², which is zero where the gain is at the level.

    `level` gives the squared gain as a ball at the precision in force.
    """

    response: Response
    level: Callable[[], Any]

    def __call__(self, x: Any, order: int) -> Sequence[Any]:
        """Its Taylor coefficients."""
        top, bottom = squares(self.response, x, order)
        return _padded(top - bottom * self.level(), order)

    def size(self, x: Any) -> Any:
        """|N|² + level·|D|²."""
        top, bottom = squares(self.response, x, 0)
        return _padded(top + bottom * self.level(), 0)[0]


def squares(response: Response, x: Any, order: int) -> tuple[Any, Any]:
    """|N|² and |D|² as real series."""
    with terms(order + 1):
        return tuple(_squared(part, order) for part in response.parts(x, order))


def _squared(part: Any, order: int) -> Any:
    from flint import arb_series

    values = coefficients(part, order)
    real = arb_series([value.real for value in values], prec=order + 1)
    imag = arb_series([value.imag for value in values], prec=order + 1)
    return real * real + imag * imag


def _padded(series: Any, order: int) -> list[Any]:
    from flint import arb

    found = series.coeffs()[: order + 1]
    return [*found, *[arb(0)] * (order + 1 - len(found))]


def ball_of(value: Fraction) -> Any:
    """A rational number as a real ball at the precision in force."""
    from flint import arb, fmpq

    return arb(fmpq(value.numerator, value.denominator))
