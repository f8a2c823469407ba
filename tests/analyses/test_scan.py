"""Networks too large for a closed form: the scan and the elimination in balls."""

from __future__ import annotations

import itertools
import re
from fractions import Fraction

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

import acsolve
from acsolve.analyses import scan
from acsolve.analyses.cutoff import HALF_POWER, CutoffLevel, cutoffs
from acsolve.analyses.grid import HertzBand
from acsolve.analyses.question import transfer_ask
from acsolve.analyses.scan import large_cutoffs
from acsolve.errors import AnalysisError
from tests.strategies import connected, network

from .test_band_cutoff import HALF, LINE, STUB, hertz, path
from .test_transfer_laws import form_of, gnd

LADDER = """
in -- N1 : {} * section -- out
block section(a, b)
    a -- R -- b
    b -- C -- gnd
    R = 100 ohm
    C = 1 nF
end
"""


@pytest.fixture(params=["certified", "scanned"])
def way(request, monkeypatch):
    """Both ways to answer without a closed form."""
    if request.param == "scanned":
        monkeypatch.setattr(scan, "_CERTIFIED", -1)
    return request.param


def large(found: acsolve.Path, **more):
    """The answer without a closed form."""
    more.setdefault("level", HALF_POWER)
    return large_cutoffs(found.circuit.netlist, found.ask, **more)


@pytest.mark.parametrize(
    ("question", "more"),
    [
        (path(f"{HALF}Q1.exponent = 0.5"), {}),
        (path(f"{HALF}Q1.exponent = 0.75"), {"level": CutoffLevel(Fraction(-30))}),
        (path(LINE, R2=400, R1=10), {"reference": "peak"}),
        (path(STUB), {"reference": Fraction(1, 2)}),
        (acsolve.read("circuits/mast_cable.circuit").path("send", "far_end"), {}),
        (acsolve.read("circuits/hydrophone_lowpass.circuit"), {}),
    ],
)
def test_both_ways_agree_with_the_closed_form(question, more, way):
    """The same crossings within a band; only those in balls are called proven."""
    if isinstance(question, acsolve.Circuit):
        question = question.asked(next(q for q in question.questions if q.kind == "cutoff"))
    band = HertzBand(Fraction(100), Fraction(4 * 10**7))
    level = more.get("level", HALF_POWER)
    exact = cutoffs(question.closed_form(), level=level, reference=more.get("reference"), band=band)
    found = large(question, **more, band=band)
    assert exact.complete
    assert exact.cutoffs
    assert hertz(found) == pytest.approx(hertz(exact), rel=1e-12)
    assert [item.direction for item in found.cutoffs] == [item.direction for item in exact.cutoffs]
    assert found.reference.at == exact.reference.at
    assert found.reference.gain == pytest.approx(exact.reference.gain, rel=1e-12)
    assert found.complete == (way == "certified")
    assert ("not certified" in found.method) == (way == "scanned")


@settings(max_examples=30)
@given(st.data(), st.sampled_from((HALF_POWER, CutoffLevel(Fraction(-10)))))
def test_a_scan_of_random_networks(data, level):
    """Small rational networks: the scan finds what is proven, where nothing is very sharp."""
    netlist = data.draw(connected(most_nodes=5, most_extra=3, tree=("resistor", "capacitor")))
    target = gnd(data.draw(st.sampled_from(netlist.nodes()[1:])))
    form = form_of(netlist, gnd("in"), target)
    assume(form is not None and form.numerator != 0)
    try:
        exact = cutoffs(form, level=level, reference=Fraction(1, 2))
    except AnalysisError:
        return
    assume(exact.complete and not exact.touches)
    band = HertzBand(Fraction(1, 10**4), Fraction(10**4))
    ask = transfer_ask(netlist, gnd("in"), target)
    solver = scan.solver_for(netlist, ask, scan._SAMPLES)
    found = scan._scanned(solver, scan.stated(Fraction(1, 2)), level, band)
    inside = [item.hertz for item in exact.cutoffs if 1e-4 < item.hertz < 1e4]
    assume(all(b / a > 1 + 1e-6 for a, b in itertools.pairwise(inside)))
    assert hertz(found) == pytest.approx(inside, rel=1e-9)


def test_a_ladder_is_exact_up_to_a_size(monkeypatch):
    """The same answer on both sides of the limit, proven on one."""
    question = acsolve.parse(LADDER.format(40)).path("in", "out")
    exact = question.cutoffs()
    assert exact.complete
    monkeypatch.setattr(scan, "_LARGEST_EXACT", 20)
    monkeypatch.setattr(scan, "_CERTIFIED", -1)
    found = question.cutoffs()
    assert hertz(found) == pytest.approx(hertz(exact), rel=1e-11)
    assert found.form is None
    assert not found.complete
    assert re.search("not certified", found.method)


def test_a_long_ladder():
    """A thousand sections: half power where a diffusion line of that R and C has it."""
    answer = acsolve.parse(LADDER.format(1000)).path("in", "out").cutoffs()
    # |cosh(sqrt(j*w*R*C))|² = 2 at w*R*C = 2.43193; a ladder of n sections differs by 1/n
    omega = 2.43193 / (1e5 * 1e-6)
    assert answer.cutoffs[0].rad_per_s == pytest.approx(omega, rel=3e-3)
    assert len(answer.cutoffs) == 1
    assert not answer.complete


def test_many_lines_are_certified_without_a_closed_form(monkeypatch):
    """Over the budget of terms, small enough for balls."""
    monkeypatch.setattr(scan, "_BUDGET", 3)
    text = "\n".join(
        f"T{k} : line(near = n{k}, far = n{k + 1}, z0 = {40 + 7 * k} ohm, delay = {k + 1} ns)"
        for k in range(4)
    )
    text += "\nin -- R1 -- n0\nn4 -- R2 -- gnd\nR1, R2 = 50 ohm\n"
    question = acsolve.parse(text).path("in", "n4")
    found = question.cutoffs(-1, band=(1e6, 1e9))
    assert found.form is None
    assert found.complete
    exact = cutoffs(
        question.closed_form(),
        level=CutoffLevel(Fraction(-1)),
        band=HertzBand(Fraction(10**6), Fraction(10**9)),
    )
    assert hertz(found) == pytest.approx(hertz(exact), rel=1e-14)


def test_references_of_large_networks():
    """What is zero or infinite is no reference there either."""
    netlist = network(
        *acsolve.parse("in -- C1 -- out -- R1 -- gnd\nC1 = 1 uF\nR1 = 1 kohm").netlist.parts
    )
    question = acsolve.Circuit(netlist).path("in", "out")
    with pytest.raises(AnalysisError, match="at 0 Hz is zero"):
        large(question, reference="dc")
    assert large(question).reference.at == "infinity"
