"""Answers as a person reads them on a terminal: quiet, aligned, 80 columns, no colour."""

from __future__ import annotations

import re
from collections.abc import Iterable, Sequence
from importlib import import_module

from acsolve.errors import Diagnostic, frame
from acsolve.report.entry import Entry, families, question_text
from acsolve.report.table import wrapped

#: Kind of answer -> the module and function that write its body, loaded when it occurs.
_BODIES = {
    "draw": ("drawing.summary", "drawing_lines"),
    "two-port": ("two_port_text", "two_port_lines"),
    "transfer": ("transfer_text", "transfer_lines"),
    "impedance": ("transfer_text", "transfer_lines"),
    "cutoff": ("cutoff_text", "cutoff_lines"),
    "part-value": ("part_value", "part_value_lines"),
    "sweep": ("sweep_text", "sweep_lines"),
    "step": ("step_text", "step_lines"),
    "check": ("check_text", "check_lines"),
    "equations": ("equations_text", "equations_lines"),
}
DRIVES = {"step": "step response", "impulse": "impulse response", "sine": "response in time"}
_FRAMES_SHOWN = 50


def answers_text(entries: Iterable[Entry]) -> str:
    """All answers about one circuit: its title once, each question, its cautions last."""
    listed = list(entries)
    if not listed:
        return ""
    heading = listed[0].heading
    lines = list(wrapped(heading.title, 80)) if heading.title else []
    if heading.variant is not None:
        lines.append(f'variant "{heading.variant}"')
    for group in families(listed):
        entry = group[0]
        question = _question(entry)
        lines += [*([""] if lines and question and entry is not listed[0] else []), *question]
        lines += [*([""] if lines else []), *(_family(group) if entry.over else _body(entry))]
    for text in heading.cautions:
        first, *rest = wrapped(text, 71)
        lines += ["", f"caution: {first}", *(" " * 9 + line for line in rest)]
    return "\n".join(lines) + "\n"


def _family(group: Sequence[Entry]) -> list[str]:
    from acsolve.report.family_text import family_lines

    return family_lines(group)


def _body(entry: Entry) -> list[str]:
    module, function = _BODIES[entry.kind]
    lines: list[str] = getattr(import_module(f"acsolve.report.{module}"), function)(entry)
    return lines


def _question(entry: Entry) -> list[str]:
    if entry.ask is None:
        return []
    words = question_text(entry.ask)
    named = {"cutoff": f"cutoffs of the {words}", "sweep": f"sweep of the {words}"}
    if entry.step is not None:
        named["step"] = f"{DRIVES[entry.step.drive.kind]} of the {words}"
    if entry.part_value is not None:
        named["part-value"] = f"{entry.part_value.name} for a cutoff of the {words}"
    return wrapped(named.get(entry.kind, words), 80)


def problems_text(problems: Iterable[Diagnostic]) -> str:
    """Problems as frames with a blank line between them; a flood of them is cut."""
    listed = list(problems)
    texts = [frame(item) for item in listed[:_FRAMES_SHOWN]]
    if len(listed) > _FRAMES_SHOWN:
        hidden = len(listed) - _FRAMES_SHOWN + _uncounted(listed[-1])
        texts.append(f"… and {hidden:,} more problems; --json gives the first {len(listed)}.")
    return "\n\n".join(texts) + "\n"


def _uncounted(last: Diagnostic) -> int:
    """How many problems the closing diagnostic of a long list stands for, beside itself."""
    number = re.search(r"\d+", last.message)
    return int(number[0]) - 1 if last.code == "limit.problems" and number else 0
