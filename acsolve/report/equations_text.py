"""Nodal equations as aligned text."""

from __future__ import annotations

from typing import TYPE_CHECKING

from acsolve.errors import EquationError
from acsolve.report.entry import Entry
from acsolve.report.formula import numeric_polynomial
from acsolve.report.table import WIDTH, aligned, labelled, wrapped

if TYPE_CHECKING:
    from acsolve.analyses.equations import Equations
    from acsolve.circuit.expression import Expression

_LARGEST = 40  # rows that are printed


def equations_lines(entry: Entry) -> list[str]:
    """The body of an equations answer: the matrix, or its rows one by one where it is wide."""
    found = entry.equations
    assert found is not None, "an equations entry holds equations"
    if found.size > _LARGEST:
        body = [f"{found.size} equations; --json or --save FILE.json gives them."]
    else:
        body = _matrix(found) or _row_by_row(found)
    return [*body, "", *_legend(found)]


def _matrix(found: Equations) -> list[str] | None:
    """Matrix, unknowns and excitation side by side, or None where they are too wide."""
    cells = _cells(found)
    heads = ["A(s)", *[""] * (found.size - 1), "", "x", "", "z"]
    rows = [
        [*row, " ", unknown, "=", right]
        for row, unknown, right in zip(cells, found.unknowns, _right(found), strict=True)
    ]
    lines = aligned([heads, *rows], gap=2)
    return lines if max(map(len, lines)) <= WIDTH else None


def _row_by_row(found: Equations) -> list[str]:
    """Each equation as a sum, for matrices that do not fit a screen."""
    lines = ["A(s)*x = z, row by row:", ""]
    for place, (row, right) in enumerate(zip(_cells(found), _right(found), strict=True)):
        terms = [
            _product(cell, unknown)
            for cell, unknown in zip(row, found.unknowns, strict=True)
            if cell != "0"
        ]
        text = " + ".join(terms).replace("+ -", "- ") or "0"
        head = f"{place + 1}.".ljust(4)
        first, *rest = wrapped(f"{text} = {right}", WIDTH - len(head))
        lines += [head + first, *(" " * len(head) + line for line in rest)]
    return lines


def _product(cell: str, unknown: str) -> str:
    if cell in ("1", "-1"):
        return f"{cell[:-1]}{unknown}"
    return f"({cell})*{unknown}" if " " in cell else f"{cell}*{unknown}"


def _cells(found: Equations) -> list[list[str]]:
    size = range(found.size)
    return [[cell_text(found.entry(row, column)) for column in size] for row in size]


def _right(found: Equations) -> list[str]:
    return [cell_text(item) for item in found.excitation]


def cell_text(entry: Expression) -> str:
    """An entry as text; one that is a polynomial in s without names shows decimal numbers."""
    from acsolve.circuit.expression import Number
    from acsolve.equations.evaluate import Evaluator, FloatArithmetic, polynomial_in_s
    from acsolve.equations.write import Spelling, expression_text

    if isinstance(entry, Number) and entry.value.denominator == 1:
        return str(entry.value)
    try:
        found = polynomial_in_s(entry, Evaluator({}, FloatArithmetic()))
    except EquationError:
        found = None
    if found is None:
        return expression_text(entry, Spelling({}))
    return numeric_polynomial(tuple(complex(value) for value in found))


def _legend(found: Equations) -> list[str]:
    rows = [(f"row {place + 1}", text) for place, text in enumerate(found.meanings[:_LARGEST])]
    rows.append(("reference", ", ".join(found.references) + "  (taken as 0 V)"))
    rows.append(("s", "complex frequency in rad/s"))
    return labelled(rows)
