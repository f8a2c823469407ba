"""`acsolve two-port`."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from acsolve import AnalysisError, Diagnostic, TwoPort
from acsolve.cli.asking import Asked, answer_all, asked, heading, open_circuit
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.drawing import band_text
from acsolve.cli.options import FORMS, OUTPUT, VALUES, Options, make_command, refused
from acsolve.cli.progress import progress

if TYPE_CHECKING:
    from acsolve import PortSweep
    from acsolve.report.entry import Entry


def work(options: Options) -> int:
    """Answer with the parameter sets of two pairs."""
    from acsolve.report.entry import Entry

    refuse_unfit(options, "two-port")
    circuit = open_circuit(options)
    shared = heading(circuit, options)

    def answer(item: Asked) -> Sequence[Entry]:
        ports = _ports(item, options)
        found = ports.answer(_sweep(ports, item, options))
        return [Entry(kind="two-port", heading=shared, ask=ports.ask, two_port=found)]

    with progress("working out the two-port"):
        answered, errors = answer_all(asked(circuit, "two-port", options), answer)
    return deliver(answered, options, errors=errors)


def _ports(item: Asked, options: Options) -> TwoPort:
    """The two pairs of a question, with the reference of the command line or its own."""
    ask, question = item.path.ask, item.question
    if ask.source is None or ask.ammeter is not None:
        raise AnalysisError(
            Diagnostic(
                code="question.no-pair",
                message="a two-port has two pairs of nodes, and one is not named",
                hint="Name both: --from PAIR --to PAIR, or from and to in the ask line.",
            )
        )
    stated = question.reference if question is not None else None
    return item.path.circuit.two_port(
        ask.source,
        ask.target,
        reference=stated if options.reference is None else options.reference,
        symbolic=options.symbolic,
        keep=options.kept,
        budget=options.terms,
    )


def _sweep(ports: TwoPort, item: Asked, options: Options) -> PortSweep | None:
    """The parameters over the band of the command line, else of the file's question."""
    if options.at is not None or options.band is not None:
        hertz = options.at or options.band or ""
        return ports.sweep(hertz, points=options.points, linear=options.linear)
    if item.question is not None and item.question.band is not None:
        band = band_text(item.path.circuit.band(item.question.band))
        return ports.sweep(band, points=options.points, linear=options.linear)
    if options.points or options.linear or any(_is_ports_file(name) for name in options.save):
        raise refused("no band is given to solve over", "Add --band 10Hz..1MHz, or --at.")
    return None


def _is_ports_file(name: str) -> bool:
    return name.lower().endswith(".s2p")


command = make_command(
    "two-port",
    "z, y, h, g, ABCD and, with a reference, s parameters of two pairs.\n"
    "Without --from and --to it answers the file's own ask lines.",
    work,
    (
        *("from", "to", "resistance", "band", "points", "linear", "at"),
        *VALUES,
        *FORMS,
        "budget",
        *OUTPUT,
    ),
    "filter.circuit --from in --to out --reference 50",
)
