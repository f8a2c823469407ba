"""Does the circuit make sense: its size, its order, its natural modes, every problem found."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace
from fractions import Fraction

from acsolve.algebra.roots import LARGEST_CERTIFIED
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.enclosed import enclosed_roots
from acsolve.analyses.hidden import is_passive
from acsolve.analyses.question import Ask, AskedQuantity
from acsolve.analyses.stability import Stability, judged
from acsolve.analyses.transfer import ratio
from acsolve.circuit.check import check, check_question
from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import Netlist, Pair, Part, Question, bindings
from acsolve.circuit.value import Value
from acsolve.equations.exact import Symbols
from acsolve.errors import Diagnostic, EquationError
from acsolve.source import Span

_LARGEST_EXACT = 1200  # unknowns up to which the exact characteristic polynomial is worked out


@dataclass(frozen=True, slots=True, eq=False)
class Modes:
    """Natural modes of the whole network, before anything cancels, for one way of driving it.

    `driven` is the pair held by the ideal drive (None: all sources as in the file, at rest).
    `order` is their number; `values` are in rad/s, None where parts have no values or
    there are too many.
    """

    driven: Pair | None
    held: str
    order: int
    values: tuple[complex, ...] | None
    stability: Stability

    @property
    def stable(self) -> bool | None:
        """Whether no mode lies right of the frequency axis; None where it is not known."""
        planes = self.stability.planes
        if planes is not None:
            return planes.right == 0
        return {"stable": True, "marginal": True, "unstable": False}.get(self.stability.verdict)

    @property
    def decays(self) -> bool | None:
        """Whether every mode decays (one at 0 Hz or on the axis does not); None if unknown."""
        planes = self.stability.planes
        if planes is not None:
            return planes.right == planes.axis == 0
        return {"stable": True, "marginal": False, "unstable": False}.get(self.stability.verdict)


@dataclass(frozen=True, slots=True, eq=False)
class CheckAnswer:
    """What `check` found. `problems` are sorted by place; errors refuse the circuit."""

    title: str | None
    nodes: tuple[str, ...]
    parts: tuple[Part, ...]
    modes: tuple[Modes, ...]
    problems: tuple[Diagnostic, ...]

    @property
    def ok(self) -> bool:
        """Whether no error was found."""
        return all(item.severity != "error" for item in self.problems)


def check_answer(netlist: Netlist, remarks: Iterable[Diagnostic] = ()) -> CheckAnswer:
    """Everything that can be said about a circuit before it is asked anything."""
    problems = [*remarks, *check(netlist), *_unanswered(netlist)]
    for question in netlist.questions:
        problems += _question_problems(netlist, question)
    asks = _ways_of_driving(netlist)
    refused = any(item.severity == "error" for item in problems)
    modes = (
        () if refused else tuple(found for ask in asks if (found := natural_modes(netlist, ask)))
    )
    if not refused:
        problems += _instabilities(modes)
        problems += _one_pole_instabilities(netlist, asks, modes)
    ordered = sorted(_distinct(problems), key=lambda item: item.sort_key)
    return CheckAnswer(netlist.title, netlist.nodes(), netlist.parts, modes, tuple(ordered))


_ANSWERED = frozenset({"transfer", "impedance", "cutoff", "sweep", "step", "two-port"})


def _unanswered(netlist: Netlist) -> list[Diagnostic]:
    """Questions and goals that the format knows and no command answers yet."""
    found: list[tuple[str, Span | None]] = [
        (item.kind, item.span) for item in netlist.questions if item.kind not in _ANSWERED
    ]
    found += [("goal", item.span) for item in netlist.goals]
    return [
        Diagnostic(
            code="question.unanswered",
            severity="note",
            message=f"no command of this version answers `{word}` lines",
            span=span,
            hint="They are read and kept; acsolve --help lists what is answered.",
        )
        for word, span in found
    ]


def _question_problems(netlist: Netlist, question: Question) -> Iterable[Diagnostic]:
    pairs = [question.target] if question.source is None else [question.source, question.target]
    for first, second in pairs:
        if first == second:
            where = f'in the variant "{netlist.variant}" ' if netlist.variant else ""
            return [
                Diagnostic(
                    code="question.same-node",
                    severity="warning",
                    message=f"{where}the question's pair is one node, {first}",
                    span=question.span,
                    hint="Ask another pair with --from and --to.",
                )
            ]
    quantity: AskedQuantity
    if question.kind == "impedance":
        quantity = "impedance"
    elif question.source is None:
        quantity = "response"
    else:
        quantity = question.quantity or "voltage-ratio"
    return check_question(
        netlist,
        question.source,
        question.target,
        quantity=quantity,
        ammeter=question.ammeter,
    )


def _distinct(problems: Iterable[Diagnostic]) -> list[Diagnostic]:
    return list({(item.sort_key, item.severity): item for item in problems}.values())


def _ways_of_driving(netlist: Netlist) -> list[Ask]:
    """One question for each way the file's questions hold the network, else the network at rest."""
    seen: dict[tuple[Pair | None, str], Ask] = {}
    for question in netlist.questions:
        if question.kind == "impedance":
            ask = Ask(source=question.target, target=question.target, quantity="impedance")
        elif question.source is None:
            ask = Ask(source=None, target=question.target, quantity="response")
        else:
            ask = Ask(
                source=question.source,
                target=question.source,
                quantity="impedance"
                if question.quantity in _DRIVEN_BY_CURRENT
                else "voltage-ratio",
            )
        if ask.target[0] != ask.target[1]:
            seen.setdefault((ask.source, ask.quantity), ask)
    if seen:
        return list(seen.values())
    nodes = netlist.nodes()
    if len(nodes) < 2:
        return []
    return [Ask(source=None, target=(nodes[1], nodes[0]), quantity="response")]


_DRIVEN_BY_CURRENT = ("transimpedance", "current-ratio")


def natural_modes(netlist: Netlist, ask: Ask) -> Modes | None:
    """The roots of the network's characteristic polynomial; None where it is not one."""
    system = ask.system(netlist)
    if len(system.unknowns) > _LARGEST_EXACT:
        return None
    try:
        found = ratio(netlist, ask, Symbols())
    except EquationError:
        return None
    form = ClosedForm(
        ask, found.basis, found.driven, found.basis.ring.constant(1), bindings(netlist)
    )
    if not form.rational:
        return None
    coefficients = form.coefficients()[0]
    order = max((k for k, value in enumerate(coefficients) if value != 0), default=0)
    values = None
    if not form.symbols and order <= LARGEST_CERTIFIED:
        values = enclosed_roots(form, found.driven)
    held = "at rest" if ask.source is None else "open" if ask.quantity == "impedance" else "held"
    return Modes(ask.source, held, order, values, judged(form, passive=is_passive(netlist)))


def _instabilities(modes: Iterable[Modes]) -> list[Diagnostic]:
    problems = []
    for item in modes:
        planes = item.stability.planes
        growing = 0 if planes is None else planes.right
        if growing:
            problems.append(
                Diagnostic(
                    code="graph.unstable",
                    severity="warning",
                    message=f"the network is not stable: {growing} of its {item.order} "
                    f"natural modes {'grows' if growing == 1 else 'grow'}, so a steady "
                    "response does not exist",
                    hint="Look for positive feedback or a negative value.",
                )
            )
    return problems


def _one_pole_instabilities(
    netlist: Netlist, asks: Iterable[Ask], modes: Iterable[Modes]
) -> list[Diagnostic]:
    """Ideal op-amps cannot tell plus from minus: try them as fast integrators."""
    ideal = [part for part in netlist.parts if _is_ideal(part)]
    if not ideal or any(item.stable is None for item in modes):
        return []
    fastest = max((abs(mode) for item in modes for mode in item.values or ()), default=1.0)
    bandwidth = Value(expression=Number(Fraction(max(1, round(fastest))) * _FASTER))
    real = replace(
        netlist,
        parts=tuple(
            replace(part, values={**part.values, "gain_bandwidth": bandwidth})
            if _is_ideal(part)
            else part
            for part in netlist.parts
        ),
    )
    for ask, before in zip(asks, modes, strict=False):
        after = natural_modes(real, ask)
        if before.stable is False or after is None:
            continue
        if any(mode.real > 1e-9 * fastest for mode in after.values or ()):
            names = ", ".join(part.name for part in ideal)
            return [
                Diagnostic(
                    code="graph.feedback-sign",
                    severity="warning",
                    message=f"with real op-amps this network grows without bound ({names} "
                    "taken as fast integrators)",
                    span=ideal[0].span,
                    hint="Are plus and minus of an op-amp swapped? An ideal op-amp cannot "
                    "tell them apart.",
                )
            ]
    return []


_FASTER = 1000  # gain-bandwidth of the trial op-amps over the network's fastest mode


def _is_ideal(part: Part) -> bool:
    return part.kind == "opamp" and not {"open_loop_gain", "gain_bandwidth"} & set(part.values)
