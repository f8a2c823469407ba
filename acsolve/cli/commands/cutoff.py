"""`acsolve cutoff`."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from acsolve.cli.asking import Asked, answer_all, asked, heading, open_circuit
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.drawing import draw
from acsolve.cli.options import FORMS, OUTPUT, PAIRS, VALUES, Options, make_command, refused
from acsolve.cli.progress import progress

if TYPE_CHECKING:
    from acsolve.report.entry import Entry, Kind


def work(options: Options) -> int:
    """Answer with every crossing of each level."""
    from acsolve.report.entry import Entry

    kind: Kind = "cutoff" if options.value_for is None else "part-value"
    refuse_unfit(options, kind)
    _check(options)
    circuit = open_circuit(options)
    shared = heading(circuit, options)

    def answer(item: Asked) -> Sequence[Entry]:
        ask = item.path.ask
        if options.value_for is not None:
            return [
                Entry(kind=kind, heading=shared, ask=ask, part_value=each)
                for each in _values(item, options)
            ]
        found = [
            item.path.cutoffs(
                level,
                reference=options.reference,
                band=options.band,
                symbolic=options.symbolic,
                keep=options.kept,
                degree=options.radical,
            )
            for level in _levels(item, options)
        ]
        return [Entry(kind="cutoff", heading=shared, ask=ask, cutoff=each) for each in found]

    with progress("looking for cutoffs"):
        answered, errors = answer_all(asked(circuit, "cutoff", options), answer)
    return deliver(answered, options, errors=errors, draw=draw)


def _check(options: Options) -> None:
    """Refuse --value-for without --at, --at without it, and what says where symbols stay."""
    _ = options.radical
    if (options.value_for is None) != (options.at is None):
        raise refused(
            "--value-for NAME and --at FREQUENCY go together",
            "Write, say, --value-for R1 --at 1kHz.",
        )
    if options.value_for is not None and (options.band or options.symbolic or options.kept):
        raise refused(
            "--band, --symbolic and --keep do not go with --value-for",
            "Leave them out: parts without a value are symbols.",
        )


def _values(item: Asked, options: Options) -> list[Any]:
    """The values of one part for each level."""
    return [
        item.path.value_for(
            options.value_for or "",
            cutoff=options.at or "",
            level=level,
            reference=options.reference,
            degree=options.radical,
        )
        for level in _levels(item, options)
    ]


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
    (
        *PAIRS,
        *("into", "level", "reference", "band", "value-for", "at", "degree"),
        *VALUES,
        *FORMS,
        *OUTPUT,
    ),
    "filter.circuit --from in --to out --level -20dB",
)
