"""`acsolve draw`."""

from __future__ import annotations

import sys

from acsolve.cli.asking import open_circuit
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.options import OUTPUT, VALUES, Options, make_command
from acsolve.cli.progress import progress
from acsolve.cli.status import ANSWERED


def work(options: Options) -> int:
    """Draw the circuit: saved, as JSON, as SVG into a pipe, or told in words."""
    from acsolve.report.entry import Entry, Heading

    refuse_unfit(options, "draw")
    circuit = open_circuit(options)
    with progress("drawing"):
        found = circuit.drawing(options.source, options.target)
    if not (options.save or options.as_json or sys.stdout.isatty()):
        sys.stdout.write(found.svg())
        return ANSWERED
    shared = Heading(title=circuit.title, variant=circuit.variant, cautions=circuit.cautions)
    entry = Entry(kind="draw", heading=shared, drawing=found)
    return deliver([(None, entry)], options)


command = make_command(
    "draw",
    "The schematic, drawn from the netlist alone. Into a file or a pipe it is SVG.",
    work,
    ("from", "to", *VALUES, *OUTPUT),
    "filter.circuit --save filter.svg",
)
