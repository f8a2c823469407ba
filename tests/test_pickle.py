"""Everything the door gives can be sent to another process and back."""

from __future__ import annotations

import multiprocessing
import pickle
from concurrent.futures import ProcessPoolExecutor
from functools import cache

import numpy as np
import pytest

import acsolve

TEXT = """
in -- R1 = 1 kohm -- out
out -- C1 = 1 uF -- gnd
out -- L1 = 1 mH -- gnd
"""
BAND = "10 Hz .. 1 MHz"


@cache
def circuit() -> acsolve.Circuit:
    """A resonance."""
    return acsolve.parse(TEXT)


def path() -> acsolve.Path:
    """Its transfer."""
    return circuit().path("in", "out")


def ports() -> acsolve.TwoPort:
    """Both of its ends."""
    return circuit().two_port("in", "out", reference=50)


def simplified():
    """The transfer without a part that hardly counts."""
    return path().simplify("10 Hz .. 100 Hz")


ANSWERS = {
    "circuit": circuit,
    "path": path,
    "looking into": lambda: circuit().looking_into("out"),
    "family": lambda: circuit().family("R1 = 1k .. 10k"),
    "closed form": lambda: path().closed_form(),
    "over symbols": lambda: path().closed_form(symbolic=True),
    "named steps": lambda: path().nested_form(symbolic=True),
    "transfer": lambda: path().transfer(),
    "poles": lambda: path().poles(digits=20),
    "cutoffs": lambda: path().cutoffs(),
    "cutoffs over symbols": lambda: path().cutoffs(symbolic=True),
    "value": lambda: path().value_for("R1", cutoff="9 kHz"),
    "step": lambda: path().step(),
    "step over symbols": lambda: path().step(symbolic=True),
    "impulse": lambda: path().step(drive="impulse"),
    "sine": lambda: path().step(drive="1 kHz"),
    "sine at a mode": lambda: (
        acsolve.parse("in -- L1 = 1 H -- out\nout -- C1 = 1 F -- gnd")
        .path("in", "out")
        .step(10, drive=0.1591549430918953)
    ),
    "burst": lambda: path().step(drive=("1 kHz", 5)),
    "values with pi": lambda: circuit().with_values(C1="1/(2*pi) * 1 uF").path("in", "out").step(),
    "steady": lambda: path().sine("1 kHz"),
    "sweep": lambda: path().sweep(BAND),
    "placed": lambda: path().sweep(BAND, points="auto"),
    "verification": lambda: path().verify(path().sweep(BAND)),
    "approximation": simplified,
    "check": lambda: circuit().check(),
    "equations": lambda: circuit().equations(),
    "two-port": ports,
    "laws": lambda: ports().laws,
    "insertion": lambda: ports().insertion("10 Hz .. 10 kHz", 50, "1 Mohm"),
    "data": lambda: ports().data([10.0, 100.0]),
    "equivalent": lambda: circuit().equivalent("out", source="in"),
    "drawing": lambda: circuit().drawing(),
    "note": lambda: circuit().note(),
}


@pytest.mark.parametrize("name", ANSWERS)
def test_answers_pickle(name):
    """There and back, of the same type, with the same words."""
    made = ANSWERS[name]()
    again = pickle.loads(pickle.dumps(made))  # noqa: S301 - our own bytes
    assert type(again) is type(made)
    assert repr(again) == repr(made)


@pytest.mark.parametrize("name", ["step", "impulse", "sine", "sine at a mode", "burst"])
def test_a_response_that_came_back_goes_on_answering(name):
    """Its exponentials are worked out again where they are asked, to the last bit."""
    made = ANSWERS[name]()
    again = pickle.loads(pickle.dumps(made))  # noqa: S301 - our own bytes
    times = np.linspace(0, 3 * made.seconds[-1], 77)
    assert np.array_equal(made.at(times), again.at(times))
    assert again.modes == made.modes
    assert again.figures == made.figures


def settled(resistance: float) -> acsolve.StepAnswer:
    """What a worker does."""
    return circuit().with_values(R1=resistance).path("in", "out").step()


def test_answers_come_back_from_workers():
    """A pool of processes answers as this one does."""
    values = [100.0, 1000.0, 1e4]
    fresh = multiprocessing.get_context("spawn")
    with ProcessPoolExecutor(1, mp_context=fresh) as pool:
        found = list(pool.map(settled, values))
    for value, answer in zip(values, found, strict=True):
        here = settled(value)
        assert answer.modes == here.modes
        assert np.array_equal(answer.value, here.value)


def test_a_response_is_short_in_words():
    """No curve in the words of an answer."""
    words = repr(circuit().looking_into("out").step())
    assert words.startswith("StepAnswer(step")
    assert len(words) < 200
