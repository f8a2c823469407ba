"""Arrays of part values as callers give them, checked and brought to one shape."""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from math import prod
from typing import Any, TypeAlias

import numpy as np
from numpy.typing import NDArray

from acsolve.circuit.netlist import Netlist
from acsolve.codes import Code
from acsolve.errors import AnalysisError, Diagnostic

Array: TypeAlias = NDArray[Any]

_LARGEST = 1 << 32  # bytes
_COMPLEX, _REAL = 16, 8  # bytes of a number


@dataclass(frozen=True, slots=True, eq=False)
class Samples:
    """Values in SI units by name, all of shape (samples,), and the shape they came in."""

    shape: tuple[int, ...]
    values: Mapping[str, Array]


def samples_of(given: Any, netlist: Netlist, *, points: int) -> Samples:
    """Arrays of values by the names that they are for, broadcast among each other.

    Parameters
    ----------
    given : mapping from names of parts, attributes (`L1.quality`), couplings (`k(L1, L2)`)
        and quantities to real numbers in SI units, of any shapes that broadcast.
    netlist : the circuit.
    points : frequencies that each sample will be answered at.

    Raises
    ------
    AnalysisError
        [question.unknown-name] the circuit has no value of that name; [option.value] it is
        no mapping, or values are no real numbers, not finite or do not broadcast;
        [sweep.points] the answer would be too large.
    """
    if not isinstance(given, Mapping) or not given:
        raise _refuse(
            "option.value",
            "the values to vary are not given as a mapping from names to arrays",
            'Write, say, values={"R1": [1e3, 2e3, 5e3]}.',
        )
    known = _names(netlist)
    for name in given:
        if name not in known:
            raise _unknown(name, known)
    arrays = {name: _numbers(name, item) for name, item in given.items()}
    shape = _common_shape(arrays)
    _refuse_large(shape, points, len(arrays))
    return Samples(
        shape, {name: np.broadcast_to(item, shape).ravel() for name, item in arrays.items()}
    )


def _names(netlist: Netlist) -> set[str]:
    """Every name that can be varied: what has a value, and attributes left out so far."""
    known = {name for name, _ in netlist.values()}
    for part in netlist.parts:
        left_out = (item for item in part.definition.attributes if not (item.at or item.flag))
        known |= {part.value_name(item.name) for item in left_out}
    return known


def _unknown(name: Any, known: Iterable[str]) -> AnalysisError:
    near = get_close_matches(str(name), sorted(known), n=1)
    return _refuse(
        "question.unknown-name",
        f"there is nothing named {name} in this circuit",
        f"Did you mean {near[0]}?" if near else "Name a part, an attribute or a quantity.",
    )


def _numbers(name: str, given: Any) -> Array:
    try:
        raw = np.asarray(given)
    except ValueError:  # lists of different lengths
        raw = np.asarray(None)
    if raw.dtype.kind not in "iuf" or isinstance(given, np.ma.MaskedArray):
        raise _refuse(
            "option.value",
            f"the values of {name} are not real numbers",
            "Give numbers in SI units, as 4700 or 10e-9.",
        )
    found = raw.astype(float)
    if not np.all(np.isfinite(found)):
        raise _refuse(
            "option.value",
            f"{_count(found)} of {found.size:,} values of {name} are not finite",
            "Leave these samples out.",
        )
    return found


def _count(found: Array) -> str:
    return f"{int(np.count_nonzero(~np.isfinite(found))):,}"


def _common_shape(arrays: Mapping[str, Array]) -> tuple[int, ...]:
    try:
        return np.broadcast_shapes(*(item.shape for item in arrays.values()))
    except ValueError:
        listed = ", ".join(f"{name} {item.shape}" for name, item in arrays.items())
        raise _refuse(
            "option.value",
            f"the shapes of the values do not fit together: {listed}",
            "Give arrays of one shape, or of shapes that NumPy broadcasts.",
        ) from None


def _refuse_large(shape: tuple[int, ...], points: int, names: int) -> None:
    samples = prod(shape)
    needed = samples * (_COMPLEX * points + _REAL * names)
    limit = most_bytes()
    if needed > limit:
        raise _refuse(
            "sweep.points",
            f"{samples:,} samples at {points:,} frequencies take {needed / 1e9:.3g} GB, "
            f"and at most {limit / 1e9:.3g} GB are taken at once",
            "Ask for part of the samples or of the frequencies at a time.",
        )


def most_bytes() -> int:
    """The most that values and answer may take: 4 GiB, or half of the machine's memory."""
    try:
        memory = os.sysconf("SC_PAGE_SIZE") * os.sysconf("SC_PHYS_PAGES")
    except (AttributeError, ValueError, OSError):  # not told by this system
        return _LARGEST
    return min(_LARGEST, memory // 2)


def _refuse(code: Code, message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
