"""Circuits written down in code."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest

from acsolve import AnalysisError, Draft

DRAFT = Draft("Sluice").chain("in", "R1", "out").chain("out", "C1", "gnd")


@pytest.mark.parametrize("title", ['the "old" gate', "a \\ b", 'ends in \\"'])
def test_titles_are_kept(title):
    """A title comes back as it was given, quotes and backslashes too."""
    assert Draft(title, DRAFT.lines).circuit().title == title


@pytest.mark.parametrize("number", [np.float64(0.1), 0.1, Fraction(1, 10), "0.1"])
def test_numbers(number):
    """A number of any kind is the value that it prints as."""
    assert DRAFT.values(R1=number).circuit() == DRAFT.values(R1="0.1").circuit()


@pytest.mark.parametrize("call", [
    lambda: DRAFT.chain("in", 5, "out"),
    DRAFT.chain,
    lambda: DRAFT.chain("in", "R2\nR3", "out"),
    lambda: DRAFT.values(R1=None),
    lambda: DRAFT.values(R1=np.nan),
    lambda: DRAFT.values(R1="1k\nR2 = 3"),
    lambda: DRAFT.values({1: "1k"}),
    lambda: DRAFT.part("U1", "opamp", out=None),
    lambda: DRAFT.quantity("fc", float("inf")),
    lambda: DRAFT.couple("L1", 2, coefficient=0.5),
    lambda: DRAFT.statement("R1 = 1k\n"),
    lambda: DRAFT.statement(None),
    lambda: Draft("two\nlines"),
    lambda: Draft(5),
])  # fmt: skip
def test_what_is_no_item_is_refused(call):
    """What is no text of one line and no finite number is refused at once."""
    with pytest.raises(AnalysisError) as caught:
        call()
    assert caught.value.code == "option.value"
    assert caught.value.hint
