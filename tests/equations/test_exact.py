"""The exact equations: expansion of names, symbols that stay, the smallest ring."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.analyses.question import transfer_ask
from acsolve.circuit.expression import Name, Number, Product, Quotient, S, Sum, number
from acsolve.circuit.netlist import bindings
from acsolve.circuit.value import Value
from acsolve.equations.exact import Expander, Symbols, apply, exact_system, with_symbols
from acsolve.errors import EquationError
from tests.strategies import C, R, any_lumped, connected, network, pairs, part, quantity


def test_names_expand_down_to_symbols_and_numbers():
    """A quantity of quantities is worked out; what has no value stays a name."""
    netlist = network(
        R("R1", "a", "b", Product(number(2), Name("q"))),
        quantities=quantity("q", Sum(Name("p"), number(1))) | quantity("p", None),
    )
    expand = Expander(bindings(netlist), Symbols())
    assert expand(Name("R1")) == Product(number(2), Sum(Name("p"), number(1)))


def test_which_values_stay_symbols():
    """`symbolic` keeps plain numbers as symbols, `keep` the named ones; formulas are followed."""
    number_value = Value(expression=Number(Fraction(3)))
    formula = Value(expression=Product(number(2), Name("q")))
    in_s = Value(expression=Quotient(number(1), S))
    assert Symbols(symbolic=True).stays("R1", number_value)
    assert not Symbols(symbolic=True).stays("R1", formula)
    assert Symbols(keep=frozenset({"R1"})).stays("R1", formula)
    assert not Symbols().stays("R1", number_value)
    assert Symbols().stays("R1", Value())
    for symbols in (Symbols(symbolic=True), Symbols(keep=frozenset({"Z1"}))):
        assert not symbols.stays("Z1", in_s)


def test_values_that_stay_symbols_leave_the_netlist():
    """A zero that is kept as a symbol is no zero to the graph; other values are untouched."""
    netlist = network(R("R1", "a", "b", 0), C("C1", "b", "gnd", 5))
    kept = with_symbols(netlist, Symbols(keep=frozenset({"R1"})))
    assert kept.parts[0].values["value"].expression is None
    assert kept.parts[1] == netlist.parts[1]
    assert with_symbols(netlist, Symbols()) is netlist


@settings(max_examples=50)
@given(st.data())
def test_the_direction_solves_every_equation(data):
    """The vector of minors makes every law zero, as polynomials."""
    netlist = data.draw(any_lumped(symbols=True))
    ask = transfer_ask(netlist, data.draw(pairs(netlist)), data.draw(pairs(netlist)))
    system = ask.system(netlist)
    exact = exact_system(system, Expander(bindings(netlist), Symbols()))
    directions = exact.directions(frozenset(range(len(system.unknowns))))
    ring = exact.basis.ring
    for row in exact.rows:
        total = sum(
            (entry * directions[column] for column, entry in row.items() if column in directions),
            ring.constant(0),
        )
        assert ring.reduced(total) == 0


@settings(max_examples=30)
@given(st.data())
def test_linear_functions_apply_linearly(data):
    """A voltage is the difference of two potentials, on the direction too."""
    netlist = data.draw(connected(symbols=True))
    source, (first, second) = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    ask = transfer_ask(netlist, source, (first, second))
    system = ask.system(netlist)
    exact = exact_system(system, Expander(bindings(netlist), Symbols()))
    directions = exact.directions(frozenset(range(len(system.unknowns))))
    ring = exact.basis.ring
    reference = system.groups.reference(first)
    parts = [
        apply(system.voltage((node, reference)), directions, ring)
        if node != reference
        else ring.constant(0)
        for node in (first, second)
    ]
    assert apply(ask.observed(system), directions, ring) == parts[0] - parts[1]


def test_a_division_by_a_zero_value_names_it():
    """A value that divides by zero raises [equations.evaluation] with the names at fault."""
    netlist = network(R("R1", "a", "b", Quotient(number(1), Name("R2"))), R("R2", "a", "b", 0))
    with pytest.raises(EquationError) as refused:
        Expander(bindings(netlist), Symbols())(Name("R1"))
    assert refused.value.code == "equations.evaluation"
    assert "R2" in refused.value.message


def test_a_quality_of_zero_is_reported():
    """An inductor of quality zero has no series resistance that could be worked out."""
    coil = part("L1", "inductor", "out", "gnd", value=1, quality=0)
    at = replace(coil.values["quality"], at_hertz=number(1))
    coil = replace(coil, values={**coil.values, "quality": at})
    netlist = network(R("R1", "in", "out", 1), coil)
    system = transfer_ask(netlist, ("in", "gnd"), ("out", "gnd")).system(netlist)
    with pytest.raises(EquationError) as refused:
        exact_system(system, Expander(bindings(netlist), Symbols()))
    assert refused.value.code == "equations.evaluation"
