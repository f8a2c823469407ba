"""Closed forms against the dense reference, and the laws that networks obey."""

from __future__ import annotations

from fractions import Fraction

from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.question import Ask, impedance_ask, transfer_ask
from acsolve.analyses.transfer import closed_form
from acsolve.circuit.netlist import Netlist, Pair
from acsolve.equations.exact import Symbols
from acsolve.errors import AnalysisError, EquationError

from ..reference.dense import Answer, answer, evaluated
from ..reference.field import Digits, Field, Residues
from ..strategies import QUANTITIES, any_lumped, pairs


def asked(netlist: Netlist, source: Pair, target: Pair, quantity: str) -> Ask:
    """A question about a transfer or, into `source`, an impedance."""
    if quantity == "impedance":
        return impedance_ask(netlist, source)
    return transfer_ask(netlist, source, target, quantity=quantity)


def solved(netlist: Netlist, ask: Ask, symbols: Symbols | None = None) -> ClosedForm | None:
    """The closed form, or None where the engine says that there is no answer."""
    try:
        return closed_form(netlist, ask, symbols)
    except (EquationError, AnalysisError) as problem:
        assert problem.code != "equations.check-failed", problem
        return None


def agrees(form: ClosedForm | None, expected: Answer, field: Field, s) -> None:
    """An answer that exists is given, and what is given is right."""
    if form is None:
        assert not (expected.regular and expected.state == "determined"), expected
        return
    assert expected.state == "determined", (form.text(), expected)
    value = evaluated(form, field, s)
    if isinstance(field, Residues):
        assert value == expected.value
    else:
        assert abs(value - expected.value) <= 1e-9 * abs(expected.value) + 1e-30


@settings(max_examples=400)
@given(st.data(), st.booleans(), st.sampled_from(QUANTITIES))
def test_closed_forms_equal_the_dense_solution_modulo_a_prime(data, symbols, quantity):
    """A closed form is the same rational function as the dense nodal solution, any lumped part."""
    netlist = data.draw(any_lumped(symbols=symbols, grounded=data.draw(st.booleans())))
    source, target = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    if quantity == "impedance":
        target = source
    field = Residues(5)
    s = field.symbol("s")
    expected = answer(netlist, field, s, source=source, target=target, quantity=quantity)
    agrees(solved(netlist, asked(netlist, source, target, quantity)), expected, field, s)


@settings(max_examples=60)
@given(st.data(), st.booleans(), st.sampled_from(QUANTITIES))
def test_closed_forms_equal_the_dense_solution_at_complex_frequencies(data, symbols, quantity):
    """At random complex frequencies a closed form and 50-digit dense elimination agree to 1e-9."""
    netlist = data.draw(any_lumped(symbols=symbols))
    source, target = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    if quantity == "impedance":
        target = source
    field = Digits(3)
    s = field.context.mpc(field.symbol("real") - 1, field.symbol("imag"))
    expected = answer(netlist, field, s, source=source, target=target, quantity=quantity)
    agrees(solved(netlist, asked(netlist, source, target, quantity)), expected, field, s)
