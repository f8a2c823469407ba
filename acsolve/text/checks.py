"""What only the whole text can tell: clashes of names, values of nothing, loops of values."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from functools import partial

from acsolve.circuit.expression import Number, names
from acsolve.circuit.kind import KINDS
from acsolve.circuit.netlist import Part, Variant
from acsolve.circuit.value import Value
from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text.book import Book
from acsolve.text.chains import DESIGNATOR
from acsolve.text.quantities import unused
from acsolve.text.scope import Scope
from acsolve.text.tree import Path
from acsolve.text.words import listed, meant


def check_names(book: Book) -> None:
    """Nodes, parts, quantities, ports and blocks share one namespace in each scope."""
    for scope in book.scopes:
        _clashes(scope, book)
        _values_of_nothing(scope, book)
    for word, block in book.blocks.items():
        if word in KINDS:
            book.problems.add(
                "name.twice",
                f"{word} is a kind of part and cannot name a block",
                block.head.word_span,
                hint="Choose another name.",
            )


def _clashes(scope: Scope, book: Book) -> None:
    tables: list[tuple[str, Mapping[str, Span]]] = [
        ("a node", scope.nodes),
        ("a part", {name: draft.span for name, draft in scope.drafts.items()}),
        ("a named quantity", {name: item.span for name, item in scope.quantities.items()}),
        ("a port", scope.ports),
    ]
    if scope is book.file:
        heads = {word: block.head.word_span for word, block in book.blocks.items()}
        tables.append(("a block", heads))
    for number, (what, table) in enumerate(tables):
        for other, second in tables[number + 1 :]:
            for name in table.keys() & second.keys():
                _clash(name, (what, table[name]), (other, second[name]), scope, book)


def _clash(
    name: str, one: tuple[str, Span], two: tuple[str, Span], scope: Scope, book: Book
) -> None:
    (first, place), (second, later) = sorted((one, two), key=lambda item: item[1].start)
    around = book.suspects.get((scope.prefix, name))
    if around and {first, second} == {"a node", "a part"}:
        left, item, right = around[0]
        _in_a_row(left.span.text, item, right.span.text, book)
        return
    book.problems.add(
        "name.twice",
        f"{name} is {first} in one place and {second} in another",
        later,
        hint="Nodes, parts, quantities, ports and blocks share their names; rename one.",
        labels=(Label(place, f"{first} here"),),
    )


def _in_a_row(left: str, item: Path, right: str, book: Book) -> None:
    book.problems.add(
        "chain.row",
        f"{item.name} stands where a node belongs, between {left} and {right}",
        item.span,
        hint="Put a node between parts, or join them: R1 + R2 in series, R1 || R2 in parallel.",
    )


def check_suspects(book: Book) -> None:
    """A node named like a part, met once in the whole file, is a part without its nodes."""
    if not book.suspects:
        return
    met: dict[str, int] = {}
    for part in book.parts:
        for node in part.ends or ():
            met[node] = met.get(node, 0) + 1
    scopes = {scope.prefix: scope for scope in book.scopes}
    for (prefix, name), places in book.suspects.items():
        scope = scopes.get(prefix)
        if scope is None or name in scope.drafts or not DESIGNATOR.fullmatch(name):
            continue
        if scope.node(name) in book.asked:
            continue
        if len(places) == 1 and met.get(scope.node(name), 0) <= 2 and name not in scope.pins:
            left, item, right = places[0]
            _in_a_row(left.span.text, item, right.span.text, book)


def _values_of_nothing(scope: Scope, book: Book) -> None:
    """Values given to names that are no part of this scope."""
    problems = book.problems
    for name, given in scope.values.items():
        if name in scope.drafts or name.partition("[")[0] in problems.broken_words:
            continue
        if name in scope.quantities:
            problems.add(
                "value.twice",
                f"{name} is named with let and given a value once more",
                given.span,
                hint="Keep one; other values for the same circuit go into a variant.",
                labels=(Label(scope.quantities[name].span, "named here"),),
            )
        elif name in scope.nodes:
            problems.add(
                "name.not-a-value",
                f"{name} is a node and has no value",
                given.span,
                hint="Give values to parts and named quantities.",
            )
        else:
            otherwise = (
                f"Place it in a chain: a -- {name} -- b."
                if name[:1] in "RLC"
                else f"A named quantity is written let {name} = …"
            )
            problems.add(
                "name.unplaced",
                f"{name} has a value and stands nowhere in the circuit",
                given.span,
                hint=partial(meant, name, scope.drafts, otherwise),
            )


def check_overrides(book: Book) -> None:
    """Values given from outside to names that no block holds."""
    for name, given in book.overrides.items():
        first = name.partition("[")[0].partition(".")[0]
        if name not in book.met_overrides and first not in book.problems.broken_words:
            book.problems.add(
                "name.unknown",
                f"{name} is not known here",
                given.span,
                hint=partial(_near_override, name, first, book),
            )


def _near_override(name: str, first: str, book: Book) -> str | None:
    owner, _, attribute = name.rpartition(".")
    draft = book.by_name.get(owner)
    if draft is not None and draft.definition is not None:
        known = [item.name for item in draft.definition.attributes]
        return meant(attribute, known, f"{owner} has {listed(known)}.")
    inner = [item for item in book.by_name if item.startswith(f"{owner}.")]
    otherwise = None
    if first not in {key.partition("[")[0] for key in book.copies}:
        otherwise = f"{first} is no copy of a block."
    return meant(name, inner or book.by_name, otherwise)


def known_nodes(book: Book) -> set[str]:
    """The full name of every node, those inside copies included."""
    known = {"gnd"}
    for scope in book.scopes:
        known.update([scope.node(local) for local in scope.nodes])
        known.update([scope.prefix + pin for pin in scope.pins])
    return known


def check_reached(book: Book) -> None:
    """Nodes inside blocks, and nodes that are joined, must exist."""
    if not any(scope.reached for scope in book.scopes) or book.flattened:
        return
    known = known_nodes(book)
    for scope in book.scopes:
        for name, place in scope.reached:
            if name in known:
                continue
            word = place.word if isinstance(place, Path) else name
            if word in book.problems.broken_words:
                continue
            book.problems.add(
                "name.unknown-node",
                f"there is no node {name}",
                place.span,
                hint=partial(_near_node, name, known),
            )


def _near_node(name: str, known: set[str]) -> str | None:
    owner = name.rpartition(".")[0]
    near = [item for item in known if item.startswith(f"{owner}.")] if owner else known
    return meant(name, sorted(near), "Nodes are named in chains and by terminals.")


# ---------------------------------------------------------------- values


def check_mentions(mentioned: Mapping[str, Span], values: Mapping[str, Value], book: Book) -> None:
    """Names in expressions must have a value or be a symbol."""
    for name, span in mentioned.items():
        if name in values:
            continue
        if name in book.left_out or name.rpartition(".")[0] in book.left_out:
            book.problems.add(
                "name.absent",
                f"{span.text} is not fitted, so its value cannot be used",
                span,
                hint="Name the value with let, and use that.",
            )
        elif not book.problems.errors:
            book.problems.add(
                "name.no-value",
                f"{span.text} has no value",
                span,
                hint="State it where the part is declared.",
            )


def check_variant(variant: Variant, values: Mapping[str, Value], book: Book) -> None:
    """No value that stays may be made of a part that the variant leaves out."""
    for name, value in values.items():
        if value.expression is None or isinstance(value.expression, Number):
            continue
        if _owner(name, variant.absent) is not None:
            continue
        for inner in sorted(names(value.expression)):
            missing = _owner(inner, variant.absent)
            if missing is not None:
                book.problems.add(
                    "name.absent",
                    f"{missing} is not fitted in {variant.name}, and {name} is made of its value",
                    value.span,
                    hint=f"Give {name} another value in the variant.",
                )


def _owner(name: str, parts: frozenset[str]) -> str | None:
    """The part among these that a name of a value belongs to."""
    return next((item for item in (name, name.rpartition(".")[0]) if item in parts), None)


def check_circles(values: Mapping[str, Value], spans: Mapping[str, Span], book: Book) -> None:
    """No value may depend on itself."""
    graph = {
        name: sorted(names(value.expression))
        for name, value in values.items()
        if value.expression is not None and not isinstance(value.expression, Number)
    }
    state: dict[str, int] = {}  # 1: on the way, 2: done
    for start in graph:
        trail: list[tuple[str, int]] = [(start, 0)] if start not in state else []
        while trail:
            name, number = trail[-1]
            state[name] = 1
            inner = graph.get(name, [])
            if number == len(inner):
                state[name] = 2
                trail.pop()
                continue
            trail[-1] = (name, number + 1)
            follow = inner[number]
            if state.get(follow) == 1:
                _circle([item for item, _ in trail], follow, spans, book)
            elif follow not in state and follow in graph:
                trail.append((follow, 0))


def _circle(trail: list[str], back: str, spans: Mapping[str, Span], book: Book) -> None:
    circle = trail[trail.index(back) :]
    through = f" through {listed(circle[1:])}" if len(circle) > 1 else ""
    book.problems.add(
        "value.circle",
        f"the value of {back} depends on itself{through}",
        spans.get(back),
        hint="Give one of them a value of its own.",
    )


def warn(parts: Iterable[Part], symbols: bool, book: Book) -> None:
    """Things that are allowed and yet often a slip."""
    bare = [
        part for part in parts if any(value.expression is None for value in part.values.values())
    ]
    valued = sum(1 for part in parts if part.values) - len(bare)
    if len(bare) == 1 and valued >= 2 and not symbols:
        part = bare[0]
        open_ = [name for name, value in part.values.items() if value.expression is None]
        what = "no value" if part.definition.principal else f"no {listed(open_, 'and no')}"
        book.problems.warn(
            "value.lone-symbol",
            f"{part.name} has {what} while all other parts have their values",
            bare[0].span,
            hint="It stays a symbol; give it a value if its name was mistyped elsewhere.",
        )
    for name, span in unused(book):
        book.problems.warn(
            "name.unused", f"{name} is named and never used", span, hint="Take the line out."
        )
    used = {draft.kind.word for draft in book.copies.values() if draft.kind}
    for word, block in book.blocks.items():
        if word not in used:
            book.problems.warn(
                "block.unused",
                f"the block {word} is never used",
                block.head.word_span,
                hint=f"Place it: a -- N1 : {word} -- b.",
            )
