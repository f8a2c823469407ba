"""Physical dimensions and the units of the text format."""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction


@dataclass(frozen=True, slots=True)
class Dimension:
    """Exponents of volt, ampere and second (halves occur in V/sqrt(Hz)), and of kelvin.

    Angle, dB and ratios are dimensionless; `display` names the unit for people.
    """

    volt: Fraction = Fraction(0)
    ampere: Fraction = Fraction(0)
    second: Fraction = Fraction(0)
    kelvin: Fraction = Fraction(0)

    def __mul__(self, other: Dimension) -> Dimension:
        return Dimension(
            self.volt + other.volt,
            self.ampere + other.ampere,
            self.second + other.second,
            self.kelvin + other.kelvin,
        )

    def __pow__(self, exponent: Fraction | int) -> Dimension:
        factor = Fraction(exponent)
        return Dimension(
            self.volt * factor, self.ampere * factor, self.second * factor, self.kelvin * factor
        )

    def __truediv__(self, other: Dimension) -> Dimension:
        return self * other**-1

    @property
    def is_none(self) -> bool:
        """Whether this is a plain number."""
        return self == NONE


def _dimension(volt: int = 0, ampere: int = 0, second: int = 0, kelvin: int = 0) -> Dimension:
    return Dimension(Fraction(volt), Fraction(ampere), Fraction(second), Fraction(kelvin))


NONE = Dimension()
VOLT = _dimension(volt=1)
AMPERE = _dimension(ampere=1)
SECOND = _dimension(second=1)
KELVIN = _dimension(kelvin=1)
HERTZ = _dimension(second=-1)
OHM = VOLT / AMPERE
SIEMENS = AMPERE / VOLT
FARAD = SIEMENS * SECOND
HENRY = OHM * SECOND
WATT = VOLT * AMPERE
VOLT_PER_ROOT_HERTZ = VOLT * SECOND ** Fraction(1, 2)
AMPERE_PER_ROOT_HERTZ = AMPERE * SECOND ** Fraction(1, 2)

#: Dimension -> how it is written for people, in trade words (singular, plural).
TRADE_NAMES: dict[Dimension, tuple[str, str]] = {
    NONE: ("a plain number", "plain numbers"),
    VOLT: ("volt", "volts"),
    AMPERE: ("ampere", "amperes"),
    SECOND: ("second", "seconds"),
    KELVIN: ("kelvin", "kelvins"),
    HERTZ: ("hertz", "hertz"),
    OHM: ("ohm", "ohms"),
    SIEMENS: ("siemens", "siemens"),
    FARAD: ("farad", "farads"),
    HENRY: ("henry", "henries"),
    WATT: ("watt", "watts"),
    VOLT_PER_ROOT_HERTZ: ("volt per root hertz", "volts per root hertz"),
    AMPERE_PER_ROOT_HERTZ: ("ampere per root hertz", "amperes per root hertz"),
}

#: Unit sign for output, by dimension.
SIGNS: dict[Dimension, str] = {
    NONE: "",
    VOLT: "V",
    AMPERE: "A",
    SECOND: "s",
    KELVIN: "K",
    HERTZ: "Hz",
    OHM: "ohm",
    SIEMENS: "S",
    FARAD: "F",
    HENRY: "H",
    WATT: "W",
    VOLT_PER_ROOT_HERTZ: "V/rtHz",
    AMPERE_PER_ROOT_HERTZ: "A/rtHz",
}

#: SI prefixes of the format: sign -> power of ten.
PREFIXES: dict[str, int] = {
    "f": -15,
    "p": -12,
    "n": -9,
    "u": -6,
    "m": -3,
    "k": 3,
    "M": 6,
    "G": 9,
    "T": 12,
}
