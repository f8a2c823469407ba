"""Cutoffs of responses that are no ratio of polynomials: by certified bracketing over a band."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import Any

from acsolve.algebra.ball import precision
from acsolve.algebra.bracket import Searched, search
from acsolve.algebra.summit import Summit, summit
from acsolve.algebra.taylor import Cell
from acsolve.analyses.band_scale import band_of_form
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import (
    Cutoff,
    CutoffAnswer,
    CutoffLevel,
    Reference,
    Touch,
    no_reference,
)
from acsolve.analyses.ends import End, at_infinity, at_zero
from acsolve.analyses.gain_series import (
    Distance,
    FormResponse,
    Gain,
    Response,
    at_precision,
    ball_of,
)
from acsolve.analyses.grid import HertzBand
from acsolve.analyses.magnitude import ReferenceName
from acsolve.errors import AnalysisError, Diagnostic

METHOD = "numeric: Taylor series enclosed in ball arithmetic over the band, with bisection"
_EDGE = Fraction(1, 10**9)  # so much beyond an edge is searched too: a crossing on it counts
_WORK = 4_000_000  # products of series
_CELLS = (300, 5_000)  # intervals that may be looked at, least and most
_BITS = 256
_WIDEST = HertzBand(Fraction(1, 10**290), Fraction(10**290))


@dataclass(frozen=True, slots=True)
class Basis:
    """What the level counts from; `squared` gives the squared gain at the precision in force."""

    shown: Reference
    squared: Callable[[], Any]
    proven: bool = True
    summit: Summit | None = None
    remarks: tuple[str, ...] = ()
    known: dict[int, Any] = field(default_factory=dict)

    def ball(self) -> Any:
        """The squared gain, worked out once for each precision."""
        return at_precision(self.known, self.squared)


def band_cutoffs(
    form: ClosedForm,
    *,
    level: CutoffLevel,
    reference: ReferenceName | Fraction | None = None,
    band: HertzBand | None = None,
) -> CutoffAnswer:
    """Every frequency of a band where |H| crosses a level below its reference.

    Parameters
    ----------
    form : a closed form whose values are all numbers; it may hold any function of s.
    level, reference : as for `cutoffs`; the peak is the largest gain within the band.
    band : in hertz, above zero; None takes one from the network's own time scales.

    Raises
    ------
    AnalysisError
        [question.no-reference] the reference asked for is zero, infinite or none;
        [sweep.band] the band is none.
    """
    edges = band_of_form(form, level.db) if band is None else checked_band(band)
    response = FormResponse(form)
    ends = at_zero(form), at_infinity(form)
    basis = _basis(response, ends, reference, edges)
    return replace(answered(response, basis, level, edges), form=form)


def checked_band(band: HertzBand) -> HertzBand:
    """The band, refused where a search in equal ratios cannot cover it."""
    if not _WIDEST.low <= band.low < band.high <= _WIDEST.high:
        raise AnalysisError(
            Diagnostic(
                code="sweep.band",
                message=f"cutoffs are searched from above 0 Hz up to a higher edge, got {band}",
                hint="Give a band such as 1Hz..1GHz.",
            )
        )
    return band


def most_cells(response: Response) -> int:
    """How many intervals one question may look at."""
    least, most = _CELLS
    return max(least, min(most, _WORK // response.cost))


def in_rad_per_s(band: HertzBand, beyond: Fraction = Fraction(0)) -> Cell:
    """The band as angular frequencies, wider by a share of each edge."""
    from math import pi

    twice = 2 * Fraction(pi)
    low, high = band.low * twice * (1 - beyond), band.high * twice * (1 + beyond)
    return Cell(Fraction(float(low)), Fraction(float(high)))


def answered(response: Response, basis: Basis, level: CutoffLevel, band: HertzBand) -> CutoffAnswer:
    """The answer over a band for a reference that is known; its form is left out."""
    if basis.summit is not None and level.decibel == 0:
        return _at_the_top(basis, level, band)
    distance = Distance(response, lambda: basis.ball() * level.ball())
    wider = in_rad_per_s(band, _EDGE)
    found = search(distance, wider, most=most_cells(response))
    cutoffs = [(root.cell, root.rises) for root in found.roots]
    cutoffs += [(doubt.cell, doubt.change > 0) for doubt in found.doubts if doubt.change]
    finished = found.reached >= wider.high
    return CutoffAnswer(
        form=None,
        reference=basis.shown,
        level_db=level.db,
        cutoffs=tuple(_cutoff(*item) for item in sorted(cutoffs, key=lambda item: item[0].low)),
        touches=tuple(
            _touch(doubt.cell)
            for doubt in found.doubts
            if not doubt.change and not _wide(doubt.cell)
        ),
        complete=finished and found.decided and basis.proven,
        method=METHOD,
        searched=(float(band.low), float(band.high)),
        remarks=(*basis.remarks, *_remarks(found, band, finished=finished)),
    )


def _at_the_top(basis: Basis, level: CutoffLevel, band: HertzBand) -> CutoffAnswer:
    """A level of 0 dB below the peak is met at the peak, and nowhere crossed.

    Proven where one stationary point alone reaches that high; equal ones are seen, not proven.
    """
    assert basis.summit is not None
    tops = basis.summit.tops
    inner = [top for top in tops if top.cell.low < top.cell.high]
    flat = [top for top in inner if not top.cell.narrow]
    remarks = list(basis.remarks)
    if flat:
        remarks.append(_stays(flat[0].cell.low, flat[-1].cell.high))
    elif not inner:
        remarks.append("The largest gain is at the edge of the band.")
    elif len(inner) > 1:
        remarks.append("The peaks are equal as far as numbers can tell.")
    return CutoffAnswer(
        form=None,
        reference=basis.shown,
        level_db=level.db,
        cutoffs=(),
        touches=() if flat else tuple(_touch(top.cell) for top in inner),
        complete=len(tops) == 1 and (not inner or inner[0].stationary) and basis.proven,
        method=METHOD,
        searched=(float(band.low), float(band.high)),
        remarks=tuple(remarks),
    )


def _remarks(found: Searched, band: HertzBand, *, finished: bool) -> list[str]:
    remarks = []
    for doubt in found.doubts:
        if _wide(doubt.cell):
            remarks.append(_stays(doubt.cell.low, doubt.cell.high))
            continue
        what = "one crossing from three" if doubt.change else "a touch from no or two crossings"
        remarks.append(f"Near {_hertz(doubt.cell.low):.9g} Hz numbers cannot tell {what}.")
    if not finished:
        reached = _hertz(found.reached)
        remarks.append(
            f"The search came as far as {reached:.4g} Hz; ask for a band with fewer turns in it."
        )
    elif not found.roots and not found.doubts:
        remarks.append(f"The gain does not cross this level within {band}.")
    return remarks


def _wide(cell: Cell) -> bool:
    """Whether a doubtful cell is a stretch rather than a place."""
    return cell.high > cell.low * (1 + Fraction(1, 10**9))


def _stays(low: Fraction, high: Fraction) -> str:
    return f"From {_hertz(low):.6g} Hz to {_hertz(high):.6g} Hz the gain stays at the level."


def _basis(
    response: Response,
    ends: tuple[End, End],
    asked: ReferenceName | Fraction | None,
    band: HertzBand,
) -> Basis:
    if isinstance(asked, Fraction):
        return stated(asked)
    low, high = ends
    remarks: tuple[str, ...] = ()
    name = asked
    if name is None:
        name = by_shape(low, high)
        if high.kind in ("none", "unknown"):
            known = "" if high.kind == "none" else " that is known"
            where = "the gain at 0 Hz" if name == "dc" else "the peak within the band"
            remarks = (f"The gain has no limit{known} at infinite frequency: {where} counts.",)
    if name == "peak":
        return replace(peak(response, band), remarks=remarks)
    end = low if name == "dc" else high
    if end.squared is None:
        raise no_reference(_why_not(name, end))
    return Basis(_shown(name, end), end.squared, remarks=remarks)


def stated(gain: Fraction) -> Basis:
    """A stated gain as the reference."""
    if gain == 0:
        raise no_reference("a stated gain of zero is no reference")
    return Basis(Reference(at="stated", gain=float(gain)), lambda: ball_of(gain**2))


def by_shape(low: End, high: End) -> ReferenceName:
    """The rule for a reference that is not named, as far as the ends are known."""
    for name, end in (("at 0 Hz", low), ("at infinite frequency", high)):
        if end.kind == "infinite":
            raise no_reference(f"the gain {name} is infinite")
    if low.squared is not None and high.squared is not None:
        with precision(_BITS):
            return "infinity" if float(high.squared()) > float(low.squared()) else "dc"
    if low.squared is not None:
        return "dc"
    if high.squared is not None and low.kind == "zero":
        return "infinity"
    return "peak"


def _why_not(name: str, end: End) -> str:
    where = "at 0 Hz" if name == "dc" else "at infinite frequency"
    if end.kind == "none":
        return f"the gain has no limit {where}"
    if end.kind == "unknown":
        return f"the gain {where} could not be found"
    return f"the gain {where} is {end.kind}"


def _shown(name: ReferenceName, end: End) -> Reference:
    assert end.squared is not None
    with precision(_BITS):
        gain = float(end.squared().sqrt().mid())
    return Reference(at=name, gain=gain, hertz=0.0 if name == "dc" else None)


def peak(response: Response, band: HertzBand) -> Basis:
    """The largest gain within the band, enclosed."""
    found = summit(Gain(response), in_rad_per_s(band), most=most_cells(response))
    if not found.tops:
        raise no_reference(f"the peak within {band} could not be located with certainty")
    if not found.value.is_finite():
        raise no_reference(f"the response has a pole on the frequency axis within {band}")
    if not found.value > 0:
        raise no_reference(f"the gain is zero within {band}")
    with precision(_BITS):
        gain = float(found.attained.sqrt())
    best = max(found.tops, key=lambda top: float(top.value.mid()))
    shown = Reference(at="peak", gain=gain, hertz=_hertz(best.cell.middle))
    return Basis(shown, lambda: found.value, summit=found)


def _cutoff(cell: Cell, rises: bool) -> Cutoff:
    return Cutoff(
        hertz=_hertz(cell.middle),
        rad_per_s=float(cell.middle),
        closed_form=None,
        direction="rising" if rises else "falling",
    )


def _touch(cell: Cell) -> Touch:
    return Touch(hertz=_hertz(cell.middle), rad_per_s=float(cell.middle))


def _hertz(omega: Fraction) -> float:
    """An angular frequency in hertz, right to the last place."""
    from flint import arb

    with precision(128):
        return float((ball_of(omega) / (2 * arb.pi())).mid())
