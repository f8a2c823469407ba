"""Formulas as TeX, with the amsmath package's words only where every viewer knows them."""

from __future__ import annotations

from itertools import pairwise

from acsolve.report.drawing.name import split_name
from acsolve.report.note.formula.tree import (
    Call,
    Matrix,
    Node,
    Number,
    Parallel,
    Power,
    Product,
    Ratio,
    Row,
    Sign,
    StandIn,
    Symbol,
    Total,
    Words,
    is_compound,
    needs_brackets_below_power,
)

_GREEK = {
    "τ": r"\tau",
    "ω": r"\omega",
    "π": r"\pi",
    "φ": r"\varphi",
    "α": r"\alpha",
    "β": r"\beta",
    "γ": r"\gamma",
    "δ": r"\delta",
    "ζ": r"\zeta",
    "μ": r"\mu",
    "σ": r"\sigma",
    "λ": r"\lambda",
    "∞": r"\infty",
}
_FUNCTIONS = {"atan": r"\arctan", "exp": r"\exp", "log": r"\ln", "sin": r"\sin", "cos": r"\cos"}
_FUNCTIONS["arg"] = r"\arg"
_FUNCTIONS |= {"sinh": r"\sinh", "cosh": r"\cosh", "tanh": r"\tanh", "coth": r"\coth"}
_SIGNS = {"||": r"\parallel{}", "·": r"\cdot{}", "≤": r"\le{}", "≥": r"\ge{}", ">": ">", "<": "<"}


def tex(node: Node) -> str:  # noqa: PLR0912 - one case for each kind of node
    """A tree as TeX for mathematics mode."""
    match node:
        case Number(text):
            return _number(text)
        case Symbol(name):
            return _symbol(name)
        case StandIn(letter):
            return _symbol(letter)
        case Total(terms):
            return "".join(_term(place, *term) for place, term in enumerate(terms))
        case Product(factors):
            return _product(factors)
        case Ratio(top, bottom):
            return rf"\frac{{{tex(top)}}}{{{tex(bottom)}}}"
        case Power(base, exponent):
            inner = _brackets(base) if needs_brackets_below_power(base) else tex(base)
            if isinstance(base, Row) and not base.items:
                inner = ""
            return f"{{{inner}}}^{{{tex(exponent)}}}"
        case Call("sqrt", arguments):
            return rf"\sqrt{{{tex(arguments[0])}}}"
        case Call("abs", arguments):
            return rf"\left|{tex(arguments[0])}\right|"
        case Call(name, arguments):
            return f"{_function(name)}({', '.join(tex(item) for item in arguments)})"
        case Parallel(items):
            return r" \parallel ".join(_factor(item) for item in items)
        case Sign(text):
            return _sign(text)
        case Words(text):
            return rf"\text{{{_plain(text)}}}"
        case Row(items):
            return " ".join(tex(item) for item in items)
        case Matrix(rows):
            lines = r" \\ ".join(" & ".join(tex(cell) for cell in row) for row in rows)
            shape = "r" * len(rows[0]) if rows else "r"
            return rf"\left[\begin{{array}}{{{shape}}} {lines} \end{{array}}\right]"


def _product(factors: tuple[Node, ...]) -> str:
    text = _factor(factors[0])
    for before, item in pairwise(factors):
        both = isinstance(before, Number) and isinstance(item, Number)
        text += (r" \cdot " if both else r"\,") + _factor(item)
    return text


def _number(text: str) -> str:
    mantissa, exponent, power = text.partition("e")
    if not exponent:
        return text
    return f"10^{{{power}}}" if mantissa == "1" else rf"{mantissa} \cdot 10^{{{power}}}"


def _symbol(name: str) -> str:
    head, lowered = split_name(name)
    if head == "j":
        first = r"\mathrm{j}"
    elif head in _GREEK:
        first = _GREEK[head]
    else:
        first = head if len(head) == 1 and head.isascii() and head.isalpha() else _word(head)
    if not lowered:
        return first + (" " if first[0] == "\\" and first[-1].isalpha() else "")
    return f"{first}_{{{lowered if lowered.isdigit() else _upright(lowered)}}}"


def _word(text: str) -> str:
    return rf"\mathit{{{_plain(text)}}}"


def _upright(text: str) -> str:
    return rf"\mathrm{{{_plain(text)}}}"


def _plain(text: str) -> str:
    """Names inside a formula: letters, digits, and the signs that names may hold."""
    from acsolve.report.note.tex_escape import escape_tex

    return escape_tex(text)


def _function(name: str) -> str:
    return _FUNCTIONS.get(name, rf"\operatorname{{{'arctan2' if name == 'atan2' else name}}}")


def _term(place: int, negative: bool, item: Node) -> str:
    inner = _brackets(item) if negative and is_compound(item) else tex(item)
    if place == 0:
        return f"-{inner}" if negative else inner
    return f" - {inner}" if negative else f" + {inner}"


def _factor(item: Node) -> str:
    return _brackets(item) if is_compound(item) else tex(item)


def _brackets(node: Node) -> str:
    return rf"\left({tex(node)}\right)"


def _sign(text: str) -> str:
    if text.isalnum():
        return _function(text)
    return f"{{}}{text}" if text in ("+", "-") else _SIGNS.get(text, text)
