"""Readings: every text, parsed again, is exactly the closed form."""

from __future__ import annotations

from pathlib import Path as File

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.reading import reading
from acsolve.analyses.shape import standard_form
from tests.analyses.readings import check, lines
from tests.analyses.test_transfer_laws import asked, solved
from tests.strategies import any_lumped, connected, pairs

SECTIONS = File(__file__).parent.parent / "published" / "sections"
_MOST_TERMS = 24  # of numerator and denominator: SymPy compares these in well under a second


def form_of(text: str, source: str = "in", target: str = "out") -> ClosedForm:
    """The closed form of a circuit text."""
    return acsolve.parse(text).path(source, target).closed_form()


def questions() -> list[tuple[str, int]]:
    """Every question of every classical section."""
    files = sorted(SECTIONS.glob("*.circuit"))
    return [(file.stem, k) for file in files for k in range(len(acsolve.read(file).questions))]


@pytest.mark.parametrize("safe", [True, False], ids=["safe", "plain"])
@pytest.mark.parametrize(("section", "place"), questions())
def test_sections_read_exactly(section, place, safe):
    """Every reading of a classical section, in both spellings, is its closed form."""
    circuit = acsolve.read(SECTIONS / f"{section}.circuit")
    question = circuit.questions[place]
    if question.kind == "impedance":
        path = circuit.looking_into(question.target)
    else:
        path = circuit.path(question.source, question.target, quantity=question.quantity)
    check(path.closed_form(), safe=safe)


@settings(max_examples=25)
@given(st.data(), st.sampled_from(["voltage-ratio", "transimpedance", "impedance"]))
def test_passive_networks_read_exactly(data, quantity):
    """Every reading of a random R, L, C network, in both spellings, is its closed form."""
    netlist = data.draw(connected(symbols=True, most_nodes=4, most_extra=2))
    source, target = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    if quantity == "impedance":
        target = source
    form = solved(netlist, asked(netlist, source, target, quantity))
    assume(form is not None and form.rational and form.numerator != 0)
    assume(len(form.numerator) + len(form.denominator) <= _MOST_TERMS)
    check(form)
    assume(all(name.isidentifier() for name in form.symbols))
    check(form, safe=False)


@settings(max_examples=25)
@given(st.data())
def test_networks_of_any_parts_read_exactly(data):
    """Every reading of a network of any lumped parts, numbers among symbols, is its closed form."""
    netlist = data.draw(any_lumped(symbols=True))
    source, target = data.draw(pairs(netlist)), data.draw(pairs(netlist))
    form = solved(netlist, asked(netlist, source, target, "voltage-ratio"))
    assume(form is not None and form.rational and form.numerator != 0)
    assume(len(form.numerator) + len(form.denominator) <= _MOST_TERMS)
    check(form)


DIVIDER = "in -- R1 -- out\nout -- R2 || C1 -- gnd\n"
LOW_RC = "in -- R1 -- out\nout -- C1 -- gnd\n"
HIGH_RC = "in -- C1 -- out\nout -- R1 -- gnd\n"
LEAD = "in -- R1 || C1 -- out\nout -- R2 -- gnd\n"
LAG = "in -- R1 -- out\nout -- R2 + C1 -- gnd\n"
SHELF = "in -- R1 -- out\nout -- R2 || (R3 + C1) -- gnd\n"
SERIES = "in -- R1 + L1 -- out\nout -- C1 -- gnd\n"
TANK = "in -- R1 -- out\nout -- L1 || C1 -- gnd\n"
TRAP = "in -- R1 -- out\nout -- L1 + C1 -- gnd\n"
DOUBLE = "in -- R1 -- a -- R2 -- out\na -- C1 -- gnd\nout -- C2 -- gnd\n"
GROUPS = "in -- R1 + R2 -- out\nout -- R3 || C1 -- gnd\n"


@pytest.mark.parametrize(
    ("text", "name", "expected"),
    [
        (LOW_RC, "unit", {"H": "1/(1 + R1*C1*s)"}),
        (DIVIDER, "unit", {"H": "R2/((R1 + R2)*(1 + (R1 || R2)*C1*s))"}),
        (GROUPS, "unit", {"H": "R3/((R1 + R2 + R3)*(1 + ((R1 + R2) || R3)*C1*s))"}),
        (DOUBLE, "unit", {"H": "1/(1 + (R1*(C1 + C2) + R2*C2)*s + R1*R2*C1*C2*s^2)"}),
        (LEAD, "factored", {
            "H": "R2*(1 + tau1*s)/((R1 + R2)*(1 + tau2*s))",
            "tau1": "R1*C1",
            "tau2": "(R1 || R2)*C1",
        }),
        (LAG, "standard", {
            "H": "K*(1 + tau_z*s)/(1 + tau_p*s)",
            "K": "1",
            "tau_z": "R2*C1",
            "tau_p": "C1*(R1 + R2)",
        }),
        (SHELF, "standard", {
            "H": "K*(1 + tau_z*s)/(1 + tau_p*s)",
            "K": "R2/(R1 + R2)",
            "tau_z": "R3*C1",
            "tau_p": "C1*(R3 + (R1 || R2))",
        }),
        (SERIES, "standard", {
            "H": "K/(1 + s/(Q*w0) + (s/w0)^2)",
            "K": "1",
            "w0": "1/sqrt(L1*C1)",
            "Q": "sqrt(L1/C1)/R1",
        }),
        (TANK, "standard", {
            "H": "K*(s/(Q*w0))/(1 + s/(Q*w0) + (s/w0)^2)",
            "K": "1",
            "w0": "1/sqrt(L1*C1)",
            "Q": "R1*sqrt(C1/L1)",
        }),
        (TRAP, "standard", {
            "H": "K*(1 + (s/w0)^2)/(1 + s/(Q*w0) + (s/w0)^2)",
            "K": "1",
            "w0": "1/sqrt(L1*C1)",
            "Q": "sqrt(L1/C1)/R1",
        }),
        (LOW_RC, "real", {
            "gain(w)": "1/sqrt(1 + (R1*C1*w)^2)",
            "phase(w)": "-atan(R1*C1*w)",
        }),
        (HIGH_RC, "real", {
            "gain(w)": "R1*C1*w/sqrt(1 + (R1*C1*w)^2)",
            "phase(w)": "pi/2 - atan(R1*C1*w)",
        }),
        (LOW_RC, "delay", {
            "phase_delay(w)": "atan(R1*C1*w)/w",
            "group_delay(w)": "R1*C1/(1 + (R1*C1*w)^2)",
        }),
        (HIGH_RC, "asymptotes", {
            "H, low frequencies, +20 dB/decade": "R1*C1*s",
            "H, high frequencies, flat": "1",
        }),
    ],
)  # fmt: skip
def test_texts_of_the_trade(text, name, expected):
    """Small networks read the way textbooks print them."""
    assert lines(form_of(text), name, safe=False) == expected
    check(form_of(text), safe=False)


def test_first_order_all_pass_has_one_delay():
    """Equal angles and delays of numerator and denominator are counted, not repeated."""
    form = form_of((SECTIONS / "all-pass-first.circuit").read_text(encoding="utf-8"))
    assert list(lines(form, "real", safe=False).values()) == ["1", "-2*atan(R3*C1*w)"]
    assert lines(form, "delay", safe=False)["group_delay(w)"] == "2*R3*C1/(1 + (R3*C1*w)^2)"


def test_names_of_ours_keep_clear_of_the_circuit():
    """A symbol of the circuit that bears one of our names is not mistaken for ours."""
    text = "let K, w\nin -- R1 = (K) -- out\nout -- R2 || C1 = (w) -- gnd\n"
    form = form_of(text)
    labels = [line.label for line in reading(form, "standard")]
    assert labels == ["H", "K_H", "tau", "w0"]
    assert [line.label for line in reading(form, "real")] == ["gain(w_H)", "phase(w_H)"]


def test_poles_on_either_side_have_no_natural_frequency():
    """A denominator with end coefficients of opposite sign is given no w0 and no Q."""
    text = "in -- R1 -- out\nout -- L1 || C1 -- gnd\nL1 = 1 H\nC1 = -1 F\nR1 = 1 ohm\n"
    assert standard_form(form_of(text)) is None


def test_no_text_has_two_signs_or_two_brackets():
    """No reading of a section doubles a sign or a bracket, or starts a sum with a minus."""
    for section, place in questions():
        circuit = acsolve.read(SECTIONS / f"{section}.circuit")
        question = circuit.questions[place]
        if question.kind == "impedance":
            continue
        form = circuit.path(
            question.source, question.target, quantity=question.quantity
        ).closed_form()
        for name in ("unit", "factored", "standard", "real", "delay", "asymptotes"):
            for text in lines(form, name, safe=False).values():
                assert not any(sign in text for sign in ("--", "+ -", "- -", "(-")), text
                assert not _doubled(text), text


def _doubled(text: str) -> bool:
    """Whether one pair of brackets stands directly inside another."""
    opened: list[int] = []
    pairs_of: dict[int, int] = {}
    for place, sign in enumerate(text):
        if sign == "(":
            opened.append(place)
        elif sign == ")":
            pairs_of[opened.pop()] = place
    return any(pairs_of.get(first + 1) == last - 1 for first, last in pairs_of.items())
