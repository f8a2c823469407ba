"""Polynomials and expressions as text, in one order that never depends on the file's.

Two spellings: for people (`^`, names as the file has them) and for SymPy's parser (`**`,
safe names).
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction

from acsolve.algebra.ring import Polynomial
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
)
from acsolve.circuit.graph import natural_key
from acsolve.equations.exact import Basis

_RANK = {"R": 1, "L": 2, "C": 3}  # resistances first, as the trade writes time constants


@dataclass(frozen=True, slots=True)
class Spelling:
    """How names and powers are written."""

    names: Mapping[str, str]
    power: str = "^"

    def name(self, name: str) -> str:
        """The spelling of a symbol."""
        return self.names.get(name, name)


def factor_key(leaf: Expression) -> tuple[int, int, object]:
    """Order of factors in a product: numbers, gains, R, L, C, functions, s."""
    match leaf:
        case Name(name):
            last = name.rsplit(".", 1)[-1]
            return (1, _RANK.get(last[0], 0), natural_key(name))
        case Frequency():
            return (3, 0, ())
        case Number() | Pi():
            return (0, 0, str(leaf))
        case _:
            return (2, 0, repr(leaf))


def polynomial_text(polynomial: Polynomial, basis: Basis, spelling: Spelling) -> str:
    """A polynomial as a sum of products, terms in a fixed order.

    Terms go by total degree, then by their factors in the order of the trade.
    """
    if polynomial == 0:
        return "0"
    order = sorted(
        range(len(basis.generators)), key=lambda place: factor_key(basis.generators[place].leaf)
    )
    rank = {place: position for position, place in enumerate(order)}
    texts = [item_text(item.leaf, spelling) for item in basis.generators]
    terms = []
    for exponents, coefficient in polynomial.terms():
        factors = sorted(
            (rank[place], place, int(exponent))
            for place, exponent in enumerate(exponents)
            if exponent
        )
        key = (sum(exponent for *_, exponent in factors), [(a, -e) for a, _, e in factors])
        terms.append((key, int(coefficient), factors))
    terms.sort(key=lambda term: term[0])
    pieces = [
        (coefficient, _monomial_text(basis, texts, factors, spelling))
        for _, coefficient, factors in terms
    ]
    return _sum_text(pieces)


def _sum_text(pieces: list[tuple[int, str]]) -> str:
    text = ""
    for coefficient, factors in pieces:
        sign = "-" if coefficient < 0 else "+"
        size = abs(coefficient)
        body = str(size) if not factors else factors if size == 1 else f"{size}*{factors}"
        text += f" {sign} {body}" if text else f"-{body}" if sign == "-" else body
    return text


def _monomial_text(
    basis: Basis, texts: list[str], factors: list[tuple[int, int, int]], spelling: Spelling
) -> str:
    whole, halves = [], []
    for _, place, exponent in factors:
        power = Fraction(exponent, basis.generators[place].root)
        if power.denominator == 2:
            halves.append(texts[place])
            power -= Fraction(1, 2)
        if power:
            whole.append(power_text(texts[place], power, spelling))
    if halves:
        whole.append(f"sqrt({'*'.join(halves)})")
    return "*".join(whole)


def power_text(base: str, power: Fraction, spelling: Spelling) -> str:
    """A factor to a power as text."""
    if power == 1:
        return base
    if spelling.power in base:
        base = f"({base})"
    exponent = str(power) if power.denominator == 1 and power > 0 else f"({power})"
    return f"{base}{spelling.power}{exponent}"


def item_text(expression: Expression, spelling: Spelling) -> str:
    """An expression that stands as one factor, in brackets where it must."""
    text = expression_text(expression, spelling)
    simple = not isinstance(expression, Sum | Quotient | Product) and text[0] != "-"
    return text if simple and "/" not in text else f"({text})"


def expression_text(expression: Expression, spelling: Spelling) -> str:
    """A value expression as text."""
    match expression:
        case Number(value):
            return str(value)
        case Name(name):
            return spelling.name(name)
        case Pi():
            return "pi"
        case Frequency():
            return "s"
        case Sum(left, right):
            first, second = expression_text(left, spelling), expression_text(right, spelling)
            return f"{first} - {second[1:]}" if second[0] == "-" else f"{first} + {second}"
        case Product(Number(value), right) if value == -1:
            return f"-{_factor(right, spelling)}"
        case Product(left, right):
            return f"{_factor(left, spelling)}*{_factor(right, spelling)}"
        case Quotient(left, right):
            return f"{_factor(left, spelling)}/{item_text(right, spelling)}"
        case Power(base, exponent):
            return _power_item(base, exponent, spelling)
        case Call():
            return _call_text(expression, spelling)
        case PortElement(block, place):
            return spelling.name(f"{block}.{place}")


def _power_item(base: Expression, exponent: Expression, spelling: Spelling) -> str:
    """base to an exponent; a power of a power takes brackets."""
    first = item_text(base, spelling)
    first = f"({first})" if isinstance(base, Power) else first
    return f"{first}{spelling.power}{item_text(exponent, spelling)}"


def _call_text(expression: Call, spelling: Spelling) -> str:
    argument = expression_text(expression.argument, spelling)
    if expression.function == "log10":
        return f"(log({argument})/log(10))"
    return f"{'log' if expression.function == 'ln' else expression.function}({argument})"


def _factor(expression: Expression, spelling: Spelling) -> str:
    """An expression as a factor of a product or the top of a quotient."""
    text = expression_text(expression, spelling)
    return f"({text})" if isinstance(expression, Sum) or text[0] == "-" else text
