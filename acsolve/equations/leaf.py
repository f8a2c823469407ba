"""From value expressions to the generators of a ring: what is a symbol, what an atom.

A leaf is an expression that the ring treats as indivisible: a free symbol, s, pi, the square
root of a prime, or an opaque function such as exp(-s*delay). Every quantity is positive
where it is a symbol, so sqrt(L1*L2) = sqrt(L1)*sqrt(L2) and roots of monomials are exact:
the generator is then the root of the quantity.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from math import lcm

from acsolve.circuit.expression import (
    Call,
    Expression,
    Frequency,
    Name,
    Number,
    Pi,
    PortElement,
    Power,
    Product,
    Quotient,
    Sum,
    children,
    number,
)

_LARGEST_ROOT = 12  # a finer root of a quantity becomes an opaque atom
_LARGEST_TRIAL = 1 << 14  # prime factors up to here are found by trial division


@dataclass(frozen=True, slots=True)
class Monomial:
    """coefficient times a product of leaves to rational powers."""

    coefficient: Fraction
    powers: Mapping[Expression, Fraction]


def monomial(expression: Expression) -> Monomial | None:
    """The expression as a monomial in leaves, or None where it is a sum."""
    match expression:
        case Number(value):
            return Monomial(value, {})
        case Name() | Pi() | Frequency():
            return Monomial(Fraction(1), {expression: Fraction(1)})
        case Product(left, right):
            return _product(monomial(left), monomial(right), 1)
        case Quotient(left, right):
            return _product(monomial(left), monomial(right), -1)
        case Power(base, Number(exponent)):
            return _raised(monomial(base), exponent, expression)
        case Call("sqrt", argument):
            return _raised(monomial(argument), Fraction(1, 2), expression)
        case Sum():
            return None
        case _:
            return Monomial(Fraction(1), {expression: Fraction(1)})


def _product(left: Monomial | None, right: Monomial | None, sign: int) -> Monomial | None:
    if left is None or right is None or (sign < 0 and right.coefficient == 0):
        return None
    powers = dict(left.powers)
    for leaf, exponent in right.powers.items():
        powers[leaf] = powers.get(leaf, Fraction(0)) + sign * exponent
    coefficient = left.coefficient * right.coefficient**sign
    return Monomial(coefficient, {leaf: item for leaf, item in powers.items() if item})


def _raised(base: Monomial | None, exponent: Fraction, whole: Expression) -> Monomial | None:
    """base ** exponent, or the whole expression as one opaque leaf where that is inexact."""
    opaque = Monomial(Fraction(1), {whole: Fraction(1)})
    if base is None:
        return None if exponent.denominator == 1 else opaque
    powers = {leaf: item * exponent for leaf, item in base.powers.items()}
    if any(item.denominator > _LARGEST_ROOT for item in powers.values()):
        return opaque
    if exponent.denominator == 1:
        if base.coefficient == 0 and exponent < 0:
            return opaque
        return Monomial(base.coefficient**exponent.numerator, powers)
    if base.coefficient == 1:
        return Monomial(Fraction(1), powers)
    if exponent.denominator != 2 or base.coefficient < 0:
        return opaque
    outside, roots = square_free(base.coefficient**exponent.numerator)
    for prime in roots:
        powers[number(prime)] = Fraction(1, 2)
    return Monomial(outside, powers)


def square_free(value: Fraction) -> tuple[Fraction, tuple[int, ...]]:
    """sqrt(value) as a rational times the square roots of distinct primes.

    A large remaining factor counts as a prime: still exact, since distinct remaining
    factors are only ever squared away.
    """
    outside = Fraction(1, value.denominator)
    inside = value.numerator * value.denominator
    roots = []
    candidate = 2
    while candidate * candidate <= inside and candidate < _LARGEST_TRIAL:
        while inside % (candidate * candidate) == 0:
            inside //= candidate * candidate
            outside *= candidate
        if inside % candidate == 0:
            inside //= candidate
            roots.append(candidate)
        candidate += 1
    if inside > 1:
        from acsolve.circuit.expression import exact_root

        root = exact_root(Fraction(inside))
        if root is not None:
            outside *= root
        else:
            roots.append(inside)
    return outside, tuple(roots)


def collect(expression: Expression, roots: dict[Expression, int], seen: set[int]) -> None:
    """Note every leaf of an expression with the root (1, 2, …) its generator must be."""
    if id(expression) in seen:
        return
    seen.add(id(expression))
    match expression:
        case Call() | Power():
            whole = monomial(expression)
            if whole is not None:
                for leaf, exponent in whole.powers.items():
                    _note(roots, leaf, exponent.denominator)
                return
        case Name() | Pi() | Frequency() | PortElement():
            _note(roots, expression, 1)
            return
        case _:
            pass
    for child in children(expression):
        collect(child, roots, seen)


def _note(roots: dict[Expression, int], leaf: Expression, root: int) -> None:
    roots[leaf] = lcm(roots.get(leaf, 1), root)
