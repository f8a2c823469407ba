"""A closed form in the shapes that people read, each of them exact.

A reading is a list of labelled texts. Frequencies are written with `w` for the angular
frequency ω in rad/s.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import Literal, get_args

from acsolve.algebra.ring import Polynomial, cancel, positive
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.shape import standard_form
from acsolve.equations.grouping import Writer
from acsolve.equations.write import Spelling

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
    factored : irreducible factors, first-order ones as time constants.
    standard : K, w0, Q or tau of a first- or second-order response.
    real : gain and phase as real functions of the angular frequency.
    delay : phase delay and group delay as real functions of the angular frequency.
    asymptotes : what it tends to far below and far above all corners.

    `safe` spells everything for SymPy's parser, else for people.
    """
    if name == "collected":
        return (Line("H", form.text(safe=safe)),)
    if not form.rational or form.numerator == 0:
        return ()
    return _READINGS[name](form, Writer(form.basis, form.spelled(safe=safe)))


def _unit(form: ClosedForm, writer: Writer) -> tuple[Line, ...]:
    """K·s^m·(1 + …)/(1 + …) with each coefficient a ratio in lowest terms."""
    top, bottom = form.coefficients()
    first, second = _lowest(top), _lowest(bottom)
    gain = _ratio(writer, top[first], bottom[second])
    shift = first - second
    series = [_series(writer, part, low) for part, low in ((top, first), (bottom, second))]
    lead = _times(gain, _power("s", abs(shift), writer.spelling) if shift > 0 else "")
    below = _times(_power("s", -shift, writer.spelling) if shift < 0 else "", _wrap(series[1]))
    upper = _times("" if lead == "1" and series[0] != "1" else lead, _wrap(series[0]))
    text = upper or "1"
    if below:
        text = f"{text}/{below if not _is_product(below) else f'({below})'}"
    return (Line("H", text),)


def _lowest(coefficients: list[Polynomial]) -> int:
    return next(power for power, value in enumerate(coefficients) if value != 0)


def _ratio(writer: Writer, top: Polynomial, bottom: Polynomial) -> str:
    first, second = cancel(top, bottom)
    return writer.ratio(*positive(first, second, second))


def _series(writer: Writer, coefficients: list[Polynomial], low: int) -> str:
    """1 + a1·s + a2·s² + … relative to the coefficient of the lowest power."""
    pieces = ["1"]
    for power in range(low + 1, len(coefficients)):
        if coefficients[power] == 0:
            continue
        text = _ratio(writer, coefficients[power], coefficients[low])
        variable = _power("s", power - low, writer.spelling)
        if text in ("1", "-1"):
            pieces.append(f"{text[:-1]}{variable}")
        else:
            pieces.append(f"{_bracketed(text)}*{variable}")
    return " + ".join(pieces).replace("+ -", "- ")


def _power(variable: str, exponent: int, spelling: Spelling) -> str:
    if exponent == 0:
        return ""
    return variable if exponent == 1 else f"{variable}{spelling.power}{exponent}"


def _bracketed(text: str) -> str:
    """A coefficient in brackets where a factor after it would bind to its last term only."""
    depth = 0
    for sign in text:
        depth += (sign == "(") - (sign == ")")
        if sign == " " and depth == 0:
            return f"({text})"
    return text


def _wrap(text: str) -> str:
    return "" if text == "1" else f"({text})"


def _is_product(text: str) -> bool:
    depth = 0
    for sign in text:
        depth += (sign == "(") - (sign == ")")
        if sign in "*/" and depth == 0:
            return True
    return False


def _times(*factors: str) -> str:
    present = [item for item in factors if item]
    if len(present) > 1:
        present = [item for item in present if item != "1"] or ["1"]
    return "*".join(_bracketed(item) for item in present)


def _factored(form: ClosedForm, writer: Writer) -> tuple[Line, ...]:
    """Irreducible factors; a first-order factor a + b·s is written a·(1 + tau·s)."""
    place = form.basis.s_index
    taus: list[Line] = []
    texts = []
    for polynomial in (form.numerator, form.denominator):
        texts.append(_factors(form, writer, polynomial, place, taus))
    text = texts[0] if texts[1] == "1" else f"{texts[0]}/({texts[1]})"
    return (Line("H", text), *taus)


def _factors(
    form: ClosedForm,
    writer: Writer,
    polynomial: Polynomial,
    place: int | None,
    taus: list[Line],
) -> str:
    number, factors = polynomial.factor()
    pieces = [] if abs(int(number)) == 1 else [str(abs(int(number)))]
    for factor, exponent in sorted(factors, key=lambda item: (len(item[0]), str(item[0]))):
        piece = _factor(form, writer, factor, place, taus)
        whole = int(exponent)
        pieces.append(piece if whole == 1 else f"{_group(piece)}{writer.spelling.power}{whole}")
    text = "*".join(pieces) or "1"
    return f"-{text}" if int(number) < 0 else text


def _group(piece: str) -> str:
    return f"({piece})" if _is_product(piece) else piece


def _factor(
    form: ClosedForm, writer: Writer, factor: Polynomial, place: int | None, taus: list[Line]
) -> str:
    order = 0 if place is None else factor.degrees()[place]
    if order == 0 or len(factor) == 1:
        return _bracketed(writer.factored(factor))
    if order > 1 or place is None:
        return f"({form.part_text(factor, writer.spelling)})"
    parts = form.basis.ring.by_power(factor, place)
    name = f"tau{len(taus) + 1}"
    taus.append(Line(name, _ratio(writer, parts[1], parts[0])))
    lead = _bracketed(writer.factored(parts[0]))
    return f"(1 + {name}*s)" if lead == "1" else f"{lead}*(1 + {name}*s)"


def _standard(form: ClosedForm, writer: Writer) -> tuple[Line, ...]:
    """The named parts of the standard form, with the form they belong to."""
    safe = writer.spelling.power != "^"
    found = standard_form(form, safe=safe)
    if found is None:
        return ()
    lines = [Line("H", _standard_text(found.shape, found.order, writer.spelling))]
    if found.shape == "other":
        lines = [Line("denominator", _standard_text("denominator", found.order, writer.spelling))]
    labels = {"k": "K", "w0": "w0", "q": "Q", "tau": "tau"}
    return (*lines, *(Line(labels[key], text) for key, text in found.parts.items()))


def _standard_text(shape: str, order: int, spelling: Spelling) -> str:
    square = f"s{spelling.power}2/w0{spelling.power}2"
    bottom = "1 + tau*s" if order == 1 else f"1 + s/(Q*w0) + {square}"
    if shape == "denominator":
        return bottom
    tops = {
        "low-pass": "K",
        "high-pass": "K*tau*s" if order == 1 else f"K*{square}",
        "band-pass": "K*s/(Q*w0)",
        "notch": f"K*(1 + {square})",
        "all-pass": "K*(1 - tau*s)" if order == 1 else f"K*(1 - s/(Q*w0) + {square})",
    }
    return f"{tops[shape]}/({bottom})"


def _axis(form: ClosedForm, polynomial: Polynomial) -> tuple[list[Polynomial], list[Polynomial]]:
    """Real and imaginary part of P(jω) by rising power of ω."""
    ring = form.basis.ring
    coefficients = form.by_power(polynomial)
    real, imag = [], []
    for power, value in enumerate(coefficients):
        signed = -value if power % 4 in (2, 3) else value
        zero = ring.constant(0)
        real.append(zero if power % 2 else signed)
        imag.append(signed if power % 2 else zero)
    return real, imag


def _in_w(writer: Writer, coefficients: list[Polynomial]) -> str:
    """A polynomial in ω as text."""
    pieces = []
    for power, value in enumerate(coefficients):
        if value == 0:
            continue
        text = writer.grouped(value)
        variable = _power("w", power, writer.spelling)
        if not variable:
            pieces.append(text)
        elif text in ("1", "-1"):
            pieces.append(f"{text[:-1]}{variable}")
        else:
            pieces.append(f"{_bracketed(text)}*{variable}")
    return " + ".join(pieces).replace("+ -", "- ") or "0"


def _real(form: ClosedForm, writer: Writer) -> tuple[Line, ...]:
    """Gain and phase; the phase up to whole turns, as atan2 gives it."""
    (a, b), (c, d) = (_axis(form, part) for part in (form.numerator, form.denominator))
    power = writer.spelling.power

    def size(real: list[Polynomial], imag: list[Polynomial]) -> str:
        texts = [_in_w(writer, part) for part in (real, imag)]
        if "0" in texts:
            return f"abs({texts[0] if texts[1] == '0' else texts[1]})"
        return f"sqrt(({texts[0]}){power}2 + ({texts[1]}){power}2)"

    def angle(real: list[Polynomial], imag: list[Polynomial]) -> str:
        return f"atan2({_in_w(writer, imag)}, {_in_w(writer, real)})"

    gain = f"{size(a, b)}/{size(c, d)}"
    return (Line("gain(w)", gain), Line("phase(w)", f"{angle(a, b)} - {angle(c, d)}"))


def _delay(form: ClosedForm, writer: Writer) -> tuple[Line, ...]:
    """Phase delay -phase/ω and group delay -d(phase)/dω."""
    terms = []
    for part, sign in ((form.denominator, ""), (form.numerator, "-")):
        real, imag = _axis(form, part)
        top = _minus(form, _times_poly(form, real, _slope(imag)), _times_poly(form, imag, _slope(real)))
        bottom = _plus(form, _times_poly(form, real, real), _times_poly(form, imag, imag))
        if any(value != 0 for value in top):
            first, second = _in_w(writer, top), _in_w(writer, bottom)
            terms.append(f"{sign}({first})/({second})")
    group = " + ".join(terms).replace("+ -", "- ") or "0"
    phase = _real(form, writer)[1].text
    return (Line("phase_delay(w)", f"-({phase})/w"), Line("group_delay(w)", group))


def _times_poly(
    form: ClosedForm, first: list[Polynomial], second: list[Polynomial]
) -> list[Polynomial]:
    total = [form.basis.ring.constant(0)] * max(1, len(first) + len(second) - 1)
    for i, a in enumerate(first):
        for j, b in enumerate(second):
            total[i + j] = total[i + j] + a * b
    return total


def _slope(values: list[Polynomial]) -> list[Polynomial]:
    return [value * power for power, value in enumerate(values)][1:]


def _plus(form: ClosedForm, first: list[Polynomial], second: list[Polynomial]) -> list[Polynomial]:
    size = max(len(first), len(second))
    zero = form.basis.ring.constant(0)
    padded = [part + [zero] * (size - len(part)) for part in (first, second)]
    return [a + b for a, b in zip(*padded, strict=True)]


def _minus(form: ClosedForm, first: list[Polynomial], second: list[Polynomial]) -> list[Polynomial]:
    return _plus(form, first, [-value for value in second])


def _asymptotes(form: ClosedForm, writer: Writer) -> tuple[Line, ...]:
    """The leading term at either end; its slope is 20 dB a decade for each power of s."""
    top, bottom = form.coefficients()
    lines = []
    for label, (first, second) in (
        ("low", (_lowest(top), _lowest(bottom))),
        ("high", (len(top) - 1, len(bottom) - 1)),
    ):
        shift = first - second
        gain = _ratio(writer, top[first], bottom[second])
        variable = _power("s", abs(shift), writer.spelling)
        if shift > 0:
            text = _times(gain, variable)
        elif shift < 0:
            text = f"{_bracketed(gain)}/{variable}" if not _is_product(gain) else f"({gain})/{variable}"
        else:
            text = gain
        lines.append(Line(f"H, {label} frequencies", f"{text}  ({20 * shift:+d} dB/decade)"))
    return tuple(lines)


_READINGS: dict[str, Callable[[ClosedForm, Writer], tuple[Line, ...]]] = {
    "unit": _unit,
    "factored": _factored,
    "standard": _standard,
    "real": _real,
    "delay": _delay,
    "asymptotes": _asymptotes,
}
