"""Modes of the whole network that its answer does not show, and forms of one polynomial each."""

from __future__ import annotations

from dataclasses import replace
from math import inf

from acsolve.algebra.ring import Polynomial, positive
from acsolve.analyses.closed_form import ClosedForm
from acsolve.circuit.expression import S
from acsolve.circuit.netlist import Netlist, bindings
from acsolve.circuit.value import Value
from acsolve.equations.evaluate import Evaluator, FloatArithmetic
from acsolve.errors import EquationError

_NEVER_GIVES = {
    "resistor",
    "inductor",
    "capacitor",
    "ammeter",
    "voltage_source",
    "current_source",
    "transformer",
    "gyrator",
}


def of_polynomial(form: ClosedForm, polynomial: Polynomial) -> ClosedForm:
    """A polynomial over the basis of a form, as a form of its own."""
    one = form.basis.ring.constant(1)
    return replace(form, numerator=polynomial, denominator=one, checked=None, origin=None)


def degree_in_s(form: ClosedForm) -> int:
    """The degree of a rational form's numerator in s."""
    place = form.basis.s_index
    return 0 if place is None else max(0, int(form.numerator.degrees()[place]))


def characteristic(form: ClosedForm) -> ClosedForm | None:
    """The characteristic polynomial of the whole network, driven as the question drives it.

    Its roots are the natural modes, before anything cancels. None where the network is not
    described by polynomials in s.
    """
    return None if form.origin is None else _rational(of_polynomial(form, form.origin.driven))


def hidden(form: ClosedForm) -> ClosedForm | None:
    """What cancelled between numerator and denominator: its roots in s are the hidden modes.

    The characteristic polynomial is the denominator times this, up to a factor without s.
    None where there is none.
    """
    origin = form.origin
    if origin is None:
        return None
    if origin.removed == 1 and origin.denominator in (form.denominator, -form.denominator):
        return _rational(of_polynomial(form, origin.removed))
    common = origin.denominator / form.denominator
    whole = form.basis.ring.reduced(origin.removed * common)
    return _rational(of_polynomial(form, positive(whole, whole, whole)[0]))


def _rational(found: ClosedForm) -> ClosedForm | None:
    used = zip(found.basis.generators, found.used(), strict=True)
    plain = all(item.leaf == S and item.root == 1 for item, here in used if here and item.varies)
    return found if plain and found.rational else None


def is_passive(netlist: Netlist) -> bool:
    """Whether all parts are passive by their kind, coupled in pairs at most, none negative.

    Natural modes of such a network never grow, multiple ones on the frequency axis included:
    the stored energy bounds them.
    """
    if any(part.kind not in _NEVER_GIVES for part in netlist.parts):
        return False
    evaluate = Evaluator(bindings(netlist), FloatArithmetic())
    coupled = [name for item in netlist.couplings for name in (item.first, item.second)]
    values = [(item.coefficient, -1.0, 1.0) for item in netlist.couplings]
    for part in netlist.parts:
        if part.kind not in ("transformer", "gyrator"):
            values += [(value, 0.0, inf) for value in part.values.values()]
    return len(set(coupled)) == len(coupled) and all(_within(evaluate, *item) for item in values)


def _within(evaluate: Evaluator, value: Value, low: float, high: float) -> bool:
    """Whether a value is a real number of a range, or its own symbol, which is taken to be."""
    if value.expression is None:
        return True
    try:
        number = evaluate(value.expression, 1.0)
    except (EquationError, ArithmeticError):
        return False
    return isinstance(number, int | float) and low <= number <= high
