"""Coupled inductors: every pair of a set, and whether the set is physically possible."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from fractions import Fraction
from itertools import combinations
from typing import TypeVar

from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import Coupling
from acsolve.circuit.value import Value
from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text import limits
from acsolve.text.book import Book, Coupled
from acsolve.text.givens import Givens, Place
from acsolve.text.measure import PLAIN
from acsolve.text.scope import Draft
from acsolve.text.words import listed, meant

_EXACT_SIZE = 24  # inductors in a set up to which the test is done in exact fractions
_ROUNDING = 1e-12  # beyond it, floating point may find a pivot this far below zero


@dataclass(frozen=True, slots=True)
class _Set:
    names: tuple[str, ...]
    span: Span


class Couplings:
    """Reads every `couple` of a text."""

    def __init__(self, book: Book, givens: Givens) -> None:
        self._book = book
        self._givens = givens
        self._found: dict[frozenset[str], Coupling] = {}

    def all(self) -> list[Coupling]:
        """The couplings in file order, those of parts not fitted left out."""
        for coupled in self._book.coupled:
            self._read(coupled)
        self._check_sets()
        out = self._book.left_out
        return [
            item
            for item in self._found.values()
            if item.first not in out and item.second not in out
        ]

    def _read(self, coupled: Coupled) -> None:
        statement = coupled.statement
        drafts = [self.inductor(name, coupled) for name in coupled.names]
        found = [draft for draft in drafts if draft is not None]
        if len(found) < len(drafts) or not self._countable(found, statement.span):
            return
        value = self.coefficient(coupled)
        if value is None:
            return
        for first, second in combinations(found, 2):
            self._add(first, second, value, statement.span)

    def _countable(self, found: list[Draft], span: Span) -> bool:
        names = [draft.name for draft in found]
        add = self._book.problems.add
        if len(set(names)) < len(names) or len(names) < 2:
            add(
                "couple.names",
                "a coupling needs two or more different inductors",
                span,
                hint="Write couple L1, L2 = 0.98.",
            )
            return False
        if len(names) > limits.COUPLED:
            add(
                "limit.coupled",
                f"{len(names)} inductors are coupled at once; the limit is {limits.COUPLED}",
                span,
                hint="Couple smaller sets.",
            )
            return False
        return True

    def inductor(self, local: str, coupled: Coupled) -> Draft | None:
        """The inductor of that name, or None once the problem is recorded."""
        draft = coupled.scope.drafts.get(local)
        if draft is None or draft.definition is None:
            draft = self._book.by_name.get(coupled.scope.prefix + local)
        problems, span = self._book.problems, coupled.statement.span
        span = _mention(local, coupled) or span
        if draft is None:
            if local not in problems.broken_words:
                problems.add(
                    "name.unknown",
                    f"{local} is not known here",
                    span,
                    hint=lambda: self._near(local),
                )
            return None
        if not _is_inductor(draft):
            assert draft.definition is not None, "parts have kinds"
            problems.add(
                "couple.kind",
                f"only inductors couple, and {local} is of kind {draft.definition.name}",
                span,
                hint="Use transformer for an ideal one.",
            )
            return None
        return draft

    def _near(self, local: str) -> str | None:
        known = (name for name, item in self._book.by_name.items() if _is_inductor(item))
        return meant(local, known, "Place the inductor in a chain first.")

    def coefficient(self, coupled: Coupled) -> Value | None:
        """The coupling coefficient, or None once its problem is recorded."""
        statement = coupled.statement
        if statement.value is None:
            return Value(span=statement.span)
        place = Place("a coupling coefficient", PLAIN)
        value = self._givens.value(statement.value, place, coupled.scope, coupled.turns)
        if statement.value.formula is None:
            self._book.problems.add(
                "value.absent",
                "a coupling cannot be absent",
                statement.value.span,
                hint="Write 0 for no coupling.",
            )
        number = value.expression if value is not None else None
        if isinstance(number, Number) and abs(number.value) > 1:
            self._book.problems.add(
                "couple.range",
                "a coupling coefficient lies between -1 and 1",
                statement.value.span,
                hint="It is the mutual inductance divided by the root of both inductances.",
            )
            return None
        return value

    def _add(self, first: Draft, second: Draft, value: Value, span: Span) -> None:
        key = frozenset((first.name, second.name))
        before = self._found.get(key)
        if before is not None:
            self._book.problems.add(
                "couple.twice",
                f"{first.local} and {second.local} are coupled twice",
                span,
                hint="Keep one.",
                labels=(Label(before.span, "first coupled here"),) if before.span else (),
            )
            return
        self._found[key] = Coupling(
            first=first.name, second=second.name, coefficient=value, span=span
        )

    def _check_sets(self) -> None:
        for group in _sets(self._found):
            if not possible(group.names, self._found):
                self._book.problems.add(
                    "couple.impossible",
                    f"{listed(group.names)} cannot be coupled like this: "
                    "together they could give more energy than they store",
                    group.span,
                    hint="Lower a coefficient; two coils close to a third are close to each other.",
                )


def possible(names: tuple[str, ...], found: Mapping[frozenset[str], Coupling]) -> bool:
    """Whether the matrix of numeric coefficients is positive semidefinite.

    The inductance matrix is D K D with D the roots of the inductances, so it is positive
    semidefinite exactly when the matrix K of coefficients is. Symbols are not judged.
    """
    rows: list[list[Fraction]] = []
    for first in names:
        row = []
        for second in names:
            if first == second:
                row.append(Fraction(1))
                continue
            item = found.get(frozenset((first, second)))
            value = None if item is None else item.coefficient.expression
            if item is not None and not isinstance(value, Number):
                return True
            row.append(value.value if isinstance(value, Number) else Fraction(0))
        rows.append(row)
    if len(names) <= _EXACT_SIZE:
        return semidefinite(rows, Fraction(0))
    return semidefinite([[float(item) for item in row] for row in rows], _ROUNDING)


_Real = TypeVar("_Real", Fraction, float)


def semidefinite(rows: list[list[_Real]], rounding: _Real) -> bool:
    """Whether a symmetric matrix has no negative eigenvalue; `rows` is used up.

    Symmetric elimination: no pivot below zero, and a zero pivot only in a zero row.
    """
    size = len(rows)
    for k in range(size):
        pivot = rows[k][k]
        if pivot < -rounding:
            return False
        if pivot <= rounding:
            if any(abs(rows[k][j]) > rounding for j in range(k + 1, size)):
                return False
            continue
        for i in range(k + 1, size):
            factor = rows[i][k] / pivot
            if factor:
                for j in range(k + 1, size):
                    rows[i][j] -= factor * rows[k][j]
    return True


def _sets(found: Mapping[frozenset[str], Coupling]) -> list[_Set]:
    """Inductors that couplings join, directly or through others; pairs are judged already."""
    group: dict[str, list[str]] = {}
    spans: dict[int, Span] = {}
    for item in found.values():
        first = group.setdefault(item.first, [item.first])
        second = group.setdefault(item.second, [item.second])
        if item.span is not None:
            spans[id(first)] = item.span
        if first is not second:
            first.extend(second)
            for name in second:
                group[name] = first
    unique = {id(names): names for names in group.values()}
    return [
        _Set(tuple(names), spans[key])
        for key, names in unique.items()
        if len(names) > 2 and key in spans
    ]


def _is_inductor(draft: Draft) -> bool:
    return draft.definition is not None and draft.definition.name == "inductor"


def _mention(local: str, coupled: Coupled) -> Span | None:
    for target in coupled.statement.targets:
        if target.name == local:
            return target.span
    return None
