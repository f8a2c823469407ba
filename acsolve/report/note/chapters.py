"""The chapters of a note: every question about one pair answered by the circuit's own methods."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from functools import partial
from math import isfinite, log10, pi
from typing import Any, Literal

from acsolve.errors import AcsolveError, Diagnostic
from acsolve.report.band import drawn_frequencies, natural_band, roots_of
from acsolve.report.note.facts import Chapter
from acsolve.report.note.loads import loading
from acsolve.report.note.places import leading, marks, telling
from acsolve.report.note.wording import LONGEST
from acsolve.report.number import HALF_POWER_DB, gain_in_db
from acsolve.report.plot_asymptotes import asymptotes_of

READ_TERMS = 40  # of a closed form over symbols that is written out
_SYMBOLIC_PARTS = 16
_SYMBOLIC_TERMS = 400
_STEPPED_PARTS = 1_000  # up to which named steps are worked out
_LARGEST_EQUATIONS = 2_000
_MOST_ROWS = 14
_FAR_OFF = 20.0  # decibels between a reference and the pass band that it misses
_WIDE = 10.0  # highest over lowest frequency of a level part of a curve


@dataclass(frozen=True, slots=True)
class Asked:
    """All questions about one pair: its path and the lines that ask."""

    path: Any
    questions: tuple[Any, ...]

    @property
    def kinds(self) -> tuple[str, ...]:
        """What is asked, each once."""
        return tuple(dict.fromkeys(item.kind for item in self.questions if item is not None))

    def wants(self, *kinds: str) -> bool:
        """Whether one of these kinds is asked; where nothing is, a closed form is meant."""
        return any(kind in (self.kinds or ("transfer",)) for kind in kinds)

    def all(self, kind: str) -> tuple[Any, ...]:
        """Every question of a kind, in the order of the file."""
        return tuple(q for q in self.questions if q is not None and q.kind == kind)

    @property
    def bands(self) -> tuple[tuple[float, float], ...]:
        """Every band asked for, in hertz, each once."""
        stated = (q.band for q in self.questions if q is not None and q.band is not None)
        return tuple(dict.fromkeys(self.path.circuit.band(band) for band in stated))


def chapters(circuit: Any, asked: Sequence[Asked]) -> tuple[Chapter, ...]:
    """All chapters; impedances are also looked at where the others have their cutoffs or peak."""
    found: dict[int, Chapter] = {}
    late = [place for place, item in enumerate(asked) if item.path.ask.quantity == "impedance"]
    for place in sorted(range(len(asked)), key=lambda place: place in late):
        also = leading(found[at] for at in sorted(found)) if place in late else ()
        found[place] = chapter(circuit, asked[place], also)
    return tuple(found[place] for place in range(len(asked)))


def chapter(circuit: Any, asked: Asked, also: Sequence[float] = ()) -> Chapter:
    """One chapter; what has no answer is told with its reason."""
    refused: list[tuple[str, str]] = []
    problems: list[Diagnostic] = []

    def attempt(what: str, work: Callable[[], Any], *kinds: str) -> Any:
        try:
            return work()
        except AcsolveError as error:
            refused.append((what, error.message))
            if asked.wants(*kinds):
                problems.extend(error.diagnostics)
            return None

    path = asked.path
    ports = asked.all("two-port")
    if ports:
        found = attempt("two-port parameters", lambda: _two_port(path, ports[0]), "two-port")
        return Chapter(
            ask=replace(path.ask, quantity="two-port"),
            kinds=asked.kinds,
            two_port=found,
            refused=tuple(refused),
            problems=tuple(problems),
        )
    transfer = attempt("closed form", path.transfer, "transfer", "impedance")
    levels = _levels(asked)
    tried = [attempt("cutoffs", partial(path.cutoffs, level), "cutoff") for level in levels]
    cutoffs = [item for item in tried if item is not None]
    curves: tuple[Any, ...] = ()
    table = loads = None
    what = "response over frequency"
    if not _has_numbers(transfer, path):
        if asked.wants("sweep"):
            attempt(what, lambda: path.sweep([1.0]), "sweep")
    else:
        roots = (roots_of(transfer) if transfer is not None else None) or ()
        curves = attempt(what, lambda: _curves(path, asked, roots, cutoffs), "sweep") or ()
        reference = _better_reference(cutoffs, curves, transfer)
        if reference is not None:
            more = attempt("cutoffs of the pass band", lambda: path.cutoffs(reference=reference))
            cutoffs += [] if more is None else [more]
            curves = attempt(what, lambda: _curves(path, asked, roots, cutoffs)) or ()
        hertz = telling(roots, cutoffs, curves, asked.bands, also)
        table = attempt("table of numbers", lambda: path.sweep(hertz).as_meant())
        loads = attempt("loading", lambda: loading(path, hertz))
    poles = None
    if transfer is not None and transfer.order is not None:
        poles = attempt("poles and zeros", lambda: path.poles(form=transfer.form))
    lengths = dict.fromkeys(circuit.duration(item) for item in asked.all("step"))
    in_time = [attempt("step response", partial(path.step, length), "step") for length in lengths]
    formula = _formula(path, transfer)
    return Chapter(
        ask=path.ask,
        kinds=asked.kinds,
        transfer=transfer,
        formula=formula,
        steps=_named_steps(path, formula),
        poles=poles,
        equations=attempt("equations", lambda: _equations(circuit, path)),
        cutoffs=tuple(cutoffs),
        curves=curves,
        table=table,
        loading=loads,
        in_time=tuple(item for item in in_time if item is not None),
        refused=tuple(dict.fromkeys(refused)),
        problems=tuple(dict.fromkeys(problems)),
    )


def _two_port(path: Any, question: Any) -> Any:
    """The sets in closed form, and in numbers over the band asked or at their corners."""
    ask = path.ask
    ports = path.circuit.two_port(ask.source, ask.target, reference=question.reference)
    if question.band is not None:
        band = path.circuit.band(question.band)
    else:
        try:
            sizes = _port_corners(ports.forms(), question.reference is not None)
        except AcsolveError:
            sizes = []
        if not sizes:
            return ports.answer(None)
        band = natural_band(sizes)
    return ports.answer(ports.sweep(_round_places(*band)))


def _port_corners(forms: Any, has_reference: bool) -> list[float]:
    """Where the parameters turn, in hertz; nothing where they are constant or symbols."""
    import numpy as np

    from acsolve.report.values import coefficients

    name = "s" if has_reference else "abcd"
    found: list[float] = []
    for form in (form for row in forms.matrix(name) or () for form in row):
        numbers = None if form.symbols else coefficients(form)
        for part in () if numbers is None else (numbers.top, numbers.bottom):
            values = [complex(value) for value in reversed(part)]
            found += [abs(root) / (2 * pi) for root in np.roots(values) if root]
    return found


def _round_places(low: float, high: float) -> list[float]:
    """The ends of a band and 1, 2, 5 of each decade between, few enough for a page."""
    first, last = int(log10(low)) - 1, int(log10(high)) + 1
    for steps in ((1.0, 2.0, 5.0), (1.0, 3.0), (1.0,)):
        found = [m * 10.0**p for p in range(first, last + 1) for m in steps]
        inside = [hertz for hertz in found if low * 1.02 < hertz < high * 0.98]
        if len(inside) <= _MOST_ROWS - 2:
            break
    every = max(1, -(-len(inside) // (_MOST_ROWS - 2)))
    return [low, *inside[::every], *([high] if high > low else [])]


def _has_numbers(transfer: Any, path: Any) -> bool:
    """Whether every part has a value."""
    if transfer is not None:
        return not transfer.form.symbols
    try:
        path.response([1.0])
    except AcsolveError:
        return False
    return True


def _levels(asked: Asked) -> list[Any]:
    """Every level that the file asks for; half power where it names none and a gain is meant."""
    found = []
    for question in asked.all("cutoff"):
        found += [asked.path.circuit.level(level) for level in question.levels] or [None]
    if not found and asked.path.ask.quantity != "impedance":
        return [None]
    return list(dict.fromkeys(found))


def _better_reference(
    cutoffs: Sequence[Any], curves: Sequence[Any], transfer: Any
) -> Literal["peak"] | float | None:
    """What half power should count from too, where the rule's reference misses the pass band.

    The peak, where it stands far above; a wide level part of the curve, where the reference is
    a gain far above it at infinite frequency, which stray parts alone may make. None elsewhere.
    """
    half = [item for item in cutoffs if abs(item.level_db - HALF_POWER_DB) < 1e-12]
    if not half or half[0].reference.at not in ("dc", "infinity") or not half[0].reference.gain:
        return None
    level = gain_in_db(half[0].reference.gain)
    known = [float(gain) for curve in curves for gain in curve.gain_db if isfinite(gain)]
    if known and max(known) > level + _FAR_OFF:
        return "peak"
    if half[0].reference.at != "infinity" or transfer is None:
        return None
    shelves = [item for item in asymptotes_of(transfer) if _is_shelf(item, level)]
    return max((10 ** (item.gain_db(item.low) / 20) for item in shelves), default=None)


def _is_shelf(segment: Any, level: float) -> bool:
    """Whether a level part of the asymptotes is wide, and far below a level in dB."""
    wide = segment.low > 0 and segment.high / segment.low >= _WIDE
    return wide and not segment.power and segment.gain_db(segment.low) < level - _FAR_OFF


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


def is_read(formula: Any) -> bool:
    """Whether a closed form is short enough to be written out."""
    few = len(formula.numerator) + len(formula.denominator) <= READ_TERMS
    return few and len(formula.text()) <= LONGEST


def _named_steps(path: Any, formula: Any) -> Any:
    """The answer over symbols as named steps, where it is too long to be read otherwise."""
    if formula is not None and is_read(formula):
        return None
    if len(path.circuit.parts) > _STEPPED_PARTS:
        return None
    try:
        return path.nested_form(symbolic=True)
    except AcsolveError:
        return None


def _equations(circuit: Any, path: Any) -> Any:
    """The nodal equations over symbols, driven as the question drives them."""
    if len(circuit.parts) > _LARGEST_EQUATIONS:
        return None
    if path.ask.quantity not in ("voltage-ratio", "impedance", "response"):
        return None
    return circuit.equations(path.ask.source, symbolic=True)


def _curves(
    path: Any, asked: Asked, roots: Sequence[complex], cutoffs: Sequence[Any]
) -> tuple[Any, ...]:
    """The response over each band asked for, else over one that shows everything."""
    places = marks(cutoffs)
    corners = [abs(root) / (2 * pi) for root in roots]
    bands = asked.bands or (natural_band([*places, *corners]),)
    return tuple(path.sweep(drawn_frequencies(band, roots, places)).as_meant() for band in bands)
