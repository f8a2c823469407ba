"""The syntax tree: what a statement says, not yet what it means. Every node has a span."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from typing import TYPE_CHECKING

from acsolve.source import Span

if TYPE_CHECKING:
    from acsolve.text.scan import Tokens


@dataclass(frozen=True, slots=True)
class Literal:
    """A number as written: `100`, `100 nF` (with `unit`), or with letters attached."""

    text: str
    unit: str | None
    glued: bool
    span: Span


@dataclass(frozen=True, slots=True)
class Reference:
    """A name in an expression."""

    path: Path
    span: Span


@dataclass(frozen=True, slots=True)
class GroundWord:
    """The word `gnd` where an expression could stand."""

    span: Span


@dataclass(frozen=True, slots=True)
class Signed:
    """Signs in front of a formula."""

    negative: bool
    formula: Formula
    span: Span


@dataclass(frozen=True, slots=True)
class Terms:
    """Formulas joined by + and -, or by * and /, from left to right."""

    first: Formula
    rest: tuple[tuple[str, Formula], ...]
    span: Span


@dataclass(frozen=True, slots=True)
class Raised:
    """A power."""

    base: Formula
    exponent: Formula
    span: Span


@dataclass(frozen=True, slots=True)
class Applied:
    """A function and its argument."""

    function: Path
    argument: Formula
    span: Span


@dataclass(frozen=True, slots=True)
class Quoted:
    """A text in double quotes, where an attribute takes one."""

    text: str
    span: Span


Formula = Literal | Reference | GroundWord | Signed | Terms | Raised | Applied | Quoted


@dataclass(frozen=True, slots=True)
class Index:
    """An index, or a range of indices where `high` is given."""

    low: Formula
    high: Formula | None
    span: Span


@dataclass(frozen=True, slots=True)
class Step:
    """A word of a name with its indices; `joint` stands before it ("", "." or "~")."""

    joint: str
    word: str
    indices: tuple[Index, ...]


@dataclass(frozen=True, slots=True)
class Path:
    """A name: words with indices, joined by dots.

    `name` is the whole name where it is one word with no indices but plain whole numbers
    (by far the most usual case, so it is kept ready-made); else None, and `steps` tell.
    """

    name: str | None
    steps: tuple[Step, ...]
    span: Span

    @property
    def word(self) -> str:
        """The first word, without indices."""
        return self.steps[0].word if self.name is None else self.name.partition("[")[0]

    @property
    def indexed(self) -> bool:
        """Whether an index stands anywhere in the name."""
        if self.name is not None:
            return self.name.endswith("]")
        return any(step.indices for step in self.steps)


@dataclass(frozen=True, slots=True)
class Numbered:
    """A whole number that stands for a node."""

    text: str
    span: Span


Place = Path | Numbered


@dataclass(frozen=True, slots=True)
class Amount:
    """One side of a tolerance; `percent` tells that it is a part of the nominal value."""

    formula: Formula
    percent: bool
    span: Span


@dataclass(frozen=True, slots=True)
class ToleranceText:
    """`± amount`, or two signed percentages."""

    amounts: tuple[Amount, ...]
    spread: str | None
    span: Span


@dataclass(frozen=True, slots=True)
class ValueText:
    """What stands right of an equals sign; no formula means `absent`."""

    formula: Formula | None
    angle: Formula | None
    tolerance: ToleranceText | None
    at: Formula | None
    span: Span


@dataclass(frozen=True, slots=True)
class Argument:
    """An argument of a kind or a block; without a path it is the principal value."""

    path: Path | None
    value: ValueText
    span: Span


@dataclass(frozen=True, slots=True)
class KindText:
    """`200 * section(R = 120 ohm)`: count, word, arguments."""

    count: Formula | None
    word: str
    word_span: Span
    arguments: tuple[Argument, ...]
    span: Span


@dataclass(frozen=True, slots=True)
class Fitted:
    """A part standing in a chain, with what the place says about it."""

    path: Path
    kind: KindText | None
    value: ValueText | None
    span: Span


@dataclass(frozen=True, slots=True)
class Arm:
    """Units joined by + (in series) or || (in parallel); `mixed` marks the second sign."""

    sign: str
    units: tuple[Item, ...]
    mixed: Span | None
    span: Span


Item = Path | Numbered | Fitted | Arm


@dataclass(frozen=True, slots=True)
class Chain:
    """A chain of nodes and arms, by turns."""

    items: tuple[Item, ...]
    span: Span


class Placed:
    """A chain of one part with a value in place between two plain nodes.

    Large files hold little else, so it keeps its tokens and is taken apart only where a
    statement about it needs more than its names.
    """

    __slots__ = ("_form", "_tokens")

    def __init__(self, tokens: Tokens, form: PlacedForm) -> None:
        self._tokens = tokens
        self._form = form

    def names(self) -> tuple[str, str, str]:
        """Left node, part, right node."""
        tokens, form = self._tokens, self._form
        text, base = tokens.script.text, tokens.base
        starts, ends = tokens.starts, tokens.ends
        left, part, right = form.left, form.part, form.right
        return (
            text[base + starts[left] : base + ends[left]],
            text[base + starts[part] : base + ends[part]],
            text[base + starts[right] : base + ends[right]],
        )

    @property
    def left(self) -> Span:
        """The place of the left node."""
        return self._tokens.span(self._form.left, self._form.left)

    @property
    def part(self) -> Span:
        """The place of the part's name."""
        return self._tokens.span(self._form.part, self._form.part)

    @property
    def right(self) -> Span:
        """The place of the right node."""
        return self._tokens.span(self._form.right, self._form.right)

    def literal(self) -> tuple[str, str | None, bool]:
        """The value: its number, its unit, and whether letters are attached to the number."""
        tokens, form = self._tokens, self._form
        unit = None if form.unit is None else tokens.text(form.unit)
        return tokens.text(form.number), unit, tokens.kinds[form.number] == "GLUED"

    def value_span(self) -> Span:
        """The place of the value."""
        form = self._form
        return self._tokens.span(form.number, form.number if form.unit is None else form.unit)

    def whole(self) -> Chain:
        """The chain taken apart."""
        return self._form.grow(self._tokens)

    def value(self) -> ValueText:
        """The value taken apart."""
        fitted = self.whole().items[1]
        assert isinstance(fitted, Fitted), "the form has a part with its value there"
        assert fitted.value is not None, "the form has a part with its value there"
        return fitted.value

    @property
    def span(self) -> Span:
        """The whole chain."""
        return self._tokens.span(self._form.left, self._form.right)


@dataclass(frozen=True, slots=True)
class PlacedForm:
    """Where the words of such a chain stand, by token number, and how it is taken apart."""

    left: int
    part: int
    number: int
    unit: int | None
    right: int
    grow: Callable[[Tokens], Chain]


@dataclass(frozen=True, slots=True)
class Assign:
    """Names and the value given to them."""

    targets: tuple[Path, ...]
    value: ValueText
    span: Span


@dataclass(frozen=True, slots=True)
class Declare:
    """Names and the kind stated for them."""

    targets: tuple[Path, ...]
    kind: KindText
    value: ValueText | None
    span: Span


@dataclass(frozen=True, slots=True)
class Let:
    """Named quantities, or symbols where there is no value."""

    targets: tuple[Path, ...]
    value: ValueText | None
    span: Span


@dataclass(frozen=True, slots=True)
class Couple:
    """Coupled inductors."""

    targets: tuple[Path, ...]
    value: ValueText | None
    span: Span


@dataclass(frozen=True, slots=True)
class Join:
    """Nodes made one."""

    places: tuple[Place, ...]
    span: Span


@dataclass(frozen=True, slots=True)
class LeaveOut:
    """Parts not fitted."""

    targets: tuple[Path, ...]
    span: Span


@dataclass(frozen=True, slots=True)
class PairText:
    """One node, or two in brackets."""

    first: Place
    second: Place | None
    span: Span


@dataclass(frozen=True, slots=True)
class Port:
    """A named pair."""

    path: Path
    pair: PairText
    span: Span


@dataclass(frozen=True, slots=True)
class Title:
    """The circuit's title."""

    text: str
    span: Span


@dataclass(frozen=True, slots=True)
class Caution:
    """A safety remark."""

    text: str
    span: Span


@dataclass(frozen=True, slots=True)
class Flattened:
    """The mark of a text in which names with dots stand as they are."""

    span: Span


@dataclass(frozen=True, slots=True)
class BlockHead:
    """The first line of a block."""

    word: str
    word_span: Span
    pins: tuple[tuple[str, Span], ...]
    span: Span


@dataclass(frozen=True, slots=True)
class RepeatHead:
    """The first line of a repetition."""

    word: str
    word_span: Span
    low: Formula
    high: Formula
    span: Span


@dataclass(frozen=True, slots=True)
class VariantHead:
    """The first line of a variant."""

    name: str
    span: Span


@dataclass(frozen=True, slots=True)
class End:
    """The last line of a block, a repetition or a variant."""

    span: Span


@dataclass(frozen=True, slots=True)
class LevelText:
    """A level; no formula means half power."""

    formula: Formula | None
    span: Span


@dataclass(frozen=True, slots=True)
class BandText:
    """A band of frequencies."""

    low: Formula
    high: Formula
    span: Span


@dataclass(frozen=True, slots=True)
class Clause:
    """One part of a question or goal: its word and what follows."""

    word: str
    content: PairText | BandText | Formula | tuple[LevelText, ...] | str
    span: Span


@dataclass(frozen=True, slots=True)
class Ask:
    """A question."""

    kind: str
    clauses: tuple[Clause, ...]
    span: Span


@dataclass(frozen=True, slots=True)
class Goal:
    """A limit for an answer."""

    clauses: tuple[Clause, ...]
    span: Span


@dataclass(frozen=True, slots=True)
class Broken:
    """A head that could not be read; it keeps its body and its `end` from being misread."""

    span: Span


Plain = (
    Chain | Placed | Assign | Declare | Let | Couple | Join | LeaveOut | Port | Title | Caution
    | Flattened | Ask | Goal
)  # fmt: skip
Head = BlockHead | RepeatHead | VariantHead
Statement = Plain | Head | End | Broken


@dataclass(frozen=True, slots=True)
class Block:
    """A block with its body."""

    head: BlockHead
    body: tuple[Nested, ...]

    @property
    def span(self) -> Span:
        """The first line."""
        return self.head.span


@dataclass(frozen=True, slots=True)
class Repeat:
    """A repetition with its body."""

    head: RepeatHead
    body: tuple[Nested, ...]

    @property
    def span(self) -> Span:
        """The first line."""
        return self.head.span


@dataclass(frozen=True, slots=True)
class VariantBody:
    """A variant with its body."""

    head: VariantHead
    body: tuple[Nested, ...]

    @property
    def span(self) -> Span:
        """The first line."""
        return self.head.span


Nested = Plain | Block | Repeat | VariantBody
