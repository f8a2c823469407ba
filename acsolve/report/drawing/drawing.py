"""The drawing of a circuit: planned, placed, drawn, and checked against the circuit."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import Any

from acsolve.circuit.netlist import Netlist, Pair
from acsolve.errors import AnalysisError, Diagnostic
from acsolve.report.drawing.build import build
from acsolve.report.drawing.nets import expected, nets
from acsolve.report.drawing.plan import make_plan
from acsolve.report.drawing.reduce import model_of
from acsolve.report.drawing.seat import seat
from acsolve.report.drawing.sheet import Sheet
from acsolve.report.drawing.svg import svg_text

ENDINGS = ("svg", "png", "pdf")


@dataclass(frozen=True, slots=True)
class Drawing:
    """A schematic. `sheet` is its geometry; in a notebook it shows as a picture."""

    sheet: Sheet

    def __repr__(self) -> str:
        wide, high = self.sheet.size
        return f"Drawing({len(self.parts)} symbols of parts, {wide:.0f} by {high:.0f} units)"

    @property
    def parts(self) -> tuple[str, ...]:
        """The parts that have a symbol of their own."""
        return tuple(
            symbol.part for symbol in self.sheet.symbols if symbol.part and not symbol.hidden
        )

    @property
    def hidden(self) -> tuple[str, ...]:
        """The parts inside blocks, or between the first and the last of equal sections."""
        return tuple(name for symbol in self.sheet.symbols for name in symbol.hidden)

    def svg(self) -> str:
        """The drawing as one SVG element, the same text for the same circuit."""
        return svg_text(self.sheet)

    def content(self, ending: str) -> bytes:
        """The drawing as the bytes of an svg, png or pdf file.

        Raises
        ------
        AnalysisError
            [save.ending] none of these.
        """
        if ending == "svg":
            return self.svg().encode()
        if ending in ENDINGS:
            from acsolve.report.drawing.raster import picture_bytes

            return picture_bytes(self.sheet, ending)
        raise AnalysisError(
            Diagnostic(
                code="save.ending",
                message=f"a drawing is not saved as .{ending}",
                hint=f"The endings are {', '.join(ENDINGS)}.",
            )
        )

    def save(self, name: str | Path) -> None:
        """Write a file of the kind that its ending names: svg, png or pdf.

        Raises
        ------
        AnalysisError
            [save.ending], [save.failed].
        """
        from acsolve.report.save import ending, write_all

        write_all([(str(name), self.content(ending(str(name))))])

    def _repr_svg_(self) -> str:
        return self.svg()


def draw(netlist: Netlist, source: Pair | None = None, target: Pair | None = None) -> Drawing:
    """Draw a circuit, its signal from one pair to another, from left to right.

    The nets are read back from the finished geometry and compared with the circuit's.

    Notes
    -----
    Placement is direct, without search for ways: see `plan.py`. Above 60 symbols the blocks of
    the file, or groups of parts that hang together, are boxes; rows of equal sections are
    drawn as first, dots, last.
    """
    model = model_of(netlist, source, target)
    plan = make_plan(model)
    sheet = build(plan, seat(plan), title_of(netlist))
    assert nets(sheet) == expected(model.items), "a drawing says what the circuit says"
    return Drawing(sheet)


def title_of(netlist: Netlist) -> str:
    """The title of a circuit, with its variant."""
    variant = f' (variant "{netlist.variant}")' if netlist.variant else ""
    return f"{netlist.title or ''}{variant}".strip()


def sheet_body(sheet: Sheet) -> dict[str, Any]:
    """The geometry of a sheet as JSON values, in grid units, y downwards."""
    return {
        "box": list(sheet.box),
        "condensed": sheet.condensed,
        "parts": [
            {
                "shape": item.shape,
                "part": item.part,
                "hidden": list(item.hidden),
                "box": list(item.box),
                "pins": [{"terminal": pin.terminal, "at": list(pin.at)} for pin in item.pins],
            }
            for item in sheet.symbols
        ],
        "wires": [
            {"node": wire.net, "start": list(wire.start), "end": list(wire.end)}
            for wire in sheet.wires
        ],
        "dots": [list(point) for point in sheet.dots],
        "texts": [
            {"text": item.text, "at": list(item.at), "size": item.size, "role": item.role}
            for item in sheet.texts
        ],
    }
