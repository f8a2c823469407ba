"""What a check found, as a person reads it."""

from __future__ import annotations

from collections import Counter
from typing import TYPE_CHECKING

from acsolve.errors import frame
from acsolve.report.entry import Entry, pair_text
from acsolve.report.pole_text import stability_rows
from acsolve.report.root_text import root_words
from acsolve.report.table import labelled

if TYPE_CHECKING:
    from acsolve.analyses.check import Modes

_MODES_SHOWN = 12
_FRAMES_SHOWN = 50


def check_lines(entry: Entry) -> list[str]:
    """The body of a check: counts, natural modes, every problem."""
    found = entry.check
    assert found is not None, "a check entry holds a check"
    kinds = Counter(part.kind.replace("_", " ") for part in found.parts)
    listed = ", ".join(f"{kind} {count}" for kind, count in kinds.items())
    rows = [
        ("nodes", str(len(found.nodes))),
        ("parts", f"{len(found.parts)}  ({listed})" if listed else "0"),
    ]
    for modes in found.modes:
        rows += _mode_rows(modes)
    rows.append(("problems", problem_count(entry)))
    lines = labelled(rows)
    for item in found.problems[:_FRAMES_SHOWN]:
        lines += ["", *frame(item).split("\n")]
    if len(found.problems) > _FRAMES_SHOWN:
        lines += [
            "",
            f"… and {len(found.problems) - _FRAMES_SHOWN} more; --json gives all of them.",
        ]
    return lines


def problem_count(entry: Entry) -> str:
    """How many problems of each severity, in words."""
    assert entry.check is not None, "a check entry holds a check"
    counts = Counter(item.severity for item in entry.check.problems)
    words = [
        f"{counts[name]} {name}{'' if counts[name] == 1 else 's'}"
        for name in ("error", "warning", "note")
        if counts[name]
    ]
    return ", ".join(words) or "none"


def _mode_rows(item: Modes) -> list[tuple[str, str]]:
    how = {"held": "driven by a voltage", "open": "driven by a current"}.get(item.held)
    where = f", {how} at {pair_text(item.driven)}" if item.driven and how else ", left to itself"
    rows = [("order", f"{item.order}{where}")]
    if item.values is None:
        return [
            *rows,
            ("", "natural modes: not as numbers (values missing, or too many)"),
            *stability_rows(item.stability, None),
        ]
    words = root_words(item.values)
    shown = words[:_MODES_SHOWN]
    if len(words) > _MODES_SHOWN:
        shown.append(f"… and {len(words) - _MODES_SHOWN} more; --json gives all of them")
    rows += [("natural modes" if place == 0 else "", text) for place, text in enumerate(shown)]
    return rows if not words else [*rows, *stability_rows(item.stability, None)]
