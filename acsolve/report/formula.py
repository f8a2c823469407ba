"""Closed forms as a person reads them: short ones on a line, long ones power by power."""

from __future__ import annotations

import re
from decimal import Decimal
from typing import TYPE_CHECKING

from acsolve.report.number import plain
from acsolve.report.table import WIDTH, wrapped
from acsolve.report.values import Coefficients, coefficients

if TYPE_CHECKING:
    from acsolve.algebra.ring import Polynomial
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.nested import NestedForm

LONGEST = 40  # terms that are shown in full
_SHOWN = 6  # terms shown of a long coefficient
_WORKABLE = 2000  # terms of a coefficient that are put in order to show the first ones
_POWERS = 12  # powers of s shown of a long polynomial


def formula_lines(
    form: ClosedForm | NestedForm, name: str, *, columns: int | None = WIDTH
) -> list[str]:
    """`name = …`; a long one is cut and says so.

    On a terminal of so many columns a quotient is written as a fraction with its bar where that
    fits; with None, for a pipe, it is one line whatever its length.
    """
    from acsolve.analyses.nested import NestedForm

    if isinstance(form, NestedForm):
        return _steps(form, name)
    found = None if form.symbols else coefficients(form)
    if found is not None:
        return _numeric(found, name, columns)
    count = term_count(form)
    if count > LONGEST:
        return _long_symbolic(form, name, count)
    spelling = form.spelled(safe=False)
    top, bottom = (form.part_text(part, spelling) for part in (form.numerator, form.denominator))
    return fraction(f"{name} = ", top, bottom, columns)


def _steps(form: NestedForm, name: str) -> list[str]:
    """The named steps, then the result; those in the middle are left out of a long list."""
    steps = form.step_texts()
    lines = []
    for step, text in steps[:_STEPS]:
        lines += hung(f"{step} = ", text)
    if len(steps) > _STEPS:
        lines.append(f"… {len(steps) - _STEPS} more steps; --json or --save FILE.json gives all")
    return [*lines, *hung(f"{name} = ", form.text())]


_STEPS = 40  # steps shown of a nested form


def term_count(form: ClosedForm) -> int:
    """Terms of numerator and denominator when written out."""
    return len(form.numerator) + len(form.denominator)


def hung(head: str, text: str, *, width: int = WIDTH) -> list[str]:
    """A formula behind its name; further lines start below it."""
    first, *rest = wrapped(text, width - len(head))
    return [head + first, *(" " * len(head) + line for line in rest)]


def _numeric(found: Coefficients, name: str, columns: int | None) -> list[str]:
    top, bottom = numeric_polynomial(found.top), numeric_polynomial(found.bottom)
    count = sum(value != 0 for value in (*found.top, *found.bottom))
    if count <= LONGEST:
        return fraction(f"{name} = ", top, bottom, columns)
    lines = [f"{name} = N(s)/D(s)"]
    lines += _power_lines("N(s)", [_coefficient(value) for value in found.top])
    lines += _power_lines("D(s)", [_coefficient(value) for value in found.bottom])
    return [*lines, _remark(count)]


def fraction(head: str, top: str, bottom: str, columns: int | None) -> list[str]:
    """top/bottom: with its bar on a terminal, else on one line; wrapped where it is too wide."""
    first = f"({top})" if " " in top else top
    second = f"({bottom})" if any(sign in bottom for sign in " */") else bottom
    if columns is None:
        return [head + (top if bottom == "1" else f"{first}/{second}")]
    if bottom == "1":
        return hung(head, top, width=columns)
    bar = max(len(top), len(bottom)) + 2
    if len(head) + bar <= columns:
        left = " " * len(head)
        return [
            f"{left}{top.center(bar)}".rstrip(),
            head + "-" * bar,
            f"{left}{bottom.center(bar)}".rstrip(),
        ]
    left = " " * (len(head) - 2)
    return [*hung(head, first, width=columns), *hung(f"{left}/ ", second, width=columns)]


def numeric_polynomial(values: tuple[complex | Decimal, ...]) -> str:
    """A polynomial in s with numbers of six digits, the lowest power first."""
    text = ""
    for power, value in enumerate(values):
        if value == 0:
            continue
        negative = value.imag == 0 and value.real < 0
        body = _term(-value if negative else value, power)
        sign = ("-" if negative else "") if not text else (" - " if negative else " + ")
        text += sign + body
    return text or "0"


def _term(value: complex | Decimal, power: int) -> str:
    size = _coefficient(value)
    if power == 0:
        return size
    variable = "s" if power == 1 else f"s^{power}"
    return variable if size == "1" else f"{size}*{variable}"


def _coefficient(value: complex | Decimal) -> str:
    if isinstance(value, Decimal):
        return plain(value)
    if value.imag == 0:
        return plain(value.real)
    sign = "-" if value.imag < 0 else "+"
    return f"({plain(value.real)} {sign} j*{plain(abs(value.imag))})"


def _long_symbolic(form: ClosedForm, name: str, count: int) -> list[str]:
    if not form.rational:
        return [f"{name} has {count} terms.", _remark(count)]
    lines = [f"{name} = N(s)/D(s)"]
    for label, part in zip(("N(s)", "D(s)"), form.coefficients(), strict=True):
        lines += _power_lines(label, [cut_text(form, item) for item in part])
    return [*lines, _remark(count)]


def _power_lines(label: str, texts: list[str]) -> list[str]:
    """One line or more for each power of s, cut after the first ones."""
    present = [(power, text) for power, text in enumerate(texts) if text != "0"]
    lines = [f"{label} ="] if len(present) != 1 else []
    if not lines:
        return hung(f"{label} = ", _with_power(*present[0]))
    for place, (power, text) in enumerate(present[:_POWERS]):
        sign = "  + " if place else "    "
        lines += hung(sign, _with_power(power, text))
    if len(present) > _POWERS:
        lines.append(f"  + … up to s^{present[-1][0]}")
    return lines


def _with_power(power: int, text: str) -> str:
    if power == 0:
        return text
    variable = "s" if power == 1 else f"s^{power}"
    if text == "1":
        return variable
    bracketed = f"({text})" if " " in text and text[0] != "(" else text
    return f"{variable}*{bracketed}"


def cut_text(form: ClosedForm, polynomial: Polynomial) -> str:
    """A coefficient with its first terms, and how many more there are."""
    from acsolve.equations.write import polynomial_text

    count = len(polynomial)
    if count > _WORKABLE:
        return f"({count} terms)"
    text = polynomial_text(polynomial, form.basis, form.spelled(safe=False))
    if count <= _SHOWN + 2:
        return text
    terms = re.split(r"(?= [+-] )", text)
    return "".join(terms[:_SHOWN]) + f" + … {count - _SHOWN} more"


def _remark(count: int) -> str:
    return f"({count} terms; --json or --save FILE.json gives all of them)"
