"""Complex discs: a midpoint and a radius, for long chains of products.

The complex balls of python-flint are rectangles, and a product turns a rectangle, so that its
new sides hold more than it did: up to half a bit is lost in every factor (R. E. Moore,
"Interval Analysis", 1966, calls this wrapping). A disc that is turned stays a disc; over
100,000 factors its relative radius grows by their number alone.
"""

from __future__ import annotations

from typing import Any


class Disc:
    """All complex numbers within `radius` of `middle`; arithmetic rounds outwards.

    `middle` is an exact ball, `radius` a real ball, of which the upper end counts.
    """

    __slots__ = ("_size", "middle", "radius")

    def __init__(self, ball: Any, radius: Any = 0) -> None:
        self.middle = ball.mid()
        self.radius = radius + ball.rad()
        self._size: Any = None

    @property
    def size(self) -> Any:
        """|middle|, worked out when a product asks for it: a root is what costs most."""
        if self._size is None:
            self._size = abs(self.middle)
        return self._size

    def __neg__(self) -> Disc:
        return Disc(-self.middle, self.radius)

    def __add__(self, other: Disc) -> Disc:
        return Disc(self.middle + other.middle, self.radius + other.radius)

    def __sub__(self, other: Disc) -> Disc:
        return Disc(self.middle - other.middle, self.radius + other.radius)

    def __mul__(self, other: Disc) -> Disc:
        spread = self.size * other.radius + self.radius * (other.size + other.radius)
        return Disc(self.middle * other.middle, spread)

    def __rtruediv__(self, one: float) -> Disc:
        """1/disc: no farther from 1/middle than radius/(|middle|·(|middle| - radius))."""
        least = self.size - self.radius
        if not least > 0:
            return Disc(self.middle / 0)
        return Disc(one / self.middle, one * self.radius / (self.size * least))

    def ball(self) -> Any:
        """A rectangle around the disc."""
        from flint import acb, arb

        reach = arb(0, self.radius.abs_upper())
        return self.middle + acb(reach, reach)
