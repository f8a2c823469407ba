"""Pictures: the same on every run, labelled with units, told apart without colour."""

from __future__ import annotations

import acsolve
from acsolve.report.plot import LARGEST, Curve, Picture, figure, picture_content

TEXT = """
in -- R1 = 1k -- out
out -- C1 = 100n -- gnd
"""
CIRCUIT = acsolve.parse(TEXT)
SWEEP = CIRCUIT.path("in", "out").sweep("10 Hz .. 100 kHz")
IMPEDANCE = CIRCUIT.looking_into("in").sweep("10 Hz .. 100 kHz")


def ratio(**more) -> Picture:
    """A picture of one voltage ratio."""
    return Picture(curves=(Curve(SWEEP, "to out", (1591.55,)),), title="Smoothing", **more)


def test_pictures_are_the_same_on_every_run():
    """No date, no random name: the bytes of a picture depend on the answer alone."""
    for ending in ("svg", "png", "pdf"):
        assert picture_content(ratio(), ending) == picture_content(ratio(), ending)
    assert b"<dc:date>" not in picture_content(ratio(), "svg")


def test_axes_say_what_they_show():
    """Magnitude over phase, one frequency axis, a unit on every axis."""
    drawn = figure(ratio())
    upper, lower = drawn.axes
    assert upper.get_ylabel() == "gain (dB)"
    assert lower.get_ylabel() == "phase (°)"
    assert lower.get_xlabel() == "frequency"
    drawn.canvas.draw()
    labels = [item.get_text() for item in lower.get_xticklabels()]
    assert labels == ["10 Hz", "100 Hz", "1 kHz", "10 kHz", "100 kHz"]
    assert upper.get_title(loc="left") == "Smoothing"


def test_magnitudes_with_a_unit_show_it():
    """An impedance is drawn in ohms on a logarithmic axis."""
    drawn = figure(Picture(curves=(Curve(IMPEDANCE, "into in"),), unit="ohm"))
    drawn.canvas.draw()
    upper = drawn.axes[0]
    assert upper.get_yscale() == "log"
    assert all(item.get_text().endswith("Ω") for item in upper.get_yticklabels())


def test_linear_axis():
    """With even steps the frequency axis is linear and may start at 0 Hz."""
    sweep = CIRCUIT.path("in", "out").sweep("0 Hz .. 10 kHz", linear=True, points=50)
    drawn = figure(Picture(curves=(Curve(sweep, "to out"),), linear=True))
    assert drawn.axes[1].get_xscale() == "linear"
    assert drawn.axes[1].get_xlim() == (0, 1e4)


def test_curves_differ_without_colour():
    """Every curve has a dash pattern of its own, and a legend names it."""
    curves = tuple(Curve(SWEEP, f"curve {k}") for k in range(LARGEST))
    upper = figure(Picture(curves=curves)).axes[0]
    patterns = {str(line._unscaled_dash_pattern) for line in upper.get_lines()}
    assert len(patterns) == LARGEST
    assert [item.get_text() for item in upper.get_legend().get_texts()] == [
        f"curve {k}" for k in range(LARGEST)
    ]


def test_marks_are_dots_on_the_curve():
    """A marked cutoff lies on the curve at its level."""
    upper = figure(ratio(level_db=-3.0103)).axes[0]
    dots = [line for line in upper.get_lines() if line.get_marker() == "o"]
    (dot,) = dots
    assert abs(dot.get_ydata()[0] + 3.0103) < 0.01


def test_gaps_do_not_stop_a_picture():
    """Points without a finite gain are left out of the curve."""
    circuit = acsolve.parse("in -- C1 = 1n -- out\nout -- R1 = 1k -- gnd\n")
    sweep = circuit.path("in", "out").sweep("0 Hz .. 1 MHz", linear=True, points=20)
    assert picture_content(Picture(curves=(Curve(sweep, "out"),), linear=True), "svg")


def test_text_from_a_file_is_not_read_as_formulas():
    """Dollar signs in a title are shown as they are, whatever stands between them."""
    picture = Picture(curves=(Curve(SWEEP, "a$b"),), title="costs $5 or $\\x$", subtitle="$\\y$")
    assert picture_content(picture, "svg")
