"""Answers as a person reads them on a terminal: quiet, aligned, 80 columns, no colour."""

from __future__ import annotations

from collections.abc import Callable, Iterable

from acsolve.errors import Diagnostic, frame
from acsolve.report.check_text import check_lines
from acsolve.report.cutoff_text import cutoff_lines
from acsolve.report.entry import Entry, question_text
from acsolve.report.equations_text import equations_lines
from acsolve.report.sweep_text import sweep_lines
from acsolve.report.table import wrapped
from acsolve.report.transfer_text import transfer_lines

_BODIES: dict[str, Callable[[Entry], list[str]]] = {
    "transfer": transfer_lines,
    "impedance": transfer_lines,
    "cutoff": cutoff_lines,
    "sweep": sweep_lines,
    "check": check_lines,
    "equations": equations_lines,
}
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
    for entry in listed:
        question = _question(entry)
        lines += [*([""] if lines and question and entry is not listed[0] else []), *question]
        lines += [*([""] if lines else []), *_BODIES[entry.kind](entry)]
    for text in heading.cautions:
        first, *rest = wrapped(text, 71)
        lines += ["", f"caution: {first}", *(" " * 9 + line for line in rest)]
    return "\n".join(lines) + "\n"


def _question(entry: Entry) -> list[str]:
    if entry.ask is None:
        return []
    words = question_text(entry.ask)
    named = {"cutoff": f"cutoffs of the {words}", "sweep": f"sweep of the {words}"}
    return wrapped(named.get(entry.kind, words), 80)


def problems_text(problems: Iterable[Diagnostic]) -> str:
    """Problems as frames with a blank line between them; a flood of them is cut."""
    listed = list(problems)
    texts = [frame(item) for item in listed[:_FRAMES_SHOWN]]
    if len(listed) > _FRAMES_SHOWN:
        texts.append(
            f"… and {len(listed) - _FRAMES_SHOWN} more problems; --json gives all of them."
        )
    return "\n\n".join(texts) + "\n"
