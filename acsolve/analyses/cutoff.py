"""Cutoffs: every frequency where the gain crosses a level below its reference."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from fractions import Fraction
from math import inf, log10, sqrt
from typing import Any, Literal

from acsolve.algebra.ball import precision
from acsolve.algebra.crossing import Crossings
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.grid import HertzBand
from acsolve.analyses.magnitude import Exact, Magnitude, ReferenceName, magnitude
from acsolve.analyses.passband import BandForms, FrequencyBand, bands
from acsolve.analyses.roll_off import RollOff, roll_off
from acsolve.codes import Code
from acsolve.errors import AnalysisError, Diagnostic
from acsolve.shown import Shown

HALF_POWER_DB = 10 * log10(0.5)
_BITS = 256  # leaves the doubles that are shown right to the last place

Direction = Literal["falling", "rising"]


@dataclass(frozen=True, slots=True)
class CutoffLevel:
    """A level relative to the reference: half power, or a stated number of decibels."""

    decibel: Fraction | None = None

    @property
    def db(self) -> float:
        """The level in decibels."""
        return HALF_POWER_DB if self.decibel is None else float(self.decibel)

    @property
    def exact(self) -> Fraction | None:
        """The ratio of squared gains where it is rational: half power, whole tens of dB."""
        if self.decibel is None:
            return Fraction(1, 2)
        tens = self.decibel / 10
        return Fraction(10) ** tens.numerator if tens.denominator == 1 else None

    def ball(self) -> Any:
        """The ratio of squared gains as a ball at the precision in force."""
        from flint import arb, fmpq

        if self.exact is not None:
            return arb(fmpq(self.exact.numerator, self.exact.denominator))
        assert self.decibel is not None
        tens = self.decibel / 10
        return arb(10) ** arb(fmpq(tens.numerator, tens.denominator))


HALF_POWER = CutoffLevel()


_LARGEST_LEVEL = 10_000  # dB; far beyond any network, and still a number to work with


def cutoff_level(decibel: Fraction) -> CutoffLevel:
    """A level in decibels; -3 dB is how the trade says half power.

    Raises
    ------
    AnalysisError
        [option.value] a level beyond 10,000 dB.
    """
    if abs(decibel) > _LARGEST_LEVEL:
        raise _refuse(
            "option.value",
            f"a level of {float(decibel):.3g} dB is out of range",
            f"Give a level between -{_LARGEST_LEVEL:,} dB and {_LARGEST_LEVEL:,} dB.",
        )
    return HALF_POWER if decibel == -3 else CutoffLevel(decibel)


@dataclass(frozen=True, slots=True, kw_only=True)
class Reference:
    """What the level counts from: where, the gain there, and the frequency of a peak."""

    at: ReferenceName
    gain: float | None
    hertz: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Cutoff:
    """One crossing; `closed_form` is the angular frequency as text, where there is one.

    `condition` says when such a text over symbols holds, None where it always does.
    """

    hertz: float | None
    rad_per_s: float | None
    closed_form: str | None
    direction: Direction | None
    condition: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Touch:
    """A frequency where the curve meets the level without crossing it."""

    hertz: float
    rad_per_s: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CutoffAnswer(Shown):
    """All crossings of one level, in rising order, with what is proven about them.

    `complete` is True where it is proven that none is missing. `remarks` say in words
    what a reader must know (no crossing, say, or when a closed form holds). `searched` is
    the band in hertz that all of it speaks of; None where that is every frequency. `form` is
    None where the network is too large for one. `bands` lie between neighbouring cutoffs;
    `band_forms` are width, centre and Q of a lone one in closed form, where there is one.
    `roll_off` tells corners and slopes of the asymptotes, of all frequencies; None where
    they are not known.
    """

    form: ClosedForm | None
    reference: Reference
    level_db: float
    cutoffs: tuple[Cutoff, ...]
    touches: tuple[Touch, ...] = ()
    complete: bool
    method: str
    searched: tuple[float, float] | None = None
    remarks: tuple[str, ...] = ()
    bands: tuple[FrequencyBand, ...] = ()
    band_forms: BandForms | None = None
    roll_off: RollOff | None = None


def cutoffs(
    form: ClosedForm,
    *,
    level: CutoffLevel = HALF_POWER,
    reference: ReferenceName | Fraction | None = None,
    formula: ClosedForm | None = None,
    band: HertzBand | None = None,
    degree: int = 2,
) -> CutoffAnswer:
    """Every frequency where |H| crosses a level below its reference.

    Parameters
    ----------
    form : the closed form asked about.
    level : relative to the reference; half power by default.
    reference : `dc`, `infinity`, `peak` or a stated gain; by default chosen by the shape:
        dc where H(0) is finite and not zero and H tends to 0, infinity in the mirror case,
        the peak where both ends are zero, the larger end where neither is.
    formula : the same question with its parts as symbols, to give numeric cutoffs and
        corners their closed form.
    degree : closed forms are written up to this degree in ω², four at most.
    band : only there. A rational form is answered for every frequency without one, any other
        over a band from its own time scales.

    Raises
    ------
    AnalysisError
        [equations.not-rational] a part is not rational in s and some values are symbols;
        [question.no-reference] the reference asked for is zero, infinite or none;
        [sweep.band] the band is none; [option.value] it is given where symbols stay.

    Notes
    -----
    With numbers: the positive roots in x = ω² of |N|² - level·|D|², square-free factored
    and isolated by Descartes' rule of signs (see `acsolve.algebra.real_roots`). With
    symbols: radicals where that equation is of first or second degree in x, up to the fourth
    on request.
    Forms that are not rational: see `acsolve.analyses.band_cutoff`.
    """
    if not form.rational:
        return _not_rational(form, level=level, reference=reference, band=band)
    if form.symbols and band is not None:
        raise _refuse(
            "option.value",
            f"a band goes with numbers, and {', '.join(form.symbols[:6])} stay symbols",
            "Leave the band out, or give the parts values.",
        )
    if form.symbols:
        from acsolve.analyses.cutoff_formula import symbolic_cutoffs

        found = symbolic_cutoffs(form, level=level, reference=reference, degree=degree)
        return replace(found, roll_off=roll_off(form))
    found = replace(
        _numeric(form, level=level, reference=reference), roll_off=roll_off(form, formula)
    )
    if formula is not None and _solvable(formula, degree):
        from acsolve.analyses.cutoff_formula import with_formulas

        found = with_formulas(found, formula, level=level, reference=reference, degree=degree)
    return found if band is None else _within(found, band)


def _solvable(formula: ClosedForm, degree: int) -> bool:
    """Whether the cutoffs of a form over symbols can have a closed form at all."""
    if not formula.rational or not formula.symbols:
        return False
    return all(len(part) <= degree + 1 for part in formula.coefficients())


def _not_rational(
    form: ClosedForm,
    *,
    level: CutoffLevel,
    reference: ReferenceName | Fraction | None,
    band: HertzBand | None,
) -> CutoffAnswer:
    from acsolve.analyses.band_cutoff import band_cutoffs

    if form.symbols:
        listed = ", ".join(form.symbols[:6])
        raise _refuse(
            "equations.not-rational",
            "the response is not a ratio of polynomials in s, so its cutoffs have no closed "
            f"form, and {listed} {'is a symbol' if len(form.symbols) == 1 else 'are symbols'}",
            "Give every part a number.",
        )
    found = band_cutoffs(form, level=level, reference=reference, band=band)
    return replace(found, bands=bands(found.cutoffs) if found.complete else ())


def _within(found: CutoffAnswer, band: HertzBand) -> CutoffAnswer:
    """The part of an answer that lies in a band."""
    from acsolve.analyses.band_cutoff import checked_band

    edges = checked_band(band)
    low, high = float(edges.low), float(edges.high)

    def inside(hertz: float | None) -> bool:
        return hertz is not None and low * (1 - 1e-9) <= hertz <= high * (1 + 1e-9)

    kept = tuple(item for item in found.cutoffs if inside(item.hertz))
    missing = f"The gain does not cross this level within {edges}."
    none = not kept and bool(found.cutoffs)
    return replace(
        found,
        cutoffs=kept,
        bands=tuple(item for item in found.bands if inside(item.low) and inside(item.high)),
        touches=tuple(item for item in found.touches if inside(item.hertz)),
        searched=(low, high),
        remarks=(*found.remarks, missing) if none else found.remarks,
    )


def _numeric(
    form: ClosedForm, *, level: CutoffLevel, reference: ReferenceName | Fraction | None
) -> CutoffAnswer:
    size = magnitude(form)
    with precision(_BITS):
        basis = _reference(size, reference)
        crossings = _crossings(size, basis, level)
    method = "square-free factoring and root isolation by Descartes' rule of signs"
    if basis.exact is None or level.exact is None:
        method = "root isolation by Descartes' rule of signs over enclosed coefficients"
    remarks = () if crossings.found or not crossings.complete else _why_none(size, basis, level)
    crossed = [item for item in crossings.found if item.rises is not None]
    listed = tuple(_cutoff(item.value, item.rises) for item in crossed)
    return CutoffAnswer(
        form=form,
        reference=basis.shown,
        level_db=level.db,
        cutoffs=listed,
        bands=bands(listed, size, [item.value for item in crossed]),
        touches=tuple(_touch(item.value) for item in crossings.found if item.rises is None),
        complete=crossings.complete,
        method=method if crossings.complete else method + ", undecided at 4096 bits",
        remarks=remarks,
    )


@dataclass(frozen=True, slots=True)
class _Basis:
    """A reference with its squared gain, exact or as a ball at the precision in force."""

    shown: Reference
    squared: Callable[[], Any]
    exact: Exact | None
    peaks: tuple[Fraction, ...] = ()  # x = ω² of the peak, of all where several are equal


def _crossings(size: Magnitude, basis: _Basis, level: CutoffLevel) -> Crossings:
    if basis.peaks and level.decibel == 0:
        return _touching_peaks(basis)
    if basis.exact is not None and level.exact is not None:
        top, bottom = basis.exact
        return size.crossings_at((top * level.exact.numerator, bottom * level.exact.denominator))
    return size.crossings_near(lambda: basis.squared() * level.ball())


def _reference(size: Magnitude, asked: ReferenceName | Fraction | None) -> _Basis:
    if isinstance(asked, Fraction):
        if asked == 0:
            raise no_reference("a stated gain of zero is no reference")
        constant = size.form.basis.ring.constant
        exact = constant(asked.numerator**2), constant(asked.denominator**2)
        shown = Reference(at="stated", gain=float(asked))
        return _Basis(shown, lambda: size.ball(exact), exact)
    low, high = size.at_zero(), size.at_infinity()
    name = asked or _by_shape(size, low, high)
    if name == "peak":
        return _peak(size, low, high)
    squared = low if name == "dc" else high
    word = "at 0 Hz" if name == "dc" else "at infinite frequency"
    if squared is None or squared[0] == 0:
        raise no_reference(f"the gain {word} is {'infinite' if squared is None else 'zero'}")
    gain = sqrt(_float(size.ball(squared)))
    shown = Reference(at=name, gain=gain, hertz=0.0 if name == "dc" else None)
    return _Basis(shown, lambda: size.ball(squared), squared)


def reference_of(size: Magnitude, asked: ReferenceName | Fraction | None) -> Reference:
    """The reference of a form with numbers, its gain and where that is.

    Raises
    ------
    AnalysisError
        [question.no-reference].
    """
    with precision(_BITS):
        return _reference(size, asked).shown


def _by_shape(size: Magnitude, low: Exact | None, high: Exact | None) -> ReferenceName:
    if low is None or high is None:
        raise no_reference(
            f"the gain at {'0 Hz' if low is None else 'infinite frequency'} is infinite"
        )
    if low[0] == 0 and high[0] == 0:
        return "peak"
    return "infinity" if _float(size.ball(high)) > _float(size.ball(low)) else "dc"


def _peak(size: Magnitude, low: Exact | None, high: Exact | None) -> _Basis:
    """The largest |H|², among the stationary points and both ends."""
    if low is None or high is None:
        raise no_reference("the gain is infinite at one end, so there is no peak")
    if size.axis_poles().found:
        raise no_reference("the response has a pole on the frequency axis: no peak is finite")
    stationary = size.stationary()
    if not stationary.complete:
        raise no_reference("the peak could not be located with certainty")
    values = {item.value: size.value(item.value) for item in stationary.found}
    ends = [_float(size.ball(end)) for end in (low, high)]
    best_x, best = None, max(ends)
    for x, value in values.items():
        if _float(value) > best:
            best_x, best = x, _float(value)
    if best == 0:
        raise no_reference("the gain is zero at every frequency")
    if best_x is None:
        end = low if ends[0] >= ends[1] else high
        shown = Reference(at="peak", gain=sqrt(best), hertz=0.0 if end is low else None)
        return _Basis(shown, lambda: size.ball(end), end)
    chosen = best_x
    shown = Reference(at="peak", gain=sqrt(best), hertz=_hertz(chosen))
    equal = tuple(x for x, value in values.items() if _equal(value, values[chosen]))
    return _Basis(shown, lambda: size.value(chosen), None, equal)


def _equal(first: Any, second: Any) -> bool:
    """Whether two peaks, each known to about 2**-120, are taken as equal."""
    return bool(abs(first / second - 1) < 2.0**-100)


def _touching_peaks(basis: _Basis) -> Crossings:
    """A level of 0 dB below a peak is met at the peaks themselves, and nowhere crossed.

    That several peaks are equal is seen, not proven.
    """
    from acsolve.algebra.crossing import Crossing

    touches = tuple(Crossing(x, None) for x in basis.peaks)
    return Crossings(touches, complete=len(touches) == 1)


def _why_none(size: Magnitude, basis: _Basis, level: CutoffLevel) -> tuple[str, ...]:
    ends = [size.ball(end) for end in (size.at_zero(), size.at_infinity()) if end is not None]
    wanted = _float(basis.squared() * level.ball())
    if ends and min(map(_float, ends)) > wanted:
        return ("The gain never falls to this level.",)
    return ("The gain never crosses this level.",)


def _cutoff(x: Fraction, rises: bool | None) -> Cutoff:
    omega = _root(x)
    return Cutoff(
        hertz=_hertz(x),
        rad_per_s=omega,
        closed_form=None,
        direction="rising" if rises else "falling",
    )


def _touch(x: Fraction) -> Touch:
    return Touch(hertz=_hertz(x), rad_per_s=_root(x))


def _root(x: Fraction) -> float:
    """sqrt(x), right to the last place also where x is beyond a double's range."""
    from flint import arb, fmpq

    with precision(128):
        return float(arb(fmpq(x.numerator, x.denominator)).sqrt().mid())


def _hertz(x: Fraction) -> float:
    from flint import arb, fmpq

    with precision(128):
        return float((arb(fmpq(x.numerator, x.denominator)).sqrt() / (2 * arb.pi())).mid())


def _float(value: Any) -> float:
    return float(value.mid()) if value.is_finite() else inf


def no_reference(message: str) -> AnalysisError:
    """The error for a reference that is none, `message` saying why."""
    other = "infinity" if "at 0 Hz" in message else "dc" if "infinit" in message else "dc, infinity"
    return _refuse(
        "question.no-reference",
        f"{message}: there is nothing to count the level from",
        f"Choose another reference: --reference {other}, peak, or a gain such as 0.5.",
    )


def _refuse(code: Code, message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
