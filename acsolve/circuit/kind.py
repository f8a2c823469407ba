"""The kinds of part: terminals, attributes and their dimensions, in one table.

A kind is data only. Its equations live in `acsolve.equations.stamp` under the same name.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from acsolve.circuit import unit
from acsolve.circuit.unit import Dimension

Shape = Literal["value", "in_s", "phasor", "text"]


@dataclass(frozen=True, slots=True)
class Terminal:
    """A terminal; `default` is the node it takes when the text names none."""

    name: str
    default: str | None = None


@dataclass(frozen=True, slots=True)
class Attribute:
    """A named attribute of a kind.

    `shape`: "value" is a plain quantity, "in_s" an expression that may contain s,
    "phasor" an amplitude that may carry an angle (stored under `angle`, in degrees),
    "text" a text in double quotes (stored with the part, no value).
    `flag` attributes are words without a value. `at` says whether `at FREQUENCY`
    may follow. A required attribute left out makes the part its own symbol
    (`own_symbol`) or is an error.
    """

    name: str
    dimension: Dimension | None  # None: depends on another attribute, not checked
    shape: Shape = "value"
    required: bool = False
    own_symbol: bool = False
    at: bool = False
    flag: bool = False


@dataclass(frozen=True, slots=True)
class Kind:
    """A kind of part. `principal` is the attribute given in place (`R1 = 4k7`)."""

    name: str
    terminals: tuple[Terminal, ...]
    attributes: tuple[Attribute, ...] = ()
    principal: str | None = None
    letter: str | None = None

    @property
    def two_terminal(self) -> bool:
        """Whether the part stands in a chain by its two terminals."""
        return len(self.terminals) == 2

    def attribute(self, name: str) -> Attribute | None:
        """The attribute of that name, or None."""
        return next((item for item in self.attributes if item.name == name), None)


_PAIR = (Terminal("a"), Terminal("b"))
_CONTROLLED = (Terminal("plus"), Terminal("minus"), Terminal("out"), Terminal("ref"))
_COILS = (Terminal("p1"), Terminal("p2"), Terminal("s1"), Terminal("s2"))


def _main(name: str, dimension: Dimension, shape: Shape = "value") -> Attribute:
    return Attribute(name, dimension, shape=shape, required=True, own_symbol=True)


KINDS: dict[str, Kind] = {
    kind.name: kind
    for kind in (
        Kind(
            "resistor",
            _PAIR,
            (_main("value", unit.OHM), Attribute("series_inductance", unit.HENRY)),
            principal="value",
            letter="R",
        ),
        Kind(
            "inductor",
            _PAIR,
            (
                _main("value", unit.HENRY),
                Attribute("series_resistance", unit.OHM),
                Attribute("quality", unit.NONE, at=True),
            ),
            principal="value",
            letter="L",
        ),
        Kind(
            "capacitor",
            _PAIR,
            (
                _main("value", unit.FARAD),
                Attribute("series_resistance", unit.OHM),
                Attribute("series_inductance", unit.HENRY),
                Attribute("quality", unit.NONE, at=True),
            ),
            principal="value",
            letter="C",
        ),
        Kind("impedance", _PAIR, (_main("value", unit.OHM, "in_s"),), principal="value"),
        Kind("admittance", _PAIR, (_main("value", unit.SIEMENS, "in_s"),), principal="value"),
        Kind(
            "constant_phase",
            _PAIR,
            (
                Attribute("coefficient", None, required=True, own_symbol=True),
                Attribute("exponent", unit.NONE, required=True, own_symbol=True),
            ),
        ),
        Kind(
            "voltage_source",
            _PAIR,
            (_main("amplitude", unit.VOLT, "phasor"), Attribute("angle", unit.NONE)),
            "amplitude",
        ),
        Kind(
            "current_source",
            _PAIR,
            (_main("amplitude", unit.AMPERE, "phasor"), Attribute("angle", unit.NONE)),
            "amplitude",
        ),
        Kind(
            "opamp",
            (Terminal("plus"), Terminal("minus"), Terminal("out"), Terminal("ref", "gnd")),
            (
                Attribute("open_loop_gain", unit.NONE),
                Attribute("gain_bandwidth", unit.HERTZ),
                Attribute("input_resistance", unit.OHM),
                Attribute("output_resistance", unit.OHM),
                Attribute("voltage_noise", unit.VOLT_PER_ROOT_HERTZ),
                Attribute("current_noise", unit.AMPERE_PER_ROOT_HERTZ),
                Attribute("noise_corner", unit.HERTZ),
            ),
        ),
        Kind("voltage_amplifier", _CONTROLLED, (_main("gain", unit.NONE),), "gain"),
        Kind("transconductance", _CONTROLLED, (_main("gain", unit.SIEMENS),), "gain"),
        Kind("transresistance", _CONTROLLED, (_main("gain", unit.OHM),), "gain"),
        Kind("current_amplifier", _CONTROLLED, (_main("gain", unit.NONE),), "gain"),
        Kind("transformer", _COILS, (_main("ratio", unit.NONE),), "ratio"),
        Kind("gyrator", _COILS, (_main("conductance", unit.SIEMENS),), "conductance"),
        Kind(
            "line",
            (
                Terminal("near"),
                Terminal("far"),
                Terminal("near_ref", "gnd"),
                Terminal("far_ref", "gnd"),
            ),
            (
                Attribute("z0", unit.OHM, required=True, own_symbol=True),
                Attribute("delay", unit.SECOND, required=True, own_symbol=True),
                Attribute("loss", unit.NONE, at=True),
                Attribute("constant_loss", unit.NONE),
            ),
        ),
        Kind(
            "crystal",
            _PAIR,
            (
                Attribute("motional_resistance", unit.OHM, required=True, own_symbol=True),
                Attribute("motional_inductance", unit.HENRY, required=True, own_symbol=True),
                Attribute("motional_capacitance", unit.FARAD, required=True, own_symbol=True),
                Attribute("shunt_capacitance", unit.FARAD, required=True, own_symbol=True),
            ),
        ),
        Kind("ammeter", _PAIR),
        Kind(
            "measured",
            (Terminal("near"), Terminal("far"), Terminal("ref", "gnd")),
            (Attribute("file", None, shape="text", required=True),),
        ),
    )
}

#: Reference designators of undeclared parts.
LETTERS: dict[str, str] = {kind.letter: kind.name for kind in KINDS.values() if kind.letter}
