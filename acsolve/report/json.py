"""Answers as JSON values: the keys that other programs rely on, strings SymPy can read."""

from __future__ import annotations

import json
import re
from collections.abc import Iterable, Mapping
from math import isfinite
from typing import TYPE_CHECKING, Any

from acsolve.errors import Diagnostic
from acsolve.report.entry import Entry

if TYPE_CHECKING:
    from acsolve.algebra.ring import Polynomial
    from acsolve.analyses.closed_form import Checked, ClosedForm
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.nested import NestedForm
    from acsolve.analyses.proof import Verification
    from acsolve.analyses.sweep import Placement
    from acsolve.analyses.transfer import TransferAnswer

FORMAT = 1


def answers_text(entries: Iterable[Entry]) -> str:
    """All answers as one JSON document that ends with a line end."""
    return _dump({"format": FORMAT, "answers": [answer(entry) for entry in entries]})


def errors_text(problems: Iterable[Diagnostic], answers: Iterable[Entry] | None = None) -> str:
    """Problems as one JSON document, with what could be answered where that is useful."""
    document: dict[str, Any] = {"format": FORMAT}
    if answers is not None:
        document["answers"] = [answer(entry) for entry in answers]
    document["errors"] = [problem(item) for item in problems]
    return _dump(document)


def _dump(document: Mapping[str, Any]) -> str:
    return json.dumps(document, allow_nan=False, ensure_ascii=False) + "\n"


def problem(item: Diagnostic) -> dict[str, Any]:
    """A diagnostic; file, line and column are null for what stands in no file."""
    span = item.span
    return {
        "code": item.code,
        "severity": item.severity,
        "message": item.message,
        "file": span.source.name if span else None,
        "line": span.line if span else None,
        "column": span.column if span else None,
        "where": item.where,
        "hint": item.hint,
    }


def answer(entry: Entry) -> dict[str, Any]:
    """One answer under the keys of its kind."""
    return {**_heading(entry), **_BODIES[entry.kind](entry), **_remarks(entry)}


def number(value: float | None) -> float | None:
    """A JSON number, null where it is not finite."""
    return float(value) if value is not None and isfinite(value) else None


def numbers(values: Iterable[float]) -> list[float | None]:
    """A list of JSON numbers."""
    return [number(value) for value in values]


def complex_number(value: complex) -> list[float | None]:
    """A complex number as [re, im]."""
    return [number(value.real), number(value.imag)]


def _heading(entry: Entry) -> dict[str, Any]:
    ask = entry.ask
    heading: dict[str, Any] = {"kind": entry.kind, "title": entry.heading.title}
    if ask is not None and ask.quantity == "impedance":
        heading["into"] = list(ask.target)
    else:
        heading["from"] = list(ask.source) if ask and ask.source else None
        heading["to"] = list(ask.target) if ask else None
    heading["quantity"] = ask.quantity if ask else None
    if ask is not None and ask.ammeter:
        heading["through"] = ask.ammeter
    heading["variant"] = entry.heading.variant
    return heading


def _remarks(entry: Entry) -> dict[str, Any]:
    return {
        "cautions": list(entry.heading.cautions),
        "warnings": [problem(item) for item in entry.heading.warnings],
    }


def replaced_names(names: Mapping[str, str]) -> dict[str, str]:
    """Safe name -> name, for the names that had to be replaced."""
    return {safe: name for name, safe in names.items() if safe != name}


def _closed_form(entry: Entry) -> dict[str, Any]:
    from acsolve.analyses.shape import limit_text

    found: TransferAnswer = _filled(entry.transfer)
    standard = found.standard_form
    return {
        **_expression(found.form),
        "order": found.order,
        "at_zero": limit_text(found.at_zero),
        "at_infinity": limit_text(found.at_infinity),
        "shape": standard.shape if standard else None,
        "standard_form": dict(standard.parts) if standard else None,
        "poles": _roots(found, "poles"),
        "zeros": _roots(found, "zeros"),
        "checked": _checked(found.form),
        "symbols": replaced_names(found.form.spelled(safe=True).names),
        **_described(entry),
        **_readings(entry),
        **_approximations(entry),
        **_equivalent(entry),
    }


def _equivalent(entry: Entry) -> dict[str, Any]:
    from acsolve.report.equivalent_text import equivalent_body

    return {} if entry.equivalent is None else equivalent_body(entry.equivalent)


def _described(entry: Entry) -> dict[str, Any]:
    """Poles and zeros one by one, hidden modes and stability, where they were asked for."""
    from acsolve.report.pole_json import pole_body

    return {} if entry.roots is None else pole_body(entry.roots)


def _readings(entry: Entry) -> dict[str, Any]:
    """The shapes that were asked for: name -> list of [label, text]."""
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.reading import FORM_NAMES, reading

    answer: TransferAnswer = _filled(entry.transfer)
    form = answer.form
    if not entry.readings or not isinstance(form, ClosedForm):
        return {}
    found = {name: reading(form, name, safe=True) for name in FORM_NAMES if name in entry.readings}
    return {
        "forms": {
            name: [[line.label, line.text] for line in lines] for name, lines in found.items()
        },
        **(_corners(answer) if "asymptotes" in found else {}),
    }


def _corners(answer: TransferAnswer) -> dict[str, Any]:
    """The asymptotes between corners, where poles and zeros are numbers."""
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.corners import segments

    if answer.roots is None or not isinstance(answer.form, ClosedForm):
        return {}
    return {
        "corners": [
            {
                "from_hertz": number(item.low),
                "to_hertz": number(item.high),
                "slope_db_per_decade": item.slope_db,
                "scale": number(item.scale),
                "power": item.power,
            }
            for item in segments(answer.form, answer.roots)
        ]
    }


def _approximations(entry: Entry) -> dict[str, Any]:
    if not entry.approximations:
        return {}
    return {
        "approximations": [
            {
                **_expression(item.form),
                "dropped": [{"place": part.place, "term": part.term} for part in item.dropped],
                "largest_error": number(item.largest_error),
                "at_hertz": number(item.at_hertz),
                "at_values": {name: number(value) for name, value in item.at_values.items()},
                "bound": number(item.bound),
                "band": [float(item.band.low), float(item.band.high)] if item.band else None,
                "assumptions": [
                    {"text": str(part.assumption), "ratio": number(part.ratio), "holds": part.holds}
                    for part in item.assumptions
                ],
                "remarks": list(item.remarks),
            }
            for item in entry.approximations
        ]
    }


def _expression(form: ClosedForm | NestedForm) -> dict[str, Any]:
    """The form itself: one fraction, or a result over named steps."""
    from acsolve.analyses.closed_form import ClosedForm

    found: dict[str, Any] = {"expression": form.text(safe=True)}
    if not isinstance(form, ClosedForm):
        steps = [[name, text] for name, text in form.step_texts(safe=True)]
        return {
            **found,
            "numerator": None,
            "denominator": None,
            "form": "nested",
            "steps": steps,
            "meanings": [step.meaning for step in form.steps],
        }
    top, bottom = form.coefficients() if form.rational else (None, None)
    return {
        **found,
        "numerator": _falling(form, top),
        "denominator": _falling(form, bottom),
        "form": "expanded",
    }


def _filled(value: Any) -> Any:
    assert value is not None, "an entry was made without the answer its kind names"
    return value


def _falling(form: ClosedForm, coefficients: list[Polynomial] | None) -> list[str] | None:
    """Coefficients as text, the highest power of s first."""
    from acsolve.equations.write import polynomial_text

    if coefficients is None:
        return None
    spelling = form.spelled(safe=True)
    return [polynomial_text(item, form.basis, spelling) for item in reversed(coefficients)]


def _roots(found: TransferAnswer, name: str) -> list[list[float | None]] | None:
    if found.roots is None:
        return None
    return [complex_number(root) for root in getattr(found.roots, name)]


def _checked(form: ClosedForm | NestedForm) -> dict[str, Any] | None:
    return None if form.checked is None else closed_form_check(form.checked)


def closed_form_check(checked: Checked) -> dict[str, Any]:
    """What an answer was checked at, and the largest difference."""
    return {
        "points": checked.points,
        "max_relative_error": number(checked.max_relative_error),
    }


def cutoff_names(entry: Entry) -> dict[str, str]:
    """Name -> safe name, for the names that the closed forms of the cutoffs hold."""
    from acsolve.equations.naming import safe_names

    found: CutoffAnswer = _filled(entry.cutoff)
    if found.form is None:
        return {}
    corners = () if found.roll_off is None else found.roll_off.corners
    texts = [item.closed_form or "" for item in found.cutoffs]
    texts += [item.closed_form or "" for item in corners]
    if found.band_forms is not None:
        texts += [found.band_forms.width, found.band_forms.centre, found.band_forms.q]
    held = {word for text in texts for word in _WORD.findall(text)}
    names = found.form.symbols or tuple(found.form.values)
    return {name: safe for name, safe in safe_names(names).items() if safe in held}


_WORD = re.compile(r"[A-Za-z_]\w*")


def _sweep(entry: Entry) -> dict[str, Any]:
    found = _filled(entry.sweep)
    family = {item.name: number(item.value) for item in entry.over}
    return {
        **({"over": family} if family else {}),
        "hertz": numbers(found.hertz.tolist()),
        "real": numbers(found.value.real.tolist()),
        "imag": numbers(found.value.imag.tolist()),
        "gain_db": numbers(found.gain_db.tolist()),
        "phase_deg": numbers(found.phase_deg.tolist()),
        "phase_delay_s": numbers(found.phase_delay_s.tolist()),
        "group_delay_s": numbers(found.group_delay_s.tolist()),
        "status": status_words(found.status.tolist()),
        "settled": bool(found.settled),
        "placed": None if found.placed is None else _placed(found.placed),
        "verified": None if entry.verified is None else _verified(entry.verified),
    }


def _placed(how: Placement) -> dict[str, Any]:
    """What straight lines between points that were placed automatically are worth."""
    return {
        "within_db": how.gain_db,
        "within_deg": how.phase_deg,
        "axis": "linear" if how.linear else "logarithmic",
        "sure": how.sure,
        "complete": how.complete,
        "ends_hertz": numbers(how.ends_hertz),
    }


def _verified(proven: Verification) -> dict[str, Any]:
    """What was proven about chosen points, each list in the order of `hertz`."""
    worst = proven.worst
    return {
        "points": proven.points,
        "max_relative_error": number(proven.max_relative_error),
        "at_hertz": None if worst is None else number(worst.hertz),
        "max_gain_error_db": number(proven.largest("gain_error_db")),
        "max_phase_error_deg": number(proven.largest("phase_error_deg")),
        "max_group_delay_error_s": number(proven.largest("group_delay_error_s")),
        "bits": proven.bits,
        "hertz": numbers(item.hertz for item in proven.proofs),
        "relative_error": numbers(item.relative_error for item in proven.proofs),
        "estimated_error": numbers(item.claimed for item in proven.proofs),
        "unproven": [
            {"hertz": number(item.hertz), "reason": item.reason} for item in proven.unproven
        ],
    }


def status_words(codes: Iterable[int]) -> list[str]:
    """The status of each point in words."""
    from acsolve.equations.result import Status

    words = {int(item): str(item) for item in Status}
    return [words[int(code)] for code in codes]


def _check(entry: Entry) -> dict[str, Any]:
    from acsolve.report.pole_json import stability_body

    found = _filled(entry.check)
    return {
        "ok": found.ok,
        "nodes": list(found.nodes),
        "parts": [
            {"name": part.name, "kind": part.kind, "nodes": list(part.nodes)}
            for part in found.parts
        ],
        "order": max((item.order for item in found.modes), default=None),
        "modes": [
            {
                "driven": list(item.driven) if item.driven else None,
                "held": item.held,
                "order": item.order,
                "values": None
                if item.values is None
                else [complex_number(value) for value in item.values],
                "stable": item.stable,
                "stability": stability_body(item.stability),
            }
            for item in found.modes
        ],
        "problems": [problem(item) for item in found.problems],
    }


def _equations(entry: Entry) -> dict[str, Any]:
    from acsolve.equations.naming import safe_names
    from acsolve.equations.write import Spelling, expression_text

    found = _filled(entry.equations)
    names = safe_names(found.symbols())
    spelling = Spelling(names, "**")
    size = range(found.size)
    return {
        "unknowns": list(found.unknowns),
        "matrix": [
            [expression_text(found.entry(row, column), spelling) for column in size] for row in size
        ],
        "excitation": [expression_text(item, spelling) for item in found.excitation],
        "meanings": list(found.meanings),
        "references": list(found.references),
        "symbols": replaced_names(names),
    }


def _cutoff(entry: Entry) -> dict[str, Any]:
    from acsolve.report.cutoff_json import cutoff_body

    return cutoff_body(entry)


def _step(entry: Entry) -> dict[str, Any]:
    from acsolve.report.step_json import step_body

    return step_body(entry)


def _two_port(entry: Entry) -> dict[str, Any]:
    from acsolve.report.two_port_json import two_port_body

    return two_port_body(entry)


def _part_value(entry: Entry) -> dict[str, Any]:
    from acsolve.report.part_value import part_value_body

    return part_value_body(entry)


def _draw(entry: Entry) -> dict[str, Any]:
    from acsolve.report.drawing.drawing import sheet_body

    return sheet_body(_filled(entry.drawing).sheet)


_BODIES = {
    "draw": _draw,
    "part-value": _part_value,
    "two-port": _two_port,
    "step": _step,
    "transfer": _closed_form,
    "impedance": _closed_form,
    "cutoff": _cutoff,
    "sweep": _sweep,
    "check": _check,
    "equations": _equations,
}
