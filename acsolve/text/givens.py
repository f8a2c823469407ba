"""Values as written to values as kept: nominal, angle, tolerance, the frequency they hold at."""

from __future__ import annotations

from fractions import Fraction

from acsolve.circuit import expression as ex
from acsolve.circuit.expression import Expression, Number
from acsolve.circuit.kind import Attribute, Kind
from acsolve.circuit.value import Distribution, Tolerance, Value
from acsolve.errors import Label
from acsolve.source import Span
from acsolve.text.book import Book
from acsolve.text.formula import Formulas, Made, UnreadableError
from acsolve.text.literals import Fault, meaning
from acsolve.text.measure import DEGREE, HERTZ, PER_KELVIN, PLAIN, Measure, Solver, sign, words
from acsolve.text.references import need_of
from acsolve.text.scope import Scope, Turns
from acsolve.text.tree import Amount, Formula, Literal, Placed, ToleranceText, ValueText
from acsolve.text.words import article

_HUNDREDTH = Fraction(1, 100)


class Place:
    """Where a value stands: its need, and how messages speak of it."""

    __slots__ = ("angle", "at", "in_s", "need", "words")

    def __init__(self, words: str, need: Measure | None) -> None:
        self.words = words
        self.need = need
        self.at = False
        self.angle = False
        self.in_s = False

    @property
    def name(self) -> str | None:
        """The part, where the value is the part's own."""
        return None


class PartPlace(Place):
    """The place of an attribute of a part; its words are put together only when needed."""

    __slots__ = ("_attribute", "_kind", "_name")

    def __init__(self, name: str, kind: Kind, attribute: Attribute) -> None:
        self._name = name
        self._kind = kind
        self._attribute = attribute
        self.need = need_of(kind, attribute)
        self.at = attribute.at
        self.angle = attribute.shape == "phasor"
        self.in_s = attribute.shape == "in_s"

    @property
    def words(self) -> str:  # type: ignore[override]
        """How messages speak of it."""
        if self._attribute.name == self._kind.principal:
            return f"{self._name} is {article(self._kind.name.replace('_', ' '))} and"
        return f"{self._attribute.name} of {self._name}"

    @property
    def name(self) -> str | None:
        """The part, where the value is the part's own."""
        return self._name if self._attribute.name == self._kind.principal else None


class Givens:
    """Turns value texts into values."""

    def __init__(self, book: Book, formulas: Formulas, solver: Solver) -> None:
        self._book = book
        self._formulas = formulas
        self._solver = solver

    def value(self, text: ValueText, place: Place, scope: Scope, turns: Turns) -> Value | None:
        """The value, or None once its problem is recorded; an angle is read by `angle`."""
        if text.formula is None:
            return None
        try:
            made = self._fitted(text.formula, place, scope, turns)
            tolerance = at = None
            if text.tolerance is not None:
                tolerance = self._tolerance(text.tolerance, made, place, scope, turns)
            if text.at is not None:
                at = self._at(text.at, place, scope, turns)
        except UnreadableError:
            return None
        if text.angle is not None and not place.angle:
            self._book.problems.add(
                "value.angle",
                f"{place.words} takes no angle",
                text.angle.span,
                hint="Only the amplitude of a source has one.",
            )
            return None
        return Value(expression=made.expression, tolerance=tolerance, at_hertz=at, span=text.span)

    def literal(self, placed: Placed, need: Measure | None, scope: Scope) -> Value | None:
        """A literal of the unit that is needed; None where it is not as plain as that."""
        found = meaning(*placed.literal())
        if isinstance(found, Fault) or found.radian or found.kelvin:
            return None
        if found.measure is not None and found.measure is not need:
            return None
        word = found.word
        if word is not None and (word in scope.drafts or self._book.quantity(word, scope)):
            return None
        return Value(expression=found.expression, span=placed.value_span())

    def angle(self, text: ValueText, scope: Scope, turns: Turns) -> Value | None:
        """The angle of an amplitude, in degrees; None where there is none or it is wrong."""
        if text.angle is None:
            return None
        try:
            made = self._fitted(text.angle, Place("an angle", DEGREE), scope, turns)
        except UnreadableError:
            return None
        return Value(expression=made.expression, span=text.angle.span)

    def coefficient(self, formula: Formula, name: str, scope: Scope, turns: Turns) -> Expression:
        """A temperature coefficient, a ratio per kelvin.

        Raises
        ------
        UnreadableError
            once the problem is recorded.

        """
        made = self._formulas.make(formula, scope, turns)
        if made.measure is not None and self._solver.agree(made.measure, PER_KELVIN, formula.span):
            return made.expression
        return self._fitted(formula, Place(f"tc of {name}", PLAIN), scope, turns).expression

    def measured(self, text: ValueText, name: str, scope: Scope, turns: Turns) -> Measure | None:
        """The measure of a named quantity's value, None for a bare number.

        Raises
        ------
        UnreadableError
            once the problem is recorded.

        """
        assert text.formula is not None, "a quantity is never absent"
        return self._fitted(text.formula, Place(name, None), scope, turns).measure

    def _fitted(self, formula: Formula, place: Place, scope: Scope, turns: Turns) -> Made:
        """The expression, its unit checked against what the place needs."""
        need = place.need
        made = self._formulas.make(formula, scope, turns, in_s=place.in_s, need=need)
        if need is None or made.measure is None or made.measure is need:
            return made
        if self._solver.agree(made.measure, need, formula.span):
            return made
        measure = made.measure
        got = self._solver.reduced(measure)
        labels = tuple(
            Label(self._solver.first_use[base], f"{base[1:]} is used as {_solved(self, base)} here")
            for base in measure
            if base in self._solver.first_use
        )
        self._book.problems.add(
            "value.unit",
            f"{place.words} needs {words(need)}, got {words(got)}",
            formula.span,
            hint=_unit_hint(place, need, got, isinstance(formula, Literal)),
            labels=labels,
        )
        raise UnreadableError

    def _at(self, formula: Formula, place: Place, scope: Scope, turns: Turns) -> Expression:
        if not place.at:
            self._book.problems.add(
                "value.at",
                f"{place.words} takes no frequency: it holds at every one",
                formula.span,
                hint="Only quality and loss are stated at a frequency.",
            )
            raise UnreadableError
        return self._fitted(formula, Place("at", HERTZ), scope, turns).expression

    # ------------------------------------------------------------ tolerances

    def _tolerance(
        self, text: ToleranceText, made: Made, place: Place, scope: Scope, turns: Turns
    ) -> Tolerance:
        spread: Distribution = "normal" if text.spread == "normal" else "uniform"
        if len(text.amounts) == 2:
            return self._two_sided(text, spread)
        (amount,) = text.amounts
        side, relative = self._amount(amount, made, place, scope, turns)
        if isinstance(side, Number) and side.value < 0:
            self._wrong_tolerance(amount.span, "a tolerance is not negative", "Write ± 5 %.")
        return Tolerance(low=ex.negate(side), high=side, relative=relative, distribution=spread)

    def _two_sided(self, text: ToleranceText, spread: Distribution) -> Tolerance:
        sides = [_percentage(amount) for amount in text.amounts]
        signs = {amount.span.text[0] for amount in text.amounts}
        if len(signs) == 1:
            self._wrong_tolerance(
                text.span, "both limits lie on one side of the value", "Write +80 % -20 %."
            )
        if spread == "normal" and sides[0] != -sides[1]:
            self._wrong_tolerance(
                text.span,
                "a normal distribution needs equal limits on both sides",
                "Write ± 5 % normal, or leave out normal.",
            )
        return Tolerance(
            low=Number(min(sides)), high=Number(max(sides)), relative=True, distribution=spread
        )

    def _amount(
        self, amount: Amount, made: Made, place: Place, scope: Scope, turns: Turns
    ) -> tuple[Expression, bool]:
        """One side of a tolerance, and whether it is a part of the nominal value."""
        side = self._formulas.make(amount.formula, scope, turns)
        if amount.percent:
            bracketed = amount.formula.span != amount.span  # the % stands behind a bracket
            factor = ex.number(_HUNDREDTH) if bracketed else ex.ONE
            self._need(side, PLAIN, amount.span)
            return ex.multiply(side.expression, factor), True
        whole = made.measure if place.need is None else place.need
        known = self._solver.reduced(whole) if whole is not None else PLAIN
        bare = made.measure is None and side.measure is None  # let x = 3 ± 1
        if not known or (bare and all(base.startswith("?") for base in known)):
            self._need(side, PLAIN, amount.span)
            return side.expression, False
        if side.measure is None:
            unit = sign(known)
            number = amount.span.text
            number = number if isinstance(amount.formula, Literal) else f"({number})"
            self._wrong_tolerance(
                amount.span,
                f"± {number} does not say of what",
                f"Write ± {number} % or ± {number} {unit}." if unit else f"Write ± {number} %.",
            )
        assert side.measure is not None, "the bare number is refused above"
        mine = self._solver.reduced(side.measure)
        open_ = any(base.startswith("?") for base in mine)  # a bare name is a fraction
        if mine and not open_ and self._solver.agree(mine, known, amount.span):
            return side.expression, False
        self._need(side, PLAIN, amount.span)
        return side.expression, True

    def _need(self, side: Made, need: Measure, span: Span) -> None:
        if side.measure is not None and not self._solver.agree(side.measure, need, span):
            got = words(self._solver.reduced(side.measure))
            self._wrong_tolerance(
                span,
                f"a tolerance has the unit of its value or is a percentage, got {got}",
                "Write ± 5 %, or the limit in the unit of the value.",
            )

    def _wrong_tolerance(self, span: Span, message: str, hint: str) -> None:
        self._book.problems.add("value.tolerance", message, span, hint=hint)
        raise UnreadableError


def _solved(givens: Givens, base: str) -> str:
    return words(givens._solver.reduced({base: Fraction(1)}))


def _percentage(amount: Amount) -> Fraction:
    """A signed percentage as a fraction."""
    text = "".join(amount.span.text.split()).removesuffix("%").replace("\N{MINUS SIGN}", "-")
    return Fraction(text) / 100


def _unit_hint(place: Place, need: Measure, got: Measure, literal: bool) -> str:
    """What to write instead."""
    unit = sign(need)
    if words(got) == "decibels":
        return "Write the ratio itself: 20 dB is 10, 40 dB is 100."
    if not literal:
        return "Check the units of what the expression is made of."
    advice = f"Write the value in {unit}" if unit else "Write a number without a unit"
    letters = {"ohms": "R", "henries": "L", "farads": "C"}
    other, mine = letters.get(words(got)), letters.get(words(need))
    if place.name and other and mine and place.name.rpartition(".")[2].startswith(mine):
        return f"{advice}, or name the part {other}{place.name.rpartition('.')[2][1:]}."
    return advice + "."
