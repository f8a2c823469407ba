"""Poles, zeros and natural modes as a person reads them."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import groupby

from acsolve.report.number import engineering, hertz, plain


def root_words(roots: Iterable[complex]) -> list[str]:
    """Each root once, a conjugate pair as one, with its frequency and quality factor."""
    words = []
    upper = [root for root in roots if root.imag >= 0]
    for root, same in groupby(upper):
        count = sum(1 for _ in same)
        times = "" if count == 1 else f", {count} times"
        words.append(root_text(root) + times)
    return words


def root_text(root: complex) -> str:
    """A root, or the pair it belongs to, with its frequency and quality factor."""
    size = abs(root)
    if size == 0:
        return "0"
    frequency = engineering(hertz(size), "Hz")
    if root.imag == 0:
        return f"{plain(root.real)} rad/s  ({frequency})"
    real = plain(root.real) if root.real else "0"
    quality = "" if root.real == 0 else f", Q = {plain(size / (-2 * root.real))}"
    return f"{real} +- j{plain(root.imag)} rad/s  ({frequency}{quality})"
