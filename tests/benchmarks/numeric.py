"""Sweeps of ladders, meshes and filters: this project beside general libraries, in one run.

    python tests/benchmarks/numeric.py [--quick | --only NETWORK ...]

Every measurement runs in a process of its own, so that each has its own peak memory, and leaves
out imports. Times are medians of elapsed time, since some solvers use both cores; processor
time stands beside them, and ratios are given for both, the latter in brackets: other work on
the machine lengthens elapsed times alone. Errors are the worst of five frequencies against ball arithmetic. The
rivals get nodal matrices made beforehand, with the driven node worked out. A rival is stopped
after a minute. Of ours, "door" is `Path.response` on a fresh circuit, equations, order and
check included; "checked" and "unchecked" are runs of a prepared question.
Arrays of part values have a benchmark of their own, `samples.py` beside this one.
"""

from __future__ import annotations

import json
import resource
import subprocess
import sys
import tempfile
from collections.abc import Callable
from fractions import Fraction
from pathlib import Path
from statistics import median
from time import perf_counter, process_time
from typing import Any

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from tests.benchmarks.numeric_networks import (
    CASCADE,
    CASCADE_COPIES,
    DEEP,
    FILTER,
    LARGEST,
    NETWORKS,
    SECTIONS,
    Matrices,
    Network,
    hertz_at,
    matrices,
)

LIMIT_S = 60  # for a rival
OURS_LIMIT_S = 900  # reading, all stages and ball arithmetic of the largest ladder
RUNS_WITHIN_S = 3.0
MOST_RUNS = 15
CHECKED_POINTS = 5

Run = Callable[[], np.ndarray]


def sparse_lu(given: Matrices, hertz: np.ndarray) -> Run:
    """SciPy's sparse LU, once a frequency, on one pattern."""
    from scipy.sparse import csc_array
    from scipy.sparse.linalg import splu

    order = csc_array(
        (np.arange(1.0, len(given.rows) + 1), (given.rows, given.columns)),
        shape=(given.size, given.size),
    )
    taken = order.data.astype(int) - 1
    g, c = given.conductance[taken], given.capacitance[taken]

    def run() -> np.ndarray:
        answers = np.empty(len(hertz), dtype=complex)
        matrix = csc_array((g.astype(complex), order.indices, order.indptr), order.shape)
        for at, s in enumerate(2j * np.pi * hertz):
            matrix.data = g + s * c
            answers[at] = splu(matrix).solve(given.right[0] + s * given.right[1])[given.wanted]
        return answers

    return run


def banded(given: Matrices, hertz: np.ndarray) -> Run:
    """SciPy's banded solver, once a frequency, nodes in the order of the text."""
    from scipy.linalg import solve_banded

    lower = int((given.rows - given.columns).max())
    upper = int((given.columns - given.rows).max())
    bands = [np.zeros((lower + upper + 1, given.size)) for _ in range(2)]
    for band, values in zip(bands, (given.conductance, given.capacitance), strict=True):
        band[upper + given.rows - given.columns, given.columns] = values

    def run() -> np.ndarray:
        answers = np.empty(len(hertz), dtype=complex)
        for at, s in enumerate(2j * np.pi * hertz):
            right = given.right[0] + s * given.right[1]
            answers[at] = solve_banded(
                (lower, upper),
                bands[0] + s * bands[1],
                right,
                overwrite_ab=True,
                overwrite_b=True,
                check_finite=False,
            )[given.wanted]
        return answers

    return run


def dense_batch(given: Matrices, hertz: np.ndarray) -> Run:
    """numpy.linalg.solve on stacks of dense matrices of at most half a gigabyte."""
    full = np.zeros((2, given.size, given.size))
    full[0, given.rows, given.columns] = given.conductance
    full[1, given.rows, given.columns] = given.capacitance
    length = max(1, (1 << 29) // (16 * given.size**2))

    def run() -> np.ndarray:
        answers = np.empty(len(hertz), dtype=complex)
        for start in range(0, len(hertz), length):
            s = 2j * np.pi * hertz[start : start + length, None, None]
            right = given.right[0][:, None] + s * given.right[1][:, None]
            solved = np.linalg.solve(full[0] + s * full[1], right)
            answers[start : start + length] = solved[:, given.wanted, 0]
        return answers

    return run


def polynomial(network: Network) -> Run:
    """scipy.signal.freqs on the exact closed form, its coefficients rounded to doubles."""
    from scipy.signal import freqs

    found = path_of(network).closed_form().numbers()
    assert found is not None, "every value is a number"
    scale = next(item for item in found[1] if item)
    top, bottom = ([float(item / scale) for item in reversed(side)] for side in found)
    return lambda: freqs(top, bottom, worN=2 * np.pi * network.hertz)[1]


RIVALS = {"sparse LU": sparse_lu, "banded": banded, "dense batch": dense_batch}


def path_of(network: Network) -> Any:
    """The question, from the text."""
    import acsolve

    return acsolve.parse(network.text()).path(network.source, network.target)


def timed(run: Callable[[], Any]) -> tuple[float, float, Any]:
    """Median of elapsed and of processor seconds over some runs, and the last answer."""
    spent: list[tuple[float, float]] = []
    while not spent or (sum(item[0] for item in spent) < RUNS_WITHIN_S and len(spent) < MOST_RUNS):
        start, busy = perf_counter(), process_time()
        answer = run()
        spent.append((perf_counter() - start, process_time() - busy))
        if spent[-1][0] > 1:
            break
    return median(item[0] for item in spent), median(item[1] for item in spent), answer


def peak_mb() -> float:
    """The most memory that this process has held."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss / 1024


def places(hertz: np.ndarray) -> list[int]:
    """The frequencies that are compared with ball arithmetic."""
    return [int(at) for at in np.linspace(0, len(hertz) - 1, CHECKED_POINTS)]


def worst_error(answers: np.ndarray, truth: list[list[float]], hertz: np.ndarray) -> float:
    """The largest relative error, exact but for the last rounding."""
    worst = 0.0
    for at, (real, more_real, imag, more_imag) in zip(places(hertz), truth, strict=True):
        exact = Fraction(real) + Fraction(more_real), Fraction(imag) + Fraction(more_imag)
        if not np.isfinite(answers[at]):
            return float("inf")
        gap = Fraction(answers[at].real) - exact[0], Fraction(answers[at].imag) - exact[1]
        square = sum(item**2 for item in gap) / sum(item**2 for item in exact)
        worst = max(worst, float(square) ** 0.5)
    return worst


def as_doubles(ball: Any) -> list[float]:
    """A ball as the unevaluated sum of two complex doubles."""
    found = []
    for part in (ball.real, ball.imag):
        high = float(part.mid())
        found += [high, float((part - high).mid())]
    return found


def truth_of(network: Network) -> dict[str, Any]:
    """The response at a few frequencies in ball arithmetic."""
    from acsolve.algebra.ball import precision
    from acsolve.analyses.verify_sweep import enclosure_of

    path = path_of(network)
    balls = enclosure_of(path.circuit.netlist, path.ask)
    truth = []
    with precision(256):
        for at in places(network.hertz):
            found = balls.at(float(network.hertz[at]))
            assert found is not None, "these networks have a response everywhere"
            truth.append(as_doubles(found.value))
    return {"truth": truth}


def rival(network: Network, method: str) -> dict[str, Any]:
    """One rival: its time, its error and its memory."""
    if method == "polynomial":
        run = polynomial(network)
    else:
        run = RIVALS[method](matrices(network), network.hertz)
    seconds, busy, answers = timed(run)
    return {"seconds": seconds, "busy": busy, "peak": peak_mb(), "answers": answers}


def stages(network: Network) -> dict[str, Any]:
    """All of ours: reading, preparing, both runs, and the door as a whole."""
    import acsolve
    from acsolve.analyses.sweep import solver_for

    text = network.text()
    warm_up()
    base = peak_mb()
    start = perf_counter()
    circuit = acsolve.parse(text)
    path = circuit.path(network.source, network.target)
    read = perf_counter() - start
    start, busy = perf_counter(), process_time()
    answers = path.response(network.hertz)
    whole, busy = perf_counter() - start, process_time() - busy
    peak = peak_mb()
    start = perf_counter()
    solver = solver_for(circuit.netlist, path.ask, network.hertz)
    prepared = perf_counter() - start
    if whole < 1:
        whole, busy, _ = timed(lambda: path.response(network.hertz))
        prepared = timed(lambda: solver_for(circuit.netlist, path.ask, network.hertz))[0]
    checked, checked_busy, _ = timed(lambda: solver.solve(network.hertz))
    quick, quick_busy, quick_answers = timed(lambda: solver.quick(network.hertz)[0])
    return {
        "read": read,
        "prepared": prepared,
        "door": whole,
        "door busy": busy,
        "checked": checked,
        "checked busy": checked_busy,
        "quick": quick,
        "quick busy": quick_busy,
        "base": base,
        "peak": peak,
        "unknowns": solver.numbers.size,
        "answers": answers,
        "quick answers": quick_answers,
    }


def warm_up() -> None:
    """Load what is loaded late, so that no stage pays for it."""
    from acsolve.analyses.sweep import solver_for

    small = NETWORKS["ladder 100"]()
    path = path_of(small)
    path.response(small.hertz)
    solver_for(path.circuit.netlist, path.ask, small.hertz).quick(small.hertz)


def cascade() -> dict[str, Any]:
    """Equal sections as one line of text: time after reading, errors near and far below 1."""
    import acsolve

    warm_up()
    hertz = np.geomspace(hertz_at(CASCADE_COPIES, 1e-2), hertz_at(CASCADE_COPIES, 46), 1000)
    start = perf_counter()
    path = acsolve.parse(CASCADE).path("start", "finish")
    read = perf_counter() - start
    first = perf_counter()
    answers = path.response(hertz)
    first = perf_counter() - first
    peak = peak_mb()
    seconds = timed(lambda: path.response(hertz))[0] if first < 1 else first
    near = [as_doubles(power_truth(float(hertz[at]))) for at in places(hertz)]
    far = hertz_at(CASCADE_COPIES, 5000)
    return {
        "read": read,
        "first": first,
        "seconds": seconds,
        "peak": peak,
        "error": worst_error(answers, near, hertz),
        "far error": beyond_range(path, far),
    }


def power_truth(hertz: float) -> Any:
    """The voltage ratio of equal sections: 1/A of the power of one section's chain matrix."""
    from flint import acb, acb_mat, arb, fmpq

    from acsolve.algebra.ball import precision

    with precision(2000):
        s = acb(0, 2 * arb.pi() * arb(hertz))
        ohm, siemens = acb(1000), s * acb(fmpq(1, 10**9))
        section = acb_mat([[1 + ohm * siemens, ohm], [siemens, acb(1)]])
        return 1 / (section**CASCADE_COPIES)[0, 0]


def beyond_range(path: Any, hertz: float) -> float:
    """The relative error that gain and phase tell where the value is beyond a double's range."""
    from flint import acb, arb

    from acsolve.algebra.ball import precision

    found = path.sweep([hertz])
    with precision(2000):
        size = (arb(float(found.gain_db[0])) * arb(10).log() / 20).exp()
        told = size * (acb(0, float(found.phase_deg[0])) * arb.pi() / 180).exp()
        return float(abs(told / power_truth(hertz) - 1).abs_upper())


def measure(network: str, method: str, truth: str) -> None:
    """One measurement, printed as JSON: runs in a process of its own."""
    if method == "cascade":  # a text of its own
        print(json.dumps(cascade()))
        return
    given = NETWORKS[network]()
    work = {"truth": truth_of, "ours": stages}.get(method, lambda item: rival(item, method))
    found = work(given)
    known = json.loads(Path(truth).read_text(encoding="utf-8"))["truth"] if truth else []
    for key in ("answers", "quick answers"):
        if key in found:
            found[key.replace("answers", "error")] = worst_error(found.pop(key), known, given.hertz)
    print(json.dumps(found))


def measured(network: str, method: str, truth: str = "") -> dict[str, Any] | None:
    """A measurement in a process of its own; None where it takes longer than the limit."""
    limit = OURS_LIMIT_S if method in ("ours", "truth", "cascade") else LIMIT_S
    try:
        done = subprocess.run(  # noqa: S603 - this file, measuring one case
            [sys.executable, __file__, "--measure", network, method, truth],
            capture_output=True,
            text=True,
            check=False,
            timeout=limit,
        )
    except subprocess.TimeoutExpired:
        return None
    if done.returncode:
        raise SystemExit(f"{method} on {network} failed:\n{done.stderr}")
    return json.loads(done.stdout)


def tried(network: str) -> list[str]:
    """The rivals that make sense for a network."""
    if network == FILTER:
        return ["sparse LU", "dense batch", "polynomial"]
    family, size = network.split()[:2]
    if family == "ladder":
        small = ["dense batch", "polynomial"] if int(size) == SECTIONS[0] else []
        return ["sparse LU", "banded", *small]
    return ["sparse LU", "banded", *(["dense batch"] if int(size.split("x")[0]) <= 20 else [])]


#: (network, rival) -> how many times slower than ours the rival has to be.
NEEDED = {
    ("ladder 1000", "sparse LU"): 25,
    ("ladder 1000", "banded"): 4,
    (FILTER, "dense batch"): 10,
    ("mesh 30x30", "sparse LU"): 2,
}
#: Network -> the largest error of ours.
ACCURATE = {"ladder 1000": 1e-11, DEEP: 1e-11}


def row(*cells: str) -> None:
    """One line of a table."""
    widths = (12, 9, 9, 14, 14, 14, 8, 9, 14)
    print("  ".join(f"{cell:>{width}}" for cell, width in zip(cells, widths, strict=False)))
    sys.stdout.flush()


def compare(network: str, folder: str) -> dict[str, Any] | None:
    """The block of one network: ours and the rivals; returns what was measured of ours."""
    truth = measured(network, "truth")
    own = None
    if truth is not None:
        name = Path(folder) / "truth.json"
        name.write_text(json.dumps(truth), encoding="utf-8")
        own = measured(network, "ours", str(name))
    if truth is None or own is None:
        print(f"\n{network}: ours takes over {OURS_LIMIT_S} s")
        return None
    print(f"\n{network}: {own['unknowns']} unknowns, {len(NETWORKS[network]().hertz)} frequencies")
    row("", "elapsed", "processor", "/door", "/checked", "/unchecked", "memory", "error", "needed")
    error = ACCURATE.get(network)
    needed = "" if error is None else f"error <= {error:.0e}"
    row("door", seconds(own["door"]), seconds(own["door busy"]), "", "", "",
        f"{own['peak']:.0f} MB",
        f"{own['error']:.1e}", needed)  # fmt: skip
    row("checked", seconds(own["checked"]), seconds(own["checked busy"]))
    row("unchecked", seconds(own["quick"]), seconds(own["quick busy"]), "", "", "", "",
        f"{own['quick error']:.1e}")  # fmt: skip
    for method in tried(network):
        found = measured(network, method, str(name))
        if found is None:
            row(method, f"> {LIMIT_S} s")
            continue
        least = NEEDED.get((network, method))
        row(
            method,
            seconds(found["seconds"]),
            seconds(found["busy"]),
            *(_ratio(found, own, key) for key in ("door", "checked", "quick")),
            f"{found['peak']:.0f} MB",
            f"{found['error']:.1e}",
            f">= {least} times" if least else "",
        )
    return own


def _ratio(found: dict[str, Any], own: dict[str, Any], key: str) -> str:
    """How many times slower, by elapsed and by processor time."""
    elapsed, busy = found["seconds"] / own[key], found["busy"] / own[f"{key} busy"]
    return f"{elapsed:.3g} ({busy:.3g})"


def seconds(size: float) -> str:
    """A time of three digits."""
    return f"{size:.3g} s" if size >= 1 else f"{size * 1e3:.3g} ms"


def growth(found: dict[int, dict[str, Any]]) -> None:
    """Time by stage and memory of ladders, all for each section."""
    print("\nladders, for each section (needed: linear within 20 % from 1,000 to 100,000)")
    row("sections", "read", "prepare", "checked", "unchecked", "read+door", "memory")
    for sections, own in found.items():
        each = [own[key] / sections for key in ("read", "prepared", "checked", "quick")]
        each.append((own["read"] + own["door"]) / sections)
        memory = (own["peak"] - own["base"]) * 1024 / sections
        row(f"{sections:,}", *(f"{item * 1e6:.3g} us" for item in each), f"{memory:.3g} kB")
    if {SECTIONS[1], SECTIONS[-1]} <= found.keys():
        first, last = found[SECTIONS[1]], found[SECTIONS[-1]]
        ratio = SECTIONS[-1] / SECTIONS[1]
        keys = ("read", "prepared", "checked", "quick")
        grown = [last[key] / first[key] / ratio for key in keys]
        grown.append((last["read"] + last["door"]) / (first["read"] + first["door"]) / ratio)
        grown.append((last["peak"] - last["base"]) / (first["peak"] - first["base"]) / ratio)
        row("growth", *(f"{item:.2f}" for item in grown))


def largest(own: dict[str, Any]) -> None:
    """The longest ladder from its text, and the share of each stage, with and without check."""
    print()
    for run in ("quick", "checked"):
        parts = {
            "reading": own["read"],
            "equations and order": own["prepared"],
            "unchecked run" if run == "quick" else "checked run": own[run],
        }
        whole = sum(parts.values())
        shares = ", ".join(f"{name} {part / whole:.0%}" for name, part in parts.items())
        print(f"{LARGEST} from the text: {whole:.1f} s ({shares}), at most {own['peak']:.0f} MB")
    print("needed: < 20 s, < 2000 MB")


def main(arguments: list[str]) -> None:
    """Print the tables, or measure one case for them."""
    if arguments[:1] == ["--measure"]:
        measure(*arguments[1:4])
        return
    chosen = [*NETWORKS, "cascade"]
    if "--quick" in arguments:
        chosen = [FILTER, "ladder 100", "ladder 1000", DEEP, "mesh 5x5", "mesh 10x10"]
    if arguments[:1] == ["--only"]:
        chosen = arguments[1:]
    ladders = {}
    with tempfile.TemporaryDirectory() as folder:
        for network in (item for item in chosen if item != "cascade"):
            own = compare(network, folder)
            if own is not None and network.removeprefix("ladder ").isdecimal():
                ladders[int(network.split()[1])] = own
    if ladders:
        growth(ladders)
    if SECTIONS[-1] in ladders:
        largest(ladders[SECTIONS[-1]])
    if "cascade" in chosen:
        show_cascade()


def show_cascade() -> None:
    """The equal sections that are one line of text."""
    found = measured("", "cascade")
    print(f"\n{CASCADE_COPIES:,} equal sections in one line, 1000 frequencies: ", end="")
    if found is None:
        print(f"over {OURS_LIMIT_S} s")
        return
    print(f"{seconds(found['seconds'])} (first time {seconds(found['first'])})")
    print(f"after {seconds(found['read'])} of reading, {found['peak']:.0f} MB; ", end="")
    print(f"error {found['error']:.1e}, at -43,000 dB {found['far error']:.1e}")
    print("needed: < 0.1 s, error <= 1e-10")


if __name__ == "__main__":
    main(sys.argv[1:])
