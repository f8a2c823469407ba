"""Diagnostics as plain values, and the one family of exceptions that holds them."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field
from typing import Literal

from acsolve.codes import Code
from acsolve.source import Span

Severity = Literal["error", "warning", "note"]


@dataclass(frozen=True, slots=True)
class Label:
    """A second place that a diagnostic points at ("first given here")."""

    span: Span
    text: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Diagnostic:
    """One problem: what is wrong (one sentence, no advice), where, and what to do.

    `span` is None for circuits built in code; `where` then names the place
    (`R1.value`). `hint` holds the remedy.
    """

    code: Code
    message: str
    span: Span | None = None
    where: str | None = None
    hint: str | None = None
    labels: tuple[Label, ...] = field(default=())
    severity: Severity = "error"

    @property
    def sort_key(self) -> tuple[int, str, str]:
        """By place in the text, then code, then message."""
        return (self.span.start if self.span else -1, self.code, self.message)


class AcsolveError(ValueError):
    """Base of every error acsolve raises; holds its diagnostics sorted by place."""

    def __init__(self, diagnostics: Iterable[Diagnostic] | Diagnostic) -> None:
        if isinstance(diagnostics, Diagnostic):
            diagnostics = (diagnostics,)
        self.diagnostics: tuple[Diagnostic, ...] = tuple(
            sorted(diagnostics, key=lambda diagnostic: diagnostic.sort_key)
        )
        super().__init__(self.diagnostics)

    def __str__(self) -> str:
        return "\n".join(frame(diagnostic) for diagnostic in self.diagnostics)

    @property
    def code(self) -> Code:
        """Code of the first diagnostic."""
        return self.diagnostics[0].code

    @property
    def message(self) -> str:
        """Message of the first diagnostic."""
        return self.diagnostics[0].message

    @property
    def span(self) -> Span | None:
        """Place of the first diagnostic."""
        return self.diagnostics[0].span

    @property
    def hint(self) -> str | None:
        """Remedy of the first diagnostic."""
        return self.diagnostics[0].hint


class TextError(AcsolveError):
    """The text is not a circuit: reading, spelling, values, names."""


class CircuitError(AcsolveError):
    """The circuit makes no sense as a network."""


class EquationError(AcsolveError):
    """The equations have no unique answer, or the answer is over budget."""


class AnalysisError(AcsolveError):
    """The question cannot be answered for this circuit."""


def frame(diagnostic: Diagnostic) -> str:
    """A diagnostic as a person reads it: headline, place, marked line, remedy."""
    tag = "" if diagnostic.severity == "error" else f"{diagnostic.severity}: "
    lines = [f"{tag}{diagnostic.code}: {diagnostic.message}"]
    if diagnostic.span is not None:
        lines += _marked(diagnostic.span)
    elif diagnostic.where:
        lines.append(f"  at {diagnostic.where}")
    for label in diagnostic.labels:
        lines.append(f"  {label.text}:")
        lines += _marked(label.span)
    if diagnostic.hint:
        lines.append(f"  {diagnostic.hint}")
    return "\n".join(lines)


_WIDEST = 96  # a longer source line is cut around the marked place


def _marked(span: Span) -> list[str]:
    """The place and the source line with the span underlined; tabs become blanks."""
    line, column = span.source.place(span.start)
    raw = span.source.line_text(line)
    width = max(1, min(span.end - span.start, len(raw) - column + 1))
    left = raw[: column - 1].expandtabs(4)
    middle = raw[column - 1 : column - 1 + width].expandtabs(4)
    text, mark = raw.expandtabs(4), " " * len(left) + "^" * max(1, len(middle))
    if len(text) > _WIDEST:
        start = max(0, min(len(left) - _WIDEST // 3, len(text) - _WIDEST))
        text, mark = text[start : start + _WIDEST], mark[start : start + _WIDEST]
    return [
        f"  {span.source.name}, line {line}, column {column}",
        f"    {text.rstrip()}",
        f"    {mark.rstrip()}",
    ]
