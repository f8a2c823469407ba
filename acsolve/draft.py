"""Circuits built in code, in the words of the text format: chains, named kinds, values."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from typing import TYPE_CHECKING, Any

from acsolve.given import exact, refuse, values_of

if TYPE_CHECKING:
    from acsolve.door import Circuit

ValueLike = str | int | float | Fraction


@dataclass(frozen=True, slots=True)
class Draft:
    """A circuit being written down; each method returns a longer draft.

    Values are texts of the format or finite numbers in SI units; every item stays on its
    line. What is neither is refused at once with [option.value].

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

    def __post_init__(self) -> None:
        """Refuse a title that is no text of one line."""
        if self.title is not None:
            _line(self.title, "a title")

    def chain(self, *items: str) -> Draft:
        """Nodes and arms in turn, as a chain of the text format: node, arm, node, …"""
        if not items:
            raise refuse(
                "option.value", "a chain has no items", 'Give nodes and arms: "in", "R1", "out".'
            )
        return self._with(" -- ".join(_line(item, "an item of a chain") for item in items))

    def part(self, name: str, kind: str, /, **settings: ValueLike) -> Draft:
        """A part of a named kind with its terminals and attributes."""
        inside = ", ".join(f"{key} = {_text(value)}" for key, value in settings.items())
        return self._with(f"{_line(name, 'a name')} : {_line(kind, 'a kind')}({inside})")

    def values(self, values: Mapping[str, ValueLike] | None = None, /, **named: ValueLike) -> Draft:
        """Values of parts, as texts of the format or numbers in SI units."""
        given = values_of(values, named)
        lines = tuple(f"{name} = {_text(value)}" for name, value in given.items())
        return Draft(self.title, self.lines + lines)

    def quantity(self, name: str, value: ValueLike | None = None) -> Draft:
        """A named quantity, or a declared symbol where no value is given."""
        _line(name, "a name")
        return self._with(f"let {name}" if value is None else f"let {name} = {_text(value)}")

    def couple(self, *inductors: str, coefficient: ValueLike) -> Draft:
        """Couple inductors, every pair of them."""
        names = ", ".join(_line(item, "a name") for item in inductors)
        return self._with(f"couple {names} = {_text(coefficient)}")

    def statement(self, line: str) -> Draft:
        """Any line of the text format."""
        return self._with(line)

    def _with(self, line: str) -> Draft:
        return Draft(self.title, (*self.lines, _line(line, "a line")))

    def text(self) -> str:
        """The draft in the text format."""
        from acsolve.text.write import text_literal

        head = () if self.title is None else (f"title {text_literal(self.title)}",)
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


def _text(value: Any) -> str:
    """A number as an exact decimal or quotient of the format; a text as it stands."""
    if isinstance(value, str):
        return _line(value, "a value")
    number = exact(value)
    if number.denominator == 1:
        return str(number)
    return f"({number.numerator}/{number.denominator})"


def _line(item: Any, what: str) -> str:
    """The item, where it is a text that stays on its line."""
    if not isinstance(item, str):
        raise refuse("option.value", f"{what} is a text, got {item!r}", "Write it as a text.")
    if len(item.splitlines()) > 1 or item.endswith(("\n", "\r")):
        raise refuse(
            "option.value",
            f"{what} stands on one line, got {item!r}",
            "Leave the line break out; each line is a statement of its own.",
        )
    return item
