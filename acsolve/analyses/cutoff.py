"""Cutoffs: every frequency where the gain crosses a level below its reference."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from math import inf, log10, sqrt
from typing import Any, Literal

from acsolve.algebra.ball import precision
from acsolve.algebra.crossing import Crossings
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.magnitude import Magnitude, ReferenceName, magnitude
from acsolve.codes import Code
from acsolve.errors import AnalysisError, Diagnostic

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

    def power_ratio(self) -> Any:
        """The ratio of squared gains, a fraction or a ball at the precision in force."""
        from flint import arb, fmpq

        if self.exact is not None:
            return self.exact
        assert self.decibel is not None
        tens = self.decibel / 10
        return arb(10) ** arb(fmpq(tens.numerator, tens.denominator))


HALF_POWER = CutoffLevel()


def cutoff_level(decibel: Fraction) -> CutoffLevel:
    """A level in decibels; -3 dB is how the trade says half power."""
    return HALF_POWER if decibel == -3 else CutoffLevel(decibel)


@dataclass(frozen=True, slots=True, kw_only=True)
class Reference:
    """What the level counts from: where, the gain there, and the frequency of a peak."""

    at: ReferenceName
    gain: float | None
    hertz: float | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class Cutoff:
    """One crossing; `closed_form` is the angular frequency as text, where there is one."""

    hertz: float | None
    rad_per_s: float | None
    closed_form: str | None
    direction: Direction | None


@dataclass(frozen=True, slots=True, kw_only=True)
class Touch:
    """A frequency where the curve meets the level without crossing it."""

    hertz: float
    rad_per_s: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class CutoffAnswer:
    """All crossings of one level, in rising order, with what is proven about them.

    `complete` is True where it is proven that none is missing. `remarks` say in words
    what a reader must know (no crossing, say, or when a closed form holds).
    """

    form: ClosedForm
    reference: Reference
    level_db: float
    cutoffs: tuple[Cutoff, ...]
    touches: tuple[Touch, ...] = ()
    complete: bool
    method: str
    remarks: tuple[str, ...] = ()


def cutoffs(
    form: ClosedForm,
    *,
    level: CutoffLevel = HALF_POWER,
    reference: ReferenceName | Fraction | None = None,
    formula: ClosedForm | None = None,
) -> CutoffAnswer:
    """Every frequency where |H| crosses a level below its reference.

    Parameters
    ----------
    form : the closed form asked about.
    level : relative to the reference; half power by default.
    reference : `dc`, `infinity`, `peak` or a stated gain; by default chosen by the shape:
        dc where H(0) is finite and not zero and H tends to 0, infinity in the mirror case,
        the peak where both ends are zero, the larger end where neither is.
    formula : the same question with its parts as symbols, to give numeric cutoffs their
        closed form.

    Raises
    ------
    AnalysisError
        [equations.not-rational] a part is not rational in s; [question.no-reference] the
        reference asked for is zero or infinite.

    Notes
    -----
    With numbers: the positive roots in x = ω² of |N|² - level·|D|², square-free factored
    and isolated by Descartes' rule of signs (see `acsolve.algebra.real_roots`). With
    symbols: the quadratic formula where that equation is of first or second degree in x.
    """
    if not form.rational:
        raise _refuse(
            "equations.not-rational",
            "the response is not a ratio of polynomials in s, so its cutoffs cannot be counted",
            "Use `acsolve sweep` and read the crossing, or replace the line or "
            "constant-phase part by a lumped model.",
        )
    if form.symbols:
        from acsolve.analyses.cutoff_formula import symbolic_cutoffs

        return symbolic_cutoffs(form, level=level, reference=reference)
    found = _numeric(form, level=level, reference=reference)
    if formula is not None and formula.symbols:
        from acsolve.analyses.cutoff_formula import with_formulas

        return with_formulas(found, formula, level=level, reference=reference)
    return found


def _numeric(
    form: ClosedForm, *, level: CutoffLevel, reference: ReferenceName | Fraction | None
) -> CutoffAnswer:
    size = magnitude(form)
    with precision(_BITS):
        basis = _reference(size, reference)
        exact = size.exact and level.exact is not None and basis.exact
        crossings = size.crossings(
            lambda: _scaled(basis.squared(), level.power_ratio()), level_exact=exact
        )
        crossings = _with_touching_peak(crossings, basis, level)
    method = "square-free factoring and exact root isolation by Descartes' rule of signs"
    if not exact:
        method = "root isolation by Descartes' rule of signs over enclosed coefficients"
    remarks = () if crossings.found or not crossings.complete else _why_none(size, basis, level)
    return CutoffAnswer(
        form=form,
        reference=basis.shown,
        level_db=level.db,
        cutoffs=tuple(
            _cutoff(item.value, item.rises) for item in crossings.found if item.rises is not None
        ),
        touches=tuple(_touch(item.value) for item in crossings.found if item.rises is None),
        complete=crossings.complete,
        method=method if crossings.complete else method + ", undecided at 4096 bits",
        remarks=remarks,
    )


@dataclass(frozen=True, slots=True)
class _Basis:
    """A reference with its squared gain, which is computed at the precision in force."""

    shown: Reference
    squared: Callable[[], Any]
    exact: bool
    peak_x: Fraction | None = None


def _reference(size: Magnitude, asked: ReferenceName | Fraction | None) -> _Basis:
    if isinstance(asked, Fraction):
        if asked == 0:
            raise _no_reference("a stated gain of zero is no reference")
        shown = Reference(at="stated", gain=float(asked))
        return _Basis(shown, lambda: asked * asked, exact=True)
    low, high = size.at_zero(), size.at_infinity()
    name = asked or _by_shape(low, high)
    if name == "peak":
        return _peak(size, low, high)
    squared = low if name == "dc" else high
    word = "at 0 Hz" if name == "dc" else "at infinite frequency"
    if squared is None or squared == 0:
        raise _no_reference(f"the gain {word} is {'infinite' if squared is None else 'zero'}")

    def again() -> Any:
        return size.at_zero() if name == "dc" else size.at_infinity()

    shown = Reference(at=name, gain=sqrt(_float(squared)), hertz=0.0 if name == "dc" else None)
    return _Basis(shown, again, exact=size.exact)


def _by_shape(low: Any, high: Any) -> ReferenceName:
    if low is None or high is None:
        raise _no_reference(
            f"the gain at {'0 Hz' if low is None else 'infinite frequency'} is infinite"
        )
    if low == 0 and high == 0:
        return "peak"
    return "infinity" if _float(high) > _float(low) else "dc"


def _peak(size: Magnitude, low: Any, high: Any) -> _Basis:
    """The largest |H|², among the stationary points and both ends."""
    if low is None or high is None:
        raise _no_reference("the gain is infinite at one end, so there is no peak")
    places = [item.value for item in size.stationary().found]
    best_x, best = None, max(_float(low), _float(high))
    for x in places:
        value = _float(size.value(x))
        if not value < inf:
            raise _no_reference("the response has a pole on the frequency axis: no peak is finite")
        if value > best:
            best_x, best = x, value
    if best_x is None:
        shown = Reference(at="peak", gain=sqrt(best), hertz=0.0 if _float(low) >= best else None)
        return _Basis(shown, lambda: low if _float(low) >= best else high, exact=size.exact)
    chosen = best_x
    shown = Reference(at="peak", gain=sqrt(best), hertz=_hertz(chosen))
    return _Basis(shown, lambda: size.value(chosen), exact=False, peak_x=chosen)


def _with_touching_peak(crossings: Crossings, basis: _Basis, level: CutoffLevel) -> Crossings:
    """A level of 0 dB below a peak is met at the peak itself, and nowhere crossed."""
    if basis.peak_x is None or level.decibel != 0:
        return crossings
    from acsolve.algebra.crossing import Crossing

    return Crossings((Crossing(basis.peak_x, None),), complete=True)


def _why_none(size: Magnitude, basis: _Basis, level: CutoffLevel) -> tuple[str, ...]:
    ends = [_float(value) for value in (size.at_zero(), size.at_infinity()) if value is not None]
    wanted = _float(basis.squared()) * float(_float(level.power_ratio()))
    if ends and min(ends) > wanted:
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


def _scaled(squared: Any, ratio: Any) -> Any:
    from flint import arb, fmpq

    if isinstance(squared, Fraction) and isinstance(ratio, Fraction):
        return squared * ratio
    first, second = (
        arb(fmpq(item.numerator, item.denominator)) if isinstance(item, Fraction) else item
        for item in (squared, ratio)
    )
    return first * second


def _float(value: Any) -> float:
    if isinstance(value, Fraction):
        return value.numerator / value.denominator
    return float(value.mid()) if value.is_finite() else inf


def _no_reference(message: str) -> AnalysisError:
    return _refuse(
        "question.no-reference",
        f"{message}: there is nothing to count the level from",
        "Choose another reference: --reference dc, infinity, peak, or a gain such as 0.5.",
    )


def _refuse(code: Code, message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
