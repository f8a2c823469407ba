"""The value of a part that puts a cutoff at a wanted frequency, in closed form."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from math import isclose, pi, sqrt

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm, evaluate_polynomial, generator_numbers
from acsolve.analyses.cutoff_formula import primitive_equation
from acsolve.analyses.hidden import of_polynomial
from acsolve.analyses.level_ring import sign_for_positive
from acsolve.analyses.question import Ask
from acsolve.analyses.radicals import radicals, values
from acsolve.analyses.shape import natural_frequency
from acsolve.analyses.transfer import closed_form
from acsolve.analyses.value_equation import PartValue, WantedCutoff, condition_for, place_of
from acsolve.circuit.expression import Name
from acsolve.circuit.netlist import Netlist
from acsolve.equations.evaluate import FloatArithmetic
from acsolve.equations.exact import Basis, Generator, Symbols
from acsolve.equations.grouping import Writer
from acsolve.equations.naming import safe_names
from acsolve.equations.write import Spelling
from acsolve.errors import AcsolveError

_AGREES = 1e-9
_LARGEST_FORMULA = 2_000  # terms
_LARGEST_EQUATION = 300_000  # terms that products of squares may come to, some seconds
_LONGEST = 4_000  # characters of a closed form
_LONGEST_CONDITION = 80
_WANTED = ("w", "w_c", "w_cut", "w_wanted")  # names for 2·pi·f in closed forms, first free one


@dataclass(frozen=True, slots=True)
class _Root:
    """A closed form: of the value, or of its square where `squared`."""

    text: str
    condition: str | None
    branch: int
    squared: bool


@dataclass(frozen=True, slots=True, eq=False)
class WrittenValue:
    """Closed forms of the value with the equation they solve; None where there are none."""

    form: ClosedForm
    coefficients: tuple[Polynomial, ...]
    formulas: tuple[_Root, ...] | None
    omega: str
    spelling: Spelling

    def named(self, item: PartValue, hertz: Fraction) -> PartValue:
        """A number with the closed form that agrees with it."""
        for root in self.formulas or ():
            value = self._value(root, 2 * pi * float(hertz))
            if value is not None and item.value and isclose(value, item.value, rel_tol=_AGREES):
                return replace(item, closed_form=root.text)
        return item

    def _value(self, root: _Root, omega: float) -> float | None:
        arithmetic = FloatArithmetic()
        every = self.form.basis.ring.constant(1)
        for place in range(len(self.form.basis.generators)):
            if any(part != 0 and part.degrees()[place] > 0 for part in self.coefficients):
                every = every * self.form.basis.ring.generator(place)
        whole = of_polynomial(self.form, every)
        try:
            evaluate = whole.evaluator(arithmetic, {self.omega: omega})
            points = generator_numbers(whole, evaluate, arithmetic)
            numbers = [evaluate_polynomial(part, points, arithmetic) for part in self.coefficients]
        except (AcsolveError, ArithmeticError):
            return None
        found = values(numbers)[root.branch]
        if found is None or abs(found.imag) > _AGREES * abs(found) or found.real <= 0:
            return None
        return float(sqrt(found.real) if root.squared else found.real)


def written_value(
    netlist: Netlist,
    ask: Ask,
    name: str,
    wanted: WantedCutoff,
    numeric: ClosedForm,
) -> WrittenValue:
    """The closed forms over all parts where that is small, else over those without a value."""
    form = numeric
    try:
        form = closed_form(netlist, ask, Symbols(symbolic=True), budget=_LARGEST_FORMULA)
    except AcsolveError as error:
        if error.code != "equations.budget":
            raise
    if name not in form.symbols or _most_terms(form) > _LARGEST_EQUATION:
        form = numeric
    omega = next(item for item in _WANTED if item not in form.values and item not in form.symbols)
    spelling = Spelling(safe_names((*form.symbols, omega)), "**")
    found = condition_for(form, name, wanted.level, wanted.reference)[1]
    if found is None:
        return WrittenValue(form, (), None, omega, spelling)
    turned = _over_omega(*found, omega)
    coefficients, squared = _by_value(turned, name)
    equation = primitive_equation(turned, coefficients)
    formulas: tuple[_Root, ...] | None = None
    if len(equation.coefficients) <= wanted.degree + 1:
        formulas = _formulas(turned, equation.coefficients, squared, spelling)
    return WrittenValue(turned, equation.coefficients, formulas, omega, spelling)


def _most_terms(form: ClosedForm) -> int:
    """A bound on the terms of |D|² and |N|² times the squared gain at one end, as products."""
    top, bottom = form.coefficients()
    ends = [max(len(part[0]), len(part[-1])) for part in (top, bottom)]
    sizes = [sum(map(len, part)) for part in (top, bottom)]
    return max(sizes[1] ** 2 * ends[0] ** 2, sizes[0] ** 2 * ends[1] ** 2)


def _over_omega(form: ClosedForm, polynomial: Polynomial, omega: str) -> ClosedForm:
    """The polynomial in x = ω² as one in ω, a symbol of that name."""
    place = form.basis.s_index
    if place is None:
        return replace(form, numerator=polynomial, origin=None)
    generators = list(form.basis.generators)
    generators[place] = Generator(Name(omega))
    terms = {
        (*key[:place], 2 * int(key[place]), *key[place + 1 :]): value
        for key, value in polynomial.terms()
    }
    basis = Basis(form.basis.ring, tuple(generators))
    return replace(form, basis=basis, numerator=basis.ring.context.from_dict(terms), origin=None)


def _by_value(form: ClosedForm, name: str) -> tuple[list[Polynomial], bool]:
    """Coefficients by rising power of the value, or of its square where only even ones occur."""
    place = place_of(form.basis, name)
    assert place is not None, "the form depends on the value"
    ring, root = form.basis.ring, form.basis.generators[place].root
    powers = ring.by_power(form.numerator, place)
    lowest = min(powers)
    steps = 2 * root if all((power - lowest) % (2 * root) == 0 for power in powers) else 1
    squared = steps == 2 * root
    if root > 1 and not squared:  # a root of the value stays: no polynomial in it
        return [ring.constant(0)] * 99, False
    zero = ring.constant(0)
    highest = max(powers)
    return [powers.get(power, zero) for power in range(lowest, highest + 1, steps)], squared


def _formulas(
    form: ClosedForm, poly: Sequence[Polynomial], squared: bool, spelling: Spelling
) -> tuple[_Root, ...] | None:
    signs = [sign_for_positive(form, value) for value in poly]
    inside = poly[1] * poly[1] - 4 * poly[0] * poly[2] if len(poly) == 3 else poly[-1]
    certain = len(poly) == 2 or sign_for_positive(form, inside) > 0 or _is_square(inside)
    if len(poly) < 2 or all(sign > 0 for sign in signs) or all(sign < 0 for sign in signs):
        return ()
    write = Writer(form.basis, spelling)
    found = []
    for item in radicals(write, poly):
        text = item.text
        if squared:
            first = natural_frequency(write, [-poly[0], poly[0], poly[-1]])
            text = str(first) if len(poly) == 2 else f"sqrt({text})"
        condition = _positive(signs, item.branch, text, real=certain)
        if condition != _NEVER:
            found.append(_Root(text, condition, item.branch, squared))
    return None if any(len(item.text) > _LONGEST for item in found) else tuple(found)


_NEVER = "never"


def _is_square(polynomial: Polynomial) -> bool:
    from flint.utils.flint_exceptions import DomainError

    try:
        polynomial.sqrt()
    except DomainError:
        return False
    return True


def _positive(signs: Sequence[int], branch: int, text: str, *, real: bool) -> str | None:
    """When a root is real and positive; None where it always is."""
    text = text if len(text) <= _LONGEST_CONDITION else "the value"
    lowest, highest = signs[0], signs[-1]
    if len(signs) == 2:
        return None if lowest * highest < 0 else f"{text} > 0"
    if len(signs) == 3 and lowest * highest < 0:
        if highest < 0:
            branch = 1 - branch
        return None if branch == 1 else _NEVER
    if real and len(signs) == 3:
        return f"{text} > 0"
    return f"{text} is real and positive"
