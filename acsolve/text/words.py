"""Sentences that several messages share: nearest names, lists."""

from __future__ import annotations

from collections.abc import Iterable
from difflib import get_close_matches

_MOST_COMPARED = 2000  # names compared with a misspelt one; keeps a large file fast


def nearest(name: str, known: Iterable[str]) -> str | None:
    """The known name that looks most like the given one, None where none is near."""
    pool = []
    for number, item in enumerate(known):
        if number >= _MOST_COMPARED:
            break
        if abs(len(item) - len(name)) <= 3:
            pool.append(item)
    folded = [item for item in pool if item.casefold() == name.casefold()]
    found = folded or get_close_matches(name, pool, 1, 0.6)
    return found[0] if found else None


def meant(name: str, known: Iterable[str], otherwise: str | None = None) -> str | None:
    """A hint that names the nearest known name."""
    near = nearest(name, known)
    return f"Did you mean {near}?" if near else otherwise


def comma_inside(text: str, start: int) -> bool:
    """Whether a decimal comma, and no list, stands before a place in a text."""
    return (
        text[start - 1 : start] == ","
        and text[start - 2 : start - 1].isdigit()
        and text[start : start + 1].isdigit()
    )


def listed(items: Iterable[str], last: str = "and") -> str:
    """Words in a row: a, b and c."""
    found = list(items)
    if len(found) < 2:
        return "".join(found)
    return f"{', '.join(found[:-1])} {last} {found[-1]}"


def article(word: str) -> str:
    """The word with its article."""
    return f"{'an' if word[:1] in 'aeiou' else 'a'} {word}"
