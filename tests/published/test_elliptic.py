"""Elliptic networks of orders 3 to 10, computed and tabulated, against SciPy's prototypes."""

from __future__ import annotations

from functools import cache

import numpy as np
import pytest
from scipy import signal
from scipy.optimize import linear_sum_assignment

from acsolve.analyses.pole_record import pole_answer
from tests.analyses.test_transfer_laws import form_of, gnd
from tests.strategies import network

from .elliptic_ladder import EllipticLadder, brune_parts, elliptic_ladder
from .elliptic_tables import ELLIPTIC_TENTH_DB
from .elliptic_theory import MP, characteristic, stop_edge
from .test_prototypes import ROUNDING, distance, exact

DESIGNS = [(0.1, 0.5), (0.5, 0.7), (1.0, 0.9)]
LADDERS = [
    *((order, "plain") for order in (3, 5, 7, 9)),
    *((order, kind) for order in (4, 6, 8, 10) for kind in ("open", "matched")),
]


def prototype(order, ripple, theory):
    """SciPy's zeros and poles, moved along s² as `theory` says; what goes to infinity left out."""
    zeros, poles, _ = signal.ellipap(order, ripple, theory.stop_db)
    moved = [_moved(theory, item) for item in poles]
    kept = sorted(zeros, key=abs)[: 2 * len(theory.notches)]
    return [1j * np.sqrt(float(theory.moved(abs(item) ** 2))) for item in kept], moved


def _moved(theory, place):
    root = MP.sqrt(-theory.moved(-(MP.mpc(place) ** 2)))
    root = -root if root.real > 0 else root
    return complex(root if (root.imag > 0) == (place.imag > 0) else root.conjugate())


def check_network(parts, zeros, poles):
    """The closed form has these poles and, on the axis, these zeros, to 1e-12; and is stable."""
    form = form_of(network(*parts), gnd("in"), gnd("out"))
    assert form is not None
    assert distance(form, poles) < 1e-12
    found = pole_answer(form)
    assert found.zeros is not None
    assert found.stability is not None
    assert found.stability.verdict == "stable"
    assert all(item.value.real == 0 for item in found.zeros.roots)
    ours = sorted(abs(item.value.imag) for item in found.zeros.roots)
    assert ours == pytest.approx(sorted(np.abs(zeros)), rel=1e-12)
    return form


@pytest.mark.parametrize(("order", "kind"), LADDERS)
@pytest.mark.parametrize(("ripple", "modulus"), DESIGNS)
def test_elliptic_ladders(order, kind, ripple, modulus):
    """Ladders from Jacobi's functions have the prototype's poles and zeros, all elements positive.

    In an even order one pair of notches lies at infinity, and SciPy's poles and zeros are moved
    by the same step that made room for it.
    """
    theory = characteristic(order, ripple, modulus, kind)
    made = elliptic_ladder(theory)
    assert all(value > 0 for value in made.elements())
    assert (abs(made.load - 1) < 1e-38) == (kind != "open")
    check_network(made.parts(), *prototype(order, ripple, theory))


@pytest.mark.parametrize("order", [4, 6, 8, 10])
@pytest.mark.parametrize(("ripple", "modulus"), DESIGNS)
def test_plain_prototypes_of_even_order(order, ripple, modulus):
    """Brune sections make the prototype itself, whose gain at infinity is finite.

    The response is SciPy's, to one factor for all frequencies: the division of the source's
    voltage. The gain is largest, sqrt(load)/2, where the load takes all that the source has.
    """
    theory = characteristic(order, ripple, modulus)
    parts = brune_parts(theory)
    values = [item.expression.value for each in parts for item in each.values.values()]
    assert all(value > 0 for value in values)
    zeros, poles, gain = signal.ellipap(order, ripple, theory.stop_db)
    form = check_network(parts, zeros, poles)
    at = np.geomspace(0.1, 10, 200)
    ours, theirs = form.response(at / (2 * np.pi)), signal.freqs_zpk(zeros, poles, gain, at)[1]
    load = float(next(each for each in parts if each.name == "RL").values["value"].expression.value)
    assert np.abs(ours) == pytest.approx(np.abs(theirs) * np.sqrt(load) / 2, rel=1e-9)


# ------------------------------------------------------------ published tables


@cache
def for_edge(order, edge):
    """The theory whose stop band starts at a wanted frequency."""
    if order % 2:
        return characteristic(order, 0.1, 1 / MP.mpf(edge))
    start = 1 / MP.mpf(edge)
    modulus = MP.findroot(
        lambda k: stop_edge(order, k, "matched") - MP.mpf(edge), (start, 1.02 * start), tol=1e-30
    )
    return characteristic(order, 0.1, modulus, "matched")


ROWS = list(ELLIPTIC_TENTH_DB.items())


@pytest.mark.parametrize(("asked", "row"), ROWS)
def test_tabulated_elements_are_the_computed_ones(asked, row):
    """To half a unit of the fourth decimal, and a tenth of that for edges of four decimals."""
    theory = for_edge(*asked)
    either = [elliptic_ladder(theory, turned=turned).elements() for turned in (False, True)]
    assert any(row == pytest.approx(ladder, abs=1.1 * float(ROUNDING)) for ladder in either)


@pytest.mark.parametrize(("asked", "row"), ROWS)
def test_tabulated_ladders(asked, row):
    """Poles and zeros of a tabulated ladder are the prototype's, to what four decimals allow.

    As for ladders without notches: relative errors of coefficients add up from the elements'.
    A notch moves by half the sum of its coil's and its capacitor's.
    """
    order, edge = asked
    theory = for_edge(order, edge)
    zeros, poles = prototype(order, 0.1, theory)
    values = exact(row)
    pairs = [(values[3 * k + 1], values[3 * k + 2]) for k in range((order - 1) // 2)]
    shunts = values[::3] if order % 2 else values[:-1:3]
    last = None if order % 2 else values[-1]
    made = EllipticLadder(tuple(shunts), tuple(pairs), last, exact([1.0])[0])
    form = form_of(network(*made.parts()), gnd("in"), gnd("out"))
    assert form is not None
    found = pole_answer(form)
    assert found.poles is not None
    assert found.zeros is not None
    half = float(ROUNDING)
    ours = sorted(abs(item.value) for item in found.zeros.roots)[::2]
    moved = 0.55 * max(half / float(a) + half / float(b) for a, b in pairs)
    assert ours == pytest.approx(sorted({round(abs(z), 12) for z in zeros}), rel=moved)
    wanted = np.poly(poles).real[::-1]
    allowed = 1.1 * sum(half / value for value in row)
    apart = np.abs(np.array([p.value for p in found.poles.roots])[:, None] - np.array(poles))
    for line, column in zip(*linear_sum_assignment(apart), strict=True):
        place = poles[column]
        shift = allowed * np.polyval(wanted[::-1], abs(place))
        assert apart[line, column] <= 2 * shift / abs(np.polyval(np.polyder(wanted[::-1]), place))
