"""Problems found in one text, collected until all are known."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import NoReturn

from acsolve.codes import Code
from acsolve.errors import CircuitError, Diagnostic, Label, Severity, TextError
from acsolve.source import Source, Span
from acsolve.text import limits

_TEXT_LAYERS = ("file.", "syntax.", "value.", "limit.")


class RefusedError(Exception):
    """A problem already recorded makes going on pointless; never leaves this layer."""


class Problems:
    """The problems and warnings of one text; the same place and code counts once."""

    def __init__(self, source: Source) -> None:
        self.source = source
        self.errors: list[Diagnostic] = []
        self.warnings: list[Diagnostic] = []
        self.broken_words: set[str] = set()  # words in statements that could not be read
        self._seen: set[tuple[str, int, int]] = set()
        self._beyond = 0

    def add(
        self,
        code: Code,
        message: str,
        span: Span | None,
        *,
        hint: str | Callable[[], str | None] | None = None,
        labels: Sequence[Label] = (),
    ) -> None:
        """Record an error; a hint that is a function is worked out only if it is shown."""
        if callable(hint):
            hint = hint() if len(self.errors) < limits.PROBLEMS else None
        self._record(
            Diagnostic(code=code, message=message, span=span, hint=hint, labels=tuple(labels))
        )

    def warn(
        self,
        code: Code,
        message: str,
        span: Span | None,
        *,
        hint: str | None = None,
        severity: Severity = "warning",
    ) -> None:
        """Record a warning or note."""
        self._record(
            Diagnostic(code=code, message=message, span=span, hint=hint, severity=severity)
        )

    def refuse(
        self, code: Code, message: str, span: Span | None, *, hint: str | None = None
    ) -> NoReturn:
        """Record an error after which expansion must stop."""
        self.add(code, message, span, hint=hint)
        raise RefusedError

    def _record(self, found: Diagnostic) -> None:
        span = found.span
        key = (found.code, span.start if span else -1, span.end if span else -1)
        if key in self._seen:
            return
        self._seen.add(key)
        kept = self.errors if found.severity == "error" else self.warnings
        if len(kept) < limits.PROBLEMS:
            kept.append(found)
        elif found.severity == "error":
            self._beyond += 1

    def finish(self) -> tuple[Diagnostic, ...]:
        """The warnings, sorted by place.

        Raises
        ------
        TextError
            if an error of spelling or values was recorded.
        CircuitError
            if only names, kinds, couplings or structure are wrong.

        """
        if not self.errors:
            return tuple(sorted(self.warnings, key=lambda item: item.sort_key))
        found = list(self.errors)
        if self._beyond:
            found.append(self._closing())
        if any(item.code.startswith(_TEXT_LAYERS) for item in self.errors):
            raise TextError(found)
        raise CircuitError(found)

    def _closing(self) -> Diagnostic:
        end = len(self.source.text)
        return Diagnostic(
            code="limit.problems",
            message=f"and {self._beyond} more problems; the first {limits.PROBLEMS} are shown",
            span=Span(self.source, end, end),
            hint="Mend these first; many others may go with them.",
        )
