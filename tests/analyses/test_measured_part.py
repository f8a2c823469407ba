"""Measured two-ports as parts: against the network they were taken from, bands, files."""

from __future__ import annotations

import numpy as np
import pytest

import acsolve
from acsolve import AcsolveError, PortData, touchstone_text
from acsolve.circuit.expression import PortElement

INNER = "in -- R1 = 30 ohm -- m -- L1 = 80 nH -- out\nm -- C1 = 15 pF -- gnd\n"
AROUND = "src -- Rs = 75 ohm -- in\nout -- RL = 120 ohm -- gnd\nout -- C9 = 3 pF -- in\n"
MEASURED = 'in -- X1 : measured(file = "inner.s2p") -- out\n'
GRID = np.linspace(1e6, 400e6, 1601)


def inner_data(reference=(50, 75), grid=GRID) -> PortData:
    """The inner network's own parameters."""
    return acsolve.parse(INNER).two_port("in", "out", reference=reference).data(grid)


def bound(text=MEASURED + AROUND, data=None):
    """A circuit whose measured part has its numbers."""
    return acsolve.parse(text).with_data(X1=data or inner_data())


def test_it_stands_for_its_network():
    """At the measured frequencies the circuit answers as with the network itself."""
    whole = acsolve.parse(INNER + AROUND)
    for pair in (("src", "out"), ("src", "in")):
        expected = whole.path(*pair).response(GRID[::40])
        found = bound().path(*pair).response(GRID[::40])
        np.testing.assert_allclose(found, expected, rtol=1e-10)
    into = whole.looking_into("src").response(GRID[::40])
    np.testing.assert_allclose(bound().looking_into("src").response(GRID[::40]), into, rtol=1e-10)


@pytest.mark.parametrize("name", ["z", "y", "h", "g", "abcd"])
def test_any_set_serves(name):
    """The set in which the data come, and their references, do not matter."""
    data = inner_data().to(name)
    found = bound(data=data).path("src", "out").response(GRID[::100])
    expected = acsolve.parse(INNER + AROUND).path("src", "out").response(GRID[::100])
    np.testing.assert_allclose(found, expected, rtol=1e-9)


def test_between_points_it_is_straight_and_passive():
    """Off the grid the error falls with the square of the step; |S| stays within one."""
    off = GRID[5:-5:40] + 0.37 * (GRID[1] - GRID[0])
    expected = acsolve.parse(INNER + AROUND).path("src", "out").response(off)
    errors = []
    for every in (8, 4, 2):
        data = inner_data(grid=GRID[::every])
        errors.append(abs(bound(data=data).path("src", "out").response(off) - expected).max())
    assert errors[0] / errors[2] > 8
    assert errors[2] < 1e-5
    coarse = inner_data(reference=50, grid=GRID[::200])
    s = bound(MEASURED, coarse).two_port("in", "out", reference=50).sweep(off).matrices["s"]
    assert np.linalg.norm(s, 2, axis=(1, 2)).max() < 1


def test_group_delay_is_the_slope_between_points():
    """Delay comes from the straight line's own slope."""
    swept = bound().path("src", "out").sweep(GRID[10:-10:50] + 1e3)
    expected = acsolve.parse(INNER + AROUND).path("src", "out").sweep(GRID[10:-10:50] + 1e3)
    np.testing.assert_allclose(swept.group_delay_s, expected.group_delay_s, rtol=2e-2)
    assert not swept.settled


def test_nodes_may_coincide():
    """Both ports at one node, or one of them shorted, are circuits as any other."""
    whole = acsolve.parse(INNER.replace("out", "in") + "src -- Rs = 75 ohm -- in")
    text = 'X1 : measured(near = in, far = in, file = "x.s2p")\nsrc -- Rs = 75 ohm -- in'
    found = bound(text).path("src", "in").response(GRID[::100])
    np.testing.assert_allclose(found, whole.path("src", "in").response(GRID[::100]), rtol=1e-9)
    short = 'X1 : measured(near = in, far = gnd, file = "x.s2p")\nsrc -- Rs = 75 ohm -- in'
    network = acsolve.parse(INNER.replace("out", "gnd") + "src -- Rs = 75 ohm -- in")
    np.testing.assert_allclose(
        bound(short).path("src", "in").response(GRID[::100]),
        network.path("src", "in").response(GRID[::100]),
        rtol=1e-9,
    )


def test_a_floating_reference():
    """Its reference terminal may stand off the ground."""
    text = INNER.replace("gnd", "low") + AROUND + "low -- R9 = 20 ohm -- gnd\n"
    measured = 'X1 : measured(near = in, far = out, ref = low, file = "x.s2p")\n'
    circuit = bound(measured + AROUND + "low -- R9 = 20 ohm -- gnd\n")
    expected = acsolve.parse(text).path("src", "out").response(GRID[::100])
    np.testing.assert_allclose(
        circuit.path("src", "out").response(GRID[::100]), expected, rtol=1e-9
    )


def test_nothing_is_extrapolated():
    """Outside the measured band every question is refused, with the part named."""
    path = bound().path("src", "out")
    for ask in (
        lambda: path.response([1e5]),
        lambda: path.sweep("1 kHz .. 10 MHz"),
        lambda: path.sweep("100 MHz .. 1 GHz", points="auto"),
        lambda: bound().two_port("in", "out", reference=50).sweep([1e9]),
    ):
        with pytest.raises(AcsolveError, match="X1 is measured from 1e") as caught:
            ask()
        assert caught.value.code == "sweep.band"


def test_what_needs_a_formula_is_refused():
    """Closed forms, poles, cutoffs, time: an error with a remedy, never a traceback."""
    circuit = bound()
    path = circuit.path("src", "out")
    for ask in (
        path.closed_form,
        path.nested_form,
        path.transfer,
        path.cutoffs,
        path.step,
        lambda: path.cutoffs(band="2 MHz .. 300 MHz"),
        lambda: path.response([1e7], values={"Rs": [50.0, 75.0]}),
        lambda: path.verify(path.sweep([1e7])),
        lambda: path.simplify("2 MHz .. 3 MHz"),
        lambda: path.assume("Rs >> RL"),
        lambda: circuit.two_port("in", "out").z,
        lambda: circuit.equivalent("out", source="src"),
    ):
        with pytest.raises(AcsolveError) as caught:
            ask()
        assert caught.value.code == "equations.not-rational"
        assert caught.value.hint
    assert circuit.check().ok
    shown = circuit.equations("src")
    size = range(shown.size)
    entries = [shown.entry(row, column) for row in size for column in size]
    assert PortElement("X1", "s21") in entries


def test_files_lie_beside_the_circuit(tmp_path):
    """The file is found from the circuit's own place, and read when it is needed."""
    folder = tmp_path / "canal"
    (folder / "data").mkdir(parents=True)
    text = (MEASURED + AROUND).replace("inner.s2p", "data/inner.s2p")
    (folder / "feeder.circuit").write_text(text, encoding="utf-8")
    circuit = acsolve.read(folder / "feeder.circuit")
    with pytest.raises(AcsolveError) as caught:
        circuit.path("src", "out").response([1e7])
    assert caught.value.code == "file.missing"
    (folder / "data" / "inner.s2p").write_text(touchstone_text(inner_data(50)), encoding="utf-8")
    expected = bound().path("src", "out").response([1e7])
    np.testing.assert_allclose(circuit.path("src", "out").response([1e7]), expected, rtol=1e-9)
    parsed = acsolve.parse(text, folder=folder)
    np.testing.assert_allclose(parsed.path("src", "out").response([1e7]), expected, rtol=1e-9)


@pytest.mark.parametrize("name", ["../secret.s2p", "/etc/hosts.s2p", "a/../../secret.s2p"])
def test_files_elsewhere_are_refused(tmp_path, name):
    """A circuit names no file outside its folder, and a text without a folder none at all."""
    (tmp_path / "inner").mkdir()
    (tmp_path / "secret.s2p").write_text("# Hz S RI R 50\n", encoding="utf-8")
    text = f'in -- X1 : measured(file = "{name}") -- out\n{AROUND}'
    for folder in (tmp_path / "inner", None):
        with pytest.raises(AcsolveError) as caught:
            acsolve.parse(text, folder=folder).path("src", "out").response([1e7])
        assert caught.value.code == "ports.file"


def test_data_that_do_not_fit(tmp_path):
    """Only two-ports can be such a part; other parts and other things are refused."""
    (tmp_path / "inner.s2p").write_text(
        touchstone_text(PortData([1e6], np.zeros((1, 1, 1)), "s", [50])), encoding="utf-8"
    )
    one = PortData([1e6], np.zeros((1, 1, 1)), "s", [50])
    for given, code in (({"X1": one}, "ports.size"), ({"Rs": one}, "question.unknown-name")):
        with pytest.raises(AcsolveError) as caught:
            acsolve.parse(MEASURED + AROUND).with_data(given).path("src", "out").response([1e6])
        assert caught.value.code == code
    with pytest.raises(AcsolveError) as caught:
        acsolve.parse(MEASURED + AROUND).with_data(X1=5)
    assert caught.value.code == "option.value"


@pytest.mark.parametrize(
    ("text", "code"),
    [
        ("a -- X1 : measured -- b", "kind.argument"),
        ("a -- X1 : measured(file = 5) -- b", "kind.argument"),
        ('a -- X1 : measured(file = "") -- b', "kind.argument"),
        ('a -- X1 : measured(file = "x", file = "y") -- b', "value.twice"),
        ('X1 : measured(near = "a", far = b, file = "x")', "terminal.node"),
        ('a -- X1 : resistor(value = "x") -- b', "name.not-a-value"),
        ('a -- X1 : measured(file = "x.s2p", fiel = 3) -- b', "kind.argument"),
    ],
)
def test_texts_in_the_wrong_place(text, code):
    """A text stands where an attribute takes one, and nowhere else."""
    with pytest.raises(AcsolveError) as caught:
        acsolve.parse(f"{text}\na -- R1 = 1 ohm -- gnd\nb -- R2 = 1 ohm -- gnd")
    assert caught.value.code == code


def test_it_is_written_as_it_is_read():
    """Text, netlist, text, netlist: the same part with the same file."""
    from acsolve.text import parse, write

    netlist = parse('in -- X1 : measured(file = "a \\"b\\".s2p") -- out\nout -- R1 -- gnd').netlist
    assert netlist.part("X1").file == 'a "b".s2p'
    assert parse(write(netlist)).netlist.part("X1") == netlist.part("X1")
