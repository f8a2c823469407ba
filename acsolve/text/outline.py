"""Lines of one outline: letters and digits differ, the tokens stand at the same places.

A file of many parts repeats a few outlines over and over. Where a line is a statement of
its own, its tokens are remembered under its outline, and the next such line is not
scanned at all.
"""

from __future__ import annotations

from acsolve.text import limits
from acsolve.text.scan import Script, Tokens
from acsolve.text.syntax import keywords

_SAME = {chr(code): "a" for code in range(128) if chr(code).isalpha()}
_SAME |= dict.fromkeys("0123456789", "0") | {"_": "a", "e": "e", "E": "e"}
_OUTLINE = str.maketrans(_SAME)


class Outlines:
    """The outlines met so far."""

    def __init__(self, script: Script) -> None:
        self._script = script
        self._words = keywords()
        self._known: dict[str, _Outline] = {}

    def match(self, line: str, base: int) -> Tokens | None:
        """The tokens of a line whose outline is known."""
        known = self._known.get(line.translate(_OUTLINE))
        if known is None:
            return None
        get = self._words.get
        words = tuple([get(line[start:end], "NAME") for start, end in known.words])
        kinds = known.kinds.get(words)
        if kinds is None:
            kinds = known.kinds[words] = known.kinds_with(words)
        return Tokens(self._script, base, kinds, known.starts, known.ends)

    def remember(self, line: str, base: int, tokens: Tokens) -> None:
        """Keep the outline of a line that is one whole statement.

        Units with a stroke (V/V) depend on their letters, so such lines are not kept.
        """
        if "/" in line or len(self._known) >= limits.SHAPES or "STRING" in tokens.kinds:
            return
        starts = tuple(start - base for start in tokens.starts)
        ends = tuple(end - base for end in tokens.ends)
        self._known[line.translate(_OUTLINE)] = _Outline(tokens.kinds, starts, ends, self._words)


class _Outline:
    """Where the tokens of an outline stand, and their terminals by the words met."""

    __slots__ = ("_first", "_places", "ends", "kinds", "starts", "words")

    def __init__(
        self,
        first: tuple[str, ...],
        starts: tuple[int, ...],
        ends: tuple[int, ...],
        keyword_of: dict[str, str],
    ) -> None:
        spelled = {"NAME", *keyword_of.values()}
        self._first = first
        self._places = [number for number, kind in enumerate(first) if kind in spelled]
        self.starts = starts
        self.ends = ends
        self.words = [(starts[number], ends[number]) for number in self._places]
        self.kinds: dict[tuple[str, ...], tuple[str, ...]] = {}

    def kinds_with(self, words: tuple[str, ...]) -> tuple[str, ...]:
        """All terminals, where those of the words are given."""
        kinds = list(self._first)
        for number, kind in zip(self._places, words, strict=True):
            kinds[number] = kind
        return tuple(kinds)
