"""Factors of polynomials with whole coefficients of any size.

The library sorts the factors of a multivariate polynomial by their coefficients, and fails
where these exceed 63 bits (seen in python-flint 0.8). One generator alone goes through its
univariate polynomials; several, where it fails, through square-free factors.
"""

from __future__ import annotations

from typing import Any

from acsolve.algebra.ring import Polynomial

Factors = list[tuple[Polynomial, int]]


def factors(polynomial: Polynomial) -> tuple[int, Factors]:
    """A whole number and irreducible factors with multiplicities; the polynomial is not zero.

    Where the library cannot sort them, square-free ones stand for irreducible ones.
    """
    single = _single(polynomial)
    if single is not None:
        place, poly = single
        number, found = poly.factor()
        return int(number), [(_back(polynomial, place, item), int(count)) for item, count in found]
    try:
        number, found = polynomial.factor()
    except OverflowError:
        return squarefree(polynomial)
    return int(number), [(item, int(count)) for item, count in found]


def squarefree(polynomial: Polynomial) -> tuple[int, Factors]:
    """A whole number and square-free factors, coprime, with their multiplicities."""
    single = _single(polynomial)
    if single is not None:
        place, poly = single
        number, found = poly.factor_squarefree()
        return int(number), [(_back(polynomial, place, item), int(count)) for item, count in found]
    try:
        number, found = polynomial.factor_squarefree()
    except OverflowError:
        content = int(polynomial.content())
        return content, _by_gcd(polynomial / content)
    return int(number), [(item, int(count)) for item, count in found]


def _single(polynomial: Polynomial) -> tuple[int, Any] | None:
    """The one generator that occurs (0 where none does) and the polynomial in it."""
    from flint import fmpz_poly

    places = [place for place, degree in enumerate(polynomial.degrees()) if degree > 0]
    if len(places) > 1:
        return None
    place = places[0] if places else 0
    terms = {int(key[place]) if key else 0: int(value) for key, value in polynomial.terms()}
    return place, fmpz_poly([terms.get(power, 0) for power in range(max(terms, default=0) + 1)])


def _back(polynomial: Polynomial, place: int, poly: Any) -> Polynomial:
    size = len(polynomial.degrees())
    terms = {
        tuple(power if at == place else 0 for at in range(size)): int(value)
        for power, value in enumerate(poly.coeffs())
        if value
    }
    return polynomial.context().from_dict(terms)


def _by_gcd(polynomial: Polynomial) -> Factors:
    """Square-free factors by derivatives, one generator after the other.

    In each generator by the algorithm of D. Y. Y. Yun (SYMSAC 1976); what does not depend on
    it is left for the next.
    """
    found: Factors = []
    for place in range(len(polynomial.degrees())):
        if polynomial.degrees()[place] <= 0:
            continue
        rest = _content(polynomial, place)
        found += _yun(polynomial / rest, place)
        polynomial = rest
    return found


def _content(polynomial: Polynomial, place: int) -> Polynomial:
    """The largest factor without a generator."""
    groups: dict[int, dict[tuple[int, ...], Any]] = {}
    for key, value in polynomial.terms():
        rest = (*key[:place], 0, *key[place + 1 :])
        groups.setdefault(int(key[place]), {})[rest] = value
    common = polynomial.context().constant(0)
    for terms in groups.values():
        common = common.gcd(polynomial.context().from_dict(terms))
    return common


def _yun(polynomial: Polynomial, place: int) -> Factors:
    slope = polynomial.derivative(place)
    common = polynomial.gcd(slope)
    left, right = polynomial / common, slope / common
    right = right - left.derivative(place)
    found: Factors = []
    count = 1
    while left.degrees()[place] > 0:
        factor = left.gcd(right)
        if factor.degrees()[place] > 0:
            found.append((factor, count))
        left, right = left / factor, right / factor
        right = right - left.derivative(place)
        count += 1
    return found


def whole_text(value: int) -> str:
    """A whole number of any size in decimal; Python's own way stops at 4,300 digits."""
    from flint import fmpz

    return str(fmpz(value))
