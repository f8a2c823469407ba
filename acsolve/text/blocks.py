"""Blocks and cascades written out: one scope for each copy."""

from __future__ import annotations

import re
from typing import NamedTuple

from acsolve.circuit.cascade import Row
from acsolve.circuit.kind import KINDS, LETTERS
from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text import limits
from acsolve.text.book import Book
from acsolve.text.loops import refuse_parts
from acsolve.text.scope import Draft, Given, Scope, Turns
from acsolve.text.spell import node_name, spelled, whole
from acsolve.text.tree import (
    Argument,
    Block,
    GroundWord,
    KindText,
    Literal,
    Numbered,
    Path,
    Place,
    Reference,
)
from acsolve.text.walk import Walker
from acsolve.text.words import comma_inside, listed, meant


def settle(scope: Scope, book: Book, walker: Walker) -> None:
    """Find the kind of every draft in a scope, and write out the blocks among them."""
    book.scopes.append(scope)
    for draft in scope.drafts.values():
        word = draft.kind.word if draft.kind else LETTERS.get(draft.local[0])
        if word is None:
            _unstated(draft, book)
        elif word in book.blocks and (draft.kind is not None):
            if word not in book.refused_blocks and _is_fitted(draft, book):
                _copies(draft, book.blocks[word], book, walker)
        elif word in KINDS:
            draft.definition = KINDS[word]
            book.parts.append(draft)
            book.by_name[draft.name] = draft
            if len(book.parts) > limits.PARTS:
                refuse_parts(draft.span, book)
        else:
            _unknown(draft, word, book)


def _is_fitted(draft: Draft, book: Book) -> bool:
    """Whether a block is written out; it may be left out, but has no value."""
    scope = draft.scope
    given = scope.values.get(draft.local) or scope.arguments.get(draft.local)
    value = given.text if given is not None else draft.own_value
    if value is None:
        return True
    if value.formula is not None:
        word = draft.kind.word if draft.kind else "a block"
        book.problems.add(
            "name.not-a-value",
            f"{draft.local} is a copy of {word} and has no value of its own",
            value.span,
            hint=f"Give values to the parts inside: {draft.local}.R = …",
        )
        return True
    book.left_out.add(draft.name)
    book.copies[draft.name] = draft
    return False


def _unstated(draft: Draft, book: Book) -> None:
    kind = "opamp(…)" if draft.ends is None else "impedance(…)"  # no op-amp stands in a chain
    book.problems.add(
        "kind.unstated",
        f"the kind of {draft.local} is not stated",
        draft.span,
        hint=f"State it: {draft.local} : {kind}; only names that start with R, L or C "
        "are resistors, inductors and capacitors without a word.",
    )


def _unknown(draft: Draft, word: str, book: Book) -> None:
    assert draft.kind is not None, "letters lead to kinds that exist"
    known = [*KINDS, *book.blocks]
    if word in book.problems.broken_words:
        return
    book.problems.add(
        "kind.unknown",
        f"{word} is neither a kind of part nor a block",
        draft.kind.word_span,
        hint=meant(word, known, f"Kinds are {listed(KINDS)}."),
    )


# ---------------------------------------------------------------- copies


class _Copies(NamedTuple):
    """What all copies of one block share."""

    draft: Draft
    block: Block
    number: int
    outer: dict[str, str]  # pin -> node outside
    arguments: dict[str, Given]
    inner: list[tuple[Path, Given]]  # values for names deeper inside


def _copies(draft: Draft, block: Block, book: Book, walker: Walker) -> None:
    """Write out the copies of a block that a draft asks for."""
    scope, kind = draft.scope, draft.kind
    assert kind is not None, "a block is always stated"
    if scope.depth >= limits.NESTING:
        book.problems.refuse(
            "limit.nesting",
            f"blocks stand more than {limits.NESTING} deep",
            kind.word_span,
            hint="Write the inner blocks flat.",
        )
    book.copies[draft.name] = draft
    count = _count(draft, book)
    outer = _pin_nodes(draft, block, book)
    if count is None or outer is None:
        return
    arguments, inner = _arguments(kind, block, scope, draft.kind_turns)
    shared = _Copies(draft, block, count, outer, arguments, inner)
    if count > 1 and not scope.prefix:
        _note_row(shared, book)
    for number in range(1, count + 1):
        book.step(kind)
        child = _copy(shared, number, book)
        walker.enter(block.body, child)
        settle(child, book, walker)
        if number == 1:
            _check_arguments(draft, block, child, book)


def _note_row(shared: _Copies, book: Book) -> None:
    """Remember copies in a row of a block with two pins."""
    pins = [pin for pin, _ in shared.block.head.pins]
    if len(pins) == 2:
        near, far = (shared.outer[pin] for pin in pins)
        name = shared.draft.name
        row = Row(name=name, count=shared.number, near=near, far=far, pin=pins[1])
        book.rows.append(row)


def _copy(shared: _Copies, number: int, book: Book) -> Scope:
    """The scope of one copy, its pins connected to the nodes outside and to its neighbours."""
    draft, count = shared.draft, shared.number
    pins = [pin for pin, _ in shared.block.head.pins]
    stem = f"{draft.name}[{number}]" if count > 1 else draft.name
    nodes = dict(shared.outer)
    if number > 1:
        nodes[pins[0]] = f"{draft.name}[{number - 1}].{pins[1]}"
    if number < count:
        nodes[pins[1]] = f"{stem}.{pins[1]}"
    for path, given in shared.inner:
        local = spelled(path, draft.scope, draft.kind_turns, book)
        if local is not None:
            book.overrides.setdefault(f"{stem}.{local}", given)
    child = Scope(
        prefix=f"{stem}.",
        parent=draft.scope.file,
        block=shared.block,
        pins=nodes,
        arguments=shared.arguments,
        depth=draft.scope.depth + 1,
    )
    for pin, node in nodes.items():
        child.nodes[pin] = draft.span
        if f"{stem}.{pin}" != node:
            book.nodes.unite((node, f"{stem}.{pin}"))
    return child


def _count(draft: Draft, book: Book) -> int | None:
    kind = draft.kind
    if kind is None or kind.count is None:
        return 1
    count = whole(kind.count, draft.scope, draft.kind_turns, book, what="the number of copies")
    if count is None:
        return None
    if count > limits.RANGE:
        book.problems.refuse(
            "limit.range",
            f"{count:,} copies are asked for; the limit is {limits.RANGE:,}",
            kind.count.span,
            hint="Use fewer copies.",
        )
    if count < 1:
        book.problems.add(
            "block.count",
            f"{count} copies of a block cannot stand in a row",
            kind.count.span,
            hint="Write 1 or more, or take the block out with absent.",
        )
        return None
    return count


def _pin_nodes(draft: Draft, block: Block, book: Book) -> dict[str, str] | None:
    """The node outside at each pin of a block, or None once a problem is recorded."""
    pins = [pin for pin, _ in block.head.pins]
    kind = draft.kind
    assert kind is not None, "a block is always stated"
    if len(pins) < 2 and (draft.ends is not None or kind.count is not None):
        book.problems.add(
            "block.pins",
            f"{block.head.word} has one pin and can neither stand in a chain nor be cascaded",
            draft.span,
            hint=f"Write {draft.local} : {block.head.word}({pins[0]} = node) by itself.",
        )
        return None
    nodes = dict(zip(pins, draft.ends or (), strict=False))
    if not _stated_pins(draft, pins, nodes, book):
        return None
    missing = [pin for pin in pins if pin not in nodes]
    if missing:
        _missing_pins(draft, kind, missing, pins, book)
        return None
    return nodes


def _stated_pins(draft: Draft, pins: list[str], nodes: dict[str, str], book: Book) -> bool:
    """Add the pins that arguments connect; whether all is well."""
    for argument in draft.kind.arguments if draft.kind else ():
        if argument.path is None or argument.path.name not in pins:
            continue
        pin = argument.path.name
        if pin in nodes:
            book.problems.add(
                "terminal.twice",
                f"pin {pin} of {draft.local} is connected twice",
                argument.span,
                hint="In a chain a block stands between its first two pins; name the others only.",
            )
            return False
        node = terminal_node(argument, draft.scope, draft.kind_turns, book)
        if node is None:
            return False
        nodes[pin] = node
    return True


def _missing_pins(
    draft: Draft, kind: KindText, missing: list[str], pins: list[str], book: Book
) -> None:
    wanted = ", ".join(f"{pin} = node" for pin in pins)
    book.problems.add(
        "terminal.missing",
        f"{draft.local} leaves {listed(missing)} of {kind.word} open",
        kind.span,
        hint=f"Place it in a chain, or write {draft.local} : {kind.word}({wanted}).",
    )


def terminal_node(argument: Argument, scope: Scope, turns: Turns, book: Book) -> str | None:
    """The full name of the node that an argument names."""
    formula, value = argument.value.formula, argument.value
    place: Place | None = None
    match formula:
        case Reference(path):
            place = path
        case GroundWord(span):
            place = Path("gnd", (), span)
        case Literal(text, None, False, span):
            place = Numbered(text, span)
    if place is None or value.angle or value.tolerance or value.at:
        book.problems.add(
            "terminal.node",
            f"{argument.path.span.text if argument.path else 'a terminal'} needs a node, "
            f"got {value.span.text}",
            value.span,
            hint="Write the name of a node, or gnd.",
        )
        return None
    local = node_name(place, scope, turns, book)
    if local is None:
        return None
    if ("." in local or "~" in local) and not book.flattened:
        scope.reached.append((scope.prefix + local, place))
        return scope.prefix + local
    scope.nodes.setdefault(local, place.span)
    return scope.node(local)


def _arguments(
    kind: KindText, block: Block, scope: Scope, turns: Turns
) -> tuple[dict[str, Given], list[tuple[Path, Given]]]:
    """Values for names of the block, and for names deeper inside."""
    pins = {pin for pin, _ in block.head.pins}
    plain: dict[str, Given] = {}
    inner: list[tuple[Path, Given]] = []
    for argument in kind.arguments:
        path = argument.path
        if path is None or path.name in pins:
            continue
        given = Given(argument.value, scope, turns, path.span)
        if path.name is not None:
            plain.setdefault(path.name, given)
        else:
            inner.append((path, given))
    return plain, inner


def refuse_comma(argument: Argument, book: Book) -> bool:
    """Report a decimal comma, which makes an argument of what follows it."""
    span = argument.span
    if argument.path is not None or not comma_inside(span.source.text, span.start):
        return False
    left = re.search(r"[0-9]+$", span.source.text[max(0, span.start - 20) : span.start - 1])
    assert left is not None, "a digit stands before the comma"
    whole = Span(span.source, span.start - 1 - len(left[0]), span.end)
    book.problems.add(
        "value.spelling",
        f"{whole.text} has a comma where the decimal point belongs",
        whole,
        hint=f"Write {left[0]}.{span.text}.",
    )
    return True


def _check_arguments(draft: Draft, block: Block, child: Scope, book: Book) -> None:
    """Report arguments that name nothing in the block, or name it twice."""
    assert draft.kind is not None, "a block is always stated"
    known = [*child.drafts, *child.quantities]
    pins = [pin for pin, _ in block.head.pins]
    seen: dict[str, Argument] = {}
    for argument in draft.kind.arguments:
        path = argument.path
        name = path.name if path else None
        if refuse_comma(argument, book):
            continue
        if path is None or (name is not None and name not in known and name not in pins):
            if name in book.problems.broken_words:
                continue
            book.problems.add(
                "block.argument",
                f"{block.head.word} has no {path.span.text}"
                if path
                else f"an argument of the block {block.head.word} must be named",
                argument.span,
                hint=meant(name or "", [*known, *pins], "Write name = value")
                if name
                else f"Names inside it are {listed(known[:20])}.",
            )
        elif name is not None and name in seen:
            book.problems.add(
                "value.twice",
                f"{name} is given two values",
                argument.span,
                hint="Keep one.",
                labels=(Label(seen[name].span, "first given here"),),
            )
        elif name is not None:
            seen[name] = argument
