"""What a notebook shows of an answer: asked here, made by the layer that makes pictures."""

from __future__ import annotations

from importlib import import_module
from typing import Any

_RENDERER = "acsolve.report.notebook"  # above every answer; loaded when a notebook asks


class Shown:
    """An answer that a notebook shows as a formula, a picture or a table."""

    __slots__ = ()

    def _repr_mimebundle_(self, include: Any = None, exclude: Any = None) -> dict[str, str]:
        """The answer by media type, as interactive Python environments ask for it."""
        del include, exclude
        bundle: dict[str, str] = import_module(_RENDERER).bundle(self)
        return bundle
