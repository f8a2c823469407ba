"""A closed form of a large network against the numeric engine, at a few frequencies."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction
from math import inf

import numpy as np
from numpy.typing import NDArray

from acsolve.analyses.question import Ask
from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import Netlist, with_values
from acsolve.circuit.value import Value


def engine_difference(
    netlist: Netlist,
    ask: Ask,
    hertz: NDArray[np.float64],
    values: Mapping[str, float],
    here: NDArray[np.complex128],
) -> float:
    """The largest relative difference between an answer and the numeric engine's.

    Parameters
    ----------
    hertz : shape (n,), the frequencies of `here`.
    values : numbers for the free symbols, those of `here`.
    here : shape (n,), the answer to be checked.

    Returns
    -------
    float : infinite where the engine's answer is beyond a double's range.
    """
    from acsolve.analyses.sweep import response

    numbers = {name: Value(expression=Number(Fraction(number))) for name, number in values.items()}
    there = response(with_values(netlist, numbers), ask, hertz)
    if not np.all(there):
        return inf if np.any(here) else 0.0
    return float(np.max(np.abs(here - there) / np.abs(there)))
