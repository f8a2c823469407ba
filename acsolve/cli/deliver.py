"""Answers to where they were wanted: the screen, JSON, saved files."""

from __future__ import annotations

import sys
from collections.abc import Callable, Iterable, Sequence
from typing import TYPE_CHECKING

from acsolve import AcsolveError, Diagnostic, Path
from acsolve.cli.complaint import report
from acsolve.cli.options import Options, refused
from acsolve.cli.status import ANSWERED, status_of

if TYPE_CHECKING:
    from acsolve.report.entry import Entry, Kind
    from acsolve.report.plot import Picture
    from acsolve.report.plot_poles import PoleMap

Answered = Sequence[tuple[Path | None, "Entry"]]
Draw = Callable[[Answered, Options], "Picture | PoleMap"]


def refuse_unfit(options: Options, kind: Kind) -> None:
    """Refuse files that could not be saved, before any work is done."""
    if options.save:
        from acsolve.report import save

        save.refuse_unfit(options.save, kind)


def deliver(
    answered: Answered,
    options: Options,
    *,
    errors: Sequence[AcsolveError] = (),
    draw: Draw | None = None,
    silent_when_saved: bool = False,
) -> int:
    """Show and save the answers; return the exit status.

    Where a question failed nothing is saved; what was answered is still shown as text,
    and as JSON the errors alone.
    """
    entries = [entry for _, entry in answered]
    if errors:
        return _deliver_errors(entries, errors, options)
    saved = _save(answered, options, draw)
    if options.as_json:
        from acsolve.report.json import answers_text as as_json

        sys.stdout.write(as_json(entries))
        return ANSWERED
    if not (saved and silent_when_saved):
        from acsolve.report.text import answers_text

        sys.stdout.write(answers_text(entries))
    if saved:
        sys.stdout.write(f"saved {', '.join(options.save)}\n")
    return ANSWERED


def _deliver_errors(
    entries: Sequence[Entry], errors: Sequence[AcsolveError], options: Options
) -> int:
    problems = _distinct(item for error in errors for item in error.diagnostics)
    if entries and not options.as_json:
        from acsolve.report.text import answers_text

        sys.stdout.write(answers_text(entries))
        sys.stdout.flush()
    report(problems, arguments=options.arguments, as_json=options.as_json)
    return max(status_of(error) for error in errors)


def _distinct(problems: Iterable[Diagnostic]) -> list[Diagnostic]:
    found: list[Diagnostic] = []
    for item in problems:
        if item not in found:
            found.append(item)
    return found


def _save(answered: Answered, options: Options, draw: Draw | None) -> bool:
    """Write every file that --save names; all or none."""
    if not options.save:
        return False
    from acsolve.report.save import write_all

    write_all([(name, _content(name, answered, options, draw)) for name in options.save])
    return True


def _content(name: str, answered: Answered, options: Options, draw: Draw | None) -> bytes:
    from acsolve.report import save
    from acsolve.report.entry import families
    from acsolve.report.family_files import family_npz

    entries = [entry for _, entry in answered]
    found = save.ending(name)
    if found == "json":
        from acsolve.report.json import answers_text

        return answers_text(entries).encode()
    if found in save.PICTURES:
        from acsolve.report.pictures import drawing_content

        if entries[0].drawing is not None:
            return entries[0].drawing.content(found)
        if entries[0].kind == "step":
            from acsolve.report.plot_time import time_picture

            return time_picture(entries, found)
        assert draw is not None, "a kind of answer that is saved as a picture can be drawn"
        return drawing_content(draw(answered, options), found)
    family = bool(entries[0].over) and len(families(entries)) == 1
    if len(entries) > 1 and entries[0].kind in ("sweep", "step") and not family:
        raise refused(
            f"a {found} file holds one {entries[0].kind}, and {options.file} asks {len(entries)}",
            "Pick one with --from and --to, or save json or a picture.",
        )
    if found == "s2p":
        if len(entries) > 1:
            raise refused(
                f"an s2p file holds one network, and {options.file} asks {len(entries)}",
                "Pick one with --from and --to.",
            )
        return save.touchstone_content(entries[0])
    if found == "csv":
        return save.csv_content(entries)
    return family_npz(entries) if family else save.npz_content(entries[0])
