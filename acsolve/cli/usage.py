"""Mistakes on the command line, in our own words."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

import click

from acsolve import Diagnostic


def usage_problem(error: click.UsageError, arguments: Sequence[str]) -> Diagnostic:
    """A mistake in the command line as a diagnostic."""
    command = error.ctx.command_path if error.ctx else " ".join(["acsolve", *arguments[:1]])
    hint = f"Run {command} --help for what it takes."
    if isinstance(error, click.NoSuchOption):
        known = error.ctx.command.params if error.ctx else []
        names = [name for item in known for name in item.opts if name.startswith("--")]
        return Diagnostic(
            code="option.unknown",
            message=f"{command} takes no {error.option_name}",
            hint=near(error.option_name, names) or hint,
        )
    if isinstance(error, click.BadOptionUsage):
        return Diagnostic(
            code="option.value", message=f"{error.option_name} needs a value behind it", hint=hint
        )
    return Diagnostic(code="option.value", message=_plain(error.format_message()), hint=hint)


def _plain(message: str) -> str:
    text = message.rstrip(".")
    return text[:1].lower() + text[1:]


def near(wrong: str, known: Iterable[str]) -> str | None:
    """A hint that names the nearest known word, or None."""
    from difflib import get_close_matches

    found = get_close_matches(wrong, list(known), n=1, cutoff=0.5)
    return f"Did you mean {found[0]}?" if found else None
