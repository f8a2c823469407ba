"""Matrices of two rows and two columns, by rows, over any ring: what two-ports multiply."""

from __future__ import annotations

from typing import Any, TypeAlias

Element: TypeAlias = Any  # a number, a vector of numbers or a ball
Matrix: TypeAlias = tuple[Element, Element, Element, Element]


def product(x: Matrix, y: Matrix) -> Matrix:
    """The product x·y."""
    a, b, c, d = x
    e, f, g, h = y
    return a * e + b * g, a * f + b * h, c * e + d * g, c * f + d * h


def total(first: Matrix, *others: Matrix) -> Matrix:
    """The sum of some matrices."""
    a, b, c, d = first
    for other in others:
        a, b, c, d = a + other[0], b + other[1], c + other[2], d + other[3]
    return a, b, c, d


def times(x: Matrix, factor: Element) -> Matrix:
    """A matrix times a number of the ring."""
    return x[0] * factor, x[1] * factor, x[2] * factor, x[3] * factor
