"""Pictures of every kind: they show what was computed, labelled, readable, always the same."""

from __future__ import annotations

from dataclasses import replace
from itertools import combinations
from math import pi

import numpy as np
import pytest

import acsolve
from acsolve.cli import drawing
from acsolve.cli.options import Options
from acsolve.report.entry import Entry, Heading, unit_sign
from acsolve.report.picture_kind import PICTURE_KINDS
from acsolve.report.pictures import drawing_content, drawing_figure
from acsolve.report.plot import Curve, Picture
from acsolve.report.plot_asymptotes import MOST_CORNERS, asymptotes_of, visible
from acsolve.report.plot_plane import course
from acsolve.report.plot_poles import HIDDEN, POLE, ZERO, PoleMap
from acsolve.report.plot_words import telling
from tests.cli.runner import acsolve as run
from tests.cli.runner import circuit as shipped

RESONANT = acsolve.parse("""
title "Buoy lamp filter"
in -- R1 = 50 -- a -- L1 = 10 mH -- out
out -- C1 = 100 nF -- gnd
out -- R2 = 10 kohm -- gnd
""").path("in", "out")
WIDE = acsolve.parse("""
in -- R1 = 1k -- a -- C1 = 1 mF -- gnd
a -- R2 = 1M -- b -- C2 = 10 pF -- gnd
b -- R3 = 1k -- c -- L1 = 1 mH -- d
d -- C3 = 1 nF -- gnd
""").path("in", "d")


def picture(path, kind, band="100 Hz .. 100 kHz", **more) -> Picture:
    """A picture of a path with automatic points."""
    points = more.pop("points", "auto")
    curve = Curve(path.sweep(band, points=points), "curve")
    return Picture(curves=(curve,), kind=kind, unit=unit_sign(path.ask), **more)


def drawn(path, kind):
    """The figure of a kind."""
    if kind == "poles":
        return drawing_figure(PoleMap(roots=path.poles(), title="Poles"))
    return drawing_figure(picture(path, kind, title="Curve", subtitle="of something"))


def main_line(axes):
    """The line that is a curve: the widest of them."""
    return max(axes.get_lines(), key=lambda line: (line.get_linewidth(), len(line.get_xdata())))


def overlaps(figure) -> list[tuple[str, str]]:
    """Pairs of texts inside the axes, and ticks, titles and legends, that cover each other."""
    figure.draw_without_rendering()
    texts = []
    for axes in figure.axes:
        texts += [text for text in axes.texts if text.get_text()]
        for axis in (axes.xaxis, axes.yaxis):
            shown = [tick.label1 for tick in axis.get_major_ticks() if tick.label1.get_visible()]
            inside = axis.get_view_interval()
            texts += [
                label
                for label, at in zip(shown, axis.get_majorticklocs(), strict=False)
                if label.get_text() and min(inside) <= at <= max(inside)
            ]
            texts.append(axis.label)
        texts.append(axes._left_title)
    boxes = [(text.get_text(), text.get_window_extent()) for text in texts if text.get_text()]
    return [
        (first, second)
        for (first, a), (second, b) in combinations(boxes, 2)
        if min(a.x1, b.x1) - max(a.x0, b.x0) > 1.5 and min(a.y1, b.y1) - max(a.y0, b.y0) > 1.5
    ]


def test_delays_are_those_of_the_sweep():
    """Both curves of a picture of delays hold the sweep's own numbers, in seconds."""
    shown = picture(RESONANT, "delay")
    upper, lower = drawing_figure(shown).axes
    sweep = shown.curves[0].sweep
    for axes, name in ((upper, "group_delay_s"), (lower, "phase_delay_s")):
        line = main_line(axes)
        assert line.get_xdata().tolist() == sweep.hertz.tolist()
        assert line.get_ydata().tolist() == getattr(sweep, name).tolist()
    assert (upper.get_ylabel(), lower.get_ylabel()) == ("group delay", "phase delay")
    upper.figure.canvas.draw()
    assert all(label.get_text().endswith("s") for label in upper.get_yticklabels())


def test_a_phase_delay_without_bound_is_told():
    """A high-pass starts at 90°: its phase delay grows beyond any scale, and the picture says so."""
    path = acsolve.parse("in -- C1 = 100 nF -- out\nout -- R1 = 1k -- gnd").path("in", "out")
    upper, lower = drawn(path, "delay").axes
    low, high = lower.get_ylim()
    assert max(-low, high) < 4 * 1e-4
    assert any("grows beyond towards 0 Hz" in text.get_text() for text in upper.texts)
    upper, lower = drawn(RESONANT, "delay").axes
    assert not any("grows" in text.get_text() for text in upper.texts)


def test_nyquist_passes_every_point_of_the_sweep():
    """The curve holds the sweep's values, and what is put between errs by no more than it says."""
    shown = picture(RESONANT, "nyquist")
    line = main_line(drawing_figure(shown).axes[0])
    curve = line.get_xdata() + 1j * line.get_ydata()
    sweep = shown.curves[0].sweep
    near = [np.abs(curve - value).min() / abs(value) for value in sweep.value]
    assert max(near) < 1e-12
    between = course(sweep)
    exact = RESONANT.response(between.hertz)
    most = 10 ** (sweep.placed.gain_db / 20) - 1 + np.radians(sweep.placed.phase_deg)
    assert np.abs(between.value / exact - 1).max() < 1.05 * most
    assert np.abs(np.diff(between.phase_deg)).max() < 1.0 + 1e-9


def test_nyquist_has_one_scale_and_marks_where_frequencies_are():
    """Both axes share their scale; each named dot lies where the response is at that frequency."""
    axes = drawing_figure(picture(RESONANT, "nyquist")).axes[0]
    assert axes.get_aspect() == 1.0
    assert np.ptp(axes.get_xlim()) == pytest.approx(np.ptp(axes.get_ylim()))
    named = {text.get_text(): text.xy for text in axes.texts if text.get_text().endswith("kHz")}
    assert {"1 kHz", "10 kHz"} <= named.keys()
    for text, place in named.items():
        (hertz,) = RESONANT.circuit.frequencies(text.replace(" ", ""))
        exact = RESONANT.response([hertz])[0]
        tolerance = 0.02 * np.ptp(axes.get_xlim())
        assert abs(complex(*place) - exact) < tolerance, text


def test_nyquist_tells_of_responses_without_bound():
    """A pole at 0 Hz is cut off at the edges, and the picture says so; a bounded one is not."""
    path = acsolve.parse("in -- C1 = 1 uF -- gnd").looking_into("in")
    axes = drawing_figure(picture(path, "nyquist", "1 Hz .. 1 MHz")).axes[0]
    assert any("grows without bound" in text.get_text() for text in axes.texts)
    assert max(map(abs, axes.get_ylim())) < 2e4
    axes = drawing_figure(picture(RESONANT, "nyquist")).axes[0]
    assert not any("without bound" in text.get_text() for text in axes.texts)


def test_a_pole_on_the_axis_breaks_the_curve():
    """Past a lossless resonance the phase jumps: no line joins both sides."""
    path = acsolve.parse("in -- L1 = 1 mH -- gnd\nin -- C1 = 1 uF -- gnd").looking_into("in")
    for kind in ("nyquist", "nichols"):
        axes = drawing_figure(picture(path, kind)).axes[0]
        assert np.isnan(main_line(axes).get_ydata()).any()
        assert any("cut off" in text.get_text() for text in axes.texts)


def test_nichols_holds_gain_over_phase_of_every_point():
    """The points of the sweep are on the curve, exactly."""
    shown = picture(RESONANT, "nichols")
    axes = drawing_figure(shown).axes[0]
    line, sweep = main_line(axes), shown.curves[0].sweep
    known = set(zip(line.get_xdata().tolist(), line.get_ydata().tolist(), strict=True))
    assert known >= set(zip(sweep.phase_deg.tolist(), sweep.gain_db.tolist(), strict=True))
    assert (axes.get_xlabel(), axes.get_ylabel()) == ("phase (°)", "gain (dB)")


def test_points_that_were_named_are_joined_as_they_are():
    """A sweep over stated points draws those and nothing between."""
    shown = picture(RESONANT, "nyquist", points=30)
    line = main_line(drawing_figure(shown).axes[0])
    assert len(line.get_xdata()) == 30
    assert np.allclose(line.get_xdata() + 1j * line.get_ydata(), shown.curves[0].sweep.value)


def markers(axes, style):
    """The places where one sort of root is drawn."""
    (line,) = (line for line in axes.get_lines() if line.get_label() == style.name)
    return sorted(zip(line.get_xdata(), line.get_ydata(), strict=True))


@pytest.mark.parametrize("path", [RESONANT, WIDE])
def test_the_map_holds_every_pole(path):
    """Crosses are where the poles are, in rad/s, all of them in sight."""
    found = path.poles()
    axes = drawing_figure(PoleMap(roots=found)).axes[0]
    exact = sorted((root.value.real, root.value.imag) for root in found.poles.roots)
    assert markers(axes, POLE) == exact
    (left, right), (low, high) = axes.get_xlim(), axes.get_ylim()
    assert all(left < x < right and low < y < high for x, y in exact)


def test_multiplicities_zeros_and_hidden_modes():
    """A triple zero says so; zeros are circles; what cancels is a diamond."""
    circuit = acsolve.read(shipped("hum_notch"))
    path = circuit.asked(next(item for item in circuit.questions if item.kind == "transfer"))
    found = path.poles()
    axes = drawing_figure(PoleMap(roots=found)).axes[0]
    exact = sorted((root.value.real, root.value.imag) for root in found.zeros.roots)
    assert markers(axes, ZERO) == exact
    assert len(markers(axes, HIDDEN)) == len(found.hidden.roots) > 0
    band = acsolve.read(shipped("ping_bandpass")).path("phone", "out").poles()
    texts = [text.get_text() for text in drawing_figure(PoleMap(roots=band)).axes[0].texts]
    assert "3×" in texts
    assert "30 kHz, Q 5" in texts


def test_poles_of_very_different_sizes_stay_apart():
    """Where parts of roots span decades the axis is logarithmic beyond a threshold it states."""
    figure = drawing_figure(PoleMap(roots=WIDE.poles(), title="Wide"))
    axes = figure.axes[0]
    assert axes.get_xscale() == "symlog"
    threshold = axes.xaxis.get_transform().linthresh
    parts = [abs(root.value.real) for root in WIDE.poles().poles.roots]
    assert threshold <= min(parts) < 10 * threshold
    assert any("axis linear within ±" in text.get_text() for text in axes.texts)
    figure.canvas.draw()
    spots = axes.transData.transform(markers(axes, POLE))
    gaps = [np.hypot(*(a - b)) for a, b in combinations(spots, 2)]
    assert min(gaps) > 6


def test_a_map_of_what_has_no_place_is_refused(tmp_path):
    """Symbols have no place in the plane; lines have no finite set of poles."""
    symbols = acsolve.parse("in -- R1 -- out -- C1 -- gnd").path("in", "out")
    with pytest.raises(acsolve.AnalysisError, match="C1, R1 have no value"):
        PoleMap(roots=symbols.poles())
    found = run("sweep", shipped("mast_cable"), "--picture", "poles", "--save", tmp_path / "x.svg")
    assert found.status == 1
    assert "equations.not-rational" in found.err
    assert "--picture gain, delay, nyquist or nichols" in found.err


def test_asymptotes_are_what_the_corners_say():
    """Each dashed piece runs at its slope, from the gain that the closed form tends to."""
    found = RESONANT.transfer()
    segments = asymptotes_of(found)
    shown = picture(RESONANT, "gain", asymptotes=segments)
    upper = drawing_figure(shown).axes[0]
    thin = [line for line in upper.get_lines() if line.get_color() == "#555555"]
    pieces = [line for line in thin if line.get_marker() == "None"]
    assert len(pieces) == len(visible(segments, 100, 1e5)) == 2
    for line, item in zip(pieces, segments, strict=True):
        (a, b), (low, high) = line.get_xdata(), line.get_ydata()
        assert high - low == pytest.approx(item.slope_db * np.log10(b / a), abs=1e-9)
    corner = float(pieces[1].get_xdata()[0])
    assert corner == pytest.approx(abs(found.roots.poles[0]) / (2 * pi))
    assert "−40 dB/decade" in [text.get_text() for text in upper.texts]


def test_too_many_corners_are_left_out():
    """Asymptotes of more corners than can be read are not drawn at all."""
    text = "in -- R1 = 1k -- a1 -- C1 = 1 uF -- gnd\n" + "\n".join(
        f"a{k - 1} -- R{k} = 1k -- a{k} -- C{k} = 1 uF -- gnd" for k in range(2, 9)
    )
    found = acsolve.parse(text).path("in", "a8").transfer()
    segments = asymptotes_of(found)
    assert len(segments) > MOST_CORNERS + 1
    assert visible(segments, 1, 1e6) == ()


@pytest.mark.parametrize("ending", ["svg", "png", "pdf"])
@pytest.mark.parametrize("kind", PICTURE_KINDS)
def test_the_same_bytes_on_every_run(kind, ending):
    """A picture of any kind depends on the answer alone."""
    made = PoleMap(roots=RESONANT.poles()) if kind == "poles" else picture(RESONANT, kind)
    if kind == "gain":
        made = replace(made, asymptotes=asymptotes_of(RESONANT.transfer()))
    first = drawing_content(made, ending)
    assert first == drawing_content(made, ending)
    assert b"<dc:date>" not in first


CASES = (
    ("level_float", "transfer"),
    ("strain_antialias", "transfer"),
    ("hum_notch", "transfer"),
    ("clock_crystal", "impedance"),
    ("charger_feed", "transfer"),
    ("ping_bandpass", "transfer"),
    ("siren_wien", "transfer"),
)


@pytest.mark.parametrize("kind", PICTURE_KINDS)
@pytest.mark.parametrize(("name", "asked"), CASES)
@pytest.mark.filterwarnings("error")
def test_pictures_of_shipped_circuits_are_clean(name, asked, kind):
    """Every kind of picture is made without a warning, and no text covers another."""
    circuit = acsolve.read(shipped(name))
    question = next(item for item in circuit.questions if item.kind == asked)
    path = circuit.asked(question)
    entry = Entry(
        kind=asked,
        heading=Heading(title=circuit.title, variant=None, cautions=(), warnings=()),
        ask=path.ask,
        transfer=path.transfer(),
    )
    made = drawing.draw([(path, entry)], Options(files=("x",), picture=kind))
    figure = drawing_figure(made)
    assert overlaps(figure) == []


def test_several_curves_share_a_plane():
    """Three outputs of one filter are told apart without colour and named beside the axes."""
    circuit = acsolve.read(shipped("swell_filter"))
    asks = [item for item in circuit.questions if item.kind == "transfer"]
    curves = tuple(
        Curve(circuit.asked(ask).sweep("10 mHz .. 10 Hz", points="auto"), f"curve {k}")
        for k, ask in enumerate(asks)
    )
    for kind in ("nyquist", "nichols", "delay"):
        figure = drawing_figure(Picture(curves=curves, kind=kind))
        lines = [line for line in figure.axes[0].get_lines() if line.get_linewidth() == 1.7]
        assert len({str(line._unscaled_dash_pattern) for line in lines}) == len(asks)


def test_the_command_line_chooses_the_picture(tmp_path):
    """`--picture` is one of five names, and needs a picture to be saved."""
    level = shipped("level_float")
    sizes = set()
    for kind in PICTURE_KINDS:
        file = tmp_path / f"{kind}.svg"
        assert run("sweep", level, "--picture", kind, "--save", file).status == 0
        sizes.add(file.read_bytes())
    assert len(sizes) == len(PICTURE_KINDS)
    found = run("sweep", level, "--picture", "radar", "--save", tmp_path / "x.svg")
    assert found.status == 2
    assert "gain, delay, poles, nyquist, nichols" in found.err
    found = run("transfer", level, "--picture", "delay")
    assert found.status == 2
    assert "Add --save delay.svg" in found.err


def test_planes_place_their_own_points(tmp_path):
    """Without --points a picture in a plane is swept automatically; stated points stay."""
    level = shipped("level_float")
    for more, told in (((), True), (("--points", "20"), False), (("--at", "1Hz,2Hz"), False)):
        found = run("sweep", level, "--picture", "nyquist", "--save", tmp_path / "x.svg", *more,
                    "--save", tmp_path / "x.json")  # fmt: skip
        assert found.status == 0
        placed = '"placed": null' not in (tmp_path / "x.json").read_text()
        assert placed == told


def test_families_are_drawn_in_every_plane(tmp_path):
    """--over draws a curve for each value; their poles are refused with a remedy."""
    level = shipped("level_float")
    over = ("--over", "R1=10k..100k:3")
    for kind in ("delay", "nyquist", "nichols"):
        file = tmp_path / f"{kind}.png"
        assert run("sweep", level, *over, "--picture", kind, "--save", file).status == 0
    found = run("sweep", level, *over, "--picture", "poles", "--save", tmp_path / "x.png")
    assert found.status == 2
    assert "leave --over out" in found.err


def test_names_have_the_digits_that_tell_them_apart():
    """Four digits, and more only for the two values that need them."""
    texts = telling([1000.0, 32766.9, 32768.2, 32766.9], "Hz")
    assert texts == ("1 kHz", "32.767 kHz", "32.768 kHz", "32.767 kHz")


def test_what_does_not_depend_on_frequency_is_a_point():
    """A divider is one point of the plane, and named as such."""
    path = acsolve.parse("in -- R1 = 1k -- out\nout -- R2 = 1k -- gnd").path("in", "out")
    for kind in ("nyquist", "nichols"):
        texts = [text.get_text() for text in drawn(path, kind).axes[0].texts]
        assert "at every frequency" in texts
        assert not any(text.endswith("Hz") for text in texts)
    (axes,) = drawn(path, "poles").axes
    assert any("neither poles nor zeros" in text.get_text() for text in axes.texts)
