"""From a circuit to the facts of its note: every question asked once, nothing solved here."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from math import isfinite, log10, pi
from typing import Any

from acsolve.errors import AcsolveError
from acsolve.report.band import drawn_frequencies, natural_band, roots_of
from acsolve.report.note.facts import Chapter, Facts, Loading

_SYMBOLIC_PARTS = 16
_SYMBOLIC_TERMS = 400
_LARGEST_EQUATIONS = 2_000
_MOST_ROWS = 14
_TELLING = ("equations.singular", "equations.undriven")
_LATER = ("noise", "tolerance")


@dataclass(frozen=True, slots=True)
class _Asked:
    """All questions about one pair: its path and the lines that ask."""

    path: Any
    questions: tuple[Any, ...]

    @property
    def kinds(self) -> tuple[str, ...]:
        return tuple(dict.fromkeys(item.kind for item in self.questions if item is not None))

    def first(self, kind: str) -> Any:
        return next((q for q in self.questions if q is not None and q.kind == kind), None)


def gather(
    circuit: Any, version: str, *, changes: Sequence[str] = (), date: str | None = None
) -> Facts:
    """The facts of a circuit's note.

    Parameters
    ----------
    circuit : an `acsolve.Circuit`; its own methods give every answer.
    version : of this program.
    changes : what was set besides the file, as `NAME=VALUE`.
    date : shown in the note as it stands; none is made up.
    """
    netlist = circuit.netlist
    drawing, undrawn = _drawn(circuit)
    source = netlist.source
    asked = _asked(circuit)
    kinds = [question.kind for question in circuit.questions]
    return Facts(
        netlist=netlist,
        title=circuit.title or "Untitled circuit",
        variant=circuit.variant,
        cautions=tuple(circuit.cautions),
        warnings=_warnings(circuit),
        chapters=tuple(_chapter(circuit, item) for item in asked),
        drawing=drawing,
        undrawn=undrawn,
        name="" if source is None else source.name.replace("\\", "/").rsplit("/", 1)[-1],
        text=None if source is None else source.text,
        version=version,
        changes=tuple(changes),
        date=date,
        own_questions=bool(circuit.questions),
        unanswered=tuple(kind for kind in _LATER if kind in kinds),
    )


def _warnings(circuit: Any) -> tuple[str, ...]:
    found = [*circuit.warnings, *(i for i in circuit.problems() if i.severity != "note")]
    return tuple(dict.fromkeys(item.message for item in found))


def _drawn(circuit: Any) -> tuple[Any, str | None]:
    try:
        return circuit.drawing(), None
    except AcsolveError as error:
        return None, error.message


def _asked(circuit: Any) -> list[_Asked]:
    """The file's questions, those about one pair together; or sensible ones."""
    groups: dict[Any, _Asked] = {}
    for question in circuit.questions:
        if question.kind in _LATER:
            continue
        path = circuit.asked(question)
        key = (path.ask, question.kind == "two-port")
        known = groups.get(key, _Asked(path, ()))
        groups[key] = _Asked(path, (*known.questions, question))
    if groups:
        return list(groups.values())
    return [_Asked(path, (None,)) for path in _sensible(circuit)]


def _sensible(circuit: Any) -> Iterable[Any]:
    """Where nothing is asked: between two ports, else by own sources, else first to last node."""
    ports = list(circuit.netlist.ports)
    nodes = [node for node in circuit.nodes if node != "gnd"]
    sources = [part for part in circuit.netlist.parts if part.kind.endswith("_source")]
    if len(ports) >= 2:
        return [circuit.path(ports[0], ports[1])]
    if ports:
        return [circuit.looking_into(ports[0])]
    if sources and nodes:
        return [circuit.path(None, nodes[-1])]
    if len(nodes) >= 2:
        return [circuit.path(nodes[0], nodes[-1])]
    return [circuit.looking_into(nodes[0])] if nodes else []


def _chapter(circuit: Any, asked: _Asked) -> Chapter:
    """One chapter; what has no answer is told with its reason."""
    refused: list[tuple[str, str]] = []

    def attempt(what: str, work: Callable[[], Any]) -> Any:
        try:
            return work()
        except AcsolveError as error:
            refused.append((what, error.message))
            return None

    path = asked.path
    question = asked.first("two-port")
    if question is not None:
        found = attempt("two-port parameters", lambda: _two_port(path, question))
        return Chapter(ask=path.ask, kinds=asked.kinds, two_port=found, refused=tuple(refused))
    transfer = attempt("closed form", path.transfer)
    cutoffs = attempt("cutoffs", lambda: _cutoffs(path, asked)) or ()
    curve = table = loading = None
    if _has_numbers(transfer, path):
        curve = attempt("response over frequency", lambda: _curve(path, asked, transfer, cutoffs))
        hertz = _telling(transfer, cutoffs, curve)
        table = attempt("table of numbers", lambda: path.sweep(hertz))
        loading = attempt("loading", lambda: _loading(path, hertz))
    poles = None
    if transfer is not None and transfer.order is not None:
        poles = attempt("poles and zeros", lambda: path.poles(form=transfer.form))
    steps = asked.first("step")
    return Chapter(
        ask=path.ask,
        kinds=asked.kinds,
        transfer=transfer,
        formula=_formula(path, transfer),
        poles=poles,
        equations=attempt("equations", lambda: _equations(circuit, path)),
        cutoffs=tuple(cutoffs),
        curve=curve,
        table=table,
        loading=loading,
        step=None
        if steps is None
        else attempt("step response", lambda: path.step(circuit.duration(steps))),
        refused=tuple(dict.fromkeys(refused)),
    )


def _two_port(path: Any, question: Any) -> Any:
    ask = path.ask
    ports = path.circuit.two_port(ask.source, ask.target, reference=question.reference)
    band = None if question.band is None else path.circuit.band(question.band)
    return ports.answer(None if band is None else ports.sweep(band))


def _has_numbers(transfer: Any, path: Any) -> bool:
    """Whether every part has a value."""
    if transfer is not None:
        return not transfer.form.symbols
    try:
        path.response([1.0])
    except AcsolveError:
        return False
    return True


def _cutoffs(path: Any, asked: _Asked) -> list[Any]:
    """Every level that the file asks for; half power where it is silent and a gain is meant."""
    question = asked.first("cutoff")
    if question is None and path.ask.quantity == "impedance":
        return []
    levels = () if question is None else question.levels
    listed = [path.circuit.level(level) for level in levels] or [None]
    return [path.cutoffs(level) for level in listed]


def _formula(path: Any, transfer: Any) -> Any:
    """The closed form over symbols where a person can read it."""
    if transfer is not None and transfer.form.symbols:
        return transfer.form if hasattr(transfer.form, "numerator") else None
    if len(path.circuit.parts) > _SYMBOLIC_PARTS:
        return None
    try:
        form = path.closed_form(symbolic=True, budget=20_000)
    except AcsolveError:
        return None
    return form if len(form.numerator) + len(form.denominator) <= _SYMBOLIC_TERMS else None


def _equations(circuit: Any, path: Any) -> Any:
    """The nodal equations over symbols, driven as the question drives them."""
    if len(circuit.parts) > _LARGEST_EQUATIONS:
        return None
    if path.ask.quantity not in ("voltage-ratio", "impedance", "response"):
        return None
    return circuit.equations(path.ask.source, symbolic=True)


def _marks(cutoffs: Iterable[Any]) -> list[float]:
    return [item.hertz for answer in cutoffs for item in answer.cutoffs if item.hertz is not None]


def _curve(path: Any, asked: _Asked, transfer: Any, cutoffs: Sequence[Any]) -> Any:
    """The response over the band asked for, else over one that shows everything."""
    question = asked.first("sweep")
    roots = (roots_of(transfer) if transfer is not None else None) or ()
    marks = _marks(cutoffs)
    if question is not None and question.band is not None:
        band = path.circuit.band(question.band)
    else:
        band = natural_band([*marks, *(abs(root) / (2 * pi) for root in roots)])
    return path.sweep(drawn_frequencies(band, roots, marks))


def _telling(transfer: Any, cutoffs: Sequence[Any], curve: Any) -> list[float]:
    """Frequencies that matter: cutoffs, corners and resonances, and whole decades between."""
    found = [(hertz, 0) for hertz in _marks(cutoffs)]
    peaks = [item.reference for item in cutoffs if item.reference.at == "peak"]
    found += [(peak.hertz, 0) for peak in peaks if peak.hertz]
    roots = (roots_of(transfer) if transfer is not None else None) or ()
    found += [(abs(root) / (2 * pi), 1) for root in roots]
    low, high = (1.0, 1e6) if curve is None else (curve.hertz.min(), curve.hertz.max())
    first, last = round(log10(low)), round(log10(high))
    step = max(1, (last - first) // 6)
    found += [(10.0**power, 2) for power in range(first, last + 1, step)]
    kept: list[tuple[float, int]] = []
    for hertz, rank in sorted(found, key=lambda item: item[1]):
        inside = isfinite(hertz) and low * 0.999 <= hertz <= high * 1.001
        if inside and all(abs(hertz / other - 1) > 0.02 for other, _ in kept):
            kept.append((hertz, rank))
    return sorted(hertz for hertz, _ in kept[:_MOST_ROWS]) or [float(low)]


def _loading(path: Any, hertz: Sequence[float]) -> Loading | None:
    """Impedances at both ends of a voltage ratio, over frequency."""
    ask = path.ask
    if ask.quantity != "voltage-ratio" or ask.source is None:
        return None
    circuit = path.circuit
    try:
        source_side = circuit.looking_into(ask.source).response(list(hertz))
    except AcsolveError as error:
        if error.code not in _TELLING:
            raise
        source_side = None
    load_side = circuit.equivalent(ask.target, source=ask.source, hertz=list(hertz)).impedance
    forms = _loading_forms(circuit, ask)
    return Loading(
        source_side=source_side, load_side=load_side, source_form=forms[0], load_form=forms[1]
    )


def _loading_forms(circuit: Any, ask: Any) -> tuple[Any, Any]:
    """Both impedances over symbols, where that is short."""
    if len(circuit.parts) > _SYMBOLIC_PARTS // 2:
        return None, None
    try:
        first = circuit.looking_into(ask.source).closed_form(symbolic=True, budget=2_000)
        second = circuit.equivalent(ask.target, source=ask.source, symbolic=True).impedance
    except AcsolveError:
        return None, None
    return first, second
