"""The equation that a part's value solves where a cutoff is wanted at one frequency."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction
from typing import Any

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import HALF_POWER, CutoffLevel, no_reference
from acsolve.analyses.level_ring import with_level
from acsolve.analyses.magnitude import Magnitude, ReferenceName, magnitude
from acsolve.circuit.expression import Name
from acsolve.equations.exact import Basis


@dataclass(frozen=True, slots=True, kw_only=True)
class WantedCutoff:
    """Where a cutoff is wanted: `hertz` above zero, `level` and `reference` as for `cutoffs`.

    The reference follows the value where it depends on it. Closed forms are written up to
    `degree` in the value, or in its square.
    """

    hertz: Fraction
    level: CutoffLevel = HALF_POWER
    reference: ReferenceName | Fraction | None = None
    degree: int = 2


@dataclass(frozen=True, slots=True, kw_only=True)
class PartValue:
    """One value, in SI units, that answers.

    `closed_form` gives it over the other parts and the wanted angular frequency, for SymPy;
    `condition` says when that is real and positive, None where it always is. `value` is None
    over symbols. `gain_error` is how far the gain that the numeric engine finds with this
    value is from the wanted one, relative.
    """

    value: float | None
    closed_form: str | None
    condition: str | None = None
    gain_error: float | None = None


def place_of(basis: Basis, name: str) -> int | None:
    """The place of a name among the generators."""
    places = (at for at, item in enumerate(basis.generators) if item.leaf == Name(name))
    return next(places, None)


def condition_for(
    form: ClosedForm, name: str, level: CutoffLevel, reference: ReferenceName | Fraction | None
) -> tuple[ReferenceName, tuple[ClosedForm, Polynomial] | None]:
    """The reference, and level·reference²·|D|² - |N|² over the form's basis, s being x = ω².

    None where the reference is a peak whose gain has no closed form (see `value_peak`).
    """
    form, above, below = with_level(form, level)
    size = magnitude(form)
    at, pair = _reference(size, name, reference)
    if pair is None:
        return at, None
    difference = size.bottom * pair[0] * above - size.top * pair[1] * below
    return at, (form, form.basis.ring.reduced(difference))


def _reference(
    size: Magnitude, name: str, asked: ReferenceName | Fraction | None
) -> tuple[ReferenceName, tuple[Polynomial, Polynomial] | None]:
    constant = size.form.basis.ring.constant
    if isinstance(asked, Fraction):
        if asked == 0:
            raise no_reference("a stated gain of zero is no reference")
        return "stated", (constant(asked.numerator**2), constant(asked.denominator**2))
    low, high = size.at_zero(), size.at_infinity()
    chosen = asked or _by_shape(name, low, high)
    if chosen == "peak":
        return "peak", band_pass_peak(size.form)
    end = low if chosen == "dc" else high
    if end is None or end[0] == 0:
        where = "0 Hz" if chosen == "dc" else "infinite frequency"
        raise no_reference(f"the gain at {where} is {'infinite' if end is None else 'zero'}")
    return chosen, end


def _by_shape(name: str, low: Any, high: Any) -> ReferenceName:
    if low is None or high is None:
        raise no_reference(f"the gain at {'0 Hz' if low is None else 'high frequency'} is infinite")
    if low[0] == 0 and high[0] == 0:
        return "peak"
    if low[0] == 0 or high[0] == 0:
        return "infinity" if low[0] == 0 else "dc"
    if low[0] * high[1] == high[0] * low[1]:
        return "dc"
    raise no_reference(f"the larger of the gains at both ends depends on {name}")


def band_pass_peak(form: ClosedForm) -> tuple[Polynomial, Polynomial] | None:
    """The squared gain at the peak of a second-order band-pass, where c0 = c2·ω²."""
    top, bottom = form.coefficients()
    if len(bottom) != 3 or len(top) != 2 or top[0] != 0 or bottom[0] == 0 or bottom[1] == 0:
        return None
    return top[1] ** 2, bottom[1] ** 2
