"""`acsolve transfer`."""

from __future__ import annotations

from acsolve.cli.forms import answer_forms
from acsolve.cli.options import FORMS, OUTPUT, PAIRS, READ, SIZES, VALUES, Options, make_command


def work(options: Options) -> int:
    """Answer with closed forms from one pair to another."""
    return answer_forms("transfer", options)


command = make_command(
    "transfer",
    "The closed form from one pair to another, with limits, poles and zeros.\n"
    "Without --from and --to it answers the file's own ask lines.",
    work,
    (*PAIRS, *VALUES, *FORMS, *SIZES, *READ, "picture", *OUTPUT),
    "filter.circuit --from in --to out --symbolic",
)
