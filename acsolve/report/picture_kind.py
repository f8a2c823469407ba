"""What a picture can show, by the names that `--picture` takes."""

from __future__ import annotations

from typing import Literal, get_args

PictureKind = Literal["gain", "delay", "poles", "nyquist", "nichols"]
PICTURE_KINDS: tuple[PictureKind, ...] = get_args(PictureKind)

#: The response as one curve in a plane: it is smooth only with points placed for it.
PLANES: tuple[PictureKind, ...] = ("nyquist", "nichols")
