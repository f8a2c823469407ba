"""Circuits built in code, in the words of the text format: chains, named kinds, values."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from acsolve.door import Circuit

ValueLike = str | int | float | Fraction


@dataclass(frozen=True, slots=True)
class Draft:
    """A circuit being written down; each method returns a longer draft.

    Examples
    --------
    >>> import acsolve
    >>> circuit = (
    ...     acsolve.Draft("level filter")
    ...     .chain("in", "R1", "out")
    ...     .chain("out", "C1", "gnd")
    ...     .values(R1="4k7", C1="10 nF")
    ...     .circuit()
    ... )
    >>> circuit.parts
    ('R1', 'C1')
    """

    title: str | None = None
    lines: tuple[str, ...] = ()

    def chain(self, *items: str) -> Draft:
        """Nodes and arms in turn, as a chain of the text format: node, arm, node, …"""
        return self._with(" -- ".join(items))

    def part(self, name: str, kind: str, /, **settings: ValueLike) -> Draft:
        """A part of a named kind with its terminals and attributes."""
        inside = ", ".join(f"{key} = {_text(value)}" for key, value in settings.items())
        return self._with(f"{name} : {kind}({inside})")

    def values(self, values: Mapping[str, ValueLike] | None = None, /, **named: ValueLike) -> Draft:
        """Values of parts, as texts of the format or numbers in SI units."""
        given = {**(values or {}), **named}
        lines = tuple(f"{name} = {_text(value)}" for name, value in given.items())
        return Draft(self.title, self.lines + lines)

    def quantity(self, name: str, value: ValueLike | None = None) -> Draft:
        """A named quantity, or a declared symbol where no value is given."""
        return self._with(f"let {name}" if value is None else f"let {name} = {_text(value)}")

    def couple(self, *inductors: str, coefficient: ValueLike) -> Draft:
        """Couple inductors, every pair of them."""
        return self._with(f"couple {', '.join(inductors)} = {_text(coefficient)}")

    def statement(self, line: str) -> Draft:
        """Any line of the text format."""
        return self._with(line)

    def _with(self, line: str) -> Draft:
        return Draft(self.title, (*self.lines, line))

    def text(self) -> str:
        """The draft in the text format."""
        head = () if self.title is None else (f'title "{self.title}"',)
        return "\n".join((*head, *self.lines)) + "\n"

    def circuit(self) -> Circuit:
        """The circuit, checked as a file would be.

        Raises
        ------
        TextError, CircuitError
            with every problem found.
        """
        from acsolve.door import parse

        return parse(self.text(), name=self.title or "draft")


def _text(value: ValueLike) -> str:
    """A number as an exact decimal or quotient of the format; a text as it stands."""
    if isinstance(value, str):
        return value
    exact = Fraction(value) if not isinstance(value, float) else Fraction(repr(value))
    return f"({exact.numerator}/{exact.denominator})" if exact.denominator != 1 else str(exact)
