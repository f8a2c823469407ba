"""A closed form in the shapes that people read, each of them exact.

A reading is a list of labelled texts. Frequencies are written with `w` for the angular
frequency ω in rad/s, which is taken to be positive.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Sequence
from dataclasses import dataclass
from fractions import Fraction
from typing import Literal, get_args

from acsolve.algebra.factors import factors
from acsolve.algebra.ring import Polynomial
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.shape import StandardForm, sign_of, standard_form
from acsolve.equations.grouping import LARGEST_GROUPED, Pieces, Writer
from acsolve.equations.naming import is_safe
from acsolve.equations.phrase import (
    ONE,
    ZERO,
    Phrase,
    call,
    fraction,
    power,
    product,
    root,
    total,
)

FormName = Literal["collected", "unit", "factored", "standard", "real", "delay", "asymptotes"]
FORM_NAMES: tuple[FormName, ...] = get_args(FormName)


@dataclass(frozen=True, slots=True)
class Line:
    """One labelled text of a reading: `label` = `text`."""

    label: str
    text: str


def reading(form: ClosedForm, name: FormName, *, safe: bool = False) -> tuple[Line, ...]:
    """A closed form in one of the shapes of `FORM_NAMES`; empty where it has none.

    collected : powers of s collected, integer coefficients.
    unit : gain times a ratio whose lowest terms are 1, parallel groups and sums named.
    factored : irreducible factors whose lowest terms are 1, first-order ones as time constants.
    standard : K, w0, Q or tau of a first- or second-order response.
    real : gain and phase as real functions of the angular frequency.
    delay : phase delay and group delay as real functions of the angular frequency.
    asymptotes : what it tends to far below and far above all corners.

    `safe` spells everything for SymPy's parser, else for people. A name of ours that a
    symbol of the circuit already bears gets `_H` behind it.
    """
    if name == "collected":
        return (Line("H", form.text(safe=safe)),)
    if not form.rational or form.numerator == 0:
        return ()
    return _READINGS[name](_Page(form, safe))


class _Page:
    """A closed form, how it is written, and the names that are free for us."""

    def __init__(self, form: ClosedForm, safe: bool) -> None:
        self.form, self.safe = form, safe
        spelling = form.spelled(safe=safe)
        self.write = Writer(form.basis, spelling)
        self.sign = spelling.power
        self._taken = {spelling.name(name) for name in form.symbols}

    def name(self, text: str) -> Phrase:
        """A name of ours, changed where the circuit or SymPy uses it for something else."""
        free = text not in self._taken and (is_safe(text) or not self.safe or text == "H")
        return Phrase(text if free else f"{text}_H")

    def power(self, variable: Phrase, exponent: int) -> Phrase:
        """A whole power, 1 for none."""
        return power(variable, exponent, self.sign) if exponent else ONE

    def series(self, coefficients: Sequence[Polynomial], variable: Phrase) -> Phrase:
        """1 + a1·s + a2·s² + … relative to the coefficient of the lowest power."""
        low = lowest(coefficients)
        return total(
            self.write.ratio(value, coefficients[low], self.power(variable, place - low))
            for place, value in enumerate(coefficients)
            if value != 0
        )

    def unit(
        self, top: Sequence[Polynomial], bottom: Sequence[Polynomial], variable: Phrase
    ) -> Phrase:
        """K·x^m·(1 + …)/(1 + …) with each coefficient a ratio in lowest terms."""
        first, second = lowest(top), lowest(bottom)
        gain = self.write.pieces(top[first], bottom[second])
        shift = first - second
        above = [self.power(variable, max(shift, 0)), self.series(top, variable)]
        below = [self.power(variable, max(-shift, 0)), self.series(bottom, variable)]
        return product([*gain.top, *above], [*gain.bottom, *below])


def lowest(coefficients: Sequence[Polynomial]) -> int:
    """The lowest power that occurs."""
    return next(power for power, value in enumerate(coefficients) if value != 0)


_S = Phrase("s")


def _unit(page: _Page) -> tuple[Line, ...]:
    return (Line("H", str(page.unit(*page.form.coefficients(), _S))),)


class _TimeConstants:
    """Names tau1, tau2, … for the time constants of one formula, equal ones once."""

    def __init__(self, page: _Page) -> None:
        self._page = page
        self._names: dict[str, Phrase] = {}

    def __call__(self, constant: Phrase) -> Phrase:
        text = str(constant)
        if text not in self._names:
            self._names[text] = self._page.name(f"tau{len(self._names) + 1}")
        return self._names[text]

    def lines(self) -> list[Line]:
        return [Line(str(name), text) for text, name in self._names.items()]


def _factored(page: _Page) -> tuple[Line, ...]:
    """gain·s^m·product/product; a first-order factor is 1 + tau·s or 1 - tau·s."""
    constants = _TimeConstants(page)
    top, above, rise = _factors(page, page.form.numerator, constants)
    bottom, below, fall = _factors(page, page.form.denominator, constants)
    gain = page.write.pieces(top, bottom)
    shift = rise - fall
    text = product(
        [*gain.top, page.power(_S, max(shift, 0)), *above],
        [*gain.bottom, page.power(_S, max(-shift, 0)), *below],
    )
    return (Line("H", str(text)), *constants.lines())


def _factors(
    page: _Page, polynomial: Polynomial, constants: _TimeConstants
) -> tuple[Polynomial, list[Phrase], int]:
    """What is free of s, the factors with s as phrases, and the power of s alone."""
    number, found = factors(polynomial)
    lead, phrases, alone = page.form.basis.ring.constant(int(number)), [], 0
    place = page.form.basis.s_index

    def degree(factor: Polynomial) -> int:
        return 0 if place is None else int(factor.degrees()[place])

    for factor, exponent in sorted(found, key=lambda item: (degree(item[0]), str(item[0]))):
        count = int(exponent)
        coefficients = page.form.by_power(factor)
        if degree(factor) == 0:
            lead = lead * factor**count
        elif coefficients[0] == 0:
            alone += count
        else:
            lead = lead * coefficients[0] ** count
            phrases.append(page.power(_factor(page, coefficients, constants), count))
    return lead, phrases, alone


def _factor(page: _Page, coefficients: list[Polynomial], constants: _TimeConstants) -> Phrase:
    if len(coefficients) > 2:
        return page.series(coefficients, _S)
    constant = page.write.ratio(coefficients[1], coefficients[0])
    if constant.negative:
        return total([ONE, -product([constants(-constant), _S])])
    return total([ONE, product([constants(constant), _S])])


_LABELS = {
    "k": "K",
    "k1": "K1",
    "w0": "w0",
    "q": "Q",
    "tau": "tau",
    "tau_z": "tau_z",
    "w_z": "w_z",
    "q_z": "Q_z",
}


def _standard(page: _Page) -> tuple[Line, ...]:
    """The named parts of the standard form, with the form they belong to."""
    found = standard_form(page.form, safe=page.safe)
    if found is None:
        return ()
    labels = {key: page.name(label) for key, label in _LABELS.items()}
    if found.order == 1 and "tau_z" in found.parts:
        labels["tau"] = page.name("tau_p")
    top, bottom = _above(page, found, labels), _below(page, found, labels)
    head = Line("denominator of H", str(bottom)) if top is None else None
    head = head or Line("H", str(product([top or ONE], [bottom])))
    shown = {key: text for key, text in found.parts.items() if key != "w0" or found.order == 2}
    if found.order == 1 and found.shape != "other":
        shown["w0"] = found.parts["w0"]
    return (head, *(Line(str(labels[key]), text) for key, text in shown.items()))


def _below(page: _Page, found: StandardForm, labels: dict[str, Phrase]) -> Phrase:
    """1 + tau·s or 1 + s/(Q·w0) + (s/w0)²."""
    if found.order == 1:
        return _slope(labels["tau"])
    quality = None if found.parts["q"] == "oo" else labels["q"]
    return _square(page, quality, labels["w0"])


def _slope(tau: Phrase, *, falling: bool = False) -> Phrase:
    term = product([tau, _S])
    return total([ONE, -term if falling else term])


def _square(page: _Page, quality: Phrase | None, w0: Phrase, *, falling: bool = False) -> Phrase:
    """1 + s/(Q·w0) + (s/w0)², its middle term turned round or left out."""
    middle = ZERO if quality is None else product([_S], [quality, w0])
    return total([ONE, -middle if falling else middle, _relative(page, w0)])


def _relative(page: _Page, w0: Phrase) -> Phrase:
    return page.power(product([_S], [w0]), 2)


def _above(page: _Page, found: StandardForm, labels: dict[str, Phrase]) -> Phrase | None:
    """The numerator by its shape; None where it has no standard form."""
    first, parts = found.order == 1, found.parts
    k, w0, q = labels["k"], labels["w0"], labels["q"]
    match found.shape:
        case "low-pass":
            return k
        case "high-pass":
            return product([k, labels["tau"], _S] if first else [k, _relative(page, w0)])
        case "band-pass" if "k1" in parts:
            return product([labels["k1"], _S])
        case "band-pass":
            return product([k, Phrase(f"({product([_S], [q, w0])})")])
        case "notch":
            return product([k, _square(page, None, w0)])
        case "all-pass" if first:
            return product([k, _slope(labels["tau"], falling=True)])
        case "all-pass":
            return product([k, _square(page, q, w0, falling=True)])
    if "tau_z" in parts:
        lead = [k] if "k" in parts else [labels["k1"], _S]
        return product([*lead, _slope(labels["tau_z"])])
    if "k" not in parts:
        return None
    corner = labels["w_z"] if "w_z" in parts else w0
    return product([k, _square(page, labels["q_z"] if "q_z" in parts else None, corner)])


def _axis(
    form: ClosedForm, coefficients: Sequence[Polynomial]
) -> tuple[list[Polynomial], list[Polynomial]]:
    """Real and imaginary part of P(jω) by rising power of ω."""
    zero = form.basis.ring.constant(0)
    real, imag = [], []
    for place, value in enumerate(coefficients):
        signed = -value if place % 4 in (2, 3) else value
        real.append(zero if place % 2 else signed)
        imag.append(signed if place % 2 else zero)
    return real, imag


@dataclass(frozen=True, slots=True)
class _Axes:
    """Real and imaginary part of 1 + a1·jω + …, and the power of jω taken out before it."""

    real: Phrase
    imag: Phrase
    shift: int
    lead: Polynomial


def _axes(page: _Page, coefficients: list[Polynomial]) -> _Axes:
    low = lowest(coefficients)
    lead = coefficients[low]
    w = page.name("w")
    real, imag = (
        total(
            page.write.ratio(value, lead, page.power(w, place))
            for place, value in enumerate(part)
            if value != 0
        )
        for part in _axis(page.form, coefficients[low:])
    )
    return _Axes(real, imag, low, lead)


def _real(page: _Page) -> tuple[Line, ...]:
    """Gain and phase; the phase up to whole turns."""
    w = page.name("w")
    top, bottom = (_axes(page, part) for part in page.form.coefficients())
    shift = top.shift - bottom.shift
    gain = page.write.pieces(top.lead, bottom.lead)
    certain = sign_of(top.lead) * sign_of(bottom.lead)
    if not certain:
        gain = Pieces((call("Abs" if page.safe else "abs", gain.times()),))
    above, below = _size(page, top), _size(page, bottom)
    if above == below:  # an all-pass
        above = below = ONE
    size = product(
        [*gain.top, page.power(w, max(shift, 0)), above],
        [*gain.bottom, page.power(w, max(-shift, 0)), below],
    )
    return (Line(f"gain({w})", size.text), Line(f"phase({w})", str(total(_phase(page)))))


def _size(page: _Page, axes: _Axes) -> Phrase:
    """The magnitude of real + j·imag."""
    if axes.imag.is_zero:
        return axes.real if axes.real.is_one else call("Abs" if page.safe else "abs", axes.real)
    return root(_squared(page, axes))


def _squared(page: _Page, axes: _Axes) -> Phrase:
    """real² + imag²."""
    return total(power(item, 2, page.sign) for item in (axes.real, axes.imag))


def _phase(page: _Page) -> list[Phrase]:
    """Turns of the leading terms plus and minus angles, equal angles counted together."""
    top, bottom = (_axes(page, part) for part in page.form.coefficients())
    quarters = top.shift - bottom.shift
    certain = sign_of(top.lead) * sign_of(bottom.lead)
    quarters += 2 if certain < 0 else 0
    angles: Counter[str] = Counter()
    for axes, weight in ((top, 1), (bottom, -1)):
        angle = _angle(axes)
        if not angle.is_zero:
            angles[angle.text] += -weight if angle.negative else weight
    turn = Fraction(quarters, 2)
    half_turns = [fraction(turn.numerator), Phrase("pi")]
    terms = [product(half_turns, [fraction(turn.denominator)])]
    if not certain:
        terms.append(call("atan2", ZERO, page.write.ratio(top.lead, bottom.lead)))
    terms += [product([fraction(count), Phrase(text)]) for text, count in angles.items() if count]
    return terms


def _angle(axes: _Axes) -> Phrase:
    """The angle of real + j·imag."""
    if axes.imag.is_zero:
        return ZERO if axes.real.is_one else call("atan2", ZERO, axes.real)
    upright = Phrase(axes.imag.text, axes.imag.level)
    angle = call("atan", upright) if axes.real.is_one else call("atan2", upright, axes.real)
    return -angle if axes.imag.negative else angle


def _delay(page: _Page) -> tuple[Line, ...]:
    """Phase delay -phase/ω and group delay -d(phase)/dω."""
    w = page.name("w")
    late = total(-term for term in _phase(page))
    lines = [Line(f"phase_delay({w})", str(product([late], [w])))]
    if len(page.form.numerator) + len(page.form.denominator) > LARGEST_GROUPED:
        return tuple(lines)  # the squares of so many terms are beyond reading
    found: dict[str, Polynomial] = {}  # equal delays once, counted as multiples of the first
    counts: Counter[str] = Counter()
    signs: dict[str, bool] = {}
    for part, weight in ((page.form.denominator, 1), (page.form.numerator, -1)):
        delay = _group_delay(page, part, 1)
        first = signs.setdefault(delay.text, delay.negative)
        found.setdefault(delay.text, part)
        counts[delay.text] += weight if delay.negative == first else -weight
    terms = [_group_delay(page, found[text], count) for text, count in counts.items() if count]
    return (*lines, Line(f"group_delay({w})", str(total(terms))))


def _group_delay(page: _Page, polynomial: Polynomial, count: int) -> Phrase:
    """count·d(arg P(jω))/dω = count·(re·im' - im·re')/(re² + im²)."""
    form = page.form
    coefficients = form.by_power(polynomial)
    real, imag = _axis(form, coefficients[lowest(coefficients) :])
    zero = form.basis.ring.constant(0)

    def times(first: list[Polynomial], second: list[Polynomial]) -> list[Polynomial]:
        found = [zero] * (len(first) + len(second))
        for i, a in enumerate(first):
            for j, b in enumerate(second):
                found[i + j] = found[i + j] + a * b
        return found

    def rate(values: list[Polynomial]) -> list[Polynomial]:
        return [value * place for place, value in enumerate(values)][1:] or [zero]

    pairs = zip(times(real, rate(imag)), times(imag, rate(real)), strict=True)
    top = [(a - b) * count for a, b in pairs]
    if all(value == 0 for value in top):
        return ZERO
    axes, w, low = _axes(page, coefficients), page.name("w"), lowest(top)
    gain = page.write.pieces(top[low], axes.lead**2)
    above = [page.power(w, low), page.series(top, w)]
    return product([*gain.top, *above], [*gain.bottom, _squared(page, axes)])


def _asymptotes(page: _Page) -> tuple[Line, ...]:
    """The leading term at either end; its slope is 20 dB a decade for each power of s."""
    top, bottom = page.form.coefficients()
    lines = []
    for label, first, second in (
        ("low", lowest(top), lowest(bottom)),
        ("high", len(top) - 1, len(bottom) - 1),
    ):
        shift = first - second
        gain = page.write.pieces(top[first], bottom[second])
        text = product(
            [*gain.top, page.power(_S, max(shift, 0))],
            [*gain.bottom, page.power(_S, max(-shift, 0))],
        )
        slope = f"{20 * shift:+d} dB/decade" if shift else "flat"
        lines.append(Line(f"H, {label} frequencies, {slope}", str(text)))
    return tuple(lines)


_READINGS: dict[str, Callable[[_Page], tuple[Line, ...]]] = {
    "unit": _unit,
    "factored": _factored,
    "standard": _standard,
    "real": _real,
    "delay": _delay,
    "asymptotes": _asymptotes,
}
