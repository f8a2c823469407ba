"""Exit statuses, and which problems lead to which."""

from __future__ import annotations

from acsolve import AcsolveError, AnalysisError, Diagnostic, EquationError

ANSWERED, NO_ANSWER, WRONG, DEFECT, STOPPED, PIPE_CLOSED = 0, 1, 2, 70, 130, 141

#: Codes of questions that are not well put, in contrast to those that have no answer.
_OF_THE_CALL = (
    "option.",
    "command.",
    "question.unknown",
    "question.same-node",
    "question.no-pair",
    "save.ending",
    "sweep.",
    "variant.",
    "ports.reference",
)


def is_of_the_call(problem: Diagnostic) -> bool:
    """Whether the question itself is not well put."""
    return problem.code.startswith(_OF_THE_CALL)


def status_of(error: AcsolveError) -> int:
    """1 where the question has no answer, 2 where the file or the call is wrong."""
    if isinstance(error, AnalysisError | EquationError):
        return WRONG if any(map(is_of_the_call, error.diagnostics)) else NO_ANSWER
    return WRONG
