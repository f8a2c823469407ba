"""Closed forms of RC ladders and meshes: this project beside general libraries, in one run.

    python tests/benchmarks/symbolic.py [--quick]

Every measurement runs in a process of its own, so that each has its own peak memory. Times
are medians of processor time, so that other work on the machine does not count, and leave
out imports. A rival is stopped after a minute and not tried on larger networks of its family.
"""

from __future__ import annotations

import json
import os
import resource
import subprocess
import sys
from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise
from signal import SIGXCPU
from statistics import median
from time import process_time
from typing import Any

LIMIT_S = 60
RUNS_WITHIN_S = 3.0  # a case is repeated for so long, at least once and at most 15 times
ONCE_S = 0.5  # what takes longer is timed once
SAMPLE_S = 0.05  # a sample holds as many runs as fit: clocks of processor time may be coarse
BUDGET_TERMS = 2_000_000

Edge = tuple[str, str]


@dataclass(frozen=True, slots=True)
class Network:
    """Resistors between nodes, a capacitor from every node but the driven one to ground."""

    resistors: tuple[Edge, ...]
    capacitors: tuple[str, ...]
    source: str
    target: str

    def text(self) -> str:
        """The circuit in the text format."""
        lines = [f"{a} -- R{k} -- {b}" for k, (a, b) in enumerate(self.resistors, 1)]
        lines += [f"{node} -- C{k} -- gnd" for k, node in enumerate(self.capacitors, 1)]
        return "\n".join(lines) + "\n"


def ladder(sections: int) -> Network:
    """R in series, C to ground, so many times."""
    nodes = [f"n{k}" for k in range(sections + 1)]
    return Network(tuple(pairwise(nodes)), tuple(nodes[1:]), "n0", nodes[-1])


def mesh(rows: int, columns: int) -> Network:
    """A grid of resistors, driven at a corner, observed at the opposite one."""
    name = {(i, k): f"m{i}_{k}" for i in range(rows) for k in range(columns)}
    across = [(name[i, k], name[i, k + 1]) for i in range(rows) for k in range(columns - 1)]
    down = [(name[i, k], name[i + 1, k]) for i in range(rows - 1) for k in range(columns)]
    nodes = list(name.values())
    return Network((*across, *down), tuple(nodes[1:]), nodes[0], nodes[-1])


NETWORKS: dict[str, Callable[[], Network]] = {
    **{f"ladder {n}": lambda n=n: ladder(n) for n in (3, 5, 8, 10, 12, 14, 40)},
    "mesh 3x3": lambda: mesh(3, 3),
    "mesh 3x4": lambda: mesh(3, 4),
    "mesh 8x8": lambda: mesh(8, 8),
}


def ours(network: Network) -> Callable[[], int]:
    """From the circuit to the finished, checked closed form; terms of the denominator."""
    import acsolve

    path = acsolve.parse(network.text()).path(network.source, network.target)
    return lambda: len(path.closed_form().denominator)


def flint_loop(network: Network) -> Callable[[], int]:
    """The floor: a ladder's denominator by its recurrence, two products a section."""
    import flint

    count = len(network.resistors)
    names = ("s", *(f"R{k + 1}" for k in range(count)), *(f"C{k + 1}" for k in range(count)))

    def run() -> int:
        context = flint.fmpz_mpoly_ctx.get(names, "degrevlex")
        s, *others = context.gens()
        resistances, capacitances = others[:count], others[count:]
        voltage, current = context.constant(1), context.constant(0)
        for k in reversed(range(count)):
            current = current + s * capacitances[k] * voltage
            voltage = voltage + resistances[k] * current
        return len(voltage)

    return run


def _nodal(network: Network, one: Any, conductances: Any, susceptances: Any) -> tuple[Any, Any]:
    """Nodal matrix and excitation with one volt at the driven node."""
    nodes = list(network.capacitors)
    place = {node: k for k, node in enumerate(nodes)}
    zero = one * 0
    matrix = [[zero] * len(nodes) for _ in nodes]
    right = [zero] * len(nodes)
    for (a, b), g in zip(network.resistors, conductances, strict=True):
        for here, there in ((a, b), (b, a)):
            if here == network.source:
                continue
            matrix[place[here]][place[here]] += g
            if there == network.source:
                right[place[here]] += g
            else:
                matrix[place[here]][place[there]] -= g
    for node, y in zip(nodes, susceptances, strict=True):
        matrix[place[node]][place[node]] += y
    return matrix, right


def _symbols(network: Network, **known: bool) -> tuple[Any, list[Any], list[Any]]:
    """s, resistances and capacitances; `known` is what the library is told about these."""
    from sympy import Symbol

    count = len(network.resistors), len(network.capacitors)
    return (
        Symbol("s"),
        [Symbol(f"R{k + 1}", **known) for k in range(count[0])],
        [Symbol(f"C{k + 1}", **known) for k in range(count[1])],
    )


def _modified(network: Network, conductances: Any, susceptances: Any) -> tuple[Any, Any]:
    """Modified nodal matrix: every node, and the drive's current as a last unknown."""
    from sympy import Integer

    nodes = [network.source, *network.capacitors]
    place = {node: k for k, node in enumerate(nodes)}
    size = len(nodes) + 1
    matrix = [[Integer(0)] * size for _ in range(size)]
    for (a, b), g in zip(network.resistors, conductances, strict=True):
        i, k = place[a], place[b]
        matrix[i][i] += g
        matrix[k][k] += g
        matrix[i][k] -= g
        matrix[k][i] -= g
    for node, y in zip(network.capacitors, susceptances, strict=True):
        matrix[place[node]][place[node]] += y
    matrix[0][-1] = matrix[-1][0] = Integer(1)
    return matrix, [Integer(0)] * (size - 1) + [Integer(1)]


def sympy_lu(network: Network, **known: bool) -> Callable[[], int]:
    """What a user types first: plain symbols, the modified nodal matrix, LUsolve, cancel."""
    from sympy import Matrix, cancel, fraction
    from sympy.core.cache import clear_cache

    s, resistances, capacitances = _symbols(network, **known)

    def run() -> int:
        clear_cache()  # a user asks once
        matrix, right = _modified(
            network, [1 / r for r in resistances], [s * c for c in capacitances]
        )
        solution = Matrix(matrix).LUsolve(Matrix(right))
        found = cancel(solution[1 + network.capacitors.index(network.target)])
        return len(fraction(found)[1].args)

    return run


def sympy_lu_positive(network: Network) -> Callable[[], int]:
    """The same with positive symbols: the library then cancels in another way, much faster."""
    return sympy_lu(network, positive=True)


def sympy_lu_reduced(network: Network) -> Callable[[], int]:
    """Positive symbols, and the driven node worked out of the equations by hand."""
    from sympy import Integer, Matrix, cancel, fraction
    from sympy.core.cache import clear_cache

    s, resistances, capacitances = _symbols(network, positive=True)

    def run() -> int:
        clear_cache()  # a user asks once
        matrix, right = _nodal(
            network, Integer(1), [1 / r for r in resistances], [s * c for c in capacitances]
        )
        solution = Matrix(matrix).LUsolve(Matrix(right))
        found = cancel(solution[network.capacitors.index(network.target)])
        return len(fraction(found)[1].args)

    return run


def sympy_lu_loops(network: Network) -> Callable[[], int]:
    """A ladder's loop currents from impedances, positive symbols, LUsolve, cancel."""
    from sympy import Matrix, cancel, fraction, zeros
    from sympy.core.cache import clear_cache

    s, resistances, capacitances = _symbols(network, positive=True)
    size = len(resistances)

    def run() -> int:
        clear_cache()  # a user asks once
        matrix = zeros(size)
        for k, (r, c) in enumerate(zip(resistances, capacitances, strict=True)):
            matrix[k, k] += r + 1 / (s * c)
            if k + 1 < size:
                matrix[k + 1, k + 1] += 1 / (s * c)
                matrix[k, k + 1] -= 1 / (s * c)
                matrix[k + 1, k] -= 1 / (s * c)
        currents = matrix.LUsolve(Matrix([1] + [0] * (size - 1)))
        found = cancel(currents[-1] / (s * capacitances[-1]))
        return len(fraction(found)[1].args)

    return run


def sympy_linsolve(network: Network) -> Callable[[], int]:
    """The modified nodal equations in positive symbols by `linsolve`, and `cancel`."""
    from sympy import Matrix, cancel, fraction, linsolve, symbols
    from sympy.core.cache import clear_cache

    s, resistances, capacitances = _symbols(network, positive=True)

    def run() -> int:
        clear_cache()  # a user asks once
        matrix, right = _modified(
            network, [1 / r for r in resistances], [s * c for c in capacitances]
        )
        unknowns = symbols(f"v:{len(right)}")
        (solution,) = linsolve((Matrix(matrix), Matrix(right)), *unknowns)
        found = cancel(solution[1 + network.capacitors.index(network.target)])
        return len(fraction(found)[1].args)

    return run


def _domain(network: Network, *, folded: bool) -> Callable[[], int]:
    """A sparse DomainMatrix of polynomials in conductances, solved without any division.

    `solve_den` goes through the characteristic polynomial: numerator and denominator in one
    go. `folded` lets one symbol stand for s·C, which spares the library a generator.
    """
    from sympy import ZZ
    from sympy.polys.matrices import DomainMatrix

    count = len(network.resistors), len(network.capacitors)
    names = [f"G{k}" for k in range(count[0])] + [f"C{k}" for k in range(count[1])]
    ring = ZZ.poly_ring(*_named(names if folded else [*names, "s"]))
    place = network.capacitors.index(network.target)

    def run() -> int:
        gens = [ring.from_sympy(item) for item in ring.symbols]
        conductances, capacitances = gens[: count[0]], gens[count[0] : sum(count)]
        if not folded:
            capacitances = [item * gens[-1] for item in capacitances]
        matrix, right = _nodal(network, ring.one, conductances, capacitances)
        size = len(right)
        whole = DomainMatrix(matrix, (size, size), ring).to_sparse()
        column = DomainMatrix([[value] for value in right], (size, 1), ring).to_sparse()
        tops, bottom = whole.solve_den(column, method="charpoly")
        return len(bottom) if tops[place, 0].element else 0

    return run


def _named(names: list[str]) -> list[Any]:
    from sympy import Symbol

    return [Symbol(name) for name in names]


def sympy_solve_den(network: Network) -> Callable[[], int]:
    """The fastest way that an expert finds in the library."""
    return _domain(network, folded=False)


def sympy_solve_den_folded(network: Network) -> Callable[[], int]:
    """The same with one symbol for each s·C."""
    return _domain(network, folded=True)


def refusal(network: Network) -> Callable[[], int]:
    """How long it takes to say that the expanded form is over budget."""
    import acsolve
    from acsolve.analyses.transfer import closed_form
    from acsolve.errors import EquationError

    path = acsolve.parse(network.text()).path(network.source, network.target)

    def run() -> int:
        try:
            closed_form(path.circuit.netlist, path.ask, budget=BUDGET_TERMS)
        except EquationError as problem:
            return problem.code == "equations.budget"
        return False

    return run


def nested(network: Network) -> Callable[[], int]:
    """The nested form; returns its steps."""
    import acsolve
    from acsolve.analyses.nested import nested_form

    path = acsolve.parse(network.text()).path(network.source, network.target)
    return lambda: len(nested_form(path.circuit.netlist, path.ask).steps)


def nested_error(network: Network) -> Callable[[], float]:
    """Largest relative difference of the nested form from the numeric sweep."""
    from random import Random

    import numpy as np

    import acsolve
    from acsolve.analyses.nested import nested_form
    from acsolve.equations.exact import Symbols

    random = Random(7)
    values = {f"R{k}": random.uniform(1e3, 9e3) for k in range(1, len(network.resistors) + 1)}
    values |= {f"C{k}": random.uniform(1e-9, 9e-9) for k in range(1, len(network.capacitors) + 1)}
    circuit = acsolve.parse(network.text()).with_values(values)
    path = circuit.path(network.source, network.target)
    hertz = np.logspace(1, 5, 41)

    def run() -> float:
        form = nested_form(circuit.netlist, path.ask, Symbols(symbolic=True))
        here, there = form.response(hertz), path.response(hertz)
        return float(np.max(np.abs(here - there) / np.abs(there)))

    return run


METHODS: dict[str, Callable[[Network], Callable[[], Any]]] = {
    "ours": ours,
    "flint loop": flint_loop,
    "LUsolve": sympy_lu,
    "LU positive": sympy_lu_positive,
    "LU reduced": sympy_lu_reduced,
    "LU loops": sympy_lu_loops,
    "linsolve": sympy_linsolve,
    "solve_den": sympy_solve_den,
    "solve_den folded": sympy_solve_den_folded,
    "refusal": refusal,
    "nested": nested,
    "nested error": nested_error,
}
#: Tried and slower: `det` (71 s for 8 sections), and for 5 sections `solve_den` by row
#: reduction (10 to 60 times) and LU over the fraction field (100 times and more).
EXPERT = ("solve_den", "solve_den folded")


@dataclass(frozen=True, slots=True)
class Measured:
    """Median seconds, peak memory of the process in MB, and what the method returned."""

    seconds: float
    megabytes: float
    result: float


def measure(method: str, network: str, limit: int) -> None:
    """One measurement, printed as JSON: runs in a process of its own."""
    run = METHODS[method](NETWORKS[network]())
    if method != "refusal":  # a small case first loads what is loaded late
        METHODS[method](NETWORKS["ladder 3"]())()
    resource.setrlimit(resource.RLIMIT_CPU, (limit, limit + 1))
    first, result = _timed(run, 1)
    times = [first]
    if first < ONCE_S:
        repeat = 1 + int(SAMPLE_S / max(_timed(run, 3)[0], 1e-6))
        times = [_timed(run, repeat)[0] for _ in range(3)]
        while sum(times) * repeat < RUNS_WITHIN_S and len(times) < 15:
            times.append(_timed(run, repeat)[0])
    peak = resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024
    print(json.dumps([median(times), peak, result]))


def _timed(run: Callable[[], Any], repeat: int) -> tuple[float, Any]:
    """Processor seconds of one run, taken over several, and what it returned."""
    result = None
    start = process_time()
    for _ in range(repeat):
        result = run()
    return (process_time() - start) / repeat, result


def measured(method: str, network: str, limit: int = LIMIT_S) -> Measured | None:
    """A measurement in a process of its own; None where it takes longer than the limit."""
    done = subprocess.run(  # noqa: S603 - this file, measuring one case
        [sys.executable, __file__, "--measure", method, network, str(limit + 2)],
        capture_output=True,
        text=True,
        check=False,
        env={**os.environ, "PYTHONHASHSEED": "0"},  # SymPy's order of work depends on it
    )
    if done.returncode == -SIGXCPU:
        return None
    if done.returncode:
        raise SystemExit(f"{method} on {network} failed:\n{done.stderr}")
    found = Measured(*json.loads(done.stdout))
    return found if found.seconds <= limit else None


def _time(found: Measured | None, limit: int = LIMIT_S) -> str:
    if found is None:
        return f"> {limit} s"
    size = found.seconds
    return f"{size:.3g} s" if size >= 1 else f"{size * 1e3:.3g} ms"


def _ratio(rival: Measured | None, own: Measured, limit: int = LIMIT_S) -> str:
    if rival is None:
        return f"> {limit / own.seconds:,.0f}"
    return f"{rival.seconds / own.seconds:,.3g}"


def _row(*cells: str) -> None:
    print("  ".join(f"{cell:>13}" for cell in cells), flush=True)


def expanded(names: list[str], *, quick: bool) -> None:
    """The table of expanded forms."""
    _row("network", "terms", "ours", "memory", "LUsolve", "LU positive", "LU reduced", "LU loops", "linsolve",
         "expert", "flint loop", "LU/ours", "positive/ours", "expert/ours", "ours/loop")  # fmt: skip
    limit = 5 if quick else LIMIT_S
    slow: set[tuple[str, str]] = set()  # (family, method): not tried on a larger one
    for name in names:
        own = measured("ours", name)
        assert own is not None, f"{name} takes over a minute"
        found: dict[str, Measured | None] = {}
        family = name.split()[0]
        if family == "mesh":
            slow.add((family, "LU loops"))  # written for ladders only
        for method in ("LUsolve", "LU positive", "LU reduced", "LU loops", "linsolve", *EXPERT):
            found[method] = None if (family, method) in slow else measured(method, name, limit)
            if found[method] is None:
                slow.add((family, method))
        best = min(
            (item for method in EXPERT if (item := found[method])),
            key=lambda item: item.seconds,
            default=None,
        )
        loop = measured("flint loop", name) if name.startswith("ladder") else None
        _row(
            name,
            f"{own.result:,.0f}",
            _time(own),
            f"{own.megabytes:.0f} MB",
            _time(found["LUsolve"], limit),
            _time(found["LU positive"], limit),
            _time(found["LU reduced"], limit),
            _time(found["LU loops"], limit) if family == "ladder" else "-",
            _time(found["linsolve"], limit),
            _time(best, limit),
            _time(loop) if loop else "-",
            _ratio(found["LUsolve"], own, limit),
            _ratio(found["LU positive"], own, limit),
            _ratio(best, own, limit),
            _ratio(own, loop) if loop else "-",
        )
        if best is not None:
            assert best.result == own.result, f"{name}: the rival finds another answer"


def too_large() -> None:
    """The table of networks whose expanded form nobody could hold."""
    print()
    _row("network", "refused in", "nested in", "memory", "steps", "error")
    for name in ("ladder 40", "mesh 8x8"):
        no, yes, error = (measured(item, name) for item in ("refusal", "nested", "nested error"))
        if no is None or yes is None or error is None:
            raise SystemExit(f"{name} takes over a minute")
        assert no.result, f"{name} is not refused"
        _row(
            name,
            _time(no),
            _time(yes),
            f"{yes.megabytes:.0f} MB",
            f"{yes.result:.0f}",
            f"{error.result:.1e}",
        )


def main(arguments: list[str]) -> None:
    """Print the tables, or measure one case for them."""
    if arguments[:1] == ["--measure"]:
        measure(arguments[1], arguments[2], int(arguments[3]))
        return
    quick = "--quick" in arguments
    names = [f"ladder {n}" for n in ((3, 5, 8) if quick else (3, 5, 8, 10, 12, 14))]
    names += ["mesh 3x3"] if quick else ["mesh 3x3", "mesh 3x4"]
    expanded(names, quick=quick)
    too_large()


if __name__ == "__main__":
    main(sys.argv[1:])
