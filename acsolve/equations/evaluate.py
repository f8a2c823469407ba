"""Value expressions as numbers: floats, NumPy vectors over s, or complex balls."""

from __future__ import annotations

import cmath
from collections.abc import Callable, Collection, Iterator, Mapping
from fractions import Fraction
from math import pi
from typing import Any, Protocol, TypeAlias

import numpy as np

from acsolve.circuit.expression import (
    Call,
    Expression,
    Frequency,
    Name,
    Number,
    Pi,
    PortElement,
    Power,
    Product,
    Quotient,
    Sum,
    exact_root,
    names,
)
from acsolve.circuit.value import Value
from acsolve.codes import Code
from acsolve.errors import Diagnostic, EquationError

Scalar: TypeAlias = Any  # float, complex, ndarray or flint.acb


class Arithmetic(Protocol):
    """Constants and functions of one kind of number."""

    def number(self, value: Fraction) -> Scalar:
        """A rational number in this arithmetic."""

    def pi(self) -> Scalar:
        """The circle constant."""

    def power(self, base: Scalar, exponent: Scalar) -> Scalar:
        """base ** exponent, principal branch."""

    def function(self, name: str, argument: Scalar) -> Scalar:
        """A named function, principal branch."""

    def rotation(self, degrees: Scalar) -> Scalar:
        """exp(j·angle) for an angle in degrees."""

    def exp_minus_one(self, exponent: Scalar) -> Scalar:
        """exp(exponent) - 1, as good where the exponent is small."""


class FloatArithmetic:
    """Double precision; arguments may be NumPy arrays, results are real where they can be."""

    def number(self, value: Fraction) -> Scalar:
        """The nearest double."""
        return value.numerator / value.denominator

    def pi(self) -> Scalar:
        """The nearest double to pi."""
        return pi

    def power(self, base: Scalar, exponent: Scalar) -> Scalar:
        """base ** exponent, complex where a negative real base asks for it."""
        if isinstance(base, float) and base < 0 and not float(exponent).is_integer():
            base = complex(base)
        return base**exponent

    def function(self, name: str, argument: Scalar) -> Scalar:
        """Square root, exponential, logarithms and hyperbolic functions."""
        functions = {"sqrt": np.sqrt, "exp": np.exp, "cosh": np.cosh, "sinh": np.sinh}
        if name in functions:
            if name == "sqrt" and isinstance(argument, float) and argument < 0:
                return cmath.sqrt(argument)
            result = functions[name](argument)
            return float(result) if isinstance(argument, float) else result
        result = np.log(argument)
        return result / np.log(10.0) if name == "log10" else result

    def rotation(self, degrees: Scalar) -> Scalar:
        """exp(j·angle) for an angle in degrees, exact at whole quarter turns."""
        if isinstance(degrees, np.ndarray):
            turns = np.exp(1j * pi * degrees / 180)
            return np.where(degrees % 90 == 0, np.round(turns), turns)
        turn = cmath.rect(1.0, cmath.pi * float(degrees) / 180)
        return complex(round(turn.real), round(turn.imag)) if float(degrees) % 90 == 0 else turn

    def exp_minus_one(self, exponent: Scalar) -> Scalar:
        """exp(exponent) - 1: what a short line changes, without cancellation."""
        return np.expm1(exponent)


class BallArithmetic:
    """Complex balls of python-flint at its current working precision."""

    def __init__(self) -> None:
        from flint import acb, fmpq

        self._acb, self._fmpq = acb, fmpq

    def number(self, value: Fraction) -> Scalar:
        """A ball around a rational number."""
        return self._acb(self._fmpq(value.numerator, value.denominator))

    def pi(self) -> Scalar:
        """A ball around pi."""
        from flint import acb

        return acb.pi()

    def power(self, base: Scalar, exponent: Scalar) -> Scalar:
        """base ** exponent, principal branch; whole powers are exact products."""
        exact = exponent.unique_fmpz() if hasattr(exponent, "unique_fmpz") else None
        return base ** (exact if exact is not None else exponent)

    def function(self, name: str, argument: Scalar) -> Scalar:
        """Square root, exponential, logarithms and hyperbolic functions."""
        from flint import acb

        if name == "ln":
            return argument.log()
        if name == "log10":
            return argument.log() / acb(10).log()
        return getattr(argument, name)()

    def rotation(self, degrees: Scalar) -> Scalar:
        """exp(j·angle) for an angle in degrees."""
        return (degrees / 180).exp_pi_i()

    def exp_minus_one(self, exponent: Scalar) -> Scalar:
        """exp(exponent) - 1."""
        return exponent.expm1()


class RationalArithmetic:
    """Exact rationals of python-flint; functions only where their value is rational.

    Raises
    ------
    InexactError
        for pi, and for a function or root that is not rational.
    """

    def __init__(self) -> None:
        from flint import fmpq

        self._fmpq = fmpq

    def number(self, value: Fraction) -> Scalar:
        """The number itself."""
        return self._fmpq(value.numerator, value.denominator)

    def pi(self) -> Scalar:
        """Pi is not rational."""
        raise InexactError("pi")

    def power(self, base: Scalar, exponent: Scalar) -> Scalar:
        """base ** exponent for whole exponents and exact square roots."""
        if exponent.q == 1:
            return base ** int(exponent.p)
        if exponent.q == 2:
            return self.function("sqrt", base) ** int(exponent.p)
        raise InexactError("a root")

    def function(self, name: str, argument: Scalar) -> Scalar:
        """The square root of a square; any other function is inexact."""
        root = exact_root(Fraction(int(argument.p), int(argument.q))) if argument >= 0 else None
        if name != "sqrt" or root is None:
            raise InexactError(name)
        return self.number(root)

    def rotation(self, degrees: Scalar) -> Scalar:
        """A phasor is not rational."""
        del degrees
        raise InexactError("a phasor")

    def exp_minus_one(self, exponent: Scalar) -> Scalar:
        """Zero for zero; an exponential is not rational otherwise."""
        return self.function("exp", exponent) - 1


class InexactError(ArithmeticError):
    """A value is not rational."""


class Evaluator:
    """Evaluates expressions over the values of a circuit; each name is worked out once.

    `overrides` gives numbers (or arrays of samples) for names, before the circuit's own
    values: free symbols, a parameter sweep, a random sample. `ports` are the two-ports that
    are known by their numbers, by the name of their part.
    """

    def __init__(
        self,
        values: Mapping[str, Value],
        arithmetic: Arithmetic,
        *,
        overrides: Mapping[str, Scalar] | None = None,
        ports: Mapping[str, Any] | None = None,
    ) -> None:
        self.ports = ports or {}
        self._values = values
        self._arithmetic = arithmetic
        self._known: dict[str, Scalar] = dict(overrides or {})
        self._turned = {  # sources, whose values are phasors
            name.removesuffix(_ANGLE) for name in values if name.endswith(_ANGLE)
        }

    def __call__(self, expression: Expression, s: Scalar | None = None) -> Scalar:
        """The number an expression stands for at complex frequency s (rad/s).

        Raises
        ------
        EquationError
            [question.no-value] if a name has no value.
        """
        arithmetic = self._arithmetic
        match expression:  # what occurs most stands first
            case Name(name):
                known = self._known.get(name)
                return self.name(name) if known is None else known
            case Product(left, right):
                return self(left, s) * self(right, s)
            case Sum(Number(value), Call("exp", argument)) if value == -1:
                return arithmetic.exp_minus_one(self(argument, s))
            case Sum(Number(value), Product(Number(sign), Call("exp", argument))) if (
                value == 1 and sign == -1
            ):
                return -arithmetic.exp_minus_one(self(argument, s))
            case Sum(left, right):
                return self(left, s) + self(right, s)
            case Quotient(left, right):
                return self(left, s) / self(right, s)
            case Number(value):
                return arithmetic.number(value)
            case Frequency():
                assert s is not None, "an expression in s was evaluated without s"
                return s
            case Pi():
                return arithmetic.pi()
            case Power(base, exponent):
                return arithmetic.power(self(base, s), self(exponent, s))
            case Call(function, argument):
                return arithmetic.function(function, self(argument, s))
            case PortElement(block, place):
                return self.ports[block].at(s).values[place]

    def set(self, name: str, number: Scalar) -> None:
        """Give a name a number: a step of a nested form, worked out before."""
        self._known[name] = number

    def name(self, name: str) -> Scalar:
        """The number behind a name; what it refers to is worked out first, without recursion."""
        known = self._known.get(name)
        if known is not None:
            return known
        expression = self._expression(name)
        if type(expression) is Number and name not in self._turned:  # as nearly every value is
            found = self._known[name] = self._arithmetic.number(expression.value)
            return found
        for item in in_order(name, self._expression, self._known):
            self._known[item] = self._number(item)
        return self._known[name]

    def _expression(self, name: str) -> Expression:
        value = self._values.get(name)
        if value is None or value.expression is None:
            raise no_value((name,))
        return value.expression

    def _number(self, name: str) -> Scalar:
        number = self(self._expression(name))
        if name in self._turned:
            return number * self._arithmetic.rotation(self.name(angle_name(name)))
        return number


def in_order(
    name: str, expression: Callable[[str], Expression | None], known: Collection[str]
) -> Iterator[str]:
    """The names that a name rests on and that are not known, each after what it rests on.

    `expression` gives the value behind a name, None where there is nothing to work out. The
    caller notes each name as known before it asks for the next. References may be
    thousands long (`R[k] = 2*R[k-1]`), so there is no recursion here.

    Raises
    ------
    EquationError
        [equations.evaluation] values refer to each other in a circle.
    """
    stack, opened = [name], set[str]()
    while stack:
        top = stack[-1]
        if top in known:
            stack.pop()
            continue
        value = expression(top)
        waiting = () if value is None else [item for item in names(value) if item not in known]
        if not waiting:
            yield stack.pop()
        elif top in opened:
            raise EquationError(
                Diagnostic(
                    code="equations.evaluation",
                    message=f"the value of {top} refers to itself in a circle",
                    hint="Give one of the values in the circle as a number.",
                )
            )
        else:
            opened.add(top)
            stack.extend(sorted(waiting))


def angle_name(source: str) -> str:
    """The name under which a source's angle, in degrees, is referred to."""
    return source + _ANGLE


_ANGLE = ".angle"


def no_value(names: tuple[str, ...]) -> EquationError:
    """The error for names that have no number."""
    code: Code = "question.no-value"
    listed = ", ".join(names)
    verb = "has" if len(names) == 1 else "have"
    return EquationError(
        Diagnostic(
            code=code,
            message=f"{listed} {verb} no value, and this question needs numbers",
            hint=f"Give a value in the file, or with --let {names[0]}=…; "
            "`transfer` answers with symbols.",
        )
    )


def polynomial_in_s(expression: Expression, evaluate: Evaluator) -> tuple[Scalar, ...] | None:
    """Coefficients of a polynomial in s by rising power, or None where it is not one."""
    match expression:
        case Number() | Name() | Pi():
            return (evaluate(expression),)
        case Frequency():
            return (0.0, 1.0)
        case Sum(left, right):
            first, second = polynomial_in_s(left, evaluate), polynomial_in_s(right, evaluate)
            return None if first is None or second is None else _added(first, second)
        case Product(left, right):
            first, second = polynomial_in_s(left, evaluate), polynomial_in_s(right, evaluate)
            return None if first is None or second is None else _multiplied(first, second)
        case Quotient(left, right):
            first, second = polynomial_in_s(left, evaluate), polynomial_in_s(right, evaluate)
            if first is None or second is None or len(second) > 1:
                return None
            return tuple(item / second[0] for item in first)
        case Power(base, exponent):
            first, second = polynomial_in_s(base, evaluate), polynomial_in_s(exponent, evaluate)
            if first is None or second is None or len(first) > 1 or len(second) > 1:
                return None
            return (evaluate(expression),)
        case Call(_, argument):
            inner = polynomial_in_s(argument, evaluate)
            return (evaluate(expression),) if inner is not None and len(inner) == 1 else None
        case PortElement():
            return None


def _added(first: tuple[Scalar, ...], second: tuple[Scalar, ...]) -> tuple[Scalar, ...]:
    if len(first) < len(second):
        first, second = second, first
    return tuple(
        item + second[place] if place < len(second) else item for place, item in enumerate(first)
    )


def _multiplied(first: tuple[Scalar, ...], second: tuple[Scalar, ...]) -> tuple[Scalar, ...]:
    total: list[Scalar] = [0.0] * (len(first) + len(second) - 1)
    for i, a in enumerate(first):
        for j, b in enumerate(second):
            total[i + j] = total[i + j] + a * b
    return tuple(total)
