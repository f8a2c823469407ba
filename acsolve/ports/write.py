"""Touchstone files written: numbers that read back as the same doubles."""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np

from acsolve.ports.data import PortData, refuse
from acsolve.ports.layout import (
    FREQUENCIES,
    KEYWORDS,
    NETWORK,
    ORDER,
    PAIRS_PER_LINE,
    PORTS,
    REFERENCE,
    SETS_IN_FILES,
    UNIT_WORDS,
    UNITS,
    VERSION,
    NumberFormat,
    Version,
    numbers_of,
    places,
    scale,
)


def touchstone_text(
    data: PortData,
    *,
    version: Version | None = None,
    form: NumberFormat = "RI",
    unit: str = "Hz",
    comments: Sequence[str] = (),
) -> str:
    """The text of a Touchstone file.

    Parameters
    ----------
    data : s, z, y, h or g parameters.
    version : "1.1" has one reference resistance for all ports and normalises z, y, h and g by
        it; "2.0" has one for each. By default 1.1 for s parameters with equal references.
    form : "RI" real and imaginary part, which read back exactly with Hz; "MA" magnitude and
        degrees; "DB" decibels and degrees.
    unit : Hz, kHz, MHz or GHz.
    comments : lines at the head.

    Raises
    ------
    AnalysisError
        [ports.no-set] parameters that such files do not know, or that are not finite;
        [ports.reference] references that differ, in version 1.1; [option.value].
    """
    _check(data, form, unit)
    equal = bool(np.all(data.reference == data.reference[0]))
    chosen = version or ("1.1" if data.name == "s" and equal else "2.0")
    if chosen == "1.1" and not equal:
        raise refuse(
            "ports.reference",
            "version 1.1 has one reference resistance, and the ports have different ones",
            "Write version 2.0, or convert to one reference first.",
        )
    old = chosen == "1.1"
    resistance = float(data.reference[0])
    matrix = data.matrix / scale(data.name, resistance) if old else data.matrix
    option = f"# {UNIT_WORDS[unit.lower()]} {data.name.upper()} {form} R {resistance!r}"
    lines = [f"! {text}" for item in comments for text in item.splitlines()]
    if old:
        lines.append(option)
    else:
        lines = [f"{KEYWORDS[VERSION]} 2.0", *lines, option, *_keyword_lines(data)]
    spots = places(data.ports, by_columns=old and data.ports == 2)
    lines += _rows(data.hertz / UNITS[unit.lower()], numbers_of(matrix, form), spots)
    return "\n".join([*lines, *([] if old else [KEYWORDS["end"]])]) + "\n"


def _check(data: PortData, form: str, unit: str) -> None:
    if data.name not in SETS_IN_FILES.values():
        raise refuse(
            "ports.no-set",
            f"Touchstone files hold no {data.name} parameters",
            'Convert them first: to("s").',
        )
    if unit.lower() not in UNITS or form not in ("RI", "MA", "DB"):
        raise refuse(
            "option.value",
            f"{form} in {unit} is no way to write the numbers",
            "Formats are RI, MA and DB, units Hz, kHz, MHz and GHz.",
        )
    values = data.matrix
    wrong = ~np.isfinite(values) | ((values == 0) if form == "DB" else False)
    for place in np.flatnonzero(wrong.any(axis=(1, 2)))[:1]:
        raise refuse(
            "ports.no-set",
            f"at {float(data.hertz[place])!r} Hz a parameter is not finite, or zero in decibels",
            "Leave that frequency out, or save s parameters as RI.",
        )


def _keyword_lines(data: PortData) -> list[str]:
    lines = [f"{KEYWORDS[PORTS]} {data.ports}"]
    if data.ports == 2:
        lines.append(f"{KEYWORDS[ORDER]} 12_21")
    lines.append(f"{KEYWORDS[FREQUENCIES]} {len(data.hertz)}")
    lines.append(" ".join([KEYWORDS[REFERENCE], *(repr(float(item)) for item in data.reference)]))
    return [*lines, KEYWORDS[NETWORK]]


def _rows(
    frequencies: np.ndarray, numbers: tuple[np.ndarray, np.ndarray], spots: list[tuple[int, int]]
) -> list[str]:
    """The numbers of each frequency: two-ports on one line, larger ones row by row, wrapped."""
    first, second = numbers
    ports = first.shape[-1]
    width = len(spots) if ports <= 2 else ports
    lines = []
    for point, frequency in enumerate(frequencies):
        pairs = [f"{float(first[point, i, j])!r} {float(second[point, i, j])!r}" for i, j in spots]
        rows = [pairs[start : start + width] for start in range(0, len(pairs), width)]
        head = f"{float(frequency)!r} "
        for row in rows:
            for start in range(0, len(row), PAIRS_PER_LINE):
                lines.append(head + " ".join(row[start : start + PAIRS_PER_LINE]))
                head = ""
    return lines
