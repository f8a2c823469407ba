"""Poles, zeros, hidden modes and stability as a person reads them."""

from __future__ import annotations

import re
from typing import TYPE_CHECKING

from acsolve.report.number import plain
from acsolve.report.root_text import root_text

if TYPE_CHECKING:
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.pole_record import PoleAnswer, RootRecord, RootTable
    from acsolve.analyses.stability import Stability

_SHOWN = 12
_LONGEST = 120  # characters of a closed form
_BESIDE = 34  # characters of one that stands beside its number


def pole_rows(found: PoleAnswer) -> list[tuple[str, str]]:
    """Rows of labels and texts: poles, zeros, what is hidden, stability."""
    rows: list[tuple[str, str]] = []
    for label, table in (("poles", found.poles), ("zeros", found.zeros)):
        rows += _table_rows(label, table, found.form)
    if found.hidden is not None and found.hidden.roots:
        rows += _table_rows("hidden modes", found.hidden, found.form)
        rows.append(("", "modes of the network that this answer does not show"))
    if found.stability is not None:
        rows += stability_rows(found.stability, found.form)
    return rows


def _table_rows(label: str, table: RootTable | None, form: ClosedForm) -> list[tuple[str, str]]:
    if table is None:
        return []
    words = [text for item in table.roots if (text := _words(item, form))]
    words += [
        f"{item.degree} roots of {_polynomial(item.text, form)}"
        for item in table.factors
        if item.degree > 2 and all(root.value is None for root in table.roots)
    ]
    shown = words[:_SHOWN] or ["none"]
    if len(words) > _SHOWN:
        shown.append(f"… and {len(words) - _SHOWN} more; --json gives all of them")
    if not table.certified:
        shown.append("eigenvalues, not certified; --json gives their estimated errors")
    return [(label if place == 0 else "", text) for place, text in enumerate(shown)]


def _polynomial(text: str, form: ClosedForm) -> str:
    """A polynomial whose roots have no closed form here."""
    if len(text) > _LONGEST:
        return "a long polynomial over the symbols, see --json"
    return for_people(text, form)


def _words(item: RootRecord, form: ClosedForm) -> str | None:
    """One root, or a pair of them by its upper half."""
    times = "" if item.multiplicity == 1 else f", {item.multiplicity} times"
    text = None if item.closed_form is None else for_people(item.closed_form, form)
    if item.value is None:
        return None if text is None else f"{_short(text)}{times}"
    if item.value.imag < 0:
        return None
    if item.digits is not None:
        real, imag = item.digits
        text = real if imag == "0" else f"{real} +- j{imag}"
        return f"{text} rad/s{times}"
    beside = f" = {text}" if text and len(text) <= _BESIDE and re.search("sqrt|pi", text) else ""
    return root_text(item.value) + times + (beside if item.value.imag == 0 else "")


def _short(text: str) -> str:
    return text if len(text) <= _LONGEST else "a long closed form, see --json"


def for_people(text: str, form: ClosedForm | None) -> str:
    """A text for SymPy with the file's own names, `^` for powers and j for the unit.

    Without a form it has the file's own names already.
    """
    known = {} if form is None else form.spelled(safe=True).names
    names = {safe: name for name, safe in known.items()}
    spelled = re.sub(r"[A-Za-z_]\w*", lambda match: names.get(match[0], match[0]), text)
    return re.sub(r"\bI\b", "j", spelled.replace("**", "^"))


_VERDICTS = {
    "stable": "stable: every mode of the network decays",
    "marginal": "marginal: no mode grows, but not every one decays",
    "unstable": "not stable: a mode grows",
    "conditional": "stable where",
    "undecided": "not decided",
}


def stability_rows(found: Stability, form: ClosedForm | None) -> list[tuple[str, str]]:
    """The verdict, and the conditions or the reason that go with it."""
    planes = found.planes
    verdict = _VERDICTS[found.verdict]
    if planes is not None and planes.right > 1:
        verdict = f"not stable: {plain(planes.right)} modes grow"
    rows = [("stability", verdict)]
    if found.conditions:
        texts = [_short(for_people(text, form)) for text in found.conditions]
        rows = [("stability", f"{verdict} {texts[0]}")]
        rows += [("", f"and {text}") for text in texts[1:]]
    if found.reason is not None and found.verdict != "unstable":
        rows.append(("", found.reason))
    return rows
