"""Numbers for people: six digits, SI prefixes, signs that any terminal can show."""

from __future__ import annotations

from decimal import Decimal
from math import floor, inf, isfinite, isnan, log10, pi

DIGITS = 6
HALF_POWER_DB = -3.0102999566398120

#: Power of ten -> SI prefix of the text format, so that output can be typed back in.
_PREFIXES = {
    -15: "f",
    -12: "p",
    -9: "n",
    -6: "u",
    -3: "m",
    0: "",
    3: "k",
    6: "M",
    9: "G",
    12: "T",
}
_SMALLEST, _LARGEST = min(_PREFIXES), max(_PREFIXES)
_ROUND = 1e-12  # relative difference below which a number is the rounded one
_SMALLEST_NORMAL = 1e-300  # below it 10**exponent itself loses digits


def goes_on(value: float, digits: int) -> bool:
    """Whether a number has more digits than these: zeros at its end are then digits, too."""
    return isfinite(value) and abs(float(f"{value:.{digits - 1}e}") - value) > _ROUND * abs(value)


def plain(value: float | Decimal, digits: int = DIGITS, *, even: bool = False) -> str:
    """A number without a unit: `0.805153`, `1.2e-5`, `infinite`; a decimal is of any size.

    With `even`, zeros fill up the digits.
    """
    if isinstance(value, Decimal):
        mantissa, exponent = f"{value:.{digits - 1}e}".lower().split("e")
        return f"{mantissa.rstrip('0').rstrip('.')}e{int(exponent)}"
    odd = _odd(value)
    if odd is not None:
        return odd
    text = f"{value:#.{digits}g}" if even else f"{value:.{digits}g}"
    if "e" not in text:
        return "0" if text == "-0" else text.removesuffix(".")
    mantissa, exponent = text.split("e")
    return f"{mantissa.removesuffix('.')}e{int(exponent)}"


def engineering(value: float, unit: str, digits: int = DIGITS, *, even: bool = False) -> str:
    """A number with its unit and an SI prefix: `1.02616 kHz`, `155.1 ms`, `0 Hz`.

    Beyond the prefixes f to T a power of ten stands instead. Without a unit it is `plain`.
    With `even`, zeros fill up the digits, so that a column of numbers lines up.
    """
    if not unit:
        return plain(value, digits, even=even)
    odd = _odd(value)
    if odd is not None:
        return odd
    if value == 0:
        return f"0 {unit}"
    mantissa, power = _scaled(value, digits)
    if power not in _PREFIXES:
        return f"{plain(value, digits, even=even)} {unit}"
    if even:
        whole = len(mantissa.lstrip("-").split(".")[0])
        mantissa = f"{float(mantissa):.{max(0, digits - whole)}f}"
    return f"{mantissa} {_PREFIXES[power]}{unit}"


def _scaled(value: float, digits: int) -> tuple[str, int]:
    """Mantissa of one to three whole digits as text, and the power of ten it stands for."""
    if abs(value) < _SMALLEST_NORMAL:
        return plain(value, digits), _SMALLEST - 3
    rounded = float(f"{value:.{digits - 1}e}")
    power = 3 * floor(_exponent(rounded) / 3)
    if power < _SMALLEST or power > _LARGEST:
        return plain(value, digits), power
    return _shifted(rounded, power, digits), power


def _exponent(value: float) -> int:
    """Decimal exponent of a number, exact also next to powers of ten."""
    return int(f"{abs(value):.15e}".split("e")[1])


def _shifted(value: float, power: int, digits: int) -> str:
    """value / 10**power with so many digits, without a rounding of its own."""
    mantissa, exponent = f"{value:.{digits - 1}e}".split("e")
    text = f"{float(f'{mantissa}e{int(exponent) - power}'):.{digits}g}"
    return text if "e" not in text else f"{float(text):.0f}"


def _odd(value: float) -> str | None:
    if isnan(value):
        return "unknown"
    if not isfinite(value):
        return "infinite" if value > 0 else "-infinite"
    return None


def decibels(value: float) -> str:
    """A level in dB: four digits after the point at most."""
    if not isfinite(value):
        return "-infinite dB" if value == -inf else "infinite dB"
    text = f"{value:.4f}".rstrip("0").rstrip(".")
    return f"{'0' if text == '-0' else text} dB"


def gain_in_db(gain: float) -> float:
    """20·log10 of a gain, minus infinity for none."""
    return 20 * log10(abs(gain)) if gain else -inf


def hertz(rad_per_s: float) -> float:
    """An angular frequency in hertz."""
    return rad_per_s / (2 * pi)


def angular(rad_per_s: float) -> str:
    """An angular frequency with its unit."""
    return f"{plain(rad_per_s)} rad/s"


def complex_text(value: complex, unit: str = "") -> str:
    """A complex number as `a + jb` with its unit."""
    tail = f" {unit}" if unit else ""
    if value.imag == 0:
        return engineering(value.real, unit)
    sign = "-" if value.imag < 0 else "+"
    return f"{plain(value.real)} {sign} j{plain(abs(value.imag))}{tail}"
