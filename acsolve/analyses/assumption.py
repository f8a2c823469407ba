"""Assumptions such as `R2 >> R1`: how they are written, and which terms they outrank."""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass
from difflib import get_close_matches
from itertools import pairwise

from acsolve.errors import AnalysisError, Diagnostic

_LONGEST = 2000  # characters of one text
_TOKEN = re.compile(
    r"\s*(?:(?P<sign>>>|<<|≫|≪)|(?P<comma>,)|"
    r"(?P<name>k\([^()]*\)|[A-Za-z_]\w*(?:\[[^\[\]]*\])?(?:\.[A-Za-z_]\w*(?:\[[^\[\]]*\])?)*)|"
    r"(?P<other>\S))"
)
_EXAMPLE = 'Write two symbols with >> or << between them, say "R2 >> R1, C1 << C2".'


@dataclass(frozen=True, slots=True)
class Assumption:
    """One symbol is much larger than another one, both positive and of one unit."""

    large: str
    small: str

    def __str__(self) -> str:
        return f"{self.large} >> {self.small}"


def parse_assumptions(texts: str | Iterable[str], known: Sequence[str]) -> tuple[Assumption, ...]:
    """Assumptions read from texts; a text may hold several, parted by commas.

    Parameters
    ----------
    texts : "R2 >> R1", "R1 << R2", "R3 >> R2 >> R1", "C1 >> C2, R4 >> R2", or several such.
    known : the symbols that may be named.

    Raises
    ------
    AnalysisError
        [option.value] a text does not read, names something else than a known symbol, or
        the assumptions go round in a circle.

    Notes
    -----
    The text is never evaluated: it holds names, the two signs and commas, nothing else.
    """
    given = (texts,) if isinstance(texts, str) else tuple(texts)
    found: dict[Assumption, None] = {}
    for text in given:
        for clause in _clauses(text):
            found.update(dict.fromkeys(_clause(clause, text, known)))
    if not found:
        raise _refuse("no assumption is given", _EXAMPLE)
    assumptions = tuple(found)
    _refuse_circle(assumptions)
    return assumptions


def _clauses(text: str) -> list[list[tuple[str, str]]]:
    """The tokens of a text, split at its commas."""
    if len(text) > _LONGEST:
        raise _refuse(f"an assumption is longer than {_LONGEST} characters", _EXAMPLE)
    clauses: list[list[tuple[str, str]]] = [[]]
    for match in _TOKEN.finditer(text):
        kind = str(match.lastgroup)
        if kind == "other":
            raise _refuse(f'"{match["other"]}" has no place in the assumption "{text}"', _EXAMPLE)
        if kind == "comma":
            clauses.append([])
        else:
            clauses[-1].append((kind, match[kind]))
    return clauses


def _clause(tokens: list[tuple[str, str]], text: str, known: Sequence[str]) -> Iterable[Assumption]:
    """One chain `a >> b >> c`, each neighbouring pair an assumption."""
    expected = ["name" if place % 2 == 0 else "sign" for place in range(len(tokens))]
    if len(tokens) < 3 or len(tokens) % 2 == 0 or [kind for kind, _ in tokens] != expected:
        raise _refuse(f'the assumption "{text.strip()}" does not read', _EXAMPLE)
    names = [_known(name, known) for _, name in tokens[0::2]]
    for (left, right), (_, sign) in zip(pairwise(names), tokens[1::2], strict=True):
        yield Assumption(left, right) if sign in (">>", "≫") else Assumption(right, left)


def _known(name: str, known: Sequence[str]) -> str:
    same = {_squeezed(item): item for item in known}
    if _squeezed(name) in same:
        return same[_squeezed(name)]
    near = get_close_matches(name, known, n=1)
    listed = ", ".join(known[:12]) + (", …" if len(known) > 12 else "")
    hint = f"Its symbols are {listed}." if known else "Every value is a number: keep some symbolic."
    if near:
        hint = f"Did you mean {near[0]}? {hint}"
    raise _refuse(f"{name} is no symbol of this closed form", hint)


def _squeezed(name: str) -> str:
    return "".join(name.split())


def _refuse_circle(assumptions: Sequence[Assumption]) -> None:
    above = _larger(assumptions)
    for item in assumptions:
        if item.large == item.small or item.small in above.get(item.large, frozenset()):
            listed = ", ".join(str(other) for other in assumptions)
            raise _refuse(
                f"the assumptions go round in a circle: {listed}",
                f"{item.large} cannot be both much larger and much smaller than {item.small}.",
            )


def _larger(assumptions: Sequence[Assumption]) -> Mapping[str, frozenset[str]]:
    """For each symbol all that are much larger, directly or by way of others."""
    above: dict[str, set[str]] = {}
    for item in assumptions:
        above.setdefault(item.small, set()).add(item.large)
    changed = True
    while changed:
        changed = False
        for larger in above.values():
            more = set().union(*(above.get(name, set()) for name in larger)) - larger
            if more:
                larger.update(more)
                changed = True
    return {name: frozenset(larger) for name, larger in above.items()}


class Ranking:
    """The order that assumptions put products of symbols in."""

    def __init__(self, assumptions: Sequence[Assumption]) -> None:
        self._above = _larger(assumptions)
        named = {name for item in assumptions for name in (item.large, item.small)}
        self.names = tuple(sorted(named))

    def outranks(self, first: Sequence[int], second: Sequence[int]) -> bool:
        """Whether the product of powers `first` is much larger than `second`.

        Both hold the exponents of `names`. True where second/first is a product of assumed
        small ratios (at least one) and nothing else: each factor that only `second` has can
        be paired with a much larger one that only `first` has, and none is left over. That
        is a perfect matching, found by augmenting paths (H. W. Kuhn, Naval Research
        Logistics Quarterly 2 (1955), doi:10.1002/nav.3800020109).
        """
        small: list[str] = []
        large: list[str] = []
        for name, one, other in zip(self.names, first, second, strict=True):
            (large if one > other else small).extend([name] * abs(one - other))
        if len(small) != len(large) or not small:
            return False
        partner: dict[int, int] = {}
        return all(self._pair(place, small, large, partner, set()) for place in range(len(small)))

    def _pair(
        self,
        place: int,
        small: Sequence[str],
        large: Sequence[str],
        partner: dict[int, int],
        tried: set[int],
    ) -> bool:
        """Find a larger factor for the small one at `place`; changes `partner` and `tried`."""
        for other, name in enumerate(large):
            if other in tried or name not in self._above.get(small[place], frozenset()):
                continue
            tried.add(other)
            holder = partner.get(other)
            if holder is None or self._pair(holder, small, large, partner, tried):
                partner[other] = place
                return True
        return False

    def outranked(self, products: Iterable[tuple[int, ...]]) -> frozenset[tuple[int, ...]]:
        """Those of some products that another one of them outranks."""
        distinct = frozenset(products)
        return frozenset(
            item for item in distinct if any(self.outranks(other, item) for other in distinct)
        )


def _refuse(message: str, hint: str) -> AnalysisError:
    return AnalysisError(Diagnostic(code="option.value", message=message, hint=hint))
