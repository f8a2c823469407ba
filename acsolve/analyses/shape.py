"""What a closed form looks like: limits, order, first- and second-order standard forms."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from math import isqrt
from typing import Literal

from acsolve.algebra.factors import factors
from acsolve.algebra.ring import Polynomial, cancel, positive
from acsolve.analyses.closed_form import ClosedForm
from acsolve.equations.grouping import LARGEST_GROUPED, Writer, factored
from acsolve.equations.phrase import Phrase, product, root
from acsolve.equations.write import Spelling, polynomial_text

ShapeName = Literal["low-pass", "high-pass", "band-pass", "notch", "all-pass", "other"]


@dataclass(frozen=True, slots=True)
class Quotient:
    """An exact ratio of two polynomials without s, common factors removed."""

    form: ClosedForm
    top: Polynomial
    bottom: Polynomial

    def text(self, *, safe: bool = True) -> str:
        """The ratio on one line."""
        spelling = self.form.spelled(safe=safe)
        return str(Writer(self.form.basis, spelling).ratio(self.top, self.bottom))

    @property
    def is_zero(self) -> bool:
        """Whether it is zero."""
        return bool(self.top == 0)


Limit = Quotient | Literal["0", "oo"] | None


def quotient(form: ClosedForm, top: Polynomial, bottom: Polynomial) -> Quotient:
    """top/bottom in lowest terms, the bottom's leading sign positive."""
    first, second = cancel(top, bottom)
    return Quotient(form, *positive(first, second, second))


def ratio_text(form: ClosedForm, top: Polynomial, bottom: Polynomial, spelling: Spelling) -> str:
    """A ratio of polynomials without s, as text."""
    first = polynomial_text(top, form.basis, spelling)
    second = polynomial_text(bottom, form.basis, spelling)
    if second == "1":
        return first
    first = f"({first})" if " " in first else first
    return f"{first}/({second})" if any(sign in second for sign in " */") else f"{first}/{second}"


def limit_text(limit: Limit, *, safe: bool = True) -> str | None:
    """A limit as text: `0`, `oo` (infinite magnitude), an expression, or None."""
    return limit.text(safe=safe) if isinstance(limit, Quotient) else limit


def limits(form: ClosedForm) -> tuple[Limit, Limit]:
    """The value at zero frequency and what it tends to at infinite frequency."""
    if not form.rational:
        return None, None
    top, bottom = form.coefficients()
    if form.numerator == 0:
        return "0", "0"
    low = (_lowest(top), _lowest(bottom))
    high = (len(top) - 1, len(bottom) - 1)
    return _limit(form, top, bottom, low, rising=False), _limit(
        form, top, bottom, high, rising=True
    )


def _lowest(coefficients: list[Polynomial]) -> int:
    return next(power for power, value in enumerate(coefficients) if value != 0)


def _limit(
    form: ClosedForm,
    top: list[Polynomial],
    bottom: list[Polynomial],
    powers: tuple[int, int],
    *,
    rising: bool,
) -> Limit:
    first, second = powers
    if first == second:
        return quotient(form, top[first], bottom[second])
    return "oo" if (first > second) == rising else "0"


@dataclass(frozen=True, slots=True)
class StandardForm:
    """Named parts of a first- or second-order form, each as text SymPy reads.

    First order: `k`, `tau`, `w0`. Second order: `k`, `w0`, `q` with the denominator
    1 + s/(q·w0) + s²/w0². `k` is the gain at zero frequency, at infinity for a high-pass,
    at w0 for a band-pass. Of the shape "other" the numerator has parts of its own:
    `tau_z` of 1 + tau_z·s; `w_z` and `q_z` of 1 + s/(q_z·w_z) + s²/w_z², where `w_z` is
    left out if it is w0; and `k1` stands for `k` in k1·s·(1 + tau_z·s), as in k1·s of a
    band-pass without loss, whose `q` is "oo". Where the values decide whether what stands
    under a root is positive, the form holds while it is.
    """

    shape: ShapeName
    order: int
    parts: Mapping[str, str]


def standard_form(form: ClosedForm, *, safe: bool = True) -> StandardForm | None:
    """The standard form of a first- or second-order response, or None."""
    if not form.rational or form.numerator == 0:
        return None
    top, bottom = form.coefficients()
    order = len(bottom) - 1
    if order not in (1, 2) or len(top) > len(bottom) or bottom[0] == 0:
        return None
    if order == 2 and sign_of(bottom[0] * bottom[2]) < 0:
        return None  # two real poles on either side: there is no w0
    shape = _shape(top, bottom)
    write = Writer(form.basis, form.spelled(safe=safe))
    if shape == "other":
        parts = _numerator(write, top, bottom)
    elif shape == "band-pass" and bottom[1] == 0:  # no loss: no gain at w0
        parts = {"k1": write.ratio(top[1], bottom[0])}
    else:
        place = {"high-pass": order, "band-pass": 1}.get(shape, 0)
        parts = {"k": write.ratio(top[place], bottom[place])}
    if order == 1:
        parts |= {
            "tau": write.ratio(bottom[1], bottom[0]),
            "w0": write.ratio(bottom[0], bottom[1]),
        }
    else:
        parts |= {"w0": natural_frequency(write, bottom), "q": quality(write, bottom)}
    return StandardForm(shape, order, {name: str(part) for name, part in parts.items()})


def _numerator(write: Writer, top: list[Polynomial], bottom: list[Polynomial]) -> dict[str, Phrase]:
    """The named parts of a numerator of several terms; empty where it has none."""
    if top[0] == 0:
        return {"k1": write.ratio(top[1], bottom[0]), "tau_z": write.ratio(top[2], top[1])}
    gain = {"k": write.ratio(top[0], bottom[0])}
    if len(top) == 2:
        return gain | {"tau_z": write.ratio(top[1], top[0])}
    if sign_of(top[0] * top[2]) < 0:
        return {}
    same = top[0] * bottom[2] == top[2] * bottom[0]
    parts = gain if same else gain | {"w_z": natural_frequency(write, top)}
    return parts if top[1] == 0 else parts | {"q_z": quality(write, top)}


def sign_of(polynomial: Polynomial) -> int:
    """1 or -1 where all coefficients have that sign, else 0."""
    signs = {1 if value > 0 else -1 for value in polynomial.coeffs()}
    return signs.pop() if len(signs) == 1 else 0


def natural_frequency(write: Writer, coefficients: list[Polynomial]) -> Phrase:
    """sqrt(c0/c2), what can leave the root outside it."""
    first, _, last = coefficients
    top, bottom = cancel(first, last)
    (outer, upper), (divisor, lower) = rooted(top), rooted(bottom)
    lead = write.pieces(outer, divisor)
    under = product(lead.top, [*lead.bottom, root(write.ratio(lower, upper))])
    if upper == 1:
        return under
    return _shortest(product([*lead.top, root(write.ratio(upper, lower))], lead.bottom), under)


def quality(write: Writer, coefficients: list[Polynomial]) -> Phrase:
    """sqrt(c2/c0)·c0/c1, the shortest of several spellings."""
    first, middle, last = coefficients
    if middle == 0:
        return Phrase("oo")
    period = natural_frequency(write, [last, middle, first])
    whole = product([period], [write.ratio(middle, first)])
    if sign_of(first) == 0:
        return whole
    first, middle, last = (value * sign_of(first) for value in coefficients)
    outer, inner = rooted(first * last)
    outer, divisor = cancel(outer, middle)
    ways = [_quotient(write, (outer, divisor), (inner, first * 0 + 1))]
    shared = _radical(inner.gcd(divisor))
    if shared != 1:  # sqrt(x·y)/(x·z) = sqrt(y/x)/z
        ways.append(_quotient(write, (outer, divisor / shared), (inner / shared, shared)))
    return _shortest(*ways, whole)


def _quotient(
    write: Writer, ratio: tuple[Polynomial, Polynomial], inside: tuple[Polynomial, Polynomial]
) -> Phrase:
    """A ratio times the root of another."""
    lead = write.pieces(*ratio)
    return product([*lead.top, root(write.ratio(*inside))], lead.bottom)


def rooted(polynomial: Polynomial) -> tuple[Polynomial, Polynomial]:
    """outside, inside with outside²·inside the polynomial and outside positive."""
    outside = polynomial.context().constant(1)
    if len(polynomial) > LARGEST_GROUPED:
        return outside, polynomial
    found = factored(polynomial)
    inside = outside * (1 if found.number > 0 else -1)
    number, whole = abs(found.number), 1
    for prime in (2, 3, 5, 7, 11, 13):
        while number % prime**2 == 0:
            number, whole = number // prime**2, whole * prime
    if isqrt(number) ** 2 == number:
        number, whole = 1, whole * isqrt(number)
    outside, inside = outside * whole, inside * number
    for factor, exponent in (*found.sums, *factors(found.monomial)[1]):
        count = int(exponent) // 2 if sign_of(factor) > 0 else 0
        outside, inside = outside * factor**count, inside * factor ** (int(exponent) - 2 * count)
    return outside, inside


def _radical(polynomial: Polynomial) -> Polynomial:
    """The product of those irreducible factors that are positive whatever the parts."""
    one = polynomial.context().constant(1)
    if polynomial.is_constant():
        return one
    for factor, exponent in factors(polynomial)[1]:
        if sign_of(factor) > 0 and exponent == 1:
            one = one * factor
    return one


def _shortest(*ways: Phrase) -> Phrase:
    return min(ways, key=lambda item: len(str(item)))


def _shape(top: list[Polynomial], bottom: list[Polynomial]) -> ShapeName:
    order = len(bottom) - 1
    present = [power for power, value in enumerate(top) if value != 0]
    if present == [0]:
        return "low-pass"
    if present == [order]:
        return "high-pass"
    if order == 2 and present == [1]:
        return "band-pass"
    if order == 2 and present == [0, 2] and top[0] * bottom[2] == top[2] * bottom[0]:
        return "notch"
    mirrored = [value if power % 2 == 0 else -value for power, value in enumerate(bottom)]
    full = len(top) == len(bottom)
    if full and all(a * mirrored[0] == b * top[0] for a, b in zip(top, mirrored, strict=True)):
        return "all-pass"
    return "other"
