"""`acsolve step`."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from acsolve.cli.asking import Asked, answer_all, asked, heading, open_circuit
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.options import FORMS, OUTPUT, PAIRS, VALUES, Options, make_command
from acsolve.cli.progress import progress

if TYPE_CHECKING:
    from acsolve.report.entry import Entry


def work(options: Options) -> int:
    """Answer with the response in time and its figures."""
    from acsolve.report.entry import Entry

    refuse_unfit(options, "step")
    circuit = open_circuit(options)
    shared = heading(circuit, options)

    def answer(item: Asked) -> Sequence[Entry]:
        found = item.path.step(
            _duration(item, options),
            drive=_drive(options),
            symbolic=options.symbolic,
            keep=options.kept,
            **_given(options),
        )
        return [Entry(kind="step", heading=shared, ask=item.path.ask, step=found)]

    with progress("working out the response in time"):
        answered, errors = answer_all(asked(circuit, "step", options), answer)
    return deliver(answered, options, errors=errors)


def _duration(item: Asked, options: Options) -> float | str | None:
    """How long the curve is: as the command line says, else the file's question."""
    if options.duration is not None or item.question is None:
        return options.duration
    return item.path.circuit.duration(item.question)


def _drive(options: Options) -> Any:
    drive = options.drive or "step"
    return drive if options.cycles is None else (drive, options.cycles)


def _given(options: Options) -> dict[str, Any]:
    """What stays as `Path.step` has it unless it is given."""
    both = {"band": options.settle, "points": options.points}
    return {name: value for name, value in both.items() if value is not None}


command = make_command(
    "step",
    "The response in time to a unit step, impulse or sine that starts at 0.\n"
    "Without --from, --to or --into it answers the file's own ask lines.",
    work,
    (
        *PAIRS,
        "into",
        "for",
        "points",
        "drive",
        "cycles",
        "settle",
        *VALUES,
        *FORMS,
        *OUTPUT,
    ),
    "filter.circuit --from in --to out --save step.svg",
)
