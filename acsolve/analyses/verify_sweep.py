"""Proof of a sweep's accuracy: its numbers against balls that hold the exact response.

A sweep estimates its error at every point. Here chosen points are solved again in ball
arithmetic, and what comes out is no estimate: an upper bound of the distance between the
number that was reported and the exact response of the exact values at the exact double that
the frequency is. A point where the balls can tell nothing is said to be unproven.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from math import degrees, inf, isfinite, log, nextafter, pi, radians
from typing import TYPE_CHECKING, Any, Literal

import numpy as np

from acsolve.algebra.ball import precision
from acsolve.analyses.proof import Proof, Unproven, Verification
from acsolve.analyses.question import Ask
from acsolve.circuit.netlist import Netlist, Part
from acsolve.equations.enclosure import Enclosed, Enclosure
from acsolve.equations.numeric import ball_values
from acsolve.equations.result import Status

if TYPE_CHECKING:
    from acsolve.analyses.sweep import Sweep

Points = int | Literal["all"] | None

_EPS = 2.0**-52
_ROUNDING = 4 * _EPS  # of a value beside what its error estimate speaks of
_DELAY = 1e-6  # the group delay is off where it errs by more, against |H'/H| or 1/omega
_NO_DELAY = 1e-30  # seconds that mean nothing in any circuit
_NORMAL = 2.0**1000  # values beyond, and below its inverse, are told by gain and phase alone
_HANDFUL = 7
_ENOUGH_BITS = 60  # of a ball that may prove something
_NEPER_DB = 20 / log(10)


def verify_sweep(netlist: Netlist, ask: Ask, found: Sweep, points: Points = None) -> Verification:
    """Prove the accuracy of chosen points of a sweep.

    Parameters
    ----------
    netlist, ask : the circuit and the question that `found` answers.
    points : how many; "all"; None takes a handful: both ends, the middle, the two of the
        largest estimated error, the highest and the lowest gain.

    Notes
    -----
    Up to 60 unknowns a point takes some 0.1 s at most (a dense solution); beyond, an RC
    ladder of 100,000 sections takes 2 s a point (8 s in deep attenuation, in discs) and 20 s
    once, for equations and order.
    """
    enclosure = enclosure_of(netlist, ask)
    proofs, unproven = [], []
    for place in chosen(found, points):
        item = _judged(enclosure, found, place)
        if isinstance(item, Proof):
            proofs.append(item)
        else:
            unproven.append(item)
    return Verification(proofs=tuple(proofs), unproven=tuple(unproven))


def chosen(found: Sweep, points: Points = None) -> list[int]:
    """Places of the points to prove in the flattened arrays of a sweep, by frequency."""
    hertz, first = np.unique(found.hertz.ravel(), return_index=True)
    if points == "all":
        return list(map(int, first))
    most = min(len(hertz), _HANDFUL if points is None else points)
    error, gain = found.error.ravel()[first], found.gain_db.ravel()[first]
    places: dict[int, None] = dict.fromkeys(_telling(error, gain))
    for k in range(most):
        places.setdefault(round(k * (len(hertz) - 1) / max(most - 1, 1)))
    return [int(first[place]) for place in sorted(list(places)[:most])]


def _telling(error: Any, gain: Any) -> Iterable[int]:
    """The points that say most, the most telling one first."""
    if not len(error):
        return []
    worst = np.argsort(np.where(np.isfinite(error), -error, -inf), kind="stable")
    known = np.where(np.isfinite(gain), gain, np.nan)
    extremes = [] if np.isnan(known).all() else [int(np.nanargmax(known)), int(np.nanargmin(known))]
    last = len(error) - 1
    return [int(worst[0]), 0, last, last // 2, *extremes, *map(int, worst[1:2])]


def enclosure_of(netlist: Netlist, ask: Ask) -> Enclosure:
    """The question prepared for balls; only resistors of exactly zero take a branch current."""
    with precision(128):
        evaluate = ball_values(netlist)
        is_zero = {
            part.name: bool(evaluate.name(part.value_name("value")).contains(0))
            for part in netlist.parts
            if part.kind == "resistor"
        }

    def branch_for(part: Part) -> bool:
        return is_zero.get(part.name, False)

    system = ask.system(netlist, branch_for=branch_for)
    return Enclosure(
        system=system,
        observed=ask.observed(system),
        driven=ask.driven(system),
        evaluate=lambda: ball_values(netlist),
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _Reported:
    """One point as the sweep reports it."""

    hertz: float
    value: complex
    gain_db: float
    phase_deg: float
    delay_s: float
    status: Status
    claimed: float


def _judged(enclosure: Enclosure, found: Sweep, place: int) -> Proof | Unproven:
    point = _Reported(
        hertz=float(found.hertz.flat[place]),
        value=complex(found.value.flat[place]),
        gain_db=float(found.gain_db.flat[place]),
        phase_deg=float(found.phase_deg.flat[place]),
        delay_s=float(found.group_delay_s.flat[place]),
        status=Status(int(found.status.flat[place])),
        claimed=float(found.error.flat[place]),
    )
    if point.status == Status.UNDEFINED:
        return Unproven(hertz=point.hertz, reason="the sweep has no answer there")
    truth = enclosure.at(point.hertz)
    if truth is None:
        return Unproven(hertz=point.hertz, reason=_SINGULAR.get(point.status, _UNTOLD))
    if truth.slope is not None and truth.value.rel_accuracy_bits() < _ENOUGH_BITS:
        return Unproven(hertz=point.hertz, reason=_too_wide(point, truth))
    with precision(max(truth.bits, 128)):
        return _proof(point, truth)


_UNTOLD = "balls cannot tell the equations there from singular ones"
_SINGULAR = {
    Status.LIMIT: "the equations are singular there, and the answer is a limit",
    Status.POLE: "the equations are singular there, and the answer is infinite",
}


def _too_wide(point: _Reported, truth: Enclosed) -> str:
    if point.status == Status.ZERO and truth.value.contains(0):
        return f"zero, for all that {truth.bits} bits can tell"
    return f"{truth.bits} bits leave too wide a ball"


def _proof(point: _Reported, truth: Enclosed) -> Proof | Unproven:
    """The errors of one point, and which of them are too large."""
    if truth.slope is None or point.status in (Status.ZERO, Status.POLE):
        return _extreme(point, truth)
    told = _told(point)
    if told is None:
        return Unproven(hertz=point.hertz, reason="beyond a double's range, and no phase is told")
    value = abs(told / truth.value - 1)
    gain, phase, delay = _gain_error(point, truth), _phase_error(point, truth), None
    if isfinite(point.delay_s) and truth.slope.is_finite():
        delay = abs(truth.slope.real + _exact(point.delay_s))
    allowed = point.claimed + _ROUNDING
    told_db, told_rad = 4 * _EPS * abs(point.gain_db), 4 * _EPS * abs(radians(point.phase_deg))
    inside = _is_inside(point.value)
    scale = max(float(truth.slope.abs_upper()), 1 / (2 * pi * point.hertz) if point.hertz else 0)
    limits = {
        "value": (value, allowed if inside else allowed + told_db / _NEPER_DB + told_rad),
        "gain": (gain, _NEPER_DB * allowed + told_db),
        "phase": (phase, degrees(allowed + told_rad)),
        "group delay": (delay, max(_DELAY * scale, _NO_DELAY)),
    }
    return Proof(
        hertz=point.hertz,
        relative_error=_upper(value) or 0.0,
        gain_error_db=_upper(gain),
        phase_error_deg=_upper(phase),
        group_delay_error_s=_upper(delay),
        claimed=point.claimed,
        bits=truth.bits,
        wrong=tuple(
            name
            for name, (error, most) in limits.items()
            if error is not None and float(error.abs_lower()) > most
        ),
    )


def _extreme(point: _Reported, truth: Enclosed) -> Proof:
    """A zero or an infinity, reported or proven: right where both say so."""
    right = truth.slope is None and point.status == Status.ZERO
    return Proof(
        hertz=point.hertz,
        relative_error=0.0 if right else 1.0 if point.status == Status.ZERO else inf,
        gain_error_db=None,
        phase_error_deg=None,
        group_delay_error_s=None,
        claimed=point.claimed,
        bits=truth.bits,
        wrong=() if right else ("value",),
    )


def _is_inside(value: complex) -> bool:
    return 1 / _NORMAL < abs(value) < _NORMAL


def _told(point: _Reported) -> Any | None:
    """The response as reported: the value, or what gain and phase tell beyond its range."""
    from flint import acb, arb

    if _is_inside(point.value):
        return acb(point.value.real, point.value.imag)
    if not (isfinite(point.gain_db) and isfinite(point.phase_deg)):
        return None
    size = (_exact(point.gain_db) * arb(10).log() / 20).exp()
    return size * (acb(0, _exact(point.phase_deg)) / 180 * arb.pi()).exp()


def _gain_error(point: _Reported, truth: Enclosed) -> Any | None:
    from flint import arb

    if not isfinite(point.gain_db):
        return None
    return _exact(point.gain_db) - 20 * abs(truth.value).log() / arb(10).log()


def _phase_error(point: _Reported, truth: Enclosed) -> Any | None:
    """In degrees, but for whole turns: the angle that is left when the phase is turned back."""
    from flint import acb, arb

    if not isfinite(point.phase_deg):
        return None
    turned_back = (acb(0, -_exact(point.phase_deg)) / 180 * arb.pi()).exp()
    return 180 * (truth.value * turned_back).arg() / arb.pi()


def _exact(number: float) -> Any:
    from flint import arb

    return arb(number)


def _upper(error: Any | None) -> float | None:
    """The next double above what a ball reaches."""
    return None if error is None else nextafter(float(error.abs_upper()), inf)
