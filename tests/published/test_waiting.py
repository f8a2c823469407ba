"""Rows that no analysis answers yet: noise, noise bandwidth, steps and moments."""

from .bench import rows
from .quantities import measures

STEP = ("overshoot = exp(-pi z/sqrt(1-z^2))", "response at the first undershoot")

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
        ("step-rc-first-order", "response at t = tau"),
        ("step-rc-first-order", "response at t = 5 tau"),
        ("step-rc-first-order", "50 % delay = ln 2 tau"),
        ("step-rc-first-order", "10-90 % rise time = ln 9 tau"),
        ("step-rc-first-order", "rise time times 3 dB bandwidth"),
        ("step-rc-first-order", "rise time times 3 dB bandwidth, exact ln 9/(2 pi)"),
        ("step-rlc-zeta-0.2", STEP[0]),
        ("step-rlc-zeta-0.2", STEP[1]),
        ("step-rlc-zeta-0.707", STEP[0]),
        ("step-rlc-zeta-0.707", STEP[1]),
        ("elmore-rise-time-rc", "T_R/RC"),
    }
)


def test_no_row_is_forgotten():
    """Rows that the table of quantities answers and rows that wait are all rows, and disjoint."""
    every = {(row.case, row.quantity) for row in rows()}
    reproduced = {(row.case, row.quantity) for row in rows() if len(measures(row.words)) == 1}
    assert not reproduced & WAITING
    assert reproduced | WAITING == every
