"""Statements into drafts: which parts stand where, which values and names are given."""

from __future__ import annotations

import re
from collections.abc import Iterable
from typing import Any

from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text import limits
from acsolve.text.book import Book, Coupled
from acsolve.text.chains import Chains
from acsolve.text.scope import NO_TURNS, RESERVED, Draft, Given, Named, Scope, Turns
from acsolve.text.spell import node_name, spelled, spelled_all, whole
from acsolve.text.tree import (
    Assign,
    Chain,
    Couple,
    Declare,
    Join,
    KindText,
    LeaveOut,
    Let,
    Nested,
    Path,
    Placed,
    Repeat,
    ValueText,
)

_PART_NAME = re.compile(r"[A-Za-z]")


class Walker:
    """Walks the statements of a scope and fills it."""

    def __init__(self, book: Book) -> None:
        self._book = book
        self._chains = Chains(book, self)
        self._handlers: dict[type, Any] = {
            Chain: self._chains.walk,
            Placed: self._chains.walk_placed,
            Assign: self._assign,
            Declare: self._declare,
            Let: self._let,
            Couple: self._couple,
            Join: self._join,
            LeaveOut: self._leave_out,
            Repeat: self._repeat,
        }

    def enter(self, body: Iterable[Nested], scope: Scope) -> None:
        """Walk a whole scope; named quantities come first, so that ranges may use them."""
        rest = []
        for statement in body:
            if isinstance(statement, Let):
                self._let(statement, scope, NO_TURNS)
            else:
                rest.append(statement)
        self.walk(rest, scope, NO_TURNS)

    def walk(self, body: Iterable[Nested], scope: Scope, turns: Turns) -> None:
        """Walk statements in a scope, inside the given repetitions."""
        for statement in body:
            handler = self._handlers.get(type(statement))
            if handler is not None:
                self._book.step(statement)
                handler(statement, scope, turns)

    # ------------------------------------------------------------ parts

    def draft(self, path: Path, scope: Scope, turns: Turns) -> Draft | None:
        """The draft of a part, made on first mention."""
        local = spelled(path, scope, turns, self._book)
        if local is None:
            return None
        found = scope.drafts.get(local)
        if found is None:
            if not self._may_be_part(local, path):
                return None
            found = scope.drafts[local] = Draft(local, scope, path.span, turns)
        return found

    def _may_be_part(self, local: str, path: Path) -> bool:
        add = self._book.problems.add
        if "~" in local or ("." in local and not self._book.flattened):
            add(
                "name.inner-part",
                f"{local} stands inside a block and cannot be placed from outside",
                path.span,
                hint="Place it in the block; from outside, give it a value: N1[7].C = 2 nF.",
            )
            return False
        if local in RESERVED or not _PART_NAME.match(local):
            add(
                "name.reserved",
                f"{local} cannot be the name of a part",
                path.span,
                hint="A part's name starts with a letter and is no word of expressions "
                "(s, pi, sqrt, exp, ln, log10).",
            )
            return False
        return True

    def state_kind(self, draft: Draft, kind: KindText, turns: Turns) -> None:
        """Note the kind stated for a part; a second one is an error that shows both."""
        if draft.kind is not None:
            self._book.problems.add(
                "kind.twice",
                f"the kind of {draft.local} is stated twice",
                kind.word_span,
                hint="State it once, with all terminals and attributes.",
                labels=(Label(draft.kind.word_span, "first stated here"),),
            )
            return
        draft.kind, draft.kind_turns = kind, turns

    def _declare(self, statement: Declare, scope: Scope, turns: Turns) -> None:
        for target in statement.targets:
            for local in spelled_all(target, scope, turns, self._book):
                path = Path(local, (), target.span)
                draft = self.draft(path, scope, turns)
                if draft is None:
                    continue
                if turns and not target.indexed:
                    self.unindexed(target, turns)
                    continue
                self.state_kind(draft, statement.kind, turns)
                if statement.value is not None:
                    self._give(local, statement.value, target.span, scope, turns)

    def unindexed(self, path: Path, turns: Turns) -> None:
        """Report a part inside repeat that every turn would place again."""
        index = list(turns)[-1]
        self._book.problems.add(
            "repeat.unindexed",
            f"{path.span.text} stands inside repeat and would be placed again in every turn",
            path.span,
            hint=f"Write {path.span.text}[{index}].",
        )

    # ------------------------------------------------------------ values

    def _assign(self, statement: Assign, scope: Scope, turns: Turns) -> None:
        for target in statement.targets:
            if turns and not target.indexed:
                self.unindexed(target, turns)
                continue
            for local in spelled_all(target, scope, turns, self._book):
                self._give(local, statement.value, target.span, scope, turns)

    def _leave_out(self, statement: LeaveOut, scope: Scope, turns: Turns) -> None:
        nothing = ValueText(None, None, None, None, statement.span)
        self._assign(Assign(statement.targets, nothing, statement.span), scope, turns)

    def _give(self, local: str, value: ValueText, span: Span, scope: Scope, turns: Turns) -> None:
        """Note a value; one for an inner name overrides what the block says."""
        given = Given(value, scope, turns, span)
        if "." in local and local not in scope.drafts:
            key, table = scope.prefix + local, self._book.overrides
        else:
            key, table = local, scope.values
        first = table.setdefault(key, given)
        if first is given or first.scope is not scope:
            return
        if value.formula is None or first.text.formula is None:
            keep = given if value.formula is None else first
            table[key] = keep  # not fitted wins over a value given elsewhere
            return
        self._book.problems.add(
            "value.twice",
            f"{local} is given two values",
            span,
            hint="Keep one; other values for the same circuit go into a variant.",
            labels=(Label(first.span, "first given here"),),
        )

    def _let(self, statement: Let, scope: Scope, turns: Turns) -> None:
        for target in statement.targets:
            for local in spelled_all(target, scope, turns, self._book):
                if self._may_be_quantity(local, target.span, scope):
                    scope.quantities[local] = Named(
                        local, scope, statement.value, turns, target.span
                    )

    def _may_be_quantity(self, local: str, span: Span, scope: Scope) -> bool:
        first = scope.quantities.get(local)
        add = self._book.problems.add
        if first is not None:
            add(
                "name.twice",
                f"{local} is named twice",
                span,
                hint="Give the second one a name of its own.",
                labels=(Label(first.span, "first named here"),),
            )
            return False
        if local in RESERVED or ("." in local and not self._book.flattened):
            add(
                "name.reserved",
                f"{local} cannot name a quantity",
                span,
                hint="Use a name without dots that is no word of expressions "
                "(s, pi, sqrt, exp, ln, log10).",
            )
            return False
        return True

    # ------------------------------------------------------------ couplings, joins, repetition

    def _couple(self, statement: Couple, scope: Scope, turns: Turns) -> None:
        names = [
            name
            for target in statement.targets
            for name in spelled_all(target, scope, turns, self._book)
        ]
        self._book.coupled.append(Coupled(names, statement, scope, turns))

    def _join(self, statement: Join, scope: Scope, turns: Turns) -> None:
        found = self.joined(statement, scope, turns)
        if found:
            self._book.joins.append(found)

    def joined(self, statement: Join, scope: Scope, turns: Turns) -> list[str]:
        """The full names of the nodes that a join names."""
        found = []
        for place in statement.places:
            local = node_name(place, scope, turns, self._book)
            if local is not None:
                scope.reached.append((scope.node(local), place))
                self._book.asked.add(scope.node(local))
                found.append(scope.node(local))
        return found

    def _repeat(self, statement: Repeat, scope: Scope, turns: Turns) -> None:
        head, book = statement.head, self._book
        low = whole(head.low, scope, turns, book, what="the start of a repeat")
        high = whole(head.high, scope, turns, book, what="the end of a repeat")
        if low is None or high is None:
            return
        if high - low >= limits.RANGE:
            book.problems.refuse(
                "limit.range",
                f"this repeat has {high - low + 1:,} turns; the limit is {limits.RANGE:,}",
                head.span,
                hint="Use a smaller range.",
            )
        if head.word in RESERVED or head.word in turns:
            book.problems.add(
                "name.reserved" if head.word in RESERVED else "name.twice",
                f"{head.word} cannot be the index here",
                head.word_span,
                hint="Choose another letter.",
            )
            return
        for turn in range(low, high + 1):
            self.walk(statement.body, scope, {**turns, head.word: turn})
