"""Corners of a response and the slopes of its gain between them, as numbers and in closed form."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace
from math import isfinite, pi, sqrt

from acsolve.algebra.factors import factors
from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm, evaluate_polynomial, generator_numbers
from acsolve.analyses.hidden import of_polynomial
from acsolve.analyses.pole_record import quadratic_roots
from acsolve.analyses.poles import poles_zeros
from acsolve.analyses.shape import natural_frequency, sign_of
from acsolve.equations.evaluate import FloatArithmetic
from acsolve.equations.grouping import Writer
from acsolve.errors import AcsolveError

_SAME = 1e-12  # relative: poles of one circle whose doubles differ in the last place
_AGREES = 1e-9
_MOST_TERMS = 400  # of a polynomial that is factored over its symbols
_LONGEST = 4_000  # characters of a closed form


@dataclass(frozen=True, slots=True, kw_only=True)
class Corner:
    """Where two asymptotes of the gain meet: at the magnitude of poles or zeros.

    change_db : by how much the slope is larger above it, in dB a decade.
    closed_form : the angular frequency as text SymPy reads, where there is one;
        `condition` says when that holds, None where it always does.
    """

    rad_per_s: float | None
    change_db: int
    closed_form: str | None = None
    condition: str | None = None

    @property
    def hertz(self) -> float | None:
        """The frequency."""
        return None if self.rad_per_s is None else self.rad_per_s / (2 * pi)


@dataclass(frozen=True, slots=True, kw_only=True)
class RollOff:
    """The asymptotes of a gain.

    corners : in rising order; over symbols those that have a closed form, poles first.
    slopes_db : dB a decade below the first corner, between corners, above the last; None over
        symbols, where values decide on the order.
    ends_db : the slopes towards 0 Hz and towards infinite frequency.
    """

    corners: tuple[Corner, ...]
    slopes_db: tuple[int, ...] | None
    ends_db: tuple[int, int]


def roll_off(form: ClosedForm, formula: ClosedForm | None = None) -> RollOff | None:
    """Corners and slopes of a rational response; None where they are not known.

    Parameters
    ----------
    formula : the same response over symbols, to write the corners of factors of first and
        second degree in closed form.

    Notes
    -----
    H. W. Bode, Network Analysis and Feedback Amplifier Design, 1945: far below a zero r the
    factor s - r has the constant gain |r|, far above it rises by 20 dB a decade. Zeros and
    poles of one magnitude, as all-pass sections have them, cancel here.
    """
    if not form.rational or form.numerator == 0:
        return None
    ends = _ends(form)
    if form.symbols:
        written = tuple(_written(form, valued=False))
        return RollOff(corners=written, slopes_db=None, ends_db=ends)
    roots = poles_zeros(form)
    if roots is None:
        return None
    steps = [(abs(root), 20) for root in roots.zeros if root]
    steps += [(abs(root), -20) for root in roots.poles if root]
    corners = _merged(steps)
    slopes = [ends[0]]
    for corner in corners:
        slopes.append(slopes[-1] + corner.change_db)
    if formula is not None and formula.rational:
        corners = _named(
            corners, [item for item in _written(formula, valued=True) if item.rad_per_s]
        )
    return RollOff(corners=tuple(corners), slopes_db=tuple(slopes), ends_db=ends)


def _ends(form: ClosedForm) -> tuple[int, int]:
    top, bottom = form.coefficients()
    lowest = [next(k for k, value in enumerate(part) if value != 0) for part in (top, bottom)]
    return 20 * (lowest[0] - lowest[1]), 20 * (len(top) - len(bottom))


def _merged(steps: Sequence[tuple[float, int]]) -> list[Corner]:
    """Corners in rising order, those of one magnitude together, without those that cancel."""
    found: list[Corner] = []
    for place, change in sorted(steps):
        before = found[-1] if found else None
        if before is not None and place <= (before.rad_per_s or 0) * (1 + _SAME):
            found[-1] = Corner(rad_per_s=before.rad_per_s, change_db=before.change_db + change)
        else:
            found.append(Corner(rad_per_s=place, change_db=change))
    return [item for item in found if item.change_db]


def _named(corners: Sequence[Corner], written: Sequence[Corner]) -> list[Corner]:
    """Numbers with the closed form that agrees with them."""
    found = []
    for corner in corners:
        place = corner.rad_per_s or 0.0
        text = next(
            (
                item.closed_form
                for item in written
                if abs((item.rad_per_s or 0.0) - place) <= _AGREES * place
            ),
            None,
        )
        found.append(replace(corner, closed_form=text))
    return found


# ------------------------------------------------------------ closed forms


def _written(form: ClosedForm, *, valued: bool) -> Iterator[Corner]:
    """The corners of factors of first and second degree, with numbers where they are wanted."""
    for part, sign in ((form.denominator, -20), (form.numerator, 20)):
        whole = of_polynomial(form, part)
        if len(part) > _MOST_TERMS or not whole.rational:
            continue
        for factor, multiplicity in factors(part)[1]:
            coefficients = whole.by_power(factor)
            if len(coefficients) in (2, 3) and coefficients[0] != 0:
                numbers = _numbers(whole, factor, coefficients) if valued else None
                if valued and numbers is None:
                    continue
                for item in _of_factor(whole, coefficients, numbers):
                    if len(item.closed_form or "") <= _LONGEST:
                        yield replace(item, change_db=item.change_db * sign * int(multiplicity))


def _numbers(
    form: ClosedForm, factor: Polynomial, coefficients: Sequence[Polynomial]
) -> list[float] | None:
    """The coefficients of a factor as numbers; None where one is none, or an end vanishes."""
    arithmetic = FloatArithmetic()
    whole = of_polynomial(form, factor)
    try:
        points = generator_numbers(whole, whole.evaluator(arithmetic), arithmetic)
        found = [float(evaluate_polynomial(item, points, arithmetic)) for item in coefficients]
    except (AcsolveError, ArithmeticError, TypeError):
        return None
    return found if found[0] and found[-1] and all(map(isfinite, found)) else None


def _of_factor(
    form: ClosedForm, coefficients: list[Polynomial], numbers: list[float] | None
) -> list[Corner]:
    """One corner, or two where a factor of second degree has real roots; changes in roots.

    Coefficients are taken as positive, as those of passive networks are but for a common sign
    and for zeros on the right. Where that is not certain a condition says so; numbers that are
    not so have no closed form.
    """
    write = Writer(form.basis, form.spelled(safe=True))
    signs = [-1 if sign_of(item) < 0 else 1 for item in coefficients]
    plain = [item * sign for item, sign in zip(coefficients, signs, strict=True)]
    sizes = (
        None
        if numbers is None
        else [item * sign for item, sign in zip(numbers, signs, strict=True)]
    )
    if len(plain) == 2:
        return _single(write, plain, sizes)
    if signs[0] != signs[2] or (sizes and (min(sizes[0], sizes[2]) < 0 or sizes[1] < 0)):
        return []  # real roots on either side of 0, or parts below zero
    if any(sign_of(plain[place]) == 0 for place in (0, 2)):
        return []
    return _double(form, write, plain, sizes)


def _single(write: Writer, plain: list[Polynomial], sizes: list[float] | None) -> list[Corner]:
    text = str(write.ratio(*plain))
    place = None if sizes is None else sizes[0] / sizes[1]
    if place is not None and place < 0:
        return []
    certain = place is not None or all(sign_of(item) > 0 for item in plain)
    condition = None if certain else f"{text} > 0"
    return [Corner(rad_per_s=place, change_db=1, closed_form=text, condition=condition)]


def _double(
    form: ClosedForm, write: Writer, plain: list[Polynomial], sizes: list[float] | None
) -> list[Corner]:
    """A pair, or two real roots, or both with the conditions that tell which."""
    c0, c1, c2 = plain
    inside = c1 * c1 - 4 * c0 * c2
    sign = sizes[1] ** 2 - 4 * sizes[0] * sizes[2] if sizes else sign_of(inside)
    real = _apart(form, write, plain, sizes) if sign_of(c1) > 0 else []
    if sign > 0:
        return real
    place = None if sizes is None else sqrt(sizes[0] / sizes[2])
    text = str(natural_frequency(write, plain))
    pair = Corner(rad_per_s=place, change_db=2, closed_form=text)
    if sign != 0 or sizes or inside == 0:
        return [pair]
    condition = write.grouped(_undecided(inside))
    return [
        replace(pair, condition=f"{condition} <= 0"),
        *(replace(item, condition=f"{condition} > 0") for item in real),
    ]


def _undecided(polynomial: Polynomial) -> Polynomial:
    """What decides on the sign: without squares, and without factors that are positive."""
    number, split = factors(polynomial)
    found = polynomial.context().constant(1 if number > 0 else -1)
    for factor, exponent in split:
        if exponent % 2 and sign_of(factor) == 0:
            found = found * factor
        elif exponent % 2 and sign_of(factor) < 0:
            found = -found
    return found


def _apart(
    form: ClosedForm, write: Writer, plain: list[Polynomial], sizes: list[float] | None
) -> list[Corner]:
    """The magnitudes of two real roots."""
    c0, c1, c2 = plain
    texts = quadratic_roots(write, [c0, -c1, c2], form.spelled(safe=True))
    places: list[float | None] = [None, None]
    if sizes is not None and (inside := sizes[1] ** 2 - 4 * sizes[0] * sizes[2]) >= 0:
        larger = (sizes[1] + sqrt(inside)) / (2 * sizes[2])
        places = [sizes[0] / sizes[2] / larger, larger]
    return [
        Corner(rad_per_s=place, change_db=1, closed_form=text)
        for place, text in zip(places, texts, strict=True)
    ]
