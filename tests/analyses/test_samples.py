"""Responses over arrays of values against one circuit at a time, and the laws of arrays."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import assume, event, given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.analyses import samples as module
from acsolve.analyses.question import Ask, impedance_ask, transfer_ask
from acsolve.analyses.samples import responses, responses_over
from acsolve.analyses.sweep import sweep
from acsolve.circuit.expression import Name, Number, multiply, number
from acsolve.circuit.netlist import Netlist, with_values
from acsolve.equations.result import Status
from acsolve.errors import AcsolveError, AnalysisError, EquationError
from tests.strategies import (
    PASSIVE,
    QUANTITIES,
    C,
    L,
    R,
    any_lumped,
    connected,
    network,
    pairs,
    part,
    quantity,
)

WAYS = ("closed form", "elimination")
HERTZ = np.geomspace(1e-3, 1e3, 11)
FILTER = """
in -- R1 -- out
out -- C1 -- gnd
R1 = 1 kohm
C1 = 1 uF
"""


def one_by_one(netlist: Netlist, ask: Ask, hertz, values) -> tuple[np.ndarray, np.ndarray]:
    """The response of each sample as a sweep gives it, and its estimated error."""
    answers, errors = [], []
    for row in zip(*values.values(), strict=True):
        known = dict(netlist.values())
        numbers = {
            name: replace(known[name], expression=Number(Fraction(float(item))))
            for name, item in zip(values, row, strict=True)
        }
        found = sweep(with_values(netlist, numbers), ask, hertz)
        answers.append(found.value)
        # A point that a sweep had to solve again is ill-conditioned: the documented limit holds.
        again = (found.status == Status.RE_SOLVED) | (found.status == Status.LIMIT)
        errors.append(np.where(again, 1e-9, found.error))
        errors[-1][found.status == Status.UNDEFINED] = np.nan
    return np.array(answers), np.array(errors)


def assert_agree(found, expected, errors, *, within: float = 1e-12) -> None:
    """Equal within 1e-12 and what a sweep says of itself; zeros and poles are the same."""
    finite = np.isfinite(expected) & np.isfinite(errors)
    assert np.array_equal(
        np.isinf(found)[finite | np.isinf(expected)],
        np.isinf(expected)[finite | np.isinf(expected)],
    )
    gap = np.abs(found - expected)[finite]
    assert np.all(gap <= (within + 4 * errors[finite]) * np.abs(expected[finite]))


@st.composite
def varied(draw, netlist: Netlist) -> dict[str, np.ndarray]:
    """A few of the values, four samples each."""
    names = [name for name, value in netlist.values() if isinstance(value.expression, Number)]
    assume(names)
    chosen = draw(st.lists(st.sampled_from(names), min_size=1, max_size=4, unique=True))
    size = st.floats(0.2, 20)
    return {name: np.array([draw(size) for _ in range(4)]) for name in chosen}


def agree(data, netlist: Netlist, way: str) -> None:
    """The law of this file for one network."""
    pair = data.draw(pairs(netlist))
    kind = data.draw(st.sampled_from(QUANTITIES))
    into = data.draw(pairs(netlist))
    values = data.draw(varied(netlist))
    try:
        if kind == "impedance":
            ask = impedance_ask(netlist, pair)
        else:
            assume(pair != into)
            ask = transfer_ask(netlist, pair, into, quantity=kind)
        expected, errors = one_by_one(netlist, ask, HERTZ, values)
    except AcsolveError:
        event("no answer")
        return
    event(kind)
    # 1 - k² of a varied coupling cancels; such points are eliminated, with a sweep's limit.
    within = 1e-9 if any(name.startswith("k(") for name in values) else 1e-12
    found = responses_over(netlist, ask, HERTZ, values, way=way)
    assert_agree(found, expected, errors, within=within)


@pytest.mark.parametrize("way", WAYS)
@settings(max_examples=25)
@given(data=st.data())
def test_passive_networks_one_by_one(way, data):
    """Networks of R, L and C answer all samples as they answer each alone."""
    agree(data, data.draw(connected(tree=PASSIVE, extra=PASSIVE)), way)


@pytest.mark.parametrize("way", WAYS)
@settings(max_examples=25)
@given(data=st.data())
def test_any_networks_one_by_one(way, data):
    """The same with every kind of part, attributes and couplings varied too."""
    agree(data, data.draw(any_lumped(symbols=False)), way)


@pytest.mark.parametrize("way", WAYS)
def test_a_long_ladder_by_plain_elimination(way):
    """Where there are more frequencies than are checked, plain elimination is as good."""
    parts = []
    for k in range(1, 6):
        parts += [
            R(f"R{k}", f"n[{k - 1}]", f"n[{k}]", 1000 + k),
            C(f"C{k}", f"n[{k}]", "gnd", Fraction(1, 10**9)),
        ]
    netlist = network(*parts)
    ask = transfer_ask(netlist, ("n[0]", "gnd"), ("n[5]", "gnd"))
    hertz = np.geomspace(1e2, 1e8, 40)
    random = np.random.default_rng(3)
    values = {f"R{k}": 1000 * random.uniform(0.5, 2, 50) for k in range(1, 6)}
    expected, errors = one_by_one(netlist, ask, hertz, values)
    assert_agree(responses_over(netlist, ask, hertz, values, way=way), expected, errors)


def test_frequency_is_the_last_axis():
    """The shape is (*samples, *hertz.shape), and each sample's response lies together."""
    path = acsolve.parse(FILTER).path("in", "out")
    hertz = np.geomspace(1, 1e5, 6).reshape(2, 3)
    resistance, capacitance = np.array([[1e3], [2e3]]), np.array([1e-6, 2e-6, 3e-6, 4e-6])
    found = path.response(hertz, values={"R1": resistance, "C1": capacitance})
    assert found.shape == (2, 4, 2, 3)
    s = 2j * np.pi * hertz
    expected = 1 / (1 + (resistance * capacitance)[..., np.newaxis, np.newaxis] * s)
    np.testing.assert_allclose(found, expected, rtol=1e-14)


def test_one_number_adds_no_axis():
    """A plain number is a sample of no axis: the shape of the frequencies is left."""
    path = acsolve.parse(FILTER).path("in", "out")
    found = path.response([10.0, 100.0], values={"R1": 2e3})
    same = acsolve.parse(FILTER).with_values(R1=2000).path("in", "out").response([10.0, 100.0])
    np.testing.assert_allclose(found, same, rtol=1e-14)
    assert path.response(10.0, values={"R1": 2e3}).shape == ()


@pytest.mark.parametrize("shape", [(0,), (3, 0)])
def test_no_samples_no_answers(shape):
    """Empty arrays give empty answers of the right shape."""
    path = acsolve.parse(FILTER).path("in", "out")
    assert path.response([1.0, 2.0], values={"R1": np.empty(shape)}).shape == (*shape, 2)


@pytest.mark.parametrize("way", WAYS)
def test_a_formula_follows(way):
    """R2 = 2*R1 is twice every sample of R1."""
    netlist = network(
        R("R1", "in", "out", 1000),
        R("R2", "out", "gnd", multiply(number(2), Name("R1"))),
        C("C1", "out", "gnd", Fraction(1, 10**6)),
    )
    ask = transfer_ask(netlist, ("in", "gnd"), ("out", "gnd"))
    sizes = np.array([1e2, 1e3, 1e4])
    found = responses_over(netlist, ask, HERTZ, {"R1": sizes}, way=way)
    admittance = 1 / sizes[:, np.newaxis]
    expected = admittance / (1.5 * admittance + 2j * np.pi * HERTZ * 1e-6)
    np.testing.assert_allclose(found, expected, rtol=1e-13)


@pytest.mark.parametrize("way", WAYS)
def test_a_named_quantity_moves_what_is_made_of_it(way):
    """Varying a quantity varies every part whose value it enters."""
    netlist = network(
        R("R1", "in", "out", Name("Z")),
        L("L1", "out", "gnd", Name("Z")),
        quantities=quantity("Z", number(3)),
    )
    ask = transfer_ask(netlist, ("in", "gnd"), ("out", "gnd"))
    found = responses_over(netlist, ask, HERTZ, {"Z": np.array([1.0, 50.0])}, way=way)
    s = 2j * np.pi * HERTZ
    np.testing.assert_allclose(found, np.array([s / (1 + s)] * 2), rtol=1e-13)


@pytest.mark.parametrize("way", WAYS)
def test_zero_ohm_among_the_samples(way):
    """A resistance of zero is a short, also where the file gives another value."""
    netlist = network(R("R1", "in", "out", 1), R("R2", "out", "gnd", 1), C("C1", "in", "out", 1))
    ask = transfer_ask(netlist, ("in", "gnd"), ("out", "gnd"))
    found = responses_over(
        netlist, ask, np.array([0.0, 1.0]), {"R1": np.array([1.0, 0.0])}, way=way
    )
    np.testing.assert_allclose(found[:, 0], [0.5, 1.0], rtol=1e-13)
    np.testing.assert_allclose(found[1], [1.0, 1.0], rtol=1e-13)


@pytest.mark.parametrize("way", WAYS)
def test_a_file_value_of_zero_is_not_held(way):
    """A part that is a short in the file is none where its samples are not zero."""
    netlist = network(R("R1", "in", "out", 0), R("R2", "out", "gnd", 1))
    ask = transfer_ask(netlist, ("in", "gnd"), ("out", "gnd"))
    found = responses_over(
        netlist, ask, np.array([1.0]), {"R1": np.array([0.0, 1.0, 3.0])}, way=way
    )
    np.testing.assert_allclose(found[:, 0], [1, 0.5, 0.25], rtol=1e-13)


@pytest.mark.parametrize("way", WAYS)
def test_a_pole_and_a_zero_on_the_axis(way):
    """A lossless resonance at one sample and frequency is infinite there, a notch is zero."""
    netlist = network(
        L("L1", "in", "gnd", 1),
        C("C1", "in", "gnd", 1),
        R("R1", "in", "out", 1),
        L("L2", "out", "x", 1),
        C("C2", "x", "gnd", 1),
    )
    omega_one = np.array([0.5 / np.pi])
    values = {"C1": np.array([1.0, 2.0]), "C2": np.array([1.0, 1.0])}
    impedance = responses_over(
        netlist, impedance_ask(netlist, ("in", "gnd")), omega_one, values, way=way
    )
    expected, errors = one_by_one(netlist, impedance_ask(netlist, ("in", "gnd")), omega_one, values)
    assert_agree(impedance, expected, errors)


@pytest.mark.parametrize("way", WAYS)
@pytest.mark.parametrize("angles", [[0.0, 90.0, 33.0], [180.0, -90.0, 720.0]])
def test_amplitude_and_angle_of_a_source(way, angles):
    """Own sources answer as phasors, amplitude and angle varied together or alone."""
    source = part("V1", "voltage_source", "gnd", "in", amplitude=2, angle=30)
    netlist = network(source, R("R1", "in", "out", 1), C("C1", "out", "gnd", 1))
    ask = transfer_ask(netlist, None, ("out", "gnd"))
    for names in (("V1",), ("V1.angle",), ("V1", "V1.angle")):
        values = {
            name: np.array(angles) if "." in name else np.array([1.0, 2.0, 3.0]) for name in names
        }
        expected, errors = one_by_one(netlist, ask, HERTZ, values)
        assert_agree(responses_over(netlist, ask, HERTZ, values, way=way), expected, errors)


def test_lines_have_no_closed_form():
    """A line is eliminated, whatever is asked for; its delay may vary."""
    text = "a -- R1 -- in\nin -- T1 -- out\nout -- R2 -- gnd\nT1 : line(z0 = 50 ohm, delay = 1 ns)\nR1 = 10 ohm\nR2 = 75 ohm"
    circuit = acsolve.parse(text)
    path = circuit.path("a", "out")
    hertz, delays = np.geomspace(1e6, 1e9, 15), np.array([1e-9, 2e-9, 5e-9])
    found = path.response(hertz, values={"T1.delay": delays})
    for row, delay in zip(found, delays, strict=True):
        same = circuit.with_values({"T1.delay": float(delay)}).path("a", "out").response(hertz)
        np.testing.assert_allclose(row, same, rtol=1e-12)


def test_deep_attenuation_and_beyond_a_double():
    """Points below 1e-240 are solved with powers of two; past a double they are zero."""
    parts = []
    for k in range(1, 41):
        parts += [
            R(f"R{k}", f"n[{k - 1}]", f"n[{k}]", 1000),
            C(f"C{k}", f"n[{k}]", "gnd", Fraction(1, 10**9)),
        ]
    netlist = network(*parts)
    ask = transfer_ask(netlist, ("n[0]", "gnd"), ("n[40]", "gnd"))
    hertz = np.array([1e3, 1e9, 1e11, 1e13])
    values = {"R1": np.array([500.0, 1000.0])}
    expected, errors = one_by_one(netlist, ask, hertz, values)
    assert 0 < abs(expected[0, 2]) < 1e-200
    assert_agree(responses_over(netlist, ask, hertz, values), expected, errors)


def test_blocks_join_without_a_seam():
    """More samples than a block holds: every one has the response of its own value."""
    path = acsolve.parse(FILTER).path("in", "out")
    sizes, hertz = np.linspace(1e2, 1e4, 10_000), np.geomspace(1, 1e6, 50)
    whole = path.response(hertz, values={"R1": sizes})
    s = 2j * np.pi * hertz
    np.testing.assert_allclose(whole, 1 / (1 + sizes[:, np.newaxis] * 1e-6 * s), rtol=1e-14)


def test_the_cheaper_way_is_taken():
    """Few points are eliminated, many come from the closed form; a large network never does."""
    netlist = acsolve.parse(FILTER).netlist
    ask = transfer_ask(netlist, ("in", "gnd"), ("out", "gnd"))

    def has_form(samples: int, points: int) -> bool:
        hertz, values = np.geomspace(1, 1e5, points), {"R1": np.linspace(1, 2, samples)}
        free = module.with_symbols_for(netlist, values)
        elimination = module._eliminating(free, ask, hertz, values)
        return module._closed(free, ask, hertz, values, elimination, wanted=False) is not None

    assert not has_form(10, 10)
    assert has_form(100_000, 100)


REFUSED = [
    ({"R11": [1.0]}, "question.unknown-name", "there is nothing named R11 in this circuit", "Did you mean R1?"),
    ({"R1": [1.0, np.nan]}, "option.value", "1 of 2 values of R1 are not finite", "Leave these samples out."),
    ({"R1": ["1k"]}, "option.value", "the values of R1 are not real numbers", "Give numbers in SI units, as 4700 or 10e-9."),
    ({"R1": [1j]}, "option.value", "the values of R1 are not real numbers", "Give numbers in SI units, as 4700 or 10e-9."),
    ({"R1": [[1.0], [1.0, 2.0]]}, "option.value", "the values of R1 are not real numbers", "Give numbers in SI units, as 4700 or 10e-9."),
    ({"R1": [True]}, "option.value", "the values of R1 are not real numbers", "Give numbers in SI units, as 4700 or 10e-9."),
    ({"R1": [1.0, 2.0], "C1": [1.0, 2.0, 3.0]}, "option.value", "the shapes of the values do not fit together: R1 (2,), C1 (3,)", "Give arrays of one shape, or of shapes that NumPy broadcasts."),
    ({}, "option.value", "the values to vary are not given as a mapping from names to arrays", 'Write, say, values={"R1": [1e3, 2e3, 5e3]}.'),
    ([1.0], "option.value", "the values to vary are not given as a mapping from names to arrays", 'Write, say, values={"R1": [1e3, 2e3, 5e3]}.'),
]  # fmt: skip


@pytest.mark.parametrize(("values", "code", "message", "hint"), REFUSED)
def test_what_is_refused(values, code, message, hint):
    """Each wrong array is told with its remedy."""
    with pytest.raises(AnalysisError) as caught:
        acsolve.parse(FILTER).path("in", "out").response([1.0], values=values)
    assert (caught.value.code, caught.value.message, caught.value.hint) == (code, message, hint)


def test_too_large_an_answer_is_refused():
    """What would fill the memory is refused before anything is allocated."""
    path = acsolve.parse(FILTER).path("in", "out")
    sizes = np.broadcast_to(np.array([1e3]), (10_000_000,))
    with pytest.raises(
        AnalysisError, match="10,000,000 samples at 1,000 frequencies take 160 GB"
    ) as caught:
        path.response(np.geomspace(1, 2, 1000), values={"R1": sizes})
    assert caught.value.code == "sweep.points"


def test_a_symbol_without_a_value_is_told():
    """What is not varied and has no value is named."""
    path = acsolve.parse("in -- R1 -- out\nout -- C1 -- gnd").path("in", "out")
    with pytest.raises(EquationError) as caught:
        path.response([1.0], values={"R1": [1.0]})
    assert caught.value.code == "question.no-value"
    found = path.response([1.0], values={"R1": [1.0], "C1": [2.0]})
    np.testing.assert_allclose(found, 1 / (1 + 4j * np.pi), rtol=1e-14)


@pytest.mark.parametrize("way", WAYS)
def test_too_many_singular_samples_are_refused(way, monkeypatch):
    """Samples that each need a solution of their own are counted first."""
    monkeypatch.setattr(module, "_MOST_ALONE", 3)
    netlist = network(C("C1", "in", "out", 1), C("C2", "out", "gnd", 1))
    ask = transfer_ask(netlist, ("in", "gnd"), ("out", "gnd"))
    values = {"C1": np.array([1.0, 2.0, 3.0, 4.0])}
    if way == "elimination":
        with pytest.raises(EquationError, match="4 samples have frequencies") as caught:
            responses_over(netlist, ask, np.array([0.0, 1.0]), values, way=way)
        assert caught.value.code == "equations.budget"
    else:
        found = responses_over(netlist, ask, np.array([0.0, 1.0]), values, way=way)
        share = values["C1"] / (values["C1"] + 1)
        np.testing.assert_allclose(found, np.stack([share, share], axis=1), rtol=1e-14)


def test_a_sample_without_an_answer_is_named():
    """The error says which values have none."""
    netlist = network(
        R("R1", "in", "out", 1),
        R("R2", "in", "gnd", 1),
        part("U1", "voltage_amplifier", "out", "gnd", "out", "gnd", gain=2),
    )
    ask = transfer_ask(netlist, ("in", "gnd"), ("out", "gnd"))
    with pytest.raises(EquationError, match=r"\(with U1.gain = 1\)|\(with U1 = 1\)"):
        responses(netlist, ask, np.array([1.0]), {_gain_name(netlist): [1.0]})


def _gain_name(netlist: Netlist) -> str:
    return next(name for name, _ in netlist.values() if name.startswith("U1"))
