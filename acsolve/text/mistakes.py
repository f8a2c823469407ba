"""Usual mistakes of spelling, each with its name, the words of the trade and the remedy.

A statement that fails is looked at where it stops: the token there, its neighbours, and
the tokens the grammar could have gone on with. The first rule that knows the case speaks;
the rules stand in `_RULES`, the special ones before the general ones.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

from acsolve.codes import Code
from acsolve.text.problems import Problems
from acsolve.text.scan import Tokens
from acsolve.text.signs import told_sign
from acsolve.text.syntax import OPEN_TEXT, STRAY, Failure, keywords
from acsolve.text.words import listed, nearest

_RESERVED = frozenset(("GND", "END", "FROM", "TO", "ABSENT"))
_NUMBERS = frozenset(("NUMBER", "GLUED"))
_OPENING = frozenset(("OPEN", "OPEN_INDEX"))
_CLOSING = {"CLOSE": "OPEN", "CLOSE_INDEX": "OPEN_INDEX"}
_QUESTIONS = ("transfer", "cutoff", "impedance", "two-port", "sweep", "step", "noise", "tolerance")
_HEADS = ("title", "caution", "let", "couple", "join", "port", "block", "repeat", "variant",
          "ask", "goal", "absent", "end")  # fmt: skip


class Told(NamedTuple):
    """What a rule has to say, and about which tokens."""

    code: Code
    message: str
    hint: str
    first: int
    last: int


class Stop:
    """Where a statement stops being one."""

    def __init__(self, start: str, tokens: Tokens, failure: Failure) -> None:
        self.start = start
        self.tokens = tokens
        self.kinds = tokens.kinds
        self.at = failure.position
        self.expected = failure.expected

    @property
    def kind(self) -> str:
        """The terminal where it stops; empty at the end."""
        return self.kinds[self.at] if self.at < len(self.kinds) else ""

    @property
    def before(self) -> str:
        """The terminal before."""
        return self.kinds[self.at - 1] if self.at else ""

    @property
    def after(self) -> str:
        """The terminal behind."""
        return self.kinds[self.at + 1] if self.at + 1 < len(self.kinds) else ""

    def text(self, number: int) -> str:
        """The text of a token."""
        return self.tokens.text(number)

    def touching(self, number: int) -> bool:
        """Whether a token follows the one before it without a blank."""
        return self.tokens.ends[number - 1] == self.tokens.starts[number]

    def word(self, number: int) -> bool:
        """Whether a token is a word."""
        return self.kinds[number] == "NAME" or self.kinds[number] in _WORDS()

    @property
    def in_chain(self) -> bool:
        """Whether a chain has begun before the place."""
        return "LINK" in self.kinds[: self.at]

    @property
    def giving(self) -> bool:
        """Whether the place stands behind an equals sign of the same arm."""
        for kind in reversed(self.kinds[: self.at]):
            if kind in ("LINK", "PARALLEL"):
                return False
            if kind == "EQUALS":
                return True
        return False


def _WORDS() -> frozenset[str]:  # noqa: N802 - a table that is made on first use
    return frozenset(keywords().values())


Rule = Callable[[Stop], Told | None]


def explain(start: str, statement: Tokens, failure: Failure | None, problems: Problems) -> None:
    """Record why a statement cannot be read, and remember the names it holds."""
    kinds = statement.kinds
    if not kinds:
        problems.add("syntax.statement", "nothing is written here", None, hint="Write a value.")
        return
    problems.broken_words.update(
        statement.text(number) for number, kind in enumerate(kinds) if kind in ("NAME", *_WORDS())
    )
    if failure is None:
        number = next(number for number, kind in enumerate(kinds) if kind in (OPEN_TEXT, STRAY))
        told = Told(*told_sign(statement.text(number)), number, number)
    else:
        stop = Stop(start, statement, failure)
        told = next(found for rule in _RULES if (found := rule(stop)) is not None)
    problems.add(told.code, told.message, statement.span(told.first, told.last), hint=told.hint)


# ---------------------------------------------------------------- numbers


def _leading_zero(stop: Stop) -> Told | None:
    if stop.kind != "POINTED" or stop.before in _NUMBERS:
        return None
    text = stop.text(stop.at)
    return Told(
        "value.spelling", f"{text} lacks the zero before its point", f"Write 0{text}.",
        stop.at, stop.at,
    )  # fmt: skip


def _trailing_point(stop: Stop) -> Told | None:
    if stop.kind != "DOT" or stop.before != "NUMBER" or not stop.touching(stop.at):
        return None
    text = stop.text(stop.at - 1)
    return Told(
        "value.spelling", f"{text}. ends with its point", f"Write {text} or {text}.0.",
        stop.at - 1, stop.at,
    )  # fmt: skip


def _decimal_comma(stop: Stop) -> Told | None:
    at = stop.at if stop.kind == "COMMA" else stop.at - 1
    if not 0 < at < len(stop.kinds) - 1 or stop.kinds[at] != "COMMA":
        return None
    sides = stop.kinds[at - 1] == "NUMBER" and stop.kinds[at + 1] in _NUMBERS
    if not sides or not stop.touching(at) or not stop.touching(at + 1):
        return None
    left, right = stop.text(at - 1), stop.text(at + 1)
    return Told(
        "value.spelling", f"{left},{right} has a comma where the decimal point belongs",
        f"Write {left}.{right}.", at - 1, at + 1,
    )  # fmt: skip


def _two_numbers(stop: Stop) -> Told | None:
    if stop.kind not in _NUMBERS or stop.before not in _NUMBERS:
        return None
    left, right = stop.text(stop.at - 1), stop.text(stop.at)
    return Told(
        "value.spelling", f"{left} and {right} stand side by side without a sign",
        f"Write {left}*{right} for a product, or take the blank out of one number.",
        stop.at - 1, stop.at,
    )  # fmt: skip


def _one_limit(stop: Stop) -> Told | None:
    if stop.before != "SIGNED_PERCENT" or "SIGNED_PERCENT" not in stop.expected:
        return None
    text = stop.text(stop.at - 1)
    return Told(
        "value.tolerance", f"{text} states one limit of a tolerance, and there are two",
        f"Write both limits, +80 % -20 %, or ± {text[1:].strip()} for equal ones.",
        stop.at - 1, stop.at - 1,
    )  # fmt: skip


def _signed_percent(stop: Stop) -> Told | None:
    if stop.kind != "SIGNED_PERCENT":
        return None
    text = stop.text(stop.at)
    number = text[1:-1].strip()
    return Told(
        "value.spelling", f"{text} is one sign, a limit of a tolerance, and cannot stand here",
        f"Write the fraction: {text[0]} {float(number) / 100:g}.", stop.at, stop.at,
    )  # fmt: skip


def _tolerance_sign(stop: Stop) -> Told | None:
    if stop.kind != "PLUS_MINUS":
        return None
    text = stop.text(stop.at)
    return Told(
        "value.spelling", f"{text} is the sign of a tolerance and cannot stand here",
        "A value has one tolerance, behind its unit."
        if text == "±"
        else "Put a blank between plus and minus; a tolerance stands behind the whole value.",
        stop.at, stop.at,
    )  # fmt: skip


def _value_as_part(stop: Stop) -> Told | None:
    if stop.kind != "GLUED" or stop.giving:
        return None
    text = stop.text(stop.at)
    if stop.before == "LINK":
        return Told(
            "chain.value", f"{text} is a value, and a chain holds nodes and named parts",
            f"Name the part: R1 = {text}.", stop.at, stop.at,
        )  # fmt: skip
    if stop.at == 0 or "NAME" in stop.expected:
        return Told(
            "name.reserved", f"{text} is no name: it starts with a digit",
            "Start the name with a letter.", stop.at, stop.at,
        )  # fmt: skip
    return None


# ---------------------------------------------------------------- chains


def _starts_with_link(stop: Stop) -> Told | None:
    if stop.kind != "LINK" or stop.at:
        return None
    return Told(
        "chain.end", "a line cannot start with --",
        "End the line before with --, or start this one with a node.", 0, 0,
    )  # fmt: skip


def _starts_with_part(stop: Stop) -> Told | None:
    if stop.kind != "LINK" or "LINK" in stop.kinds[: stop.at]:
        return None
    if stop.kinds[0] in _HEADS_KINDS() or not {"EQUALS", "COLON"} & {*stop.kinds[: stop.at]}:
        return None
    return Told(
        "chain.row", f"a chain starts with a node, and {stop.text(0)} is a part",
        f"Write a node first: in -- {stop.text(0)} …", 0, 0,
    )  # fmt: skip


def _HEADS_KINDS() -> frozenset[str]:  # noqa: N802 - a table that is made on first use
    return frozenset(keywords()[word] for word in _HEADS)


def _two_links(stop: Stop) -> Told | None:
    if stop.kind != "LINK" or stop.before != "LINK":
        return None
    return Told(
        "chain.end", "two -- stand in a row with nothing between them",
        "Write a part or a node between them.", stop.at - 1, stop.at,
    )  # fmt: skip


def _needs_brackets(stop: Stop) -> Told | None:
    if not stop.in_chain or not stop.giving:
        return None
    signs = ("STAR", "SLASH", "_POWER_SIGN", "MINUS")
    named = stop.before in ("EQUALS", "MINUS") and stop.kind and stop.word(stop.at)
    if stop.kind not in signs and not named and not _is_sum(stop):
        return None
    return Told(
        "chain.expression", "an expression in a chain stands in brackets",
        "Write R1 = (2*R) in the chain, or give the value in a line of its own.",
        stop.at, stop.at,
    )  # fmt: skip


def _is_sum(stop: Stop) -> bool:
    """Whether a number follows a plus, which would begin a part in series."""
    if stop.kind == "GLUED":
        return stop.before == "PLUS"
    return stop.before == "NUMBER" and stop.kinds[stop.at - 2 : stop.at - 1] == ("PLUS",)


def _parts_in_a_row(stop: Stop) -> Told | None:
    if not stop.in_chain or not stop.kind or not stop.word(stop.at) or stop.giving:
        return None
    if not (stop.before == "CLOSE_INDEX" or (stop.at and stop.word(stop.at - 1))):
        return None
    left, right = stop.text(stop.at - 1), stop.text(stop.at)
    return Told(
        "chain.row", f"{right} follows {left} without a sign between them"
        if left != "]" else f"{right} follows a name without a sign between them",
        "Write -- to go on along the chain, + for parts in series, || for parts in parallel.",
        stop.at, stop.at,
    )  # fmt: skip


# ---------------------------------------------------------------- heads of statements


def _no_statement(stop: Stop) -> Told | None:
    """A first word that is none of the format's, or is misspelt."""
    if stop.at != 1 or stop.kinds[0] != "NAME" or stop.start != "statement":
        return None
    if stop.kind != "STRING" and not (stop.kind and stop.word(1)):
        return None
    word = stop.text(0)
    near = nearest(word, _HEADS)
    return Told(
        "syntax.statement", f"{word} begins no statement",
        f"Did you mean {near}?" if near else f"Statements begin with a node, a name, or one of "
        f"{listed(_HEADS, 'or')}.", 0, 0,
    )  # fmt: skip


def _no_question(stop: Stop) -> Told | None:
    if stop.at != 1 or stop.kinds[0] != "ASK":
        return None
    word = stop.text(1) if stop.kind else "nothing"
    near = nearest(word, _QUESTIONS)
    hint = f"Did you mean ask {near}?" if near else f"Questions are {listed(_QUESTIONS)}."
    at = min(stop.at, len(stop.kinds) - 1)
    return Told("ask.kind", f"{word} is no question", hint, at, at)


def _needs_text(stop: Stop) -> Told | None:
    if stop.at != 1 or stop.kinds[0] not in ("TITLE", "CAUTION", "VARIANT"):
        return None
    word = stop.text(0)
    at = min(stop.at, len(stop.kinds) - 1)
    return Told(
        "syntax.text", f"{word} is followed by a text in double quotes",
        f'Write {word} "…".', at, at,
    )  # fmt: skip


def _needs_pins(stop: Stop) -> Told | None:
    if stop.kinds[0] != "BLOCK" or "EQUALS" in stop.kinds or stop.at < 2:
        return None
    at = min(stop.at, len(stop.kinds) - 1)
    return Told(
        "syntax.statement", "a block names its pins in brackets",
        f"Write block {stop.text(1)}(a, b).", at, at,
    )  # fmt: skip


def _needs_range(stop: Stop) -> Told | None:
    if "RANGE" not in stop.expected or stop.kinds[0] not in ("REPEAT", "ASK", "GOAL"):
        return None
    at = min(stop.at, len(stop.kinds) - 1)
    example = "repeat k = 1 .. 20" if stop.kinds[0] == "REPEAT" else "over 10 Hz .. 1 MHz"
    return Told(
        "syntax.range", "two points stand between the ends of a range",
        f"Write {example}.", at, at,
    )  # fmt: skip


def _needs_comma(stop: Stop) -> Told | None:
    if "COMMA" not in stop.expected or not stop.kind or not stop.word(stop.at):
        return None
    if stop.in_chain or not (stop.before == "CLOSE_INDEX" or stop.word(stop.at - 1)):
        return None
    return Told(
        "syntax.statement", f"{stop.text(stop.at)} follows a name without a comma",
        "Put commas between names.", stop.at, stop.at,
    )  # fmt: skip


# ---------------------------------------------------------------- general


def _reserved_word(stop: Stop) -> Told | None:
    if stop.kind not in _RESERVED or "NAME" not in stop.expected:
        return None
    word = stop.text(stop.at)
    return Told(
        "name.reserved", f"{word} is a word of the format and cannot be a name here",
        "Reserved are gnd, end, from, to and absent; choose another name.", stop.at, stop.at,
    )  # fmt: skip


def _side_by_side(stop: Stop) -> Told | None:
    """Two factors without a sign."""
    factors = stop.kind in ("OPEN", "NUMBER", "GLUED") or (stop.kind and stop.word(stop.at))
    if not factors or "STAR" not in stop.expected or stop.before == "EQUALS":
        return None
    left, right = stop.text(stop.at - 1), stop.text(stop.at)
    return Told(
        "value.spelling", f"{left} and {right} stand side by side without a sign",
        "Write * for a product.", stop.at, stop.at,
    )  # fmt: skip


def _extra_bracket(stop: Stop) -> Told | None:
    opening = _CLOSING.get(stop.kind)
    if opening is None:
        return None
    seen = stop.kinds[: stop.at]
    if seen.count(opening) > seen.count(stop.kind):
        return None
    sign = stop.text(stop.at)
    return Told(
        "syntax.bracket", f"this {sign} closes nothing", "Take it out, or open the bracket.",
        stop.at, stop.at,
    )  # fmt: skip


def _empty_brackets(stop: Stop) -> Told | None:
    opening = _CLOSING.get(stop.kind)
    if opening is None or stop.before != opening:
        return None
    return Told(
        "syntax.bracket", "these brackets are empty", "Write something into them.",
        stop.at - 1, stop.at,
    )  # fmt: skip


def _double_sign(stop: Stop) -> Told | None:
    if stop.kind != "EQUALS" or stop.before not in ("EQUALS", "COLON"):
        return None
    text = stop.text(stop.at - 1) + stop.text(stop.at)
    return Told(
        "syntax.statement", f"{text} is no sign of the format", "Write = alone.",
        stop.at - 1, stop.at,
    )  # fmt: skip


_ENDINGS = {
    "LINK": ("chain.end", "the chain ends with --, and its last node is missing",
             "Write a node after the --."),
    "EQUALS": ("value.missing", "a value is missing behind the equals sign",
               "Write it, or leave the equals sign out for a symbol."),
    "COMMA": ("syntax.statement", "the line ends with a comma", "Go on with the next name."),
    "PLUS": ("chain.end", "the line ends with +, and nothing follows", "Write what follows."),
    "PARALLEL": ("chain.end", "the line ends with ||, and nothing follows",
                 "Write the part in parallel."),
    "COLON": ("syntax.statement", "a kind is missing behind the colon",
              "Write the kind: A1 : opamp(…)."),
}  # fmt: skip


def _ends_early(stop: Stop) -> Told | None:
    if stop.kind:
        return None
    last = len(stop.kinds) - 1
    if stop.kinds[-1] in _ENDINGS:
        code, message, hint = _ENDINGS[stop.kinds[-1]]
        return Told(code, message, hint, last, last)  # type: ignore[arg-type]
    if stop.start == "statement" and "LINK" in stop.expected and "LINK" not in stop.kinds:
        return Told(
            "syntax.statement", "a name alone says nothing",
            "Go on with --, with = and a value, or with : and a kind.", 0, last,
        )  # fmt: skip
    return Told(
        "syntax.statement", "the line ends before its statement does", _could_be(stop), last, last
    )


def _missing_value(stop: Stop) -> Told | None:
    if stop.before != "EQUALS" or stop.kind not in ("LINK", "COMMA", "CLOSE", "PLUS_MINUS"):
        return None
    code, message, hint = _ENDINGS["EQUALS"]
    return Told(code, message, hint, stop.at - 1, stop.at - 1)  # type: ignore[arg-type]


def _anything(stop: Stop) -> Told:
    return Told(
        "syntax.statement", f"{stop.text(stop.at)} cannot stand here", _could_be(stop),
        stop.at, stop.at,
    )  # fmt: skip


_SPOKEN = {
    "LINK": "--", "EQUALS": "=", "COLON": "a colon", "COMMA": "a comma", "PLUS": "+",
    "MINUS": "-", "STAR": "*", "SLASH": "/", "OPEN": "(", "CLOSE": ")", "OPEN_INDEX": "[",
    "CLOSE_INDEX": "]", "RANGE": "..", "NUMBER": "a number", "NAME": "a name",
    "STRING": "a text in double quotes", "FROM": "from", "TO": "to", "PLUS_MINUS": "±",
    "INTO": "into", "OVER": "over", "AT": "at", "AS": "as", "FOR": "for", "GND": "gnd",
    "REFERENCE": "reference", "BELOW": "below", "ABOVE": "above", "PARALLEL": "||",
}  # fmt: skip
_NAMED_WORDS = frozenset(
    ("FROM", "TO", "INTO", "OVER", "AT", "AS", "FOR", "REFERENCE", "BELOW", "ABOVE", "GND")
)


def _could_be(stop: Stop) -> str:
    """What the grammar could have gone on with."""
    names = "NAME" in stop.expected  # then every word of the format is possible too
    found = [
        spoken
        for kind, spoken in _SPOKEN.items()
        if kind in stop.expected and not (names and kind in _NAMED_WORDS)
    ]
    if "$END" in stop.expected:
        found.append("the end of the line")
    return f"Here could stand {listed(found, 'or')}."


_RULES: tuple[Rule, ...] = (
    _leading_zero,
    _trailing_point,
    _decimal_comma,
    _no_question,
    _needs_text,
    _no_statement,
    _starts_with_link,
    _two_links,
    _starts_with_part,
    _one_limit,
    _missing_value,
    _tolerance_sign,
    _signed_percent,
    _needs_brackets,
    _parts_in_a_row,
    _two_numbers,
    _value_as_part,
    _empty_brackets,
    _extra_bracket,
    _double_sign,
    _needs_range,
    _reserved_word,
    _needs_pins,
    _ends_early,
    _needs_comma,
    _side_by_side,
    _anything,
)
