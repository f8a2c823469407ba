"""How symbols are spelled in answers: as the file names them, or safe for other programs."""

from __future__ import annotations

import re
from collections.abc import Iterable
from keyword import iskeyword

from acsolve.circuit.graph import natural_key
from acsolve.equations.reserved import RESERVED

_PLAIN = re.compile(r"[A-Za-z][A-Za-z0-9_]*\Z")


def is_safe(name: str) -> bool:
    """Whether SymPy's parser reads the name as a symbol of its own."""
    return bool(_PLAIN.match(name)) and not iskeyword(name) and name not in RESERVED


def safe_names(names: Iterable[str]) -> dict[str, str]:
    """name -> safe name, distinct for distinct names and the same on every run."""
    chosen: dict[str, str] = {}
    ordered = sorted(set(names), key=natural_key)
    taken = {name for name in ordered if is_safe(name)}
    for name in ordered:
        if is_safe(name):
            chosen[name] = name
            continue
        base = re.sub(r"[^A-Za-z0-9]+", "_", name).strip("_") or "x"
        if not base[0].isalpha():
            base = f"x_{base}"
        candidate, count = base, 1
        while candidate in taken or not is_safe(candidate):
            candidate, count = f"{base}_{count}", count + 1
        chosen[name] = candidate
        taken.add(candidate)
    return chosen
