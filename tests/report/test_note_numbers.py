"""Every number of a note, recomputed from its own JSON by other means."""

from __future__ import annotations

import json
from math import atan2, degrees, hypot, isclose, log10, pi

import numpy as np
import pytest
import sympy

import acsolve
from acsolve.report.note.wording import decibels, quantity
from tests.report.note_reader import CIRCUITS, NAMES, Page, note


def document(name: str):
    """The JSON of a circuit's note."""
    return json.loads(note(name).json())


def close(first, second, tolerance=1e-7) -> bool:
    """Whether two numbers agree."""
    return abs(first - second) <= tolerance * max(abs(first), abs(second), 1e-300)


def answers(name: str, kind: str):
    """The answers of a kind."""
    return [item for item in document(name)["answers"] if item["kind"] == kind]


def ratio(answer):
    """A closed form from its coefficients, None where it has symbols or no polynomials."""
    if answer["numerator"] is None or answer["poles"] is None or len(answer["poles"]) > 40:
        return None
    parts = []
    for key in ("numerator", "denominator"):
        values = [sympy.sympify(text) for text in answer[key]]
        if any(value.free_symbols for value in values):
            return None
        parts.append([complex(sympy.N(value, 30)) for value in values])
    return lambda s: np.polyval(parts[0], s) / np.polyval(parts[1], s)


@pytest.mark.parametrize("name", NAMES)
def test_sweeps_follow_from_the_closed_form(name):
    """Gain, phase and delay of each table: from real and imaginary part, and from H itself."""
    for swept in answers(name, "sweep"):
        pair = [key for key in ("from", "to", "into", "quantity") if key in swept]
        form = next(
            (
                found
                for item in document(name)["answers"]
                if item["kind"] in ("transfer", "impedance")
                and all(item.get(key) == swept.get(key) for key in pair)
                and (found := ratio(item)) is not None
            ),
            None,
        )
        for hertz, real, imag, gain, phase in zip(
            *(swept[key] for key in ("hertz", "real", "imag", "gain_db", "phase_deg")), strict=True
        ):
            if gain is None or phase is None:
                continue
            assert isclose(gain, 20 * log10(hypot(real, imag)), abs_tol=1e-9)
            turns = (phase - degrees(atan2(imag, real))) / 360
            assert isclose(turns, round(turns), abs_tol=1e-9)
            if form is not None:
                expected = form(2j * pi * hertz)
                far = abs(complex(real, imag) - expected)
                assert far < 1e-6 * abs(expected) + 1e-12  # a null is met to doubles


@pytest.mark.parametrize("name", NAMES)
def test_cutoffs_lie_at_their_level(name):
    """The response solved anew at each cutoff has the gain that the level says."""
    circuit = acsolve.read(CIRCUITS / f"{name}.circuit")
    for answer in answers(name, "cutoff"):
        path = circuit.path(tuple(answer["from"]), tuple(answer["to"]), quantity=answer["quantity"])
        wanted = answer["reference"]["gain"] * 10 ** (answer["level_db"] / 20)
        for item in answer["cutoffs"]:
            assert close(item["rad_per_s"], 2 * pi * item["hertz"], 1e-12)
            assert close(abs(path.response(item["hertz"])), wanted, 1e-8)


def with_parts(circuit, parts):
    """The circuit of a file with further lines, and no questions."""
    text = circuit.netlist.source.text.split("\nask ")[0]
    return acsolve.parse(f"{text}\n{parts}\n")


@pytest.mark.parametrize("name", NAMES)
def test_loading_is_what_a_load_does(name):
    """Z_out is what a load finds: with the load really connected, the gain is as the law says."""
    circuit = acsolve.read(CIRCUITS / f"{name}.circuit")
    for item in document(name)["note"]["loading"]:
        place = len(item["hertz"]) // 2
        hertz, z_out = item["hertz"][place], complex(*item["z_out"][place])
        load = 1234.5
        target = tuple(item["to"])
        source = None if item["from"] is None else tuple(item["from"])
        joined = with_parts(circuit, f"{target[0]} -- Rprobe = {load} ohm -- {target[1]}")
        quantity_of = None if source is None else item["quantity"]
        paths = [x.path(source, target, quantity=quantity_of) for x in (circuit, joined)]
        bare, found = (complex(path.response(hertz)) for path in paths)
        assert close(found, bare * load / (load + z_out), 1e-6)


@pytest.mark.parametrize("name", NAMES)
def test_loading_is_what_a_source_does(name):
    """Z_in is what a source meets: with its impedance connected, the gain is as the law says."""
    circuit = acsolve.read(CIRCUITS / f"{name}.circuit")
    for item in document(name)["note"]["loading"]:
        if item["z_in"] is None or item["from"] is None:
            continue
        if any(part.kind.endswith("_source") for part in circuit.netlist.parts):
            continue  # the file's own source stands there, and only the drive replaces it
        place, inner = len(item["hertz"]) // 2, 543.2
        hertz, z_in = item["hertz"][place], complex(*item["z_in"][place])
        (first, second), target = item["from"], tuple(item["to"])
        if item["quantity"] == "transimpedance":
            parts = f"{first} -- Rinner = {inner} ohm -- {second}"
            source, share = (first, second), inner / (inner + z_in)
        else:
            parts = f"ahead_of_it -- Rinner = {inner} ohm -- {first}"
            source, share = ("ahead_of_it", second), z_in / (inner + z_in)
        joined = with_parts(circuit, parts).path(source, target, quantity=item["quantity"])
        bare = circuit.path((first, second), target, quantity=item["quantity"])
        assert close(complex(joined.response(hertz)), complex(bare.response(hertz) * share), 1e-6)


@pytest.mark.parametrize("name", NAMES)
def test_what_the_ends_change(name):
    """Without the file's own source or load part the gain is as the table says."""
    circuit = acsolve.read(CIRCUITS / f"{name}.circuit")
    for item in document(name)["note"]["loading"]:
        source = None if item["from"] is None else tuple(item["from"])
        for end in item["ends"]:
            large, small = ("1e15 ohm", "1e-9 ohm")
            changed = circuit.with_values({end["part"]: large if end["role"] == "load" else small})
            path = changed.path(source, tuple(item["to"]), quantity=source and item["quantity"])
            found = 20 * np.log10(abs(path.response(item["hertz"])))
            for gain, told in zip(found, end["gain_db"], strict=True):
                assert gain < -200 if told is None else np.isclose(gain, told, atol=1e-3)


def test_both_ends_of_a_filter_are_told():
    """Equal resistors at both ends are source and load; a lone one in line is no source."""
    (found,) = document("hydrophone_lowpass")["note"]["loading"]
    assert [(item["part"], item["role"]) for item in found["ends"]] == [
        ("R1", "source"),
        ("R2", "load"),
    ]
    assert np.allclose(np.subtract(found["ends"][0]["gain_db"][0], 0), 0, atol=0.2)
    (found,) = document("level_float")["note"]["loading"]
    assert found["ends"] == []


def matrices(sweep, name):
    """A set over frequency, shape (f, 2, 2)."""
    found = sweep["parameters"][name]
    both = np.array(found["real"], dtype=float) + 1j * np.array(found["imag"], dtype=float)
    return np.moveaxis(both, -1, 0)


def test_two_port_tables_agree_with_each_other():
    """s from ABCD by the published formulas, det ABCD = 1, loss from s21; all shown in the page."""
    made = acsolve.parse(
        "in -- R1 = 10 ohm -- m -- L1 = 1 uH -- out\nm -- C1 = 1 nF -- gnd\n"
        "ask two-port from in to out reference 50 ohm over 10 kHz .. 100 MHz\n"
    ).note()
    (answer,) = json.loads(made.json())["answers"]
    swept = answer["sweep"]
    abcd, s = matrices(swept, "abcd"), matrices(swept, "s")
    assert swept["hertz"][0] == 1e4
    assert swept["hertz"][-1] == 1e8
    assert np.allclose(np.linalg.det(abcd), 1)
    a, b, c, d = (abcd[:, i, j] for i in (0, 1) for j in (0, 1))
    below = a + b / 50 + c * 50 + d
    assert np.allclose(s[:, 1, 0], 2 / below)
    assert np.allclose(s[:, 0, 0], (a + b / 50 - c * 50 - d) / below)
    loss = -20 * np.log10(abs(s[:, 1, 0]))
    assert np.allclose(swept["insertion"]["insertion_loss_db"], loss)
    omega = 2j * pi * np.array(swept["hertz"])
    assert np.allclose(c, omega * 1e-9)
    assert np.allclose(b, 10 + omega * 1e-6 * (1 + 10 * omega * 1e-9))
    text = Page(made.html()).text.replace("\u00a0", " ")
    for value in [*loss, *20 * np.log10(abs(s.ravel()))]:
        assert decibels(float(value)).replace("\u00a0", " ") in text


def test_two_ports_over_their_own_corners():
    """Where no band is asked, the table spans the corners; constants and symbols need none."""
    text = "in -- R1 = 10 ohm -- out -- C1 = 1 nF -- gnd\nask two-port from in to out\n"
    (answer,) = json.loads(acsolve.parse(text).note().json())["answers"]
    low, high = answer["sweep"]["hertz"][0], answer["sweep"]["hertz"][-1]
    assert low < 1 / (2 * pi * 10 * 1e-9) < high
    for other in (text.replace("C1 = 1 nF", "R2 = 1k"), text.replace(" = 1 nF", "")):
        (answer,) = json.loads(acsolve.parse(other).note().json())["answers"]
        assert answer["sweep"] is None


@pytest.mark.parametrize("name", NAMES)
def test_the_pages_show_these_numbers(name):
    """Frequencies, gains and cutoffs of the JSON stand in the page as it spells them."""
    text = Page(note(name).html()).text.replace("\u00a0", " ")
    for swept in answers(name, "sweep"):
        ohmic = swept["quantity"] in ("impedance", "transimpedance")
        constant = len({f"{gain:.9f}" for gain in swept["gain_db"] if gain is not None}) < 2
        for hertz, gain in zip(swept["hertz"], swept["gain_db"], strict=True):
            assert constant or quantity(hertz, "Hz").replace("\u00a0", " ") in text
            if gain is not None and not ohmic:
                assert decibels(gain).replace("\u00a0", " ") in text
    for answer in answers(name, "cutoff"):
        for item in answer["cutoffs"]:
            if item["hertz"] is not None:
                told = [quantity(item["hertz"], "Hz", digits) for digits in range(5, 13)]
                assert any(found.replace("\u00a0", " ") in text for found in told)


@pytest.mark.parametrize("name", NAMES)
def test_parts_are_the_circuits(name):
    """Values in the JSON, put into a circuit again, give the same response."""
    found = document(name)["note"]["parts"]
    circuit = acsolve.read(CIRCUITS / f"{name}.circuit")
    assert [part["name"] for part in found] == list(circuit.parts)
    plain = {
        part["name"]: part["values"]["value"]
        for part in found
        if part["kind"] in ("resistor", "capacitor", "inductor")
        and part["values"].get("value") is not None
    }
    again = circuit.with_values({key: f"{value!r}" for key, value in list(plain.items())[:5]})
    for swept in answers(name, "sweep")[:1]:
        into = "into" in swept
        if into:
            path = again.looking_into(tuple(swept["into"]))
        else:
            path = again.path(
                None if swept["from"] is None else tuple(swept["from"]),
                tuple(swept["to"]),
                quantity=None if swept["from"] is None else swept["quantity"],
            )
        fresh = path.response(swept["hertz"])
        for value, real, imag in zip(fresh, swept["real"], swept["imag"], strict=True):
            if real == imag == 0:  # a null that its frequency in doubles misses by a rounding
                assert abs(value) < 1e-12
            elif real is not None:
                assert close(complex(value), complex(real, imag), 1e-9)


@pytest.mark.parametrize("name", ["level_lowpass", "hydrophone_lowpass"])
def test_the_step_ends_at_the_gain_at_zero_hertz(name):
    """Final value and figures: the limit theorem, and the curve at the times that are told."""
    for answer in answers(name, "step"):
        path = acsolve.read(CIRCUITS / f"{name}.circuit").path(
            tuple(answer["from"]), tuple(answer["to"])
        )
        assert close(answer["final_value"], complex(path.response(0.0)).real, 1e-9)
        low, half, high = answer["levels_s"]
        found = path.step().at([low, half, high]) / answer["final_value"]
        assert np.allclose(found, [0.1, 0.5, 0.9], atol=1e-9)
        assert close(answer["rise_s"], high - low, 1e-9)


@pytest.mark.parametrize("name", NAMES)
def test_checks_are_small(name):
    """Every closed form agrees with the independent solution."""
    for answer in document(name)["answers"]:
        if answer.get("checked"):
            assert answer["checked"]["max_relative_error"] < 1e-12
