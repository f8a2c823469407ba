"""Written formulas put together from pieces that know how tightly they bind.

A phrase keeps its sign apart and brackets itself only where the surroundings ask for it, so
no text is ever searched for signs to find out where brackets belong.
"""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace
from enum import IntEnum
from fractions import Fraction


class Level(IntEnum):
    """How tightly a text binds, from a bare sum to a single word."""

    SUM = 0
    PRODUCT = 1
    POWER = 2
    WORD = 3


@dataclass(frozen=True, slots=True)
class Phrase:
    """A formula as text without its sign; of a sum `negative` turns all of it round."""

    text: str
    level: Level = Level.WORD
    negative: bool = False

    def __str__(self) -> str:
        if not self.negative:
            return self.text
        return f"-({self.text})" if self.level == Level.SUM else f"-{self.text}"

    def __neg__(self) -> Phrase:
        return replace(self, negative=not self.negative)

    @property
    def is_one(self) -> bool:
        """Whether it is exactly 1."""
        return self.text == "1" and not self.negative

    @property
    def is_zero(self) -> bool:
        """Whether it is exactly 0."""
        return self.text == "0"

    def within(self, level: Level) -> str:
        """The text without sign, in brackets where it binds less tightly than asked."""
        return self.text if self.level >= level else f"({self.text})"


ONE = Phrase("1")
ZERO = Phrase("0")


def written(text: str) -> Phrase:
    """A phrase from a text written elsewhere; its level is read off outside its brackets."""
    negative = text.startswith("-")
    body = text[1:] if negative else text
    depth, level = 0, Level.WORD
    for place, sign in enumerate(body):
        depth += (sign == "(") - (sign == ")")
        if depth:
            continue
        if sign == " ":
            level = Level.SUM
        elif sign == "^" or body[place : place + 2] == "**" or body[place - 1 : place + 1] == "**":
            level = min(level, Level.POWER)
        elif sign in "*/":
            level = min(level, Level.PRODUCT)
    if negative and level == Level.SUM:
        return Phrase(f"-{body}", Level.SUM)
    return Phrase(body, level, negative)


def fraction(value: Fraction | int) -> Phrase:
    """A rational number."""
    size = abs(Fraction(value))
    level = Level.WORD if size.denominator == 1 else Level.PRODUCT
    return Phrase(str(size), level, value < 0)


def total(phrases: Iterable[Phrase]) -> Phrase:
    """A sum; the first positive term leads, and a sum of negatives is turned round."""
    items = [item for item in phrases if not item.is_zero]
    if not items:
        return ZERO
    if all(item.negative for item in items):
        return -total([-item for item in items])
    lead = next(place for place, item in enumerate(items) if not item.negative)
    items.insert(0, items.pop(lead))
    if len(items) == 1:
        return items[0]
    text = items[0].text
    for item in items[1:]:
        text += f" - {item.within(Level.PRODUCT)}" if item.negative else f" + {item.text}"
    return Phrase(text, Level.SUM)


def product(top: Sequence[Phrase], bottom: Sequence[Phrase] = ()) -> Phrase:
    """A product over a product; factors of 1 are left out."""
    negative = sum(item.negative for item in (*top, *bottom)) % 2 == 1
    above = [item for item in top if item.text != "1"]
    below = [item for item in bottom if item.text != "1"]
    if any(item.is_zero for item in above):
        return ZERO
    if len(above) <= 1 and not below:
        return replace(above[0], negative=negative) if above else replace(ONE, negative=negative)
    text = "*".join(item.within(Level.PRODUCT) for item in above) or "1"
    if below:
        divisor = "*".join(item.within(Level.PRODUCT) for item in below)
        bare = len(below) == 1 and below[0].level in (Level.SUM, Level.POWER, Level.WORD)
        text += f"/{divisor}" if bare else f"/({divisor})"
    return Phrase(text, Level.PRODUCT, negative)


def power(base: Phrase, exponent: int, sign: str) -> Phrase:
    """A whole power; `sign` is how powers are spelled."""
    if exponent == 1 or base.text in ("0", "1"):
        return base if exponent % 2 else replace(base, negative=False)
    text = f"{base.within(Level.WORD)}{sign}{exponent}"
    return Phrase(text, Level.POWER, base.negative and exponent % 2 == 1)


def call(name: str, *arguments: Phrase) -> Phrase:
    """A function of some arguments."""
    return Phrase(f"{name}({', '.join(str(item) for item in arguments)})")


def root(inside: Phrase) -> Phrase:
    """A square root; of 1 it is 1."""
    return ONE if inside.is_one else call("sqrt", inside)


def between(sign: str, phrases: Iterable[Phrase]) -> Phrase:
    """Phrases joined by a sign of the trade (parts in parallel), in brackets of its own."""
    return Phrase(f"({f' {sign} '.join(item.within(Level.PRODUCT) for item in phrases)})")
