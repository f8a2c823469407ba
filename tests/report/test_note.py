"""The design note of every shipped circuit: form, bytes, hash, warnings."""

from __future__ import annotations

import json
import re
from hashlib import sha256
from shutil import which
from xml.etree import ElementTree as ET

import pytest

import acsolve
from tests.report.browser import PROGRAM, measured
from tests.report.note_reader import CIRCUITS, NAMES, Page, latex_problems, note, typeset

HOSTILE = "<script>alert(1)</script> & \\input{x} 50% $x$ a_b #1 ^~{} ünï 測定 |c| `d` [e](f)"


@pytest.mark.parametrize("name", NAMES)
def test_the_page_is_well_formed(name):
    """Every tag closed, ids unique, no script, nothing that a browser would fetch."""
    text = note(name).html()
    page = Page(text)
    assert "script" not in page.tags
    assert len(set(page.ids)) == len(page.ids)
    assert page.addresses == []
    outside = re.findall(r"https?://[^\"\s<]+", text)
    assert set(outside) <= {"http://www.w3.org/2000/svg"}
    assert "url(" not in text
    assert "@import" not in text


@pytest.mark.parametrize("name", NAMES)
def test_formulas_and_pictures_are_well_formed(name):
    """Each `math` and each `svg` is XML on its own, and none is empty."""
    text = note(name).html()
    found = re.findall(r"<math.*?</math>", text) + re.findall(r"<svg.*?</svg>", text, re.DOTALL)
    assert len(found) > 5
    for item in found:
        root = ET.fromstring(item)  # noqa: S314 - our own page
        assert len(root) > 0
        for element in root.iter():
            tag = element.tag.rpartition("}")[2]
            sizes = {"mfrac": 2, "msup": 2, "msub": 2}
            assert len(element) == sizes.get(tag, len(element)), item


@pytest.mark.parametrize("name", NAMES)
def test_latex_closes_what_it_opens(name):
    """Braces, environments and mathematics balance; no sign beyond the plain fonts."""
    assert latex_problems(note(name).latex()) == []


@pytest.mark.parametrize("name", NAMES)
def test_markdown_closes_what_it_opens(name):
    """Displayed formulas and fences come in pairs, rows of a table have equal columns."""
    text = note(name).markdown()
    assert len(re.findall(r"^\$\$$", text, re.MULTILINE)) % 2 == 0
    assert text.count(r"\begin{aligned}") == text.count(r"\end{aligned}")
    for table in re.findall(r"(?:^\|.*\|\n)+", text, re.MULTILINE):
        rows = [re.sub(r"\\\|", "", row).count("|") for row in table.splitlines()]
        assert len(set(rows)) == 1
    assert not re.search(r"!\[[^\]]*\]\((?!data:image/svg)", text)


@pytest.mark.parametrize("name", ["level_lowpass", "line_pad", "seepage_tape"])
def test_same_input_same_bytes(name):
    """A second circuit from the same file gives the same bytes in every form."""
    again = acsolve.read(CIRCUITS / f"{name}.circuit").note()
    for ending in ("html", "md", "tex", "json"):
        assert again.content(ending) == note(name).content(ending)


@pytest.mark.parametrize("name", NAMES)
def test_the_hash_is_the_texts(name):
    """The SHA-256 of the file stands in the note and in its JSON, and the text itself."""
    content = (CIRCUITS / f"{name}.circuit").read_text(encoding="utf-8")
    digest = sha256(content.encode()).hexdigest()
    page = Page(note(name).html())
    assert digest in page.text
    assert " ".join(content.split()) in page.text
    assert json.loads(note(name).json())["note"]["sha256"] == digest


@pytest.mark.parametrize("name", NAMES)
def test_cautions_and_the_model_are_told(name):
    """Each caution of the file is shown, with the usual remarks; the ideal model always."""
    made = note(name)
    for text in (Page(made.html()).text, " ".join(made.latex().split())):
        assert "ideal linear model" in text
        assert ("licensed practice" in text) == bool(made.facts.cautions)
    for caution in made.facts.cautions:
        assert " ".join(caution.split()) in Page(made.html()).text


def test_all_headings_in_a_reviewers_order():
    """The order of sections is the one a reviewer reads."""
    titles = [section.title for section in note("level_lowpass").document.sections]
    assert titles == [
        "Purpose",
        "Schematic",
        "Key results",
        "Parts",
        "Assumptions",
        "Voltage ratio from (in, gnd) to (out, gnd)",
        "Derivation",
        "Result",
        "Limits and cutoffs",
        "Poles and zeros",
        "Loading",
        "Response over frequency",
        "Step response",
        "Numbers",
        "What was checked",
        "How to make this note again",
    ]


def _hostile() -> acsolve.Circuit:
    return acsolve.parse(
        f"# {HOSTILE}\ntitle {json.dumps(HOSTILE, ensure_ascii=False)}\n"
        f"caution {json.dumps(HOSTILE, ensure_ascii=False)}\n"
        "in -- R1 = 1 kohm -- out -- C1 = 1 uF -- gnd\nask transfer from in to out\n"
    )


_PART, _NODE = "R" + "long_name_" * 6, "node_" + "a" * 55
LONG_NAMES = acsolve.parse(
    f"{_NODE}_in -- {_PART} = 1 kohm -- {_NODE} -- C{'c' * 59} = 1 uF -- gnd\n"
    f"{_NODE} -- L{'d' * 59} = 1 mH -- gnd\n"
    f"ask transfer from {_NODE}_in to {_NODE}\nask cutoff from {_NODE}_in to {_NODE}\n"
)


def test_hostile_words_stay_words():
    """Titles, comments and cautions are shown as they are and run nowhere."""
    made = _hostile().note(date=HOSTILE)
    page = Page(made.html())
    assert "script" not in page.tags
    assert page.text.count(HOSTILE) >= 4
    assert latex_problems(made.latex()) == []
    assert r"\input" not in made.latex()
    assert "[U+6E2C]" in made.latex()
    text = made.markdown()
    outside = re.sub(r"~~~.*?~~~", "", text, flags=re.DOTALL)
    assert "<script" not in outside
    assert "](f)" not in outside.replace(r"\]", "")


@pytest.mark.parametrize(
    ("source", "dangerous"),
    [
        ("V1 : voltage_source(amplitude = 42 V)", False),
        ("V1 : voltage_source(amplitude = 43 V)", True),  # 30.4 V rms
        ("mains_feed : voltage_source(amplitude = 5 V)", True),
    ],
)
def test_dangerous_voltages_bring_their_remarks(source, dangerous):
    """Above 30 V rms, or where a name says mains, the note tells of charge and codes."""
    name = source.split()[0]
    circuit = acsolve.parse(
        f"gnd -- {name} -- a -- R1 = 1 kohm -- b -- C1 = 1 uF -- gnd\n{source}\n"
    )
    text = Page(circuit.note().html()).text
    assert ("Capacitors keep their charge" in text) == dangerous
    assert ("licensed practice decide" in text) == dangerous


@pytest.mark.parametrize(
    "text",
    [
        "in -- R1 -- out -- C1 -- gnd",
        "port near = (a, gnd)\nport far = (b, gnd)\na -- R1 = 1 kohm -- b -- C1 = 1 uF -- gnd",
        "port near = (a, gnd)\na -- R1 = 1 kohm -- gnd",
        "gnd -- V1 : voltage_source(amplitude = 1 V) -- a -- R1 = 1 kohm -- b -- R2 = 2k -- gnd",
        "a -- R1 = 1 kohm -- gnd",
    ],
)
def test_files_that_ask_nothing_get_the_usual_questions(text):
    """Ports, sources, or first and last node say what is answered."""
    made = acsolve.parse(text).note()
    assert len(made.facts.chapters) == 1
    assert made.facts.chapters[0].transfer is not None
    assert "asks nothing" in Page(made.html()).text


def test_a_question_without_an_answer_is_told():
    """What cannot be answered stands in the note with its reason."""
    circuit = acsolve.parse("a -- R1 = 1k -- b\nc -- R2 = 1k -- gnd\nask transfer from a to c")
    text = Page(circuit.note().html()).text
    assert "No answer for" in text


@pytest.mark.skipif(which("pdflatex") is None, reason="no TeX is installed")
@pytest.mark.parametrize("name", [*NAMES, "hostile", "long names"])
def test_latex_compiles(name, tmp_path):
    """The LaTeX compiles as it stands, and no line sticks out of the page by much."""
    hard = {"hostile": _hostile, "long names": lambda: LONG_NAMES}
    made = hard[name]().note(date=HOSTILE) if name in hard else note(name)
    assert typeset(made.latex(), tmp_path) < 15


def _as_printed(page: str) -> str:
    """The page with its rules for paper in force; a frame as wide as the paper's text shows it."""
    assert page.count("@media print {") == 1
    return page.replace("@media print {", "@media all {")


_NARROW = 400
_PAPER = {"A4": 673, "Letter": 695}  # pixels of the text's width: 210 and 215.9 mm, less 32 mm


@pytest.mark.skipif(PROGRAM is None, reason="no Chromium is installed")
def test_a_browser_shows_every_formula_within_the_page(tmp_path):
    """On a narrow screen and on paper: no console message, no request, nothing flat or too wide."""
    pages = {name: note(name).html() for name in NAMES}
    pages["hostile"] = _hostile().note().html()
    pages["long names"] = LONG_NAMES.note().html()
    found, console = measured(pages, (_NARROW,), tmp_path)
    printed = {name: _as_printed(page) for name, page in pages.items()}
    on_paper, more = measured(printed, tuple(_PAPER.values()), tmp_path)
    assert console + more == []
    assert len(found) == len(pages)
    assert len(on_paper) == 2 * len(pages)
    for place, item in (*found.items(), *on_paper.items()):
        assert item["maths"] > 3, place
        assert item["flat"] == 0, place
        assert item["requests"] == 0, place
        assert item["overflow"] <= 0, (place, item)
        assert item["wide"] == [], (place, item)
