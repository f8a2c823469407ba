"""Texts inside LaTeX: every sign stands for itself, whatever fonts there are."""

from __future__ import annotations

import re

_SPECIAL = {
    "\\": r"\textbackslash{}",
    "{": r"\{",
    "}": r"\}",
    "$": r"\$",
    "&": r"\&",
    "#": r"\#",
    "%": r"\%",
    "_": r"\_",
    "^": r"\textasciicircum{}",
    "~": r"\textasciitilde{}",
    "<": r"\ensuremath{<}",
    ">": r"\ensuremath{>}",
    "|": r"\ensuremath{|}",
    '"': r"\textquotedbl{}",
    "-": "{-}",
    "`": r"\textasciigrave{}",
    "'": r"\textquotesingle{}",
}
_SIGNS = {
    "Ω": r"\ensuremath{\mathrm{\Omega}}",
    "µ": r"\ensuremath{\mu}",
    "μ": r"\ensuremath{\mu}",
    "±": r"\ensuremath{\pm}",
    "−": r"\ensuremath{-}",
    "·": r"\ensuremath{\cdot}",
    "×": r"\ensuremath{\times}",
    "°": r"\ensuremath{^\circ}",
    "²": r"\ensuremath{^2}",
    "³": r"\ensuremath{^3}",
    "√": r"\ensuremath{\surd}",
    "∞": r"\ensuremath{\infty}",
    "≤": r"\ensuremath{\le}",
    "≥": r"\ensuremath{\ge}",
    "∥": r"\ensuremath{\parallel}",
    "∠": r"\ensuremath{\angle}",
    "→": r"\ensuremath{\to}",
    "…": r"\ldots{}",
    "–": "--",
    "—": "---",
    "“": "``",
    "”": "''",
    "‘": "`",
    "’": "'",
    "\u00a0": "~",
    "\u202f": r"\,",
    "\u2009": r"\,",
    "τ": r"\ensuremath{\tau}",
    "ω": r"\ensuremath{\omega}",
    "π": r"\ensuremath{\pi}",
    "λ": r"\ensuremath{\lambda}",
    "φ": r"\ensuremath{\varphi}",
    "ϕ": r"\ensuremath{\phi}",
    "∆": r"\ensuremath{\Delta}",
    "Δ": r"\ensuremath{\Delta}",
}
_SIGNS |= {
    sign: rf"\ensuremath{{^{{{plain}}}}}"
    for sign, plain in zip("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789", strict=True)
}
_SIGNS |= {
    sign: rf"\ensuremath{{_{{{plain}}}}}"
    for sign, plain in zip("₀₁₂₃₄₅₆₇₈₉", "0123456789", strict=True)
}
_LONGEST_WORD, _PIECE = 30, 10  # signs of a word that TeX cannot hyphenate, and where it may break
_BREAK = r"\notebreak{}"
_LETTERS = "ÀÁÂÃÄÅÆÇÈÉÊËÌÍÎÏÑÒÓÔÕÖØÙÚÛÜÝßàáâãäåæçèéêëìíîïñòóôõöøùúûüýÿ"


def escape_tex(text: str) -> str:
    """A text as LaTeX shows it; a sign that plain fonts lack is named by its code point."""
    breaks = _breaks(text)
    return "".join(
        _one(sign) + (_BREAK if place in breaks else "") for place, sign in enumerate(text)
    )


def _breaks(text: str) -> set[int]:
    """Places in words of many signs after which a line may end."""
    found: set[int] = set()
    for word in re.finditer(r"\S+", text):
        if len(word[0]) > _LONGEST_WORD:
            found |= set(range(word.start() + _PIECE - 1, word.end() - 1, _PIECE))
    return found


def _one(sign: str) -> str:
    if sign in _SPECIAL:
        return _SPECIAL[sign]
    if sign in _SIGNS:
        return _SIGNS[sign]
    if (sign.isascii() and sign.isprintable()) or sign in _LETTERS or sign == "\n":
        return sign
    return " " if sign.isspace() else rf"\textit{{[U+{ord(sign):04X}]}}"


def escape_code(text: str) -> str:
    """The same for lines of a listing: spaces and line ends stay."""
    lines = text.expandtabs(4).split("\n")
    return "\n".join(escape_tex(line).replace(" ", r"\ ") + r"\strut\par" for line in lines)
