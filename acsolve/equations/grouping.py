"""Polynomials written the way a person would: common factors out, parallel groups named.

Every text here is exact: multiplied out, it is the polynomial it was made from. Where a
formula can be written in several ways, the shortest is taken.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterator, Sequence
from dataclasses import dataclass, field
from itertools import combinations
from operator import ge, sub
from typing import Any

from acsolve.algebra.factors import factors
from acsolve.algebra.ring import Polynomial, cancel, positive
from acsolve.circuit.expression import Name
from acsolve.equations.exact import Basis
from acsolve.equations.phrase import ZERO, Phrase, between, fraction, power, product, total, written
from acsolve.equations.write import Spelling, factor_key, polynomial_text

LARGEST_GROUPED = 200  # terms; above it factoring out by hand is no longer read by anyone
_BRANCHES = ((6, 8), (12, 3))  # (terms up to, factors tried): the search for the shortest text

Factors = list[tuple[Polynomial, int]]
Terms = dict[tuple[int, ...], Any]  # exponents -> whole number of python-flint


@dataclass(frozen=True, slots=True)
class Pieces:
    """The factors of a ratio as phrases, above and below the line."""

    top: tuple[Phrase, ...]
    bottom: tuple[Phrase, ...] = ()

    def times(self, *more: Phrase) -> Phrase:
        """The ratio as one phrase, further factors behind those above the line."""
        return product([*self.top, *more], self.bottom)


@dataclass(frozen=True, slots=True)
class Factored:
    """A polynomial as sign, whole number, monomial and irreducible sums with exponents."""

    number: int
    monomial: Polynomial
    sums: Factors


def factored(polynomial: Polynomial) -> Factored:
    """The factors of a polynomial that is not zero, most terms of each sum positive."""
    number, found = factors(polynomial)
    size, monomial, sums = int(number), polynomial.context().constant(1), []
    for factor, exponent in found:
        count = int(exponent)
        if len(factor) == 1:
            monomial = monomial * factor**count
        elif sum(1 if value > 0 else -1 for value in factor.coeffs()) < 0:
            sums.append((-factor, count))
            size = -size if count % 2 else size
        else:
            sums.append((factor, count))
    return Factored(size, monomial, sums)


@dataclass(frozen=True, slots=True)
class Writer:
    """Writes polynomials over one basis in one spelling."""

    basis: Basis
    spelling: Spelling
    _known: dict[str, Phrase] = field(default_factory=dict, repr=False, compare=False)

    def grouped(self, polynomial: Polynomial) -> Phrase:
        """A polynomial as a product of its factors, in each what its terms share taken out."""
        return product(self.factors(polynomial))

    def factors(self, polynomial: Polynomial) -> list[Phrase]:
        """The factors of a polynomial as phrases: number, monomial, sums."""
        if polynomial == 0:
            return [ZERO]
        if len(polynomial) > LARGEST_GROUPED:
            return [self._long(polynomial)]
        found = factored(polynomial)
        return [fraction(found.number), self._monomial(found.monomial), *self._sums(found.sums)]

    def _long(self, polynomial: Polynomial) -> Phrase:
        return written(polynomial_text(polynomial, self.basis, self.spelling))

    _monomial = _long

    def _sums(self, sums: Factors) -> list[Phrase]:
        found = [power(self._sum(item), count, self.spelling.power) for item, count in sums]
        return sorted(found, key=lambda item: (len(item.text), item.text))

    def _sum(self, polynomial: Polynomial) -> Phrase:
        """A sum without common factor: the shortest of the ways to take factors out of it."""
        key = str(polynomial)
        known = self._known.get(key)
        if known is None:
            ways = [self._taken_out(polynomial, place) for place in self._shared(polynomial)]
            ways = ways or [total(self._monomial(item) for item in self._terms(polynomial))]
            known = self._known[key] = min(ways, key=lambda item: len(str(item)))
        return known

    def _taken_out(self, polynomial: Polynomial, place: int) -> Phrase:
        inside: Terms = {}
        rest: Terms = {}
        for exponents, coefficient in polynomial.terms():
            (inside if exponents[place] else rest)[exponents] = coefficient
        make = polynomial.context().from_dict
        return total([self.grouped(make(inside)), self.grouped(make(rest))])

    def _shared(self, polynomial: Polynomial) -> list[int]:
        """Generators that several terms share, the most frequent first, resistances first."""
        counts = Counter(
            place for term in polynomial.monoms() for place, exponent in enumerate(term) if exponent
        )
        shared = [place for place, count in counts.items() if count > 1]
        shared.sort(key=lambda place: (-counts[place], self._rank(place)))
        tried = next((most for size, most in _BRANCHES if len(polynomial) <= size), 1)
        return shared[:tried]

    def _rank(self, place: int) -> tuple[int, int, object]:
        return factor_key(self.basis.generators[place].leaf)

    def _terms(self, polynomial: Polynomial) -> list[Polynomial]:
        """The terms, each a polynomial, by degree and then in the order of the trade."""
        order = sorted(range(len(self.basis.generators)), key=self._rank)

        def rank(term: tuple[tuple[int, ...], object]) -> tuple[int, list[int]]:
            return sum(map(int, term[0])), [-int(term[0][place]) for place in order]

        make = polynomial.context().from_dict
        return [make({key: value}) for key, value in sorted(polynomial.terms(), key=rank)]

    def ratio(self, top: Polynomial, bottom: Polynomial, *times: Phrase) -> Phrase:
        """top/bottom as a phrase, further factors behind the top."""
        return self.pieces(top, bottom).times(*times)

    def pieces(self, top: Polynomial, bottom: Polynomial) -> Pieces:
        """top/bottom in lowest terms: the shortest of plain, split and parallel spellings."""
        first, second = cancel(top, bottom)
        first, second = positive(first, second, second)
        if first == 0:
            return Pieces((ZERO,))
        if max(len(first), len(second)) > LARGEST_GROUPED:
            return Pieces((self._long(first),), (self._long(second),))
        ways = [Pieces(tuple(self.factors(first)), tuple(self.factors(second)))]
        if second != 1:
            ways += self._split(first, second)
            ways += self._parallel(first, second)
        return min(ways, key=lambda item: len(str(item.times())))

    def _split(self, top: Polynomial, bottom: Polynomial) -> Iterator[Pieces]:
        """q + r/m where a factor of the top holds multiples of a divisor of the bottom."""
        for factor, count in factored(top).sums:
            for divisor in self._divisors(bottom) if count == 1 else ():
                above, below = top / factor, bottom / divisor
                if _share_generators(below, factor):
                    continue
                whole, rest = _multiples(factor, divisor)
                if whole != 0 and rest != 0:
                    sum_of = total([self.grouped(whole), self.ratio(rest, divisor)])
                    yield Pieces((*self.factors(above), sum_of), tuple(self.factors(below)))

    def _divisors(self, bottom: Polynomial) -> list[Polynomial]:
        found = factored(bottom)
        places = [place for place, degree in enumerate(found.monomial.degrees()) if degree]
        single = [self.basis.ring.generator(place) for place in places]
        single += [item for item, _ in found.sums]
        whole = [found.monomial * found.number, found.monomial]
        return single if found.monomial.is_one() else [*whole, *single]

    def _parallel(self, top: Polynomial, bottom: Polynomial) -> Iterator[Pieces]:
        """Parallel resistances or inductances as R1 || R2, above or below the line."""
        if self.spelling.power != "^":
            return  # SymPy's parser has no sign for parallel parts
        groups, first, second = self._groups(top, bottom)
        if groups:
            yield Pieces(self._led(first, groups), tuple(self.factors(second)))
        groups, second, first = self._groups(bottom, top)
        if groups:
            yield Pieces(tuple(self.factors(first)), self._led(second, groups))

    def _led(self, polynomial: Polynomial, groups: Sequence[Phrase]) -> tuple[Phrase, ...]:
        number, *rest = self.factors(polynomial)
        return (number, *groups, *rest)

    def _groups(
        self, top: Polynomial, bottom: Polynomial
    ) -> tuple[list[Phrase], Polynomial, Polynomial]:
        """Parallel groups found in a ratio, and what is left of it."""
        groups: list[Phrase] = []
        for factor, _ in factored(bottom).sums:
            members = self._alike(factor) or self._pair(top, factor)
            if not members:
                continue
            together = self.basis.ring.constant(1)
            for item in members:
                together = together * item
            quotient, remainder = divmod(top, together)
            if remainder == 0:
                groups.append(between("||", [self.grouped(item) for item in members]))
                top, bottom = quotient, bottom / factor
        return groups, top, bottom

    def _alike(self, factor: Polynomial) -> list[Polynomial]:
        """The generators x, y, … where the factor is the sum of all products of all but one."""
        places = [place for place, degree in enumerate(factor.degrees()) if degree > 0]
        if len(places) != len(factor) or not self._one_kind(factor):
            return []
        for exponents, coefficient in factor.terms():
            present = [int(exponents[place]) for place in places if exponents[place]]
            if coefficient != 1 or present != [1] * (len(places) - 1):
                return []
        return [self.basis.ring.generator(place) for place in sorted(places, key=self._rank)]

    def _pair(self, top: Polynomial, factor: Polynomial) -> list[Polynomial]:
        """Two factors of the top whose sum is the factor: R3 beside R1 + R2, say."""
        if any(value != 1 for value in factor.coeffs()) or not self._one_kind(factor):
            return []
        if any(sum(map(int, term)) != 1 for term in factor.monoms()):
            return []
        items = sorted((item for item, _ in factors(top)[1]), key=self._first)
        return next(([a, b] for a, b in combinations(items, 2) if a + b == factor), [])

    def _first(self, polynomial: Polynomial) -> tuple[int, int, object]:
        places = [place for place, degree in enumerate(polynomial.degrees()) if degree]
        return min(map(self._rank, places))

    def _one_kind(self, factor: Polynomial) -> bool:
        letters = set()
        for place, degree in enumerate(factor.degrees()):
            item = self.basis.generators[place] if degree else None
            if item is None:
                continue
            if not isinstance(item.leaf, Name) or item.root != 1:
                return False
            letters.add(item.leaf.name.rsplit(".", 1)[-1][0])
        return letters in ({"R"}, {"L"})


def _share_generators(first: Polynomial, second: Polynomial) -> bool:
    return any(a and b for a, b in zip(first.degrees(), second.degrees(), strict=True))


def _multiples(factor: Polynomial, divisor: Polynomial) -> tuple[Polynomial, Polynomial]:
    """The factor as whole·divisor + rest, without splitting any of its terms."""
    make = factor.context().from_dict
    left = dict(factor.terms())
    (least, size), *_ = divisor.terms()
    whole: Terms = {}
    for exponents, coefficient in factor.terms():
        if coefficient % size or not all(map(ge, exponents, least)):
            continue
        step = {tuple(map(sub, exponents, least)): coefficient // size}
        terms = dict((make(step) * divisor).terms())
        if all(left.get(key) == value for key, value in terms.items()):
            whole |= step
            left = {key: value for key, value in left.items() if key not in terms}
    return make(whole), make(left)
