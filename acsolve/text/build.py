"""From statements to the netlist."""

from __future__ import annotations

from collections.abc import Iterable
from contextlib import suppress
from dataclasses import replace
from typing import Any, TypeVar

from acsolve.circuit.cascade import cascades
from acsolve.circuit.netlist import Netlist, Part, Variant
from acsolve.circuit.value import Value
from acsolve.errors import Label
from acsolve.source import Source, Span
from acsolve.text import checks, limits, tree
from acsolve.text.blocks import settle
from acsolve.text.book import Book
from acsolve.text.couplings import Couplings
from acsolve.text.formula import Formulas
from acsolve.text.givens import Givens
from acsolve.text.loops import refuse_loops, refuse_size
from acsolve.text.measure import Solver
from acsolve.text.nest import nested
from acsolve.text.parts import Parts
from acsolve.text.problems import Problems, RefusedError
from acsolve.text.quantities import Quantities
from acsolve.text.questions import Questions
from acsolve.text.references import Lookup
from acsolve.text.variants import Variants
from acsolve.text.walk import Walker

_T = TypeVar("_T")
_FILE_ONLY = (tree.Title, tree.Caution, tree.Port, tree.Ask, tree.Goal, tree.Flattened)


def build(source: Source, found: list[tree.Statement], problems: Problems) -> Netlist:
    """The netlist that the statements describe; problems are recorded, not raised."""
    netlist = Netlist(source=source)
    with suppress(RefusedError):
        body = nested(found, problems)
        builder = _Builder(source, body, problems)
        try:
            netlist = builder.netlist()
        finally:
            builder.close()
    return netlist


class _Builder:
    """The stages of building, in order."""

    def __init__(self, source: Source, body: tuple[tree.Nested, ...], problems: Problems) -> None:
        self._body = body
        self._by_type: dict[type, list[Any]] = {}
        for item in body:
            self._by_type.setdefault(type(item), []).append(item)
        self._problems = problems
        self._book = Book(source, problems)
        self._solver = Solver()
        self._lookup = Lookup(self._book)
        formulas = Formulas(self._book, self._solver, self._lookup)
        self._givens = Givens(self._book, formulas, self._solver)
        self._walker = Walker(self._book)

    def netlist(self) -> Netlist:
        """The whole netlist."""
        book = self._book
        self._gather()
        self._write_out()
        quantities = Quantities(book, self._givens, self._lookup, self._solver)
        quantities.read()
        parts = self._connected(Parts(book, self._givens).all())
        checks.check_names(book)
        checks.check_overrides(book)
        checks.check_reached(book)
        couplings = Couplings(book, self._givens)
        coupled = couplings.all()
        netlist = Netlist(
            title=self._title(),
            parts=tuple(parts),
            couplings=tuple(coupled),
            cautions=tuple(item.text for item in self._of(tree.Caution)),
            aliases=book.nodes.aliases(),
            source=book.source,
        )
        netlist = self._asked(netlist, parts)
        checks.check_suspects(book)
        variants = Variants(book, self._givens, self._lookup, self._walker, couplings)
        netlist = self._with_variants(netlist, variants)
        netlist = replace(netlist, quantities=quantities.finished())
        self._last_checks(netlist)
        return replace(netlist, cascades=cascades(netlist, book.rows))

    def close(self) -> None:
        """Let go of all drafts at once, without waiting for the collector."""
        for scope in (self._book.file, *self._book.scopes):
            scope.clear()

    # ------------------------------------------------------------ stages

    def _of(self, kind: type[_T]) -> list[_T]:
        return self._by_type.get(kind, [])

    def _gather(self) -> None:
        """Blocks, and statements that have no meaning where they stand."""
        book = self._book
        book.flattened = bool(self._of(tree.Flattened))
        for block in self._of(tree.Block):
            word = block.head.word
            if word in book.blocks:
                self._twice("block", word, block.head.word_span, book.blocks[word].head.word_span)
            else:
                book.blocks[word] = block
            _check_pins(block, self._problems)
        for block in self._of(tree.Block):
            _check_place(block, self._problems)
        for repeat in self._of(tree.Repeat):
            _check_place(repeat, self._problems)
        for statement in self._of(tree.Port):
            if statement.path.name:
                book.file.ports.setdefault(statement.path.name, statement.path.span)

    def _twice(self, what: str, name: str, span: Span, first: Span) -> None:
        self._problems.add(
            "name.twice",
            f"the {what} {name} is named twice",
            span,
            hint="Give the second one a name of its own.",
            labels=(Label(first, "first named here"),),
        )

    def _write_out(self) -> None:
        """All drafts, copies of blocks included, and all joined nodes."""
        book = self._book
        refuse_loops(book)
        refuse_size(self._body, book)
        self._walker.enter(self._body, book.file)
        settle(book.file, book, self._walker)
        for group in book.joins:
            book.nodes.unite(group)

    def _connected(self, parts: list[Part]) -> list[Part]:
        """The parts at the nodes that are left after joining."""
        nodes = self._book.nodes
        if nodes.above:
            find = nodes.find
            parts = [replace(part, nodes=tuple(map(find, part.nodes))) for part in parts]
        if len(parts) > limits.NODES // 4:  # no kind has more than four terminals
            self._count_nodes(parts)
        return parts

    def _count_nodes(self, parts: list[Part]) -> None:
        seen: set[str] = set()
        for part in parts:
            seen.update(part.nodes)
            if len(seen) > limits.NODES:
                self._problems.refuse(
                    "limit.nodes",
                    f"this circuit has more than {limits.NODES:,} nodes",
                    part.span,
                    hint="Use fewer copies, or smaller ranges.",
                )

    def _title(self) -> str | None:
        titles = self._of(tree.Title)
        if len(titles) > 1:
            self._twice("title", f'"{titles[1].text}"', titles[1].span, titles[0].span)
        return titles[0].text if titles else None

    def _asked(self, netlist: Netlist, parts: Iterable[Part]) -> Netlist:
        """Ports, questions and goals."""
        known: set[str] = set()

        def exists(node: str) -> bool:
            if self._book.flattened:
                return True  # nodes whose parts are not fitted may still be asked about
            if not known:
                known.update(checks.known_nodes(self._book))
                known.update(self._book.nodes.above)
                known.update(node for part in parts for node in part.nodes)
            return node in known

        ammeters = {part.name: part.nodes for part in parts if part.kind == "ammeter"}
        questions = Questions(self._book, self._givens, exists, ammeters)
        questions.read_ports(self._of(tree.Port))
        asked = [questions.question(item) for item in self._of(tree.Ask)]
        goals = [questions.goal(item) for item in self._of(tree.Goal)]
        return replace(
            netlist,
            ports=questions.ports,
            questions=tuple(item for item in asked if item is not None),
            goals=tuple(item for item in goals if item is not None),
        )

    def _with_variants(self, netlist: Netlist, variants: Variants) -> Netlist:
        known = {item.name: item for item in netlist.couplings}
        found: dict[str, Variant] = {}
        for body in self._of(tree.VariantBody):
            variant = variants.read(body, known)
            if variant.name in found:
                first = found[variant.name].span
                assert first is not None, "variants of a text have a place"
                self._twice("variant", f'"{variant.name}"', body.head.span, first)
                continue
            found[variant.name] = variant
        return replace(netlist, variants=found)

    def _last_checks(self, netlist: Netlist) -> None:
        values: dict[str, Value] = dict(netlist.values())
        spans = {name: value.span for name, value in values.items() if value.span is not None}
        checks.check_mentions(self._lookup.mentioned, values, self._book)
        checks.check_circles(values, spans, self._book)
        for variant in netlist.variants.values():
            changed = {**values, **variant.values}
            checks.check_variant(variant, changed, self._book)
            if variant.values:
                checks.check_circles(changed, spans, self._book)
        symbols = any(item.value.expression is None for item in netlist.quantities.values())
        checks.warn(netlist.parts, symbols, self._book)


def _check_pins(block: tree.Block, problems: Problems) -> None:
    seen: dict[str, Span] = {}
    for pin, span in block.head.pins:
        if pin in seen:
            problems.add(
                "name.twice",
                f"the pin {pin} is named twice",
                span,
                hint="Each pin has a name of its own.",
                labels=(Label(seen[pin], "first named here"),),
            )
        seen[pin] = span


def _check_place(item: tree.Block | tree.Repeat, problems: Problems) -> None:
    """Titles, questions and the like belong to the file, not to a block or repeat."""
    word = "block" if isinstance(item, tree.Block) else "repeat"
    for inner in item.body:
        if isinstance(inner, _FILE_ONLY):
            problems.add(
                "syntax.nesting",
                f"this line belongs to the file, not to a {word}",
                inner.span,
                hint=f"Move it below the end of the {word}.",
            )
        elif isinstance(inner, tree.Repeat):
            _check_place(inner, problems)
