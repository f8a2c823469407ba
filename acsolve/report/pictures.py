"""A picture of any kind as the bytes of a file."""

from __future__ import annotations

from typing import TYPE_CHECKING

from acsolve.report.plot import Picture, figure, rendered

if TYPE_CHECKING:
    from matplotlib.figure import Figure

    from acsolve.report.plot_poles import PoleMap


def drawing_content(drawing: Picture | PoleMap, ending: str) -> bytes:
    """What is drawn as the bytes of an svg, png or pdf file, the same on every run."""
    return rendered(lambda: drawing_figure(drawing), ending)


def drawing_figure(drawing: Picture | PoleMap) -> Figure:
    """The figure of its kind."""
    if not isinstance(drawing, Picture):
        from acsolve.report.plot_poles import poles_figure

        return poles_figure(drawing)
    if drawing.kind == "delay":
        from acsolve.report.plot_delay import delay_figure

        return delay_figure(drawing)
    if drawing.kind == "nyquist":
        from acsolve.report.plot_nyquist import nyquist_figure

        return nyquist_figure(drawing)
    if drawing.kind == "nichols":
        from acsolve.report.plot_nichols import nichols_figure

        return nichols_figure(drawing)
    return figure(drawing)
