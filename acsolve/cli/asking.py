"""From options and a file's own questions to circuits and paths."""

from __future__ import annotations

import sys
from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from shutil import get_terminal_size
from typing import TYPE_CHECKING, Any, TypeVar

import click

import acsolve
from acsolve import AcsolveError, AnalysisError, Circuit, Diagnostic, Path
from acsolve.cli.complaint import report
from acsolve.cli.options import Options, refused
from acsolve.cli.status import is_of_the_call
from acsolve.cli.usage import near

if TYPE_CHECKING:
    from acsolve.report.entry import Entry, Heading


def open_circuit(options: Options) -> Circuit:
    """The circuit as the file and the options --variant and --let say."""
    circuit = acsolve.read(options.file).with_variant(options.variant)
    changes: dict[str, Any] = {}
    for text in options.let:
        name, sign, value = (part.strip() for part in text.partition("="))
        if not (sign and name and value):
            raise refused(f"--let {text} is not NAME=VALUE", "Write, say, --let R1=4k7.")
        changes[name] = value
    _refuse_unknown(circuit, options.kept)
    return circuit.with_values(changes) if changes else circuit


def _refuse_unknown(circuit: Circuit, kept: Sequence[str]) -> None:
    """Refuse a name to keep that the circuit does not have: it would silently do nothing."""
    known = {name for name, _ in circuit.netlist.values()}
    for name in kept:
        if name not in known:
            hint = near(name, known) or "Name parts, attributes or quantities of the circuit."
            raise refused(f"--keep names {name}, which this circuit does not have", hint)


def heading(circuit: Circuit, options: Options) -> Heading:
    """What all answers about the circuit share; its warnings are shown once, here."""
    from acsolve.report.entry import Heading

    if circuit.warnings and not options.as_json:
        report(circuit.warnings, as_json=False)
    return Heading(
        title=circuit.title,
        variant=circuit.variant,
        cautions=circuit.cautions,
        warnings=(*circuit.warnings, *_problems(circuit, options)),
        columns=_columns(),
    )


def _columns() -> int | None:
    """The width of the terminal that shows the answers, None where there is none."""
    return get_terminal_size().columns if sys.stdout.isatty() else None


def _problems(circuit: Circuit, options: Options) -> tuple[Diagnostic, ...]:
    """What looks wrong with the network itself, told in one line; `check` tells the rest."""
    named = [text for text in (options.source, options.target, options.into) if text]
    try:
        pairs = [circuit.pair(text) for text in named]
    except AcsolveError:
        return ()  # the question itself is refused, with its own words
    found = tuple(item for item in circuit.problems(*pairs) if item.severity != "note")
    if found and not options.as_json:
        more = f", and {len(found) - 1} more" if len(found) > 1 else ""
        text = f"{found[0].severity}: {found[0].message}{more}"
        click.echo(f"{text}\n  acsolve check {options.file} tells more.", err=True)
    return found


def with_remarks(shared: Heading, path: Path, options: Options) -> Heading:
    """The heading with the warnings that concern one question only, shown here."""
    found = tuple(path.problems())
    if found and not options.as_json:
        report(found, as_json=False)
    return replace(shared, warnings=(*shared.warnings, *found))


@dataclass(frozen=True, slots=True)
class Asked:
    """A path, with the line of the file that asks it where it was not asked by options."""

    path: Path
    question: Any = None


def asked(circuit: Circuit, kind: str, options: Options) -> list[Asked]:
    """The questions to answer: the one that the options put, else the file's own.

    Raises
    ------
    AnalysisError
        [question.no-pair] neither asks one.
    """
    if options.asks:
        return [Asked(_path(circuit, options))]
    found = []
    for question in circuit.questions:
        if question.kind == kind:
            changed = question
            if options.quantity is not None:
                changed = replace(question, quantity=options.quantity)  # type: ignore[arg-type]
            found.append(Asked(circuit.asked(changed), question))
    if not found:
        raise _nothing_asked(circuit, kind, options)
    return found


def _path(circuit: Circuit, options: Options) -> Path:
    if options.into is not None:
        return circuit.looking_into(options.into)
    return circuit.path(
        options.source,
        options.target,
        quantity=options.quantity,  # type: ignore[arg-type]
        ammeter=options.through,
    )


_WAYS = {"impedance": "--into PAIR"}


def _nothing_asked(circuit: Circuit, kind: str, options: Options) -> AnalysisError:
    others = sorted({question.kind for question in circuit.questions} - {kind})
    also = f" (it asks {', '.join(others)})" if others else ""
    nodes = [node for node in circuit.nodes if node != "gnd"]
    some = ", ".join(nodes[:8]) + (", …" if len(nodes) > 8 else "")
    return AnalysisError(
        Diagnostic(
            code="question.no-pair",
            message=f"{options.file} asks no {kind} of its own{also}, and the command line "
            "names no pair",
            hint=f"Add {_WAYS.get(kind, '--from PAIR --to PAIR')}; the nodes are {some}.",
        )
    )


Answer = TypeVar("Answer")


def answer_all(
    questions: Sequence[Asked], answer: Callable[[Asked], Sequence[Entry]]
) -> tuple[list[tuple[Path, Entry]], list[AcsolveError]]:
    """Every question's entries, and the errors of those that have no answer."""
    entries: list[tuple[Path, Entry]] = []
    errors: list[AcsolveError] = []
    for item in questions:
        try:
            entries += [(item.path, entry) for entry in answer(item)]
        except AcsolveError as error:
            errors.append(_placed(error, item))
    return entries, errors


def _placed(error: AcsolveError, item: Asked) -> AcsolveError:
    """The error with the file's question as its place, and the causes that a check finds."""
    causes = _causes(error, item)
    span = item.question.span if item.question is not None else None
    placed = [
        found
        if found.span is not None or found.where is not None or is_of_the_call(found)
        else replace(found, span=span)
        for found in error.diagnostics
    ]
    return type(error)([*causes, *placed])


def _causes(error: AcsolveError, item: Asked) -> list[Diagnostic]:
    if error.code not in ("equations.singular", "equations.undriven"):
        return []
    found = item.path.problems() or item.path.circuit.check().problems
    return [problem for problem in found if problem.severity == "error"]
