"""Conversions between sets of parameters: exact round trips, published tables, n ports."""

from __future__ import annotations

from fractions import Fraction
from itertools import product

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from acsolve.ports.convert import converted
from acsolve.ports.sets import NAMES

_FRACTIONS = st.fractions(min_value=-9, max_value=9, max_denominator=12)


def _exact(*numbers):
    return np.array(numbers, dtype=object).reshape(2, 2)


@settings(derandomize=True, deadline=None)
@given(numbers=st.lists(_FRACTIONS, min_size=4, max_size=4))
def test_round_trips_are_exact(numbers):
    """From any set to any other and back is the same matrix, with ==."""
    given_ = _exact(*numbers)
    for name, to in product(NAMES, NAMES):
        try:
            there = converted(given_, name, to, reference=Fraction(50))
            back = converted(there, to, name, reference=Fraction(50))
        except ZeroDivisionError:
            continue  # that set does not exist
        assert (back == given_).all(), (name, to)


@settings(derandomize=True, deadline=None)
@given(numbers=st.lists(_FRACTIONS, min_size=4, max_size=4))
def test_z_and_y_are_inverse(numbers):
    """Y is the inverse of z, and g of h, exactly."""
    a, b, c, d = numbers
    assume(a * d != b * c)
    for name, to in (("z", "y"), ("h", "g")):
        assert (converted(_exact(*numbers), name, to).dot(_exact(*numbers)) == np.eye(2)).all()


@settings(derandomize=True, deadline=None)
@given(numbers=st.lists(_FRACTIONS, min_size=4, max_size=4), r=st.integers(1, 99))
def test_table_of_s_and_other_sets(numbers, r):
    """The table of conversions for equal real references (D. A. Frickey, 1994), exactly."""
    z11, z12, z21, z22 = numbers
    size = (z11 + r) * (z22 + r) - z12 * z21
    assume(size != 0 and z21 != 0)
    expected = _exact(
        ((z11 - r) * (z22 + r) - z12 * z21) / size,
        2 * z12 * r / size,
        2 * z21 * r / size,
        ((z11 + r) * (z22 - r) - z12 * z21) / size,
    )
    s = converted(_exact(*numbers), "z", "s", reference=Fraction(r))
    assert (s == expected).all()
    s11, s12, s21, s22 = s.ravel()
    chain = _exact(
        ((1 + s11) * (1 - s22) + s12 * s21) / (2 * s21),
        ((1 + s11) * (1 + s22) - s12 * s21) * r / (2 * s21),
        ((1 - s11) * (1 - s22) - s12 * s21) / (2 * s21 * r),
        ((1 - s11) * (1 + s22) + s12 * s21) / (2 * s21),
    )
    assert (converted(s, "s", "abcd", reference=Fraction(r)) == chain).all()
    assert (converted(_exact(*numbers), "z", "abcd") == chain).all()


@pytest.mark.parametrize("ports", [1, 2, 3, 6])
def test_many_ports_follow_the_matrix_formulas(ports):
    """S = (Z - R)(Z + R)^-1 scaled by the roots of the references, for any number of ports."""
    random = np.random.default_rng(ports)
    z = random.normal(size=(5, ports, ports)) + 1j * random.normal(size=(5, ports, ports))
    reference = random.uniform(10, 90, ports)
    r, root = np.diag(reference), np.diag(np.sqrt(reference))
    expected = np.linalg.inv(root) @ (z - r) @ np.linalg.inv(z + r) @ root
    s = converted(z, "z", "s", reference=reference)
    np.testing.assert_allclose(s, expected, rtol=1e-11)
    np.testing.assert_allclose(converted(s, "s", "z", reference=reference), z, rtol=1e-11)
    np.testing.assert_allclose(
        converted(s, "s", "y", reference=reference), np.linalg.inv(z), rtol=1e-10
    )


def test_another_reference_is_the_same_network():
    """Changing the references and back changes nothing."""
    s = np.array([[0.1 + 0.2j, 0.7], [0.6j, -0.3]])
    there = converted(s, "s", "s", reference=50, to_reference=[75, 20])
    back = converted(there, "s", "s", reference=[75, 20], to_reference=50)
    np.testing.assert_allclose(back, s, rtol=1e-14)
    assert abs(there - s).max() > 0.1


def test_what_does_not_exist_is_not_a_number():
    """A series resistor has no z; doubles say so point by point, and stay silent."""
    chain = np.array([[[1, 20], [0, 1]], [[1, 20], [0.5, 11]]], dtype=complex)
    z = converted(chain, "abcd", "z")
    assert np.isnan(z[0]).all()
    np.testing.assert_allclose(z[1], [[2, 2], [2, 22]])
