"""Elements of the matrix worked out when they are asked for: for an elimination that streams.

What does not depend on s, and which elements stand in several places, is found out once.
"""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable

from acsolve.equations.evaluate import Scalar
from acsolve.equations.numeric import Element, Numbers, PolynomialEntry


class Late:
    """The elements of a matrix by place, prepared for being asked one by one."""

    __slots__ = ("_constants", "_lines", "_numbers")

    def __init__(self, numbers: Numbers) -> None:
        self._numbers = numbers
        shared = Counter(numbers.which)
        constants: list[Scalar | None] = []
        lines: list[tuple[Scalar, Scalar] | None] = []
        for entry in numbers.distinct:
            parts = entry.coefficients if isinstance(entry, PolynomialEntry) else ()
            constants.append(parts[0] if len(parts) == 1 else None)
            lines.append((parts[0], parts[1]) if len(parts) == 2 else None)
        self._constants = [constants[which] for which in numbers.which]
        self._lines = [lines[which] if shared[which] == 1 else None for which in numbers.which]

    def at(self, s: Element) -> Callable[[int], Element]:
        """The element at a place and at s; those in several places are worked out once."""
        constants, lines = self._constants, self._lines
        numbers, known = self._numbers, dict[int, Element]()

        def element(place: int) -> Element:
            found = constants[place]
            if found is not None:
                return found
            line = lines[place]
            if line is None:
                which = numbers.which[place]
                if which not in known:
                    known[which] = numbers.distinct[which].at(s)
                return known[which]
            low, high = line  # written out: a long ladder asks a million times
            found = high * s
            if low:
                found += low
            return found

        return element
