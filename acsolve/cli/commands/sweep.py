"""`acsolve sweep`."""

from __future__ import annotations

from collections.abc import Sequence
from math import pi
from typing import TYPE_CHECKING

from acsolve import Path
from acsolve.cli.asking import Asked, answer_all, asked, heading, open_circuit
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.drawing import band_text, draw, features, no_band, placed_for
from acsolve.cli.family import members_of, paths_of, sweeps_of
from acsolve.cli.options import OUTPUT, PAIRS, VALUES, Options, make_command
from acsolve.cli.progress import progress

if TYPE_CHECKING:
    from acsolve.report.entry import Entry


def work(options: Options) -> int:
    """Answer with gain, phase and delays over frequency."""
    from acsolve.report.entry import Entry

    refuse_unfit(options, "sweep")
    circuit = open_circuit(options)
    members = members_of(circuit, options)
    shared = heading(circuit, options)

    def answer(item: Asked) -> Sequence[Entry]:
        paths = paths_of(item.path, members)
        found = sweeps_of(
            paths, options.at or _band(item, paths, options), placed_for(options, circuit)
        )
        return [
            Entry(
                kind="sweep",
                heading=shared,
                ask=path.ask,
                sweep=swept,
                over=settings,
                verified=path.verify(swept, points=options.proven) if options.verify else None,
            )
            for path, swept, (_, settings) in zip(paths, found, members, strict=True)
        ]

    with progress("sweeping and proving" if options.verify else "sweeping"):
        answered, errors = answer_all(asked(circuit, "sweep", options), answer)
    return deliver(
        answered, options, errors=errors, draw=draw, silent_when_saved=not options.verify
    )


def _band(item: Asked, paths: Sequence[Path], options: Options) -> str:
    """The band of the command line, else of the file's question, else around all poles."""
    from acsolve.report.band import natural_band

    if options.band is not None:
        return options.band
    if item.question is not None and item.question.band is not None:
        return band_text(item.path.circuit.band(item.question.band))
    roots = [features(path) for path in paths]
    if None in roots:
        raise no_band()
    return band_text(natural_band(abs(root) / (2 * pi) for some in roots for root in some or ()))


command = make_command(
    "sweep",
    "Gain, phase, phase delay and group delay over a band.\n"
    "Without --from, --to or --into it answers the file's own ask lines.",
    work,
    (
        *PAIRS,
        *("into", "band", "points", "linear", "at", "over", "verify"),
        *VALUES,
        "picture",
        *OUTPUT,
    ),
    "filter.circuit --band 10Hz..1MHz --save sweep.svg",
)
