"""Approximate closed forms with a stated error: by assumption, or by an allowed error."""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field
from math import inf, isfinite, nan

import numpy as np

from acsolve.analyses.assumption import Assumption, Ranking, parse_assumptions
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cut import Cut, Dropped, Exponents, Side, Term, cut, terms
from acsolve.analyses.dropping import Samples, droppable
from acsolve.analyses.error_bound import (
    Enclosure,
    ErrorOver,
    Floats,
    Point,
    band_points,
    enclose,
    sample_places,
    worst,
)
from acsolve.analyses.grid import HertzBand
from acsolve.analyses.natural import natural_band, natural_hertz
from acsolve.analyses.spread import Spread, fixed, hidden, spread, spread_symbols
from acsolve.analyses.transfer import closed_form
from acsolve.circuit.expression import Name, names
from acsolve.circuit.netlist import Netlist
from acsolve.codes import Code
from acsolve.equations.evaluate import Evaluator, FloatArithmetic, no_value
from acsolve.errors import AnalysisError, Diagnostic, EquationError

MUCH = 10.0  # "much larger" holds for values from this ratio on
LARGEST_SIMPLIFIED = 10_000  # terms; above it trying them one by one takes minutes
_MARGIN = 0.98  # part of the allowed error that terms may use up: the rest is for the proof
_ROUNDS = 16


@dataclass(frozen=True, slots=True)
class Judged:
    """An assumption against the values: how much larger, None where a value is missing."""

    assumption: Assumption
    ratio: float | None

    @property
    def holds(self) -> bool | None:
        """Whether the ratio is at least ten; None where it is not known."""
        return None if self.ratio is None else self.ratio >= MUCH


@dataclass(frozen=True, slots=True, eq=False)
class Approximation:
    """An approximate closed form H~ of an exact one H, and what is known about its error.

    form, exact : H~ (common factors removed, `checked` None: it is not exact) and H.
    dropped : each term that went, and the coefficient it stood in.
    largest_error : the largest |H~ - H|/|H| found over `band` and the box of tolerances,
        None where no values are given; `at_hertz` and `at_values` (value of each loose
        part, SI units) tell where.
    bound : no error over the whole band and box is larger: proven. None where no useful
        bound was found.
    band : edges in hertz, None where the error was not measured.
    assumptions : each assumption against the values.
    remarks : what a reader should know, as sentences.
    """

    form: ClosedForm
    exact: ClosedForm
    dropped: tuple[Dropped, ...]
    largest_error: float | None = None
    at_hertz: float | None = None
    at_values: Mapping[str, float] = field(default_factory=dict)
    bound: float | None = None
    band: HertzBand | None = None
    assumptions: tuple[Judged, ...] = ()
    remarks: tuple[str, ...] = ()
    cut: Cut | None = field(default=None, repr=False)


def assume(
    form: ClosedForm,
    assumptions: str | Iterable[str],
    *,
    netlist: Netlist | None = None,
    band: HertzBand | None = None,
) -> Approximation:
    """The closed form to leading order in assumed small ratios.

    Parameters
    ----------
    form : the exact closed form, its values symbolic.
    assumptions : "R2 >> R1", "C1 >> C2, R4 << R3", or several such texts.
    netlist : the circuit, where the error is to hold over the tolerances of its values too;
        without it at the nominal values.
    band : where the error is measured, hertz; by default from a decade below the lowest to
        a decade above the highest natural frequency.

    Raises
    ------
    AnalysisError
        [option.value] an assumption does not read, names no symbol of the form, or
        contradicts the others; [sweep.band] the band does not start above 0 Hz.

    Notes
    -----
    In each coefficient of each power of s a term goes when another term of that coefficient
    exceeds it by a product of the assumed ratios: with every larger symbol scaled by 1/e,
    what stays is the leading order in e. Numbers count as being of order one; terms that
    the assumptions do not compare stay.
    """
    form, remarks = _separate(form, netlist)
    ranked = parse_assumptions(assumptions, form.symbols)
    split = cut(form, _outranked(form, ranked))
    judged = tuple(Judged(item, _ratio_of(form, item)) for item in ranked)
    remarks += [_judgement(item) for item in judged]
    if not split.dropped:
        remarks.append("no term is outranked: nothing is dropped")
    box = fixed(form.values) if netlist is None else spread(form, netlist)
    return _measured(split, box, band, judged, remarks)


def simplify(
    form: ClosedForm,
    netlist: Netlist,
    *,
    band: HertzBand,
    within: float = 0.01,
    tolerances: bool = True,
) -> Approximation:
    """The closed form without the terms that hardly change the response over a band.

    Parameters
    ----------
    form : the exact closed form, its values symbolic.
    netlist : the circuit, for its values and tolerances.
    band : where the error counts, hertz.
    within : the largest |H~ - H|/|H| allowed, between 0 and 1 (0.01 for 1 %).
    tolerances : allow it over all values within their tolerances, else at the nominal ones.

    Raises
    ------
    AnalysisError
        [option.value] `within` is not between 0 and 1; [sweep.band] the band does not start
        above 0 Hz; [equations.budget] the closed form has too many terms.
    EquationError
        [question.no-value] a symbol has no value.

    Notes
    -----
    Terms and whole coefficients are tried smallest first, at samples of band and box. The
    result is then searched in balls for a larger error; one that is found joins the samples
    and the choice is made anew. A zero of H on the band makes the relative error of the
    numerator infinite there, so nothing is dropped from it.
    """
    _check_within(within)
    form, remarks = _separate(form, netlist if tolerances else None)
    _check_size(form)
    box = spread(form, netlist) if tolerances else fixed(form.values)
    _need_values(form, box)
    split, found = _simplified(form, box, band, within)
    if not split.dropped:
        remarks.append(f"no term can be dropped within {_percent(within)}")
    over = ErrorOver(split, box, band)
    return _stated(over, found, (), [*remarks, *_proof(found, within)])


def _simplified(
    form: ClosedForm, box: Spread, band: HertzBand, within: float
) -> tuple[Cut, Enclosure]:
    """The cut that the search does not refute, and its error."""
    hertz = _sampled_hertz(form, box, band)
    places = sample_places(box)
    limit = _MARGIN * within
    for turn in range(_ROUNDS):
        split = cut(form, droppable(Samples(form, box, hertz, places), limit))
        if not split.dropped:
            break
        over = ErrorOver(split, box, band)
        found, at = worst(over, hertz, places)
        if found <= within:
            result = enclose(over, found, at, within=within, stop_above=within)
            if result.found <= within:
                return split, result
            at = result.at
        hertz = np.union1d(hertz, [at.hertz])
        places = np.vstack([places, np.array([at.places]).reshape(1, -1)])
        if turn >= _ROUNDS // 2:
            limit /= 2
    return cut(form, ()), Enclosure(0.0, Point(float(hertz[0]), tuple(places[0])), 0.0)


def _outranked(form: ClosedForm, assumptions: Sequence[Assumption]) -> list[Term]:
    """The terms that another term of the same coefficient exceeds by assumed ratios."""
    ranking = Ranking(assumptions)
    generators = form.basis.generators
    place_of = {
        item.leaf.name: place
        for place, item in enumerate(generators)
        if isinstance(item.leaf, Name)
    }
    named = [place_of.get(name) for name in ranking.names]
    finest = int(np.lcm.reduce([1, *(generators[k].root for k in named if k is not None)]))
    scale = [0 if k is None else finest // generators[k].root for k in named]
    numbers = {k for k, item in enumerate(generators) if _is_number(form, k) and not item.varies}

    def ranked(item: Term) -> Exponents:
        pairs = zip(named, scale, strict=True)
        return tuple(0 if k is None else item.exponents[k] * times for k, times in pairs)

    skipped = {*named, *numbers}

    def rest(item: Term) -> Exponents:
        return tuple(0 if k in skipped else e for k, e in enumerate(item.exponents))

    groups: dict[tuple[Side, Exponents, Exponents], list[Term]] = {}
    for item in terms(form):
        groups.setdefault((item.side, item.varying, rest(item)), []).append(item)
    gone: list[Term] = []
    for members in groups.values():
        low = ranking.outranked(ranked(item) for item in members)
        gone += [item for item in members if ranked(item) in low]
    return gone


def _is_number(form: ClosedForm, place: int) -> bool:
    """Whether a generator is a plain number: pi, or the root of one."""
    return not names(form.basis.generators[place].leaf)


def _ratio_of(form: ClosedForm, item: Assumption) -> float | None:
    """How much larger the larger value is, by magnitude; None where one is missing."""
    evaluate = form.evaluator(FloatArithmetic())
    try:
        large, small = abs(evaluate.name(item.large)), abs(evaluate.name(item.small))
    except EquationError:
        return None
    return float(large / small) if small else inf if large else nan


def _judgement(item: Judged) -> str:
    pair = f"{item.assumption.large}/{item.assumption.small}"
    if item.ratio is None:
        return f"{item.assumption}: not judged, a value is missing"
    verdict = "holds" if item.holds else "does not hold"
    return f"{item.assumption} {verdict} for the given values: {pair} = {item.ratio:.4g}"


def _measured(
    split: Cut,
    box: Spread,
    band: HertzBand | None,
    judged: tuple[Judged, ...],
    remarks: list[str],
) -> Approximation:
    """The approximation with its error, where the values and a band allow to state one."""
    form = split.exact
    missing = _missing(form, box)
    if missing:
        remarks.append(f"no error is stated: {', '.join(missing)} without a value")
    else:
        band = band or natural_band(form, _nominal(box))
        if band is None:
            remarks.append("no error is stated: no band is given, and the form suggests none")
    if missing or band is None:
        return Approximation(
            split.approximate(), form, split.listed(), None, assumptions=judged,
            remarks=tuple(remarks), cut=split,
        )  # fmt: skip
    over = ErrorOver(split, box, band)
    found, at = worst(over, _sampled_hertz(form, box, band), sample_places(box))
    result = enclose(over, found, at) if split.dropped else Enclosure(0.0, at, 0.0)
    return _stated(over, result, judged, [*remarks, *_proof(result, None)])


def _stated(
    over: ErrorOver, found: Enclosure, judged: tuple[Judged, ...], remarks: Sequence[str]
) -> Approximation:
    box, split = over.spread, over.cut
    evaluate = box.evaluator(FloatArithmetic(), found.at.places)
    values = {name: float(np.real(evaluate.name(name))) for name in box.names}
    finite = isfinite(found.found)
    return Approximation(
        form=split.approximate(),
        exact=split.exact,
        dropped=split.listed(),
        largest_error=found.found if finite else None,
        at_hertz=found.at.hertz if found.found else None,
        at_values=values if found.found else {},
        bound=found.bound,
        band=over.band,
        assumptions=judged,
        remarks=tuple(remarks) if finite else (*remarks, _UNDEFINED),
        cut=split,
    )


_UNDEFINED = "the relative error grows without limit: a zero or a pole moves on the band"


def _proof(found: Enclosure, within: float | None) -> list[str]:
    """What is to be said about the bound."""
    if found.bound is None:
        why = "measured, not proven"
        if found.lost_at is not None:
            why = f"no more than measured: a pole or zero may lie near {found.lost_at:.6g} Hz"
        return [f"no bound: the largest error is {why}"]
    if within is not None and found.bound > within:
        return [f"{_percent(within)} is kept at every sample, but not proven"]
    return []


def _percent(part: float) -> str:
    return f"{100 * part:.4g} %"


def _missing(form: ClosedForm, box: Spread) -> list[str]:
    """Symbols of the form that no number is known for."""
    evaluate = _nominal(box)
    found = []
    for name in form.symbols:
        try:
            evaluate.name(name)
        except EquationError:
            found.append(name)
    return found


def _need_values(form: ClosedForm, box: Spread) -> None:
    missing = _missing(form, box)
    if missing:
        raise no_value(tuple(missing))


def _separate(form: ClosedForm, netlist: Netlist | None) -> tuple[ClosedForm, list[str]]:
    """The form with a symbol for every value that has a tolerance of its own."""
    if netlist is None or not hidden(form, netlist):
        return form, []
    apart = closed_form(netlist, form.ask, spread_symbols(netlist))
    if apart.symbols == form.symbols:
        return form, []
    return apart, ["every value with a tolerance is a symbol of its own here"]


def _sampled_hertz(form: ClosedForm, box: Spread, band: HertzBand) -> Floats:
    """A grid over the band, its natural frequencies among the points."""
    natural = np.array(natural_hertz(form, _nominal(box)), dtype=float)
    inside = natural[(natural > float(band.low)) & (natural < float(band.high))]
    return np.union1d(band_points(band), inside)


def _nominal(box: Spread) -> Evaluator:
    """All values at their nominal numbers, in doubles."""
    arithmetic = FloatArithmetic()
    return box.evaluator(arithmetic, box.nominal_places(arithmetic))


def _check_within(within: float) -> None:
    if not 0 < within < 1:
        raise _refuse(
            "option.value",
            f"the allowed error is between 0 and 100 %, got {_percent(within)}",
            "Give a part such as 1 %.",
        )


def _check_size(form: ClosedForm) -> None:
    count = len(form.numerator) + len(form.denominator)
    if count > LARGEST_SIMPLIFIED:
        raise _refuse(
            "equations.budget",
            f"the closed form has {count} terms, more than {LARGEST_SIMPLIFIED} to try",
            "Keep fewer values symbolic.",
        )


def _refuse(code: Code, message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
