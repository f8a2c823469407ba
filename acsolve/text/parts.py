"""Drafts to parts: terminals, attributes, values."""

from __future__ import annotations

from dataclasses import replace

from acsolve.circuit.expression import Number
from acsolve.circuit.kind import KINDS, Attribute, Kind
from acsolve.circuit.netlist import Part
from acsolve.circuit.value import Value
from acsolve.errors import Label
from acsolve.text.blocks import refuse_comma, terminal_node
from acsolve.text.book import Book, is_absent
from acsolve.text.formula import UnreadableError
from acsolve.text.givens import Givens, PartPlace
from acsolve.text.references import need_of
from acsolve.text.scope import Draft, Given
from acsolve.text.tree import Argument, Placed, Quoted
from acsolve.text.words import listed, meant

#: Kinds whose principal value comes first and is the only one they must have.
_PLAIN = frozenset(
    kind.name
    for kind in KINDS.values()
    if kind.letter and kind.attributes[0].name == kind.principal
)


class Parts:
    """Makes the parts of a netlist from their drafts."""

    def __init__(self, book: Book, givens: Givens) -> None:
        self._book = book
        self._givens = givens

    def all(self) -> list[Part]:
        """Every part that is fitted, in file order."""
        made = []
        for draft in self._book.parts:
            part = self._part(draft)
            if part is not None:
                made.append(part)
        return made

    def _part(self, draft: Draft) -> Part | None:
        kind = draft.definition
        assert kind is not None, "only drafts of built-in kinds are kept as parts"
        if isinstance(draft.value, Placed) and (part := self._placed(draft, draft.value, kind)):
            return part
        given = self._principal(draft)
        if given is not None and is_absent(given.text):
            self._book.left_out.add(draft.name)
            return None
        arguments = draft.kind.arguments if draft.kind else ()
        if arguments or (draft.kind and draft.kind.count is not None):
            self._check_kind(draft, kind)
        nodes = self._nodes(draft, kind, arguments)
        values = self._values(draft, kind, given, arguments)
        file = self._file(draft, kind, arguments)
        if nodes is None:
            return None
        return Part(
            name=draft.name, kind=kind.name, nodes=nodes, values=values, file=file, span=draft.span
        )

    def _placed(self, draft: Draft, placed: Placed, kind: Kind) -> Part | None:
        """A part whose own literal value is all that is said of it; None where there is more."""
        scope, principal = draft.scope, kind.principal
        if draft.kind or draft.local in scope.values or scope.arguments or self._book.overrides:
            return None
        if principal is None or draft.ends is None or kind.name not in _PLAIN:
            return None
        value = self._givens.literal(placed, need_of(kind, kind.attributes[0]), scope)
        if value is None:
            return None
        return Part(
            name=draft.name, kind=kind.name, nodes=draft.ends, values={principal: value},
            span=draft.span,
        )  # fmt: skip

    def _file(self, draft: Draft, kind: Kind, arguments: tuple[Argument, ...]) -> str | None:
        """The text that a kind needs, as the name of a file."""
        for attribute in kind.attributes:
            if attribute.shape != "text":
                continue
            found = self._attribute(draft, attribute, arguments)
            text = None if found is None else found.text.formula
            if isinstance(text, Quoted) and text.text.strip():
                return text.text
            self._book.problems.add(
                "kind.argument",
                f"{draft.local} needs its {attribute.name}, a text in double quotes",
                draft.span if found is None else found.span,
                hint=f'Write {draft.local} : {kind.name}({attribute.name} = "coax.s2p", …).',
            )
        return None

    # ------------------------------------------------------------ terminals

    def _nodes(
        self, draft: Draft, kind: Kind, arguments: tuple[Argument, ...]
    ) -> tuple[str, ...] | None:
        """The node at each terminal, or None once a problem is recorded."""
        if not arguments and draft.ends is not None and kind.two_terminal:
            return draft.ends
        wanted = [item.name for item in kind.terminals if item.default is None]
        found = {item.name: item.default for item in kind.terminals if item.default}
        if draft.ends is not None:
            if len(wanted) != 2:
                self._not_in_chain(draft, kind, wanted)
                return None
            found.update(zip(wanted, draft.ends, strict=True))
        names = [item.name for item in kind.terminals]
        seen: set[str] = set(wanted) if draft.ends is not None else set()
        for argument in arguments:
            name = argument.path.name if argument.path else None
            if name not in names or kind.attribute(name or ""):
                continue
            if name in seen:
                self._twice(argument, draft)
                return None
            seen.add(name)
            node = terminal_node(argument, draft.scope, draft.kind_turns, self._book)
            if node is None:
                return None
            found[name] = node
        missing = [name for name in names if name not in found]
        if missing:
            self._missing(draft, kind, missing)
            return None
        return tuple(found[name] for name in names)

    def _twice(self, argument: Argument, draft: Draft) -> None:
        assert argument.path is not None, "terminals are named"
        self._book.problems.add(
            "terminal.twice",
            f"terminal {argument.path.name} of {draft.local} is connected twice",
            argument.span,
            hint="In a chain a part stands between its two terminals already.",
        )

    def _not_in_chain(self, draft: Draft, kind: Kind, wanted: list[str]) -> None:
        form = ", ".join(f"{name} = node" for name in wanted)
        self._book.problems.add(
            "terminal.chain",
            f"{draft.local} is {_named(kind)} with terminals {listed(wanted)} "
            "and cannot stand in a chain",
            draft.ends_span,
            hint=f"Write it on a line of its own: {draft.local} : {kind.name}({form}).",
        )

    def _missing(self, draft: Draft, kind: Kind, missing: list[str]) -> None:
        if draft.local in self._book.problems.broken_words:
            return
        form = ", ".join(f"{item.name} = node" for item in kind.terminals if not item.default)
        if kind.two_terminal:
            message = f"{draft.local} is not connected: it stands in no chain"
            hint = f"Write a -- {draft.local} -- b with the nodes at its ends."
        else:
            message = f"{draft.local} leaves terminal {listed(missing)} of {kind.name} open"
            hint = f"Write {draft.local} : {kind.name}({form})."
        self._book.problems.add("terminal.missing", message, draft.span, hint=hint)

    # ------------------------------------------------------------ arguments

    def _check_kind(self, draft: Draft, kind: Kind) -> None:
        """Report arguments that are neither a terminal nor an attribute of the kind."""
        assert draft.kind is not None, "the caller has looked"
        add = self._book.problems.add
        if draft.kind.count is not None:
            add(
                "block.count",
                f"{kind.name} is a single part and cannot be cascaded",
                draft.kind.count.span,
                hint="Only blocks can: 200 * section(…).",
            )
        known = [item.name for item in kind.terminals] + [item.name for item in kind.attributes]
        if kind.principal:
            known.append("tc")
        for argument in draft.kind.arguments:
            if argument.path is None:
                if refuse_comma(argument, self._book):
                    continue
                if kind.principal is None:
                    add(
                        "kind.argument",
                        f"{_named(kind)} has no value of its own; name the attribute",
                        argument.span,
                        hint=f"{kind.name} has {listed(known)}.",
                    )
            elif argument.path.name not in known:
                word = argument.path.span.text
                add(
                    "kind.argument",
                    f"{kind.name} has no terminal or attribute {word}",
                    argument.path.span,
                    hint=f"{meant(word, known, '') or ''} It has {listed(known)}.".strip(),
                )

    # ------------------------------------------------------------ values

    def _principal(self, draft: Draft) -> Given | None:
        """The value of a part: from outside, as an argument, or from the part's own scope."""
        book, scope, local = self._book, draft.scope, draft.local
        own = [scope.values[local]] if local in scope.values else []
        if (value := draft.own_value) is not None:
            own.append(Given(value, scope, draft.turns, value.span))
        if draft.kind is not None and draft.kind.arguments:
            principal = draft.definition.principal if draft.definition else None
            own += [
                Given(item.value, scope, draft.kind_turns, item.span)
                for item in draft.kind.arguments
                if principal and (item.path is None or item.path.name == principal)
            ]
        if len(own) > 1:
            own = self._only(own, draft)
        if book.overrides:
            full = draft.name
            names = [full]
            if draft.definition and draft.definition.principal:
                names.append(f"{full}.{draft.definition.principal}")
            for name in names:
                if name in book.overrides:
                    book.met_overrides.add(name)
                    return book.overrides[name]
        if scope.arguments and local in scope.arguments:
            return scope.arguments[local]
        return own[0] if own else None

    def _only(self, own: list[Given], draft: Draft) -> list[Given]:
        absent = [item for item in own if is_absent(item.text)]
        if absent:
            return absent
        first, second = sorted(own, key=lambda item: item.span.start)[:2]
        self._book.problems.add(
            "value.twice",
            f"{draft.local} is given two values",
            second.span,
            hint="Keep one; other values for the same circuit go into a variant.",
            labels=(Label(first.span, "first given here"),),
        )
        return own

    def _values(
        self, draft: Draft, kind: Kind, given: Given | None, arguments: tuple[Argument, ...]
    ) -> dict[str, Value]:
        """The values of a part by attribute."""
        values: dict[str, Value] = {}
        for attribute in kind.attributes:
            if attribute.shape == "text":
                continue
            if attribute.name == kind.principal:
                found = given
            else:
                found = self._attribute(draft, attribute, arguments)
            if found is not None and attribute.name in values:
                self._second_angle(draft, found, values)
            elif found is not None:
                self._read(draft, kind, attribute, found, values)
            elif attribute.own_symbol:
                values[attribute.name] = Value(span=draft.span)
        if arguments and kind.principal and kind.principal in values:
            self._temperature(draft, kind.principal, arguments, values)
        return values

    def _second_angle(self, draft: Draft, given: Given, values: dict[str, Value]) -> None:
        first = values["angle"].span
        self._book.problems.add(
            "value.twice",
            f"the angle of {draft.local} is given twice",
            given.text.span,
            hint="Keep one.",
            labels=(Label(first, "first given here"),) if first else (),
        )

    def _attribute(
        self, draft: Draft, attribute: Attribute, arguments: tuple[Argument, ...]
    ) -> Given | None:
        """What is given for an attribute beside the principal one."""
        if self._book.overrides:
            name = f"{draft.name}.{attribute.name}"
            if name in self._book.overrides:
                self._book.met_overrides.add(name)
                return self._book.overrides[name]
        found = [item for item in arguments if item.path and item.path.name == attribute.name]
        if len(found) > 1:
            self._book.problems.add(
                "value.twice",
                f"{attribute.name} of {draft.local} is given two values",
                found[1].span,
                hint="Keep one.",
                labels=(Label(found[0].span, "first given here"),),
            )
        if not found:
            return None
        return Given(found[0].value, draft.scope, draft.kind_turns, found[0].span)

    def _read(
        self,
        draft: Draft,
        kind: Kind,
        attribute: Attribute,
        given: Given,
        values: dict[str, Value],
    ) -> None:
        place = PartPlace(draft.name, kind, attribute)
        text, scope, turns, _ = given
        if text.formula is None:
            self._book.problems.add(
                "value.absent",
                f"{attribute.name} of {draft.local} cannot be absent; only a whole part can",
                text.span,
                hint=f"Leave {attribute.name} out.",
            )
            return
        value = self._givens.value(text, place, scope, turns)
        if value is None:
            return
        if attribute.at and value.at_hertz is None:
            self._book.problems.add(
                "value.at",
                f"{attribute.name} of {draft.local} holds at one frequency, which is not stated",
                text.span,
                hint=f"Write {attribute.name} = {text.span.text} at 1 MHz.",
            )
        values[attribute.name] = value
        if attribute.shape == "phasor":
            angle = self._givens.angle(text, scope, turns)
            if angle is not None:
                values["angle"] = angle
        self._note_negative(draft, kind, attribute, value)

    def _temperature(
        self,
        draft: Draft,
        principal: str,
        arguments: tuple[Argument, ...],
        values: dict[str, Value],
    ) -> None:
        """Put the temperature coefficient onto the principal value."""
        for item in arguments:
            if item.path is None or item.path.name != "tc" or item.value.formula is None:
                continue
            try:
                made = self._givens.coefficient(
                    item.value.formula, draft.local, draft.scope, draft.kind_turns
                )
            except UnreadableError:
                return
            values[principal] = replace(values[principal], temperature_coefficient=made)

    def _note_negative(self, draft: Draft, kind: Kind, attribute: Attribute, value: Value) -> None:
        number = value.expression
        if not isinstance(number, Number) or number.value.numerator >= 0:
            return
        if kind.letter is not None and attribute.name == kind.principal:
            self._book.problems.warn(
                "value.negative",
                f"{draft.local} is negative; a real {kind.name} is not",
                value.span,
                hint="It is taken as written.",
                severity="note",
            )


def _named(kind: Kind) -> str:
    word = kind.name.replace("_", " ")
    return f"{'an' if word[0] in 'aeiou' else 'a'} {word}"
