"""A sine that has been on for ever: how high it comes out, and how late."""

from __future__ import annotations

from dataclasses import dataclass
from math import inf, nan

from acsolve.analyses.question import Ask
from acsolve.analyses.sweep import sweep
from acsolve.circuit.netlist import Netlist


@dataclass(frozen=True, slots=True, kw_only=True)
class SteadySine:
    """The steady answer to a sine of amplitude 1 at one frequency, above 0 Hz.

    amplitude : |H|, in the response's unit.
    phase_deg : continuous from 0 Hz, as a sweep tells it.
    delay_s : -phase/omega, by which the sine comes out later: of a single pole
        atan(omega·tau)/omega, which is tau only far below its cutoff. An inverting network
        turns the sine over; that counts as half a period here.
    shift_s : the same within half a period either way, as two traces side by side show it.
    group_delay_s : -d(phase)/d(omega), by which a slow change of its amplitude comes out
        later: of a single pole tau/(1 + (omega·tau)²).

    What does not exist, at a zero or pole on the axis, is not a number.
    """

    hertz: float
    amplitude: float
    phase_deg: float
    delay_s: float
    shift_s: float
    group_delay_s: float


def steady_sine(netlist: Netlist, ask: Ask, hertz: float) -> SteadySine:
    """The steady answer to a sine, from the numeric engine.

    Raises
    ------
    EquationError
        as a sweep.
    """
    found = sweep(netlist, ask, [hertz])
    phase = float(found.phase_deg[0])
    turned = -((-phase + 180) % 360 - 180) if phase == phase else nan  # noqa: PLR0124
    gain = float(found.gain_db[0])
    return SteadySine(
        hertz=hertz,
        amplitude=float(abs(found.value[0])) if gain < inf else inf,
        phase_deg=phase,
        delay_s=float(found.phase_delay_s[0]),
        shift_s=-turned / 360 / hertz,
        group_delay_s=float(found.group_delay_s[0]),
    )
