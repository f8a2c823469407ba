"""Rows with elements of a two-port given by numbers: these bring an error of their own.

In a long row of copies they carry powers of two as well, and the terms of the equation are
then brought to one exponent after the products, not before.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from acsolve.algebra.scaled import Exponent, Scaled, aligned, normal, power_of_two
from acsolve.equations.numeric import Element, ElementEntry, Numbers


def element_places(numbers: Numbers) -> Mapping[int, ElementEntry]:
    """The places of the pattern that hold elements of two-ports."""
    elements = {
        which: entry
        for which, entry in enumerate(numbers.distinct)
        if isinstance(entry, ElementEntry)
    }
    if not elements:
        return {}
    return {
        place: elements[which] for place, which in enumerate(numbers.which) if which in elements
    }


def scaled_row(
    entries: Sequence[Element],
    slopes: Sequence[Element | None],
    unknowns: Sequence[Scaled],
    roughness: Sequence[Element],
    round_off: float,
) -> tuple[Element, Element, Element, Exponent]:
    """Residual, its round-off scale and (dA/ds)·x of one row, and the exponent they share.

    Parameters
    ----------
    entries, slopes, unknowns : of the row, place by place; never of the last row.
    roughness : relative error of each entry beyond round-off.
    round_off : of an entry and one product, relative.
    """
    terms = [
        normal((term := unknown * entry).mantissa, term.exponent)
        for unknown, entry in zip(unknowns, entries, strict=True)
    ]
    mantissas, exponent = aligned(terms)
    residual = sum(mantissas[1:], mantissas[0])
    scale = sum(
        abs(term) * (round_off + rough) for term, rough in zip(mantissas, roughness, strict=True)
    )
    slope: Element = 0.0
    for unknown, rate in zip(unknowns, slopes, strict=True):
        if rate is not None:
            moved = unknown * rate
            slope = slope + moved.mantissa * power_of_two(moved.exponent - exponent)
    return residual, scale, slope, exponent
