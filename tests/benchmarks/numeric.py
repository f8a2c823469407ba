"""The numeric engine against general solvers: time a point, and digits against balls.

Run as a script. Each line names the network, its unknowns and the frequencies, then for each
solver the time and how many times slower than ours it is, and the worst relative error against
ball arithmetic at a few of the points. "checked" is ours with error estimate and slope.
"""

from __future__ import annotations

import sys
from collections.abc import Callable
from dataclasses import dataclass
from fractions import Fraction
from pathlib import Path
from time import perf_counter

import flint
import numpy as np
from scipy.linalg import solve_banded
from scipy.sparse import csc_array
from scipy.sparse.linalg import splu

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from acsolve.algebra.ball import precision
from acsolve.analyses.question import transfer_ask
from acsolve.analyses.sweep import solver_for
from acsolve.equations.solver import Solver
from tests.strategies import C, R, network

Answers = np.ndarray


@dataclass(frozen=True)
class Case:
    """A network, its driven and observed nodes, and a band."""

    name: str
    parts: tuple
    source: str
    target: str
    hertz: np.ndarray


def ladder(sections: int, low: float, high: float, points: int) -> Case:
    """RC sections with values that differ a little."""
    parts = []
    for k in range(1, sections + 1):
        bend = Fraction(1000 + 37 * k % 101, 1000)
        parts.append(R(f"R[{k}]", f"n[{k - 1}]", f"n[{k}]", 1000 * bend))
        parts.append(C(f"C[{k}]", f"n[{k}]", "gnd", bend / 10**9))
    name = f"ladder of {sections}, {low:.0e} .. {high:.0e} Hz"
    return Case(name, tuple(parts), "n[0]", f"n[{sections}]", np.geomspace(low, high, points))


def mesh(side: int, points: int) -> Case:
    """A square mesh of resistors with a capacitor at every node, driven at a corner."""
    parts = []
    for i in range(side):
        for j in range(side):
            here = f"m[{i}, {j}]"
            if i + 1 < side:
                parts.append(
                    R(f"R[{i}, {j}]", here, f"m[{i + 1}, {j}]", 100 + (i * 7 + j * 3) % 11)
                )
            if j + 1 < side:
                parts.append(
                    R(f"Q[{i}, {j}]", here, f"m[{i}, {j + 1}]", 100 + (i * 5 + j * 9) % 13)
                )
            parts.append(C(f"C[{i}, {j}]", here, "gnd", Fraction(1 + (i + j) % 5, 10**9)))
    last = f"m[{side - 1}, {side - 1}]"
    return Case(
        f"mesh {side} x {side}", tuple(parts), "m[0, 0]", last, np.geomspace(1e3, 1e7, points)
    )


def prepared(case: Case) -> Solver:
    """Our solver for the voltage ratio of a case."""
    netlist = network(*case.parts)
    ask = transfer_ask(netlist, (case.source, "gnd"), (case.target, "gnd"))
    return solver_for(netlist, ask, case.hertz)


def coordinates(solver: Solver, hertz: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Rows, columns and values (entries, points) of the same matrix."""
    entries = solver.numbers.at(2j * np.pi * hertz)
    values = np.array([np.broadcast_to(item, hertz.shape) for item in entries], dtype=complex)
    return np.array(solver.numbers.rows), np.array(solver.numbers.columns), values


def observed(solver: Solver) -> int:
    """The one column that is asked for."""
    (column,) = solver.observed[0]
    return column


def by_dense_batch(solver: Solver, hertz: np.ndarray) -> Answers:
    """numpy.linalg.solve on a stack of dense matrices."""
    rows, columns, values = coordinates(solver, hertz)
    size = solver.numbers.size
    full = np.zeros((len(hertz), size, size), dtype=complex)
    full[:, rows, columns] = values.T
    right = np.zeros((len(hertz), size, 1), dtype=complex)
    right[:, -1] = 1
    return np.linalg.solve(full, right)[:, observed(solver), 0]


def by_sparse_lu(solver: Solver, hertz: np.ndarray) -> Answers:
    """SciPy's sparse LU, once a frequency."""
    rows, columns, values = coordinates(solver, hertz)
    size = solver.numbers.size
    right = np.zeros(size, dtype=complex)
    right[-1] = 1
    answers = np.empty(len(hertz), dtype=complex)
    for at in range(len(hertz)):
        matrix = csc_array((values[:, at], (rows, columns)), shape=(size, size))
        answers[at] = splu(matrix).solve(right)[observed(solver)]
    return answers


def by_banded(solver: Solver, hertz: np.ndarray) -> Answers:
    """SciPy's banded solver, once a frequency, rows and columns in our order of pivots."""
    rows, columns, values = coordinates(solver, hertz)
    size = solver.numbers.size
    row_place, column_place = np.empty(size, int), np.empty(size, int)
    for place, (row, column) in enumerate(solver.plan.order):
        row_place[row], column_place[column] = place, place
    rows, columns = row_place[rows], column_place[columns]
    lower, upper = int((rows - columns).max()), int((columns - rows).max())
    right = np.zeros(size, dtype=complex)
    right[row_place[size - 1]] = 1
    answers = np.empty(len(hertz), dtype=complex)
    for at in range(len(hertz)):
        band = np.zeros((lower + upper + 1, size), dtype=complex)
        band[upper + rows - columns, columns] = values[:, at]
        answers[at] = solve_banded((lower, upper), band, right)[column_place[observed(solver)]]
    return answers


def worst_error(case: Case, solver: Solver, answers: Answers) -> float:
    """Against the same matrix solved in balls, at five of the frequencies."""
    worst = 0.0
    for at in np.linspace(0, len(case.hertz) - 1, 5).astype(int):
        with precision(400):
            (local,) = solver.precise.at(Fraction(float(case.hertz[at])))
            expected = flint.acb(local.mantissa) * flint.arb(2) ** local.exponent
            gap = (flint.acb(complex(answers[at])) - expected) / expected
            worst = max(worst, float(gap.abs_upper()))
    return worst


def timed(work: Callable[[], Answers]) -> tuple[float, Answers]:
    """The best of three runs."""
    times = []
    for _ in range(3):
        start = perf_counter()
        answers = work()
        times.append(perf_counter() - start)
    return min(times), answers


def compare(case: Case, solvers: dict[str, Callable[[Solver, np.ndarray], Answers]]) -> None:
    """One block of lines for a case."""
    start = perf_counter()
    solver = prepared(case)
    planned = perf_counter() - start
    print(f"\n{case.name}: {solver.numbers.size} unknowns, {len(case.hertz)} points, ", end="")
    print(f"fill {solver.plan.fill}, assembled and planned in {planned:.3f} s")
    reference = None
    for name, solve in solvers.items():
        seconds, answers = timed(lambda solve=solve: solve(solver, case.hertz))
        reference = reference or seconds
        error = worst_error(case, solver, answers)
        print(f"  {name:<22}{seconds:10.4f} s {seconds / reference:8.1f} x   error {error:.1e}")


OURS = {
    "ours": lambda solver, hertz: solver.quick(hertz)[0],
    "ours, checked": lambda solver, hertz: solver.solve(hertz).value()[0],
}
OTHERS = {"sparse LU": by_sparse_lu, "banded": by_banded}
DENSE = {"dense batch": by_dense_batch}


def main() -> None:
    """All cases, small ones against every solver."""
    compare(ladder(12, 1e2, 1e7, 20_000), OURS | DENSE)
    compare(ladder(200, 1e1, 1e5, 1000), OURS | OTHERS | DENSE)
    compare(ladder(200, 1e1, 5e5, 1000), OURS | OTHERS)
    compare(ladder(1000, 1e1, 3e4, 1000), OURS | OTHERS)
    compare(ladder(10_000, 1e-1, 1e2, 100), OURS | OTHERS)
    compare(mesh(5, 5000), OURS | DENSE)
    compare(mesh(15, 500), OURS | DENSE | {"sparse LU": by_sparse_lu})
    compare(mesh(30, 100), OURS | {"sparse LU": by_sparse_lu})


if __name__ == "__main__":
    main()
