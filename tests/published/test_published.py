"""Published numbers, reproduced from circuit files through the door.

Rows whose words stand in `DESIGN` belong to the cited design formula and are computed from
the part values; every other row is computed from the solved circuit.
"""

from collections import defaultdict
from fractions import Fraction

import numpy as np
import pytest

from .bench import ENGINES, Bench, Row, closed_form, rows
from .quantities import TABLE, measures
from .test_waiting import WAITING


def answered() -> list[Row]:
    """The rows that today's analyses can answer."""
    return [row for row in rows() if (row.case, row.quantity) not in WAITING]


@pytest.mark.parametrize("row", answered(), ids=lambda row: row.name)
def test_row(row):
    """A published number is reproduced within its own tolerance, by each engine alone."""
    (key,) = measures(row.words)
    for engine in ENGINES:
        found = TABLE[key](Bench(row.case, engine), row)
        for item in np.atleast_1d(found):
            assert row.agrees(item), f"{engine}: {item} for {row}"


@pytest.mark.parametrize(
    "row", [row for row in answered() if "exact" in row.given], ids=lambda row: row.name
)
def test_exact_row(row):
    """A published fraction is the closed form at 0 Hz itself, without any tolerance."""
    if row.unit == "ohm":
        asked = Bench(row.case, "closed form").impedance()
    elif "other inputs grounded" in row.quantity:
        bit = row.quantity.split()[2]
        asked = Bench(row.case, "closed form").ratio(bit, "n3", f"only {bit}")
    else:
        asked = Bench(row.case, "closed form").transfer()
    top, bottom = closed_form(asked).numbers()
    assert top[0] / bottom[0] == Fraction(row.given["exact"])


def test_forms_of_one_function():
    """Two canonical forms of one reactance function have the same closed form."""
    forms = [
        closed_form(Bench(case, "closed form").impedance()).numbers()
        for case in ("lc-oneport-foster2", "lc-oneport-cauer1")
    ]
    (first_top, first_bottom), (second_top, second_bottom) = forms
    assert [a / first_bottom[-1] for a in first_top] == [a / second_bottom[-1] for a in second_top]
    assert first_top[0] / first_bottom[1] == Fraction(4 * 9, 4)


def test_roots_are_distinct():
    """Each pole or zero that a case lists is another root of the network."""
    found = defaultdict(list)
    for row in answered():
        if isinstance(row.value, list):
            (key,) = measures(row.words)
            found[row.case, key].append(TABLE[key](Bench(row.case, ENGINES[0]), row))
    assert found
    assert all(len(set(roots)) == len(roots) for roots in found.values())


def test_every_key_is_used():
    """Every entry of the table of quantities answers at least one row."""
    used = {key for row in answered() for key in measures(row.words)}
    assert used == set(TABLE)
