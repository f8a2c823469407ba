"""Which row each item takes: levels stacked above the signal path, rows within a level.

Columns and gaps count in quarters: column k is 4k, the gap behind it 4k + 1 to 4k + 3. What
is placed once stays, so a new level always has room.
"""

from __future__ import annotations

from dataclasses import dataclass, field

Row = tuple[int, int]  # level (0 is the path, -1 above it), row within it counted downwards
Span = tuple[int, int, str]  # from, to, owner; spans of one owner may meet


@dataclass(slots=True)
class Rows:
    """Who has taken what so far; this one object changes while items are placed."""

    taken: dict[Row, list[Span]] = field(default_factory=dict)
    below: dict[int, list[tuple[int, int, int, str]]] = field(default_factory=dict)

    def is_free(self, row: Row, spans: list[Span]) -> bool:
        """Whether a row has room for spans."""
        level, sub = row
        others = [*self.taken.get(row, [])]
        others += [item[1:] for item in self.below.get(level, []) if item[0] < sub]
        return not any(_clash(a, b) for a in spans for b in others)

    def is_free_below(self, row: Row, span: Span) -> bool:
        """Whether everything beneath a row in its level has room for a span."""
        level, sub = row
        return all(
            not _clash(span, other)
            for (at, lower), spans in self.taken.items()
            if at == level and lower > sub
            for other in spans
        ) and not any(_clash(span, item[1:]) for item in self.below.get(level, []))

    def take(self, row: Row, spans: list[Span]) -> None:
        """Mark spans of a row as taken."""
        self.taken.setdefault(row, []).extend(spans)

    def take_below(self, row: Row, span: Span) -> None:
        """Mark everything beneath a row in its level as taken."""
        self.below.setdefault(row[0], []).append((row[1], *span))

    def levels(self) -> list[int]:
        """All levels in use, from the path upwards, and one new level."""
        used = {level for level, _ in self.taken} | {0}
        return list(range(0, min(used) - 2, -1))

    def lowest(self, level: int) -> int:
        """The lowest row of a level that is in use."""
        return max((sub for at, sub in self.taken if at == level), default=0)


def _clash(first: Span, second: Span) -> bool:
    return first[2] != second[2] and max(first[0], second[0]) <= min(first[1], second[1])
