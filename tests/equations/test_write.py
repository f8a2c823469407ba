"""Texts of polynomials and expressions: SymPy's parser reads back what was written."""

from __future__ import annotations

import random
from fractions import Fraction

import pytest
import sympy
from hypothesis import given, settings
from hypothesis import strategies as st
from sympy.parsing.sympy_parser import parse_expr

from acsolve.circuit.expression import (
    PI,
    Call,
    Expression,
    Name,
    Number,
    Power,
    Product,
    Quotient,
    S,
    Sum,
)
from acsolve.equations.naming import safe_names
from acsolve.equations.write import Spelling, expression_text, power_text
from tests.analyses.test_transfer_laws import form_of, gnd
from tests.strategies import C, L, R, any_lumped, coupling, network, pairs, part, quantity

NAMES = ("R1", "lambda", "N1[7].R", "I")
numbers = st.builds(Fraction, st.integers(-6, 6), st.integers(1, 4)).map(Number)
leaves = st.one_of(numbers, st.sampled_from([*(Name(name) for name in NAMES), PI, S]))


def grown(inner: st.SearchStrategy[Expression]) -> st.SearchStrategy[Expression]:
    """One more operation."""
    whole = st.integers(-2, 3).map(lambda item: Number(Fraction(item)))
    return st.one_of(
        st.builds(Sum, inner, inner),
        st.builds(Product, inner, inner),
        st.builds(Quotient, inner, inner),
        st.builds(Power, inner, whole),
        st.builds(lambda item: Call("exp", item), inner),
    )


expressions = st.recursive(leaves, grown, max_leaves=7)


def value(expression: Expression, points: dict[str, Fraction]) -> complex:
    """A plain evaluation."""
    match expression:
        case Number(number):
            return complex(number)
        case Name(name):
            return complex(points[name])
        case Sum(left, right):
            return value(left, points) + value(right, points)
        case Product(left, right):
            return value(left, points) * value(right, points)
        case Quotient(left, right):
            return value(left, points) / value(right, points)
        case Power(base, exponent):
            return value(base, points) ** int(value(exponent, points).real)
        case Call("exp", argument):
            import cmath

            return cmath.exp(value(argument, points))
    return 3.141592653589793 + 0j if expression == PI else complex(points["s"])


@settings(max_examples=120)
@given(expressions)
def test_expressions_are_read_back_with_their_value(expression):
    """Brackets stand where they must: the parsed text has the value of the expression."""
    safe = safe_names(NAMES)
    points = {name: Fraction(k + 3, 7 - k) for k, name in enumerate((*NAMES, "s"))}
    try:
        expected = value(expression, points)
    except (ZeroDivisionError, OverflowError):
        return
    text = expression_text(expression, Spelling(safe, "**"))
    # not evaluated while parsing, so that 0*(1/0) in a text is not an error of the test
    found = complex(eval(compile_text(text), names_of(safe, points)))  # noqa: S307 - our own text
    assert found == pytest.approx(expected, rel=1e-9, abs=1e-12) or abs(expected) > 1e30


def compile_text(text: str):
    """A text as Python code."""
    return compile(text, "text", "eval")


def names_of(safe: dict[str, str], points: dict[str, Fraction]) -> dict[str, object]:
    """What the names of a text stand for."""
    import cmath

    table: dict[str, object] = {safe[name]: float(points[name]) for name in NAMES}
    return table | {"s": float(points["s"]), "pi": cmath.pi, "exp": cmath.exp}


@settings(max_examples=15)
@given(st.data())
def test_closed_forms_are_read_back_by_sympy(data):
    """The safe text of a closed form, parsed, is its SymPy expression."""
    netlist = data.draw(any_lumped(symbols=True))
    form = form_of(netlist, data.draw(pairs(netlist)), data.draw(pairs(netlist)))
    if form is None:
        return
    spelled = form.spelled(safe=True)
    table = {
        spelled.name(name): sympy.Symbol(spelled.name(name), positive=True) for name in form.symbols
    }
    read = parse_expr(form.text(safe=True), local_dict={**table, "s": sympy.Symbol("s")})
    draw = random.Random(1)
    points = {item: sympy.Rational(draw.randrange(1, 60), 7) for item in read.free_symbols}
    other = form.as_sympy()
    assert other.free_symbols <= read.free_symbols
    assert sympy.simplify(read.subs(points) - other.subs(points)) == 0


def test_a_power_of_a_power_takes_brackets():
    """s^a to the second is (s^a)^2: written without brackets it would be s^(a^2)."""
    netlist = network(
        R("R1", "in", "out", 2),
        part("P1", "constant_phase", "out", "gnd", coefficient=1, exponent=Name("a")),
        R("R2", "out", "x", 1),
        part("P2", "constant_phase", "x", "gnd", coefficient=3, exponent=Name("a")),
        quantities=quantity("a", None),
    )
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    assert form.text(safe=True) == "(1 + 3*s**a)/(1 + 11*s**a + 6*(s**a)**2)"
    twice = Power(Power(S, Name("a")), Number(Fraction(2)))
    assert expression_text(twice, Spelling({}, "**")) == "(s**a)**2"
    assert power_text("s**a", Fraction(1), Spelling({}, "**")) == "s**a"


def test_roots_are_written_as_roots():
    """Half powers of several quantities stand under one root."""
    netlist = network(
        L("L1", "in", "gnd"),
        L("L2", "out", "gnd"),
        couplings=(coupling("L1", "L2", 1),),
    )
    form = form_of(netlist, gnd("in"), gnd("out"), "transimpedance")
    assert form is not None
    assert form.text() == "sqrt(L1*L2)*s"


def test_names_that_a_parser_cannot_read_are_replaced():
    """Indices, reserved words and constants of other programs get distinct safe names."""
    netlist = network(R("lambda", "in", "out"), C("N1[2].C", "out", "gnd"), R("I", "out", "gnd"))
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    safe = form.spelled(safe=True)
    read = parse_expr(form.text(safe=True))
    assert {str(item) for item in read.free_symbols} == {
        "s",
        *(safe.name(name) for name in form.symbols),
    }
    assert len({safe.name(name) for name in form.symbols}) == 3
