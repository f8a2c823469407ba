"""`acsolve check`."""

from __future__ import annotations

import sys

from acsolve.cli.asking import open_circuit
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.options import OUTPUT, VALUES, Options, make_command
from acsolve.cli.progress import progress
from acsolve.cli.status import WRONG


def work(options: Options) -> int:
    """Say whether the circuit makes sense; status 2 where it does not."""
    from acsolve.report.entry import Entry, Heading

    refuse_unfit(options, "check")
    circuit = open_circuit(options)
    with progress("checking"):
        found = circuit.check()
    shared = Heading(title=circuit.title, variant=circuit.variant, cautions=circuit.cautions)
    entry = Entry(kind="check", heading=shared, check=found)
    if found.ok:
        return deliver([(None, entry)], options)
    if options.as_json:
        from acsolve.report.json import errors_text

        errors = [item for item in found.problems if item.severity == "error"]
        sys.stdout.write(errors_text(errors, [entry]))
    else:
        deliver([(None, entry)], options)
    return WRONG


command = make_command(
    "check",
    "Does the file make sense: nodes, parts, order, natural modes, every problem.",
    work,
    (*VALUES, *OUTPUT),
    "filter.circuit",
)
