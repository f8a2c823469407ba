"""Figures of notes derived from a closed form: recomputed from the coefficients in the JSON."""

from __future__ import annotations

from itertools import pairwise
from math import inf, log10, pi

import numpy as np
import pytest
import sympy

from tests.report.note_reader import NAMES
from tests.report.test_note_numbers import answers, close, document

RATIOS = ("transfer", "impedance")
_MOST = 14  # order up to which doubles find roots from coefficients


def exact(text):
    """A text of the JSON as an exact number or expression."""
    return sympy.sympify(text, locals={"s": sympy.Symbol("s")})


def polynomials(answer):
    """Numerator and denominator in s with numbers in them; None where there are none."""
    if answer["numerator"] is None or not (answer["poles"] or answer["zeros"]):
        return None
    parts = [[exact(text) for text in answer[key]] for key in ("numerator", "denominator")]
    if any(value.free_symbols for part in parts for value in part):
        return None
    return [[complex(sympy.N(value, 30)) for value in part] for part in parts]


def numeric(name):
    """Each closed form of a note with its polynomials."""
    found = [(item, polynomials(item)) for kind in RATIOS for item in answers(name, kind)]
    return [(item, parts) for item, parts in found if parts is not None]


def matching(name, answer):
    """The polynomials of the closed form that a cutoff, sweep or step belongs to."""
    keys = [key for key in ("from", "to", "into", "quantity") if key in answer]
    for item, parts in numeric(name):
        if all(item.get(key) == answer[key] for key in keys):
            return parts
    return None


@pytest.mark.parametrize("name", NAMES)
def test_roots_are_those_of_the_coefficients(name):
    """Products over the roots give the polynomials back; each record follows from its value."""
    for answer, (top, bottom) in numeric(name):
        if max(len(top), len(bottom)) > _MOST:
            continue
        for key, part in (("zeros", top), ("poles", bottom)):
            found = np.array([complex(*value) for value in answer[key]])
            assert len(found) == len(part) - 1
            for s in (0.3 + 0.4j, 2.0 - 1.1j):  # times the size of the roots
                size = max(abs(found), default=1.0) or 1.0
                expected = np.polyval(part, s * size) / part[0]
                assert close(complex(np.prod(s * size - found)), complex(expected), 1e-9)
        for key in ("pole_records", "zero_records", "hidden_modes"):
            for item in answer[key] or []:
                value = complex(*item["value"])
                assert close(item["w0"], abs(value), 1e-12)
                if item["q"] is not None:
                    assert close(item["q"], abs(value) / (-2 * value.real), 1e-9)
                if item["damping_ratio"] is not None:
                    assert close(item["damping_ratio"], -value.real / abs(value), 1e-9)
                if item["time_constant_s"] is not None:
                    assert close(item["time_constant_s"], -1 / value.real, 1e-9)


@pytest.mark.parametrize("name", NAMES)
def test_orders_limits_and_half_planes(name):
    """What holds at both ends follows from the outermost coefficients, stability from the poles."""
    for answer, (top, bottom) in numeric(name):
        assert answer["order"] == max(len(top), len(bottom)) - 1
        first, last = (top[0], bottom[0]), (top[-1], bottom[-1])
        if len(top) != len(bottom):
            first = (0, 1) if len(top) < len(bottom) else (1, 0)
        for key, (low, high) in (("at_zero", last), ("at_infinity", first)):
            if not low and not high:  # 0/0: what is left after cancelling decides
                continue
            told = exact(answer[key])
            if not high:
                assert not told.is_finite
            else:
                assert close(complex(sympy.N(told, 30)), low / high, 1e-12)
        counted = answer["stability"]
        if counted["left"] is not None:
            assert counted["left"] + counted["on_axis"] + counted["right"] == counted["order"]
            poles = [complex(*value) for value in answer["poles"]]
            hidden = [complex(*x["value"]) for x in answer["hidden_modes"] for _ in range(x["multiplicity"])]  # fmt: skip
            right = sum(value.real > 1e-9 * abs(value) for value in [*poles, *hidden])
            assert counted["right"] == right


@pytest.mark.parametrize("name", NAMES)
def test_delays_follow_from_the_coefficients(name):
    """Group delay is -Im(H'/H) over s, phase delay -phase/ω."""
    for swept in answers(name, "sweep"):
        parts = matching(name, swept)
        for place, hertz in enumerate(swept["hertz"]):
            phase, late = swept["phase_deg"][place], swept["phase_delay_s"][place]
            if phase is not None and late is not None:
                assert close(late, -phase / 360 / hertz, 1e-9) or abs(phase) < 1e-9
            group = swept["group_delay_s"][place]
            if parts is None or group is None or max(map(len, parts)) > _MOST:
                continue
            s = 2j * pi * hertz
            if not all(np.polyval(part, s) for part in parts):
                continue  # at a null the response has no phase
            slopes = [np.polyval(np.polyder(part), s) / np.polyval(part, s) for part in parts]
            scale = sum(map(abs, slopes))
            assert abs(group + (slopes[0] - slopes[1]).real) < 1e-8 * scale + 1e-300


@pytest.mark.parametrize("name", NAMES)
def test_bands_lie_between_their_edges(name):
    """Width, geometric centre and Q of each band; its edges are cutoffs."""
    for answer in answers(name, "cutoff"):
        crossings = [item["hertz"] for item in answer["cutoffs"]]
        for band in answer["bands"]:
            low, high = band["low_hertz"], band["high_hertz"]
            assert {low, high} <= set(crossings)
            assert close(band["bandwidth_hertz"], high - low, 1e-9)
            assert close(band["centre_hertz"], (low * high) ** 0.5, 1e-9)
            assert close(band["q"], (low * high) ** 0.5 / (high - low), 1e-9)
            assert low <= band["extremum_hertz"] <= high


@pytest.mark.parametrize("name", NAMES)
def test_corners_and_slopes_are_those_of_the_roots(name):
    """Each corner is a root's size; the slopes add up from one end to the other."""
    for answer in answers(name, "cutoff"):
        parts = matching(name, answer)
        if parts is None or answer.get("corners") is None or max(map(len, parts)) > _MOST:
            continue
        top, bottom = (np.trim_zeros(part, "b") for part in parts)
        low = (len(parts[0]) - len(top)) - (len(parts[1]) - len(bottom))
        ends = [20 * low, 20 * (len(parts[0]) - len(parts[1]))]
        assert answer["end_slopes_db_per_decade"] == ends
        slopes = answer["slopes_db_per_decade"]
        changes = [item["change_db_per_decade"] for item in answer["corners"]]
        assert [b - a for a, b in pairwise(slopes)] == changes
        roots = np.abs(np.concatenate([np.roots(top), np.roots(bottom)]))
        for item in answer["corners"]:
            assert close(item["rad_per_s"], 2 * pi * item["hertz"], 1e-12)
            assert np.min(np.abs(roots / item["rad_per_s"] - 1)) < 1e-3


def modes(answer, seconds):
    """The sum of polynomials times exponentials that a step answer lists."""
    total = np.zeros(len(seconds), dtype=complex)
    for mode in answer["modes"]:
        rate = complex(*mode["rate"])
        for power, pair in enumerate(mode["weights"]):
            term = complex(*pair) * seconds**power / float(sympy.factorial(power))
            total += term * np.exp(rate * seconds) * (2 if rate.imag else 1)
    return total.real


@pytest.mark.parametrize("name", [name for name in NAMES if answers(name, "step")])
def test_step_figures_follow_from_the_modes(name):
    """The curve is the sum of the modes, and first value, end and figures are read off it."""
    for answer in answers(name, "step"):
        seconds, value = (np.array(answer[key], dtype=float) for key in ("seconds", "value"))
        curve = modes(answer, seconds)
        size = max(abs(value))
        assert np.allclose(curve[1:], value[1:], atol=1e-9 * size)
        top, bottom = matching(name, answer)
        ends = top[-1] / bottom[-1], top[0] / bottom[0] if len(top) == len(bottom) else 0.0
        assert abs(answer["final_value"] - ends[0]) < 1e-9 * size
        assert abs(answer["initial_value"] - ends[1]) < 1e-9 * size
        if answer["settling_s"] is not None:
            late = np.linspace(answer["settling_s"], 3 * answer["settling_s"], 4001)[1:]
            off = abs(modes(answer, late) / answer["final_value"] - 1)
            assert off.max() < answer["settling_band"] * (1 + 1e-6)
        if answer["overshoot"]:
            peak = modes(answer, np.array([answer["peak_s"]]))[0]
            assert close(peak / answer["final_value"] - 1, answer["overshoot"], 1e-8)
            assert value.max() <= peak * (1 + 1e-9)
        found = answer["moments"]
        series = [top[-1] / bottom[-1], 0.0]  # of H over s around zero
        slopes = [(part[-2] if len(part) > 1 else 0.0) / part[-1] for part in (top, bottom)]
        series[1] = slopes[1] - slopes[0]
        assert close(found["raw"][0], complex(series[0]).real, 1e-9)
        assert close(found["delay_s"], complex(series[1]).real, 1e-9)


def test_tolerances_are_the_files():
    """Tolerances in the JSON are those of the file: ±10 % and +80 % −20 %."""
    parts = {item["name"]: item for item in document("horn_preamp")["note"]["parts"]}
    assert parts["Cin"]["tolerances"]["value"] == [-0.1, 0.1]
    assert parts["Ce"]["tolerances"]["value"] == [-0.2, 0.8]
    assert parts["Ce"]["values"]["value"] == pytest.approx(47e-6, rel=1e-15)
    assert log10(parts["Cpi"]["values"]["value"]) < -10
    assert all(abs(value) < inf for item in parts.values() for value in item["values"].values())
