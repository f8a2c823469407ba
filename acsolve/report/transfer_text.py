"""Transfers and impedances as a person reads them."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from acsolve.report.entry import Entry, letter, unit_sign
from acsolve.report.formula import LONGEST, formula_lines
from acsolve.report.number import (
    complex_text,
    decibels,
    engineering,
    gain_in_db,
    hertz,
    plain,
)
from acsolve.report.pole_text import pole_rows
from acsolve.report.root_text import root_words
from acsolve.report.table import labelled
from acsolve.report.values import limit_number, standard_numbers

if TYPE_CHECKING:
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.nested import NestedForm
    from acsolve.analyses.shape import Limit, StandardForm
    from acsolve.analyses.transfer import TransferAnswer

_ROOTS_SHOWN = 12
_NESTED_NOTES = (
    "Z and Y are impedances and admittances looking away from the drive, V and I voltages and "
    "currents for a drive of one, T intermediate values",
    "limits, poles and zeros need the expanded form",
)
_LONGEST_EXACT = 14  # characters of an exact fraction that is shown beside the decimal one
_LONGEST_FORMULA = 160

_ORDERS = {1: "first", 2: "second"}
_DENOMINATORS = {1: "1 + tau*s", 2: "1 + s/(q*w0) + s^2/w0^2"}


def transfer_lines(entry: Entry) -> list[str]:
    """The body of a transfer or impedance answer."""
    from acsolve.analyses.nested import NestedForm

    found = entry.transfer
    assert found is not None, "a transfer entry holds a transfer answer"
    assert entry.ask is not None, "a transfer entry holds its question"
    form = found.form
    unit = unit_sign(entry.ask)
    name, columns = f"{letter(entry.ask)}(s)", entry.heading.columns
    lines = formula_lines(form, name, columns=columns)
    rows: list[tuple[str, str]] = []
    if isinstance(form, NestedForm):
        rows += [("note", text) for text in _NESTED_NOTES]
    elif form.rational:
        rows += [
            ("at 0 Hz", limit_words(found.at_zero, unit)),
            ("at infinite frequency", limit_words(found.at_infinity, unit)),
        ]
        rows.append(("order", str(found.order)))
    else:
        rows.append(("note", "not a ratio of polynomials in s: no poles, zeros or order"))
    rows += _standard_rows(found, entry.formula, unit)
    rows += _root_rows(found) if entry.roots is None else pole_rows(entry.roots)
    rows += checked_rows(form)
    from acsolve.report.reading_text import approximation_lines, reading_lines

    return [
        *lines,
        *reading_lines(entry),
        "",
        *labelled(rows),
        *approximation_lines(entry),
        *_equivalent_lines(entry),
    ]


def _equivalent_lines(entry: Entry) -> list[str]:
    from acsolve.report.equivalent_text import equivalent_lines

    if entry.equivalent is None:
        return []
    return equivalent_lines(entry.equivalent, entry.heading.columns)


def limit_words(limit: Limit, unit: str) -> str:
    """A limit with its unit: a number where it is one, else the expression."""
    from acsolve.analyses.shape import Quotient

    if limit is None:
        return "unknown"
    if limit == "oo":
        return "infinite"
    value = limit_number(limit)
    if not isinstance(limit, Quotient):
        return f"0 {unit}".rstrip()
    exact = limit.text(safe=False)
    if limit.form.symbols and not _is_number(limit):
        text = exact if len(limit.top) + len(limit.bottom) <= LONGEST else "a long expression"
        return text if value is None else f"{text} = {_sized(value, unit)}"
    if value is None:
        return exact
    fraction = f"  (exactly {exact})" if "/" in exact and len(exact) <= _LONGEST_EXACT else ""
    return _sized(value, unit) + fraction


def _is_number(limit: Limit) -> bool:
    from acsolve.analyses.shape import Quotient

    assert isinstance(limit, Quotient), "only a quotient can be a number"
    return all(not any(part.degrees()) for part in (limit.top, limit.bottom))


def _sized(value: complex, unit: str) -> str:
    if value.imag or unit:
        return complex_text(value, unit)
    return f"{plain(value.real)}  ({decibels(gain_in_db(value.real))})" if value else "0"


def _standard_rows(
    found: TransferAnswer, formula: TransferAnswer | None, unit: str
) -> list[tuple[str, str]]:
    from acsolve.analyses.nested import NestedForm

    standard = found.standard_form
    if standard is None or isinstance(found.form, NestedForm):
        return []
    texts = _formula_texts(found, formula)
    numbers = standard_numbers(found.form, standard.parts)
    rows = [("standard form", f"{standard.shape}, {_ORDERS[standard.order]} order")]
    rows.append(("", _shape_formula(standard)))
    for name in standard.parts:
        words = [item for item in (texts.get(name), _quantity(name, numbers, unit)) if item]
        if words:
            rows.append((f"  {name}", " = ".join(words)))
    return rows


def _shape_formula(standard: StandardForm) -> str:
    below = _DENOMINATORS[standard.order]
    first = standard.order == 1
    tops = {
        "low-pass": "k",
        "high-pass": "k*tau*s" if first else "k*s^2/w0^2",
        "band-pass": "k*s/(q*w0)",
        "notch": "k*(1 + s^2/w0^2)",
        "all-pass": "k*(1 - tau*s)" if first else "k*(1 - s/(q*w0) + s^2/w0^2)",
    }
    if standard.shape not in tops:
        return f"with the denominator {below}"
    return f"{tops[standard.shape]} / ({below})"


def _formula_texts(found: TransferAnswer, formula: TransferAnswer | None) -> dict[str, str]:
    """The formula of each named quantity, of the answer itself or of its symbolic twin."""
    from acsolve.analyses.nested import NestedForm
    from acsolve.analyses.shape import standard_form

    source = found if found.form.symbols else formula
    if source is None or isinstance(source.form, NestedForm):
        return {}
    if source.standard_form is None or found.standard_form is None:
        return {}
    same = (source.standard_form.shape, source.standard_form.order) == (
        found.standard_form.shape,
        found.standard_form.order,
    )
    spelled = standard_form(source.form, safe=False)
    if not same or spelled is None:
        return {}
    return {
        name: text
        for name, text in spelled.parts.items()
        if len(text) <= _LONGEST_FORMULA and text != "oo" and re.search("[A-Za-z]", text)
    }


def _quantity(name: str, numbers: dict[str, complex], unit: str) -> str:
    if name not in numbers:
        return ""
    if name == "k":
        return complex_text(numbers[name], unit)
    value = numbers[name].real
    match name:
        case "tau":
            return engineering(value, "s")
        case "w0":
            return f"{plain(value)} rad/s  ({engineering(hertz(value), 'Hz')})"
        case _:
            return plain(value)


def _root_rows(found: TransferAnswer) -> list[tuple[str, str]]:
    if found.roots is None:
        return []
    rows: list[tuple[str, str]] = []
    for label, roots in (("poles", found.roots.poles), ("zeros", found.roots.zeros)):
        words = root_words(roots) or ["none"]
        shown = words[:_ROOTS_SHOWN]
        if len(words) > _ROOTS_SHOWN:
            shown.append(f"… and {len(words) - _ROOTS_SHOWN} more; --json gives all of them")
        rows += [(label if place == 0 else "", text) for place, text in enumerate(shown)]
    return rows


def checked_rows(form: ClosedForm | NestedForm) -> list[tuple[str, str]]:
    """What the closed form was checked against."""
    if form.checked is None:
        return []
    error = form.checked.max_relative_error
    found = f"largest relative difference {plain(error, 2)}" if error else "no difference"
    what = f"against an independent numeric solution at {form.checked.points} points"
    return [("checked", f"{what}, {found}")]
