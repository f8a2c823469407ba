"""What reader and writer of Touchstone files share: words, orders, normalisation.

Touchstone File Format Specification, versions 1.1 and 2.0 (IBIS Open Forum, 2002 and 2009).
"""

from __future__ import annotations

from typing import Any, Literal, TypeAlias

import numpy as np
from numpy.typing import NDArray

from acsolve.ports.sets import SetName

Array = NDArray[Any]

Version: TypeAlias = Literal["1.1", "2.0"]
NumberFormat: TypeAlias = Literal["RI", "MA", "DB"]

UNITS = {"hz": 1.0, "khz": 1e3, "mhz": 1e6, "ghz": 1e9}
UNIT_WORDS = {"hz": "Hz", "khz": "kHz", "mhz": "MHz", "ghz": "GHz"}
SETS_IN_FILES: dict[str, SetName] = {"s": "s", "y": "y", "z": "z", "h": "h", "g": "g"}
FORMATS: dict[str, NumberFormat] = {"ri": "RI", "ma": "MA", "db": "DB"}

PAIRS_PER_LINE = 4
MOST_PORTS = 200

VERSION = "version"
PORTS = "number of ports"
ORDER = "two-port data order"
FREQUENCIES = "number of frequencies"
NOISE_FREQUENCIES = "number of noise frequencies"
REFERENCE = "reference"
MATRIX = "matrix format"
MIXED = "mixed-mode order"
BEGIN, FINISH = "begin information", "end information"
NETWORK, NOISE, END = "network data", "noise data", "end"

#: Keyword of version 2.0 -> how it is written.
KEYWORDS = {
    VERSION: "[Version]",
    PORTS: "[Number of Ports]",
    ORDER: "[Two-Port Data Order]",
    FREQUENCIES: "[Number of Frequencies]",
    NOISE_FREQUENCIES: "[Number of Noise Frequencies]",
    REFERENCE: "[Reference]",
    MATRIX: "[Matrix Format]",
    MIXED: "[Mixed-Mode Order]",
    BEGIN: "[Begin Information]",
    FINISH: "[End Information]",
    NETWORK: "[Network Data]",
    NOISE: "[Noise Data]",
    END: "[End]",
}

Shape: TypeAlias = Literal["full", "lower", "upper"]


def places(ports: int, shape: Shape = "full", *, by_columns: bool = False) -> list[tuple[int, int]]:
    """Row and column of each parameter, in the order of a file.

    `by_columns` is the order 11, 21, 12, 22 of two-ports: the only one before version 2.0.
    """
    full = [(row, column) for row in range(ports) for column in range(ports)]
    if shape == "lower":
        return [(row, column) for row, column in full if column <= row]
    if shape == "upper":
        return [(row, column) for row, column in full if column >= row]
    return [(column, row) for row, column in full] if by_columns else full


def scale(name: SetName, reference: float) -> Array:
    """What normalised parameters are multiplied by, for files before version 2.0."""
    r = reference
    table: dict[SetName, list[list[float]]] = {
        "z": [[r]],
        "y": [[1 / r]],
        "h": [[r, 1.0], [1.0, 1 / r]],
        "g": [[1 / r, 1.0], [1.0, r]],
    }
    return np.array(table.get(name, [[1.0]]))


def complex_of(first: Array, second: Array, form: NumberFormat) -> Array:
    """Complex numbers from the two numbers of a file."""
    if form == "RI":
        return np.asarray(first + 1j * second)
    with np.errstate(all="ignore"):  # what is out of range is told with its place
        size = first if form == "MA" else 10 ** (first / 20)
        angle = np.radians(second)
        return np.asarray(size * np.cos(angle) + 1j * size * np.sin(angle))


def numbers_of(value: Array, form: NumberFormat) -> tuple[Array, Array]:
    """The two numbers of a file from complex numbers."""
    if form == "RI":
        return value.real, value.imag
    size, angle = np.abs(value), np.degrees(np.angle(value))
    if form == "MA":
        return size, angle
    with np.errstate(divide="ignore"):  # a zero has no level, which the writer refuses
        return 20 * np.log10(size), angle
