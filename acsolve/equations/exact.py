"""The equations over exact polynomials: closed forms from shared minors."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from functools import reduce
from operator import add
from random import Random
from typing import TypeAlias

from acsolve.algebra.cofactor import MinorPlan, minors, plan_minors
from acsolve.algebra.ring import Polynomial, Ring, common_denominator
from acsolve.circuit.expression import (
    Expression,
    Frequency,
    Name,
    Number,
    PortElement,
    Power,
    Product,
    Quotient,
    S,
    Sum,
    depends_on_s,
    rebuild,
)
from acsolve.circuit.graph import natural_key
from acsolve.circuit.netlist import Netlist, with_values
from acsolve.circuit.value import Value
from acsolve.equations.evaluate import angle_name, in_order
from acsolve.equations.leaf import collect, monomial
from acsolve.equations.numeric import known_by_numbers
from acsolve.equations.system import Functional, System
from acsolve.errors import Diagnostic, EquationError


@dataclass(frozen=True, slots=True)
class Generator:
    """What a generator of the ring stands for: leaf ** (1/root)."""

    leaf: Expression
    root: int = 1

    @property
    def varies(self) -> bool:
        """Whether it depends on the complex frequency."""
        return depends_on_s(self.leaf)


@dataclass(frozen=True, slots=True)
class Basis:
    """A ring together with what its generators stand for."""

    ring: Ring
    generators: tuple[Generator, ...]

    @property
    def s_index(self) -> int | None:
        """The generator that is s or a root of it, or None where s does not occur."""
        return next((place for place, item in enumerate(self.generators) if item.leaf == S), None)

    @property
    def rational_in_s(self) -> bool:
        """Whether only whole powers of s occur and no other function of s."""
        return all(item.root == 1 and item.leaf == S for item in self.generators if item.varies)

    @property
    def free_names(self) -> tuple[str, ...]:
        """The free symbols, in the order of the ring."""
        found = {
            name: None
            for item in self.generators
            for name in sorted(_names(item.leaf), key=natural_key)
        }
        return tuple(found)


def _names(expression: Expression) -> frozenset[str]:
    from acsolve.circuit.expression import names

    return names(expression)


@dataclass(frozen=True, slots=True, kw_only=True)
class Symbols:
    """Which named values stay symbols.

    `symbolic` ignores every plain number; `keep` names those that stay symbols while the
    others take their values; by default only what has no value is a symbol.
    """

    symbolic: bool = False
    keep: frozenset[str] = frozenset()

    def stays(self, name: str, value: Value) -> bool:
        """Whether the value of that name stays a symbol."""
        if value.expression is None:
            return True
        if depends_on_s(value.expression):
            return False  # an impedance in s: a plain symbol would not vary with s
        return name in self.keep or (self.symbolic and not _names(value.expression))


def with_symbols(netlist: Netlist, symbols: Symbols) -> Netlist:
    """The netlist without the values that stay symbols: no zero among them opens or shorts."""
    kept = {
        name: replace(value, expression=None)
        for name, value in netlist.values()
        if value.expression is not None and symbols.stays(name, value)
    }
    return with_values(netlist, kept) if kept else netlist


def _division_by_zero(expression: Expression) -> EquationError:
    listed = ", ".join(sorted(_names(expression), key=natural_key)) or "a part"
    return EquationError(
        Diagnostic(
            code="equations.evaluation",
            message=f"the values of {listed} give a number that is not finite",
            hint="Look for a division by zero among these values.",
        )
    )


class Expander:
    """Replaces names by their values, down to symbols; each name is worked out once."""

    def __init__(self, values: Mapping[str, Value], symbols: Symbols) -> None:
        self._values = values
        self._symbols = symbols
        self._known: dict[str, Expression] = {}

    def __call__(self, expression: Expression) -> Expression:
        """The expression over free symbols, numbers, pi and s.

        Raises
        ------
        EquationError
            [equations.evaluation] the values make it divide by zero.
        """
        try:
            return rebuild(expression, self._name)
        except ZeroDivisionError as problem:
            raise _division_by_zero(expression) from problem

    def _name(self, item: Name) -> Expression:
        known = self._known.get(item.name)
        if known is not None:
            return known
        if self._value(item.name) is None:
            self._known[item.name] = item
            return item
        for name in in_order(item.name, self._value, self._known):
            value = self._value(name)
            self._known[name] = Name(name) if value is None else self(value)
        return self._known[item.name]

    def _value(self, name: str) -> Expression | None:
        """What a name stands for, None where it stays a symbol."""
        value = self._values.get(name)
        phasor = angle_name(name) in self._values  # complex: it stays a symbol
        if phasor or value is None or self._symbols.stays(name, value):
            return None
        return value.expression


@dataclass(frozen=True, slots=True)
class ExactSystem:
    """The equations as sparse rows of polynomials, each row scaled free of denominators."""

    basis: Basis
    rows: tuple[Mapping[int, Polynomial], ...]
    columns: int
    plan: MinorPlan

    def directions(
        self, wanted: frozenset[int], *, budget: int | None = None
    ) -> Mapping[int, Polynomial]:
        """The components of the null direction that are asked for; zeros are left out.

        Squares of roots are not replaced yet: factors that all components share still show.

        Raises OverBudgetError where more terms than `budget` would be held at once.
        """
        return minors(self.rows, wanted, self.plan, columns=self.columns, budget=budget)

    def coefficient_sum(self, functional: Functional) -> int:
        """The sum of the coefficients of an answer's part, without multiplying it out.

        The determinant with every generator at one, over whole numbers. Where all
        coefficients are one (resistors, inductors and capacitors, each its own symbol: the
        terms are the spanning trees) it is the number of terms.
        """
        from flint import fmpz_mat

        ones = [1] * max(1, len(self.basis.ring.names))
        return abs(int(fmpz_mat(self._square(functional, ones)).det()))

    def vanishes(self, functional: Functional) -> bool:
        """Whether an answer's part is zero, seen before any polynomial is multiplied.

        The determinant at a random point modulo a prime of 61 bits: "not zero" is certain,
        "zero" is wrong with a probability below degree / 2**61 (J. T. Schwartz, 1980).
        """
        from flint import nmod_mat

        random = Random(20)  # noqa: S311 - the same point on every run, no secret
        point = [random.randrange(1, _PRIME) for _ in self.basis.ring.names] or [1]
        return int(nmod_mat(self._square(functional, point), _PRIME).det()) == 0

    def _square(self, functional: Functional, point: Sequence[int]) -> list[list[int]]:
        """The matrix completed by one row, with numbers for the generators."""
        square = [[0] * self.columns for _ in range(self.columns)]
        for row, entries in zip(square, self.rows, strict=False):
            for column, entry in entries.items():
                row[column] = int(entry(*point))
        for column, factor in functional.items():
            square[-1][column] = factor
        return square


_PRIME = (1 << 61) - 1


def exact_system(system: System, expand: Expander, also: Sequence[Expression] = ()) -> ExactSystem:
    """The system over the smallest ring that holds its values, and those of `also`."""
    entries = [
        {column: expand(entry) for column, entry in law.entries.items()} for law in system.laws
    ]
    basis = _basis([*(entry for row in entries for entry in row.values()), *also])
    convert = _Converter(basis)
    rows = tuple(_cleared(convert, row) for row in entries)
    plan = plan_minors([sorted(row) for row in rows])
    return ExactSystem(basis, rows, len(system.unknowns), plan)


def apply(functional: Functional, directions: Mapping[int, Polynomial], ring: Ring) -> Polynomial:
    """The value of a linear function of the unknowns on the null direction."""
    parts = [
        directions[column] if factor == 1 else factor * directions[column]
        for column, factor in functional.items()
        if column in directions
    ]
    return reduce(add, parts) if parts else ring.constant(0)  # adding to 0 copies slowly


def _basis(entries: list[Expression]) -> Basis:
    roots: dict[Expression, int] = {}
    seen: set[int] = set()
    for entry in entries:
        collect(entry, roots, seen)
    leaves = sorted(roots, key=_leaf_key)
    names, squares = [], []
    for place, leaf in enumerate(leaves):
        names.append(f"g{place}")
        if isinstance(leaf, Number):
            squares.append((place, leaf.value.numerator))
    ring = Ring(tuple(names), tuple(squares))
    return Basis(ring, tuple(Generator(leaf, roots[leaf]) for leaf in leaves))


def _leaf_key(leaf: Expression) -> tuple[int, object]:
    """Order of the generators: s, symbols by name, numbers' roots, then functions."""
    match leaf:
        case Frequency():
            return (0, 0)
        case Name(name):
            return (1, natural_key(name))
        case Number(value):
            return (2, value)
        case PortElement(block):
            raise known_by_numbers(block)
        case _:
            return (3, repr(leaf))


#: Numerator and denominator; the denominator is None where it is one, as it mostly is.
_Pair: TypeAlias = tuple[Polynomial, Polynomial | None]


class _Converter:
    """Expressions to ratios of polynomials over one basis."""

    def __init__(self, basis: Basis) -> None:
        self.ring = basis.ring
        self._place = {item.leaf: place for place, item in enumerate(basis.generators)}
        self._roots = [item.root for item in basis.generators]
        self._plain = {
            item.leaf: (self.ring.generator(place), None)
            for place, item in enumerate(basis.generators)
            if item.root == 1
        }

    def __call__(self, expression: Expression) -> _Pair:
        match expression:
            case Name() | Frequency() if expression in self._plain:
                return self._plain[expression]
            case Number(value):
                return self._constant(value)
            case Sum(left, right):
                (a, b), (c, d) = self(left), self(right)
                if b is None and d is None:
                    return a + c, None
                return _times(a, d) + _times(c, b), _product(b, d)
            case Product(left, right):
                (a, b), (c, d) = self(left), self(right)
                return a * c, _product(b, d)
            case Quotient(left, right):
                (a, b), (c, d) = self(left), self(right)
                if c == 0:
                    raise _division_by_zero(expression)
                return _times(a, d), _product(b, c)
            case Power(base, Number(exponent)) if exponent.denominator == 1:
                return self._whole_power(base, exponent.numerator)
            case _:
                return self._monomial(expression)

    def _constant(self, value: Fraction) -> _Pair:
        constant = self.ring.constant
        bottom = None if value.denominator == 1 else constant(value.denominator)
        return constant(value.numerator), bottom

    def _whole_power(self, base: Expression, exponent: int) -> _Pair:
        top, bottom = self(base)
        bottom = self.ring.constant(1) if bottom is None else bottom
        if exponent < 0:
            if top == 0:
                raise _division_by_zero(base)
            top, bottom = bottom, top
        return top ** abs(exponent), bottom ** abs(exponent)

    def _monomial(self, expression: Expression) -> _Pair:
        item = monomial(expression)
        assert item is not None, "a sum reached the monomial conversion"
        top, bottom = self._constant(item.coefficient)
        for leaf, exponent in item.powers.items():
            place = self._place[leaf]
            steps = exponent * self._roots[place]
            assert steps.denominator == 1, "a root finer than its generator"
            factor = self.ring.generator(place) ** abs(steps.numerator)
            if steps > 0:
                top = top * factor
            else:
                bottom = _product(bottom, factor)
        return top, bottom


def ratio_in(basis: Basis, expression: Expression) -> tuple[Polynomial, Polynomial]:
    """An expanded expression, whose leaves the basis holds, as numerator and denominator."""
    top, bottom = _Converter(basis)(expression)
    return top, basis.ring.constant(1) if bottom is None else bottom


def _times(polynomial: Polynomial, factor: Polynomial | None) -> Polynomial:
    return polynomial if factor is None else polynomial * factor


def _product(first: Polynomial | None, second: Polynomial | None) -> Polynomial | None:
    if first is None:
        return second
    return first if second is None else first * second


def _cleared(convert: _Converter, row: Mapping[int, Expression]) -> dict[int, Polynomial]:
    """A row without denominators; a scaled row leaves the null direction as it is."""
    ratios = {column: convert(entry) for column, entry in row.items()}
    bottoms = [bottom for _, bottom in ratios.values() if bottom is not None]
    if not bottoms:
        return {column: top for column, (top, _) in ratios.items() if top != 0}
    common = common_denominator(convert.ring, bottoms)
    cleared = {
        column: top * (common if bottom is None else common / bottom)
        for column, (top, bottom) in ratios.items()
    }
    return {column: value for column, value in cleared.items() if value != 0}
