"""Conversion between sets of parameters: one plane of solutions, read in other quantities.

The port quantities of a network with n ports fill a space of dimension n. With the quantities
on the right of a set as its coordinates, every port quantity is a row of numbers:

    right = 1·right,  left = M·right,  hence V = K_V·right, I = K_I·right,

and the parameters of another set are L·K·(R·K)^-1, with its own left L and right R over V, I.
Only additions, products and one division: exact numbers (fractions, SymPy) stay exact.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from acsolve.ports.sets import SETS, SetName

Array = NDArray[Any]


def converted(
    matrix: ArrayLike,
    name: SetName,
    to: SetName,
    *,
    reference: ArrayLike | None = None,
    to_reference: ArrayLike | None = None,
) -> Array:
    """Parameters of one set as those of another.

    Parameters
    ----------
    matrix : shape (…, n, n), complex or exact objects; n is 2 for h, g and abcd.
    name, to : the sets.
    reference : reference resistance of each port (or one for all), for s parameters.
    to_reference : those of the result, the same if not given.

    Returns
    -------
    array, shape (…, n, n); not a number where the set does not exist.

    Examples
    --------
    >>> from fractions import Fraction
    >>> import numpy as np
    >>> shunt = np.array([[Fraction(1), Fraction(0)], [Fraction(1, 50), Fraction(1)]])
    >>> converted(shunt, "abcd", "z").tolist()
    [[Fraction(50, 1), Fraction(50, 1)], [Fraction(50, 1), Fraction(50, 1)]]
    """
    given = np.asarray(matrix)
    here = _resistances(reference, given.shape[-1])
    there = here if to_reference is None else _resistances(to_reference, given.shape[-1])
    if name == to and (name != "s" or here is there or _equal(here, there)):
        return given.copy()
    voltage, current = _solutions(given, name, here)
    left, right = _sides(voltage, current, to, there)
    return _divided(left, right)


def _resistances(reference: ArrayLike | None, ports: int) -> list[Any]:
    if reference is None:
        return []
    given = np.asarray(reference)
    return list(np.broadcast_to(given, (ports,)))


def _equal(first: list[Any], second: list[Any]) -> bool:
    return len(first) == len(second) and all(
        one == two for one, two in zip(first, second, strict=True)
    )


def _solutions(matrix: Array, name: SetName, reference: list[Any]) -> tuple[list[Any], list[Any]]:
    """Voltage and current of each port, as rows over the right side of a set."""
    ports = matrix.shape[-1]
    left = [matrix[..., place, :] for place in range(ports)]
    unit = np.zeros(matrix.shape, dtype=matrix.dtype)
    for place in range(ports):
        unit[..., place, place] = matrix.dtype.type(1) if matrix.dtype != object else 1
    right = [unit[..., place, :] for place in range(ports)]
    match name:
        case "z":
            return left, right
        case "y":
            return right, left
        case "s":
            waves = list(zip(right, left, _scales(reference), reference, strict=True))
            voltage = [(a + b) * scale / 2 for a, b, scale, _ in waves]
            current = [(a - b) * scale / 2 / ohm for a, b, scale, ohm in waves]
            return voltage, current
    known = dict(zip((*SETS[name][0], *SETS[name][1]), (*left, *right), strict=True))
    if "-I2" in known:
        known["I2"] = -known["-I2"]
    return [known["V1"], known["V2"]], [known["I1"], known["I2"]]


def _sides(
    voltage: list[Any], current: list[Any], name: SetName, reference: list[Any]
) -> tuple[Array, Array]:
    """The quantities on the left and on the right of a set."""
    match name:
        case "z":
            sides = voltage, current
        case "y":
            sides = current, voltage
        case "s":
            waves = list(zip(voltage, current, _scales(reference), reference, strict=True))
            sides = (
                [(v - i * ohm) / scale for v, i, scale, ohm in waves],
                [(v + i * ohm) / scale for v, i, scale, ohm in waves],
            )
        case _:
            known = {"V1": voltage[0], "V2": voltage[1], "I1": current[0], "I2": current[1]}
            known["-I2"] = -known["I2"]
            left, right = SETS[name]
            sides = [known[item] for item in left], [known[item] for item in right]
    return np.stack(sides[0], axis=-2), np.stack(sides[1], axis=-2)


def _scales(reference: list[Any]) -> list[Any]:
    """sqrt(R) of each port over that of the first; ones where all are equal, so exact."""
    assert reference, "waves need reference resistances"
    return [
        1 if ohm == reference[0] else np.sqrt(float(ohm) / float(reference[0])) for ohm in reference
    ]


def _divided(left: Array, right: Array) -> Array:
    """left · right^-1 for stacks of matrices, not a number where right is singular."""
    if left.dtype != object and left.shape[-1] > 2:
        return _solved(left, right)
    if left.shape[-1] == 1:
        return _quotient(left, right)
    a, b, c, d = (right[..., i, j] for i in (0, 1) for j in (0, 1))
    p, q, r, t = (left[..., i, j] for i in (0, 1) for j in (0, 1))
    with np.errstate(all="ignore"):  # infinite numbers make the result not a number
        size = a * d - b * c
        rows = [[p * d - q * c, q * a - p * b], [r * d - t * c, t * a - r * b]]
        return np.stack(
            [np.stack([_quotient(item, size) for item in row], axis=-1) for row in rows], axis=-2
        )


def _quotient(top: Any, bottom: Any) -> Array:
    top, bottom = np.asarray(top), np.asarray(bottom)
    if top.dtype == object:
        return np.asarray(top / bottom)
    with np.errstate(all="ignore"):
        found = top / bottom
    return np.where(bottom == 0, complex("nan"), found)


def _solved(left: Array, right: Array) -> Array:
    turned = np.swapaxes(right, -1, -2)
    found = np.full(left.shape, complex("nan"))
    for place in np.ndindex(left.shape[:-2]):
        try:
            found[place] = np.linalg.solve(turned[place], left[place].T).T
        except np.linalg.LinAlgError:
            continue  # the set does not exist there: it stays not a number
    return found
