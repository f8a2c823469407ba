"""`acsolve sweep`."""

from __future__ import annotations

from collections.abc import Sequence
from math import pi
from typing import TYPE_CHECKING

from acsolve.cli.asking import Asked, answer_all, asked, heading, open_circuit
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.drawing import band_text, draw, features, no_band
from acsolve.cli.options import OUTPUT, PAIRS, VALUES, Options, make_command
from acsolve.cli.progress import progress

if TYPE_CHECKING:
    from acsolve.report.entry import Entry


def work(options: Options) -> int:
    """Answer with gain, phase and delays over frequency."""
    from acsolve.report.entry import Entry

    refuse_unfit(options, "sweep")
    circuit = open_circuit(options)
    shared = heading(circuit, options)

    def answer(item: Asked) -> Sequence[Entry]:
        found = item.path.sweep(
            options.at or _band(item, options), points=options.points, linear=options.linear
        )
        return [Entry(kind="sweep", heading=shared, ask=item.path.ask, sweep=found)]

    with progress("sweeping"):
        answered, errors = answer_all(asked(circuit, "sweep", options), answer)
    return deliver(answered, options, errors=errors, draw=draw, silent_when_saved=True)


def _band(item: Asked, options: Options) -> str:
    """The band of the command line, else of the file's question, else around the poles."""
    from acsolve.report.band import natural_band

    if options.band is not None:
        return options.band
    if item.question is not None and item.question.band is not None:
        return band_text(item.path.circuit.band(item.question.band))
    roots = features(item.path)
    if roots is None:
        raise no_band()
    return band_text(natural_band(abs(root) / (2 * pi) for root in roots))


command = make_command(
    "sweep",
    "Gain, phase, phase delay and group delay over a band.\n"
    "Without --from, --to or --into it answers the file's own ask lines.",
    work,
    (*PAIRS, "into", "band", "points", "linear", "at", *VALUES, *OUTPUT),
    "filter.circuit --band 10Hz..1MHz --save sweep.svg",
)
