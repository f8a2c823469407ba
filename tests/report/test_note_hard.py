"""Notes of what nobody draws on purpose: odd names, no parts, extreme values, many of everything."""

from __future__ import annotations

import json
import os
import subprocess
import sys
from pathlib import Path
from shutil import which

import pytest

import acsolve
from acsolve.circuit.kind import KINDS
from acsolve.errors import AcsolveError
from acsolve.report.note.tex_escape import escape_tex
from tests.report.note_reader import CIRCUITS, Page, latex_problems, typeset

SIGNS = "مرشح <b> & $x$ 50% a_b \\\\cmd {z} #1 ^~ 測定 🎛 e\u0301 \u202eevil\u202c"
SECTION = "in -- R1 = 1 kohm -- out -- C1 = 1 uF -- gnd\n"
_PLAIN = {kind: item for kind, item in KINDS.items() if kind != "measured"}
_ALL = "\n".join(
    f"K{i} : {kind}("
    + ", ".join(f"{t.name} = n{(3 * i + j) % 6}" for j, t in enumerate(item.terminals))
    + ")"
    for i, (kind, item) in enumerate(_PLAIN.items())
)
_MANY = ", ".join(f"C{k}" for k in range(30))
HARD = {
    "signs": f'title "{SIGNS}"\n{SECTION}ask cutoff from in to out\n',
    "long title": f'title "{"x" * 300} {"words " * 60}"\n{SECTION}',
    "one part": "a -- R1 = 1 kohm -- gnd\n",
    "one loose part": "a -- R1 = 1 kohm -- b\n",
    "no parts": 'title "Nothing"\n',
    "two islands": "a -- R1 = 1k -- b -- C1 = 1uF -- gnd\nc -- R2 = 1k -- d -- R3 = 2k -- c\n"
    "ask transfer from a to b\nask transfer from a to c\nask impedance into (d, c)\n",
    "all kinds": f"{_ALL}\nask transfer from n0 to n1\n",
    "thirty in parallel": f"in -- R0 = 1k -- out\nout -- {_MANY.replace(',', ' ||')} -- gnd\n"
    f"{_MANY} = 1 nF\nask transfer from in to out\nask cutoff from in to out\n",
    "words as names": "lambda -- R1 = 1k -- None -- C1 = 1uF -- gnd\nNone -- if -- E\n"
    "if : resistor\nE -- C2 = 1 nF -- gnd\nask transfer from lambda to E\n",
    "extremes": "in -- R1 = 1e-30 ohm -- m -- R2 = 1e30 ohm -- out -- C1 = 1e-30 F -- gnd\n"
    "m -- L1 = 1e30 H -- gnd\nask transfer from in to out\nask cutoff from in to out\n"
    "ask step from in to out\n",
    "negative values": "in -- R1 = -1k -- out -- C1 = 1uF -- gnd\nout -- L1 = -1 mH -- gnd\n"
    "ask transfer from in to out\nask cutoff from in to out\nask step from in to out\n",
    "uneven tolerances": "in -- R1 = 1k +5 % -20 % -- out -- C1 = 1uF +80 % -20 % -- gnd\n"
    "out -- R2 = 100 ohm ± 3 ohm -- gnd\nask cutoff from in to out at -1 dB, -3 dB, -60 dB\n",
    "variant": "in -- R1 = 1k -- m -- R2 = 1k -- out -- C1 = 1uF -- gnd\nm -- C2 = 1 nF -- gnd\n"
    'variant "bad <&$%_ name"\n    C2 = absent\n    join m, out\nend\nask cutoff from in to out\n',
    "line ends": f"# of another system\n{SECTION}ask cutoff from in to out\n".replace("\n", "\r\n"),
    "nothing arrives": "in -- R1 = 1k -- gnd\nout -- R2 = 1k -- gnd\n"
    "ask transfer from in to out\nask cutoff from in to out\nask step from in to out\n",
    "own source": "gnd -- V1 : voltage_source(amplitude = 400 V) -- mains -- R1 = 1k -- out\n"
    "out -- C1 = 1uF -- gnd\nask transfer to out\nask cutoff to out\n",
    "two ports": "in -- R1 -- m -- L1 -- out\nm -- C1 -- gnd\n"
    "ask two-port from in to out reference 50 ohm\nask two-port from in to m\n",
}


def made(name: str):
    """The note of a hard case, in its variant where it has one."""
    circuit = acsolve.parse(HARD[name])
    for variant in circuit.variants:
        circuit = circuit.with_variant(variant)
    return circuit.note(date="2031-05-06")


@pytest.mark.parametrize("name", HARD)
def test_every_form_of_a_hard_case(name, tmp_path):
    """HTML closes its tags, JSON reads, LaTeX compiles and keeps within its lines."""
    note = made(name)
    page = Page(note.html())
    assert "script" not in page.tags
    assert page.addresses == []
    found = json.loads(note.json())["note"]
    assert [item["name"] for item in found["parts"]] == [
        part.name for part in note.facts.netlist.parts
    ]
    assert "ideal linear model" in " ".join(note.markdown().split())
    assert latex_problems(note.latex()) == []
    if which("pdflatex") is not None:
        assert typeset(note.latex(), tmp_path) < 15


@pytest.mark.parametrize("kind", ["noise", "tolerance"])
def test_each_question_without_an_answer_is_named(kind):
    """Noise, tolerance and goals: pair and band of each stand in the note and its JSON."""
    text = (
        f"{SECTION}ask {kind} from in to out over 20 Hz .. 20 kHz\n"
        f"ask {kind} from in to out over 1 Hz .. 2 Hz\n"
        "goal from in to out over 1 kHz .. 10 kHz below -20 dB\n"
    )
    note = acsolve.parse(text).note()
    words = [
        f"{kind} from (in, gnd) to (out, gnd), 20 Hz to 20 kHz",
        f"{kind} from (in, gnd) to (out, gnd), 1 Hz to 2 Hz",
        "goal from (in, gnd) to (out, gnd), 1 kHz to 10 kHz, below −20 dB",
    ]
    page = Page(note.html()).text.replace("\u00a0", " ")
    for item in words:
        assert item in page
    found = json.loads(note.json())["note"]
    assert found["not_answered"] == [kind, kind, "goal"]
    assert [x.replace("\u00a0", " ") for x in found["not_answered_questions"]] == words
    assert note.facts.chapters[0].transfer is not None, "the usual questions are answered instead"


_WRITE = """
import sys
import acsolve
note = acsolve.read(sys.argv[1]).note()
for ending in ("html", "md", "tex", "json"):
    open(sys.argv[2] + "." + ending, "wb").write(note.content(ending))
"""


@pytest.mark.parametrize("name", ["ping_amplifier", "turbidity_photodiode"])
def test_same_bytes_in_another_process(name, tmp_path):
    """Hash seeds, folders, time zones and languages leave no trace in any form."""
    worlds = (
        {"PYTHONHASHSEED": "1", "TZ": "UTC", "LC_ALL": "C.UTF-8"},
        {"PYTHONHASHSEED": "4242", "TZ": "Pacific/Auckland", "LC_ALL": "C"},
    )
    started = []
    for place, world in enumerate(worlds):
        folder = tmp_path / str(place)
        folder.mkdir()
        copy = folder / f"{name}.circuit"
        copy.write_bytes((CIRCUITS / f"{name}.circuit").read_bytes())
        given = [str(copy) if place else copy.name, str(folder / "note")]
        home = {"PYTHONPATH": str(Path(acsolve.__file__).parents[1])}
        started.append(
            subprocess.Popen(  # noqa: S603 - this program's own code
                [sys.executable, "-c", _WRITE, *given],
                cwd=folder if place == 0 else tmp_path,
                env={**os.environ, **home, **world},
            )
        )
    assert [item.wait(timeout=120) for item in started] == [0, 0]
    for ending in ("html", "md", "tex", "json"):
        first, second = (tmp_path / str(k) / f"note.{ending}" for k in (0, 1))
        assert first.read_bytes() == second.read_bytes(), ending


@pytest.mark.skipif(which("pdflatex") is None, reason="no TeX is installed")
def test_the_pdf_has_the_same_bytes_each_time():
    """The times of making are taken out."""
    note = made("one part")
    assert note.content("pdf") == note.content("pdf")


def test_long_words_may_break():
    """A word that no line holds gets places to break at; a short one stays as it is."""
    assert escape_tex("antialias") == "antialias"
    assert escape_tex("x" * 35).count(r"\notebreak{}") == 3
    assert escape_tex("x" * 35).replace(r"\notebreak{}", "") == "x" * 35


def test_a_save_that_fails_leaves_nothing(tmp_path):
    """An ending that is no form of a note is refused before anything is written."""
    with pytest.raises(AcsolveError, match=r"save\.ending"):
        made("one part").save(tmp_path / "note.docx")
    assert list(tmp_path.iterdir()) == []
