"""From a syntax template and the tokens of one statement to its syntax tree."""

from __future__ import annotations

import re
from collections.abc import Callable
from typing import Any

from acsolve.source import Span
from acsolve.text import tree
from acsolve.text.scan import Tokens
from acsolve.text.syntax import Template

_SHIELDED = re.compile(r'\\(["\\])')

Grower = Callable[["Grown"], Any]
Recipe = Callable[[Tokens], Any]


class Grown:
    """One node on its way: its parts already grown, its tokens at hand."""

    __slots__ = ("kind", "parts", "source", "span", "text", "tokens")

    def __init__(self, tokens: Tokens, span: Span, parts: list[Any]) -> None:
        self.tokens = tokens
        self.source = tokens.script.source
        self.text = tokens.text
        self.kind = tokens.kinds.__getitem__
        self.span = span
        self.parts = parts  # grown nodes, and token numbers

    def quoted(self, number: int) -> str:
        """The words inside double quotes; a backslash shields a quote or a backslash."""
        return _SHIELDED.sub(r"\1", self.place(number).text[1:-1])

    def place(self, number: int) -> Span:
        """The span of a token."""
        return self.tokens.span(number, number)


def recipe(template: Template) -> Recipe:
    """How to make the syntax tree of a statement from its tokens.

    Depth is bounded by the limit on brackets.
    """
    quick = _QUICK.get(template.rule)
    ready = quick(template) if quick else None
    if ready is not None:
        return ready
    parts = tuple(part if isinstance(part, int) else recipe(part) for part in template.parts)
    grower, first, last = _GROWERS[template.rule], template.first, template.last

    def grown(tokens: Tokens) -> Any:
        made = [part if isinstance(part, int) else part(tokens) for part in parts]
        return grower(Grown(tokens, tokens.span(first, last), made))

    return grown


# ---------------------------------------------------------------- the most usual rules


def _quick_path(template: Template) -> Recipe | None:
    """A word, or a word with whole numbers as indices."""
    numbers = _plain_indices(template)
    if numbers is None:
        return None
    word, last = template.first, template.last
    slow = _slow(template)

    def path(tokens: Tokens) -> tree.Path:
        base, starts, ends, text = tokens.base, tokens.starts, tokens.ends, tokens.script.text
        name = text[base + starts[word] : base + ends[word]]
        if numbers:
            indices = [text[base + starts[number] : base + ends[number]] for number in numbers]
            for digits in indices:
                if not digits.isdigit() or len(digits) > 7 or digits[0] == "0" != digits:
                    return slow(tokens)  # type: ignore[no-any-return]
            name = f"{name}[{','.join(indices)}]"
        span = Span(tokens.script.source, base + starts[word], base + ends[last])
        return tree.Path(name, (), span)

    return path


def _plain_indices(template: Template) -> list[int] | None:
    """The token numbers of plain indices; None where the name is more than that."""
    if len(template.parts) == 1:
        return []
    if len(template.parts) > 2:
        return None
    group = template.parts[1]
    if isinstance(group, int) or group.rule != "indices":
        return None
    numbers = []
    for index in group.parts:
        inner = index.parts if isinstance(index, Template) else ()
        if len(inner) != 1 or not isinstance(inner[0], Template) or inner[0].rule != "literal":
            return None
        if inner[0].first != inner[0].last:
            return None
        numbers.append(inner[0].first)
    return numbers


def _quick_literal(template: Template) -> Recipe:
    first, last = template.first, template.last

    def literal(tokens: Tokens) -> tree.Literal:
        unit = tokens.text(last) if last > first else None
        glued = tokens.kinds[first] == "GLUED"
        return tree.Literal(tokens.text(first), unit, glued, tokens.span(first, last))

    return literal


def _quick_value(template: Template) -> Recipe | None:
    if len(template.parts) > 1 or isinstance(template.parts[0], int):
        return None
    formula, first, last = recipe(template.parts[0]), template.first, template.last

    def value(tokens: Tokens) -> tree.ValueText:
        return tree.ValueText(formula(tokens), None, None, None, tokens.span(first, last))

    return value


def _quick_valued(template: Template) -> Recipe:
    path, value = (recipe(part) for part in template.parts if isinstance(part, Template))
    first, last = template.first, template.last

    def valued(tokens: Tokens) -> tree.Fitted:
        return tree.Fitted(path(tokens), None, value(tokens), tokens.span(first, last))

    return valued


def _quick_chain(template: Template) -> Recipe:
    parts = [part for part in template.parts if isinstance(part, Template)]
    items = [recipe(part) for part in parts]
    first, last = template.first, template.last

    def chain(tokens: Tokens) -> tree.Chain:
        return tree.Chain(tuple([item(tokens) for item in items]), tokens.span(first, last))

    form = _placed_form(parts, chain)
    return chain if form is None else lambda tokens: tree.Placed(tokens, form)


def _placed_form(
    parts: list[Template], chain: Callable[[Tokens], tree.Chain]
) -> tree.PlacedForm | None:
    """How to read a chain of one part with a literal value between plain nodes, if it is one."""
    if len(parts) != 3 or parts[1].rule != "valued":
        return None
    left, valued, right = parts
    part, value = (item for item in valued.parts if isinstance(item, Template))
    if not (_is_word(left) and _is_word(part) and _is_word(right)):
        return None
    literal = value.parts[0] if value.rule == "value" and len(value.parts) == 1 else None
    if not isinstance(literal, Template) or literal.rule != "literal":
        return None
    number, unit = literal.first, literal.last
    return tree.PlacedForm(
        left=left.first,
        part=part.first,
        number=number,
        unit=unit if unit > number else None,
        right=right.first,
        grow=chain,
    )


def _is_word(template: Template) -> bool:
    """Whether a place is one word: a name without indices, or `gnd`."""
    return template.first == template.last and template.rule in ("path", "ground_place")


def _slow(template: Template) -> Recipe:
    parts = tuple(part if isinstance(part, int) else recipe(part) for part in template.parts)

    def grown(tokens: Tokens) -> Any:
        made = [part if isinstance(part, int) else part(tokens) for part in parts]
        return _path(Grown(tokens, tokens.span(template.first, template.last), made))

    return grown


# ---------------------------------------------------------------- names


def _path(node: Grown) -> tree.Path:
    first, *suffixes = node.parts
    joint, word = "", node.text(first)
    indices: tuple[tree.Index, ...] = ()
    steps = []
    for suffix in suffixes:
        if isinstance(suffix, tuple) and isinstance(suffix[0], tree.Index):
            indices += suffix
        else:
            steps.append(tree.Step(joint, word, indices))
            (joint, word), indices = suffix, ()
    steps.append(tree.Step(joint, word, indices))
    return tree.Path(None, tuple(steps), node.span)


def _indices(node: Grown) -> tuple[tree.Index, ...]:
    return tuple(node.parts)


def _step(node: Grown) -> tuple[str, str]:
    return ".", node.text(node.parts[-1]).removeprefix(".")


def _joint(node: Grown) -> tuple[str, str]:
    return "~", node.text(node.parts[-1])


def _index(node: Grown) -> tree.Index:
    high = node.parts[1] if len(node.parts) > 1 else None
    return tree.Index(node.parts[0], high, node.span)


def _numbered(node: Grown) -> tree.Numbered:
    return tree.Numbered(node.text(node.parts[0]), node.span)


def _ground_place(node: Grown) -> tree.Path:
    return tree.Path("gnd", (), node.span)


# ---------------------------------------------------------------- formulas


def _reference(node: Grown) -> tree.Reference:
    return tree.Reference(node.parts[0], node.span)


def _ground(node: Grown) -> tree.GroundWord:
    return tree.GroundWord(node.span)


def _bracket(node: Grown) -> Any:
    return node.parts[0]


def _signed(node: Grown) -> tree.Signed:
    *signs, formula = node.parts
    negative = sum(node.kind(sign) == "MINUS" for sign in signs) % 2 == 1
    return tree.Signed(negative, formula, node.span)


def _terms(node: Grown) -> tree.Terms:
    first, *others = node.parts
    rest = tuple(
        (node.text(sign), formula) for sign, formula in zip(others[::2], others[1::2], strict=True)
    )
    return tree.Terms(first, rest, node.span)


def _power(node: Grown) -> tree.Raised:
    return tree.Raised(node.parts[0], node.parts[1], node.span)


def _call(node: Grown) -> tree.Applied:
    return tree.Applied(node.parts[0], node.parts[1], node.span)


# ---------------------------------------------------------------- values


def _value(node: Grown) -> tree.ValueText:
    formula, *others = node.parts
    found: dict[str, Any] = dict(others)
    return tree.ValueText(
        formula, found.get("phase"), found.get("tolerance"), found.get("at"), node.span
    )


def _absent(node: Grown) -> tree.ValueText:
    return tree.ValueText(None, None, None, None, node.span)


def _phase(node: Grown) -> tuple[str, Any]:
    formula = node.parts[1]
    if isinstance(formula, tree.Path):
        formula = tree.Reference(formula, formula.span)
    return "phase", formula


def _at(node: Grown) -> tuple[str, Any]:
    return "at", node.parts[1]


def _percent(node: Grown) -> tree.Amount:
    return tree.Amount(node.parts[0], True, node.span)


def _tolerance(node: Grown) -> tuple[str, tree.ToleranceText]:
    parts, spread = list(node.parts), None
    if isinstance(parts[-1], int) and node.kind(parts[-1]) in ("UNIFORM", "NORMAL"):
        spread = node.text(parts.pop())
    if isinstance(parts[1], int):
        amounts = tuple(_signed_percent(node, number) for number in parts)
    else:
        amounts = (_amount(parts[1]),)
    return "tolerance", tree.ToleranceText(amounts, spread, node.span)


def _amount(formula: Any) -> tree.Amount:
    if isinstance(formula, tree.Amount):
        return formula
    percent = isinstance(formula, tree.Literal) and (
        formula.unit in ("%", "ppm") or (formula.glued and formula.text.endswith("ppm"))
    )
    return tree.Amount(formula, percent, formula.span)


def _signed_percent(node: Grown, number: int) -> tree.Amount:
    text, span = node.text(number), node.place(number)
    literal = tree.Literal(text[1:-1].strip(), "%", False, span)
    return tree.Amount(tree.Signed(text[0] == "-", literal, span), True, span)


# ---------------------------------------------------------------- chains and kinds


def _kind(node: Grown) -> tree.KindText:
    parts = list(node.parts)
    count = None
    if not isinstance(parts[0], int):
        count = parts.pop(0)
    word, *arguments = parts
    return tree.KindText(count, node.text(word), node.place(word), tuple(arguments), node.span)


def _count(node: Grown) -> Any:
    part = node.parts[0]
    if not isinstance(part, int):
        return part
    span = node.place(part)
    if node.kind(part) == "NUMBER":
        return tree.Literal(node.text(part), None, False, span)
    return tree.Reference(tree.Path(node.text(part), (), span), span)


def _positional(node: Grown) -> tree.Argument:
    return tree.Argument(None, node.parts[0], node.span)


def _named(node: Grown) -> tree.Argument:
    return tree.Argument(node.parts[0], node.parts[1], node.span)


def _quoted(node: Grown) -> tree.Argument:
    path, sign = node.parts
    span = node.place(sign)
    text = tree.Quoted(node.quoted(sign), span)
    return tree.Argument(path, tree.ValueText(text, None, None, None, span), node.span)


def _stated(node: Grown) -> tree.Fitted:
    value = node.parts[2] if len(node.parts) > 2 else None
    return tree.Fitted(node.parts[0], node.parts[1], value, node.span)


def _arm(node: Grown) -> tree.Arm:
    units, signs = node.parts[::2], node.parts[1::2]
    kinds = [node.kind(sign) for sign in signs]
    mixed = next((node.place(s) for s, k in zip(signs, kinds, strict=True) if k != kinds[0]), None)
    return tree.Arm("+" if kinds[0] == "PLUS" else "||", tuple(units), mixed, node.span)


# ---------------------------------------------------------------- other statements


def _targets(node: Grown) -> tuple[tree.Path, ...]:
    return tuple(node.parts)


def _assign(node: Grown) -> tree.Assign:
    return tree.Assign(node.parts[0], node.parts[1], node.span)


def _declare(node: Grown) -> tree.Declare:
    value = node.parts[2] if len(node.parts) > 2 else None
    return tree.Declare(node.parts[0], node.parts[1], value, node.span)


def _let(node: Grown) -> tree.Let:
    return tree.Let(node.parts[1], node.parts[2] if len(node.parts) > 2 else None, node.span)


def _couple(node: Grown) -> tree.Couple:
    return tree.Couple(node.parts[1], node.parts[2] if len(node.parts) > 2 else None, node.span)


def _join(node: Grown) -> tree.Join:
    return tree.Join(tuple(node.parts[1:]), node.span)


def _leave_out(node: Grown) -> tree.LeaveOut:
    return tree.LeaveOut(node.parts[1], node.span)


def _single(node: Grown) -> tree.PairText:
    return tree.PairText(node.parts[0], None, node.span)


def _double(node: Grown) -> tree.PairText:
    return tree.PairText(node.parts[0], node.parts[1], node.span)


def _port(node: Grown) -> tree.Port:
    return tree.Port(node.parts[1], node.parts[2], node.span)


def _title(node: Grown) -> tree.Title:
    return tree.Title(node.quoted(node.parts[1]), node.span)


def _caution(node: Grown) -> tree.Caution:
    return tree.Caution(node.quoted(node.parts[1]), node.span)


def _flattened(node: Grown) -> tree.Flattened:
    return tree.Flattened(node.span)


def _block(node: Grown) -> tree.BlockHead:
    _, word, *pins = node.parts
    named = tuple((node.text(pin), node.place(pin)) for pin in pins)
    return tree.BlockHead(node.text(word), node.place(word), named, node.span)


def _repeat(node: Grown) -> tree.RepeatHead:
    _, word, low, high = node.parts
    return tree.RepeatHead(node.text(word), node.place(word), low, high, node.span)


def _variant(node: Grown) -> tree.VariantHead:
    return tree.VariantHead(node.quoted(node.parts[1]), node.span)


def _end(node: Grown) -> tree.End:
    return tree.End(node.span)


# ---------------------------------------------------------------- questions


def _question(node: Grown) -> str:
    return "".join(node.text(part) for part in node.parts)


def _ask(node: Grown) -> tree.Ask:
    _, kind, *clauses = node.parts
    return tree.Ask(kind, tuple(clauses), node.span)


def _goal(node: Grown) -> tree.Goal:
    return tree.Goal(tuple(node.parts[1:]), node.span)


def _clause(node: Grown) -> tree.Clause:
    word, *content = node.parts
    return tree.Clause(node.text(word), content[0], node.span)


def _as(node: Grown) -> tree.Clause:
    word, *content = node.parts
    return tree.Clause(node.text(word), "".join(map(node.text, content)), node.span)


def _levels(node: Grown) -> tree.Clause:
    return tree.Clause(node.text(node.parts[0]), tuple(node.parts[1:]), node.span)


def _over(node: Grown) -> tree.Clause:
    word, low, high = node.parts
    span = Span(node.source, low.span.start, high.span.end)
    return tree.Clause(node.text(word), tree.BandText(low, high, span), node.span)


def _level(node: Grown) -> tree.LevelText:
    return tree.LevelText(node.parts[0], node.span)


def _half_power(node: Grown) -> tree.LevelText:
    return tree.LevelText(None, node.span)


# ---------------------------------------------------------------- option values


def _only(node: Grown) -> Any:
    return node.parts[0]


def _option_pair(node: Grown) -> tree.PairText:
    if len(node.parts) == 1:
        return node.parts[0]  # type: ignore[no-any-return]
    return tree.PairText(node.parts[0], node.parts[1], node.span)


def _option_band(node: Grown) -> tree.BandText:
    return tree.BandText(node.parts[0], node.parts[1], node.span)


_GROWERS: dict[str, Grower] = {
    "path": _path,
    "indices": _indices,
    "step": _step,
    "joint": _joint,
    "index": _index,
    "numbered": _numbered,
    "reference": _reference,
    "bracket": _bracket,
    "signed": _signed,
    "sum": _terms,
    "product": _terms,
    "power": _power,
    "call": _call,
    "value": _value,
    "absent": _absent,
    "phase": _phase,
    "at": _at,
    "percent": _percent,
    "tolerance": _tolerance,
    "kind": _kind,
    "count": _count,
    "positional": _positional,
    "named": _named,
    "quoted": _quoted,
    "stated": _stated,
    "group": _bracket,
    "arm": _arm,
    "targets": _targets,
    "assign": _assign,
    "declare": _declare,
    "let": _let,
    "couple": _couple,
    "join": _join,
    "leave_out": _leave_out,
    "single": _single,
    "double": _double,
    "port": _port,
    "title": _title,
    "caution": _caution,
    "flattened": _flattened,
    "block": _block,
    "repeat": _repeat,
    "variant": _variant,
    "end": _end,
    "question": _question,
    "ask": _ask,
    "goal": _goal,
    "from": _clause,
    "to": _clause,
    "into": _clause,
    "as": _as,
    "levels": _levels,
    "over": _over,
    "reference_to": _clause,
    "lasting": _clause,
    "below": _clause,
    "above": _clause,
    "level": _level,
    "half_power": _half_power,
    "ground_place": _ground_place,
    "ground": _ground,
    "option_value": _only,
    "option_pair": _option_pair,
    "option_band": _option_band,
    "option_list": _indices,
    "option_level": _only,
    "option_expression": _only,
    "option_name": _only,
}

_QUICK: dict[str, Callable[[Template], Recipe | None]] = {
    "path": _quick_path,
    "literal": _quick_literal,
    "value": _quick_value,
    "valued": _quick_valued,
    "chain": _quick_chain,
}
