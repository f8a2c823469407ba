"""Ticks and labels of pictures."""

from __future__ import annotations

from math import isclose, log10

import pytest
from hypothesis import given
from hypothesis import strategies as st

from acsolve.report.axes import degree_steps, even_ticks, log_ticks, tick_text
from acsolve.report.plot import label_rows


@given(st.floats(-12, 12), st.floats(0.05, 20))
def test_log_ticks_are_few_rising_and_inside(exponent, decades):
    """A logarithmic axis has two to a dozen rising ticks, none outside it."""
    low = 10.0**exponent
    high = low * 10.0**decades
    ticks = log_ticks(low, high)
    assert 2 <= len(ticks) <= 12
    assert ticks == sorted(set(ticks))
    assert all(low * (1 - 1e-6) <= tick <= high * (1 + 1e-6) for tick in ticks)


@given(st.integers(-12, 12), st.integers(1, 8))
def test_whole_decades_are_ticks(low, decades):
    """Over a few decades every decade has its tick."""
    ticks = log_ticks(10.0**low, 10.0 ** (low + decades))
    for power in range(low, low + decades + 1):
        assert any(isclose(log10(tick), power, abs_tol=1e-9) for tick in ticks)


@given(st.floats(-1e6, 1e6), st.floats(1e-3, 1e6))
def test_even_ticks_are_round(low, span):
    """Ticks of an even axis are one step of 1, 2 or 5 apart."""
    ticks = even_ticks(low, low + span)
    assert 2 <= len(ticks) <= 7
    step = ticks[1] - ticks[0]
    assert any(
        isclose(step / 10 ** round(log10(step / digit)), digit, rel_tol=1e-3) for digit in (1, 2, 5)
    )


@given(st.floats(-1e5, 1e5), st.floats(0, 1e5))
def test_phase_ticks_enclose_the_curve(low, span):
    """A phase axis has at most eight ticks at multiples of 5°, around the whole curve."""
    ticks = degree_steps(low, low + span)
    assert 2 <= len(ticks) <= 8
    assert ticks[0] <= low + 1e-2
    assert ticks[-1] >= low + span - 1e-2
    assert all(tick % 5 == 0 for tick in ticks)


@pytest.mark.parametrize(
    ("value", "unit", "shown"),
    [
        (1e4, "Hz", "10 kHz"),
        (4.7e-6, "s", "4.7 µs"),
        (2.2e6, "ohm", "2.2 MΩ"),
        (50.0, "ohm", "50 Ω"),
        (-20.0, "", "−20"),
        (0.0, "Hz", "0 Hz"),
    ],
)
def test_tick_texts(value, unit, shown):
    """Ticks carry prefix and unit in the signs of print."""
    assert tick_text(value, unit) == shown


@given(st.lists(st.floats(0, 1), max_size=8).map(sorted))
def test_numbers_at_marks_never_overlap(shares):
    """Numbers of one row stand apart, on either side of their lines."""
    rows, sides = label_rows(shares)
    spans = [
        (row, share - 0.15, share) if left else (row, share, share + 0.15)
        for share, row, left in zip(shares, rows, sides, strict=True)
    ]
    for place, (row, start, end) in enumerate(spans):
        for other, first, last in spans[:place]:
            assert row != other or end <= first or start >= last
