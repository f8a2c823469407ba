"""What people read: plain, narrow, complete enough."""

from __future__ import annotations

import re

import pytest

from acsolve.cli.group import COMMANDS
from acsolve.report.formula import fraction
from tests.cli.runner import CIRCUITS, acsolve, circuit


@pytest.mark.parametrize("command", COMMANDS)
def test_help_is_narrow_and_names_every_option(command):
    """Each command's help fits 80 columns and starts with how it is called."""
    found = acsolve(command, "--help")
    assert found.status == 0
    assert found.out.startswith(f"acsolve {command} FILE [options]\n")
    assert max(map(len, found.out.splitlines())) <= 80
    assert "--json" in found.out


def test_program_help_lists_every_command():
    """Without a command, or with --help, the commands are listed."""
    found = acsolve("--help")
    assert found.status == 0
    assert all(f"\n  {name} " in found.out for name in COMMANDS)
    assert acsolve().out == found.out
    assert max(map(len, found.out.splitlines())) <= 80


def test_version():
    """--version names the program and its version."""
    import acsolve as door

    assert acsolve("--version").out == f"acsolve {door.__version__}\n"


@pytest.mark.parametrize(
    ("command", "name"),
    [
        ("transfer", "level_float"),
        ("transfer", "five_sections"),
        ("transfer", "sill_heat"),
        ("transfer", "swell_filter"),
        ("impedance", "clock_crystal"),
        ("cutoff", "hum_notch"),
        ("cutoff", "strain_antialias"),
        ("sweep", "mast_cable"),
        ("check", "hydrophone_lowpass"),
        ("equations", "strain_bridge"),
        ("equations", "five_sections"),
    ],
)
def test_text_is_plain_and_narrow(command, name):
    """No control codes, no trailing blanks, 80 columns; in a pipe a formula is one line."""
    found = acsolve(command, circuit(name))
    assert found.status == 0, found.err
    for line in found.out.splitlines():
        assert "\x1b" not in line
        assert "\t" not in line
        assert line == line.rstrip()
        one_line = re.match(r"[A-Z]\w*\(s\) = ", line)  # of a formula, for other programs
        assert len(line) <= 80 or one_line


def test_transfer_says_what_a_reader_needs():
    """Title, question, closed form, limits, standard form, poles and the check are there."""
    text = acsolve("transfer", circuit("level_lowpass")).out
    for part in (
        "Level low-pass",
        "voltage ratio from (in, gnd) to (out, gnd)",
        "H(s) = 1/(1 + 0.0214*s + 0.000251878*s^2)",
        "low-pass, second order",
        "10.0282 Hz",
        "Q = 0.74162",
        "independent numeric solution",
    ):
        assert part in text


def test_long_closed_form_is_cut_and_says_so():
    """A closed form beyond 40 terms is shown in part, with the way to the whole of it."""
    text = acsolve("transfer", circuit("five_sections")).out
    assert "… 9 more" in text
    assert "90 terms; --json" in text


def test_long_sweep_is_thinned():
    """A sweep beyond a screen is thinned evenly, and says how many points there are."""
    text = acsolve("sweep", circuit("level_float"), "--points", "500").out
    assert "40 of 500 points" in text
    assert len(text.splitlines()) < 50


def test_cutoff_names_its_closed_form_with_the_files_own_names(tmp_path):
    """Names that other programs cannot read are shown to people as the file has them."""
    file = tmp_path / "copies.circuit"
    file.write_text(
        "block section(a, b)\n  a -- R -- b -- C -- gnd\n  R = 1k\n  C = 1n\nend\n"
        "in -- N1 : section() -- out\nask cutoff from in to out\n"
    )
    assert "w = 1/(N1.R*N1.C)" in acsolve("cutoff", file).out
    (answer,) = acsolve("cutoff", file, "--json").answers
    assert answer["cutoffs"][0]["closed_form"] == "1/(N1_R*N1_C)"
    assert answer["symbols"] == {"N1_R": "N1.R", "N1_C": "N1.C"}


@pytest.mark.parametrize("file", sorted(CIRCUITS.glob("*.circuit")), ids=lambda path: path.stem)
def test_every_demonstration_circuit_answers_its_own_questions(file):
    """No demonstration circuit fails at a question that it asks itself."""
    text = file.read_text()
    for command in ("transfer", "impedance", "cutoff", "sweep"):
        if f"\nask {command}" in text:
            found = acsolve(command, file)
            assert found.status == 0, found.err
    assert acsolve("check", file).status == 0


def test_a_terminal_shows_fractions_with_their_bar():
    """Where the terminal is wide enough; else wrapped, and one line for a pipe."""
    assert fraction("H(s) = ", "R2", "R1 + R2", 80) == [
        "           R2",
        "H(s) = ---------",
        "        R1 + R2",
    ]
    assert fraction("H(s) = ", "R2", "R1 + R2", None) == ["H(s) = R2/(R1 + R2)"]
    assert fraction("H(s) = ", "a + b", "c + d", 13) == [
        "H(s) = (a",
        "       + b)",
        "     / (c",
        "       + d)",
    ]
