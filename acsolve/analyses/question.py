"""A question put to a circuit: where it is driven, what is observed, what ratio is meant."""

from __future__ import annotations

from collections.abc import Callable, Collection
from dataclasses import dataclass
from typing import Literal

from acsolve.circuit import unit
from acsolve.circuit.netlist import Netlist, Pair, Part, QuantityName
from acsolve.circuit.unit import Dimension
from acsolve.codes import Code
from acsolve.equations.system import DRIVE, SHORT, Functional, System, always, assemble
from acsolve.errors import AnalysisError, Diagnostic, EquationError

AskedQuantity = Literal[
    "voltage-ratio",
    "current-ratio",
    "transimpedance",
    "transadmittance",
    "impedance",
    "response",
    "two-port",
]

_SOURCES = ("voltage_source", "current_source")
_OBSERVES_CURRENT = ("current-ratio", "transadmittance")
_DRIVEN_BY_VOLTAGE = ("voltage-ratio", "transadmittance")
_DIMENSIONS: dict[AskedQuantity, Dimension] = {
    "voltage-ratio": unit.NONE,
    "current-ratio": unit.NONE,
    "transimpedance": unit.OHM,
    "transadmittance": unit.SIEMENS,
    "impedance": unit.OHM,
    "response": unit.VOLT,
    "two-port": unit.NONE,
}


@dataclass(frozen=True, slots=True, kw_only=True)
class Ask:
    """One question. `source` is None for the response to the file's own sources.

    `impedance` drives and observes the same pair. `ammeter` names the ammeter whose
    current is observed instead of a short across the target.
    """

    source: Pair | None
    target: Pair
    quantity: AskedQuantity
    ammeter: str | None = None

    @property
    def dimension(self) -> Dimension:
        """Dimension of the answer."""
        if self.quantity == "response" and self.observes_current:
            return unit.AMPERE
        return _DIMENSIONS[self.quantity]

    @property
    def pairs(self) -> tuple[Pair, ...]:
        """The pairs that the question uses."""
        return (self.target,) if self.source is None else (self.source, self.target)

    @property
    def observes_current(self) -> bool:
        """Whether a current is observed: through a short, or that of an ammeter."""
        return self.quantity in _OBSERVES_CURRENT or self.ammeter is not None

    @property
    def short(self) -> Pair | None:
        """The pair that a short is laid across to observe its current, or None."""
        if self.quantity in _OBSERVES_CURRENT and self.ammeter is None:
            return self.target
        return None

    def system(self, netlist: Netlist, *, branch_for: Callable[[Part], bool] = always) -> System:
        """The equations for this question."""
        return assemble(netlist, drive=self.source, short=self.short, branch_for=branch_for)

    def observed(self, system: System) -> Functional:
        """What is observed, as a linear function of the unknowns."""
        if self.observes_current:
            return system.current(self.ammeter or SHORT)
        return system.voltage(self.target)

    def all_observed(self, system: System) -> list[Functional]:
        """What is observed in one pass; the first is the answer."""
        return [self.observed(system)]

    def driven(self, system: System) -> Functional:
        """What it is divided by, likewise."""
        if self.source is None:
            return system.excitation()
        if self.quantity in _DRIVEN_BY_VOLTAGE:
            return system.voltage(self.source)
        return system.current(DRIVE)


def transfer_ask(
    netlist: Netlist,
    source: Pair | None,
    target: Pair,
    *,
    quantity: QuantityName | None = None,
    ammeter: str | None = None,
) -> Ask:
    """A transfer question, checked against the circuit.

    Raises
    ------
    AnalysisError
        [question.unknown-node] a node does not occur; [question.same-node] a pair is one
        node; [question.no-reference] no reference joins the observed pair.
    """
    chosen: AskedQuantity = quantity or ("current-ratio" if ammeter else "voltage-ratio")
    ask = Ask(
        source=source,
        target=target,
        quantity=chosen if source is not None else "response",
        ammeter=ammeter,
    )
    _check(netlist, ask)
    return ask


def impedance_ask(netlist: Netlist, into: Pair) -> Ask:
    """A driving-point impedance question, checked as `transfer_ask` does."""
    ask = Ask(source=into, target=into, quantity="impedance")
    _check(netlist, ask)
    return ask


def _check(netlist: Netlist, ask: Ask) -> None:
    if ask.source is None and not any(part.kind in _SOURCES for part in netlist.parts):
        raise _refuse(
            "question.no-pair",
            "the question does not say where the circuit is driven, and no source is in it",
            "Say where it is driven, or put a voltage_source or current_source into the circuit.",
        )
    known = netlist.node_set()
    for pair in (ask.source, ask.target):
        if pair is None or (ask.ammeter and pair is ask.target):
            continue
        for node in pair:
            if node not in known:
                raise _unknown_node(node, known)
        if pair[0] == pair[1]:
            raise _refuse(
                "question.same-node",
                f"the pair ({pair[0]}, {pair[1]}) is one node",
                "Name two different nodes.",
            )


def _unknown_node(node: str, known: Collection[str]) -> AnalysisError:
    from difflib import get_close_matches

    near = get_close_matches(node, sorted(known), n=1)
    hint = f"Did you mean {near[0]}?" if near else f"The nodes are {_some(sorted(known))}."
    return _refuse("question.unknown-node", f"there is no node {node} in this circuit", hint)


def _some(names: list[str]) -> str:
    return ", ".join(names[:12]) + (", …" if len(names) > 12 else "")


def _refuse(code: Code, message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))


def refuse_unreferenced(system: System, ask: Ask) -> None:
    """Refuse a question about a voltage between two parts that no reference joins."""
    if ask.observes_current:
        return
    first, second = ask.target
    if not system.groups.shares_reference(first, second):
        raise _refuse(
            "question.no-reference",
            f"the voltage between {first} and {second} is not determined: "
            "no part and no reference joins them",
            f"Ask between two nodes of the same part of the network, or connect "
            f"{first} and {second} to a common node.",
        )


def no_unique_solution() -> EquationError:
    """The error for equations that are singular at every frequency."""
    return EquationError(
        Diagnostic(
            code="equations.singular",
            message="the network has no unique solution for this question",
            hint="Check the circuit: a part may float, or ideal sources or op-amps may "
            "contradict each other.",
        )
    )
