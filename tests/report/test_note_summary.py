"""What a reader looks for first: every question answered, in a table in front of the note."""

from __future__ import annotations

import json

import pytest

import acsolve
from acsolve.report.note.model import Math, Picture, Remark, Table
from acsolve.report.note.places import telling
from acsolve.report.note.wording import quantity
from tests.report.note_reader import NAMES, Page, note

RC = "in -- R1 = 1 kohm -- out -- C1 = 1 uF -- gnd\n"


def made(text):
    """The note of a text."""
    return acsolve.parse(text).note()


def answers(document, kind):
    """The answers of a kind in a note's JSON."""
    return [item for item in json.loads(document.json())["answers"] if item["kind"] == kind]


def words(cell):
    """A cell as text."""
    return "".join("…" if isinstance(item, Math) else item for item in cell)


def table(document, title="Key results"):
    """The rows of the first table in a section, as text."""
    section = next(item for item in document.document.sections if item.title == title)
    found = next(block for block in section.blocks if isinstance(block, Table))
    return [tuple(map(words, row)) for row in found.rows]


@pytest.mark.parametrize("name", NAMES)
def test_cutoffs_and_figures_stand_in_front(name):
    """Cutoffs, rise and settling of the JSON are in the table, as everywhere else spelled."""
    rows = table(note(name))
    text = " ".join(value for _, _, value in rows)
    for answer in answers(note(name), "cutoff"):
        for item in answer["cutoffs"][:6]:
            if item["hertz"] is not None:
                told = [quantity(item["hertz"], "Hz", digits) for digits in range(5, 13)]
                assert any(found in text for found in told)
    for answer in answers(note(name), "step"):
        for key in ("rise_s", "settling_s"):
            if answer[key] is not None:
                assert quantity(answer[key], "s") in text
    asked = [question for question, _, _ in rows if question]
    assert len(asked) >= len(note(name).facts.chapters)


def test_every_level_asked_is_answered():
    """Levels of all lines about one pair, each once, in the order of the file."""
    found = made(
        RC + "ask cutoff from in to out\nask cutoff from in to out at -1 dB, -40 dB\n"
        "ask cutoff from in to out at -20 dB, -1 dB\n"
    )
    levels = [round(item["level_db"]) for item in answers(found, "cutoff")]
    assert levels == [-3, -1, -40, -20]


def test_every_band_and_duration_is_shown():
    """Two bands are two pictures and all their ends rows of the table; two durations likewise."""
    found = made(
        RC + "ask sweep from in to out over 1 Hz .. 10 Hz\nask step from in to out for 1 ms\n"
        "ask sweep from in to out over 100 kHz .. 1 MHz\nask step from in to out for 50 ms\n"
    )
    (chapter,) = found.facts.chapters
    assert [(c.hertz.min(), c.hertz.max()) for c in chapter.curves] == [(1, 10), (1e5, 1e6)]
    (swept,) = answers(found, "sweep")
    assert {1.0, 10.0, 1e5, 1e6} <= set(swept["hertz"])
    assert [item.seconds[-1] for item in chapter.in_time] == [1e-3, 50e-3]
    sections = {item.title: item for item in found.document.sections}
    for title in ("Response over frequency", "Step response"):
        assert sum(isinstance(block, Picture) for block in sections[title].blocks) == 2


def test_two_references_of_a_two_port_are_two_answers():
    """Two lines that differ in their reference are two chapters."""
    line = "ask two-port from in to out reference {} ohm\n"
    found = made(RC + line.format(50) + line.format(600))
    assert len(found.facts.chapters) == 2
    assert len(answers(found, "two-port")) == 2


BANDPASS = """
src -- R1 = 15 kohm -- x
x -- R2 = 820 ohm -- gnd
x -- C1 = 33 nF -- out
x -- C2 = 33 nF -- inv
inv -- R3 = 33 kohm -- out
A1 : opamp(plus = gnd, minus = inv, out = out, gain_bandwidth = 1 MHz, output_resistance = 75 ohm)
ask cutoff from src to out
"""


def test_a_reference_that_misses_the_pass_band_is_not_the_only_one():
    """Feed-through at infinity, 47 dB below the peak: half power counts from the peak, too."""
    first, second = answers(made(BANDPASS), "cutoff")
    assert (first["reference"]["at"], second["reference"]["at"]) == ("infinity", "peak")
    low, high = (item["hertz"] for item in second["cutoffs"])
    assert 800 < low < 950 < high < 1200
    rows = table(made(BANDPASS))
    places = [figure for _, figure, _ in rows if figure.startswith("Half power")]
    assert places == ["Half power, from the peak", "Half power, from infinity"]


def test_a_stray_capacitance_makes_no_cutoff_alone():
    """1 pF around 1 Mohm and 1 kohm: counted from the level part, the cutoff is the coupling's."""
    found = made(
        "in -- C1 = 100 nF -- a -- R1 = 10 kohm -- gnd\na -- R2 = 1 Mohm -- out\n"
        "out -- R3 = 1 kohm -- gnd\nin -- Cp = 1 pF -- out\nask cutoff from in to out\n"
    )
    first, second = answers(found, "cutoff")
    assert first["reference"]["gain"] == 1
    assert abs(second["cutoffs"][0]["hertz"] - 159.15) < 3


@pytest.mark.parametrize("text", [RC, "in -- C1 = 1 uF -- out -- R1 = 1 kohm -- gnd\n"])
def test_elsewhere_the_rule_is_enough(text):
    """A plain low-pass and high-pass have one reference."""
    assert len(answers(made(text + "ask cutoff from in to out"), "cutoff")) == 1


def test_a_question_without_an_answer_is_a_problem():
    """It is told in the table, at its chapter, and by the note itself; elsewhere there is none."""
    found = made("in -- R1 = 1k -- m\nA1 : opamp(plus = gnd, minus = m, out = out)\n"
                 "out -- R2 = 1k -- gnd\nask transfer from in to out\n")  # fmt: skip
    assert [item.code for item in found.problems] == ["equations.undriven"]
    assert ("No answer", found.problems[0].message) in [row[1:] for row in table(found)]
    remarks = [
        words(block.words)
        for section in found.document.sections
        for block in section.blocks
        if isinstance(block, Remark)
    ]
    assert f"No answer: {found.problems[0].message}." in remarks
    assert made("R1 = 1 kohm\nC1 = 1 uF\n" + "in -- R1 -- out -- C1 -- gnd").problems == ()
    unswept = made("in -- R1 -- out -- C1 -- gnd\nask sweep from in to out over 1 Hz .. 1 kHz")
    assert [item.code for item in unswept.problems] == ["question.no-value"]


def test_frequencies_that_tell():
    """Band edges, cutoffs' peaks and decades come before corners; cutoffs also beside a band."""

    class Curve:
        def __init__(self, hertz, gain_db):
            import numpy as np

            self.hertz, self.gain_db = np.array(hertz), np.array(gain_db)

    curve = Curve([50.0, 7e3, 3e7], [0.0, 10.0, -40.0])
    roots = [complex(-2 * 3.14159 * 10.0 ** (0.1 * k)) for k in range(20, 70)]
    found = telling(roots, [], [curve], [(50.0, 3e7)])
    assert {50.0, 3e7, 7e3, 100.0, 1e3, 1e4, 1e5, 1e6, 1e7} <= set(found)
    assert found == sorted(found)
    assert len(found) <= 16
    assert 12.0 in telling([], [], [curve], [(50.0, 3e7)], also=[12.0])


def test_the_table_of_an_impedance_has_no_group_delay():
    """Of one pair nothing travels."""
    for kind, wanted in (("impedance into in", 3), ("transfer from in to out", 4)):
        assert len(table(made(f"{RC}ask {kind}\n"), "Numbers")[0]) == wanted


def test_a_null_is_zero_without_a_phase():
    """A trap's own frequency: gain zero, output impedance zero, in JSON null and 0."""
    found = made(
        "in -- R1 = 1 kohm -- out\nout -- L1 = 10 mH -- m -- C1 = 1 uF -- gnd\n"
        "ask transfer from in to out\n"
    )
    row = next(row for row in table(found, "Numbers") if row[0].startswith("1.592"))
    assert row[1:] == ("zero", "–", "–")
    (swept,) = answers(found, "sweep")
    place = swept["gain_db"].index(None)
    assert swept["real"][place] == swept["imag"][place] == 0
    (loading,) = json.loads(found.json())["note"]["loading"]
    assert loading["z_out"][place] == [0, 0]
    assert ("Null", "at 1.592\u00a0kHz") in [row[1:] for row in table(found)]


def test_symbols_have_a_condition_for_each_case():
    """Three formulas of a second-order step come with three conditions."""
    text = Page(
        made("in -- R1 -- a -- L1 -- out -- C1 -- gnd\nask step from in to out").html()
    ).text
    assert text.count("For t > 0, where") == 3
    assert "For t > 0:" not in text


def test_a_damped_step_tells_its_names():
    """The values of a and w_r are those of the poles: a ± w_r."""
    found = made(
        "in -- R1 = 1 kohm -- a -- R2 = 10 kohm -- out\na -- C1 = 470 nF -- gnd\n"
        "out -- C2 = 47 nF -- gnd\nask step from in to out"
    )
    text = Page(found.html()).text.replace("\u00a0", " ")
    poles = sorted(-root.value.real for root in found.facts.chapters[0].poles.poles.roots)
    assert f"= {(poles[0] + poles[1]) / 2:.4g} 1/s" in text
    assert f"= {(poles[1] - poles[0]) / 2:.4g} rad/s" in text


def test_a_response_that_returns_tells_its_largest_value():
    """RC high-pass behind a low-pass, equal time constants: t·exp(-t) has its peak 1/e at 1."""
    found = made(
        "in -- R1 = 1 kohm -- a -- C1 = 1 uF -- gnd\n"
        "A1 : opamp(plus = a, minus = b, out = b)\nb -- C2 = 1 uF -- out -- R2 = 1 kohm -- gnd\n"
        "ask step from in to out\n"
    )
    (value,) = [value for name, value in table(found, "Step response") if name == "Largest value"]
    assert value in ("0.3679 at 1\u00a0ms", "0.3679 at 1.00\u00a0ms")  # found on a grid


def test_captions_name_what_is_drawn():
    """No asymptotes of thirty sections, no settling band around zero, no cutoff beside the band."""
    many = made("block sec(a, b)\n  a -- R = 100 ohm -- b\n  b -- C = 1 nF -- gnd\nend\n"
                "in -- N : 8 * sec -- out\nask transfer from in to out")  # fmt: skip
    narrow = made(RC + "ask sweep from in to out over 10 kHz .. 20 kHz\n")
    returns = made("in -- C1 = 1 uF -- out -- R1 = 1 kohm -- gnd\nask step from in to out")
    for found, title, word in (
        (many, "Response over frequency", "asymptotes"),
        (narrow, "Response over frequency", "cutoffs"),
        (returns, "Step response", "settling band"),
    ):
        section = next(item for item in found.document.sections if item.title == title)
        captions = [block.caption for block in section.blocks if isinstance(block, Picture)]
        assert len(captions) == 1
        assert word not in captions[0]


def test_mains_parts_are_all_that_hang_on_a_named_node():
    """Everything joined other than by ground; a transformer's other winding is not."""
    found = made(
        "gnd -- V1 : voltage_source(5 V) -- line_a\nline_a -- R1 = 1 ohm -- live\n"
        "live -- C1 = 1 nF -- gnd\nlive -- L1 = 1 mH -- load -- R2 = 1 kohm -- gnd\n"
        "T1 : transformer(p1 = load, p2 = gnd, s1 = low, s2 = gnd, ratio = 10)\n"
        "low -- R3 = 10 ohm -- gnd\n"
    )
    text = Page(found.html()).text
    assert "hang, other than by ground: V1, R1, C1, L1, R2, T1." in text
    assert "the list can be incomplete" in text


def test_a_floating_network_names_its_zero_point():
    """Where nothing leads to ground, the derivation says which node's voltage is zero."""
    floating = made("a -- R1 = 1 kohm -- c -- C1 = 1 nF -- b\nask transfer from (a, b) to (c, b)")
    assert "voltages count from “" in Page(floating.html()).text
    assert "voltages count from" not in Page(made(RC).html()).text


@pytest.mark.parametrize(
    ("extra", "said"),
    [("", True), ("A1.gain_bandwidth = 1 MHz\n", False), ("A1.open_loop_gain = 1e5\n", False)],
)
def test_op_amps_are_assumed_ideal_where_they_are(extra, said):
    """The assumption stands only where some op-amp has no stated gain."""
    text = f"{RC}A1 : opamp(plus = out, minus = far, out = far)\n{extra}ask transfer from in to far"
    assert ("inputs equal" in Page(made(text).html()).text) == said


def test_symbols_have_no_nominal_values():
    """Words about values and tolerances stand where there are such."""
    symbols = Page(made("in -- R1 -- out -- C1 -- gnd").html()).text
    assert "nominal" not in symbols.split("How to make")[0].replace("with their nominal values", "")
    assert "tolerances are listed" not in Page(made(RC).html()).text
    with_one = RC.replace("1 kohm", "1 kohm ± 1 %")
    assert "tolerances are listed" in Page(made(with_one).html()).text
