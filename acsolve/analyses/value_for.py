"""The value of a part that puts a cutoff at a wanted frequency."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from fractions import Fraction
from math import isclose, sqrt

from acsolve.algebra.ball import precision
from acsolve.algebra.crossing import Crossings
from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import no_reference
from acsolve.analyses.hidden import of_polynomial
from acsolve.analyses.magnitude import Magnitude, ReferenceName, magnitude
from acsolve.analyses.question import Ask
from acsolve.analyses.sweep import response
from acsolve.analyses.transfer import closed_form
from acsolve.analyses.value_equation import (
    PartValue,
    WantedCutoff,
    band_pass_peak,
    condition_for,
    place_of,
)
from acsolve.analyses.value_formula import WrittenValue, written_value
from acsolve.analyses.value_peak import peak_equations, peak_gain
from acsolve.circuit.expression import PI, Number, S
from acsolve.circuit.netlist import Netlist, with_values
from acsolve.circuit.unit import Dimension
from acsolve.circuit.value import Value
from acsolve.codes import Code
from acsolve.equations.exact import Basis, Generator, Symbols
from acsolve.errors import AnalysisError, Diagnostic

_AGREES = 1e-9


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
        [question.no-reference] the reference is none, or has no closed form over symbols;
        [equations.budget] the equation for a peak as reference is too large;
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
    others = [item for item in form.symbols if item != name]
    if polynomials is None and others:
        raise no_reference(f"the gain at the peak is no closed form of {name}")
    asked: ReferenceName | Fraction = reference if isinstance(reference, Fraction) else at
    written = written_value(netlist, ask, name, replace(wanted, reference=asked), form)
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
    if others:
        return _over_symbols(answer, written, others)
    if polynomials is None:
        return _from_a_peak(answer, netlist, ask, form, wanted)
    found = _roots(*polynomials, name, hertz)
    listed = [_numeric(answer, netlist, ask, item.value, asked) for item in found.found]
    named = tuple(written.named(item, hertz) for item in listed)
    remarks = () if named or not found.complete else (_none(name, hertz),)
    return replace(answer, values=named, complete=found.complete, remarks=remarks)


def _from_a_peak(
    answer: ValueAnswer, netlist: Netlist, ask: Ask, form: ClosedForm, wanted: WantedCutoff
) -> ValueAnswer:
    """The values with which the level below the peak is met: candidates, each put back."""
    place = place_of(form.basis, answer.name)
    assert place is not None, "the form depends on the value"
    wide, polynomials = peak_equations(form, place, wanted.level)
    found = [_roots(wide, item, answer.name, wanted.hertz) for item in polynomials]
    places = sorted({item.value for each in found for item in each.found})
    kept: list[PartValue] = []
    for value in places:
        item = _met(answer, netlist, ask, value)
        last = kept[-1].value if kept else None
        if item is None or (last and isclose(last, float(value), rel_tol=1e-12)):
            continue
        kept.append(item)
    complete = bool(found) and all(each.complete for each in found)
    remarks = () if kept or not complete else (_none(answer.name, wanted.hertz),)
    return replace(answer, values=tuple(kept), complete=complete, remarks=remarks)


def _met(answer: ValueAnswer, netlist: Netlist, ask: Ask, value: Fraction) -> PartValue | None:
    """A candidate, or None where the level is not met with it: its peak is another one."""
    valued = with_values(netlist, {answer.name: Value(expression=Number(value))})
    gain = abs(complex(response(valued, ask, [answer.hertz])[0]))
    try:
        peak = peak_gain(closed_form(valued, ask))
    except AnalysisError as error:
        if error.code != "question.no-reference":
            raise
        return None
    error_there = abs(gain / (peak * 10 ** (answer.level_db / 20)) - 1)
    if error_there > _AGREES:
        return None
    return PartValue(value=float(value), closed_form=None, gain_error=error_there)


def _none(name: str, hertz: Fraction) -> str:
    return f"No positive value of {name} puts the gain at this level at {float(hertz):g} Hz."


def _over_symbols(answer: ValueAnswer, written: WrittenValue, others: Sequence[str]) -> ValueAnswer:
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


def _roots(form: ClosedForm, polynomial: Polynomial, name: str, hertz: Fraction) -> Crossings:
    """The positive roots in the value, with x = (2·pi·f)² put in and pi left as it is."""
    basis = form.basis
    frequency, wanted = basis.s_index, place_of(basis, name)
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


def _refuse(code: Code, message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
