"""What callers hand to the door for a response in time: what drives it, and for how long."""

from __future__ import annotations

from fractions import Fraction
from typing import TYPE_CHECKING, Any

from acsolve.circuit.netlist import Netlist
from acsolve.given import exact, frequencies_of, number_of, refuse, share_of

if TYPE_CHECKING:
    from acsolve.analyses.drive import Drive

_MOST_CYCLES = 1_000_000
_MOST_POINTS = 1_000_000


def drive_of(given: Any, netlist: Netlist) -> Drive:
    """A drive from "step", "impulse", a sine's frequency, or its frequency and cycles.

    Raises
    ------
    AnalysisError
        [option.value] the cycles are no multiple of a half above zero, or not of a sine;
        [sweep.band] the frequency is not above 0 Hz.
    TextError
        codes of the text format for a text that does not read.
    """
    from acsolve.analyses.drive import Drive

    cycles = None
    if isinstance(given, tuple | list) and len(given) == 2:
        given, cycles = given
    if isinstance(given, str) and given.strip() in ("step", "impulse"):
        if cycles is not None:
            raise refuse(
                "option.value",
                f"cycles are counted of a sine, and {given} is what drives here",
                "Name the sine's frequency, as 1 kHz.",
            )
        return Drive(kind="step" if given.strip() == "step" else "impulse")
    hertz = hertz_of(given, netlist)
    return Drive(kind="sine", hertz=hertz, cycles=None if cycles is None else _cycles(cycles))


def hertz_of(given: Any, netlist: Netlist) -> Fraction:
    """One frequency above 0 Hz, as a number or a text, exact as it is written.

    Raises
    ------
    AnalysisError
        [sweep.band] it is not just one, or not above 0 Hz.
    """
    found = frequencies_of(given, netlist)
    if found.size != 1 or not float(found.ravel()[0]) > 0:
        raise refuse("sweep.band", "a sine has one frequency above 0 Hz", "Write, say, 1 kHz.")
    return exact(float(found.ravel()[0]))


def _cycles(given: Any) -> Fraction:
    """A number of cycles: a multiple of a half."""
    try:
        found = Fraction(given.strip()) if isinstance(given, str) else exact(given)
    except ValueError:
        found = Fraction(0)
    if not 0 < found <= _MOST_CYCLES or (2 * found).denominator != 1:
        raise refuse(
            "option.value",
            f"{given} is no number of cycles",
            f"Give whole or half cycles, up to {_MOST_CYCLES:,}.",
        )
    return found


def duration_of(given: Any, netlist: Netlist) -> Fraction | None:
    """A duration in seconds from a number or a text ("5 ms"); None stays None.

    Raises
    ------
    AnalysisError
        [option.value] it is not above zero, or beyond the range of numbers.
    TextError
        codes of the text format for a text that does not read.
    """
    from acsolve.text import parse_duration

    if given is None:
        return None
    if isinstance(given, str):
        found = number_of(parse_duration(given, netlist=netlist), netlist)
    else:
        found = exact(given)
    if not Fraction(10) ** -200 < found < Fraction(10) ** 200:
        raise refuse("option.value", "a duration is above zero", "Write, say, 5 ms.")
    return found


def band_share(given: Any) -> Fraction:
    """Half the settling band as a share of the final value, exact: 1/50 for 0.02 and "2%"."""
    if isinstance(given, str):
        share_of(given)  # refused where it is none
        text, percent, _ = given.strip().partition("%")
        return Fraction(text) / (100 if percent else 1)
    found = exact(given)
    if not 0 < found < 1:
        raise refuse("option.value", f"{given} is no share between 0 and 100 %", "Write, say, 2%.")
    return found


def points_of(given: Any) -> int:
    """A number of points of a curve, from 2 on.

    Raises
    ------
    AnalysisError
        [sweep.points] it is none, or beyond a million.
    """
    text = str(given).replace("_", "")
    count = int(text) if text.isascii() and text.isdecimal() and len(text) < 9 else 0
    if isinstance(given, bool) or not 2 <= count <= _MOST_POINTS:
        raise refuse(
            "sweep.points",
            f"{given} is no number of points of a curve in time",
            f"Give a whole number from 2 to {_MOST_POINTS:,}.",
        )
    return count
