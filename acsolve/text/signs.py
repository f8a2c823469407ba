"""Characters that the format does not use, and what was probably meant."""

from __future__ import annotations

import unicodedata

from acsolve.codes import Code

_MEANT: dict[str, tuple[str, str]] = {
    "\N{EN DASH}": ("is an en dash", "Write -- between nodes and parts, - for minus."),
    "\N{EM DASH}": ("is an em dash", "Write -- between nodes and parts, - for minus."),
    "\N{HYPHEN}": ("is a typographic hyphen", "Write -."),
    "\N{LEFT DOUBLE QUOTATION MARK}": ("is a typographic quote", 'Write ".'),
    "\N{RIGHT DOUBLE QUOTATION MARK}": ("is a typographic quote", 'Write ".'),
    "\N{DOUBLE LOW-9 QUOTATION MARK}": ("is a typographic quote", 'Write ".'),
    "\N{LEFT SINGLE QUOTATION MARK}": ("is a typographic quote", 'Write ".'),
    "\N{RIGHT SINGLE QUOTATION MARK}": ("is a typographic quote", 'Write ".'),
    "'": ("is a single quote", 'Texts stand in double quotes: "…".'),
    "`": ("is no quote of the format", 'Texts stand in double quotes: "…".'),
    "\N{DEGREE SIGN}": ("is no unit here", "Write deg for an angle, K for a temperature."),
    "\N{MIDDLE DOT}": ("is no sign of the format", "Write * for a product."),
    "\N{DOT OPERATOR}": ("is no sign of the format", "Write * for a product."),
    "\N{MULTIPLICATION SIGN}": ("is no sign of the format", "Write * for a product."),
    "\N{DIVISION SIGN}": ("is no sign of the format", "Write / for a quotient."),
    "\N{SUPERSCRIPT TWO}": ("is no sign of the format", "Write ^2."),
    "\N{SUPERSCRIPT THREE}": ("is no sign of the format", "Write ^3."),
    "\N{RIGHTWARDS ARROW}": ("is no sign of the format", "Write -- along a chain."),
    "\N{GREEK SMALL LETTER PI}": ("is no name of the format", "Write pi."),
    "\N{SQUARE ROOT}": ("stands only in V/√Hz and A/√Hz", "Write sqrt(…)."),
    "\N{PER MILLE SIGN}": ("is no unit here", "Write the percentage: 0.1 %."),
    "\N{HORIZONTAL ELLIPSIS}": ("is no sign of the format", "Write .. in a range."),
    ";": ("is no sign of the format", "A statement ends at the end of its line."),
    "{": ("is no bracket of the format", "Write ( or [."),
    "}": ("is no bracket of the format", "Write ) or ]."),
    "|": ("stands alone", "Write || for parts in parallel."),
    "\\": ("is no sign of the format", "A line goes on inside brackets and after -- , || and +."),
    ">": ("is no sign of the format", "Write above or below in a goal, -- along a chain."),
    "<": ("is no sign of the format", "Write above or below in a goal, -- along a chain."),
}  # fmt: skip


def told_sign(text: str) -> tuple[Code, str, str]:
    """Code, message and hint for a character that the format does not use."""
    if text.startswith('"'):
        return "syntax.text", "this text has no closing quote", 'End it with " on the same line.'
    if text in _MEANT:
        what, hint = _MEANT[text]
        return "syntax.sign", f"{text} {what}", hint
    if text.isalpha():
        return (
            "syntax.sign",
            f"the letter {text} is not allowed in a name",
            "Names are made of the letters a to z, A to Z, digits and _.",
        )
    shown = text if text.isprintable() else f"U+{ord(text):04X}"
    name = unicodedata.name(text, "a control character").lower()
    return "syntax.sign", f"{shown} ({name}) is no sign of the format", "Take it out."
