"""The equations over numbers: each entry as a function of s, for vectors or for balls.

Nearly every entry is G + s·C, a polynomial in s; lines and constant-phase parts bring other
functions. Equal entries are kept once, so that a ladder of equal sections evaluates a handful
of vectors, and entries without s stay scalars.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import accumulate
from math import isfinite
from operator import add
from typing import Any, Protocol, TypeAlias

import numpy as np

from acsolve.algebra.scaled import Scaled, Vector
from acsolve.circuit.expression import (
    MINUS_ONE,
    ONE,
    Expression,
    Name,
    PortElement,
    Product,
    Quotient,
    S,
    Sum,
)
from acsolve.circuit.netlist import Netlist, Part, bindings
from acsolve.equations.evaluate import (
    BallArithmetic,
    Evaluator,
    FloatArithmetic,
    Scalar,
    polynomial_in_s,
)
from acsolve.equations.slope import slope
from acsolve.equations.system import Functional, System
from acsolve.errors import Diagnostic, EquationError

Element: TypeAlias = Any  # a number, a vector over the points, or a ball


@dataclass(frozen=True, slots=True)
class PolynomialEntry:
    """An entry by its coefficients, by rising power of s."""

    coefficients: tuple[Scalar, ...]

    def at(self, s: Element) -> Element:
        """The entry at s; a scalar where it does not depend on s."""
        return _horner(self.coefficients, s)

    def slope(self, s: Element) -> Element | None:
        """The derivative by s, or None where it is zero."""
        if len(self.coefficients) < 2:
            return None
        return _horner([power * item for power, item in enumerate(self.coefficients) if power], s)


def _horner(coefficients: Sequence[Scalar], s: Element) -> Element:
    if len(coefficients) == 2:  # as nearly every entry with s in it
        low, high = coefficients
        return high * s + low if _nonzero(low) else high * s
    total = coefficients[-1]
    for item in coefficients[-2::-1]:
        total = total * s + item if _nonzero(item) else total * s
    return total


def _nonzero(item: Scalar) -> bool:
    return not (isinstance(item, float) and item == 0.0)


@dataclass(frozen=True, slots=True)
class FunctionEntry:
    """An entry that is another function of s, with its derivative."""

    value: Expression
    derivative: Expression
    evaluate: Evaluator

    def at(self, s: Element) -> Element:
        """The entry at s."""
        return self.evaluate(self.value, s)

    def slope(self, s: Element) -> Element | None:
        """The derivative by s."""
        return self.evaluate(self.derivative, s)


class TwoPort(Protocol):
    """A two-port that is known by its numbers: a row of copies."""

    def at(self, s: Element) -> Hybrid:
        """Its hybrid elements at s."""


@dataclass(frozen=True, slots=True, eq=False)
class Hybrid:
    """The hybrid elements of a two-port at some points, by name, with their derivatives by s.

    values, slopes : over doubles with powers of two, shape (points,); or balls.
    rough : their relative error in doubles.
    """

    values: Mapping[str, Element]
    slopes: Mapping[str, Element]
    rough: Element = 0.0


@dataclass(frozen=True, slots=True)
class ElementEntry:
    """An entry that is an element of a two-port given by numbers."""

    place: str
    port: TwoPort

    def at(self, s: Element) -> Element:
        """The element at s, zero below a double's range."""
        return _plain(self.port.at(s).values[self.place])

    def slope(self, s: Element) -> Element:
        """Its derivative."""
        return _plain(self.port.at(s).slopes[self.place])

    def scaled(self, s: Vector) -> tuple[Element, Element]:
        """The element and its derivative with their powers of two."""
        found = self.port.at(s)
        return found.values[self.place], found.slopes[self.place]

    def rough(self, s: Vector) -> Element:
        """Its relative error, shape (points,)."""
        return self.port.at(s).rough


def _plain(value: Scaled | Element) -> Element:
    return value.plain() if isinstance(value, Scaled) else value


Entry = PolynomialEntry | FunctionEntry | ElementEntry


@dataclass(frozen=True, slots=True, eq=False)
class Numbers:
    """A square system A(s)·x = b as numbers: the circuit's laws, then "driven = 1".

    Place k of the pattern is (rows[k], columns[k]); its element is `distinct[which[k]]`.
    Row i has the places starts[i] to starts[i + 1] - 1.
    The right-hand side is 1 in the last row and 0 elsewhere.
    """

    size: int
    rows: tuple[int, ...]
    columns: tuple[int, ...]
    distinct: tuple[Entry, ...]
    which: tuple[int, ...]
    starts: tuple[int, ...]

    def at(self, s: Element) -> list[Element]:
        """The elements at s, by place; equal ones are one object."""
        values = [entry.at(s) for entry in self.distinct]
        return [values[item] for item in self.which]

    def table(self, s: Vector) -> Vector:
        """The elements at a few s, shape (places, points): lines in s all at once."""
        found = np.empty((len(self.distinct), len(s)), dtype=complex)
        lines, coefficients = [], []
        for at, entry in enumerate(self.distinct):
            if isinstance(entry, PolynomialEntry) and len(entry.coefficients) <= 2:
                lines.append(at)
                coefficients.append((*entry.coefficients, 0.0)[:2])
            else:
                found[at] = entry.at(s)
        if lines:
            low, high = np.array(coefficients).T[:, :, None]
            found[lines] = low + high * s
        return found[list(self.which)]

    def slopes(self, s: Element) -> list[Element | None]:
        """The derivatives by s, by place; None where zero."""
        values = [entry.slope(s) for entry in self.distinct]
        return [values[item] for item in self.which]

    def scaled(self, s: Vector) -> tuple[list[Element], list[Element | None]]:
        """Elements and derivatives by place, with powers of two where these may matter."""
        pairs = [
            entry.scaled(s) if isinstance(entry, ElementEntry) else (entry.at(s), entry.slope(s))
            for entry in self.distinct
        ]
        return [pairs[item][0] for item in self.which], [pairs[item][1] for item in self.which]


def numbers(
    system: System,
    driven: Functional,
    evaluate: Evaluator,
    *,
    places: Sequence[tuple[int, int]] | None = None,
) -> Numbers:
    """The square system that a question solves, as numbers.

    Parameters
    ----------
    system : n-1 laws in n unknowns.
    driven : what is set to 1 (the denominator of the ratio asked for).
    evaluate : over floats or balls.
    places : the pattern to keep to; None leaves out what is zero at every s.

    Raises
    ------
    EquationError
        [question.no-value] a value is a symbol; [equations.evaluation] one is not finite.

    """
    table = _Table(exact=places is not None)
    read = _Reader(evaluate)
    kept = None if places is None else set(places)
    for row, law in enumerate(system.laws):
        for column, expression in law.entries.items():
            if kept is None or (row, column) in kept:
                table.put(row, column, _entry(expression, read, exact=table.exact))
    for column, factor in driven.items():
        table.put(len(system.laws), column, (float(factor),))
    return table.closed(len(system.unknowns))


class _Table:
    """Entries being gathered; equal ones once, save balls, which do not compare."""

    def __init__(self, *, exact: bool) -> None:
        self.exact = exact
        self.places: list[tuple[int, int, int]] = []
        self.distinct: list[Entry] = []
        self.known: dict[Any, int] = {}

    def put(self, row: int, column: int, entry: Entry | tuple[Scalar, ...]) -> None:
        """Take an entry, or the coefficients of one; none of these, and nothing stands there."""
        if not entry:
            return
        new = len(self.distinct)
        which = new if self.exact else self.known.setdefault(entry, new)
        if which == new:
            self.distinct.append(PolynomialEntry(entry) if isinstance(entry, tuple) else entry)
        self.places.append((row, column, which))

    def closed(self, size: int) -> Numbers:
        rows, columns, which = zip(*self.places, strict=True)
        counts = Counter(rows)
        starts = tuple(accumulate((counts[row] for row in range(size)), initial=0))
        return Numbers(size, rows, columns, tuple(self.distinct), which, starts)


_UNREAD = object()


class _Reader:
    """Coefficients of expressions in s; terms that entries share are read once."""

    def __init__(self, evaluate: Evaluator) -> None:
        self.evaluate = evaluate
        self.one = evaluate(ONE)
        self.known: dict[int, tuple[Scalar, ...] | object | None] = {}

    def __call__(self, expression: Expression) -> tuple[Scalar, ...] | None:
        if type(expression) is Sum:  # each stands in one place only
            return _added(self(expression.left), self(expression.right))
        key = id(expression)  # the system holds its expressions as long as this is used
        found = self.known.get(key, _UNREAD)
        if found is _UNREAD:
            found = self.known[key] = self._read(expression)
        return found  # type: ignore[return-value]

    def _read(self, expression: Any) -> tuple[Scalar, ...] | None:
        kind = type(expression)  # these three are nearly all there is
        if kind is Product and expression.left is MINUS_ONE:
            inner = self(expression.right)
            return None if inner is None else tuple([-item for item in inner])
        if kind is Product and expression.left is S and type(expression.right) is Name:
            return 0.0, self.evaluate.name(expression.right.name)
        if kind is Quotient and expression.left is ONE and type(expression.right) is Name:
            return (self.one / self.evaluate.name(expression.right.name),)
        return polynomial_in_s(expression, self.evaluate)


def _added(
    first: tuple[Scalar, ...] | None, second: tuple[Scalar, ...] | None
) -> tuple[Scalar, ...] | None:
    if first is None or second is None:
        return None
    if len(first) < len(second):
        first, second = second, first
    return (*map(add, first, second), *first[len(second) :])


def _entry(
    expression: Expression, read: _Reader, *, exact: bool
) -> FunctionEntry | ElementEntry | tuple[Scalar, ...]:
    """The entry, or its coefficients; none where floats say that it is zero at every s."""
    if isinstance(expression, PortElement):
        port = read.evaluate.ports.get(expression.block)
        if port is None:
            raise known_by_numbers(expression.block)
        return ElementEntry(expression.place, port)
    try:
        coefficients = read(expression)
    except (ZeroDivisionError, OverflowError) as problem:
        raise _not_finite(expression) from problem
    if coefficients is None:
        return FunctionEntry(expression, slope(expression), read.evaluate)
    if exact:
        return coefficients
    while coefficients and coefficients[-1] == 0:
        coefficients = coefficients[:-1]
    for item in coefficients:
        if not isfinite(abs(item)):
            raise _not_finite(expression)
    return coefficients


def entry_of(expression: Expression, evaluate: Evaluator) -> Entry | None:
    """One entry over floats, None where it is zero at every s.

    Raises
    ------
    EquationError
        [equations.evaluation] a value is not finite; [equations.not-rational] it is an element
        of a two-port that is not known.
    """
    found = _entry(expression, _Reader(evaluate), exact=False)
    if not isinstance(found, tuple):
        return found
    return PolynomialEntry(found) if found else None


def known_by_numbers(block: str) -> EquationError:
    """The error where an answer needs more of a part than numbers at frequencies."""
    return EquationError(
        Diagnostic(
            code="equations.not-rational",
            message=f"{block} is known by measured numbers only, and this answer needs a formula",
            hint="Ask for numbers over frequency: a sweep, or a two-port, with --band or --at.",
            where=block,
        )
    )


def _not_finite(expression: Expression) -> EquationError:
    from acsolve.circuit.expression import names

    listed = ", ".join(sorted(names(expression))) or "a part"
    return EquationError(
        Diagnostic(
            code="equations.evaluation",
            message=f"the values of {listed} give a number that is not finite",
            hint="Look for a division by zero among these values.",
        )
    )


def float_values(
    netlist: Netlist,
    overrides: Mapping[str, Scalar] | None = None,
    *,
    ports: Mapping[str, TwoPort] | None = None,
) -> Evaluator:
    """An evaluator of the circuit's values in double precision, sources as phasors."""
    return Evaluator(bindings(netlist), FloatArithmetic(), overrides=overrides, ports=ports)


def ball_values(netlist: Netlist, *, ports: Mapping[str, TwoPort] | None = None) -> Evaluator:
    """The same in balls, at the working precision of the moment."""
    return Evaluator(bindings(netlist), BallArithmetic(), ports=ports)


def takes_branch(evaluate: Evaluator, part: Part) -> bool:
    """Whether a resistor needs a branch current: where its conductance is not finite."""
    resistance = evaluate.name(part.name)
    try:
        return not isfinite(abs(1 / resistance))
    except ZeroDivisionError:
        return True
