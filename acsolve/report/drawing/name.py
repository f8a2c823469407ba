"""How a name is written: its letter, and what stands below the line, in drawing and formula."""

from __future__ import annotations

_GREEK = {
    "tau": "τ",
    "omega": "ω",
    "pi": "π",
    "phi": "φ",
    "alpha": "α",
    "beta": "β",
    "gamma": "γ",
    "delta": "δ",
    "zeta": "ζ",
    "mu": "μ",
    "sigma": "σ",
    "lambda": "λ",
}


def split_name(name: str) -> tuple[str, str]:
    """The head of a name and what is written below the line: `R1` -> R, 1; `tau_z` -> τ, z.

    Names of the trade have a letter or two and a number or a word; `w0` is ω₀. Whatever does
    not look so stays whole.
    """
    if name == "w":
        return "ω", ""
    letters = name.rstrip("0123456789")
    digits = name[len(letters) :]
    if letters == "w" and digits:
        return "ω", digits
    if letters in _GREEK:
        return _GREEK[letters], digits
    head, underscore, rest = name.partition("_")
    if underscore and head in _GREEK and rest:
        return _GREEK[head], rest
    if head == "w" and rest:
        return "ω", rest
    if name == "wd":
        return "ω", "d"
    if underscore and len(head) == 1 and rest and (head in "VI" or name.count("_") == 1):
        return head, rest
    if "[" in name:
        return name, ""
    if "." in name:
        base, _, attribute = name.partition(".")
        head, lowered = split_name(base)
        return head, f"{lowered}, {attribute}".removeprefix(", ").replace("_", "\u00a0")
    if len(name) > 1 and name[0] in "RLCGZXQ" and name[1:].isalnum() and name[1].islower():
        return name[0], name[1:]
    if digits and 1 <= len(letters) <= 2 and letters.isalpha():
        return letters, digits
    return name, ""
