"""100,000 Monte Carlo samples of a fourth-order filter against NumPy on its exact polynomials.

Run as a script. The rival knows the closed form: it works out the coefficients of the
polynomials from the same arrays of values, once a sample, and evaluates numerator and
denominator by Horner's rule over all samples and frequencies: as plain expressions over the
whole array ("plain"), in place ("in place"), and in blocks that fit the cache ("in blocks").
Ours starts from the circuit each time, finds its closed form and checks every point.
"""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path
from statistics import median
from time import perf_counter

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

import acsolve

Values = dict[str, np.ndarray]

SAMPLES, POINTS, RUNS = 100_000, 200, 5
ACTIVE = """
in -- R1 -- a -- R2 -- b -- C2 -- gnd
a -- C1 -- mid
U1 : opamp(plus = b, minus = mid, out = mid)
mid -- R3 -- c -- R4 -- d -- C4 -- gnd
c -- C3 -- out
U2 : opamp(plus = d, minus = out, out = out)
R1 = 10 kohm
R2 = 12 kohm
R3 = 9.1 kohm
R4 = 11 kohm
C1 = 22 nF
C2 = 10 nF
C3 = 47 nF
C4 = 4.7 nF
"""
LADDER = """
in -- R1 -- a -- L1 -- b -- L2 -- out
a -- C1 -- gnd
b -- C2 -- gnd
out -- R2 -- gnd
R1 = 600 ohm
R2 = 600 ohm
L1 = 33 mH
L2 = 15 mH
C1 = 47 nF
C2 = 100 nF
"""


def active(v: Values) -> tuple[list, list]:
    """Coefficients by rising power of s: two unity-gain sections of second order."""
    first = v["C2"] * (v["R1"] + v["R2"]), v["R1"] * v["R2"] * v["C1"] * v["C2"]
    second = v["C4"] * (v["R3"] + v["R4"]), v["R3"] * v["R4"] * v["C3"] * v["C4"]
    bottom = [
        np.ones(SAMPLES),
        first[0] + second[0],
        first[1] + second[1] + first[0] * second[0],
        first[0] * second[1] + first[1] * second[0],
        first[1] * second[1],
    ]
    return [np.ones(SAMPLES)], bottom


def ladder(v: Values) -> tuple[list, list]:
    """Coefficients by rising power of s: a ladder of two coils between two resistors."""
    r, q, l1, l2, c1, c2 = (v[name] for name in ("R1", "R2", "L1", "L2", "C1", "C2"))
    bottom = [
        r + q,
        l1 + l2 + r * q * (c1 + c2),
        q * l1 * c2 + r * (l2 * (c1 + c2) + l1 * c1),
        r * q * l1 * c1 * c2 + l1 * l2 * c2,
        r * l1 * l2 * c1 * c2,
    ]
    return [q], bottom


def plain(coefficients: tuple[list, list], s: np.ndarray) -> np.ndarray:
    """Horner's rule over the whole array, a new array a step."""

    def polynomial(items: list) -> np.ndarray:
        total = items[-1][:, np.newaxis]
        for item in items[-2::-1]:
            total = total * s + item[:, np.newaxis]
        return total

    return polynomial(coefficients[0]) / polynomial(coefficients[1])


def in_place(coefficients: tuple[list, list], s: np.ndarray) -> np.ndarray:
    """The same in one array (these numerators are constants)."""
    top, bottom = coefficients
    total = np.empty((SAMPLES, POINTS), dtype=complex)
    total[:] = bottom[-1][:, np.newaxis]
    for item in bottom[-2::-1]:
        total *= s
        total += item[:, np.newaxis]
    return np.divide(top[0][:, np.newaxis], total, out=total)


def in_blocks(coefficients: tuple[list, list], s: np.ndarray) -> np.ndarray:
    """The same for 40 samples at a time."""
    top, bottom = coefficients
    total = np.empty((SAMPLES, POINTS), dtype=complex)
    for start in range(0, SAMPLES, 40):
        here = slice(start, start + 40)
        part = total[here]
        part[:] = bottom[-1][here, np.newaxis]
        for item in bottom[-2::-1]:
            part *= s
            part += item[here, np.newaxis]
        np.divide(top[0][here, np.newaxis], part, out=part)
    return total


def compare(name: str, text: str, exact: Callable[[Values], tuple[list, list]]) -> None:
    """Medians of runs taken in turn, and how far the answers are apart."""
    circuit = acsolve.parse(text)
    path = circuit.path("in", "out")
    hertz = np.geomspace(10.0, 1e6, POINTS)
    s = 2j * np.pi * hertz
    random = np.random.default_rng(20)
    values = {
        part: float(circuit.netlist.part(part).values["value"].expression.value)
        * (1 + 0.05 * random.uniform(-1, 1, SAMPLES))
        for part in circuit.parts
        if not part.startswith("U")
    }
    ways: dict[str, Callable[[], np.ndarray]] = {
        "ours, each point checked": lambda: path.response(hertz, values=values),
        "NumPy, plain": lambda: plain(exact(values), s),
        "NumPy, in place": lambda: in_place(exact(values), s),
        "NumPy, in blocks": lambda: in_blocks(exact(values), s),
    }
    times: dict[str, list[float]] = {way: [] for way in ways}
    apart: dict[str, float] = {}
    reference = plain(exact(values), s)
    for _ in range(RUNS):
        for way, work in ways.items():
            start = perf_counter()
            found = work()
            times[way].append(perf_counter() - start)
            apart[way] = float(np.max(np.abs(found - reference) / np.abs(reference)))
            del found
    ours = median(times["ours, each point checked"])
    print(f"\n{name}: {SAMPLES:,} samples at {POINTS} frequencies, medians of {RUNS} runs")
    for way, taken in times.items():
        middle = median(taken)
        ratio = "" if way.startswith("ours") else f"   ours takes {ours / middle:.2f} of it"
        print(f"  {way:<26}{middle:8.3f} s{ratio}   apart {apart[way]:.1e}")


def main() -> None:
    """Both filters."""
    compare("two active sections", ACTIVE, active)
    compare("a ladder of coils and capacitors", LADDER, ladder)


if __name__ == "__main__":
    main()
