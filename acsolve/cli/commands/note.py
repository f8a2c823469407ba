"""`acsolve note`."""

from __future__ import annotations

import sys
from typing import TYPE_CHECKING

from acsolve import AnalysisError
from acsolve.cli.asking import heading, open_circuit
from acsolve.cli.complaint import report
from acsolve.cli.deliver import refuse_unfit
from acsolve.cli.options import OUTPUT, VALUES, Options, make_command, refused
from acsolve.cli.progress import progress
from acsolve.cli.status import ANSWERED, NO_ANSWER, is_of_the_call

if TYPE_CHECKING:
    from acsolve.report.note.note import Note


def work(options: Options) -> int:
    """Write the note: into files, as JSON, or as HTML into a pipe."""
    from acsolve.report.save import ending, write_all

    refuse_unfit(options, "note")
    if not (options.save or options.as_json) and sys.stdout.isatty():
        raise refused(
            "a note is no text for a terminal",
            "Add --save note.html (or .md, .tex, .pdf), or send it into a pipe.",
        )
    circuit = open_circuit(options)
    heading(circuit, options)  # shows its warnings
    with progress("writing the note"):
        found = circuit.note(changes=options.let, date=options.date)
        if any(map(is_of_the_call, found.problems)):
            raise AnalysisError(found.problems)
        contents = [(name, found.content(ending(name))) for name in options.save]
    write_all(contents)
    if found.problems:
        return _unanswered(found, options)
    if options.as_json:
        sys.stdout.write(found.json())
    elif options.save:
        sys.stdout.write(f"saved {', '.join(options.save)}\n")
    else:
        _write(found.html())
    return ANSWERED


def _unanswered(note: Note, options: Options) -> int:
    """The note says what has no answer, and why; so does standard error."""
    if options.save:
        where = sys.stderr if options.as_json else sys.stdout
        where.write(f"saved {', '.join(options.save)}; not every question has an answer\n")
    elif not options.as_json:
        _write(note.html())
        sys.stdout.flush()
    report(note.problems, arguments=options.arguments, as_json=options.as_json)
    return NO_ANSWER


def _write(page: str) -> None:
    """The page as UTF-8, which it says it is, whatever the terminal's encoding."""
    sys.stdout.flush()
    stream = getattr(sys.stdout, "buffer", None)
    if stream is None:
        sys.stdout.write(page)
    else:
        stream.write(page.encode("utf-8", "replace"))


command = make_command(
    "note",
    "The design note: the file's ask lines answered in one document.\n"
    "HTML goes into a pipe; --save writes html, md, tex, pdf or json.",
    work,
    ("date", *VALUES, *OUTPUT),
    "filter.circuit --save note.html --save note.pdf",
)
