"""Chains: nodes and arms by turns, arms into parts between nodes."""

from __future__ import annotations

import re
from itertools import pairwise
from typing import TYPE_CHECKING

from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text.book import Book
from acsolve.text.scope import RESERVED, Draft, Scope, Turns
from acsolve.text.spell import node_name, spelled
from acsolve.text.tree import Arm, Chain, Fitted, Item, Numbered, Path, Placed

if TYPE_CHECKING:
    from acsolve.text.walk import Walker

DESIGNATOR = re.compile(r"[RLC][0-9]+(\[.*\])?")
_WORD = re.compile(r"[A-Za-z_][A-Za-z0-9_]*")


class Chains:
    """Places the parts of chains."""

    def __init__(self, book: Book, walker: Walker) -> None:
        self._book = book
        self._walker = walker

    def walk(self, chain: Chain, scope: Scope, turns: Turns) -> None:
        """Place every arm of a chain between the nodes at its sides."""
        items = chain.items
        if not self._alternates(items):
            self._book.problems.broken_words.update(_WORD.findall(chain.span.text))
            return
        names = [self._node(item, scope, turns) for item in items[::2]]
        for number, item in enumerate(items[1::2]):
            left, right = names[number], names[number + 1]
            if left is not None and right is not None:
                self._arm(item, left, right, scope, turns)
        if len(names) > 2:
            self._suspect(items, scope)

    def walk_placed(self, placed: Placed, scope: Scope, turns: Turns) -> None:
        """Place the one part of a chain, taken apart only where its names are not plain news."""
        left, name, right = placed.names()
        if turns or name in scope.drafts or name in RESERVED or not name[0].isalpha():
            self.walk(placed.whole(), scope, turns)
            return
        span, nodes = placed.part, scope.nodes
        if left not in nodes:
            nodes[left] = placed.left
        if right not in nodes:
            nodes[right] = placed.right
        ends = (scope.node(left), scope.node(right))
        scope.drafts[name] = Draft(name, scope, span, turns, ends, span, value=placed)

    # ------------------------------------------------------------ shape

    def _alternates(self, items: tuple[Item, ...]) -> bool:
        """Whether nodes and arms take turns; records the problem where they do not."""
        for number, item in enumerate(items):
            if number % 2 == 0 and isinstance(item, Fitted | Arm):
                before = items[number - 1] if number else None
                self._in_a_row(before, item)
                return False
            if number % 2 == 1 and (
                isinstance(item, Numbered) or (isinstance(item, Path) and item.name == "gnd")
            ):
                self._nodes_in_a_row(items[number - 1], item)
                return False
        if len(items) % 2 == 0:
            self._ends_with_part(items)
            return False
        return True

    def _in_a_row(self, before: Item | None, item: Item) -> None:
        if before is None:
            text = f"a chain starts with a node, and {_short(item)} is a part"
        else:
            text = f"{_short(before)} and {_short(item)} stand in a row with no node between them"
        self._book.problems.add(
            "chain.row",
            text,
            item.span,
            hint="Put a node between them, or join them: R1 + R2 in series, R1 || R2 in parallel.",
        )

    def _nodes_in_a_row(self, before: Item, item: Item) -> None:
        self._book.problems.add(
            "chain.row",
            f"{_short(before)} and {_short(item)} are two nodes in a row with no part between them",
            item.span,
            hint=f"Put a part between them, or write join {_short(before)}, {_short(item)}.",
        )

    def _ends_with_part(self, items: tuple[Item, ...]) -> None:
        """An even chain: two parts in a row somewhere, or the last node is missing."""
        for left, right in pairwise(items[1:]):
            if _is_designator(left) and _is_designator(right):
                self._in_a_row(left, right)
                return
        last = items[-1]
        self._book.problems.add(
            "chain.end",
            f"this chain ends with {_short(last)}, where a part belongs; the last node is missing",
            last.span,
            hint=f"Write -- and a node after {_short(last)}.",
        )

    def _suspect(self, items: tuple[Item, ...], scope: Scope) -> None:
        """Remember inner nodes that are named like a resistor, inductor or capacitor."""
        for left, item, right in zip(items[1::2], items[2::2], items[3::2], strict=False):
            if isinstance(item, Path) and item.name and item.name[0] in "RLC":
                self._book.suspects.setdefault((scope.prefix, item.name), []).append(
                    (left, item, right)
                )

    # ------------------------------------------------------------ nodes and arms

    def _node(self, item: Item, scope: Scope, turns: Turns) -> str | None:
        """The full name of a node in a chain; its first mention makes it."""
        assert isinstance(item, Path | Numbered), "the chain alternates"
        local = (item.name if isinstance(item, Path) else None) or node_name(
            item, scope, turns, self._book
        )
        if local is None:
            return None
        if ("." in local or "~" in local) and not self._book.flattened:
            scope.reached.append((scope.prefix + local, item))
            return scope.prefix + local
        if local not in scope.nodes:
            scope.nodes[local] = item.span
        return scope.node(local)

    def _arm(self, item: Item, left: str, right: str, scope: Scope, turns: Turns) -> None:
        """Place an arm; depth is bounded by the limit on brackets."""
        if not isinstance(item, Arm):
            self._fit(item, left, right, scope, turns)
            return
        if item.mixed is not None:
            self._book.problems.add(
                "chain.mixed",
                "+ and || stand side by side, and it is not said which comes first",
                item.mixed,
                hint="Put one of them in brackets: R1 || (L1 + C1), or (R1 || L1) + C1.",
            )
        if item.sign == "||":
            for unit in item.units:
                self._arm(unit, left, right, scope, turns)
            return
        leaves = [_leaf(unit, scope, turns, self._book) for unit in item.units]
        inner = [f"{a}~{b}" for a, b in pairwise(leaves)]
        for local in inner:
            scope.nodes[local] = item.span
        nodes = [left, *(scope.prefix + local for local in inner), right]
        for unit, first, second in zip(item.units, nodes[:-1], nodes[1:], strict=True):
            self._arm(unit, first, second, scope, turns)

    def _fit(
        self, item: Path | Numbered | Fitted, left: str, right: str, scope: Scope, turns: Turns
    ) -> None:
        if isinstance(item, Numbered):
            self._book.problems.add(
                "name.reserved",
                f"{item.text} cannot be the name of a part",
                item.span,
                hint="A part's name starts with a letter.",
            )
            return
        path = item.path if isinstance(item, Fitted) else item
        draft = self._walker.draft(path, scope, turns)
        if draft is None:
            return
        if draft.ends is not None:
            self._twice(path, draft.ends_span, turns)
            return
        draft.ends, draft.ends_span = (left, right), path.span
        draft.span = path.span
        if isinstance(item, Fitted):
            if item.kind is not None:
                self._walker.state_kind(draft, item.kind, turns)
            draft.value, draft.turns = item.value, turns

    def _twice(self, path: Path, first: Span | None, turns: Turns) -> None:
        if turns and not path.indexed:
            self._walker.unindexed(path, turns)
            return
        assert first is not None, "a part with ends knows where it stands"
        self._book.problems.add(
            "part.twice",
            f"{path.span.text} stands in two places",
            path.span,
            hint="A part stands in one place; give the second one a name of its own.",
            labels=(Label(first, "first placed here"),),
        )


def _leaf(item: Item, scope: Scope, turns: Turns, book: Book) -> str:
    """The first part of an arm, by its local name."""
    while isinstance(item, Arm):
        item = item.units[0]
    path = item.path if isinstance(item, Fitted) else item
    if isinstance(path, Numbered):
        return path.text
    return spelled(path, scope, turns, book) or "?"


def _is_designator(item: Item) -> bool:
    if isinstance(item, Path):
        return item.name is not None and DESIGNATOR.fullmatch(item.name) is not None
    return isinstance(item, Fitted | Arm)


def _short(item: Item) -> str:
    """An item as messages name it."""
    return item.path.span.text if isinstance(item, Fitted) else item.span.text
