"""`acsolve equations`."""

from __future__ import annotations

from acsolve import Circuit, PairLike
from acsolve.cli.asking import heading, open_circuit
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.options import FORMS, OUTPUT, VALUES, Options, make_command
from acsolve.cli.progress import progress


def work(options: Options) -> int:
    """Answer with the nodal equations."""
    from acsolve.report.entry import Entry

    refuse_unfit(options, "equations")
    circuit = open_circuit(options)
    shared = heading(circuit, options)
    with progress("writing the equations"):
        found = circuit.equations(
            _drive(circuit, options), symbolic=options.symbolic, keep=options.kept
        )
    entry = Entry(kind="equations", heading=shared, equations=found)
    return deliver([(None, entry)], options)


def _drive(circuit: Circuit, options: Options) -> PairLike | None:
    """Where the voltage E stands: as said, else where a file without sources is first driven."""
    if options.source is not None:
        return options.source
    if any(part.kind in _SOURCES for part in circuit.netlist.parts):
        return None
    pairs = [question.source or question.target for question in circuit.questions]
    return pairs[0] if pairs else None


_SOURCES = ("voltage_source", "current_source")

command = make_command(
    "equations",
    "The modified nodal equations: matrix, unknowns, excitation, meaning of each row.\n"
    "Without --from the file's own sources act, or else its first question drives.",
    work,
    ("from", *VALUES, *FORMS, *OUTPUT),
    "filter.circuit --from in --symbolic",
)
