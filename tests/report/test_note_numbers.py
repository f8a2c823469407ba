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


@pytest.mark.parametrize("name", NAMES)
def test_loading_is_what_a_load_does(name):
    """Z_out is what a load finds: with the load really connected, the gain is as the law says."""
    circuit = acsolve.read(CIRCUITS / f"{name}.circuit")
    for item in document(name)["note"]["loading"]:
        if item["z_out"] is None:
            continue
        hertz = item["hertz"][len(item["hertz"]) // 2]
        z_out = complex(*item["z_out"][len(item["hertz"]) // 2])
        load = 1234.5
        source, target = (tuple(item[key]) for key in ("from", "to"))
        text = circuit.netlist.source.text.split("\nask ")[0]
        joined = acsolve.parse(f"{text}\n{target[0]} -- Rprobe = {load} ohm -- {target[1]}\n")
        bare = circuit.path(source, target).response(hertz)
        loaded = joined.path(source, target).response(hertz)
        assert close(complex(loaded), complex(bare * load / (load + z_out)), 1e-6)


@pytest.mark.parametrize("name", NAMES)
def test_the_pages_show_these_numbers(name):
    """Frequencies, gains and cutoffs of the JSON stand in the page as it spells them."""
    text = Page(note(name).html()).text.replace("\u00a0", " ")
    for swept in answers(name, "sweep"):
        ohmic = swept["quantity"] in ("impedance", "transimpedance")
        for hertz, gain in zip(swept["hertz"], swept["gain_db"], strict=True):
            assert quantity(hertz, "Hz").replace("\u00a0", " ") in text
            if gain is not None and not ohmic:
                assert decibels(gain).replace("\u00a0", " ") in text
    for answer in answers(name, "cutoff"):
        for item in answer["cutoffs"]:
            if item["hertz"] is not None:
                assert quantity(item["hertz"], "Hz", 5).replace("\u00a0", " ") in text


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
            if real is not None:
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
