"""What a notebook shows: formulas, pictures and tables of what was computed."""

import xml.etree.ElementTree as ET

import pytest

import acsolve

CIRCUIT = acsolve.parse(
    'title "A & B <filter>"\nin -- R1 -- out\nout -- C1 -- gnd\nR1 = 1 kohm\nC1 = 1 uF\n'
)
PATH = CIRCUIT.path("in", "out")


def shown(answer):
    """The media that an interactive environment gets."""
    return answer._repr_mimebundle_()


def test_closed_forms_are_formulas():
    """The expanded form, the answer that holds it, and named steps."""
    latex = r"$\displaystyle \frac{1}{1 + R_{1}\,C_{1}\,s}$"
    assert shown(PATH.closed_form(symbolic=True))["text/latex"] == latex
    assert shown(PATH.transfer(symbolic=True))["text/latex"] == latex
    assert r"\begin{aligned}" in shown(PATH.nested_form(symbolic=True))["text/latex"]


@pytest.mark.parametrize("make", [lambda: PATH.sweep("1 Hz .. 1 kHz"), PATH.step])
def test_responses_are_pictures(make):
    """Well-formed SVG, the same on every call."""
    answer = make()
    picture = shown(answer)["image/svg+xml"]
    assert ET.fromstring(picture).tag.endswith("svg")  # noqa: S314 - our own output
    assert shown(answer)["image/svg+xml"] == picture


def test_cutoffs_are_a_table():
    """Each with its closed form and what is proven."""
    found = shown(PATH.cutoffs())["text/html"]
    table = ET.fromstring(found)  # noqa: S314 - our own output
    cells = [cell.text for cell in table.iter("td")]
    assert cells == ["159.155 Hz", "1/(R1*C1)", "falling"]
    assert "proven" in table.find("caption").text


def test_what_is_too_long_is_shown_as_text():
    """A formula of thousands of terms would not help on a page."""
    lines = [f"n{k} -- R{k} -- n{k + 1}\nn{k + 1} -- C{k} -- gnd" for k in range(1, 8)]
    form = acsolve.parse("\n".join(lines) + "\n").path("n1", "n8").closed_form()
    assert list(shown(form)) == ["text/plain"]


def test_a_circuit_is_its_schematic():
    """The drawing that `draw` makes."""
    assert CIRCUIT._repr_svg_() == CIRCUIT.drawing().svg()
