"""Ladders from published tables and from exact formulas against SciPy's analogue prototypes."""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise
from math import comb, factorial

import mpmath
import numpy as np
import pytest
from scipy import signal
from scipy.optimize import linear_sum_assignment

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.pole_record import pole_answer
from tests.analyses.test_transfer_laws import form_of, gnd
from tests.strategies import C, L, R, network

from .prototype_tables import BESSEL, BUTTERWORTH, CHEBYSHEV_3_DB, CHEBYSHEV_HALF_DB

MP = mpmath.mp.clone()
MP.dps = 60


def ladder(elements, load, *, source=True) -> ClosedForm:
    """From `in`: 1 ohm (or none), then shunt C, series L, shunt C, …; `load` as in the tables.

    Without a source resistance the ladder starts with a series coil.
    """
    parts, node = [], "n0" if source else "in"
    if source:
        parts.append(R("R0", "in", "n0", 1))
    shunt = source
    for place, value in enumerate(elements, start=1):
        if shunt:
            parts.append(C(f"C{place}", node, "gnd", value))
        else:
            parts.append(L(f"L{place}", node, f"n{place}", value))
            node = f"n{place}"
        shunt = not shunt
    last_is_shunt = not shunt
    parts.append(R("RL", node, "gnd", load if last_is_shunt else 1 / load))
    form = form_of(network(*parts), gnd("in"), gnd(node))
    assert form is not None
    return form


def exact(values) -> list[Fraction]:
    """Decimals as they are printed, or numbers to 40 digits."""
    return [
        Fraction(str(value)) if isinstance(value, float) else Fraction(MP.nstr(value, 45))
        for value in values
    ]


def distance(form: ClosedForm, poles) -> float:
    """The largest relative distance of a pole from the prototype's."""
    found = pole_answer(form)
    assert found.poles is not None
    assert all(item.multiplicity == 1 for item in found.poles.roots)
    values = np.array([item.value for item in found.poles.roots])
    assert len(values) == len(poles)
    apart = np.abs(values[:, None] - np.asarray(poles)[None, :])
    assert sorted(apart.argmin(axis=1)) == list(range(len(poles)))
    return float((apart.min(axis=1) / np.abs(values)).max())


def table_rows(table):
    """(order, elements, load)."""
    return [(order, row[:-1], row[-1]) for order, row in table.items()]


ROUNDING = Fraction(1, 20_000)  # half a unit of the fourth decimal
TABLES = [
    *[("butterworth", *row) for row in table_rows(BUTTERWORTH)],
    *[("half a decibel", *row) for row in table_rows(CHEBYSHEV_HALF_DB)],
    *[("three decibels", *row) for row in table_rows(CHEBYSHEV_3_DB)],
    *[("bessel", *row) for row in table_rows(BESSEL)],
]
PROTOTYPES = {
    "butterworth": signal.buttap,
    "half a decibel": lambda order: signal.cheb1ap(order, 0.5),
    "three decibels": lambda order: signal.cheb1ap(order, 3),
    "bessel": lambda order: signal.besselap(order, norm="delay"),
}


@pytest.mark.parametrize(("kind", "order", "elements", "load"), TABLES)
def test_tabulated_ladders(kind, order, elements, load):
    """Denominator and poles are the prototype's, to what four decimals of each element allow.

    Each coefficient is a sum of positive products with every element once at most: its
    relative error is at most the sum of theirs, and moves a pole p by sum |dc_k·p^k|/|D'(p)|.
    """
    form = ladder(exact(elements), Fraction(str(load)))
    allowed = 1.01 * sum(float(ROUNDING) / value for value in (*elements, 2 * load))
    poles = PROTOTYPES[kind](order)[1]
    wanted = np.poly(poles).real[::-1]
    numbers = form.numbers()
    assert numbers is not None
    ours = np.array([float(value / numbers[1][0]) for value in numbers[1]])
    assert ours == pytest.approx(wanted / wanted[0], rel=allowed)
    found = pole_answer(form)
    assert found.poles is not None
    values = np.array([item.value for item in found.poles.roots])
    apart = np.abs(values[:, None] - np.asarray(poles)[None, :])
    rows, columns = linear_sum_assignment(apart)
    for row, column in zip(rows, columns, strict=True):
        place = poles[column]
        moved = allowed * np.polyval(wanted[::-1], abs(place))
        limit = moved / abs(np.polyval(np.polyder(wanted[::-1]), place))
        assert apart[row, column] <= 2 * limit


@pytest.mark.parametrize("order", range(3, 11))
def test_butterworth_elements_from_their_formula(order):
    """g_k = 2·sin((2k - 1)·pi/2n)."""
    elements = [2 * MP.sin((2 * k - 1) * MP.pi / (2 * order)) for k in range(1, order + 1)]
    form = ladder(exact(elements), Fraction(1))
    assert distance(form, signal.buttap(order)[1]) < 1e-12


@pytest.mark.parametrize("order", range(3, 11))
@pytest.mark.parametrize("ripple", [0.1, 0.5, 3.0])
def test_chebyshev_elements_from_their_recursion(order, ripple):
    """The recursion of V. Belevitch and H. J. Orchard, as in Matthaei, Young and Jones."""
    beta = MP.log(MP.coth(MP.mpf(ripple) * MP.log(10) / 40))
    gamma = MP.sinh(beta / (2 * order))
    a = [MP.sin((2 * k - 1) * MP.pi / (2 * order)) for k in range(1, order + 1)]
    b = [gamma**2 + MP.sin(k * MP.pi / order) ** 2 for k in range(1, order + 1)]
    elements = [2 * a[0] / gamma]
    for k in range(1, order):
        elements.append(4 * a[k - 1] * a[k] / (b[k - 1] * elements[-1]))
    load = MP.mpf(1) if order % 2 else MP.coth(beta / 4) ** 2
    form = ladder(exact(elements), exact([load])[0])
    assert distance(form, signal.cheb1ap(order, ripple)[1]) < 1e-12


def reverse_bessel(order: int) -> list[Fraction]:
    """The reverse Bessel polynomial by rising power."""
    return [
        Fraction(factorial(2 * order - k), 2 ** (order - k) * factorial(k) * factorial(order - k))
        for k in range(order + 1)
    ]


def continued_fraction(values: list[Fraction]) -> list[Fraction]:
    """The quotients of the Stieltjes fraction of even over odd part, the larger first."""
    upper = [value if (len(values) - 1 - k) % 2 == 0 else 0 for k, value in enumerate(values)]
    lower = [value if (len(values) - 1 - k) % 2 == 1 else 0 for k, value in enumerate(values)]
    found = []
    while any(lower):
        top = max(k for k, value in enumerate(upper) if value)
        quotient = upper[top] / lower[top - 1]
        found.append(Fraction(quotient))
        left = [value - quotient * (lower[k - 1] if k else 0) for k, value in enumerate(upper)]
        upper, lower = lower, left
    return found


@pytest.mark.parametrize("order", range(3, 11))
def test_bessel_elements_from_the_continued_fraction(order):
    """A lossless ladder on one resistor from the reverse Bessel polynomial: exact throughout.

    The denominator is the polynomial itself, coefficient by coefficient, and its roots are
    SciPy's to 1e-12.
    """
    wanted = reverse_bessel(order)
    assert wanted[-2] == comb(order + 1, 2)
    elements = continued_fraction(wanted)
    assert len(elements) == order
    assert all(value > 0 for value in elements)
    form = ladder(elements[::-1], Fraction(1), source=False)
    numbers = form.numbers()
    assert numbers is not None
    assert [value / numbers[1][0] for value in numbers[1]] == [
        value / wanted[0] for value in wanted
    ]
    assert distance(form, signal.besselap(order, norm="delay")[1]) < 1e-12


def test_the_tables_fall_and_rise_as_they_must():
    """A slip of the pen shows: Bessel rows fall, Chebyshev rows of odd order are palindromes."""
    for row in BESSEL.values():
        assert all(a > b for a, b in pairwise(row[:-1]))
    for table in (CHEBYSHEV_HALF_DB, CHEBYSHEV_3_DB, BUTTERWORTH):
        for order, row in table.items():
            if order % 2 or table is BUTTERWORTH:
                assert row[:-1] == row[-2::-1]
