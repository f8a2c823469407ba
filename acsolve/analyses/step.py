"""Responses in time: to a step, an impulse or a sine that starts at 0, from exact residues."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from acsolve.algebra.ball import precision, relative_difference
from acsolve.algebra.expsum import ExponentialSum, nearest
from acsolve.algebra.residue import InseparableError, Pole, expanded_at, poles, value_at
from acsolve.algebra.roots import LARGEST_CERTIFIED
from acsolve.algebra.taylor import point
from acsolve.analyses.closed_form import Checked, ClosedForm
from acsolve.analyses.drive import STEP, Drive
from acsolve.analyses.moments import Moments, moments
from acsolve.analyses.partial_fractions import ratio_of
from acsolve.analyses.settle import Figures, figures, none_of_them
from acsolve.analyses.shape import Limit, limits
from acsolve.analyses.span import natural_span
from acsolve.analyses.steady import SteadySine
from acsolve.analyses.time_check import disagreement
from acsolve.analyses.time_formula import TimeFormulas, time_formulas
from acsolve.codes import Code
from acsolve.errors import Diagnostic, EquationError
from acsolve.shown import Shown

POINTS = 501
BAND = Fraction(1, 50)
_BITS = 256
_AGREES = 1e-20
_CHECKED_BITS = (256, 512, 1024, 2048)  # more where evaluating the polynomials loses digits


@dataclass(frozen=True, slots=True, kw_only=True)
class Mode:
    """w_0 + w_1·t + w_2·t²/2 + …, times exp(rate·t); a complex one with its conjugate besides.

    rate : in 1/s, on the real axis or in the upper half plane.
    """

    rate: complex
    weights: tuple[complex, ...]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False, repr=False)
class StepAnswer(Shown):
    """A response in time with its figures; arrays are read-only.

    seconds, value : times and the response there (just after 0 at 0), in SI units; None where
        symbols are left. The value is right to about 1e-12 of itself.
    impulses : what stands at t = 0 itself: the area of an impulse, then of its derivatives.
    initial_value, final_value : just after 0 and for ever after, from the limit theorems; None
        where there is no such limit, `final_reason` says why. `limits` are both as exact
        expressions, for a step.
    figures : rise, delay, settling and overshoot, of a step to a final value.
    modes : the response as a sum of exponentials; all of them for t > 0.
    moments : of the impulse response, None where it has none.
    written : the form that formulas are written with: over symbols where that is short.
    formulas : the response in closed form, of first and second order.
    stable : whether every pole of the response decays; None where that is not known.
    steady : of a sine, what it settles to where every mode decays.
    checked : partial fractions against the closed form at complex frequencies.
    """

    form: ClosedForm
    drive: Drive
    band: Fraction
    seconds: NDArray[np.float64] | None
    value: NDArray[np.float64] | None
    impulses: tuple[float, ...]
    initial_value: float | None
    final_value: float | None
    final_reason: str | None
    limits: tuple[Limit, Limit]
    figures: Figures
    modes: tuple[Mode, ...]
    moments: Moments | None
    written: ClosedForm
    formulas: TimeFormulas | None
    stable: bool | None
    checked: Checked | None
    remarks: tuple[str, ...] = ()
    steady: SteadySine | None = None
    curve: ExponentialSum | None = None

    def __repr__(self) -> str:
        """What it is of and its figures; curve and modes are left out."""
        shown = {"final_value": self.final_value, "settling_s": self.settling_s}
        shown |= {"rise_s": self.rise_s, "delay_s": self.delay_s, "overshoot": self.overshoot}
        told = [f"{name}={value:.6g}" for name, value in shown.items() if value is not None]
        points = 0 if self.seconds is None else len(self.seconds)
        return f"StepAnswer({', '.join([self.drive.kind, *told, f'points={points}'])})"

    @property
    def rise_s(self) -> float | None:
        """From the first 10 % to the first 90 % of the final value."""
        return self.figures.rise_s

    @property
    def delay_s(self) -> float | None:
        """To the first 50 % of the final value."""
        return self.figures.delay_s

    @property
    def settling_s(self) -> float | None:
        """When it enters `band` around the final value for good."""
        return self.figures.settling_s

    @property
    def overshoot(self) -> float | None:
        """The largest excess over the final value, as a share of it."""
        return self.figures.overshoot

    @property
    def peak_s(self) -> float | None:
        """When the overshoot is reached, None without one."""
        return self.figures.peak_s

    def at(self, seconds: ArrayLike) -> NDArray[np.float64]:
        """The response at times in seconds, any shape; zero before 0.

        Raises
        ------
        EquationError
            [question.no-value] symbols are left.
        """
        if self.curve is None:
            raise _needs_numbers(self.form)
        return values_at(self.curve, self.drive, seconds)


def values_at(curve: ExponentialSum, drive: Drive, seconds: ArrayLike) -> NDArray[np.float64]:
    """The response at times: after a burst what its second half cancels is added."""
    times = np.asarray(seconds, dtype=float)
    later = times >= 0
    found = np.zeros(times.shape)
    found[later] = curve.values(times[later])
    length = drive.seconds
    if length is not None and drive.cycles is not None:
        turned = -1 if drive.cycles.denominator == 1 else 1  # half a cycle more: upside down
        after = times > float(length)
        found[after] += turned * curve.values(times[after] - float(length))
    return found


def step_answer(
    form: ClosedForm,
    *,
    duration: Fraction | None = None,
    points: int = POINTS,
    drive: Drive = STEP,
    band: Fraction = BAND,
    formula: ClosedForm | None = None,
) -> StepAnswer:
    """The response in time that a closed form stands for, all of it at rest before t = 0.

    Parameters
    ----------
    duration : of the curve, in seconds; by default as long as something happens.
    points : of the curve, at even steps from 0 on.
    drive : what acts.
    band : half the settling band, as a share of the final value.
    formula : the same question over symbols, to write closed forms with.

    Raises
    ------
    EquationError
        [equations.not-rational] a line, say: there are no residues; [equations.budget] more
        than 160 poles; [equations.check-failed] a check disagrees: a defect of ours.

    Notes
    -----
    Partial fractions in balls with the multiplicities of a square-free factorisation, in
    doubles where an estimate of the cancellation allows it.
    """
    _refuse_unfit(form)
    written = formula if formula is not None and formula.rational else form
    found = time_formulas(written, band=band) or time_formulas(form, band=band)
    shared = {
        "form": form,
        "drive": drive,
        "band": band,
        "limits": limits(form) if drive.kind == "step" else (None, None),
        "moments": moments(form),
        "written": written,
        "formulas": found if found is None else found.holding(form),
    }
    if form.symbols:
        return StepAnswer(**shared, **_without_numbers(form))  # type: ignore[arg-type]
    try:
        return StepAnswer(**shared, **_numeric(form, drive, duration, points, band))  # type: ignore[arg-type]
    except InseparableError as error:
        raise _refuse(
            "equations.budget",
            f"the partial fractions are not told apart: {error}",
            "Change a value a little, or state it as a plain number.",
        ) from error


def _numeric(
    form: ClosedForm, drive: Drive, duration: Fraction | None, points: int, band: Fraction
) -> dict[str, Any]:
    ratio = ratio_of(form)
    curve = ExponentialSum(drive.acting_on(ratio))
    checked = _checked(curve)
    with precision(_BITS):
        own = poles(ratio)
        final, reason = _final(curve, own, drive)
        stable = all(pole.side < 0 for pole in own)
        impulses = tuple(nearest(item) for item in curve.expansion().direct)
        initial = nearest(curve.start())
        found = _figures(curve, drive, final, reason, band)
        span = duration or natural_span(curve, drive.seconds, found.settling_s)
    seconds = float(span) * (np.arange(points) / (points - 1))
    value = values_at(curve, drive, seconds)
    for array in (seconds, value):
        array.flags.writeable = False
    return {
        "seconds": seconds,
        "value": value,
        "impulses": impulses,
        "initial_value": initial,
        "final_value": final,
        "final_reason": reason,
        "figures": found,
        "modes": _modes(curve),
        "stable": stable,
        "checked": checked,
        "remarks": _remarks(stable, impulses, initial, counted=found.rise_s is not None),
        "curve": curve,
    }


def _without_numbers(form: ClosedForm) -> dict[str, Any]:
    listed = ", ".join(form.symbols[:6]) + (", …" if len(form.symbols) > 6 else "")
    verb = "is a symbol" if len(form.symbols) == 1 else "are symbols"
    reason = f"{listed} {verb}"
    return {
        "seconds": None,
        "value": None,
        "impulses": (),
        "initial_value": None,
        "final_value": None,
        "final_reason": reason,
        "figures": none_of_them(reason),
        "modes": (),
        "stable": None,
        "checked": form.checked,
        "remarks": (),
    }


def _figures(
    curve: ExponentialSum, drive: Drive, final: float | None, reason: str | None, band: Fraction
) -> Figures:
    """Rise, delay, overshoot and settling, or why there are none."""
    if drive.kind != "step":
        return none_of_them("they are told of a step")
    if final is None:
        return none_of_them(reason or "there is no final value")
    if not abs(curve.constant()) > 0:
        return none_of_them("the final value is zero, so there is nothing to count from")
    return figures(curve, band=band)


def _final(
    curve: ExponentialSum, own: Sequence[Pole], drive: Drive
) -> tuple[float | None, str | None]:
    """The final value, or why there is none; `own` are the poles of the response itself."""
    if any(pole.side > 0 for pole in own):
        return None, "the response grows without bound: a pole lies in the right half plane"
    if drive.kind == "sine":
        if drive.cycles is None:
            return None, "a sine that goes on has no final value"
        if any(pole.side == 0 for pole in own):
            return None, "a pole on the frequency axis keeps what the sine has left in it"
        return 0.0, None
    every = [term.pole for term in curve.expansion().terms]
    axis = [pole for pole in every if pole.side == 0]
    if any(pole.real and pole.multiplicity > 1 for pole in axis):
        return None, "the response grows without bound: it integrates what drives it"
    if any(pole.multiplicity > 1 for pole in axis):
        return None, "the response grows without bound: a lossless resonance is driven"
    if any(not pole.real for pole in axis):
        return None, "the response goes on oscillating: a pole lies on the frequency axis"
    return nearest(curve.constant()), None


def _modes(curve: ExponentialSum) -> tuple[Mode, ...]:
    found = [
        Mode(
            rate=complex(term.pole.place.mid()),
            weights=tuple(complex(weight.mid()) for weight in term.weights),
        )
        for term in curve.expansion().terms
    ]
    return tuple(sorted(found, key=lambda mode: (-mode.rate.real, mode.rate.imag)))


def _remarks(
    stable: bool, impulses: Sequence[float], initial: float, *, counted: bool
) -> tuple[str, ...]:
    """What a reader must know; `counted` says whether there are levels to reach."""
    found = []
    if not stable:
        found.append("Not every mode decays; the answer holds for every t above 0 none the less.")
    if impulses:
        words = "an impulse" if len(impulses) == 1 else "an impulse and its derivatives"
        found.append(f"At t = 0 itself there is {words}; the curve is what follows.")
    elif counted and initial:
        found.append("It jumps at t = 0; a level that it jumps over counts as reached then.")
    return tuple(found)


def _checked(curve: ExponentialSum) -> Checked:
    """The partial fractions against the ratio, and their sum against the initial value.

    Raises
    ------
    EquationError
        [equations.check-failed] they disagree, at every precision.
    """
    for bits in _CHECKED_BITS:
        with precision(bits):
            worst, count = _largest_difference(curve)
        if worst < _AGREES:
            return Checked(points=count, max_relative_error=worst)
    raise disagreement("sum of exponentials", worst)


def _largest_difference(curve: ExponentialSum) -> tuple[float, int]:
    """The largest relative difference, at how many points."""
    from flint import acb

    expansion, ratio = curve.expansion(), curve.ratio
    sizes = [abs(term.pole.place).mid() for term in expansion.terms if term.pole.place != 0]
    scale = max(sizes, key=float, default=acb(1).real)
    errors = []
    for real, imag in ((Fraction(7, 5), Fraction(3, 7)), (Fraction(2, 9), Fraction(-11, 6))):
        s = acb(point(real) * scale, point(imag) * scale)
        errors.append(relative_difference(expanded_at(expansion, s), value_at(ratio, s)))
    start = curve(acb(0).real, 0)[0]
    gap = abs(start - curve.start())
    size = curve.size(acb(0).real)
    errors.append(float((gap / size).abs_upper()) if size > 0 else 0.0)
    return max(errors), len(errors)


def _refuse_unfit(form: ClosedForm) -> None:
    if not form.rational:
        raise _refuse(
            "equations.not-rational",
            "the response is not a ratio of polynomials in s, so it has no residues and no "
            "sum of exponentials in time",
            "Put a chain of R, L and C sections in place of the line or constant-phase part.",
        )
    if form.symbols:
        return
    top, bottom = form.coefficients()
    order = max(len(top), len(bottom)) - 1
    if order > LARGEST_CERTIFIED:
        raise _refuse(
            "equations.budget",
            f"the response has {order} poles, and residues are worked out for "
            f"{LARGEST_CERTIFIED} at most",
            "Ask a shorter chain, or replace part of the network by a simpler one.",
        )


def _needs_numbers(form: ClosedForm) -> EquationError:
    from acsolve.equations.evaluate import no_value

    return no_value(form.symbols)


def _refuse(code: Code, message: str, hint: str) -> EquationError:
    return EquationError(Diagnostic(code=code, message=message, hint=hint))
