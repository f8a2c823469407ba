"""Formulas as written to expressions as kept, with their dimensions worked out."""

from __future__ import annotations

from fractions import Fraction
from typing import NamedTuple

from acsolve.circuit import expression as ex
from acsolve.circuit.expression import Expression, FunctionName, Number
from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text import limits
from acsolve.text.book import Book
from acsolve.text.literals import Fault, Meaning, meaning
from acsolve.text.measure import KELVIN, PLAIN, Measure, Solver, raised, sign, times, words
from acsolve.text.references import Lookup
from acsolve.text.scope import Scope, Turns
from acsolve.text.tree import (
    Applied,
    Formula,
    GroundWord,
    Literal,
    Quoted,
    Raised,
    Reference,
    Signed,
    Terms,
)

_NO_ZERO = "Write a divisor that is not zero."
_FUNCTIONS: dict[str, FunctionName] = {
    "sqrt": "sqrt",
    "exp": "exp",
    "ln": "ln",
    "log10": "log10",
}


class Made(NamedTuple):
    """An expression, its measure (None for a bare number), and how deep it is."""

    expression: Expression
    measure: Measure | None
    depth: int


class UnreadableError(Exception):
    """A formula whose problem is already recorded; never leaves this layer."""


class Formulas:
    """Turns formulas into expressions."""

    def __init__(self, book: Book, solver: Solver, lookup: Lookup) -> None:
        self._book = book
        self._solver = solver
        self._lookup = lookup

    def make(
        self,
        formula: Formula,
        scope: Scope,
        turns: Turns,
        *,
        in_s: bool = False,
        need: Measure | None = None,
    ) -> Made:
        """The expression a formula stands for.

        Raises
        ------
        UnreadableError
            once the problem is recorded.

        """
        made = self._make(formula, scope, turns, in_s)
        if (
            need == KELVIN
            and isinstance(formula, Literal)
            and (kelvin := meaning(formula.text, formula.unit, formula.glued))
            and isinstance(kelvin, Meaning)
            and kelvin.kelvin
        ):
            return Made(Number(kelvin.number / 1000), KELVIN, 1)
        return made

    def _make(self, formula: Formula, scope: Scope, turns: Turns, in_s: bool) -> Made:
        match formula:
            case Literal():
                return self._literal(formula, scope, turns, in_s)
            case Reference(path, span):
                found = self._lookup.find(path, scope, turns, in_s=in_s)
                if found is None:
                    raise UnreadableError
                return Made(found[0], found[1], 1)
            case Signed(negative, inner):
                made = self._make(inner, scope, turns, in_s)
                value = ex.negate(made.expression) if negative else made.expression
                return self._bounded(Made(value, made.measure, made.depth + 1), formula.span)
            case Terms(first, rest):
                made = self._make(first, scope, turns, in_s)
                for joint, term in rest:
                    right = self._make(term, scope, turns, in_s)
                    made = self._bounded(self._joined(joint, made, right, term.span), formula.span)
                return made
            case Raised():
                return self._power(formula, scope, turns, in_s)
            case Applied():
                return self._applied(formula, scope, turns, in_s)
            case Quoted(span=span):
                self._refuse(
                    "name.not-a-value", "a text in quotes is not a value", span, "Write a value."
                )
            case GroundWord(span):
                self._refuse(
                    "name.not-a-value", "gnd is a node, not a value", span, "Write a value."
                )
        raise AssertionError("every formula is one of these")

    def _refuse(
        self, code: object, message: str, span: Span, hint: str | None = None, *labels: Label
    ) -> None:
        self._book.problems.add(code, message, span, hint=hint, labels=labels)  # type: ignore[arg-type]
        raise UnreadableError

    # ------------------------------------------------------------ literals

    def _literal(self, literal: Literal, scope: Scope, turns: Turns, in_s: bool) -> Made:
        found = meaning(literal.text, literal.unit, literal.glued)
        if isinstance(found, Fault):
            self._refuse(found.code, found.message, literal.span, found.hint)
            raise UnreadableError
        if found.word is not None:
            self._check_word(literal, found, scope, turns, in_s)
        return Made(found.expression, found.measure, 1)

    def _check_word(
        self, literal: Literal, found: Meaning, scope: Scope, turns: Turns, in_s: bool
    ) -> None:
        """Letters after a number that are also a name: say both readings."""
        word = found.word
        assert word is not None, "only literals with letters come here"
        quantity = self._book.quantity(word, scope)
        place = None if quantity is None else quantity.span
        if place is None and literal.unit is None and (draft := scope.drafts.get(word)):
            place = draft.span
        if place is None and word not in turns and not (in_s and word == "s"):
            return
        number = literal.text.removesuffix(word)
        labels = () if place is None else (Label(place, f"{word} is named here"),)
        frequency = place is None and word == "s"
        what = "the complex frequency" if frequency else f"the name {word}"
        rename = "" if frequency else f" or rename {word}"
        self._refuse(
            "value.two-readings",
            f"{literal.span.text} can be read as a value with a unit or prefix, "
            f"and as {number} times {what}",
            literal.span,
            f"Write {number}*{word} for the product; for the value, "
            f"write it another way ({_other_way(found)}){rename}.",
            *labels,
        )

    # ------------------------------------------------------------ operations

    def _joined(self, joint: str, left: Made, right: Made, span: Span) -> Made:
        depth = max(left.depth, right.depth) + 1
        if joint in "+-":
            combine = ex.add if joint == "+" else ex.subtract
            measure = self._same(left.measure, right.measure, span)
            return Made(combine(left.expression, right.expression), measure, depth)
        power = 1 if joint == "*" else -1
        measure = None
        if left.measure is not None or right.measure is not None:
            measure = times(left.measure or PLAIN, right.measure or PLAIN, power)
        if joint == "*":
            return Made(ex.multiply(left.expression, right.expression), measure, depth)
        try:
            return Made(ex.divide(left.expression, right.expression), measure, depth)
        except ZeroDivisionError:
            self._refuse("value.zero-division", "this divides by zero", span, _NO_ZERO)
            raise

    def _same(self, left: Measure | None, right: Measure | None, span: Span) -> Measure | None:
        """The measure of a sum; a bare number takes that of the other term."""
        if left is None or right is None:
            return right if left is None else left
        if not self._solver.agree(left, right, span):
            got, before = words(self._solver.reduced(right)), words(self._solver.reduced(left))
            self._refuse(
                "value.sum",
                f"{got} cannot be added to {before}",
                span,
                "Bring all terms of a sum to one unit.",
            )
        return left

    def _power(self, formula: Raised, scope: Scope, turns: Turns, in_s: bool) -> Made:
        base = self._make(formula.base, scope, turns, in_s)
        exponent = self._make(formula.exponent, scope, turns, in_s)
        self._plain(exponent, formula.exponent.span, "an exponent")
        measure = base.measure
        power = exponent.expression
        if isinstance(power, Number):
            self._check_power(base.expression, power.value, formula.span)
            measure = None if measure is None else raised(measure, power.value)
        else:
            self._plain(base, formula.base.span, "the base of a power with a symbol in it")
        depth = max(base.depth, exponent.depth) + 1
        try:
            made = Made(ex.power(base.expression, power), measure, depth)
        except ZeroDivisionError:
            self._refuse("value.zero-division", "this divides by zero", formula.span, _NO_ZERO)
            raise
        return self._bounded(made, formula.span)

    def _check_power(self, base: Expression, power: Fraction, span: Span) -> None:
        """Keep powers small enough to be worked out."""
        if abs(power) > limits.EXPONENT:
            self._refuse(
                "limit.exponent",
                f"the exponent {float(power):g} is beyond {limits.EXPONENT}",
                span,
                "No value of a circuit needs it.",
            )
        if _size(base) * abs(power) > limits.NUMBER_BITS:
            self._too_long(span)

    def _applied(self, formula: Applied, scope: Scope, turns: Turns, in_s: bool) -> Made:
        function = _FUNCTIONS.get(formula.function.name or "")
        if function is None:
            name = formula.function.span.text
            self._refuse(
                "value.function",
                f"{name} is no function",
                formula.function.span,
                "Functions are sqrt, exp, ln and log10.",
            )
            raise UnreadableError
        argument = self._make(formula.argument, scope, turns, in_s)
        measure = argument.measure
        if function == "sqrt":
            measure = None if measure is None else raised(measure, Fraction(1, 2))
        else:
            self._plain(argument, formula.argument.span, f"the argument of {function}")
        made = Made(ex.call(function, argument.expression), measure, argument.depth + 1)
        return self._bounded(made, formula.span)

    def _plain(self, made: Made, span: Span, what: str) -> None:
        if made.measure is not None and not self._solver.agree(made.measure, PLAIN, span):
            got = words(self._solver.reduced(made.measure))
            self._refuse(
                "value.unit",
                f"{what} needs a plain number, got {got}",
                span,
                "Divide by a quantity of the same unit first.",
            )

    # ------------------------------------------------------------ bounds

    def _bounded(self, made: Made, span: Span) -> Made:
        if made.depth > limits.EXPRESSION_DEPTH:
            self._refuse(
                "limit.expression",
                f"this expression has more than {limits.EXPRESSION_DEPTH} steps",
                span,
                "Name parts of it with let.",
            )
        expression = made.expression
        if isinstance(expression, Number) and _bits(expression.value) > limits.NUMBER_BITS:
            self._too_long(span)
        return made

    def _too_long(self, span: Span) -> None:
        self._refuse(
            "limit.digits",
            f"a number in this expression has more than {limits.NUMBER_BITS:,} binary digits",
            span,
            "Use numbers rounded to what can be measured.",
        )


def _bits(value: Fraction) -> int:
    return max(value.numerator.bit_length(), value.denominator.bit_length())


def _size(expression: Expression) -> int:
    """Binary digits an expression may come to when worked out; a name counts as 16."""
    match expression:
        case Number(value):
            return _bits(value)
        case ex.Power(base, Number(power)):
            return _size(base) * max(1, abs(power.numerator))
        case ex.Name() | ex.Pi() | ex.Frequency():
            return 16
        case _:
            return sum(_size(part) for part in ex.children(expression))


def _other_way(found: Meaning) -> str:
    """A spelling of a literal that has no letters that could be a name."""
    whole = found.number.denominator == 1
    digits = str(found.number) if whole else f"{float(found.number):g}"
    unit = sign(found.measure or PLAIN)
    return f"{digits} {unit}" if unit and unit != found.word else digits
