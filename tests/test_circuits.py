"""The shipped circuits: each reads, makes sense, and answers what its README says.

Expected figures were worked out with a dense nodal solution in NumPy that shares no code
with the program (invented circuits, so there is no published source).
"""

from __future__ import annotations

import re
import shlex
from fractions import Fraction
from pathlib import Path
from random import Random

import pytest

import acsolve
from acsolve.circuit.netlist import Netlist

ROOT = Path(__file__).parents[1]
FOLDER = ROOT / "circuits"
FILES = sorted(FOLDER.glob("*.circuit"))
INDEX = (FOLDER / "README.md").read_text(encoding="utf-8")


def ids(path: Path) -> str:
    """The name of a case: its file."""
    return path.stem


@pytest.mark.parametrize("path", FILES, ids=ids)
def test_makes_sense(path: Path) -> None:
    """A shipped circuit is read without a warning and checked without an error."""
    circuit = acsolve.read(path)
    assert not circuit.warnings
    answer = circuit.check()
    assert answer.ok, [item.message for item in answer.problems]
    assert all(item.severity == "note" for item in answer.problems)
    assert circuit.netlist.remarks, "a shipped circuit says what it is for"
    assert all(modes.stable is not False for modes in answer.modes)


@pytest.mark.parametrize("path", FILES, ids=ids)
def test_every_variant_makes_sense(path: Path) -> None:
    """Every variant of a shipped circuit is a circuit that has an answer of its own."""
    circuit = acsolve.read(path)
    for name in circuit.variants:
        assert circuit.with_variant(name).check().ok


@pytest.mark.parametrize("path", FILES, ids=ids)
def test_listed(path: Path) -> None:
    """Every shipped circuit stands in the index with something to ask of it."""
    assert f"`{path.stem}`" in INDEX


#: file, from, to, variant, half-power cutoffs in hertz (digits as the index gives them).
CUTOFFS = [
    ("level_float", "float", None, None, [1.026]),
    ("strain_antialias", "amp", "adc", None, [489.9]),
    ("seepage_tape", "head", "tail", None, [169.8]),
    ("hydrophone_lowpass", None, None, None, [20.11e3]),
    ("ping_bandpass", None, None, None, [27.150e3, 33.150e3]),
    ("ping_bandpass", None, None, "stocked parts", [27.288e3, 33.585e3]),
    ("hum_notch", None, None, None, [9.675, 215.9]),
    ("gate_position", "supply", "detector", None, [371.3, 2.674e6]),
    ("level_lowpass", None, None, None, [10.49]),
    ("ping_amplifier", None, None, None, [27.45e3, 33.10e3]),
    ("swell_filter", "in", "low", None, [0.09846]),
    ("ping_transmitter", None, None, None, [371.6, 115.2e3]),
    ("diver_link", None, None, None, [121.19e3, 128.97e3]),
    ("charger_feed", None, None, None, [395.2]),
    ("charger_feed", None, None, "low-cost build", [723.3]),
    ("siren_wien", None, None, None, [301.2, 3285.0]),
    ("mast_cable", None, None, None, [447.5e3]),
    ("rust_probe", None, None, None, [6.450]),
]


def _question(netlist: Netlist) -> tuple[tuple[str, str], tuple[str, str]]:
    asked = next(item for item in netlist.questions if item.kind == "cutoff")
    assert asked.source is not None
    return asked.source, asked.target


@pytest.mark.parametrize(("name", "source", "target", "variant", "expected"), CUTOFFS)
def test_cutoffs(
    name: str, source: str | None, target: str | None, variant: str | None, expected: list[float]
) -> None:
    """A shipped circuit cuts off where an independent nodal solution says."""
    circuit = acsolve.read(FOLDER / f"{name}.circuit", variant=variant)
    if target is None or source is None:
        path = circuit.path(*_question(circuit.netlist))
    else:
        path = circuit.path(source, target)
    answer = path.cutoffs()
    assert answer.complete
    found = [item.hertz for item in answer.cutoffs]
    assert found == pytest.approx(expected, rel=6e-4)  # the index gives four digits


@pytest.mark.parametrize(
    ("variant", "expected"), [(None, [60.98, 717.2e3]), ("no bypass", [18.42, 4.591e6])]
)
def test_cutoffs_below_the_peak(variant: str | None, expected: list[float]) -> None:
    """A stage whose gain does not vanish far above is asked below its peak."""
    circuit = acsolve.read(FOLDER / "horn_preamp.circuit", variant=variant)
    answer = circuit.path("src", "out").cutoffs(reference="peak")
    assert [item.hertz for item in answer.cutoffs] == pytest.approx(expected, rel=6e-4)


def test_exact_figures() -> None:
    """Exact answers of shipped circuits are the fractions worked out by hand."""
    amplifier = acsolve.read(FOLDER / "strain_amplifier.circuit")
    gain = amplifier.path(("sig_hi", "sig_lo"), "out").closed_form().numbers()
    assert gain is not None
    assert Fraction(gain[0][0]) / gain[1][0] == Fraction(50299, 499)
    shared = amplifier.with_variant("common mode").path("sig_hi", "out").closed_form().numbers()
    assert shared is not None
    assert Fraction(shared[0][0]) / shared[1][0] == Fraction(1, 2001)


@pytest.mark.parametrize("path", FILES, ids=ids)
def test_line_order(path: Path) -> None:
    """No answer depends on the order of the lines that give values and questions aside."""
    text = path.read_text(encoding="utf-8")
    if re.search(r"^\s*(block|repeat|variant)\b", text, flags=re.MULTILINE):
        pytest.skip("lines inside a block belong together")
    lines = re.split(r"\n(?!\s)", text)  # an indented line goes on with the one before
    Random(len(lines)).shuffle(lines)
    shuffled = acsolve.parse("\n".join(lines))
    straight = acsolve.read(path)
    question = next((q for q in straight.questions if q.source is not None), None)
    if question is None or question.source is None:
        pytest.skip("nothing is asked from one pair to another")
    forms = [
        item.path(question.source, question.target, quantity=question.quantity)
        .closed_form(symbolic=True)
        .text()
        for item in (straight, shuffled)
    ]
    assert forms[0] == forms[1]


def _commands() -> list[str]:
    return re.findall(r"`acsolve ([a-z-]+ circuits/[^`]*)`", INDEX)


@pytest.mark.parametrize("command", _commands())
def test_index_commands(command: str, monkeypatch: pytest.MonkeyPatch) -> None:
    """Every command of the index answers."""
    from tests.cli.runner import acsolve as invoke

    monkeypatch.chdir(ROOT)
    outcome = invoke(*shlex.split(command))
    assert outcome.status == 0, outcome.err
    assert outcome.out.strip()
