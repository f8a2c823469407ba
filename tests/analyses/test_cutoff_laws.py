"""Cutoffs against a dense numeric search, and the laws that they obey."""

from __future__ import annotations

import itertools
from dataclasses import replace
from fractions import Fraction
from math import isclose, pi, sqrt

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st
from sympy import Symbol
from sympy.parsing.sympy_parser import parse_expr

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.cutoff import HALF_POWER_DB, CutoffAnswer, CutoffLevel, cutoffs
from acsolve.analyses.question import impedance_ask, transfer_ask
from acsolve.analyses.transfer import closed_form
from acsolve.circuit.expression import Expression, S, add, divide, multiply, number
from acsolve.circuit.netlist import Netlist, bindings
from acsolve.equations.exact import Symbols
from acsolve.errors import AnalysisError
from tests.reference.curve import Curve, power_ratio
from tests.strategies import (
    PASSIVE,
    C,
    L,
    R,
    connected,
    coupling,
    hertz_value,
    network,
    part,
    positives,
    with_numbers,
)

from .test_transfer_laws import drawn_pairs, form_of, gnd

LEVELS = (None, None, Fraction(-6), Fraction(-7, 2), Fraction(-10), Fraction(-20), Fraction(1))
REFERENCES = (None, None, None, "dc", "infinity", "peak", Fraction(1, 3), Fraction(2))


def response(netlist: Netlist) -> ClosedForm:
    """The closed form from `in` to `out`."""
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    return form


def section(first, second) -> Netlist:
    """A divider of two parts, from `in` over `out` to ground."""
    return network(first, second)


def reference_of(curve: Curve, asked, answer: CutoffAnswer):
    """The squared reference as the interface says, worked out from the curve."""
    low, high = curve.at_zero(), curve.at_infinity()
    if isinstance(asked, Fraction):
        return curve.field.number(asked) ** 2
    name = asked
    if name is None:
        if low == 0 and high == 0:
            name = "peak"
        elif high == 0 or low == 0:
            name = "dc" if high == 0 else "infinity"
        else:
            equal = abs(high - low) <= 1e-30 * low  # rounding of the 50 digits
            name = "infinity" if high > low and not equal else "dc"
    assert answer.reference.at == name
    if name == "peak":
        top = max(curve.peak()[0], low, high)
        assert isclose(answer.reference.gain**2, top, rel_tol=1e-12)
        return top
    return low if name == "dc" else high


def searched(form: ClosedForm, level: Fraction | None, asked) -> CutoffAnswer | None:
    """The cutoffs of a form, compared with a search of its curve; None where refused."""
    curve = Curve(form)
    try:
        answer = cutoffs(form, level=CutoffLevel(level), reference=asked)
    except AnalysisError as problem:
        refused = problem
    else:
        refused = None
    if refused is not None:
        assert refused.code == "question.no-reference"
        assert_no_reference(curve, asked)
        return None
    wanted = reference_of(curve, asked, answer) * power_ratio(level)
    assert answer.complete
    found = [(item.rad_per_s, item.direction) for item in answer.cutoffs]
    for omega, direction in found:  # each is one: it is at the level, and crosses it
        miss = abs(curve.mp.sqrt(curve.squared(omega) / wanted) - 1)
        assert miss < 1e-12 + 2e-16 * curve.slope(omega)
        assert direction in ("falling", "rising")
    directions = [direction for _, direction in found]
    assert all(first != second for first, second in itertools.pairwise(directions))
    for low, high, rises in curve.sign_changes(wanted):  # none is missing
        inside = [direction for omega, direction in found if low <= omega <= high]
        assert len(inside) % 2 == 1
        assert inside[0] == ("rising" if rises else "falling")
    edges = [low for low, _, _ in curve.sign_changes(wanted)]
    assert (len(found) - len(edges)) % 2 == 0
    for item in answer.cutoffs:
        assert isclose(item.hertz * 2 * pi, item.rad_per_s, rel_tol=1e-15)
    return answer


def assert_no_reference(curve: Curve, asked) -> None:
    """Why there is none: the gain asked for is zero or infinite somewhere."""
    low, high = curve.at_zero(), curve.at_infinity()
    ends = {"dc": (low,), "infinity": (high,)}.get(asked, (low, high))
    singular = any(end in (0, curve.mp.inf) for end in ends)
    huge = asked in (None, "peak") and curve.peak()[0] > 1e12
    assert singular or huge


def passive(data, *, lossless: bool = False) -> ClosedForm:
    """The response of a random passive network with numbers."""
    netlist = data.draw(
        connected(tree=PASSIVE, extra=PASSIVE if lossless else (*PASSIVE, "resistor", "crystal"))
    )
    assume(not any("quality" in item.values for item in netlist.parts))
    source, target = drawn_pairs(data, netlist)
    kind = data.draw(st.sampled_from(["voltage-ratio", "voltage-ratio", "transimpedance"]))
    form = form_of(netlist, source, target, kind)
    assume(form is not None and form.numerator != 0)
    assert form is not None
    return form


# ------------------------------------------------------------ against a search


@settings(max_examples=60)
@given(st.data(), st.sampled_from(LEVELS), st.sampled_from(REFERENCES))
def test_cutoffs_are_those_of_a_numeric_search(data, level, reference):
    """Every crossing that a fine search finds is listed, and every one listed is at the level."""
    searched(passive(data), level, reference)


@settings(max_examples=25)
@given(st.data(), st.sampled_from((None, Fraction(-6))))
def test_cutoffs_of_values_with_pi(data, level):
    """Values that contain pi give proven cutoffs too."""
    netlist = data.draw(connected(tree=PASSIVE, most_nodes=5, most_extra=3))
    hertz = data.draw(positives)
    parts = [
        replace(
            item,
            values={
                **item.values,
                "value": replace(item.values["value"], expression=hertz_value(hertz, Fraction(3))),
            },
        )
        if at % 2
        else item
        for at, item in enumerate(netlist.parts)
    ]
    source, target = drawn_pairs(data, netlist)
    form = form_of(replace(netlist, parts=tuple(parts)), source, target)
    assume(form is not None and form.numerator != 0)
    assert form is not None
    searched(form, level, None)


@settings(max_examples=30)
@given(
    st.lists(st.integers(-9, 9), min_size=1, max_size=5),
    st.lists(st.integers(1, 9), min_size=1, max_size=5),
    st.sampled_from(LEVELS),
    st.sampled_from(REFERENCES),
)
def test_cutoffs_of_any_rational_function(top, bottom, level, reference):
    """Zeros in either half plane, on the axis or none: the search and the cutoffs agree."""
    assume(any(top))
    form = rational(top, bottom)
    assume(form.numerator != 0)
    searched(form, level, reference)


def rational(top: list[int], bottom: list[int]) -> ClosedForm:
    """The impedance of one part whose value is a ratio of polynomials in s."""
    parts = (divide(polynomial(top), polynomial(bottom)),)
    netlist = network(part("X1", "impedance", "in", "gnd", value=parts[0]))
    return closed_form(netlist, impedance_ask(netlist, gnd("in")))


def polynomial(coefficients: list[int]) -> Expression:
    """A polynomial in s by rising power."""
    total: Expression = number(0)
    for coefficient in reversed(coefficients):
        total = add(multiply(total, S), number(coefficient))
    return total


@settings(max_examples=25)
@given(st.data())
def test_the_mirrored_network_has_mirrored_cutoffs(data):
    """s -> 1/s (coils become capacitors): each ω becomes 1/ω, falling becomes rising."""
    netlist = data.draw(connected(tree=PASSIVE, most_nodes=5))
    assume(all(len(item.values) == 1 for item in netlist.parts) and not netlist.couplings)
    swap = {"inductor": "capacitor", "capacitor": "inductor", "resistor": "resistor"}
    parts = []
    for item in netlist.parts:
        value = item.values["value"].expression
        if item.kind != "resistor":
            value = divide(number(1), value)
        parts.append(part(item.name, swap[item.kind], *item.nodes, value=value))
    source, target = drawn_pairs(data, netlist)
    first = form_of(netlist, source, target)
    second = form_of(replace(netlist, parts=tuple(parts)), source, target)
    assert (first is None) == (second is None)
    assume(first is not None and first.numerator != 0)
    for here, there in (("dc", "infinity"), ("infinity", "dc"), ("peak", "peak")):
        try:
            one = cutoffs(first, reference=here)
        except AnalysisError:
            with pytest.raises(AnalysisError):
                cutoffs(second, reference=there)
            continue
        other = cutoffs(second, reference=there)
        turned = {"falling": "rising", "rising": "falling"}
        assert [turned[item.direction] for item in one.cutoffs] == [
            item.direction for item in reversed(other.cutoffs)
        ]
        for item, mirror in zip(one.cutoffs, reversed(other.cutoffs), strict=True):
            assert isclose(item.rad_per_s * mirror.rad_per_s, 1, rel_tol=1e-14)


# ------------------------------------------------------------ touches


@settings(max_examples=25)
@given(positives, positives)
def test_equal_ripple_touches_its_reference(coil, capacitor):
    """A symmetric lossless T between equal resistors touches its dc gain at one frequency.

    With R = 1, coils L and a capacitor C the reflection vanishes at ω² = (2L - C)/(L²·C).
    """
    assume(2 * coil > capacitor)
    netlist = network(
        R("R1", "in", "a", 1),
        L("L1", "a", "b", coil),
        C("C1", "b", "gnd", capacitor),
        L("L2", "b", "out", coil),
        R("R2", "out", "gnd", 1),
    )
    answer = cutoffs(response(netlist), level=CutoffLevel(Fraction(0)))
    assert answer.complete
    assert answer.reference.gain == 0.5
    assert answer.cutoffs == ()
    omega = sqrt((2 * coil - capacitor) / (coil**2 * capacitor))
    assert [item.rad_per_s for item in answer.touches] == pytest.approx([omega], rel=1e-14)


def test_a_notch_does_not_invent_a_crossing_at_its_zero():
    """A band-stop crosses half power once on each side of its zero, and touches nothing."""
    netlist = network(R("R1", "in", "out", 1), L("L1", "out", "a", 1), C("C1", "a", "gnd", 1))
    answer = cutoffs(response(netlist))
    assert [item.direction for item in answer.cutoffs] == ["falling", "rising"]
    assert answer.touches == ()
    first, second = (item.rad_per_s for item in answer.cutoffs)
    assert isclose(first * second, 1, rel_tol=1e-15)
    assert isclose(second - first, 1, rel_tol=1e-15)


def test_a_level_of_zero_decibels_below_a_peak_touches_the_peak():
    """A resonance touches its own peak and crosses 0 dB nowhere; two equal peaks both touch."""
    netlist = network(R("R1", "in", "out", 2), L("L1", "out", "gnd", 3), C("C1", "out", "gnd", 5))
    answer = cutoffs(response(netlist), level=CutoffLevel(Fraction(0)))
    assert answer.reference.at == "peak"
    assert answer.cutoffs == ()
    assert [item.rad_per_s for item in answer.touches] == pytest.approx([1 / sqrt(15)], rel=1e-15)
    # s/(1 + s + s²) at s + 1/s shifted: x -> equal peaks at ω and 1/ω
    twin = rational([0, 1, 0, 1], [1, 1, 3, 1, 1])
    both = cutoffs(twin, level=CutoffLevel(Fraction(0)), reference="peak")
    first, second = (item.rad_per_s for item in both.touches)
    assert isclose(first * second, 1, rel_tol=1e-14)
    assert first < 1 < second


# ------------------------------------------------------------ stated facts


def test_half_power_is_exactly_half():
    """No level means |H|² exactly half: a single RC section cuts off at 1/(R·C)."""
    answer = cutoffs(
        response(section(R("R1", "in", "out", 1000), C("C1", "out", "gnd", Fraction(1, 10**6))))
    )
    (item,) = answer.cutoffs
    assert item.rad_per_s == 1000.0
    assert item.hertz == 1000 / (2 * pi)
    assert item.direction == "falling"
    assert answer.level_db == HALF_POWER_DB
    assert (answer.reference.at, answer.reference.gain, answer.reference.hertz) == ("dc", 1.0, 0.0)


@settings(max_examples=25)
@given(positives, positives)
def test_a_resistor_computed_from_its_cutoff(hertz, farad):
    """R = 1/(2·pi·f·C) gives a cutoff of f to the last place of a double."""
    netlist = section(
        R("R1", "in", "out", hertz_value(hertz, 1 / farad)), C("C1", "out", "gnd", farad)
    )
    (item,) = cutoffs(response(netlist)).cutoffs
    assert isclose(item.hertz, hertz, rel_tol=2.3e-16)


def test_the_mirrored_section_counts_from_infinite_frequency():
    """A high-pass section takes its reference at infinity and rises through half power."""
    netlist = section(C("C1", "in", "out", Fraction(1, 10**6)), R("R1", "out", "gnd", 1000))
    answer = cutoffs(response(netlist))
    assert (answer.reference.at, answer.reference.gain) == ("infinity", 1.0)
    (item,) = answer.cutoffs
    assert (item.rad_per_s, item.direction) == (1000.0, "rising")


@pytest.mark.parametrize(
    ("netlist", "message"),
    [
        (network(L("L1", "in", "gnd", 1), C("C1", "in", "gnd", 3)), "pole on the frequency axis"),
        (
            network(
                L("L1", "in", "gnd", hertz_value(Fraction(1), Fraction(7))), C("C1", "in", "gnd", 3)
            ),
            "pole on the frequency axis",
        ),
        (
            network(
                L("L1", "in", "gnd", 1),
                C("C1", "in", "a", 1),
                L("L2", "a", "gnd", Fraction(1, 2)),
                couplings=(coupling("L1", "L2", 1),),
            ),
            "pole on the frequency axis",
        ),
        (network(R("R1", "in", "gnd", 1), C("C1", "in", "gnd", 0), L("L1", "z", "gnd", 1)), None),
    ],
)
def test_a_lossless_resonance_has_no_peak(netlist, message):
    """An infinite gain at some frequency is no reference, whatever kind of numbers its parts have."""
    form = closed_form(netlist, impedance_ask(netlist, gnd("in")))
    if message is None:
        assert cutoffs(form).cutoffs == ()
        return
    with pytest.raises(AnalysisError) as refused:
        cutoffs(form)
    assert refused.value.code == "question.no-reference"
    assert message in refused.value.message


def test_no_response_has_no_cutoff():
    """A gain of zero at every frequency is no reference."""
    netlist = network(R("R1", "in", "gnd", 1), R("R2", "out", "gnd", 1))
    with pytest.raises(AnalysisError) as refused:
        cutoffs(response(netlist))
    assert refused.value.code == "question.no-reference"


def test_a_hidden_mode_on_the_axis_is_no_cutoff():
    """A lossless tank in series with the drive's return cancels, and no root of it is left."""
    netlist = network(
        R("R1", "in", "out", 1),
        C("C1", "out", "gnd", 1),
        L("L2", "in", "x", 1),
        C("C2", "x", "gnd", 4),
    )
    (item,) = cutoffs(response(netlist)).cutoffs
    assert item.rad_per_s == 1.0


def test_coupled_coils_with_an_irrational_mutual_inductance():
    """Values with square roots give proven cutoffs: two coupled coils as a band-pass."""
    netlist = network(
        R("R1", "in", "a", 1),
        L("L1", "a", "gnd", 2),
        L("L2", "out", "gnd", 1),
        R("R2", "out", "gnd", 3),
        couplings=(coupling("L1", "L2", Fraction(1, 2)),),
    )
    answer = searched(response(netlist), None, None)
    assert answer is not None
    assert [item.direction for item in answer.cutoffs] == ["rising", "falling"]


# ------------------------------------------------------------ closed forms of cutoffs

SECOND_ORDER = [
    section(R("R1", "in", "out", 3), C("C1", "out", "gnd", 5)),
    section(C("C1", "in", "out", 3), R("R1", "out", "gnd", 5)),
    section(R("R1", "in", "out", 3), L("L1", "out", "gnd", 5)),
    section(L("L1", "in", "out", 3), R("R1", "out", "gnd", 5)),
    network(R("R1", "in", "out", 3), R("R2", "out", "gnd", 4), C("C1", "out", "gnd", 5)),
    network(R("R1", "in", "out", 3), L("L1", "out", "a", 2), C("C1", "a", "gnd", 5)),
    network(R("R1", "in", "out", 3), R("R2", "out", "a", 1), C("C1", "a", "gnd", 5)),
    network(R("R1", "in", "out", 3), C("C1", "in", "out", 2), R("R2", "out", "gnd", 1)),
    network(
        R("R1", "in", "a", 3),
        C("C1", "a", "gnd", 5),
        R("R2", "a", "out", 2),
        C("C2", "out", "gnd", 7),
    ),
    network(R("R1", "in", "a", 3), L("L1", "a", "out", 5), C("C1", "out", "gnd", 2)),
    network(
        C("C1", "in", "a", 3),
        L("L1", "a", "gnd", 5),
        R("R1", "a", "out", 2),
        C("C2", "out", "gnd", 1),
    ),
    network(R("lambda", "in", "out", 3), C("N1[2].C", "out", "gnd", 5)),
]


def read_number(text: str, answer_form: ClosedForm, values: dict[str, Fraction]) -> complex:
    """What SymPy's parser makes of a closed form, with the values of its symbols put in."""
    safe = answer_form.spelled(safe=True)
    table = {safe.name(name): value for name, value in values.items()}
    found = parse_expr(text, local_dict={name: Symbol(name) for name in table})
    return complex(found.subs(table).evalf(30))


@pytest.mark.parametrize("netlist", SECOND_ORDER)
@pytest.mark.parametrize("level", [None, Fraction(-10)])
def test_closed_forms_of_cutoffs_evaluate_to_them(netlist, level):
    """The text beside a numeric cutoff is that cutoff, read by SymPy with the values put in."""
    ask = transfer_ask(netlist, gnd("in"), gnd("out"))
    formula = closed_form(netlist, ask, Symbols(symbolic=True))
    values = {name: value.expression.value for name, value in bindings(netlist).items()}
    answer = cutoffs(closed_form(netlist, ask), level=CutoffLevel(level), formula=formula)
    assert answer.cutoffs or "never" in answer.remarks[0]
    for item in answer.cutoffs:
        if item.closed_form is None:
            assert (
                answer.reference.at == "peak"
                or len(formula.coefficients()[1]) > 3
                or mixed(formula)
            )
            continue
        value = read_number(item.closed_form, formula, values)
        assert value.imag == 0
        assert isclose(value.real, item.rad_per_s, rel_tol=1e-12)


def mixed(formula: ClosedForm) -> bool:
    """Whether the response is finite and not zero at both ends, where symbols cannot compare."""
    top, bottom = formula.coefficients()
    return len(top) == len(bottom) and top[0] != 0


def answerable(form: ClosedForm) -> bool:
    """Whether the squared gain solves by roots, and symbols tell what is the reference."""
    top, bottom = form.coefficients()
    equal_ends = mixed(form) and top[0] * bottom[-1] == top[-1] * bottom[0]
    return len(bottom) <= 3 and (not mixed(form) or equal_ends)


@pytest.mark.parametrize("netlist", SECOND_ORDER[:-1])
def test_symbolic_cutoffs_are_complete(netlist):
    """Of symbols: at random values, the roots of the closed forms are the numeric cutoffs."""
    names = [item.name for item in netlist.parts]
    bare = replace(
        netlist,
        parts=tuple(part(item.name, item.kind, *item.nodes, value=None) for item in netlist.parts),
    )
    ask = transfer_ask(bare, gnd("in"), gnd("out"))
    form = closed_form(bare, ask)
    if not answerable(form):
        with pytest.raises(AnalysisError) as refused:
            cutoffs(form)
        assert refused.value.code == "question.no-value"
        return
    answer = cutoffs(form)
    assert answer.complete
    for seed in range(3):
        values = {
            name: Fraction(1 + (seed * 7 + 3 * at) % 11, 2 + at) for at, name in enumerate(names)
        }
        valued = with_numbers(bare, values)
        numeric = cutoffs(closed_form(valued, ask), reference=answer.reference.at)
        roots = []
        for item in answer.cutoffs:
            assert item.closed_form is not None
            value = read_number(item.closed_form, form, values)
            if abs(value.imag) < 1e-20 and value.real > 0:
                roots.append((value.real, item.direction))
        roots.sort()
        assert [value for value, _ in roots] == pytest.approx(
            [item.rad_per_s for item in numeric.cutoffs], rel=1e-12
        )
        for (_, direction), item in zip(roots, numeric.cutoffs, strict=True):
            assert direction in (None, item.direction)
