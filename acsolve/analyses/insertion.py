"""What a two-port does between a stated source and a stated load.

With V the load's voltage behind the network, V0 the one with source and load connected
directly, and R the resistances of source and load:

    insertion loss     = -20·log10|V/V0| dB     (IEC 60050-702: power without over power with)
    insertion gain     = -(insertion loss)
    transducer gain    = power into the load / power available from the source = |s21|²
    power gain         = power into the load / power into the network = |s21|²/(1 - |s11|²)
    available gain     = power available behind the network / available before it
                       = |s21|²/(1 - |s22|²)

s parameters here have the source and the load as references, and V/V0 is
s21·(Rs + RL)/(2·sqrt(Rs·RL)); with equal resistances insertion gain and transducer gain are one.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.port_ask import PortAsk, References, without_port_sources
from acsolve.analyses.port_sweep import PortSweep, port_sweep
from acsolve.analyses.sweep import frozen
from acsolve.analyses.two_port import check_pairs, form_of, plane_of
from acsolve.circuit.expression import ONE, add, divide, multiply
from acsolve.circuit.netlist import Netlist, Pair
from acsolve.equations.exact import Symbols
from acsolve.equations.plane import I1, I2, V1, V2
from acsolve.errors import EquationError

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, eq=False)
class Insertion:
    """Losses and gains over frequency, in dB; arrays of the shape of `hertz`, read-only.

    ratio : V/V0, complex.
    power_gain_db, available_gain_db : not a number where no power enters (or can leave).
    """

    hertz: Array
    ratio: Array
    insertion_loss_db: Array
    insertion_gain_db: Array
    transducer_gain_db: Array
    power_gain_db: Array
    available_gain_db: Array


def insertion_ask(first: Pair, second: Pair, ends: References) -> PortAsk:
    """The question for V/V0: `ends` are the resistances of source and load."""
    source, load = ends
    share = divide(load, add(source, load))
    return PortAsk(
        source=first,
        target=second,
        quantity="two-port",
        observes=((V2, ONE),),
        drives=((V1, share), (I1, multiply(share, source))),
        held=((V2, ONE), (I2, load)),
    )


def insertion_form(
    netlist: Netlist, first: Pair, second: Pair, ends: References, symbols: Symbols
) -> ClosedForm:
    """V/V0 in closed form, checked.

    Raises
    ------
    EquationError
        [equations.undriven] it is infinite at every frequency; and as `plane_of`.
    """
    check_pairs(first, second)
    cleared = without_port_sources(netlist, first, second)
    ask = insertion_ask(first, second, ends)
    factors = [factor for part in (ask.drives, ask.held) for _, factor in part]
    found = plane_of(cleared, symbols, first, second, factors=factors)
    form = form_of(cleared, symbols, found, ask)
    if form is None:
        raise _undriven()
    return form


def insertion(
    netlist: Netlist, first: Pair, second: Pair, ends: References, hertz: Array
) -> Insertion:
    """Losses and gains over frequency, from the s parameters between source and load."""
    found = port_sweep(netlist, first, second, hertz, references=ends, sets=("s",))
    return insertion_of(found)


def insertion_of(found: PortSweep) -> Insertion:
    """The same from s parameters whose references are source and load."""
    matrix, ends = found.matrices["s"], found.reference
    if matrix is None or ends is None:
        raise _undriven()
    through = matrix[:, 1, 0]
    transducer = _decibels(np.abs(through) ** 2)
    ratio = through * (sum(ends) / (2 * np.sqrt(ends[0] * ends[1])))
    gain = _decibels(np.abs(ratio) ** 2)
    return Insertion(
        found.hertz,
        *map(
            frozen,
            (
                ratio,
                -gain,
                gain,
                transducer,
                transducer - _decibels(1 - np.abs(matrix[:, 0, 0]) ** 2),
                transducer - _decibels(1 - np.abs(matrix[:, 1, 1]) ** 2),
            ),
        ),
    )


def _decibels(power: Array) -> Array:
    with np.errstate(divide="ignore", invalid="ignore"):  # of nothing, or of less than nothing
        return np.asarray(10 * np.log10(power))


def _undriven() -> EquationError:
    from acsolve.errors import Diagnostic

    return EquationError(
        Diagnostic(
            code="equations.undriven",
            message="between this source and load the network has no finite answer",
            hint="Look for a network that cancels the source's resistance.",
        )
    )
