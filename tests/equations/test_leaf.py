"""Monomials over leaves: roots and powers of positive quantities, exactly."""

from __future__ import annotations

from fractions import Fraction
from math import isclose, prod, sqrt

from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.circuit.expression import (
    Call,
    Name,
    Number,
    Power,
    Product,
    Quotient,
    Sum,
    call,
    multiply,
    number,
)
from acsolve.equations.leaf import collect, monomial, square_free

positives = st.builds(Fraction, st.integers(1, 3000), st.integers(1, 400))


@settings(max_examples=100)
@given(positives)
def test_a_root_is_a_rational_times_roots_of_primes(value):
    """sqrt(q) = outside · product of sqrt(p), the p distinct and without square factors."""
    outside, primes = square_free(value)
    assert outside**2 * prod(primes) == value
    assert len(set(primes)) == len(primes)
    assert all(prime % square for prime in primes for square in (4, 9, 25, 49))


@settings(max_examples=60)
@given(positives, positives)
def test_the_root_of_a_product_is_the_product_of_the_roots(first, second):
    """sqrt(a·b·L1) as a monomial has the value of the product of its leaves."""
    expression = Call("sqrt", multiply(number(first), Product(number(second), Name("L1"))))
    found = monomial(expression)
    assert found is not None
    value = float(found.coefficient)
    for leaf, power in found.powers.items():
        value *= (7.0 if isinstance(leaf, Name) else float(leaf.value)) ** float(power)
    assert isclose(value, sqrt(first * second * 7), rel_tol=1e-12)


def test_sums_are_no_monomials():
    """A sum is none; its root is one indivisible leaf."""
    total = Sum(Name("a"), Name("b"))
    assert monomial(total) is None
    root = Call("sqrt", total)
    found = monomial(root)
    assert found is not None
    assert found.powers == {root: 1}


def test_powers_cancel():
    """sqrt(L1)·sqrt(L1)/L1 is the number one."""
    root = Call("sqrt", Name("L1"))
    found = monomial(Quotient(Product(root, root), Name("L1")))
    assert found is not None
    assert (found.coefficient, dict(found.powers)) == (1, {})


def test_a_negative_number_has_no_real_root():
    """The root of a negative number is a leaf of its own, not a sign that is lost."""
    expression = Call("sqrt", Number(Fraction(-6)))
    found = monomial(expression)
    assert found is not None
    assert found.powers == {expression: 1}
    assert call("sqrt", Number(Fraction(9, 4))) == Number(Fraction(3, 2))


def test_fine_roots_are_leaves():
    """A power finer than a twelfth is not split."""
    expression = Power(Name("x"), Number(Fraction(1, 13)))
    found = monomial(expression)
    assert found is not None
    assert found.powers == {expression: 1}


def test_collect_notes_the_finest_root():
    """A quantity that occurs as x^(1/2) and x^(1/3) needs a generator x^(1/6)."""
    roots: dict = {}
    total = Sum(Power(Name("x"), Number(Fraction(1, 2))), Power(Name("x"), Number(Fraction(1, 3))))
    collect(total, roots, set())
    assert roots == {Name("x"): 6}
