"""Rows of equal two-ports: powers of a chain matrix against whole networks, balls, formulas."""

from dataclasses import replace
from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.analyses.sweep import solver_for
from acsolve.equations.chain import Base, power
from acsolve.equations.result import Status

BLOCKS = {
    "low-pass": "a -- R -- b\n b -- C -- gnd\n R = 100 ohm\n C = 1 nF",
    "delay": "a -- L -- b\n b -- C -- gnd\n L = 1 uH\n C = 1 nF",
    "lossy delay": "a -- L -- m\n m -- R -- b\n b -- C -- gnd\n b -- G -- gnd\n"
    "let z = 50\n L = 1 uH\n C = 400 pF\n R = 0.1 ohm\n G : resistor\n G = 100 kohm",
    "pad": "a -- R1 -- m\n m -- R2 -- gnd\n m -- R3 -- b\n R1, R3 = 3 ohm\n R2 = 200 ohm",
    "high-pass": "a -- C -- b\n b -- R -- gnd\n R = 10 kohm\n C = 1 nF",
    "stage": "a -- R -- m\n m -- C -- gnd\n U1 : opamp(plus = m, minus = b, out = b)\n"
    " R = 1 kohm\n C = 100 pF",
    "gyrator": "G1 : gyrator(p1 = a, p2 = gnd, s1 = m, s2 = gnd, conductance = 1 mS)\n"
    " m -- C -- gnd\n a -- R -- b\n C = 1 nF\n R = 50 ohm",
    "weak amplifier": "a -- R -- m\n m -- C -- gnd\n R = 1 kohm\n C = 100 pF\n"
    "U1 : transconductance(plus = m, minus = gnd, out = b, ref = gnd, gain = -2 mS)\n"
    " b -- Rb -- gnd\n Rb = 600 ohm\n m -- Rf -- b\n Rf = 10 kohm",
    "coupled": "a -- L1 -- b\n b -- C -- gnd\n b -- L2 -- gnd\n couple L1, L2 = 0.2\n"
    " L1 = 1 uH\n L2 = 30 uH\n C = 1 nF",
    "line": "T1 : line(near = a, far = b, z0 = 50 ohm, delay = 1 ns)\n b -- C -- gnd\n C = 2 pF",
}


def circuit(block: str, count: int) -> acsolve.Circuit:
    """A row between a source resistance and a load."""
    body = "\n    ".join(line.strip() for line in block.splitlines())
    return acsolve.parse(
        f"block section(a, b)\n    {body}\nend\n"
        f"src -- Rs -- in\nin -- N1 : {count} * section -- far\nfar -- RL -- gnd\n"
        "Rs = 75 ohm\nRL = 60 ohm\n"
    )


def written_out(found: acsolve.Circuit) -> acsolve.Circuit:
    """The same circuit without its row."""
    return replace(found, netlist=replace(found.netlist, cascades=()))


def relative(first, second):
    """|first/second - 1|, powers of two included."""
    shift = np.exp2((first.exponent - second.exponent).astype(float))
    with np.errstate(all="ignore"):  # where both are zero
        return np.abs(first.mantissa / second.mantissa * shift - 1)


@pytest.mark.parametrize("name", BLOCKS)
@pytest.mark.parametrize("count", [33, 200])
def test_a_row_answers_as_its_parts_do(name, count):
    """Transfer, impedances and currents, with slope, to what the whole network promises."""
    whole = circuit(BLOCKS[name], count)
    assert whole.netlist.cascades, "the row must be found"
    flat = written_out(whole)
    hertz = np.geomspace(1e3, 3e7, 23)
    paths = [whole.path("src", "far"), whole.looking_into("src"), whole.looking_into("far")]
    if name != "stage":  # an ideal output cannot be driven
        paths.append(whole.path("far", "in"))
    for path in paths:
        row = solver_for(whole.netlist, path.ask, hertz).solve(hertz)
        parts = solver_for(flat.netlist, path.ask, hertz).solve(hertz)
        there = (parts.status <= Status.RE_SOLVED) & (row.status <= Status.RE_SOLVED)
        assert np.array_equal(row.status == Status.ZERO, parts.status == Status.ZERO)
        assert np.all(relative(row, parts)[there] <= 1e-12 + 3 * (row.error + parts.error)[there])
        np.testing.assert_allclose(row.slope[there], parts.slope[there], rtol=1e-7)


@pytest.mark.parametrize("name", BLOCKS)
def test_errors_stay_below_their_estimate(name):
    """A thousand copies against balls of the same row, deep attenuation included."""
    whole = circuit(BLOCKS[name], 1000)
    path = whole.path("src", "far")
    hertz = np.geomspace(1e2, 1e8, 31)
    solver = solver_for(whole.netlist, path.ask, hertz)
    found = solver.solve(hertz)
    for place, frequency in enumerate(hertz):
        truth = solver.precise.at(Fraction(float(frequency)))[0]
        if found.status[0, place] != Status.OK:
            continue
        shift = 2.0 ** float(found.exponent[0, place] - truth.exponent)
        off = abs(found.mantissa[0, place] * shift / truth.mantissa - 1)
        assert off <= found.error[0, place] + 4e-16


def test_balls_of_a_row_hold_the_balls_of_its_parts():
    """The enclosure of the power and the whole network's elimination meet."""
    for block in BLOCKS.values():
        whole = circuit(block, 60)
        flat = written_out(whole)
        ask = whole.path("src", "far").ask
        hertz = np.array([1.7e5])
        row = solver_for(whole.netlist, ask, hertz).precise.at(Fraction(170_000))[0]
        parts = solver_for(flat.netlist, ask, hertz).precise.at(Fraction(170_000))[0]
        assert row.exponent == parts.exponent
        assert abs(row.mantissa - parts.mantissa) < 1e-15 * abs(parts.mantissa)
        assert abs(row.slope - parts.slope) <= 1e-14 * abs(parts.slope)


def test_a_hundred_thousand_sections_far_below_a_doubles_range():
    """The image parameters of an L-section give gain and phase in closed form.

    With A + D = 2·cosh(g) the power is sinh(N·g) times an expression in M (matched ends not
    needed): V1/V2 = A_N + B_N/RL with A_N = cosh(N·g) + (A - D)/2·sinh(N·g)/sinh(g) and
    B_N = B·sinh(N·g)/sinh(g); O. J. Zobel, Bell Syst. Tech. J. 2 (1923), from memory.
    """
    from flint import acb, ctx

    count, r, c, load = 100_000, 120, Fraction(1, 10**9), 60
    whole = circuit("a -- R -- b\n b -- C -- gnd\n R = 120 ohm\n C = 1 nF", count)
    whole = whole.with_values(Rs="0 ohm")
    hertz = np.geomspace(1e-2, 1e5, 8)
    solver = solver_for(whole.netlist, whole.path("src", "far").ask, hertz)
    found = solver.solve(hertz)
    assert found.gain_db()[0].min() < -100_000
    before, ctx.prec = ctx.prec, 400
    try:
        for place, frequency in enumerate(hertz):
            s = acb(0, 2) * acb.pi() * acb(float(frequency))
            shunt = s * acb(c.numerator) / c.denominator
            a, b, d = 1 + r * shunt, acb(r), acb(1)
            g = ((a + d) / 2).acosh()
            ratio = (count * g).sinh() / g.sinh()
            whole_a = (count * g).cosh() + (a - d) / 2 * ratio
            truth = 1 / (whole_a + b * ratio / load)
            ours = acb(complex(found.mantissa[0, place])) * acb(2) ** int(found.exponent[0, place])
            assert float(abs(ours / truth - 1).mid()) < 1e-10
    finally:
        ctx.prec = before


def test_nodes_between_copies_can_be_asked_about():
    """The copy that holds the node is written out; what lies before and after is not."""
    whole = circuit(BLOCKS["lossy delay"], 150)
    flat = written_out(whole)
    hertz = np.geomspace(1e5, 1e7, 11)
    for node in ("N1[75].b", "N1[75].m", "N1[1].m", "N1[150].m"):
        here = whole.path("src", node).response(hertz)
        np.testing.assert_allclose(here, flat.path("src", node).response(hertz), rtol=1e-10)


def test_values_given_later_reach_into_a_row():
    """A value outside the copies that their own are made of."""
    text = (
        "let k = 1\nblock section(a, b)\n a -- R -- b\n b -- C -- gnd\n R = k*100 ohm\n"
        " C = 1 nF\nend\nsrc -- N1 : 64 * section -- far\nfar -- RL -- gnd\nRL = 1 kohm\n"
    )
    changed = acsolve.parse(text).with_values(k="3")
    assert changed.netlist.cascades
    plain = acsolve.parse(text.replace("let k = 1", "let k = 3"))
    hertz = np.geomspace(1e3, 1e6, 5)
    here, there = (item.path("src", "far").response(hertz) for item in (changed, plain))
    np.testing.assert_allclose(here, there, rtol=1e-13)


@given(
    st.lists(st.complex_numbers(max_magnitude=1.5), min_size=4, max_size=4),
    st.integers(1, 60),
)
@settings(max_examples=200, deadline=None)
def test_powers_of_any_matrix(items, count):
    """M^n/2^e and its derivative, against NumPy's matrix power of M and of a dual."""
    rate = tuple(np.array([item]) for item in (1.0, 0.5j, -0.25, 2.0))
    matrix = np.array(items).reshape(2, 2)
    beside, plain = (
        [np.array([item]) for item in each.ravel()] for each in (matrix - np.eye(2), matrix)
    )
    found, slope, exponent = power(Base(tuple(plain), tuple(beside), rate), count)
    dual = np.block([[matrix, np.array(rate).reshape(2, 2)], [np.zeros((2, 2)), matrix]])
    whole = np.linalg.matrix_power(dual, count)
    scale = np.linalg.matrix_power(np.abs(dual), count) + 1
    for place in range(4):
        i, k = divmod(place, 2)
        value = found[place][0] * 2.0 ** float(exponent[0])
        assert abs(value - whole[i, k]) <= 1e-13 * count * scale[i, k]
        assert abs(slope[place][0] * 2.0 ** float(exponent[0]) - whole[i, k + 2]) <= (
            1e-13 * count * scale[i, k + 2]
        )


def test_a_row_that_passes_nothing_forwards_is_written_out():
    """Buffers that point backwards have no chain matrix; the other direction has its answer."""
    block = (
        "U1 : opamp(plus = m, minus = a, out = a)\n m -- C -- gnd\n m -- R -- b\n"
        "b -- G1 -- gnd\n R = 1 kohm\n C = 100 pF\n G1 : resistor\n G1 = 1 kohm"
    )
    whole = circuit(block, 40)
    assert whole.netlist.cascades
    hertz = np.geomspace(1e3, 1e6, 5)
    path = whole.path("far", "src")
    there = written_out(whole).path("far", "src").response(hertz)
    np.testing.assert_allclose(path.response(hertz), there, rtol=1e-12)
    assert np.all(there != 0)


def test_measured_parts_keep_a_row_written_out():
    """Their data belong to each copy by its name, and need not be reciprocal."""
    text = (
        'block section(a, b)\n a -- X1 : measured(file = "cable.s2p") -- b\n b -- R -- gnd\n'
        " R = 1 kohm\nend\nin -- N1 : 40 * section -- out\n"
    )
    assert acsolve.parse(text).netlist.cascades == ()
