"""Words beside points of a picture, each where it covers nothing else, and arrows on curves."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING, Any

import numpy as np
from numpy.typing import NDArray

from acsolve.report.axes import tick_text

if TYPE_CHECKING:
    from matplotlib.axes import Axes

Box = tuple[float, float, float, float]  # left, bottom, right, top, in pixels
Floats = NDArray[np.float64]

_SIZE = 8.5
_INK = "#222222"
_CORNERS = ((1, 1), (1, -1), (-1, 1), (-1, -1), (1, 0), (-1, 0), (0, 1), (0, -1))
_AWAY = (6.0, 12.0, 20.0)  # points
_LINE_HEIGHT = 1.3  # of the font size
_FURTHER = 4  # as bad as so many covered places of a curve
_DENSE = 3.0  # pixels between the places where a curve is felt
_FAR = 1e5  # pixels; what lies beyond is in no picture


@dataclass(frozen=True, slots=True)
class Word:
    """A text that belongs to a point, in data coordinates."""

    x: float
    y: float
    text: str
    colour: str = _INK


def telling(values: Sequence[float], unit: str, digits: int = 4) -> tuple[str, ...]:
    """Values with their unit, to so many digits, or to as many as tell each from the others."""
    texts = []
    for value in values:
        others = [other for other in values if f"{other:.8e}" != f"{value:.8e}"]
        enough = (
            more
            for more in range(digits, 10)
            if tick_text(value, unit, more) not in {tick_text(o, unit, more) for o in others}
        )
        texts.append(tick_text(value, unit, next(enough, 10)))
    return tuple(texts)


def settle(axes: Axes) -> None:
    """Lay the figure out once and for all, so that places in pixels are known."""
    figure = axes.get_figure(root=True)
    assert figure is not None, "axes that are laid out belong to a figure"
    engine = figure.get_layout_engine()
    if engine is not None:  # drawing everything for the sake of the layout costs twice as much
        engine.execute(figure)
    for each in figure.axes:
        each.apply_aspect()
    figure.set_layout_engine("none")


def place(
    axes: Axes,
    words: Sequence[Word],
    *,
    curves: Iterable[tuple[Any, Any]] = (),
    points: Iterable[tuple[float, float]] = (),
    most: int = 12,
    rings: int = len(_AWAY),
) -> tuple[Word, ...]:
    """Write words beside their points, as many as find room, in their order.

    Parameters
    ----------
    curves : lines as (x, y) in data coordinates, which words avoid where they can.
    points : markers, which words never cover; so are texts that stand already.
    most : no more words than that.
    rings : how far away a word may stand, 1 for the nearest places alone.

    Returns
    -------
    The words that were written.

    Notes
    -----
    The figure must be settled. Of the eight places in each ring around its point a word takes
    the one that covers least of any curve, a nearer one where that differs little.
    """
    scale = axes.figure.dpi / 72
    taken = [_standing(text) for text in axes.texts if text.get_text()]
    taken += [_around(spot, 4 * scale) for spot in _pixels(axes, points)]
    felt = np.concatenate([_felt(axes, x, y) for x, y in curves] or [np.zeros((0, 2))])
    written: list[Word] = []
    for word in words:
        if len(written) >= most:
            break
        spot = _pixels(axes, [(word.x, word.y)])[0]
        found = _best(axes, word, spot, taken=taken, felt=felt, rings=_AWAY[:rings])
        if found is None:
            continue
        offset, side, box = found
        taken.append(box)
        _write(axes, word, offset, side)
        written.append(word)
    return tuple(written)


def _best(
    axes: Axes,
    word: Word,
    spot: Floats,
    *,
    taken: Sequence[Box],
    felt: Floats,
    rings: Sequence[float],
) -> tuple[tuple[float, float], tuple[int, int], Box] | None:
    """Offset in points, side and box of the best free place."""
    scale = axes.figure.dpi / 72
    frame = axes.bbox.extents
    if not np.isfinite(spot).all() or not _inside((*spot, *spot), frame):
        return None
    best: Any = None
    width = _width(word.text)
    for ring, away in enumerate(rings):
        for side in _CORNERS:
            near = 0.7 if all(side) else 1.0
            offset = (side[0] * away * near, side[1] * away * near)
            box = _box(spot, offset, side, width, scale)
            if not _inside(box, frame) or any(_meet(box, other) for other in taken):
                continue
            cost = _covered(box, felt) + _FURTHER * ring
            if best is None or cost < best[0]:
                best = (cost, offset, side, box)
    return None if best is None else best[1:]


def _write(axes: Axes, word: Word, offset: tuple[float, float], side: tuple[int, int]) -> None:
    axes.annotate(
        word.text,
        xy=(word.x, word.y),
        xytext=offset,
        textcoords="offset points",
        ha={1: "left", -1: "right", 0: "center"}[side[0]],
        va={1: "bottom", -1: "top", 0: "center"}[side[1]],
        color=word.colour,
        fontsize=_SIZE,
        bbox={"facecolor": "white", "edgecolor": "none", "pad": 0.6, "alpha": 0.8},
        zorder=5,
    )


def _width(text: str) -> float:
    """The width of a text in points, whatever it will be drawn by."""
    from matplotlib.font_manager import FontProperties
    from matplotlib.textpath import TextPath

    font = FontProperties(family="DejaVu Sans")
    return float(TextPath((0, 0), text, size=_SIZE, prop=font).get_extents().width) + 4


def _box(
    spot: Floats, offset: tuple[float, float], side: tuple[int, int], width: float, scale: float
) -> Box:
    wide, high = width * scale, _SIZE * _LINE_HEIGHT * scale
    x, y = float(spot[0]) + offset[0] * scale, float(spot[1]) + offset[1] * scale
    left = {1: x, -1: x - wide, 0: x - wide / 2}[side[0]]
    bottom = {1: y, -1: y - high, 0: y - high / 2}[side[1]]
    return left, bottom, left + wide, bottom + high


def _standing(text: Any) -> Box:
    box = text.get_window_extent()
    return box.x0, box.y0, box.x1, box.y1


def _around(spot: Floats, half: float) -> Box:
    x, y = float(spot[0]), float(spot[1])
    return x - half, y - half, x + half, y + half


def _meet(first: Box, second: Box) -> bool:
    return (
        first[0] < second[2]
        and second[0] < first[2]
        and first[1] < second[3]
        and second[1] < first[3]
    )


def _inside(box: Sequence[float], frame: Any) -> bool:
    return bool(
        frame[0] <= box[0] and frame[1] <= box[1] and box[2] <= frame[2] and box[3] <= frame[3]
    )


def _covered(box: Box, felt: Floats) -> int:
    left, bottom, right, top = box
    x, y = felt[:, 0], felt[:, 1]
    return int(((x > left) & (x < right) & (y > bottom) & (y < top)).sum())


def _pixels(axes: Axes, points: Iterable[tuple[float, float]]) -> Floats:
    given = np.array(list(points), dtype=float).reshape(-1, 2)
    with np.errstate(all="ignore"):
        return np.asarray(axes.transData.transform(given), dtype=float)


def _felt(axes: Axes, x: Any, y: Any) -> Floats:
    """Places along a line, close enough together that no word slips between them."""
    spots = _pixels(axes, zip(np.asarray(x, dtype=float), np.asarray(y, dtype=float), strict=True))
    spots = np.where(np.abs(spots) < _FAR, spots, np.nan)
    pieces = [spots]
    for start, end in pairwise(spots):
        long = float(np.hypot(*(end - start)))
        if long > _DENSE:  # false where an end is not known
            shares = np.linspace(0, 1, int(long / _DENSE) + 2)[1:-1, None]
            pieces.append(start + shares * (end - start))
    return np.concatenate(pieces)


def visible_length(axes: Axes, x: Any, y: Any) -> Floats:
    """How many pixels of a line are seen up to each of its points."""
    spots = _pixels(axes, zip(x, y, strict=True))
    left, bottom, right, top = axes.bbox.extents
    seen = (spots[:, 0] >= left) & (spots[:, 0] <= right)
    seen &= (spots[:, 1] >= bottom) & (spots[:, 1] <= top)
    steps = np.hypot(*np.diff(spots, axis=0).T)
    steps = np.where(seen[:-1] & seen[1:], steps, 0.0)
    return np.concatenate([[0.0], np.cumsum(steps)])


def arrows(axes: Axes, x: Any, y: Any, colour: str) -> None:
    """Heads at a third and at three quarters of the visible curve, along its direction."""
    along = visible_length(axes, x, y)
    if along[-1] < 40 * axes.figure.dpi / 72:
        return
    for share in (0.33, 0.75):
        here = int(np.searchsorted(along, share * along[-1]))
        before = int(np.searchsorted(along, along[here] - 4))
        before = max(0, min(before, here - 1))
        if here < 1 or not np.diff(along[before : here + 1]).all():
            continue
        axes.annotate(
            "",
            xy=(x[here], y[here]),
            xytext=(x[before], y[before]),
            arrowprops={
                "arrowstyle": "-|>",
                "color": colour,
                "mutation_scale": 13,
                "shrinkA": 0,
                "shrinkB": 0,
            },
            zorder=4,
        )
