"""Complex balls of python-flint: numbers that carry their own error."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from math import inf, isnan
from typing import Any


@contextmanager
def precision(bits: int) -> Iterator[None]:
    """Work with this many bits; the library's setting is put back afterwards."""
    from flint import ctx

    before = ctx.prec
    ctx.prec = bits
    try:
        yield
    finally:
        ctx.prec = before


def relative_difference(first: Any, second: Any) -> float:
    """An upper bound of |first - second| / |second| that holds for the balls as a whole.

    Infinite where the balls are too wide to tell; zero for two balls around zero narrower
    than what a double can express.
    """
    size = second.abs_lower()
    gap = (first - second).abs_upper()
    if size > 0:
        bound = float(gap / size)
        return inf if isnan(bound) else bound
    return 0.0 if gap < 1e-40 else inf


def working_bits() -> int:
    """The precision of the moment."""
    from flint import ctx

    return int(ctx.prec)
