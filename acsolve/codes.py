"""The closed list of codes that a diagnostic can carry, dotted by layer."""

from typing import Literal

Code = Literal[
    # reading a file
    "file.missing",
    "file.unreadable",
    "file.encoding",
    "file.empty",
    "file.too-large",
    # a question that has no answer, or that is not well put
    "question.no-pair",
    "question.unknown-node",
    "question.unknown-name",
    "question.same-node",
    "question.no-reference",
    "question.no-value",
    "question.level",
    "question.quantity",
    # the network as a graph
    "graph.shorted",
    "graph.voltage-loop",
    "graph.two-outputs",
    "graph.current-cutset",
    "graph.floating",
    "graph.dangling",
    "graph.no-feedback",
    "graph.positive-feedback",
    "graph.unreachable",
    "graph.no-reference",
    "graph.unstable",
    "graph.feedback-sign",
    "equations.singular",
    "equations.undriven",
    "equations.budget",
    "equations.not-rational",
    "equations.check-failed",
    "equations.evaluation",
    "sweep.band",
    "sweep.points",
    "option.value",
    "save.ending",
    "save.failed",
    "variant.unknown",
    # spelling, found while reading the text
    "syntax.bracket",
    "syntax.statement",
    "limit.brackets",
    "limit.statement",
    "limit.problems",
]
