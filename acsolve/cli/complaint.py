"""Problems to where they are read: frames on standard error, or JSON on standard output."""

from __future__ import annotations

import sys
from collections.abc import Iterable, Sequence
from dataclasses import replace

from acsolve import Diagnostic, Source, Span

#: What the reader of single values calls their texts; none of them is a file.
_TEXTS = ("pair", "band", "frequencies", "level", "value", "gain", "duration")


def report(problems: Iterable[Diagnostic], *, as_json: bool, arguments: Sequence[str] = ()) -> None:
    """Show problems; a text from the command line is called by its option."""
    if as_json:
        from acsolve.report.json import errors_text

        sys.stdout.write(errors_text([_without_file(item, arguments) for item in problems]))
        return
    from acsolve.report.text import problems_text

    sys.stderr.write(problems_text([_named(item, arguments) for item in problems]))


def _option(span: Span, arguments: Sequence[str]) -> str | None:
    """The option whose value the span points into, or None."""
    if span.source.name not in _TEXTS:
        return None
    text = span.source.text
    for place, argument in enumerate(arguments):
        if argument == text or argument.endswith(f"={text}"):
            if argument.startswith("--"):
                return argument.split("=")[0]
            option = arguments[place - 1] if place else ""
            return option if option.startswith("--") else None
    return None


def _named(item: Diagnostic, arguments: Sequence[str]) -> Diagnostic:
    option = _option(item.span, arguments) if item.span else None
    if option is None or item.span is None:
        return item
    span = item.span
    return replace(item, span=Span(Source(option, span.source.text), span.start, span.end))


def _without_file(item: Diagnostic, arguments: Sequence[str]) -> Diagnostic:
    option = _option(item.span, arguments) if item.span else None
    return item if option is None else replace(item, span=None, where=option)
