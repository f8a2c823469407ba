"""A figure of the plotting library as strokes and labels, through a renderer of our own."""

from __future__ import annotations

import logging
from typing import TYPE_CHECKING, Any

from acsolve.report.note.ink.strokes import (
    COLOURS,
    Close,
    Curve,
    Ink,
    Label,
    Line,
    Mark,
    Move,
    Role,
    Step,
    Stroke,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from matplotlib.figure import Figure

_DPI = 72.0  # a pixel of the renderer is a point
_ROLES: dict[str, Role] = {
    **{colour: role for role, colour in COLOURS.items()},
    "#222222": "ink",
    "#9a9a9a": "soft",
    "#000000": "ink",
}


def figure_ink(make: Callable[[], Figure]) -> Ink:
    """Draw a figure, made under this program's settings, into strokes and labels."""
    logging.getLogger("matplotlib").setLevel(logging.ERROR)
    import matplotlib as mpl

    from acsolve.report.plot import SETTINGS

    with mpl.rc_context(SETTINGS):
        figure = make()
        figure.set_dpi(_DPI)
        figure.patch.set_visible(False)
        for axes in figure.axes:
            axes.patch.set_visible(False)
        wide, high = (float(size) * _DPI for size in figure.get_size_inches())
        renderer = _renderer(wide, high)
        figure.draw(renderer)
    return Ink(width=wide, height=high, marks=tuple(renderer.marks))


def _renderer(wide: float, high: float) -> Any:
    """A renderer that keeps what it is told to draw."""
    from matplotlib.backend_bases import RendererBase
    from matplotlib.font_manager import FontProperties
    from matplotlib.path import Path
    from matplotlib.textpath import TextToPath

    class Keeper(RendererBase):
        def __init__(self) -> None:
            super().__init__()
            self.marks: list[Mark] = []
            self._measure = TextToPath()

        def get_canvas_width_height(self) -> tuple[float, float]:
            return wide, high

        def points_to_pixels(self, points: Any) -> Any:
            return points

        def get_text_width_height_descent(
            self, s: str, prop: FontProperties, ismath: Any
        ) -> tuple[float, float, float]:
            return self._measure.get_text_width_height_descent(s, prop, ismath)

        def draw_path(self, gc: Any, path: Path, transform: Any, rgbFace: Any = None) -> None:
            steps = _steps(path.transformed(transform), gc, (wide, high))
            stroke = _role(gc.get_rgb()) if gc.get_linewidth() > 0 else None
            fill = None if rgbFace is None else _role(rgbFace)
            if not steps or (stroke is None and fill is None):
                return
            _, dashes = gc.get_dashes()
            alpha = gc.get_alpha()
            self.marks.append(
                Stroke(
                    steps=steps,
                    stroke=stroke,
                    fill=fill,
                    width=float(gc.get_linewidth()),
                    dashes=() if dashes is None else tuple(float(size) for size in dashes),
                    opacity=1.0 if alpha is None else float(alpha),
                )
            )

        def draw_image(self, *_: Any, **__: Any) -> None:
            raise AssertionError("our pictures hold no images")

        def draw_text(  # noqa: PLR0913, PLR0917 - the library's signature
            self,
            gc: Any,
            x: float,
            y: float,
            s: str,
            prop: Any,
            angle: float,
            ismath: Any = False,
            mtext: Any = None,  # noqa: ARG002
        ) -> None:
            size = float(prop.get_size_in_points())
            length, _, _ = self.get_text_width_height_descent(s, prop, ismath)
            turned = round(angle) == 90
            middle = (x, y - length / 2) if turned else (x + length / 2, y)
            self.marks.append(
                Label(
                    pieces=((s, False),),
                    middle=(float(middle[0]), float(middle[1])),
                    size=size,
                    width=float(length),
                    role=_role(gc.get_rgb()) or "ink",
                    turned=turned,
                )
            )

        def flipy(self) -> bool:
            return True

    return Keeper()


def _role(rgb: Any) -> Role | None:
    """The role of a colour; None where it is transparent."""
    from matplotlib.colors import to_hex

    if len(rgb) == 4 and rgb[3] == 0:
        return None
    return _ROLES.get(to_hex(rgb[:3]), "ink")


def _steps(path: Any, gc: Any, size: tuple[float, float]) -> tuple[Step, ...]:
    """The path with y downwards, cut to where the axes let it show."""
    from matplotlib.path import Path

    box = gc.get_clip_rectangle()
    clip = None if box is None else (box.x0 - 1, box.y0 - 1, box.x1 + 1, box.y1 + 1)
    straight = path.codes is None or not set(path.codes.tolist()) & {Path.CURVE3, Path.CURVE4}
    found: list[Step] = []
    high = size[1]
    here = (0.0, 0.0)
    for points, code in path.iter_segments(simplify=None, clip=clip if straight else None):
        pairs = [(float(x), high - float(y)) for x, y in points.reshape(-1, 2)]
        if code == Path.MOVETO:
            found.append(Move(pairs[0]))
        elif code == Path.LINETO:
            found.append(Line(pairs[0]))
        elif code == Path.CURVE3:
            first = _toward(here, pairs[0])
            found.append(Curve(first, _toward(pairs[1], pairs[0]), pairs[1]))
        elif code == Path.CURVE4:
            found.append(Curve(pairs[0], pairs[1], pairs[2]))
        elif code == Path.CLOSEPOLY:
            found.append(Close())
            continue
        else:
            continue
        here = pairs[-1]
    return tuple(found)


def _toward(start: tuple[float, float], control: tuple[float, float]) -> tuple[float, float]:
    """The cubic's control point for a quadratic's: two thirds of the way."""
    return (
        start[0] + 2 / 3 * (control[0] - start[0]),
        start[1] + 2 / 3 * (control[1] - start[1]),
    )
