"""The value of a part that puts a cutoff at a wanted frequency."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from math import isclose, pi, sqrt

from acsolve.algebra.ball import precision
from acsolve.algebra.crossing import Crossings
from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm, evaluate_polynomial, generator_numbers
from acsolve.analyses.cutoff_formula import primitive_equation
from acsolve.analyses.hidden import of_polynomial
from acsolve.analyses.level_ring import sign_for_positive
from acsolve.analyses.magnitude import Magnitude, ReferenceName, magnitude
from acsolve.analyses.question import Ask
from acsolve.analyses.radicals import radicals, values
from acsolve.analyses.shape import natural_frequency
from acsolve.analyses.sweep import response
from acsolve.analyses.transfer import closed_form
from acsolve.analyses.value_equation import WantedCutoff, band_pass_peak, condition_for
from acsolve.circuit.expression import PI, Name, Number, S
from acsolve.circuit.netlist import Netlist, with_values
from acsolve.circuit.unit import Dimension
from acsolve.circuit.value import Value
from acsolve.codes import Code
from acsolve.equations.evaluate import FloatArithmetic
from acsolve.equations.exact import Basis, Generator, Symbols
from acsolve.equations.grouping import Writer
from acsolve.equations.naming import safe_names
from acsolve.equations.write import Spelling
from acsolve.errors import AcsolveError, AnalysisError, Diagnostic

_AGREES = 1e-9
_LARGEST_FORMULA = 2_000  # terms
_LONGEST = 4_000  # characters of a closed form
_LONGEST_CONDITION = 80
_WANTED = ("w", "w_c", "w_cut", "w_wanted")  # names for 2·pi·f in closed forms, first free one


@dataclass(frozen=True, slots=True, kw_only=True)
class PartValue:
    """One value, in SI units, that answers.

    `closed_form` gives it over the other parts and the wanted angular frequency, for SymPy;
    `condition` says when that is real and positive, None where it always is. `value` is None
    over symbols. `gain_error` is how far the gain that the numeric engine finds with this
    value is from the wanted one, relative.
    """

    value: float | None
    closed_form: str | None
    condition: str | None = None
    gain_error: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class ValueAnswer:
    """All positive values of one part that put the gain at a level, at one frequency.

    `complete` is True where it is proven that no positive value is missing. `omega_name` is
    what closed forms call the wanted angular frequency, `symbols` maps safe names to names.
    """

    name: str
    dimension: Dimension | None
    hertz: float
    level_db: float
    reference: ReferenceName
    values: tuple[PartValue, ...]
    complete: bool
    omega_name: str
    symbols: tuple[tuple[str, str], ...]
    remarks: tuple[str, ...] = ()


def value_for(
    netlist: Netlist,
    ask: Ask,
    name: str,
    wanted: WantedCutoff,
    *,
    dimension: Dimension | None = None,
) -> ValueAnswer:
    """The values of a part with which |H| is a level below its reference at a frequency.

    Parameters
    ----------
    name : a part's value, an attribute or a quantity; its own value is not looked at.
    dimension : of the value, for the answer.

    Raises
    ------
    AnalysisError
        [question.no-reference] the reference is none, or has no closed form;
        [option.value] the answer does not depend on the value;
        [equations.not-rational] the answer is no ratio of polynomials;
        [question.no-value] other parts have no value and there is no closed form.

    Notes
    -----
    |N|²·reference - level·|D|² is a polynomial in the value. With numbers its positive roots
    are isolated, exactly: 2·pi·f makes it one over Q(pi), where pi is as good as a symbol.
    """
    form = closed_form(netlist, ask, Symbols(keep=frozenset({name})))
    if not form.rational:
        raise _refuse(
            "equations.not-rational",
            "the response is not a ratio of polynomials in s, so no value can be solved for",
            "Vary the value with --over and look for its cutoffs.",
        )
    if name not in form.symbols:
        raise _refuse(
            "option.value",
            f"the answer does not depend on {name}",
            "Name a part that it depends on"
            + (f": {', '.join(form.symbols[:6])}." if form.symbols else "."),
        )
    hertz, reference = wanted.hertz, wanted.reference
    at, polynomials = condition_for(form, name, wanted.level, reference)
    asked: ReferenceName | Fraction = reference if isinstance(reference, Fraction) else at
    written = _written(netlist, ask, name, replace(wanted, reference=asked), form)
    answer = ValueAnswer(
        name=name,
        dimension=dimension,
        hertz=float(hertz),
        level_db=wanted.level.db,
        reference=at,
        values=(),
        complete=True,
        omega_name=written.omega,
        symbols=tuple(
            (safe, plain) for plain, safe in written.spelling.names.items() if safe != plain
        ),
    )
    others = [item for item in form.symbols if item != name]
    if others:
        return _over_symbols(answer, written, others)
    found = _roots(*polynomials, name, hertz)
    listed = [_numeric(answer, netlist, ask, item.value, asked) for item in found.found]
    named = tuple(written.named(item, hertz) for item in listed)
    remarks = () if named or not found.complete else (_none(name, hertz),)
    return replace(answer, values=named, complete=found.complete, remarks=remarks)


def _none(name: str, hertz: Fraction) -> str:
    return f"No positive value of {name} puts the gain at this level at {float(hertz):g} Hz."


def _over_symbols(answer: ValueAnswer, written: _Written, others: Sequence[str]) -> ValueAnswer:
    if written.formulas is None:
        listed = ", ".join(others[:6])
        raise _refuse(
            "question.no-value",
            f"{answer.name} has no closed form of reasonable size here, and {listed} "
            f"{'has' if len(others) == 1 else 'have'} no value",
            "Give them values, in the file or with --let, or ask for more with --degree 4.",
        )
    remarks = () if written.formulas else ("No positive value puts the gain at this level.",)
    found = tuple(
        PartValue(value=None, closed_form=item.text, condition=item.condition)
        for item in written.formulas
    )
    return replace(answer, values=found, remarks=remarks)


# ------------------------------------------------------------ numbers


def _roots(form: ClosedForm, polynomial: Polynomial, name: str, hertz: Fraction) -> Crossings:
    """The positive roots in the value, with x = (2·pi·f)² put in and pi left as it is."""
    basis = form.basis
    frequency, wanted = basis.s_index, _place(basis, name)
    assert wanted is not None, "the form depends on the value"
    circle = next((at for at, item in enumerate(basis.generators) if item.leaf == PI), None)
    ring = basis.ring
    if frequency is None:
        return _isolated(form, polynomial, wanted)
    x = (2 * hertz) ** 2
    highest = int(polynomial.degrees()[frequency])
    target = frequency if circle is None else circle
    terms: dict[tuple[int, ...], int] = {}
    for exponents, coefficient in polynomial.terms():
        power = int(exponents[frequency])
        key = list(map(int, exponents))
        key[frequency] = 0
        key[target] += 2 * power * (1 if circle is None else basis.generators[target].root)
        factor = x.numerator**power * x.denominator ** (highest - power)
        place = tuple(key)
        terms[place] = terms.get(place, 0) + int(coefficient) * factor
    there = ring.reduced(ring.context.from_dict(terms))
    return _isolated(form, there, wanted)


def _isolated(form: ClosedForm, polynomial: Polynomial, wanted: int) -> Crossings:
    """The positive roots in one generator: it stands where s does, so that s is the value."""
    generators = list(form.basis.generators)
    if form.basis.s_index is not None:
        generators[form.basis.s_index] = Generator(PI)
    root = generators[wanted].root
    generators[wanted] = Generator(S)
    basis = Basis(form.basis.ring, tuple(generators))
    one = basis.ring.constant(1)
    turned = replace(of_polynomial(form, polynomial), basis=basis)
    found = Magnitude(turned, polynomial, one).crossings_at((basis.ring.constant(0), one))
    if root == 1:
        return found
    powers = tuple(replace(item, value=item.value**root) for item in found.found)
    return Crossings(powers, found.complete)


def _place(basis: Basis, name: str) -> int | None:
    places = (at for at, item in enumerate(basis.generators) if item.leaf == Name(name))
    return next(places, None)


def _numeric(
    answer: ValueAnswer,
    netlist: Netlist,
    ask: Ask,
    value: Fraction,
    reference: ReferenceName | Fraction,
) -> PartValue:
    """One value, put back into the circuit and solved by the numeric engine."""
    valued = with_values(netlist, {answer.name: Value(expression=Number(value))})
    gain = abs(complex(response(valued, ask, [answer.hertz])[0]))
    counted = _gain_of(closed_form(valued, ask), reference)
    wanted = counted * 10 ** (answer.level_db / 20)
    error = abs(gain / wanted - 1)
    if error > _AGREES and not isclose(gain, wanted, rel_tol=1e-6):
        raise AnalysisError(
            Diagnostic(
                code="equations.check-failed",
                message=f"with {answer.name} = {float(value):.6g} the gain is {gain:.6g}, and "
                f"{wanted:.6g} was wanted",
                hint="This is a defect of acsolve; please report the circuit.",
            )
        )
    return PartValue(value=float(value), closed_form=None, gain_error=error)


def _gain_of(form: ClosedForm, reference: ReferenceName | Fraction) -> float:
    if isinstance(reference, Fraction):
        return abs(float(reference))
    size = magnitude(form)
    pair = band_pass_peak(form) if reference == "peak" else None
    if pair is None:
        pair = size.at_zero() if reference == "dc" else size.at_infinity()
    assert pair is not None, "the reference was found finite"
    with precision(256):
        return sqrt(float(size.ball(pair).mid()))


# ------------------------------------------------------------ closed forms


@dataclass(frozen=True, slots=True)
class _Root:
    """A closed form: of the value, or of its square where `squared`."""

    text: str
    condition: str | None
    branch: int
    squared: bool


@dataclass(frozen=True, slots=True, eq=False)
class _Written:
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


def _written(
    netlist: Netlist,
    ask: Ask,
    name: str,
    wanted: WantedCutoff,
    numeric: ClosedForm,
) -> _Written:
    """The closed forms over all parts where that is small, else over those without a value."""
    form = numeric
    try:
        form = closed_form(netlist, ask, Symbols(symbolic=True), budget=_LARGEST_FORMULA)
    except AcsolveError as error:
        if error.code != "equations.budget":
            raise
    if name not in form.symbols:
        form = numeric
    omega = next(item for item in _WANTED if item not in form.values and item not in form.symbols)
    _, (wide, polynomial) = condition_for(form, name, wanted.level, wanted.reference)
    turned = _over_omega(wide, polynomial, omega)
    spelling = Spelling(safe_names((*form.symbols, omega)), "**")
    coefficients, squared = _by_value(turned, name)
    equation = primitive_equation(turned, coefficients)
    formulas: tuple[_Root, ...] | None = None
    if len(equation.coefficients) <= wanted.degree + 1:
        formulas = _formulas(turned, equation.coefficients, squared, spelling)
    return _Written(turned, equation.coefficients, formulas, omega, spelling)


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
    place = _place(form.basis, name)
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


def _refuse(code: Code, message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
