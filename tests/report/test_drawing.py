"""A drawing says exactly what the circuit says, and nothing in it overlaps."""

from __future__ import annotations

import os
import re
import subprocess
import sys
from itertools import pairwise
from pathlib import Path
from random import Random

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.circuit.kind import KINDS
from acsolve.circuit.netlist import Netlist, Part
from acsolve.report.drawing.drawing import Drawing, draw
from tests.report.drawing_reader import circuit_nets, only, overlaps, read_nets, wrong_dots
from tests.strategies import C, L, R, any_lumped, connected, coupling, islands, network, scattered

FILES = sorted((Path(__file__).parents[2] / "circuits").glob("*.circuit"))
CASES = [(path, None) for path in FILES] + [
    (path, name) for path in FILES for name in acsolve.read(path).variants
]


def check(netlist: Netlist, drawing: Drawing) -> None:
    """Every law that a drawing keeps."""
    sheet = drawing.sheet
    shown = set(drawing.parts)
    assert only(read_nets(sheet), shown) == circuit_nets(netlist, shown)
    assert overlaps(sheet) == []
    assert wrong_dots(sheet) == set()
    assert sorted([*drawing.parts, *drawing.hidden]) == sorted(p.name for p in netlist.parts)
    assert sheet.condensed == bool(drawing.hidden)
    left, top, right, bottom = sheet.box
    for text in sheet.texts:
        assert left <= text.box[0], text
        assert text.box[2] <= right, text
        assert top <= text.box[1], text
        assert text.box[3] <= bottom, text


@pytest.mark.parametrize(("path", "variant"), CASES, ids=lambda item: getattr(item, "stem", item))
def test_shipped_circuits(path, variant):
    """Every shipped circuit and variant is drawn cleanly, and every question's path too."""
    circuit = acsolve.read(path).with_variant(variant)
    check(circuit.netlist, circuit.drawing())
    for question in circuit.questions:
        check(circuit.netlist, circuit.drawing(question.source, question.target))


@given(
    netlist=st.one_of(any_lumped(symbols=True), connected(symbols=True), scattered(), islands()),
    seed=st.integers(0, 1 << 20),
)
@settings(max_examples=200, deadline=None)
def test_random_networks(netlist, seed):
    """Random networks, floating and contradictory ones among them, between any two pairs."""
    random = Random(seed)
    nodes = netlist.nodes()
    pairs = [(random.choice(nodes), random.choice(nodes)) for _ in range(2)]
    source, target = pairs if seed % 3 else (None, None)
    check(netlist, draw(netlist, source, target))


@pytest.mark.parametrize("seed", range(12))
def test_large_random_networks(seed):
    """Networks of 60 parts of any kind between 2 to 20 nodes, all of them drawn."""
    random = Random(seed)
    nodes = ["gnd", *(f"n{k}" for k in range(random.choice([2, 5, 20])))]
    parts = []
    for place in range(60):
        kind = random.choice([*KINDS])
        ends = tuple(random.choice(nodes) for _ in KINDS[kind].terminals)
        parts.append(Part(name=f"X{place}", kind=kind, nodes=ends))
    netlist = Netlist(parts=tuple(parts))
    drawing = draw(netlist, ("n0", "gnd"), ("n1", "gnd"))
    check(netlist, drawing)
    assert not drawing.hidden


LIMITS = {
    "nothing": network(),
    "one part": network(R("R1", "a", "b")),
    "both ends on one node": network(R("R1", "a", "a"), C("C1", "a", "gnd")),
    "both ends on gnd": network(R("R1", "gnd", "gnd")),
    "a loop at gnd": network(R("R1", "gnd", "x"), R("R2", "x", "gnd")),
    "two islands": network(R("R1", "a", "b"), R("R2", "c", "d"), C("C1", "d", "gnd")),
    "parallel": network(*(R(f"R{k}", "a", "b") for k in range(9))),
    "all on gnd": network(Part(name="T1", kind="transformer", nodes=("gnd",) * 4)),
    "tied pairs": network(Part(name="T1", kind="gyrator", nodes=("a", "a", "b", "b"))),
    "crossed pairs": network(Part(name="T1", kind="transformer", nodes=("a", "b", "b", "a"))),
    "follower": network(Part(name="U1", kind="opamp", nodes=("a", "b", "b", "gnd"))),
    "output on gnd": network(Part(name="U1", kind="opamp", nodes=("a", "b", "gnd", "gnd"))),
    "output off gnd": network(Part(name="U1", kind="opamp", nodes=("a", "b", "c", "d"))),
    "coupled": network(
        L("L1", "a", "gnd"), L("L2", "b", "gnd"), couplings=(coupling("L1", "L2", None),)
    ),
    "long names": network(R("R" + "x" * 90, "node_" + "a" * 70, "b")),
}


@pytest.mark.parametrize("name", LIMITS)
def test_limits(name):
    """What is small, loose, shorted or tied together is drawn like everything else."""
    check(LIMITS[name], draw(LIMITS[name]))


@pytest.mark.parametrize("kind", KINDS)
def test_every_kind(kind):
    """A part of any kind alone has a symbol that stays inside its box, all its pins on the edge."""
    from acsolve.report.drawing.svg import arc_point
    from acsolve.report.drawing.symbols import Arc, Sign, primitives

    nodes = tuple(f"n{k}" for k in range(len(KINDS[kind].terminals)))
    netlist = network(Part(name="X1", kind=kind, nodes=nodes))
    drawing = draw(netlist)
    check(netlist, drawing)
    symbol = next(item for item in drawing.sheet.symbols if item.part == "X1")
    left, top, right, bottom = symbol.box
    points = []
    for item in primitives(symbol):
        if isinstance(item, Sign):
            points.append(item.centre)
        elif isinstance(item, Arc):
            points += [arc_point(item, item.start + item.sweep * k / 24) for k in range(25)]
        else:
            points += item.points
    assert all(left - 1e-6 <= x <= right + 1e-6 for x, _ in points)
    assert all(top - 1e-6 <= y <= bottom + 1e-6 for _, y in points)
    assert {pin.terminal for pin in symbol.pins} == {item.name for item in KINDS[kind].terminals}


LADDER = """
    block section(a, b)
        a -- R = 100 ohm -- b
        b -- C = 1 nF -- gnd
    end
    in -- N1 : {count} * section() -- out
    ask transfer from in to out
"""


def test_equal_sections():
    """Two hundred equal sections are the first, dots that say how many, and the last."""
    drawing = acsolve.parse(LADDER.format(count=200)).drawing()
    assert drawing.parts == ("N1[1].R", "N1[200].R", "N1[1].C", "N1[200].C")
    assert len(drawing.hidden) == 396
    assert "198 more alike" in [text.text for text in drawing.sheet.texts]


@pytest.mark.parametrize("count", [2, 7, 8, 9, 40])
def test_sections_of_any_number(count):
    """Rows too short for dots are drawn in full; from eight on there are dots."""
    circuit = acsolve.parse(LADDER.format(count=count))
    drawing = circuit.drawing()
    check(circuit.netlist, drawing)
    assert bool(drawing.hidden) == (count >= 8)


def test_a_changed_section_stays_in_sight():
    """A section that differs is drawn, between the dots before it and those after it."""
    circuit = acsolve.parse(LADDER.format(count=60) + "N1[30].C = 9 nF")
    drawing = circuit.drawing()
    check(circuit.netlist, drawing)
    assert {"N1[30].C", "N1[29].C", "N1[31].C"} <= set(drawing.parts)
    dots = [text.text for text in drawing.sheet.texts if "more" in text.text]
    assert dots == ["27 more alike", "28 more alike"]


def test_blocks():
    """Above 60 symbols each block of the file is a box with the nets that it shares."""
    circuit = acsolve.parse(
        """
        block stage(a, b)
            a -- R1 -- m -- R2 -- p
            p -- C1 -- gnd
            m -- C2 -- b
            U1 : opamp(plus = p, minus = b, out = b)
        end
        in -- S : 14 * stage() -- out
        in -- Rf -- out
        ask transfer from in to out
        """
    )
    drawing = circuit.drawing()
    boxes = [item for item in drawing.sheet.symbols if item.shape == "block"]
    assert drawing.parts == ("Rf",)
    assert [item.part for item in boxes] == ["S[1]", "S[14]"]
    assert all(len(item.pins) == 3 for item in boxes)
    assert overlaps(drawing.sheet) == []


def test_a_mesh_is_boxes():
    """A mesh without blocks is drawn as boxes of neighbouring parts, its nets intact."""
    size = 9
    lines = [f"m{i}_{j} -- R{i}_{j} -- m{i}_{j + 1}" for i in range(size) for j in range(size - 1)]
    lines += [f"m{i}_{j} -- C{i}_{j} -- m{i + 1}_{j}" for i in range(size - 1) for j in range(size)]
    circuit = acsolve.parse("\n".join(lines))
    drawing = circuit.drawing("m0_0", "m8_8")
    assert len(drawing.hidden) == len(circuit.parts)
    assert overlaps(drawing.sheet) == []
    of = {name: item.part for item in drawing.sheet.symbols for name in item.hidden}
    boxes_at: dict[str, set[str]] = {}
    for part in circuit.netlist.parts:
        for node in part.nodes:
            boxes_at.setdefault(node, set()).add(of[part.name])
    shared = {(box, node) for node, boxes in boxes_at.items() if len(boxes) > 1 for box in boxes}
    joined = {terminal for net in read_nets(drawing.sheet) if len(net) > 1 for terminal in net}
    assert joined == shared


def test_the_path_runs_from_left_to_right():
    """Along the signal path each part stands to the right of the one before, in one row."""
    circuit = acsolve.read(FILES[0].parent / "ping_bandpass.circuit")
    symbols = {item.part: item for item in circuit.drawing().sheet.symbols}
    row = [symbols[name] for name in ("R1", "L1", "C1", "L3", "C3")]
    assert all(a.box[2] < b.box[0] for a, b in pairwise(row))
    assert len({pin.at[1] for item in row for pin in item.pins}) == 1
    assert all(symbols[name].box[1] > row[0].box[3] for name in ("L2", "C2", "R2"))


def test_feedback_runs_above():
    """Feedback of an amplifier is drawn above it, its output to the right of its inputs."""
    circuit = acsolve.read(FILES[0].parent / "ping_amplifier.circuit")
    symbols = {item.part: item for item in circuit.drawing().sheet.symbols}
    amplifier = symbols["U1"]
    at = {pin.terminal: pin.at for pin in amplifier.pins}
    assert at["minus"][0] < at["out"][0]
    assert all(symbols[name].box[3] < amplifier.box[1] for name in ("C1", "R3"))


def test_the_picture_is_the_sheet():
    """The wires in the SVG text are those of the sheet, and it says what it shows."""
    drawing = acsolve.read(FILES[0].parent / "swell_filter.circuit").drawing()
    text = drawing.svg()
    first = re.search(r'<path d="([^"]*)"', text)
    assert first is not None
    number = r"(-?[\d.]+)"
    found = re.findall(rf"M{number} {number}L{number} {number}", first[1])
    wires = [(*wire.start, *wire.end) for wire in drawing.sheet.wires]
    assert [tuple(map(float, item)) for item in found] == wires
    assert "<title>Swell filter, state variable</title>" in text
    assert "<desc>Circuit diagram with R1, " in text
    assert "currentColor" in text
    assert "#" not in text, "no colour of its own, so it shows on light and dark"
    assert drawing._repr_svg_() == text


def test_names_are_escaped():
    """A title with signs that XML uses for itself is text."""
    import xml.etree.ElementTree as ET

    drawing = acsolve.parse('title "a < b & c"\nin -- R1 -- out').drawing()
    root = ET.fromstring(drawing.svg())  # noqa: S314 - our own text
    assert root[0].text == "a < b & c"


def test_same_circuit_same_bytes():
    """Processes with different seeds of Python's hashes draw the same bytes, boxes too."""
    code = (
        "import acsolve, sys, hashlib\n"
        "mesh = ''.join(f'm{i}_{j} -- R{i}_{j} -- m{i}_{j+1}\\nm{i}_{j} -- C{i}_{j} -- m{i+1}_{j}\\n'"
        " for i in range(8) for j in range(8))\n"
        "texts = [acsolve.read(name).drawing().svg() for name in sys.argv[1:]]\n"
        "texts.append(acsolve.parse(mesh).drawing().svg())\n"
        "print(hashlib.sha256(''.join(texts).encode()).hexdigest())\n"
    )
    seen = {
        subprocess.run(  # noqa: S603 - our own interpreter and text
            [sys.executable, "-c", code, *map(str, FILES)],
            capture_output=True,
            text=True,
            check=True,
            env={**os.environ, "PYTHONHASHSEED": seed},
        ).stdout
        for seed in ("1", "2")
    }
    assert len(seen) == 1


def test_pictures(tmp_path):
    """PNG and PDF are written whole, the same on every run; other endings are refused."""
    drawing = acsolve.read(FILES[0].parent / "horn_preamp.circuit").drawing()
    assert drawing.content("png") == drawing.content("png")
    assert drawing.content("png").startswith(b"\x89PNG")
    assert drawing.content("pdf").startswith(b"%PDF")
    drawing.save(tmp_path / "horn.svg")
    assert (tmp_path / "horn.svg").read_text(encoding="utf-8") == drawing.svg()
    with pytest.raises(acsolve.AnalysisError) as caught:
        drawing.save(tmp_path / "horn.bmp")
    assert caught.value.code == "save.ending"


def test_texts_leave_room():
    """Every sign is at least as wide in the table as in the typeface that pictures use."""
    from pathlib import Path as FilePath

    import matplotlib as mpl
    from matplotlib.ft2font import FT2Font

    from acsolve.report.drawing.label import width

    font = FT2Font(str(FilePath(mpl.get_data_path()) / "fonts/ttf/DejaVuSans.ttf"))
    font.set_size(100, 72)
    for sign in [chr(code) for code in range(32, 127)] + list("Ωµ°±×…·−∞√²³"):
        real = font.load_char(ord(sign)).linearHoriAdvance / 65536 / 100
        assert width(sign, 1.0) >= real, sign
