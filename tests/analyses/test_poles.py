"""Poles and zeros of networks: certified, on the right side, as many as the order."""

from __future__ import annotations

import itertools
from fractions import Fraction
from math import hypot, isclose, pi, sqrt

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.poles import PolesZeros, poles_zeros
from acsolve.analyses.question import impedance_ask
from acsolve.analyses.transfer import closed_form, transfer_answer
from acsolve.circuit.netlist import Netlist
from tests.reference.curve import Curve
from tests.strategies import (
    PASSIVE,
    C,
    L,
    R,
    any_lumped,
    connected,
    coupling,
    hertz_value,
    network,
    positives,
)

from .test_transfer_laws import drawn_pairs, form_of, gnd


def roots_of(form: ClosedForm) -> PolesZeros:
    """Poles and zeros, which a numeric form has."""
    found = poles_zeros(form)
    assert found is not None
    return found


def impedance(netlist: Netlist) -> ClosedForm:
    """The impedance into `in`."""
    return closed_form(netlist, impedance_ask(netlist, gnd("in")))


def drawn_form(data, netlist: Netlist, quantity: str = "voltage-ratio") -> ClosedForm:
    """A numeric response of a network between drawn pairs."""
    source, target = drawn_pairs(data, netlist)
    form = form_of(netlist, source, source if quantity == "impedance" else target, quantity)
    assume(form is not None and form.numerator != 0)
    assert form is not None
    return form


@settings(max_examples=40)
@given(st.data())
def test_poles_and_zeros_rebuild_the_response(data):
    """gain · prod(s - zeros)/prod(s - poles) is the closed form, at a frequency off the axis."""
    form = drawn_form(data, data.draw(any_lumped(symbols=False)))
    found = roots_of(form)
    curve = Curve(form)
    mp = curve.mp
    top, bottom = curve.sides
    assert len(found.zeros) == len(top) - 1
    assert len(found.poles) == len(bottom) - 1
    s = mp.mpc("0.7", "1.3")
    for side, roots in ((top, found.zeros), (bottom, found.poles)):
        rebuilt = side[-1]
        for root in roots:
            rebuilt *= s - mp.mpc(root)
        value = mp.polyval(side[::-1], s)
        near = min((abs(s - mp.mpc(root)) / (1 + abs(root)) for root in roots), default=1)
        assert abs(rebuilt - value) <= 1e-14 * (1 + len(roots)) / near * abs(value)


@settings(max_examples=30)
@given(st.data())
def test_passive_networks_are_stable(data):
    """Impedances of positive R, L, C have poles and zeros in the left half plane or on its edge."""
    form = drawn_form(data, data.draw(connected(tree=PASSIVE)), "impedance")
    found = roots_of(form)
    for root in found.poles + found.zeros:
        assert root.real <= 0


@settings(max_examples=40)
@given(st.data(), st.sampled_from(["L", "C"]))
def test_rc_and_rl_impedances_have_real_alternating_poles_and_zeros(data, kind):
    """Of R and C (or R and L) alone, poles and zeros of an impedance alternate on the real axis."""
    kinds = ("resistor", {"L": "inductor", "C": "capacitor"}[kind])
    netlist = data.draw(connected(tree=kinds, extra=kinds))
    assume(all(len(item.values) == 1 for item in netlist.parts) and not netlist.couplings)
    found = roots_of(drawn_form(data, netlist, "impedance"))
    assert all(root.imag == 0 for root in found.poles + found.zeros)
    places = sorted(
        [(-root.real, "pole") for root in found.poles]
        + [(-root.real, "zero") for root in found.zeros]
    )
    names = [name for _, name in places]
    assert all(first != second for first, second in itertools.pairwise(names))
    if names:  # an RC impedance falls with frequency, an RL impedance rises
        assert names[0] == ("pole" if kind == "C" else "zero")


@settings(max_examples=40)
@given(st.data())
def test_lossless_networks_have_all_roots_exactly_on_the_axis(data):
    """Of L and C alone, every pole and zero of an impedance has a real part of exactly zero.

    Foster's reactance theorem: they alternate along the axis (R. M. Foster, Bell System
    Technical Journal 3 (1924)).
    """
    kinds = ("inductor", "capacitor")
    netlist = data.draw(connected(tree=kinds, extra=kinds))
    assume(all(len(item.values) == 1 for item in netlist.parts))
    found = roots_of(drawn_form(data, netlist, "impedance"))
    assert all(root.real == 0.0 for root in found.poles + found.zeros)
    axis = sorted(
        [(root.imag, "pole") for root in found.poles]
        + [(root.imag, "zero") for root in found.zeros]
    )
    assert all(first[1] != second[1] for first, second in itertools.pairwise(axis))


@settings(max_examples=40)
@given(positives, positives, positives)
def test_poles_of_values_with_pi(ohm, henry, hertz):
    """A coil computed with pi: the poles are those of the quadratic formula."""
    netlist = network(
        R("R1", "in", "gnd", ohm),
        L("L1", "in", "gnd", hertz_value(hertz, henry)),
        C("C1", "in", "gnd", 1),
    )
    found = roots_of(impedance(netlist))
    coil = float(henry) / (2 * pi * float(hertz))
    half, square = 1 / (2 * float(ohm)), 1 / coil
    assert found.zeros == (0j,)
    if square > half**2 * (1 + 1e-9):
        first, second = found.poles
        assert first == second.conjugate()
        assert isclose(first.real, -half, rel_tol=1e-15)
        assert isclose(abs(first.imag), sqrt(square - half**2), rel_tol=1e-6)
        assert isclose(hypot(first.real, first.imag), sqrt(square), rel_tol=1e-14)


@pytest.mark.parametrize("loss", [None, Fraction(10**40)])
def test_a_lossless_tank_with_pi_is_exactly_on_the_axis(loss):
    """Whatever its numbers, a tank without losses has imaginary poles; a tiny loss moves them left."""
    parts = [L("L1", "in", "gnd", hertz_value(Fraction(1), Fraction(7))), C("C1", "in", "gnd", 3)]
    if loss is not None:
        parts.append(R("R1", "in", "gnd", loss))
    found = roots_of(impedance(network(*parts)))
    for root in found.poles:
        assert root.real == (
            0.0 if loss is None else pytest.approx(-1 / (6 * float(loss)), rel=1e-14)
        )
    assert found.poles[0] == found.poles[1].conjugate()


def test_double_poles_are_named_twice():
    """Two equal sections apart from each other have a double pole."""
    netlist = network(
        R("R1", "in", "a", 2),
        C("C1", "a", "gnd", 3),
        *buffered("a", "b"),
        R("R2", "b", "out", 3),
        C("C2", "out", "gnd", 2),
    )
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    assert roots_of(form).poles == (complex(-1 / 6), complex(-1 / 6))


def buffered(here: str, there: str):
    """A follower."""
    from tests.strategies import part

    return (part("U1", "opamp", here, there, there, "gnd"),)


def test_symbols_have_no_numeric_poles():
    """A form with free symbols has no poles to list."""
    netlist = network(R("R1", "in", "out"), C("C1", "out", "gnd", 1))
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    assert poles_zeros(form) is None


def test_coupled_coils_with_irrational_mutual_inductance():
    """Poles of coupled coils with sqrt(L1·L2) irrational: two real ones, in the left half plane."""
    netlist = network(
        R("R1", "in", "a", 1),
        L("L1", "a", "gnd", 2),
        L("L2", "out", "gnd", 1),
        R("R2", "out", "gnd", 3),
        couplings=(coupling("L1", "L2", Fraction(1, 2)),),
    )
    form = form_of(netlist, gnd("in"), gnd("out"))
    assert form is not None
    found = transfer_answer(form).roots
    assert found is not None
    # (1 + 2·s)·(3 + s) - k²·2·s² = 3 + 7·s + 3/2·s²
    exact = sorted((-7 + sign * sqrt(49 - 18)) / 3 for sign in (1, -1))
    assert sorted(root.real for root in found.poles) == pytest.approx(exact, rel=1e-15)
    assert all(root.imag == 0 for root in found.poles)
