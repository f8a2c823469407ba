"""Answers in a notebook: formulas as TeX, responses as pictures, cutoffs as a table."""

from __future__ import annotations

from collections.abc import Sequence
from functools import singledispatch
from html import escape
from typing import Any

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import CutoffAnswer
from acsolve.analyses.nested import NestedForm
from acsolve.analyses.step import StepAnswer
from acsolve.analyses.sweep import Sweep
from acsolve.analyses.transfer import TransferAnswer
from acsolve.report.entry import Entry, Heading
from acsolve.report.note.formula.read import UnreadableError, read_formula
from acsolve.report.note.formula.tex import tex
from acsolve.report.number import engineering

_LONGEST = 4_000  # characters of a formula that a page still shows well
_MOST_STEPS = 40


def bundle(answer: Any) -> dict[str, str]:
    """An answer by media type; as plain text alone where nothing else shows it better."""
    return {"text/plain": repr(answer), **_shown(answer)}


@singledispatch
def _shown(answer: Any) -> dict[str, str]:
    del answer
    return {}


@_shown.register
def _(answer: ClosedForm) -> dict[str, str]:
    return _formula([("", answer.text())])


@_shown.register
def _(answer: TransferAnswer) -> dict[str, str]:
    return _shown(answer.form)


@_shown.register
def _(answer: NestedForm) -> dict[str, str]:
    steps = answer.step_texts()
    if len(steps) > _MOST_STEPS:
        return {}
    return _formula([*((f"{name} = ", text) for name, text in steps), ("H = ", answer.text())])


@_shown.register
def _(answer: Sweep) -> dict[str, str]:
    from acsolve.report.plot import Curve, Picture, picture_content

    if not answer.hertz.size:
        return {}
    picture = Picture(curves=(Curve(answer, ""),))
    return {"image/svg+xml": picture_content(picture, "svg").decode()}


@_shown.register
def _(answer: StepAnswer) -> dict[str, str]:
    from acsolve.report.plot_time import time_picture

    if answer.seconds is None:
        return {}
    entry = Entry(kind="step", heading=Heading(), ask=answer.form.ask, step=answer)
    return {"image/svg+xml": time_picture([entry], "svg").decode()}


@_shown.register
def _(answer: CutoffAnswer) -> dict[str, str]:
    rows = [
        (
            "" if item.hertz is None else engineering(item.hertz, "Hz"),
            item.closed_form or "",
            item.direction or "",
        )
        for item in answer.cutoffs
    ]
    proven = "all of them, proven" if answer.complete else "not proven complete"
    return {"text/html": _table(("cutoff", "rad/s", "direction"), rows, proven)}


def _table(head: tuple[str, ...], rows: Sequence[tuple[str, ...]], caption: str) -> str:
    def line(cells: tuple[str, ...], tag: str) -> str:
        return "<tr>" + "".join(f"<{tag}>{escape(cell)}</{tag}>" for cell in cells) + "</tr>"

    body = "".join(line(row, "td") for row in rows)
    return f"<table><caption>{escape(caption)}</caption>{line(head, 'th')}{body}</table>"


def _formula(lines: list[tuple[str, str]]) -> dict[str, str]:
    """Lines of `name = ` and a text of ours as TeX; nothing where one is too long or not ours."""
    if sum(len(text) for _, text in lines) > _LONGEST:
        return {}
    try:
        written = [(_name(name), tex(read_formula(text))) for name, text in lines]
    except UnreadableError:
        return {}
    if len(written) == 1:
        return {"text/latex": rf"$\displaystyle {written[0][0]}{written[0][1]}$"}
    rows = r" \\ ".join(f"{name}&= {text}" for name, text in written)
    return {"text/latex": rf"$$\begin{{aligned}} {rows} \end{{aligned}}$$"}


def _name(head: str) -> str:
    name = head.removesuffix(" = ")
    return tex(read_formula(name)) if name else ""
