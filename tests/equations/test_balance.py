"""Balances part by part are the rows of the matrix, written another way."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest

import acsolve
from acsolve.analyses.sweep import solver_for
from acsolve.errors import AcsolveError

CIRCUITS = sorted((Path(__file__).parents[2] / "circuits").glob("*.circuit"))
MIXED = """
    in -- R1 = 3 ohm -- out
    in -- R2 = 7 ohm || C2 = 2 F -- out
    out -- R3 = 5 ohm -- gnd
    out -- L1 = 4 H -- gnd
    out -- C4 = -3 F -- x
    x -- R5 = 2 ohm -- gnd
    x -- R6 = 9 ohm -- x
    G1 : transconductance(plus = in, minus = x, out = out, ref = gnd, gain = 6 S)
"""


def _solver(circuit: acsolve.Circuit):
    nodes = [node for node in circuit.netlist.nodes() if node != "gnd"]
    ask = circuit.looking_into(nodes[0]).ask
    return solver_for(circuit.netlist, ask, np.array([10.0, 1e4]))


def _check(solver) -> int:
    """Rows from random unknowns, both ways; how many were read part by part."""
    random = np.random.default_rng(5)
    numbers, s = solver.numbers, 2j * np.pi * np.array([50.0, 3e3])
    x = random.normal(size=(numbers.size, 2)) + 1j * random.normal(size=(numbers.size, 2))
    entries = [np.broadcast_to(item, s.shape) for item in numbers.at(s)]
    for row, balance in solver.balances().items():
        places = range(numbers.starts[row], numbers.starts[row + 1])
        plain = sum(entries[place] * x[numbers.columns[place]] for place in places)
        size = sum(abs(entries[place] * x[numbers.columns[place]]) for place in places)
        own = x[numbers.columns[balance.own]]
        parts = balance.leak.at(s) * own if balance.leak is not None else 0.0
        for place in places:
            if place != balance.own:
                other = x[numbers.columns[place]]
                across = other - own if place in balance.across else other
                parts = parts + entries[place] * across
        assert np.all(abs(parts - plain) <= 1e-13 * size)
    return len(solver.balances())


@pytest.mark.parametrize("file", CIRCUITS, ids=lambda item: item.stem)
def test_rows_of_the_shipped_circuits(file):
    """Every row that is read part by part is the row of the matrix."""
    try:
        solver = _solver(acsolve.read(file))
    except AcsolveError as problem:
        code = problem.diagnostics[0].code
        assert code in ("question.no-value", "equations.singular")
        return
    _check(solver)


def test_controlled_currents_and_parallel_parts_keep_their_terms():
    """Own terms that are no neighbour's stay in the leak; a row of other entries is left alone."""
    assert _check(_solver(acsolve.parse(MIXED))) == 2  # in and x; the gain stands in the others


def test_the_leak_of_a_node_is_what_goes_to_ground():
    """Nothing of the resistors along a ladder is left in it."""
    text = "in -- R1 = 3 ohm -- a\na -- R2 = 7 ohm -- b\na -- C1 = 2 F -- gnd\nb -- C2 = 5 F -- gnd"
    circuit = acsolve.parse(text)
    solver = solver_for(circuit.netlist, circuit.path("in", "b").ask, np.array([1.0]))
    s = np.array([1j])
    leaks = [item.leak.at(s)[0] for item in solver.balances().values() if item.leak is not None]
    assert sorted(leaks, key=abs) == [2j, 5j]
