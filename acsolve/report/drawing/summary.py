"""A drawing in words, for a terminal that cannot show it."""

from __future__ import annotations

from acsolve.report.entry import Entry
from acsolve.report.table import labelled


def drawing_lines(entry: Entry) -> list[str]:
    """What was drawn and how large it is."""
    found = entry.drawing
    assert found is not None, "a drawing entry holds a drawing"
    wide, high = found.sheet.size
    rows = [("drawn", f"{len(found.parts)} parts, {len(found.sheet.wires)} wires")]
    if found.hidden:
        rows.append(("inside", f"{len(found.hidden)} parts in boxes or between equal sections"))
    rows.append(("size", f"{wide:.0f} by {high:.0f} grid units"))
    rows.append(("checked", "the nets read back from the drawing are those of the circuit"))
    return labelled(rows)
