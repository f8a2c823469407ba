"""What a closed form looks like: limits, order, first- and second-order standard forms."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import Literal

from acsolve.algebra.ring import Polynomial, cancel, positive
from acsolve.analyses.closed_form import ClosedForm
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
        return ratio_text(self.form, self.top, self.bottom, self.form.spelled(safe=safe))

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
    at w0 for a band-pass.
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
    shape = _shape(top, bottom)
    spelling = form.spelled(safe=safe)

    def text(first: Polynomial, second: Polynomial) -> str:
        ratio = quotient(form, first, second)
        return ratio_text(form, ratio.top, ratio.bottom, spelling)

    place = {"high-pass": order, "band-pass": 1}.get(shape, 0)
    parts = {"k": text(top[place], bottom[place])} if shape != "other" else {}
    if order == 1:
        parts |= {"tau": text(bottom[1], bottom[0]), "w0": text(bottom[0], bottom[1])}
    else:
        parts |= {
            "w0": f"sqrt({text(bottom[0], bottom[2])})",
            "q": _quality(form, bottom, spelling),
        }
    return StandardForm(shape, order, parts)


def _quality(form: ClosedForm, bottom: list[Polynomial], spelling: Spelling) -> str:
    """sqrt(d0·d2)/d1 as text."""
    if bottom[1] == 0:
        return "oo"
    product = polynomial_text(bottom[0] * bottom[2], form.basis, spelling)
    divisor = polynomial_text(bottom[1], form.basis, spelling)
    simple = not any(sign in divisor for sign in " */")
    return f"sqrt({product})/{divisor}" if simple else f"sqrt({product})/({divisor})"


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
