"""`acsolve cutoff`."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from acsolve.cli.asking import Asked, answer_all, asked, heading, open_circuit
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.drawing import draw
from acsolve.cli.options import FORMS, OUTPUT, PAIRS, VALUES, Options, make_command
from acsolve.cli.progress import progress

if TYPE_CHECKING:
    from acsolve.report.entry import Entry


def work(options: Options) -> int:
    """Answer with every crossing of each level."""
    from acsolve.report.entry import Entry

    refuse_unfit(options, "cutoff")
    circuit = open_circuit(options)
    shared = heading(circuit, options)

    def answer(item: Asked) -> Sequence[Entry]:
        found = [
            item.path.cutoffs(
                level,
                reference=options.reference,
                band=options.band,
                symbolic=options.symbolic,
                keep=options.kept,
            )
            for level in _levels(item, options)
        ]
        ask = item.path.ask
        return [Entry(kind="cutoff", heading=shared, ask=ask, cutoff=each) for each in found]

    with progress("looking for cutoffs"):
        answered, errors = answer_all(asked(circuit, "cutoff", options), answer)
    return deliver(answered, options, errors=errors, draw=draw)


def _levels(item: Asked, options: Options) -> list[Any]:
    """The level of the command line, else those of the file's question, else half power."""
    if options.level is not None:
        return [options.level]
    levels = item.question.levels if item.question is not None else ()
    return [item.path.circuit.level(level) for level in levels] or [None]


command = make_command(
    "cutoff",
    "Every frequency where the response crosses a level below its reference.\n"
    "Without --from, --to or --into it answers the file's own ask lines.",
    work,
    (*PAIRS, "into", "level", "reference", "band", *VALUES, *FORMS, *OUTPUT),
    "filter.circuit --from in --to out --level -20dB",
)
