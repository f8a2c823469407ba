"""`acsolve impedance`."""

from __future__ import annotations

from acsolve.cli.forms import answer_forms
from acsolve.cli.options import FORMS, OUTPUT, READ, SIZES, VALUES, Options, make_command, refused


def work(options: Options) -> int:
    """Answer with the closed form of a driving-point impedance."""
    if options.at is not None and not options.equivalent:
        raise refused(
            "--at says where the equivalent is worked out in numbers, and none is asked",
            "Add --equivalent, or ask `acsolve sweep --into PAIR --at FREQUENCY`.",
        )
    return answer_forms("impedance", options)


command = make_command(
    "impedance",
    "The closed form of the impedance looking into a pair.\n"
    "Without --into it answers the file's own ask lines.",
    work,
    ("into", "equivalent", "at", *VALUES, *FORMS, *SIZES, *READ, "picture", *OUTPUT),
    "filter.circuit --into out",
)
