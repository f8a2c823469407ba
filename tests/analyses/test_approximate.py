"""Approximate closed forms: what is dropped, and that the stated error is true."""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise, product

import numpy as np
import pytest
from hypothesis import assume as suppose
from hypothesis import given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.analyses.approximate import Approximation, assume, simplify
from acsolve.analyses.assumption import Assumption, Ranking, parse_assumptions
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cut import SIDES, cut, terms
from acsolve.analyses.grid import HertzBand
from acsolve.analyses.spread import hidden, spread, spread_symbols
from acsolve.circuit.expression import Number
from acsolve.circuit.netlist import Netlist, bindings
from acsolve.equations.evaluate import FloatArithmetic
from acsolve.errors import AnalysisError, EquationError

BAND = HertzBand(Fraction(10), Fraction(10**6))

TWO_SECTIONS = """
in -- R1 -- mid -- R2 -- out
mid -- C1 -- gnd
out -- C2 -- gnd
"""
FOLLOWER = """
in -- Rs -- base -- Rpi -- out
out -- Re || Ce -- gnd
stage : transconductance(plus = base, minus = out, out = out, ref = gnd, gain = gm)
let gm
"""


def form_of(text: str, *, source: str = "in", target: str = "out") -> tuple[ClosedForm, Netlist]:
    """The closed form of a circuit, a symbol for every value that may lie apart."""
    circuit = acsolve.parse(text)
    path = circuit.path(source, target)
    symbols = spread_symbols(circuit.netlist)
    from acsolve.analyses.transfer import closed_form

    return closed_form(circuit.netlist, path.ask, symbols), circuit.netlist


def valued(text: str, **values: str) -> tuple[ClosedForm, Netlist]:
    """The same with values."""
    return form_of(text + "\n".join(f"{name} = {value}" for name, value in values.items()) + "\n")


def response(form: ClosedForm, values: dict[str, float], hertz: np.ndarray) -> np.ndarray:
    """A closed form in NumPy, from its own terms: no code of the measured error is shared."""
    s = 2j * np.pi * hertz

    def side(polynomial) -> np.ndarray:
        total = np.zeros(len(s), dtype=complex)
        for exponents, number in polynomial.terms():
            term = np.full(len(s), complex(int(number)))
            for item, exponent in zip(form.basis.generators, exponents, strict=False):
                if exponent:
                    base = s if item.varies else values[item.leaf.name]
                    term = term * base ** (int(exponent) / item.root)
            total += term
        return total

    return side(form.numerator) / side(form.denominator)


def dense_errors(found: Approximation, netlist: Netlist, *, loose: bool, seed: int = 7) -> float:
    """The largest relative error over many frequencies, corners and random values."""
    random = np.random.default_rng(seed)
    hertz = np.geomspace(float(found.band.low), float(found.band.high), 700)
    worst = 0.0
    for turn in range(60 if loose else 1):
        values = {}
        for name, value in bindings(netlist).items():
            if not isinstance(value.expression, Number):
                continue
            values[name] = float(value.expression.value)
            if loose and value.tolerance:
                low, high = float(value.tolerance.low.value), float(value.tolerance.high.value)
                place = random.integers(0, 2) if turn % 2 else random.random()
                values[name] *= 1 + low + (high - low) * place
        exact, rough = (response(item, values, hertz) for item in (found.exact, found.form))
        with np.errstate(all="ignore"):
            error = np.abs(rough - exact) / np.abs(exact)
        worst = max(worst, float(np.max(error[np.isfinite(error)], initial=0.0)))
    return worst


# ---------------------------------------------------------------- reading assumptions


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("R2 >> R1", [("R2", "R1")]),
        ("R1 << R2", [("R2", "R1")]),
        ("R1≪R2", [("R2", "R1")]),
        ("R3 >> R2 >> R1", [("R3", "R2"), ("R2", "R1")]),
        ("R1 << R2 , C1>>C2", [("R2", "R1"), ("C1", "C2")]),
        ("N1[2].R >> R1", [("N1[2].R", "R1")]),
        ("k(L1,L2) >> k(L3, L4)", [("k(L1, L2)", "k(L3, L4)")]),
        (["R2 >> R1", "R2 >> R1"], [("R2", "R1")]),
    ],
)
def test_assumptions_read_as_written(text, expected):
    """Both signs, chains, commas, indexed and coupling names read; repeats count once."""
    known = ("R1", "R2", "R3", "C1", "C2", "N1[2].R", "k(L1, L2)", "k(L3, L4)")
    assert parse_assumptions(text, known) == tuple(Assumption(*pair) for pair in expected)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("", 'the assumption "" does not read'),
        ((), "no assumption is given"),
        ("R2", 'the assumption "R2" does not read'),
        ("R2 >> ", 'the assumption "R2 >>" does not read'),
        ("R2 >> R1,", 'the assumption "R2 >> R1," does not read'),
        ("R2 R1", 'the assumption "R2 R1" does not read'),
        ("R2 > R1", '">" has no place in the assumption "R2 > R1"'),
        ("R2 >> 2*R1", '"2" has no place in the assumption "R2 >> 2*R1"'),
        ("R2 >> __import__('os')", '"(" has no place in the assumption "R2 >> __import__(\'os\')"'),
        ("R2 >> Rx", "Rx is no symbol of this closed form"),
        ("R2 >> R2", "the assumptions go round in a circle: R2 >> R2"),
        (
            "R2 >> R1, R1 >> C1, C1 >> R2",
            "the assumptions go round in a circle: R2 >> R1, R1 >> C1, C1 >> R2",
        ),
        ("R1 >> " * 1000, "an assumption is longer than 2000 characters"),
    ],
)
def test_assumptions_that_do_not_read_are_refused(text, message):
    """What is no list of pairs of known symbols, or goes in a circle, is an error that says so."""
    with pytest.raises(AnalysisError) as caught:
        parse_assumptions(text, ("R1", "R2", "C1"))
    assert (caught.value.code, caught.value.message) == ("option.value", message)
    assert caught.value.hint


def test_an_unknown_symbol_names_the_known_ones():
    """The hint after a misspelt symbol names the nearest and all others."""
    with pytest.raises(AnalysisError) as caught:
        parse_assumptions("Rload >> R1", ("R1", "RLoad"))
    assert caught.value.hint == "Did you mean RLoad? Its symbols are R1, RLoad."


@settings(max_examples=200)
@given(st.data())
def test_outranking_is_divisibility_by_assumed_ratios(data):
    """A product outranks another exactly where their ratio is a product of assumed ratios."""
    names = "abcd"
    order = [(x, y) for place, x in enumerate(names) for y in names[place + 1 :]]
    chosen = data.draw(st.lists(st.sampled_from(order), min_size=1, max_size=4, unique=True))
    ranking = Ranking([Assumption(x, y) for x, y in chosen])
    exponents = st.tuples(*[st.integers(0, 2)] * len(ranking.names))
    first, second = data.draw(exponents), data.draw(exponents)
    wanted = tuple(b - a for a, b in zip(first, second, strict=True))
    reached = {
        tuple(
            sum(k * ((name == y) - (name == x)) for k, (x, y) in zip(counts, chosen, strict=True))
            for name in ranking.names
        )
        for counts in product(range(5), repeat=len(chosen))
        if any(counts)
    }
    assert ranking.outranks(first, second) == (wanted in reached)


# ------------------------------------------------------------------------ assumptions


def test_a_large_second_resistor_splits_two_sections():
    """With R2 >> R1 two RC sections are the product of two single ones, exactly."""
    form, _ = form_of(TWO_SECTIONS)
    found = assume(form, "R2 >> R1")
    single = [form_of("in -- R -- out\nout -- C -- gnd\n".replace("R", r).replace("C", c))[0]
              for r, c in (("R1", "C1"), ("R2", "C2"))]  # fmt: skip
    assert [item.text() for item in single] == ["1/(1 + R1*C1*s)", "1/(1 + R2*C2*s)"]
    factors = sorted(str(item) for item, _ in found.form.denominator.factor()[1])
    assert len(factors) == 2
    assert found.form.text() == "1/(1 + s*(R1*C1 + R2*C2) + R1*R2*C1*C2*s^2)"
    assert [str(item) for item in found.dropped] == ["R1*C2 (denominator, s)"]
    assert found.form.checked is None
    assert (found.largest_error, found.bound, found.band) == (None, None, None)
    assert found.remarks == (
        "R2 >> R1: not judged, a value is missing",
        "no error is stated: C1, C2, R1, R2 without a value",
    )


def test_a_large_first_capacitor_does_the_same():
    """With C1 >> C2 the same term goes."""
    form, _ = form_of(TWO_SECTIONS)
    assert assume(form, "C2 << C1").form.text() == assume(form, "R2 >> R1").form.text()


def test_a_follower_with_a_large_input_resistance():
    """In a follower Rpi >> Rs, Re: the input resistance no longer divides the drive."""
    form, _ = form_of(FOLLOWER)
    found = assume(form, ["Rpi >> Rs", "Rpi >> Re"])
    assert found.form.text() == "(Re + gm*Re*Rpi)/(Rpi + gm*Re*Rpi + Re*Rpi*Ce*s)"
    assert {(item.place, item.term) for item in found.dropped} == {
        ("denominator, constant term", "Re"),
        ("denominator, constant term", "Rs"),
        ("denominator, s", "Re*Rs*Ce"),
    }


def test_what_the_assumptions_do_not_compare_stays():
    """Only terms that differ by the assumed ratio are compared: without a rival nothing goes."""
    form, _ = form_of("in -- L1 -- out\nout -- C1 || R1 -- gnd\n")
    found = assume(form, "R1 >> L1")
    assert not found.dropped
    assert found.form is form
    assert "no term is outranked: nothing is dropped" in found.remarks


def test_common_factors_are_removed_from_what_stays():
    """A divider with R2 >> R1 is 1, not R2/R2."""
    form, _ = form_of("in -- R1 -- out\nout -- R2 -- gnd\n")
    assert assume(form, "R2 >> R1").form.text() == "1"


def test_roots_of_quantities_rank_by_their_powers():
    """A mutual inductance brings square roots; exponents still count as they are."""
    form, _ = form_of(
        "in -- R1 -- a\na -- L1 -- gnd\nout -- L2 -- gnd\nout -- R2 -- gnd\ncouple L1, L2 = k\nlet k\n"
    )
    assert not assume(form, "L1 >> L2").dropped
    found = assume(form, "L1 >> L2, R2 >> R1")
    assert [str(item) for item in found.dropped] == ["R1*L2 (denominator, s)"]
    assert "sqrt(L1*L2)" in found.form.text()


@pytest.mark.parametrize(
    ("text", "assumption", "fixed", "scaled"),
    [
        (TWO_SECTIONS, "R2 >> R1", {"R1": "1 kohm", "C1": "10 nF", "C2": "1 nF"}, "R2"),
        (TWO_SECTIONS, "C1 >> C2", {"R1": "1 kohm", "R2": "3 kohm", "C2": "1 nF"}, "C1"),
        (
            FOLLOWER.replace("let gm", "let gm = 20 mS"),
            "Rpi >> Rs, Rpi >> Re",
            {"Rs": "600 ohm", "Re": "1 kohm", "Ce": "1 nF"},
            "Rpi",
        ),
    ],
)
def test_the_error_falls_with_the_assumed_ratio(text, assumption, fixed, scaled):
    """Ten times the ratio, a tenth of the error: what is dropped is of first order."""
    errors = []
    for k in range(2, 7):
        value = Fraction(10) ** k * 1000
        amount = f"{value} ohm" if scaled.startswith("R") else f"{10**k} nF"
        form, _ = valued(text, **fixed, **{scaled: amount})
        found = assume(form, assumption, band=BAND)
        assert found.bound is not None
        assert found.largest_error <= found.bound <= 1.06 * found.largest_error
        errors.append(found.largest_error)
    ratios = [b / a for a, b in pairwise(errors)]
    assert all(0.08 < ratio < 0.13 for ratio in ratios), ratios


def test_an_assumption_is_judged_by_the_values():
    """The ratio of the values is stated, and whether it is at least ten."""
    form, _ = valued(TWO_SECTIONS, R1="1 kohm", R2="3 kohm", C1="1 nF", C2="1 nF")
    found = assume(form, "R2 >> R1")
    assert [(item.ratio, item.holds) for item in found.assumptions] == [(3.0, False)]
    assert found.remarks == ("R2 >> R1 does not hold for the given values: R2/R1 = 3",)
    assert found.largest_error > 0.1
    assert found.largest_error <= found.bound


def test_a_pole_that_moves_on_the_band_has_no_bound():
    """Where the approximation shifts a lossless resonance, no bound is claimed."""
    text = "in -- L1 -- a -- L2 -- out\na -- C1 -- gnd\nout -- C2 -- gnd\n"
    form, _ = valued(text, L1="1 mH", L2="1 mH", C1="1 nF", C2="1 pF")
    found = assume(form, "C1 >> C2", band=BAND)
    assert found.dropped
    assert found.bound is None
    assert any(item.startswith("no bound:") for item in found.remarks)


def test_zero_is_the_smallest_value_of_all():
    """Next to a short R2 = 0 the assumption R1 >> R2 costs nothing."""
    form, _ = valued("in -- R1 -- out\nout -- C1 -- x -- R2 -- gnd\n", R1="1k", R2="0", C1="1n")
    found = assume(form, "R1 >> R2", band=BAND)
    assert found.dropped
    assert (found.largest_error, found.bound) == (0.0, 0.0)


# --------------------------------------------------------------------------- simplify


def test_simplify_drops_what_is_small_and_says_so():
    """A light second section loses its cross term within 1 %, with a proof."""
    values = {"R1": "1 kohm ± 5 %", "R2": "100 kohm ± 5 %", "C1": "10 nF ± 10 %"}
    form, netlist = valued(TWO_SECTIONS, **values, C2="100 pF ± 10 %")
    found = simplify(form, netlist, band=BAND)
    assert [str(item) for item in found.dropped] == ["R1*C2 (denominator, s)"]
    assert 0.005 < found.largest_error <= found.bound <= 0.01
    assert found.remarks == ()
    assert found.at_values["R1"] == pytest.approx(1050)
    assert found.at_values["C2"] == pytest.approx(110e-12)


def test_nothing_can_be_dropped_where_all_terms_count():
    """Two equal sections lose nothing within 1 %, and the error is exactly zero."""
    form, netlist = valued(TWO_SECTIONS, R1="1k", R2="1k", C1="1n", C2="1n")
    found = simplify(form, netlist, band=BAND)
    assert not found.dropped
    assert found.form is form
    assert (found.largest_error, found.bound, found.at_hertz) == (0.0, 0.0, None)
    assert found.remarks == ("no term can be dropped within 1 %",)


def test_a_whole_coefficient_whose_terms_cancel_goes_as_one():
    """In a nearly balanced bridge R2*R3 - R1*R4 goes as a whole, though its terms are large."""
    text = "in -- R1 -- a -- R2 -- gnd\nin -- R3 -- b -- R4 -- gnd\na -- C1 -- gnd\n"
    values = "R1, R2, R4 = 1 kohm\nR3 = 1000.001 ohm\nC1 = 1 nF\n"
    form, netlist = form_of(text + values, target="a,b")
    found = simplify(form, netlist, band=HertzBand(Fraction(1000), Fraction(10**6)))
    assert {str(item) for item in found.dropped} == {
        "R2*R3 (numerator, constant term)",
        "-R1*R4 (numerator, constant term)",
    }
    seen = dense_errors(found, netlist, loose=False)
    assert 1e-4 < seen <= found.bound <= 2e-4


def test_terms_that_nearly_cancel_are_not_small():
    """Beside a negative resistance the difference counts, so a small part of it stays."""
    text = "in -- R1 -- a -- R2 -- b -- R3 -- out\nout -- R4 -- gnd\n"
    form, netlist = valued(text, R1="1 kohm", R2="-999 ohm", R3="1 ohm", R4="1 ohm")
    found = simplify(form, netlist, band=BAND)
    exact = 1 / (1000 - 999 + 1 + 1)
    assert dense_errors(found, netlist, loose=False) <= 0.01
    assert abs(response(found.form, _plain(netlist), np.array([1.0]))[0] / exact - 1) <= 0.01


def _plain(netlist: Netlist) -> dict[str, float]:
    return {name: float(value.expression.value) for name, value in bindings(netlist).items()}


def test_a_notch_on_the_band_keeps_its_place():
    """A zero on the band is not moved: the numerator stays, the denominator may lose terms."""
    text = "in -- R1 -- out\nout -- L1 -- x -- C1 -- gnd\nout -- C2 -- gnd\nout -- RL -- gnd\n"
    form, netlist = valued(text, R1="1 kohm", L1="1 mH", C1="1 nF", C2="1 pF", RL="10 Mohm")
    found = simplify(form, netlist, band=BAND)
    assert found.form.part_text(found.form.numerator, form.spelled(safe=False)) == "1 + L1*C1*s^2"
    assert len(found.dropped) == 4
    assert found.largest_error <= found.bound <= 0.01


def test_a_lossless_pole_on_the_band_is_not_moved():
    """Dropping a part in a million of a lossless resonance is refused: the error is infinite."""
    text = "in -- L1 -- out\nout -- C1 -- gnd\nout -- C2 -- gnd\n"
    form, netlist = valued(text, L1="1 mH", C1="1 nF", C2="1 fF")
    assert not simplify(form, netlist, band=BAND).dropped


def test_functions_of_frequency_simplify_too():
    """Terms in sqrt(s) and a line's exponentials go as any others do."""
    text = (
        "in -- R1 -- a -- Z1 -- out\nout -- RL -- gnd\nlet Rx = 10 ohm\nlet tau = 1 us\n"
        "Z1 : impedance(Rx*(1 + sqrt(s*tau)))\nR1 = 50 ohm ± 1 %\nRL = 2 kohm ± 1 %\n"
    )
    form, netlist = form_of(text)
    found = simplify(form, netlist, band=BAND)
    assert found.dropped
    assert found.largest_error <= found.bound <= 0.01
    assert dense_errors(found, netlist, loose=True) <= found.bound


def test_simplify_needs_values_and_a_sensible_allowance():
    """A symbol without a value, an allowance of 0 or 100 %, a band from 0 Hz are refused."""
    form, netlist = form_of(TWO_SECTIONS)
    with pytest.raises(EquationError) as missing:
        simplify(form, netlist, band=BAND)
    assert missing.value.code == "question.no-value"
    form, netlist = valued(TWO_SECTIONS, R1="1k", R2="1k", C1="1n", C2="1n")
    for within in (0.0, 1.0, -0.1, float("nan")):
        with pytest.raises(AnalysisError) as bad:
            simplify(form, netlist, band=BAND, within=within)
        assert bad.value.code == "option.value"
    with pytest.raises(AnalysisError) as band:
        simplify(form, netlist, band=HertzBand(Fraction(0), Fraction(10)))
    assert band.value.code == "sweep.band"


@st.composite
def networks(draw) -> str:
    """A random network of up to eight resistors, inductors and capacitors with tolerances."""
    nodes = ["in", "a", "out", "gnd"]
    units = {"R": "ohm", "L": "uH", "C": "nF"}
    lines = ["in -- R0 -- out", "R0 = 1000 ohm ± 5 %"]
    for place in range(1, draw(st.integers(3, 8))):
        letter = draw(st.sampled_from("RRLCC"))
        first, second = draw(st.lists(st.sampled_from(nodes), min_size=2, max_size=2, unique=True))
        size = draw(st.sampled_from(["0.01", "1", "30", "1000", "20000", "1000000"]))
        spread_ = draw(st.sampled_from(["", " ± 1 %", " ± 5 %", " +20 % -10 %"]))
        lines.append(f"{first} -- {letter}{place} -- {second}")
        lines.append(f"{letter}{place} = {size} {units[letter]}{spread_}")
    return "\n".join(lines) + "\n"


def _solved(text: str) -> tuple[ClosedForm, Netlist]:
    try:
        return form_of(text)
    except (EquationError, AnalysisError):
        suppose(False)
        raise


@settings(max_examples=40, deadline=None)
@given(networks(), st.booleans(), st.sampled_from([0.001, 0.01, 0.1]))
def test_simplify_keeps_its_promise_on_random_networks(text, loose, within):
    """No frequency, corner or value tried in plain NumPy exceeds what was allowed or proven."""
    form, netlist = _solved(text)
    suppose(form.numerator != 0)
    found = simplify(form, netlist, band=BAND, within=within, tolerances=loose)
    seen = dense_errors(found, netlist, loose=loose)
    slack = 1 + 1e-6  # doubles lose digits beside a sharp resonance
    assert seen <= within * slack
    assert found.largest_error <= within
    if found.bound is not None:
        assert max(found.largest_error, seen / slack - 1e-9) <= found.bound


@settings(max_examples=25, deadline=None)
@given(networks(), st.data())
def test_the_bound_of_an_assumption_holds_on_random_networks(text, data):
    """Whatever is assumed, no error tried in plain NumPy exceeds the bound."""
    form, netlist = _solved(text)
    names = sorted(form.symbols)
    suppose(form.numerator != 0 and len(names) > 1)
    pair = data.draw(st.lists(st.sampled_from(names), min_size=2, max_size=2, unique=True))
    found = assume(form, f"{pair[0]} >> {pair[1]}", netlist=netlist, band=BAND)
    if found.bound is not None:
        seen = dense_errors(found, netlist, loose=True)
        assert max(found.largest_error, seen / (1 + 1e-6) - 1e-9) <= found.bound


@settings(max_examples=60, deadline=None)
@given(networks(), st.data())
def test_kept_and_dropped_terms_are_the_whole(text, data):
    """Whatever is cut, what stays and what goes add up to the exact closed form."""
    form, _ = _solved(text)
    every = terms(form)
    gone = data.draw(st.lists(st.sampled_from(every), unique=True))
    split = cut(form, gone)
    for side in SIDES:
        whole = split.polynomial(side, kept=True) + split.polynomial(side, kept=False)
        assert whole == getattr(form, side)
    assert len(split.listed()) == len(gone)


# ------------------------------------------------------------------------- tolerances


def test_a_shared_quantity_moves_all_that_is_computed_from_it():
    """Two resistors from one toleranced quantity track; a nominal value seen does not."""
    text = (
        "let Rx = 1 kohm ± 10 %\nin -- R1 -- out\nout -- R2 -- gnd\nout -- R3 -- gnd\n"
        "R1 = Rx/2\nR2 = 100 ohm ± 20 %\nR3 = R2*2\n"
    )
    form, netlist = form_of(text)
    box = spread(form, netlist)
    assert box.names == ("R2", "Rx")
    evaluate = box.evaluator(FloatArithmetic(), [1.0, 0.0])
    assert [evaluate.name(name) for name in ("Rx", "R1", "R2", "R3")] == pytest.approx(
        [900, 450, 120, 200]
    )
    assert not hidden(form, netlist)
    assert set(form.symbols) == {"Rx", "R2", "R3"}


def test_limits_are_reached_at_the_ends_of_the_box():
    """Place 0 is the low limit, place 1 the high one, relative or absolute, equal or not."""
    form, netlist = form_of(
        "in -- R1 -- out\nout -- C1 -- gnd\nR1 = 100 ohm ± 7 ohm\nC1 = 10 nF +80 % -20 %\n"
    )
    box = spread(form, netlist)
    low, high = (box.evaluator(FloatArithmetic(), [end, end]) for end in (0.0, 1.0))
    assert [low.name("R1"), high.name("R1")] == pytest.approx([93, 107])
    assert [low.name("C1"), high.name("C1")] == pytest.approx([8e-9, 18e-9])
    middle = box.evaluator(FloatArithmetic(), box.nominal_places(FloatArithmetic()))
    assert [middle.name("C1"), middle.name("R1")] == pytest.approx([10e-9, 100])


def test_a_form_that_hides_tolerances_is_made_anew():
    """Where numbers have swallowed a tolerance, simplify works on the symbols behind them."""
    circuit = acsolve.parse(
        TWO_SECTIONS + "R1 = 1k ± 5 %\nR2 = 100k ± 5 %\nC1 = 10n ± 5 %\nC2 = 100p\n"
    )
    form = circuit.path("in", "out").closed_form(keep=["R1"])
    found = simplify(form, circuit.netlist, band=BAND)
    assert set(found.exact.symbols) == {"R1", "R2", "C1", "C2"}
    assert "every value with a tolerance is a symbol of its own here" in found.remarks
    assert set(found.at_values) == {"R1", "R2", "C1"}
