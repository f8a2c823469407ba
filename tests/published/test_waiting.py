"""Rows that no analysis answers yet: noise and noise bandwidth."""

from .bench import rows
from .quantities import measures

WAITING = frozenset(
    {
        ("noise-network-equivalent", "noise density"),
        ("noise-divider", "noise density"),
        ("noise-ktc-1e-12F", "total r.m.s. noise, R = 100 ohm (independent of R)"),
        ("noise-ktc-1e-12F", "total r.m.s. noise, R = 100000 ohm (independent of R)"),
        ("noise-ktc-rlc", "total r.m.s. noise"),
        ("enbw-butterworth-n1", "noise bandwidth / 3 dB bandwidth"),
        ("enbw-butterworth-n2", "noise bandwidth / 3 dB bandwidth"),
        ("enbw-butterworth-n4", "noise bandwidth / 3 dB bandwidth"),
        ("enbw-butterworth-n5", "noise bandwidth / 3 dB bandwidth"),
        ("enbw-cascade-n2", "noise bandwidth / section corner frequency"),
        ("enbw-cascade-n2", "noise bandwidth / overall 3 dB frequency"),
        ("enbw-cascade-n3", "noise bandwidth / section corner frequency"),
        ("enbw-cascade-n3", "noise bandwidth / overall 3 dB frequency"),
    }
)


def test_no_row_is_forgotten():
    """Rows that the table of quantities answers and rows that wait are all rows, and disjoint."""
    every = {(row.case, row.quantity) for row in rows()}
    reproduced = {(row.case, row.quantity) for row in rows() if len(measures(row.words)) == 1}
    assert not reproduced & WAITING
    assert reproduced | WAITING == every
