"""From the engine's own text form to a tree: a small strict reader, nothing is evaluated.

The text form is the one of `acsolve.equations.write` and `phrase`: sums, products, quotients,
whole and broken powers (`^` or `**`), `||` for values in parallel, functions, and names that
may hold indices and dots.
"""

from __future__ import annotations

import re

from acsolve.report.note.formula.tree import (
    Call,
    Node,
    Number,
    Parallel,
    Power,
    Product,
    Ratio,
    Symbol,
    Total,
)

_TOKEN = re.compile(
    r"\s*(?:(?P<number>\d+(?:\.\d+)?(?:e-?\d+)?)"
    r"|(?P<coupling>k\(\w[\w.\[\]]*, \w[\w.\[\]]*\))"
    r"|(?P<name>[^\W\d]\w*(?:\[[^\[\]]*\])?(?:\.\w+(?:\[[^\[\]]*\])?)*)"
    r"|(?P<sign>\*\*|\|\||[-+*/^(),]))"
)
_FUNCTIONS = frozenset(
    ("sqrt", "atan", "atan2", "exp", "log", "sinh", "cosh", "tanh", "abs", "cos", "sin", "coth")
)
_DEEPEST = 200


class UnreadableError(ValueError):
    """The text is not in our own form."""


def read_formula(text: str) -> Node:
    """The tree of a text.

    Raises
    ------
    UnreadableError
        the text is not in the engine's own form, or nests too deep.
    """
    reader = _Reader(_tokens(text))
    found = reader.total(0)
    if reader.here is not None:
        raise UnreadableError(f"{text!r} goes on after {reader.here[1]!r}")
    return found


def _tokens(text: str) -> list[tuple[str, str]]:
    found, place, text = [], 0, text.rstrip()
    while place < len(text):
        match = _TOKEN.match(text, place)
        if match is None or match.lastgroup is None:
            raise UnreadableError(f"{text[place : place + 12]!r} is no part of a formula")
        found.append((match.lastgroup, match[match.lastgroup]))
        place = match.end()
    return found


class _Reader:
    def __init__(self, tokens: list[tuple[str, str]]) -> None:
        self._tokens, self._place = tokens, 0

    @property
    def here(self) -> tuple[str, str] | None:
        return self._tokens[self._place] if self._place < len(self._tokens) else None

    def _take(self, *texts: str) -> str | None:
        if self.here is not None and self.here[0] == "sign" and self.here[1] in texts:
            self._place += 1
            return self._tokens[self._place - 1][1]
        return None

    def _expect(self, text: str) -> None:
        if self._take(text) is None:
            raise UnreadableError(f"{text} is missing")

    def total(self, depth: int) -> Node:
        """A sum, or values in parallel, which stand alone in brackets of their own."""
        if depth > _DEEPEST:
            raise UnreadableError("the formula nests too deep")
        terms = [(self._take("-") is not None, self._product(depth))]
        if self.here == ("sign", "||"):
            items: list[Node] = [Total((terms[0],)) if terms[0][0] else terms[0][1]]
            while self._take("||"):
                items.append(self._product(depth))
            return Parallel(tuple(items))
        while (sign := self._take("+", "-")) is not None:
            terms.append((sign == "-", self._product(depth)))
        return terms[0][1] if len(terms) == 1 and not terms[0][0] else Total(tuple(terms))

    def _product(self, depth: int) -> Node:
        found: Node = self._power(depth)
        while (sign := self._take("*", "/")) is not None:
            right = self._power(depth)
            found = _times(found, right) if sign == "*" else _over(found, right)
        return found

    def _power(self, depth: int) -> Node:
        base = self._atom(depth)
        if self._take("^", "**") is None:
            return base
        if self._take("-"):
            return Power(base, Total(((True, self._atom(depth)),)))
        return Power(base, self._atom(depth))

    def _atom(self, depth: int) -> Node:
        if self.here is None:
            raise UnreadableError("the formula ends too early")
        kind, text = self.here
        self._place += 1
        if kind == "number":
            return Number(text)
        if kind == "coupling":
            return Symbol("k_" + text[2:-1].replace("_", "").replace(", ", "\u2009"))
        if kind == "name":
            return self._named(text, depth)
        if text == "(":
            inner = self.total(depth + 1)
            self._expect(")")
            return inner
        if text == "-":
            return Total(((True, self._power(depth)),))
        raise UnreadableError(f"{text} stands where a value should")

    def _named(self, text: str, depth: int) -> Node:
        if text not in _FUNCTIONS or self._take("(") is None:
            return Symbol(text)
        arguments = [self.total(depth + 1)]
        while self._take(","):
            arguments.append(self.total(depth + 1))
        self._expect(")")
        if text == "atan2" and len(arguments) == 2:
            return _angle(*arguments)
        return Call(text, tuple(arguments))


def _angle(imaginary: Node, real: Node) -> Node:
    """The angle of a complex number, as it is written by hand: arg(real + j·imaginary)."""
    if imaginary == Number("0"):
        return Call("arg", (real,))
    turned = _times(Symbol("j"), imaginary)
    terms = real.terms if isinstance(real, Total) else ((False, real),)
    if real == Number("0"):
        terms = ()
    return Call("arg", (Total((*terms, (False, turned))),))


def _times(left: Node, right: Node) -> Node:
    """A product; what stands behind a quotient belongs above its line."""
    if isinstance(left, Ratio):
        return Ratio(right if left.top == Number("1") else _times(left.top, right), left.bottom)
    factors = left.factors if isinstance(left, Product) else (left,)
    return Product((*factors, right))


def _over(left: Node, right: Node) -> Node:
    """A quotient; one that is divided again has both below one line."""
    if isinstance(left, Ratio):
        return Ratio(left.top, _times(left.bottom, right))
    return Ratio(left, right)
