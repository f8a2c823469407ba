"""Polynomials written the way a person would: common factors out, parallel groups named.

Every text here is exact: multiplied out, it is the polynomial it was made from.
"""

from __future__ import annotations

from collections import Counter
from dataclasses import dataclass
from fractions import Fraction

from acsolve.algebra.ring import Polynomial
from acsolve.circuit.expression import Name
from acsolve.equations.exact import Basis
from acsolve.equations.write import Spelling, factor_key, polynomial_text, power_text

_LARGEST_GROUPED = 200  # terms; above it factoring out by hand is no longer read by anyone

Terms = dict[tuple[int, ...], int]


@dataclass(frozen=True, slots=True)
class Writer:
    """Writes polynomials over one basis in one spelling."""

    basis: Basis
    spelling: Spelling

    def grouped(self, polynomial: Polynomial) -> str:
        """A polynomial with what its terms share taken out: R1*(C1 + C2) + R2*C2."""
        if len(polynomial) > _LARGEST_GROUPED:
            return polynomial_text(polynomial, self.basis, self.spelling)
        terms = {tuple(map(int, k)): int(value) for k, value in polynomial.terms()}
        return self._sum(terms)

    def factored(self, polynomial: Polynomial) -> str:
        """A polynomial as a product of its irreducible factors, each grouped."""
        if polynomial == 0 or len(polynomial) > _LARGEST_GROUPED:
            return self.grouped(polynomial)
        number, factors = polynomial.factor()
        texts = []
        for factor, exponent in sorted(factors, key=self._key):
            body = self.grouped(factor)
            whole = int(exponent)
            base = f"({body})" if " " in body else body
            texts.append(power_text(base, Fraction(whole), self.spelling) if whole > 1 else base)
        size = abs(int(number))
        if size != 1 or not texts:
            texts.insert(0, str(size))
        if len(texts) == 1 and texts[0].startswith("("):
            texts[0] = texts[0][1:-1]
        return ("-" if int(number) < 0 else "") + "*".join(texts)

    def _key(self, item: tuple[Polynomial, int]) -> tuple[int, str]:
        text = polynomial_text(item[0], self.basis, self.spelling)
        places = [k for k, degree in enumerate(item[0].degrees()) if degree > 0]
        ranks = [factor_key(self.basis.generators[k].leaf) for k in places]
        single = len(item[0]) == 1
        return (0 if single else 1, f"{ranks[0] if single and ranks else ''}{text}")

    def _sum(self, terms: Terms) -> str:
        """Greedy: take out the factor that most terms share, resistances first."""
        place = self._shared(terms)
        if place is None:
            ring = self.basis.ring
            return polynomial_text(ring.context.from_dict(terms), self.basis, self.spelling)
        inside = {_less(k, place): value for k, value in terms.items() if k[place]}
        rest = {k: value for k, value in terms.items() if not k[place]}
        symbol = self._symbol(place)
        body = self._sum(inside)
        negative = all(value < 0 for value in inside.values())
        if negative:
            body = self._sum({k: -value for k, value in inside.items()})
        text = f"{symbol}*({body})" if " " in body else f"{symbol}*{body}"
        if negative:
            text = f"-{text}"
        if not rest:
            return text
        tail = self._sum(rest)
        return f"{text} - {tail[1:]}" if tail.startswith("-") else f"{text} + {tail}"

    def _shared(self, terms: Terms) -> int | None:
        counts = Counter(k for exponents in terms for k, exponent in enumerate(exponents) if exponent)
        shared = [(count, place) for place, count in counts.items() if count > 1]
        if not shared:
            return None

        def rank(item: tuple[int, int]) -> tuple[int, object]:
            return (-item[0], factor_key(self.basis.generators[item[1]].leaf))

        return min(shared, key=rank)[1]

    def _symbol(self, place: int) -> str:
        exponents = tuple(1 if k == place else 0 for k in range(len(self.basis.generators)))
        one = self.basis.ring.context.from_dict({exponents: 1})
        return polynomial_text(one, self.basis, self.spelling)

    def ratio(self, top: Polynomial, bottom: Polynomial) -> str:
        """top/bottom in lowest terms, parallel resistances and inductances as R1 || R2."""
        groups, top, bottom = self._parallel(top, bottom)
        first, second = self.factored(top), self.factored(bottom)
        if groups:
            lead = "" if first == "1" else (f"({first})" if " + " in first or " - " in first else first)
            first = "*".join([*([lead] if lead else []), *groups])
        if second == "1":
            return first
        sums = " " in first and not first.endswith(")")
        first = f"({first})" if sums else first
        return f"{first}/({second})" if any(c in second for c in " */") else f"{first}/{second}"

    def _parallel(
        self, top: Polynomial, bottom: Polynomial
    ) -> tuple[list[str], Polynomial, Polynomial]:
        """Parallel groups found in a ratio, and what is left of it."""
        groups: list[str] = []
        if len(bottom) > _LARGEST_GROUPED or bottom.is_constant() or self.spelling.power != "^":
            return groups, top, bottom  # SymPy's parser has no sign for parallel parts
        for factor, _ in bottom.factor()[1]:
            members = self._members(factor)
            if members is None:
                continue
            product = self.basis.ring.constant(1)
            for place in members:
                product = product * self.basis.ring.generator(place)
            quotient, remainder = divmod(top, product)
            if remainder == 0:
                ordered = sorted(
                    members, key=lambda k: factor_key(self.basis.generators[k].leaf)
                )
                groups.append(f"({' || '.join(self._symbol(k) for k in ordered)})")
                top, bottom = quotient, bottom / factor
        return groups, top, bottom

    def _members(self, factor: Polynomial) -> list[int] | None:
        """The generators x, y, … where the factor is the sum of all products of all but one."""
        places = [k for k, degree in enumerate(factor.degrees()) if degree > 0]
        if len(places) != len(factor) or len(places) < 2 or not self._one_kind(places):
            return None
        for exponents, coefficient in factor.terms():
            present = [k for k in places if exponents[k]]
            if coefficient != 1 or len(present) != len(places) - 1:
                return None
            if any(int(exponents[k]) != 1 for k in present):
                return None
        return places

    def _one_kind(self, places: list[int]) -> bool:
        letters = set()
        for place in places:
            item = self.basis.generators[place]
            if not isinstance(item.leaf, Name) or item.root != 1:
                return False
            letters.add(item.leaf.name.rsplit(".", 1)[-1][0])
        return letters in ({"R"}, {"L"})


def _less(exponents: tuple[int, ...], place: int) -> tuple[int, ...]:
    return (*exponents[:place], exponents[place] - 1, *exponents[place + 1 :])
