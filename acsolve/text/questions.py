"""Pairs, ports, questions and goals."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from fractions import Fraction
from itertools import chain
from types import MappingProxyType
from typing import Any, Literal, get_args

from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import Band, Goal, Level, Pair, QuantityName, Question
from acsolve.circuit.value import Value
from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text import tree
from acsolve.text.book import Book
from acsolve.text.givens import Givens, Place
from acsolve.text.measure import DECIBEL, HERTZ, OHM, SECOND, Measure
from acsolve.text.scope import NO_TURNS
from acsolve.text.spell import node_name
from acsolve.text.tree import Clause, PairText
from acsolve.text.words import listed, meant

#: Which clauses a question takes beside from, to and into.
_TAKES: dict[str, tuple[str, ...]] = {
    "transfer": ("from", "to", "as"),
    "cutoff": ("from", "to", "as", "at"),
    "impedance": ("into", "over"),
    "two-port": ("from", "to", "reference", "over"),
    "sweep": ("from", "to", "as", "over"),
    "step": ("from", "to", "as", "for"),
    "noise": ("from", "to", "as", "over"),
    "tolerance": ("from", "to", "as", "over"),
}
_GOAL = ("from", "to", "over", "below", "above")

_MINUS_THREE = Number(Fraction(-3))

NodeCheck = Callable[[str], bool]


class Questions:
    """Reads ports, questions and goals of a file."""

    def __init__(
        self,
        book: Book,
        givens: Givens,
        exists: NodeCheck,
        ammeters: Mapping[str, tuple[str, ...]] = MappingProxyType({}),
    ) -> None:
        self._book = book
        self._givens = givens
        self._exists = exists
        self._ammeters = ammeters  # name -> its two nodes
        self.ports: dict[str, Pair] = {}

    # ------------------------------------------------------------ pairs

    def pair(self, text: PairText) -> Pair | None:
        """The pair a text names: a port, a node against gnd, or two nodes."""
        if text.second is None:
            if isinstance(text.first, tree.Path) and text.first.name in self.ports:
                return self.ports[text.first.name]
            first, second = self.node(text.first), "gnd"
        else:
            first, second = self.node(text.first), self.node(text.second) or ""
        return (first, second) if first and second else None

    def node(self, place: tree.Place) -> str | None:
        """The kept name of a node that must exist."""
        local = node_name(place, self._book.file, NO_TURNS, self._book)
        if local is None:
            return None
        self._book.asked.add(local)
        kept = self._book.nodes.find(local)
        if kept == "gnd" or self._exists(local) or self._exists(kept):
            return kept
        problems = self._book.problems
        if (place.word if isinstance(place, tree.Path) else local) in problems.broken_words:
            return None
        file = self._book.file
        message = f"there is no node {local}"
        if local in file.drafts:
            message = f"{local} is a part, not a node"
        elif local in file.quantities:
            message = f"{local} is a named quantity, not a node"
        problems.add(
            "name.unknown-node",
            message,
            place.span,
            hint=lambda: meant(local, chain(file.nodes, self.ports), "Nodes are named in chains."),
        )
        return None

    def read_ports(self, statements: Iterable[tree.Port]) -> None:
        """Read every port, so that questions may name them in any order."""
        for statement in statements:
            name, problems = statement.path.name, self._book.problems
            if name is None:
                problems.add(
                    "name.reserved", "a port's name is one word", statement.path.span,
                    hint="Use letters, digits and _.",
                )  # fmt: skip
                continue
            first = self._book.file.ports.get(name)
            if name in self.ports and first is not None:
                problems.add(
                    "name.twice", f"the port {name} is named twice", statement.path.span,
                    hint="Keep one.", labels=(Label(first, "first named here"),),
                )  # fmt: skip
                continue
            pair = self.pair(statement.pair)
            self._book.file.ports[name] = statement.path.span
            if pair is None:
                problems.broken_words.add(name)
                continue
            if pair[0] == pair[1]:
                problems.add(
                    "pair.same-node", f"both ends of the port {name} are the node {pair[0]}",
                    statement.pair.span, hint="Name two different nodes.",
                )  # fmt: skip
            self.ports[name] = pair

    # ------------------------------------------------------------ values

    def quantity(self, formula: tree.Formula, words: str, need: Measure) -> Value | None:
        """A value of a question."""
        text = tree.ValueText(formula, None, None, None, formula.span)
        return self._givens.value(text, Place(words, need), self._book.file, NO_TURNS)

    def band(self, text: tree.BandText) -> Band | None:
        """A band of frequencies, lower end first."""
        low = self.quantity(text.low, "a band", HERTZ)
        high = self.quantity(text.high, "a band", HERTZ)
        if low is None or high is None:
            return None
        bottom, top = low.expression, high.expression
        if (
            isinstance(bottom, Number)
            and isinstance(top, Number)
            and not 0 <= bottom.value < top.value
        ):
            self._book.problems.add(
                "value.band",
                "a band goes from a lower to a higher frequency, neither negative",
                text.span,
                hint="Write 10 Hz .. 1 MHz.",
            )
            return None
        return Band(low=low, high=high)

    def level(self, text: tree.LevelText) -> Level | None:
        """A level in decibels; -3 dB is what the trade calls half power."""
        if text.formula is None:
            return Level()
        value = self.decibels(text.formula, "a level")
        if value is None:
            return None
        return Level() if value.expression == _MINUS_THREE else Level(decibel=value)

    def decibels(self, formula: tree.Formula, words: str) -> Value | None:
        """A value that must be stated in dB, so that nobody has to guess a ratio."""
        value = self.quantity(formula, words, DECIBEL)
        stated = formula.span.text.rstrip().endswith("dB")
        if value is None or stated or not isinstance(value.expression, Number):
            return value
        self._book.problems.add(
            "value.level",
            f"{words} is stated in dB",
            formula.span,
            hint=f"Write {formula.span.text} dB, or half power.",
        )
        return None

    # ------------------------------------------------------------ questions and goals

    def question(self, ask: tree.Ask) -> Question | None:
        """A question, or None once its problem is recorded."""
        clauses = self._clauses(ask.clauses, _TAKES[ask.kind], f"ask {ask.kind}")
        target_word = "into" if ask.kind == "impedance" else "to"
        if clauses is None or not self._has(clauses, target_word, ask.span, f"ask {ask.kind}"):
            return None
        before = len(self._book.problems.errors)
        source = self._pair_of(clauses, "from")
        ammeter, target = self._target(clauses[target_word])
        options: dict[str, Any] = {}
        if "as" in clauses:
            options["quantity"] = self._quantity_name(clauses["as"])
        if "at" in clauses:
            options["levels"] = tuple(map(self.level, clauses["at"].content))  # type: ignore[arg-type]
        if "over" in clauses:
            options["band"] = self.band(clauses["over"].content)  # type: ignore[arg-type]
        if "for" in clauses:
            options["duration"] = self.positive(clauses["for"], "a duration", SECOND)
        if "reference" in clauses:
            options["reference"] = self.positive(clauses["reference"], "a reference", OHM)
        if target is None or len(self._book.problems.errors) > before:
            return None
        return Question(
            kind=ask.kind,  # type: ignore[arg-type]
            source=source,
            target=target,
            ammeter=ammeter,
            span=ask.span,
            **options,
        )

    def goal(self, text: tree.Goal) -> Goal | None:
        """A goal, or None once its problem is recorded."""
        clauses = self._clauses(text.clauses, _GOAL, "goal")
        if clauses is None:
            return None
        for word in ("from", "to", "over"):
            if not self._has(clauses, word, text.span, "goal"):
                return None
        sides = [word for word in ("below", "above") if word in clauses]
        if len(sides) != 1:
            self._book.problems.add(
                "ask.clause", "a goal states one limit, below or above", text.span,
                hint="Write below -40 dB at its end.",
            )  # fmt: skip
            return None
        side: Literal["below", "above"] = "below" if sides[0] == "below" else "above"
        source, target = self._pair_of(clauses, "from"), self._pair_of(clauses, "to")
        band = self.band(clauses["over"].content)  # type: ignore[arg-type]
        level = self.decibels(clauses[side].content, "the limit of a goal")  # type: ignore[arg-type]
        if source is None or target is None or band is None or level is None:
            return None
        return Goal(source=source, target=target, band=band, side=side, level=level, span=text.span)

    def _clauses(
        self, clauses: Iterable[Clause], takes: tuple[str, ...], what: str
    ) -> dict[str, Clause] | None:
        found: dict[str, Clause] = {}
        for clause in clauses:
            if clause.word not in takes:
                self._clause_problem(
                    f'{what} takes no "{clause.word}"', clause.span, f"It takes {listed(takes)}."
                )
                return None
            if clause.word in found:
                self._clause_problem(
                    f'"{clause.word}" stands twice in one line', clause.span, "Keep one."
                )
                return None
            found[clause.word] = clause
        return found

    def _clause_problem(self, message: str, span: Span, hint: str) -> None:
        self._book.problems.add("ask.clause", message, span, hint=hint)

    def _has(self, clauses: dict[str, Clause], word: str, span: Span, what: str) -> bool:
        if word in clauses:
            return True
        self._clause_problem(f'{what} needs "{word}"', span, f"Write {what} … {word} …")
        return False

    def _pair_of(self, clauses: dict[str, Clause], word: str) -> Pair | None:
        clause = clauses.get(word)
        return self.pair(clause.content) if clause else None  # type: ignore[arg-type]

    def _target(self, clause: Clause) -> tuple[str | None, Pair | None]:
        """The pair observed, and the ammeter where one is named."""
        text = clause.content
        assert isinstance(text, PairText), "to and into are followed by a pair"
        if text.second is None and isinstance(text.first, tree.Path):
            local = node_name(text.first, self._book.file, NO_TURNS, self._book)
            if local is not None and local in self._ammeters:
                first, second = self._ammeters[local]
                return local, (first, second)
        return None, self.pair(text)

    def _quantity_name(self, clause: Clause) -> QuantityName | None:
        names = get_args(QuantityName)
        if clause.content in names:
            return clause.content  # type: ignore[return-value]
        self._book.problems.add(
            "ask.quantity",
            f"{clause.content} is no quantity that a response can be asked for",
            clause.span,
            hint=f"Quantities are {listed(names)}.",
        )
        return None

    def positive(self, clause: Clause, words: str, need: Measure) -> Value | None:
        """A value that must be greater than zero."""
        value = self.quantity(clause.content, words, need)  # type: ignore[arg-type]
        number = value.expression if value is not None else None
        if not isinstance(number, Number) or number.value > 0:
            return value
        self._book.problems.add(
            "value.positive",
            f"{words} must be greater than zero",
            clause.span,
            hint="Write a positive value.",
        )
        return None
