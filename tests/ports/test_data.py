"""Data of networks: shapes that are refused, rows of two-ports."""

from __future__ import annotations

import numpy as np
import pytest

from acsolve import AcsolveError, PortData

HERTZ = np.array([1e6, 2e6, 5e6])


def pad(loss_db: float, reference: float = 50.0) -> PortData:
    """A matched attenuator."""
    through = 10 ** (-loss_db / 20)
    matrix = np.broadcast_to([[0, through], [through, 0]], (3, 2, 2))
    return PortData(HERTZ, matrix, "s", np.full(2, reference))


def test_losses_of_matched_pads_add():
    """6 dB behind 10 dB are 16 dB, and still matched."""
    both = pad(6).cascade(pad(10))
    np.testing.assert_allclose(20 * np.log10(abs(both.matrix[:, 1, 0])), -16, rtol=1e-14)
    assert (both.matrix[:, 0, 0] == 0).all()


def test_a_cascade_multiplies_chain_matrices():
    """The row of any two networks is the product of their ABCD matrices."""
    random = np.random.default_rng(7)
    first, second = (
        PortData(HERTZ, random.normal(size=(3, 2, 2)) * 0.4 + 0.1j, "s", random.uniform(9, 99, 2))
        for _ in range(2)
    )
    product = first.to("abcd").matrix @ second.to("abcd").matrix
    np.testing.assert_allclose(first.cascade(second).to("abcd").matrix, product, rtol=1e-11)


def test_deep_attenuation_keeps_its_digits():
    """Twenty pads of 100 dB: the chain matrix would hold nothing but its largest part."""
    row = pad(100)
    for _ in range(5):
        row = row.cascade(pad(100))
    np.testing.assert_allclose(abs(row.matrix[:, 1, 0]), 1e-30, rtol=1e-13)


@pytest.mark.parametrize(
    ("change", "code"),
    [
        ({"hertz": [2.0, 1.0, 3.0]}, "ports.order"),
        ({"hertz": [1.0, 1.0, 3.0]}, "ports.order"),
        ({"hertz": [-1.0, 1.0, 3.0]}, "ports.order"),
        ({"hertz": [1.0, 2.0]}, "ports.size"),
        ({"reference": [50.0]}, "ports.size"),
        ({"reference": [50.0, 0.0]}, "ports.reference"),
        ({"matrix": np.zeros((3, 3, 3)), "reference": [1, 1, 1], "name": "h"}, "ports.size"),
    ],
)
def test_data_that_do_not_fit_are_refused(change, code):
    """Shapes, order and references are checked once, when data are made."""
    usual = {"hertz": HERTZ, "matrix": np.zeros((3, 2, 2)), "name": "s", "reference": [50.0, 50.0]}
    with pytest.raises(AcsolveError) as caught:
        PortData(**{**usual, **change})
    assert caught.value.code == code


def test_networks_at_other_frequencies_do_not_stand_in_a_row():
    """Nothing is interpolated silently."""
    other = PortData(HERTZ * 2, pad(3).matrix, "s", pad(3).reference)
    with pytest.raises(AcsolveError, match="different frequencies"):
        pad(6).cascade(other)


def test_arrays_are_closed():
    """Data do not change behind anyone's back."""
    with pytest.raises(ValueError, match="read-only"):
        pad(6).matrix[0, 0, 0] = 1
