"""Closed forms against the dense reference, and the laws that networks obey."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import flint
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.question import Ask, impedance_ask, transfer_ask
from acsolve.analyses.transfer import closed_form
from acsolve.circuit.expression import PI, Name, Number, Product, Quotient, S, Sum, call, number
from acsolve.circuit.netlist import Netlist, Pair, bindings
from acsolve.circuit.value import Value
from acsolve.equations.exact import Symbols
from acsolve.errors import AcsolveError, AnalysisError, EquationError
from tests.reference.dense import Answer, answer, evaluated
from tests.reference.field import Digits, Field, Residues
from tests.strategies import (
    PASSIVE,
    QUANTITIES,
    SENSING,
    C,
    L,
    R,
    any_lumped,
    connected,
    coupling,
    islands,
    network,
    pairs,
    part,
    quantity,
    renamed,
    scaled,
    scattered,
    with_numbers,
)

RECIPROCAL = (*PASSIVE, "crystal", "impedance", "admittance", "transformer", "ammeter")
TRANSFERS = QUANTITIES[:4]


def asked(netlist: Netlist, source: Pair | None, target: Pair, quantity: str) -> Ask:
    """A question about a transfer or, into `source`, an impedance."""
    if quantity == "impedance":
        assert source is not None
        return impedance_ask(netlist, source)
    return transfer_ask(netlist, source, target, quantity=quantity)


def solved(netlist: Netlist, ask: Ask, symbols: Symbols | None = None) -> ClosedForm | None:
    """The closed form, or None where the engine says that there is no answer."""
    try:
        return closed_form(netlist, ask, symbols)
    except (EquationError, AnalysisError) as problem:
        if problem.code == "equations.check-failed":
            raise
        return None


def form_of(
    netlist: Netlist, source: Pair | None, target: Pair, quantity: str = "voltage-ratio"
) -> ClosedForm | None:
    """The closed form of a question, or None."""
    return solved(netlist, asked(netlist, source, target, quantity))


def agrees(form: ClosedForm | None, expected: Answer, field: Field, s) -> None:
    """An answer that exists is given, and what is given is right."""
    if not expected.sensible:  # its level is taken as zero, which `check` reports
        return
    if form is None:
        assert not (expected.regular and expected.state == "determined"), expected
        return
    assert expected.state == "determined", (form.text(), expected)
    value = evaluated(form, field, s)
    if isinstance(field, Residues):
        assert value == expected.value
    else:
        assert abs(value - expected.value) <= 1e-9 * abs(expected.value) + 1e-30


def agrees_modulo(netlist: Netlist, source: Pair | None, target: Pair, quantity: str) -> None:
    """The closed form is the dense solution's rational function."""
    field = Residues(5)
    s = field.symbol("s")
    expected = answer(netlist, field, s, source=source, target=target, quantity=quantity)
    agrees(form_of(netlist, source, target, quantity), expected, field, s)


def drawn_pairs(data, netlist: Netlist) -> tuple[Pair, Pair]:
    """Two pairs of nodes."""
    return data.draw(pairs(netlist)), data.draw(pairs(netlist))


def gnd(node: str) -> Pair:
    """A node against ground."""
    return (node, "gnd")


# ------------------------------------------------------------ the dense reference


@settings(max_examples=200)
@given(st.data(), st.booleans(), st.sampled_from(QUANTITIES))
def test_closed_forms_equal_the_dense_solution_modulo_a_prime(data, symbols, quantity):
    """A closed form is the same rational function as the dense nodal solution, any lumped part."""
    netlist = data.draw(any_lumped(symbols=symbols, grounded=data.draw(st.booleans())))
    source, target = drawn_pairs(data, netlist)
    agrees_modulo(netlist, source, source if quantity == "impedance" else target, quantity)


@settings(max_examples=40)
@given(st.data(), st.booleans(), st.sampled_from(QUANTITIES))
def test_closed_forms_equal_the_dense_solution_at_complex_frequencies(data, symbols, quantity):
    """At random complex frequencies a closed form and 50-digit dense elimination agree to 1e-9."""
    netlist = data.draw(any_lumped(symbols=symbols))
    source, target = drawn_pairs(data, netlist)
    if quantity == "impedance":
        target = source
    field = Digits(3)
    s = field.context.mpc(field.symbol("real") - 1, field.symbol("imag"))
    expected = answer(netlist, field, s, source=source, target=target, quantity=quantity)
    agrees(form_of(netlist, source, target, quantity), expected, field, s)


@settings(max_examples=80)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_zero_and_negative_values_are_values(data, quantity):
    """Parts of zero or negative value give the dense solution's answer or a reasoned refusal."""
    netlist = data.draw(any_lumped(symbols=data.draw(st.booleans()), odd=True))
    source, target = drawn_pairs(data, netlist)
    agrees_modulo(netlist, source, source if quantity == "impedance" else target, quantity)


@settings(max_examples=120)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_ill_posed_networks_are_refused(data, quantity):
    """A network that has no unique answer raises one of our errors; it is never answered wrongly."""
    netlist = data.draw(scattered())
    assume(len(netlist.nodes()) > 1)
    source, target = drawn_pairs(data, netlist)
    agrees_modulo(netlist, source, source if quantity == "impedance" else target, quantity)


@settings(max_examples=60)
@given(st.data(), st.booleans())
def test_own_sources_superpose_as_the_dense_solution_says(data, symbols):
    """Without a drive, the voltage that the network's own sources cause is the dense solution's."""
    netlist = data.draw(
        connected(
            extra=(*PASSIVE, "voltage_source", "current_source", "voltage_source", "opamp"),
            symbols=symbols,
        )
    )
    assume(any(part.kind.endswith("_source") for part in netlist.parts))
    agrees_modulo(netlist, None, data.draw(pairs(netlist)), "voltage-ratio")


@settings(max_examples=60)
@given(st.data(), st.sampled_from(("current-ratio", "transadmittance")))
def test_an_ammeter_shows_the_branch_current(data, quantity):
    """The current of a named ammeter is the dense solution's, from its left to its right node."""
    netlist = data.draw(any_lumped(symbols=True))
    ends = data.draw(pairs(netlist))
    middle = part("A", "ammeter", ends[0], "mid")
    netlist = replace(netlist, parts=(*netlist.parts, middle, R("RA", "mid", ends[1], 3)))
    source = data.draw(pairs(netlist))
    ask = transfer_ask(netlist, source, ("mid", ends[0]), quantity=quantity, ammeter="A")
    field = Residues(5)
    s = field.symbol("s")
    expected = answer(netlist, field, s, source=source, target=ends, quantity=quantity, ammeter="A")
    agrees(solved(netlist, ask), expected, field, s)


@settings(max_examples=60)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_networks_joined_by_transformers_alone(data, quantity):
    """Conductively separate networks are solved, and a voltage from one to the other is refused."""
    netlist = data.draw(islands(symbols=data.draw(st.booleans())))
    source, target = drawn_pairs(data, netlist)
    agrees_modulo(netlist, source, source if quantity == "impedance" else target, quantity)
    across = ("gnd", "q0")
    with pytest.raises(AnalysisError) as refused:
        closed_form(netlist, transfer_ask(netlist, ("gnd", "p1"), across))
    assert refused.value.code == "question.no-reference"


# ------------------------------------------------------------ reciprocity and symmetry


def same(first: ClosedForm | None, second: ClosedForm | None) -> None:
    """Two closed forms are the same polynomials, or neither exists."""
    assert (first is None) == (second is None)
    if first is not None and second is not None:
        assert first.text() == second.text()
        if first.basis == second.basis:
            assert first.numerator == second.numerator
            assert first.denominator == second.denominator


def both_ways(data, quantity: str, other: str) -> None:
    """One quantity from a first pair to a second equals another from the second to the first."""
    netlist = data.draw(
        connected(extra=RECIPROCAL, symbols=data.draw(st.booleans()), most_nodes=5, most_extra=4)
    )
    source, target = drawn_pairs(data, netlist)
    there = form_of(netlist, source, target, quantity)
    back = form_of(netlist, target, source, other)
    if quantity == other or (there is not None and back is not None):
        same(there, back)


@settings(max_examples=50)
@given(st.data())
def test_transimpedance_is_reciprocal(data):
    """With R, L, C, couplings and transformers, V2/I1 = V1/I2 exactly (reciprocity theorem)."""
    both_ways(data, "transimpedance", "transimpedance")


@settings(max_examples=50)
@given(st.data())
def test_short_circuit_transadmittance_is_reciprocal(data):
    """The current through a short there for a voltage here equals that for the pairs exchanged."""
    both_ways(data, "transadmittance", "transadmittance")


@settings(max_examples=40)
@given(st.data())
def test_voltage_ratio_is_the_current_ratio_backwards(data):
    """V2/V1 with pair 2 open equals the short-circuit current ratio from pair 2 to pair 1."""
    both_ways(data, "voltage-ratio", "current-ratio")


@settings(max_examples=80)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_the_choice_of_reference_changes_nothing(data, quantity):
    """Calling another node `gnd` changes no answer between two nodes, exactly."""
    netlist = data.draw(any_lumped(symbols=data.draw(st.booleans())))
    other = data.draw(st.sampled_from([node for node in netlist.nodes() if node != "gnd"]))
    swap = {other: "gnd", "gnd": other}
    source, target = drawn_pairs(data, netlist)
    assume(all(item.kind not in SENSING for item in netlist.parts) or sensible(netlist, source))
    moved = [tuple(swap.get(node, node) for node in pair) for pair in (source, target)]
    first = form_of(netlist, source, target, quantity)
    second = form_of(renamed(netlist, swap), moved[0], moved[1], quantity)
    same(first, second)


def sensible(netlist: Netlist, source: Pair) -> bool:
    """Whether no amplifier senses between parts of the network that nothing joins."""
    field = Residues(5)
    return answer(
        netlist, field, field.symbol("s"), source=source, target=source, quantity="impedance"
    ).sensible


@settings(max_examples=50)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_the_order_of_parts_changes_nothing(data, quantity):
    """Parts and couplings in another order give the same answer, letter for letter."""
    netlist = data.draw(any_lumped(symbols=True))
    source, target = drawn_pairs(data, netlist)
    turned = replace(netlist, parts=tuple(data.draw(st.permutations(netlist.parts))))
    same(form_of(netlist, source, target, quantity), form_of(turned, source, target, quantity))


@settings(max_examples=40)
@given(st.data(), st.sampled_from(TRANSFERS))
def test_turning_a_pair_turns_the_sign(data, quantity):
    """Exchanging the two nodes of the observed pair, or of the drive, changes the sign only."""
    netlist = data.draw(any_lumped(symbols=data.draw(st.booleans())))
    source, target = drawn_pairs(data, netlist)
    first = form_of(netlist, source, target, quantity)
    for turned in ((source[::-1], target), (source, target[::-1])):
        second = form_of(netlist, *turned, quantity)
        assert (first is None) == (second is None)
        if first is not None and second is not None:
            assert first.numerator == -second.numerator
            assert first.denominator == second.denominator


def rooted(data, netlist: Netlist) -> Netlist:
    """The network with square roots of primes, or pi, in some of its values."""
    factors = st.sampled_from([number(1), call("sqrt", number(2)), call("sqrt", number(3)), PI])
    return replace(
        netlist,
        parts=tuple(
            replace(
                item,
                values={
                    key: replace(value, expression=Product(data.draw(factors), value.expression))
                    for key, value in item.values.items()
                },
            )
            for item in netlist.parts
        ),
    )


@settings(max_examples=30)
@given(st.data())
def test_a_branch_across_the_drive_changes_no_voltage_ratio(data):
    """What hangs across an ideal voltage acts on nothing: its modes cancel, roots of primes or not."""
    netlist = rooted(data, data.draw(connected(symbols=False, most_nodes=4, most_extra=2)))
    assume(not netlist.couplings)
    source, target = drawn_pairs(data, netlist)
    more = rooted(
        data,
        network(
            R("R90", source[0], "x", 2),
            L("L91", "x", "y", 3),
            C("C92", "y", source[1], data.draw(st.integers(1, 6))),
        ),
    )
    both = replace(netlist, parts=(*netlist.parts, *more.parts))
    same(form_of(netlist, source, target), form_of(both, source, target))


@settings(max_examples=30)
@given(st.data())
def test_a_branch_in_series_with_a_current_changes_nothing(data):
    """What an ideal current flows through on its way acts on nothing: no answer but its own."""
    netlist = rooted(data, data.draw(connected(symbols=False, most_nodes=4, most_extra=2)))
    assume(not netlist.couplings)
    source, target = drawn_pairs(data, netlist)
    more = rooted(
        data,
        network(R("R90", "x", source[0], 2), L("L91", "x", source[0], 3), C("C92", "x", "y", 1)),
    )
    both = replace(netlist, parts=(*netlist.parts, *more.parts))
    first = form_of(netlist, source, target, "transimpedance")
    same(first, form_of(both, ("y", source[1]), target, "transimpedance"))


# ------------------------------------------------------------ scaling


@settings(max_examples=50)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_impedance_scaling(data, quantity):
    """All impedances times 7/3: ratios stay, impedances grow by it, admittances shrink by it."""
    netlist = data.draw(
        connected(
            tree=(*PASSIVE, "crystal"),
            extra=(*PASSIVE, "crystal", "opamp", "gyrator", "transconductance", "transresistance"),
            symbols=False,
        )
    )
    source, target = drawn_pairs(data, netlist)
    factor = Fraction(7, 3)
    first = form_of(netlist, source, target, quantity)
    second = form_of(scaled(netlist, impedance=factor), source, target, quantity)
    assert (first is None) == (second is None)
    if first is None or second is None:
        return
    field = Residues(2)
    s = field.symbol("s")
    power = {"transimpedance": 1, "impedance": 1, "transadmittance": -1}.get(quantity, 0)
    assert evaluated(second, field, s) == evaluated(first, field, s) * field.number(factor**power)


@settings(max_examples=50)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_frequency_scaling(data, quantity):
    """All time constants times 5/4: the answer at s is what it was at 5/4·s."""
    netlist = data.draw(
        connected(tree=(*PASSIVE, "crystal"), extra=(*PASSIVE, "crystal", "opamp", "transformer"))
    )
    source, target = drawn_pairs(data, netlist)
    factor = Fraction(5, 4)
    first = form_of(netlist, source, target, quantity)
    second = form_of(scaled(netlist, time=factor), source, target, quantity)
    assert (first is None) == (second is None)
    if first is not None and second is not None:
        field = Residues(2)
        s = field.symbol("s")
        assert evaluated(second, field, s) == evaluated(first, field, s * field.number(factor))


# ------------------------------------------------------------ passivity and limits


@settings(max_examples=40)
@given(st.data())
def test_passive_networks_take_power(data):
    """Of positive R, L, C, couplings and transformers: Re Z(s) >= 0 wherever Re s >= 0."""
    netlist = data.draw(
        connected(tree=(*PASSIVE, "crystal"), extra=(*PASSIVE, "crystal", "transformer", "gyrator"))
    )
    form = form_of(netlist, into := data.draw(pairs(netlist)), into, "impedance")
    if form is None:
        return
    field = Digits(8)
    for real in (0, Fraction(1, 3), 2):
        s = field.context.mpc(field.number(Fraction(real)), field.symbol(f"axis {real}"))
        assert evaluated(form, field, s).real >= -1e-40


@settings(max_examples=60)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_a_value_that_becomes_zero_or_infinite(data, quantity):
    """The answer's limit for a part's value to 0 is that of the part with value 0; likewise 1/0."""
    netlist = data.draw(connected(symbols=False, most_nodes=5, most_extra=4))
    assume(not netlist.couplings)
    plain = [item for item in netlist.parts if len(item.values) == 1]
    assume(plain)
    chosen = data.draw(st.sampled_from(plain))
    source, target = drawn_pairs(data, netlist)

    def valued(value: Value | None) -> Netlist:
        if value is None:
            rest = tuple(item for item in netlist.parts if item is not chosen)
            return replace(netlist, parts=rest)
        new = replace(chosen, values={"value": value})
        rest = tuple(new if item is chosen else item for item in netlist.parts)
        return replace(netlist, parts=rest)

    form = form_of(valued(Value()), source, target, quantity)
    none, zero = valued(None), valued(Value(expression=Number(Fraction(0))))
    infinite = with_short(zero, chosen.name) if chosen.kind == "capacitor" else none
    for changed, highest in ((zero, False), (infinite, True)):
        if form is None or not set(source + target) <= set(changed.nodes()):
            continue
        there = form_of(changed, source, target, quantity)
        if there is not None:
            field = Residues(4)
            s = field.symbol("s")
            here = limit(form, chosen.name, field, s, highest=highest)
            assert here == evaluated(there, field, s)


def with_short(netlist: Netlist, name: str) -> Netlist:
    """The network with a part replaced by a short: a capacitor of infinite value."""
    return replace(
        netlist,
        parts=tuple(
            R(item.name, *item.nodes, 0) if item.name == name else item for item in netlist.parts
        ),
    )


def limit(form: ClosedForm, name: str, field: Residues, s, *, highest: bool):
    """The limit of a closed form for one symbol to zero or infinity; None where infinite."""
    place = next(
        (at for at, item in enumerate(form.basis.generators) if item.leaf == Name(name)), None
    )
    if place is None:
        return evaluated(form, field, s)
    ends = []
    for side in (form.numerator, form.denominator):
        powers = form.basis.ring.by_power(side, place)
        end = (max if highest else min)(powers, default=0)
        ends.append((end, powers.get(end, form.basis.ring.constant(0))))
    (top_power, top), (bottom_power, bottom) = ends
    value = evaluated(replace(form, numerator=top, denominator=bottom), field, s)
    if top == 0 or top_power == bottom_power:
        return value
    return None if (top_power > bottom_power) == highest else field.number(Fraction(0))


# ------------------------------------------------------------ numbers, symbols, normal form


@settings(max_examples=60)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_numbers_give_what_symbols_give(data, quantity):
    """The numeric closed form is the symbolic one with the values put in, over fractions."""
    netlist = data.draw(
        connected(extra=(*PASSIVE, "opamp", "transformer", "gyrator"), symbols=True, most_nodes=5)
    )
    assume(not netlist.couplings)
    assume(not any("quality" in item.values for item in netlist.parts))
    assume(not any("gain_bandwidth" in item.values for item in netlist.parts))
    source, target = drawn_pairs(data, netlist)
    free = [name for name, value in bindings(netlist).items() if value.expression is None]
    values = {name: Fraction(3 + 2 * at, 2 + at) for at, name in enumerate(free)}
    symbolic = form_of(netlist, source, target, quantity)
    numeric = form_of(with_numbers(netlist, values), source, target, quantity)
    if symbolic is None or numeric is None:
        assert symbolic is None
        return
    sides = [
        [over_fractions(symbolic, item, values) for item in side]
        for side in symbolic.coefficients()
    ]
    numbers = numeric.numbers()
    assert numbers is not None
    left, right = (
        poly(sides[0]) * poly(numbers[1]),
        poly(sides[1]) * poly(numbers[0]),
    )
    assert left == right


def over_fractions(form: ClosedForm, polynomial, values: dict[str, Fraction]) -> Fraction:
    """A polynomial in symbols at rational values."""
    total = Fraction(0)
    for exponents, coefficient in polynomial.terms():
        term = Fraction(int(coefficient))
        for item, exponent in zip(form.basis.generators, exponents, strict=False):
            if exponent:
                assert isinstance(item.leaf, Name)
                term *= values[item.leaf.name] ** int(exponent)
        total += term
    return total


def poly(coefficients: list[Fraction]) -> flint.fmpq_poly:
    """A polynomial with rational coefficients, by rising power."""
    return flint.fmpq_poly([flint.fmpq(item.numerator, item.denominator) for item in coefficients])


@settings(max_examples=80)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_normal_form(data, quantity):
    """No common factor is left, and the denominator's lowest coefficient is positive."""
    netlist = data.draw(any_lumped(symbols=data.draw(st.booleans())))
    source, target = drawn_pairs(data, netlist)
    form = form_of(netlist, source, target, quantity)
    if form is None:
        return
    assert form.numerator.gcd(form.denominator).is_one() or form.numerator == 0
    if form.numerator == 0:
        assert form.denominator == 1
    lowest = next(item for item in form.coefficients()[1] if item != 0)
    signs = [coefficient > 0 for coefficient in lowest.coeffs()]
    assert 2 * sum(signs) >= len(signs)
    numbers = form.numbers()
    if numbers is not None:
        assert next(item for item in numbers[1] if item) > 0


@settings(max_examples=40)
@given(st.data(), st.sampled_from(QUANTITIES))
def test_a_symbolic_answer_ignores_every_number(data, quantity):
    """With all numbers ignored, values of zero among them, the answer is that of symbols."""
    netlist = data.draw(connected(odd=True, extra=(*PASSIVE, "opamp", "transformer")))
    bare = replace(
        netlist,
        parts=tuple(
            replace(
                item,
                values={k: replace(value, expression=None) for k, value in item.values.items()},
            )
            for item in netlist.parts
        ),
    )
    source, target = drawn_pairs(data, netlist)
    ask = asked(netlist, source, target, quantity)
    same(solved(netlist, ask, Symbols(symbolic=True)), solved(bare, ask))


# ------------------------------------------------------------ single networks


def test_a_symbol_kept_for_an_open_capacitor_joins_what_it_joins():
    """A capacitor of 0 F that is kept as a symbol connects its nodes as any capacitor does."""
    netlist = network(R("R1", "in", "out", 1), C("C1", "out", "b", 0), R("R2", "b", "c", 1))
    ask = transfer_ask(netlist, gnd("in"), gnd("out"))
    for symbols in (Symbols(symbolic=True), Symbols(keep=frozenset({"C1"}))):
        assert closed_form(netlist, ask, symbols).text() == "1"


def test_perfect_coupling_of_two_coils_is_a_transformer():
    """k = 1: the open-circuit voltage ratio is sqrt(L2/L1) at every frequency."""
    netlist = network(
        L("L1", "in", "gnd"), L("L2", "out", "gnd"), couplings=(coupling("L1", "L2", 1),)
    )
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    assert form.text(safe=True) == "sqrt(L2)/sqrt(L1)"
    numbers = network(
        L("L1", "in", "gnd", 2), L("L2", "out", "gnd", 6), couplings=(coupling("L1", "L2", 1),)
    )
    found = form_of(numbers, gnd("in"), gnd("out"))
    assert found is not None
    assert found.text(safe=True) == "sqrt(3)"


def test_irrational_mutual_inductance_keeps_rational_answers_rational():
    """sqrt(L1·L2) squared is a number again: the input impedance of coupled coils is rational."""
    netlist = network(
        L("L1", "in", "gnd", 2),
        L("L2", "out", "gnd", 3),
        R("R1", "out", "gnd", 5),
        couplings=(coupling("L1", "L2", Fraction(1, 2)),),
    )
    form = form_of(netlist, gnd("in"), gnd("in"), "impedance")
    assert form is not None
    assert form.numbers() == (
        [Fraction(0), Fraction(20), Fraction(9)],
        [Fraction(10), Fraction(6)],
    )


@pytest.mark.parametrize("name", ["drive", "short", "E", "I1", "gnd_", "s1"])
def test_a_part_may_have_any_name(name):
    """The name of an ammeter, whatever it is, does not change what it shows."""
    netlist = network(
        R("R1", "in", "out", 1), part(name, "ammeter", "out", "b"), R("R2", "b", "gnd", 1)
    )
    ask = transfer_ask(netlist, gnd("in"), gnd("b"), quantity="transadmittance", ammeter=name)
    assert closed_form(netlist, ask).text() == "1/2"
    ratio = transfer_ask(netlist, gnd("in"), gnd("b"), quantity="current-ratio", ammeter=name)
    assert closed_form(netlist, ratio).text() == "1"


@pytest.mark.parametrize(
    "value",
    [
        Quotient(number(1), Name("R2")),
        Quotient(number(1), Sum(Name("R3"), Product(number(-1), Name("R4")))),
    ],
)
def test_a_division_by_zero_among_values_is_reported(value):
    """A value that divides by zero is one of our errors, and names the values."""
    netlist = network(
        R("R1", "in", "out", 1),
        C("C1", "out", "gnd", value),
        R("R2", "out", "gnd", 0),
        R("R3", "out", "gnd", 2),
        R("R4", "out", "gnd", 2),
    )
    ask = transfer_ask(netlist, gnd("in"), gnd("out"))
    with pytest.raises(EquationError) as refused:
        closed_form(netlist, ask)
    assert refused.value.code == "equations.evaluation"
    assert "R2" in refused.value.message or "R3, R4" in refused.value.message


def test_an_impedance_in_s_varies_with_s_whatever_stays_a_symbol():
    """A part given as an expression in s is never replaced by a symbol that does not vary."""
    netlist = network(
        R("R1", "in", "out", 2),
        part("Z1", "impedance", "out", "gnd", value=Quotient(number(3), S)),
    )
    ask = transfer_ask(netlist, gnd("in"), gnd("out"))
    assert closed_form(netlist, ask).text() == "3/(3 + 2*s)"
    assert closed_form(netlist, ask, Symbols(symbolic=True)).text() == "3/(3 + R1*s)"


def test_a_part_without_effect_leaves_the_form_rational():
    """A part that is not rational in s and does not act keeps no polynomial from being one."""
    netlist = network(
        R("R1", "in", "out", 1),
        C("C1", "out", "gnd", 1),
        part("P1", "constant_phase", "in", "gnd", coefficient=1, exponent=Fraction(1, 3)),
    )
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    assert form.rational
    assert form.numbers() == ([Fraction(1)], [Fraction(1), Fraction(1)])


def test_a_network_away_from_ground():
    """A divider that does not touch `gnd` is solved; its voltage against `gnd` is refused."""
    netlist = network(R("R1", "a", "b"), R("R2", "b", "c"), R("R9", "gnd", "z"))
    form = form_of(netlist, ("a", "c"), ("b", "c"))
    assert form is not None
    assert form.text() == "R2/(R1 + R2)"
    with pytest.raises(AcsolveError) as refused:
        closed_form(netlist, transfer_ask(netlist, ("a", "c"), gnd("b")))
    assert refused.value.code == "question.no-reference"


def test_a_quantity_that_parts_share():
    """Parts computed from a named quantity follow it, exactly."""
    netlist = network(
        R("R1", "in", "out", Name("q")),
        R("R2", "out", "gnd", Product(number(2), Name("q"))),
        quantities=quantity("q", None),
    )
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    assert form.text() == "2/3"
