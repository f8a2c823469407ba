"""Two fields for the dense reference: residues modulo a prime, and complex numbers at 50 digits.

A rational identity that holds at a random residue holds everywhere but for a chance of
about one in 10^17, so the residues prove closed forms exactly. The prime is chosen so
that every prime up to 47 has a square root; the root of a product is the product of the
roots, as for positive numbers.
"""

from __future__ import annotations

import zlib
from fractions import Fraction
from functools import cache
from typing import Any, Protocol

import mpmath

_ROOTED = (2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47)


class Field(Protocol):
    """The arithmetic that the reference and the evaluation of closed forms need."""

    def number(self, value: Fraction) -> Any:
        """A rational number."""

    def root(self, value: Fraction) -> Any:
        """The square root of a positive rational number."""

    def symbol(self, name: str) -> Any:
        """The value drawn for a free symbol."""

    def symbol_root(self, name: str) -> Any:
        """Its square root."""

    def pi(self) -> Any:
        """The circle constant, or a residue in its place."""

    def is_zero(self, value: Any) -> bool:
        """Whether a value is zero."""


def _is_prime(number: int) -> bool:
    """Miller and Rabin's test; these bases decide every number below 3.3e24."""
    odd, twos = number - 1, 0
    while odd % 2 == 0:
        odd, twos = odd // 2, twos + 1
    for base in _ROOTED[:13]:
        power = pow(base, odd, number)
        if power in (1, number - 1):
            continue
        for _ in range(twos - 1):
            power = power * power % number
            if power == number - 1:
                break
        else:
            return False
    return True


def _draw(text: str) -> int:
    """A whole number below 2^62 that depends on a text alone."""
    return zlib.crc32(text.encode()) << 30 ^ zlib.crc32(text[::-1].encode() + b"+")


@cache
def _modulus() -> int:
    """The largest prime below 2^61 - 1 that is 3 modulo 4 and of which every small prime is a square."""
    candidate = (1 << 61) - 1
    while True:
        candidate -= 4  # stays 3 modulo 4: the root of a square x is x^((p+1)/4)
        squares = all(pow(prime, (candidate - 1) // 2, candidate) == 1 for prime in _ROOTED)
        if squares and _is_prime(candidate):
            return candidate


class Residue:
    """A whole number modulo the prime."""

    __slots__ = ("value",)

    def __init__(self, value: int) -> None:
        self.value = value % _modulus()

    def __add__(self, other: Residue) -> Residue:
        return Residue(self.value + other.value)

    def __sub__(self, other: Residue) -> Residue:
        return Residue(self.value - other.value)

    def __mul__(self, other: Residue) -> Residue:
        return Residue(self.value * other.value)

    def __truediv__(self, other: Residue) -> Residue:
        return Residue(self.value * pow(other.value, -1, _modulus()))

    def __pow__(self, exponent: int) -> Residue:
        return Residue(pow(self.value, exponent, _modulus()))

    def __neg__(self) -> Residue:
        return Residue(-self.value)

    def __eq__(self, other: object) -> bool:
        return isinstance(other, Residue) and self.value == other.value

    def __hash__(self) -> int:
        return hash(self.value)

    def __repr__(self) -> str:
        return f"Residue({self.value})"


class Residues:
    """Whole numbers modulo a prime; symbols are squares, drawn from their names and a seed."""

    def __init__(self, seed: int = 0) -> None:
        self.seed = seed

    def number(self, value: Fraction) -> Residue:
        """A rational number as a residue."""
        return Residue(value.numerator) / Residue(value.denominator)

    def root(self, value: Fraction) -> Residue:
        """The product of the roots of the prime factors."""
        top, bottom = (self._whole_root(item) for item in (value.numerator, value.denominator))
        return top / bottom

    def _whole_root(self, value: int) -> Residue:
        assert value > 0, "a root of a number that is not positive"
        found = Residue(1)
        for prime in _ROOTED:
            while value % prime == 0:
                value //= prime
                found = found * Residue(pow(prime, (_modulus() + 1) // 4, _modulus()))
        assert value == 1, "a prime above 47 has no root here"
        return found

    def symbol(self, name: str) -> Residue:
        """A square."""
        return self.symbol_root(name) ** 2

    def symbol_root(self, name: str) -> Residue:
        """A residue that depends on the name and the seed."""
        return Residue(_draw(f"{name}/{self.seed}"))

    def pi(self) -> Residue:
        """A residue: nothing rational is equal to pi."""
        return Residue(_draw(f"circle/{self.seed}"))

    def is_zero(self, value: Residue) -> bool:
        """Whether a residue is zero."""
        return value.value == 0


class Digits:
    """Complex numbers of mpmath at 50 digits; symbols are positive, near one."""

    def __init__(self, seed: int = 0) -> None:
        self.seed = seed
        self.context = mpmath.MPContext()
        self.context.dps = 50

    def number(self, value: Fraction) -> Any:
        """A rational number to 50 digits."""
        return self.context.mpf(value.numerator) / value.denominator

    def root(self, value: Fraction) -> Any:
        """The principal square root."""
        return self.context.sqrt(self.number(value))

    def symbol(self, name: str) -> Any:
        """A number between 1/2 and 2."""
        return self.number(Fraction(_draw(f"{name}/{self.seed}") % 3000 + 1000, 2000))

    def symbol_root(self, name: str) -> Any:
        """Its square root."""
        return self.context.sqrt(self.symbol(name))

    def pi(self) -> Any:
        """The circle constant."""
        return +self.context.pi

    def is_zero(self, value: Any) -> bool:
        """Whether a number is zero but for rounding, among numbers near one."""
        return bool(abs(value) < self.context.mpf(10) ** -32)
