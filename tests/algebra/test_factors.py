"""Factors of polynomials whose coefficients are large: their product, and their multiplicities."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st

from acsolve.algebra.factors import factors, squarefree
from acsolve.algebra.ring import Ring

RING = Ring(("a", "b", "s"))
A, B, S = (RING.generator(place) for place in range(3))
numbers = st.integers(-(10**30), 10**30).filter(bool)
pieces = st.tuples(numbers, numbers, numbers, st.sampled_from([(A, S), (S, S), (A, B), (S, B)]))


def made(piece):
    """A polynomial with large coefficients."""
    first, second, third, (x, y) = piece
    return first * x * y + second * x + third


@settings(max_examples=60)
@given(st.lists(st.tuples(pieces, st.integers(1, 3)), min_size=1, max_size=3))
def test_factors_multiply_to_the_polynomial(chosen):
    """With their multiplicities and the number; square-free ones are coprime and square-free."""
    whole = RING.constant(6)
    for piece, times in chosen:
        whole = whole * made(piece) ** times
    for split in (factors, squarefree):
        number, found = split(whole)
        product = RING.constant(number)
        for item, count in found:
            product = product * item**count
        assert product == whole or product == -whole
        for place, (item, _) in enumerate(found):
            assert all(item.gcd(other).is_constant() for other, _ in found[:place])
            for at in range(3):
                if item.degrees()[at] > 0:
                    assert item.gcd(item.derivative(at)).degrees()[at] <= 0
    least = max(times for _, times in chosen)
    assert max(count for _, count in squarefree(whole)[1]) >= least


def test_one_generator_is_split_fully():
    """Univariate polynomials come apart into irreducible factors whatever their size."""
    whole = (10**40 * S + 7) ** 2 * (S**2 + 10**40) * 3
    number, found = factors(whole)
    assert number == 3
    assert sorted(count for _, count in found) == [1, 2]
