"""Columns and broken lines."""

from __future__ import annotations

from hypothesis import given
from hypothesis import strategies as st

from acsolve.report.table import aligned, labelled, wrapped

WORDS = st.lists(st.text("abR1*+-/^() ", min_size=1, max_size=12), min_size=1, max_size=30)


@given(WORDS, st.integers(10, 60))
def test_wrapping_loses_nothing(words, width):
    """Joined again, the lines are the text, blanks at the breaks apart."""
    text = " ".join(words)
    assert "".join("".join(wrapped(text, width)).split()) == "".join(text.split())


@given(st.lists(st.text("abR1", min_size=1, max_size=8), min_size=1, max_size=30))
def test_wrapped_sums_are_narrow(terms):
    """No line of a sum of short terms is wider than asked."""
    assert max(map(len, wrapped(" + ".join(terms), 20))) <= 20


def test_signs_stay_with_their_term():
    """A line never ends with a sign."""
    lines = wrapped("alpha + beta - gamma + delta", 10)
    assert lines == ["alpha", "+ beta", "- gamma", "+ delta"]


def test_long_products_break_after_their_signs():
    """A product wider than the line is broken after a sign, never inside `**`."""
    assert wrapped("R1*R2*R3**2", 6) == ["R1*R2*", "R3**2"]


@given(st.lists(st.lists(st.text("ab1", max_size=5), min_size=3, max_size=3), max_size=6))
def test_columns_line_up(rows):
    """Right-aligned cells of a column end in the same place."""
    lines = aligned(rows, sides=("right", "right", "right"))
    widths = [max(len(row[k]) for row in rows) for k in range(3)] if rows else []
    for row, line in zip(rows, lines, strict=True):
        assert (
            line
            == "  ".join(
                cell.rjust(width) for cell, width in zip(row, widths, strict=True)
            ).rstrip()
        )


def test_labels_keep_long_texts_in_their_column():
    """A text longer than its column goes on below itself."""
    assert labelled([("key", "one two three")], width=12) == ["key  one two", "     three"]
