"""All that is told about two ports at once: closed forms, laws, numbers, insertion loss."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from acsolve.analyses.insertion import Insertion, insertion_of
from acsolve.analyses.port_sweep import PortSweep
from acsolve.analyses.two_port import Matrix, PortForms, sets_of
from acsolve.circuit.expression import Expression
from acsolve.errors import AcsolveError
from acsolve.ports.sets import SetName

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

_NO_FORM = ("equations.budget", "equations.not-rational")


@dataclass(frozen=True, slots=True, eq=False)
class PortAnswer:
    """What is known of two ports.

    forms : set -> closed forms, None where the set does not exist; None in all where there
        are no closed forms, and `remark` says why.
    sweep, insertion : over frequency, where that was asked; `insertion` is between the
        reference resistances as source and load.
    """

    references: tuple[Expression, Expression] | None
    port_condition: str
    ports: PortForms | None
    forms: Mapping[SetName, Matrix | None]
    remark: str | None = None
    sweep: PortSweep | None = None
    insertion: Insertion | None = None


def port_answer(
    references: tuple[Expression, Expression] | None,
    port_condition: str,
    forms: Callable[[], PortForms],
    sweep: PortSweep | None,
) -> PortAnswer:
    """Put an answer together; without closed forms the sweep alone is one.

    Raises
    ------
    EquationError
        where there is neither.
    """
    ports, remark = None, None
    try:
        ports = forms()
    except AcsolveError as stop:
        if sweep is None or stop.code not in _NO_FORM:
            raise
        remark = f"no closed form: {stop.message}"
    matrices = {} if ports is None else {name: ports.matrix(name) for name in sets_of(references)}
    between = None
    if sweep is not None and sweep.matrices.get("s") is not None:
        between = insertion_of(sweep)
    return PortAnswer(references, port_condition, ports, matrices, remark, sweep, between)
