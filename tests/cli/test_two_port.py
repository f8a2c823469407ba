"""`acsolve two-port`: JSON keys, text, files, and how it fails."""

from __future__ import annotations

import numpy as np
import pytest
import sympy

import acsolve as library
from tests.cli.runner import acsolve

PAD = """title "Lock-side pad"
in -- R1 -- mid -- R2 -- out
mid -- R3 -- gnd
R1, R2 = 16.61 ohm
R3 = 66.93 ohm
in -- C1 = 10 pF -- gnd
ask two-port from in to out reference 50 ohm over 1 MHz .. 1 GHz
"""
SETS = ("z", "y", "h", "g", "abcd", "s")


@pytest.fixture
def pad(tmp_path):
    """The pad as a file."""
    path = tmp_path / "pad.circuit"
    path.write_text(PAD, encoding="utf-8")
    return path


def test_json_of_the_file_s_own_question(pad):
    """Closed forms SymPy reads, laws, and numbers that are their values."""
    (found,) = acsolve("two-port", pad, "--points", 5, "--json").answers
    assert (found["kind"], found["from"], found["to"]) == (
        "two-port",
        ["in", "gnd"],
        ["out", "gnd"],
    )
    assert found["title"] == "Lock-side pad"
    assert found["reference_ohm"] == [50, 50]
    laws = {name: found[name] for name in ("reciprocal", "symmetric", "lossless", "passive")}
    assert laws == {"reciprocal": True, "symmetric": False, "lossless": False, "passive": True}
    assert found["port_condition"] == "shared node"
    assert found["checked"]["max_relative_error"] == 0
    s = sympy.Symbol("s")
    hertz = found["sweep"]["hertz"]
    for name in SETS:
        numbers = found["sweep"]["parameters"][name]
        for i, row in enumerate(found[name]):
            for j, text in enumerate(row):
                value = complex(sympy.sympify(text).subs(s, 2j * sympy.pi * hertz[2]).evalf())
                solved = complex(numbers["real"][i][j][2], numbers["imag"][i][j][2])
                assert abs(solved - value) < 1e-9 * abs(value)
    between = found["sweep"]["insertion"]
    assert (between["source_ohm"], between["load_ohm"]) == (50, 50)
    s21 = found["sweep"]["parameters"]["s"]
    size = np.hypot(s21["real"][1][0], s21["imag"][1][0])
    np.testing.assert_allclose(between["insertion_loss_db"], -20 * np.log10(size))


def test_symbols_and_sets_that_do_not_exist(tmp_path):
    """Null where a set does not exist, and where there is no reference or band."""
    path = tmp_path / "one.circuit"
    path.write_text("a -- N1 : 1 * cell -- b\nblock cell(x, y)\nx -- R -- y\nend\n", "utf-8")
    (found,) = acsolve("two-port", path, "--from", "a", "--to", "b", "--json").answers
    assert found["z"] is None
    assert found["s"] is None
    assert found["sweep"] is None
    assert found["reference_ohm"] is None
    (safe,) = found["symbols"]
    assert found["symbols"][safe] == "N1.R"
    assert found["abcd"] == [["1", safe], ["0", "1"]]


def test_references_of_the_command_line(pad):
    """The option wins over the ask line; two are one for each port."""
    (found,) = acsolve("two-port", pad, "--at", "1MHz", "--reference", "50ohm,75", "--json").answers
    assert found["reference_ohm"] == [50, 75]
    assert found["sweep"]["insertion"]["load_ohm"] == 75


def test_text_is_plain_and_narrow(pad):
    """The screen shows every set, the laws and a table."""
    found = acsolve("two-port", pad, "--points", 60)
    assert found.status == 0
    assert max(map(len, found.out.splitlines())) <= 80
    for word in ("z11", "y12", "h21", "g22", "A = ", "s22", "reciprocal  yes", "insertion"):
        assert word in found.out
    floating = acsolve("two-port", pad, "--from", "in,mid", "--to", "out")
    assert "where each pair's current returns at its second node" in " ".join(floating.out.split())


def test_files_that_are_saved_serve_as_parts(pad, tmp_path):
    """An s2p file holds the s parameters exactly, and stands for the network elsewhere."""
    target = tmp_path / "pad.s2p"
    found = acsolve("two-port", pad, "--points", 201, "--save", target)
    assert found.status == 0
    data = library.read_touchstone(target)
    expected = library.read(pad).two_port("in", "out", reference=50).data(data.hertz)
    assert (data.matrix == expected.matrix).all()
    outer = tmp_path / "outer.circuit"
    outer.write_text(
        'a -- X1 : measured(file = "pad.s2p") -- b\nb -- R1 = 50 ohm -- gnd\n', "utf-8"
    )
    options = ("--from", "a", "--to", "b", "--at", "1MHz,1GHz", "--json")
    (swept,) = acsolve("sweep", outer, *options).answers
    direct = library.parse(PAD + "out -- RL = 50 ohm -- gnd").path("in", "out")
    value = np.array(swept["real"]) + 1j * np.array(swept["imag"])
    np.testing.assert_allclose(value, direct.response([1e6, 1e9]), rtol=1e-9)
    again = acsolve("two-port", outer, *options[:-1], "--reference", "50")
    assert "no closed form" in again.out
    (ports,) = acsolve("two-port", outer, *options).answers
    assert ports["z"] is None
    assert ports["remarks"]
    assert ports["reciprocal"] is None


@pytest.mark.parametrize(
    ("options", "status", "code"),
    [
        (("--from", "in", "--to", "in"), 2, "question.same-node"),
        (("--from", "in", "--to", "out", "--save", "x.s2p"), 2, "option.value"),
        (("--from", "in", "--to", "out", "--at", "1MHz", "--save", "x.s2p"), 2, "ports.reference"),
        (("--save", "x.csv"), 2, "save.ending"),
        (("--reference", "0"), 2, "value.positive"),
        (("--from", "in", "--to", "out", "--points", "5"), 2, "option.value"),
        (("--budget", "3"), 0, None),
        (("--from", "in", "--to", "out", "--symbolic", "--budget", "3"), 1, "equations.budget"),
    ],
)
def test_failures(pad, tmp_path, monkeypatch, options, status, code):
    """What is wrong with the call ends with 2, what has no answer with 1; nothing is written."""
    monkeypatch.chdir(tmp_path)
    found = acsolve("two-port", pad, *options, "--json")
    assert found.status == status
    if code is not None:
        assert found.document["errors"][0]["code"] == code
    assert not (tmp_path / "x.s2p").exists()


def test_a_question_without_a_first_pair(tmp_path):
    """A two-port has two pairs: own sources do not make one."""
    path = tmp_path / "own.circuit"
    path.write_text(
        "V1 : voltage_source = 1 V\ngnd -- V1 -- a\na -- R1 -- b\nb -- R2 -- gnd\nask two-port to b\n",
        encoding="utf-8",
    )
    found = acsolve("two-port", path, "--json")
    assert (found.status, found.document["errors"][0]["code"]) == (2, "question.no-pair")


def test_check_no_longer_calls_it_unanswered(pad):
    """The question has its command."""
    (found,) = acsolve("check", pad, "--json").answers
    assert not [item for item in found["problems"] if item["code"] == "question.unanswered"]
