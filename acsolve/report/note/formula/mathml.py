"""Formulas as MathML Core (W3C)."""

from __future__ import annotations

from html import escape

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
    is_high,
    needs_brackets_below_power,
    width,
)

_NAMES = {"atan": "arctan", "atan2": "arctan2", "log": "ln"}
_ROOM, _SAFE = 40.0, 32.0  # digits that a narrow screen holds: of figures, of any letters
_SMALLEST = 0.25
_BETWEEN = {
    "=": "0.28em",
    "≈": "0.28em",
    "+": "0.22em",
    "-": "0.22em",
    "||": "0.22em",
    "·": "0.22em",
}
_SIGNS = {"-": "−", "||": "∥", "<=": "≤", ">=": "≥"}


def math_element(node: Node, *, display: bool = False) -> str:
    """A `math` element."""
    style = ' displaystyle="true"' if display else ""
    wide = width(node)
    if wide > _ROOM:  # a name of 60 letters has no operator to break at
        style += f' style="font-size:{max(_SMALLEST, _SAFE / wide):.2f}em"'
    return f"<math{style}><mrow>{_leading(node)}</mrow></math>"


def _leading(node: Node) -> str:
    """A piece of a broken formula; the sign that it starts with has its space on the right.

    A browser takes a sign at a start for a prefix and sets it close to what follows.
    """
    if isinstance(node, Row) and len(node.items) > 1 and isinstance(node.items[0], Sign):
        sign = node.items[0].text
        if sign in _BETWEEN:
            shown = escape(_SIGNS.get(sign, sign))
            first = f'<mo form="infix" lspace="0" rspace="{_BETWEEN[sign]}">{shown}</mo>'
            return first + mathml(Row(node.items[1:]))
    return mathml(node)


def _row(node: Node) -> str:
    return f"<mrow>{mathml(node)}</mrow>"


def mathml(node: Node) -> str:  # noqa: PLR0912 - one case for each kind of node
    """The elements of a tree, several side by side where it is a row."""
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
            pieces = [_factor(item) for item in factors]
            return _product(factors, pieces)
        case Ratio(top, bottom):
            return f"<mfrac>{_row(top)}{_row(bottom)}</mfrac>"
        case Power(base, exponent):
            inner = _brackets(base) if needs_brackets_below_power(base) else mathml(base)
            if isinstance(base, Row) and not base.items:
                inner = ""
            return f"<msup><mrow>{inner}</mrow>{_row(exponent)}</msup>"
        case Call("sqrt", arguments):
            return f"<msqrt>{_row(arguments[0])}</msqrt>"
        case Call("abs", arguments):
            return f"<mrow>{_bar('prefix')}{mathml(arguments[0])}{_bar('postfix')}</mrow>"
        case Call(name, arguments):
            listed = '<mo separator="true">,</mo>'.join(mathml(item) for item in arguments)
            shown = _NAMES.get(name, name)
            return f"<mi>{escape(shown)}</mi>{_open()}{listed}{_close()}"
        case Parallel(items):
            return "<mo>∥</mo>".join(_factor(item) for item in items)
        case Sign(text):
            return _sign(text)
        case Words(text):
            return f"<mtext>{escape(text)}</mtext>"
        case Row(items):
            return "".join(map(_piece, (None, *items), items))
        case Matrix(rows):
            cells = "".join(
                f"<mtr>{''.join(f'<mtd>{_row(cell)}</mtd>' for cell in row)}</mtr>" for row in rows
            )
            return f'<mo stretchy="true">[</mo><mtable>{cells}</mtable><mo stretchy="true">]</mo>'


def _piece(before: Node | None, item: Node) -> str:
    """A piece of a row: a minus right after a sign that opens takes off nothing before it."""
    if item == Sign("-") and (before is None or before in (Sign("="), Sign("("))):
        return '<mo form="prefix">−</mo>'
    return mathml(item)


def _product(factors: tuple[Node, ...], pieces: list[str]) -> str:
    """Factors with a thin space between; a dot between two numbers."""
    text = pieces[0]
    for before, item, piece in zip(factors, factors[1:], pieces[1:], strict=False):
        both = isinstance(before, Number) and isinstance(item, Number)
        named = isinstance(item, Call) and item.name != "sqrt"
        gap = f'<mspace width="{0.25 if named else 0.12}em"></mspace>'
        text += ("<mo>·</mo>" if both else gap) + piece
    return text


def _number(text: str) -> str:
    mantissa, exponent, power = text.partition("e")
    if not exponent:
        return f"<mn>{escape(text)}</mn>"
    ten = f"<msup><mn>10</mn><mn>{escape(power.replace('-', '−'))}</mn></msup>"
    return ten if mantissa == "1" else f"<mn>{escape(mantissa)}</mn><mo>·</mo>{ten}"


def _symbol(name: str) -> str:
    if name == "pi":
        return '<mi mathvariant="normal">π</mi>'
    head, lowered = split_name(name)
    upright = ' mathvariant="normal"' if len(head) == 1 and head in "j∞" else ""
    first = f"<mi{upright}>{escape(head)}</mi>"
    if not lowered:
        return first
    tag = "mn" if lowered.isdigit() else "mi"
    normal = ' mathvariant="normal"' if tag == "mi" and len(lowered) == 1 else ""
    return f"<msub>{first}<{tag}{normal}>{escape(lowered)}</{tag}></msub>"


def _term(place: int, negative: bool, item: Node) -> str:
    inner = _brackets(item) if negative and is_compound(item) else mathml(item)
    if place == 0:
        return ('<mo form="prefix">−</mo>' if negative else "") + inner
    return ("<mo>−</mo>" if negative else "<mo>+</mo>") + inner


def _factor(item: Node) -> str:
    return _brackets(item) if is_compound(item) else mathml(item)


def _open() -> str:
    return '<mo form="prefix" stretchy="false">(</mo>'


def _close() -> str:
    return '<mo form="postfix" stretchy="false">)</mo>'


def _bar(form: str) -> str:
    return f'<mo form="{form}" stretchy="true" lspace="0" rspace="0">|</mo>'


def _brackets(node: Node) -> str:
    """Brackets that grow with what they hold, where it is higher than a line."""
    if not is_high(node):
        return f"<mrow>{_open()}{mathml(node)}{_close()}</mrow>"
    return f'<mrow><mo form="prefix">(</mo>{mathml(node)}<mo form="postfix">)</mo></mrow>'


def _sign(text: str) -> str:
    if text == "(":
        return _open()
    if text == ")":
        return _close()
    if text == "|":
        return '<mo stretchy="false" lspace="0" rspace="0">|</mo>'
    if text in ("-", "+"):
        return f'<mo form="infix">{_SIGNS.get(text, text)}</mo>'
    if text.isalnum():
        return f"<mi>{escape(_NAMES.get(text, text))}</mi>"
    return f"<mo>{escape(_SIGNS.get(text, text))}</mo>"
