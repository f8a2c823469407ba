"""The networks of the numeric benchmark: as text for us, as matrices for the rivals."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from itertools import pairwise
from random import Random
from typing import Any

import numpy as np
from scipy.sparse import coo_array

TAU = 1e-6  # s, of a section: about 1 kohm and 1 nF
_DEEP = 460.5  # nepers of a gain of 1e-200


@dataclass(frozen=True, slots=True, kw_only=True)
class Network:
    """Resistors (a, b, ohm), capacitors (a, b, picofarad), op-amps (plus, minus, out)."""

    resistors: tuple[tuple[str, str, int], ...]
    capacitors: tuple[tuple[str, str, int], ...]
    amplifiers: tuple[tuple[str, str, str], ...] = ()
    source: str
    target: str
    hertz: np.ndarray

    def text(self) -> str:
        """The circuit in the text format, a line for a part with its value."""
        lines = [
            f"{a} -- R{k} = {ohm} ohm -- {b}" for k, (a, b, ohm) in enumerate(self.resistors, 1)
        ]
        lines += [
            f"{a} -- C{k} = {size} pF -- {b}" for k, (a, b, size) in enumerate(self.capacitors, 1)
        ]
        lines += [
            f"U{k} : opamp(plus = {plus}, minus = {minus}, out = {out})"
            for k, (plus, minus, out) in enumerate(self.amplifiers, 1)
        ]
        return "\n".join(lines) + "\n"


@dataclass(frozen=True, slots=True, kw_only=True)
class Matrices:
    """(G + s·C)·v = g + s·c: one pattern, the driven node worked out of the equations."""

    rows: np.ndarray
    columns: np.ndarray
    conductance: np.ndarray
    capacitance: np.ndarray
    right: tuple[np.ndarray, np.ndarray]
    size: int
    wanted: int


def matrices(network: Network) -> Matrices:
    """What an expert writes down: nodal equations, an op-amp's row saying its inputs are equal."""
    amplified = {out: (plus, minus) for plus, minus, out in network.amplifiers}
    named = [(*item[:2], 1 / item[2], 0) for item in network.resistors]
    named += [(*item[:2], item[2] * 1e-12, 1) for item in network.capacitors]
    nodes = dict.fromkeys(node for a, b, _, _ in named for node in (a, b))
    unknown = [node for node in nodes if node not in ("gnd", network.source)]
    place = {node: k for k, node in enumerate(unknown)}
    right = np.zeros((2, len(unknown)))
    triples: list[tuple[int, int, float, int]] = []
    for a, b, size, kind in named:
        for here, there in ((a, b), (b, a)):
            if here not in place or here in amplified:
                continue
            triples.append((place[here], place[here], size, kind))
            if there == network.source:
                right[kind, place[here]] += size
            elif there in place:
                triples.append((place[here], place[there], -size, kind))
    for out, (plus, minus) in amplified.items():
        triples += [(place[out], place[plus], 1.0, 0), (place[out], place[minus], -1.0, 0)]
    both = [_summed([item for item in triples if item[3] == kind], len(unknown)) for kind in (0, 1)]
    pattern = (abs(both[0]) + abs(both[1])).tocoo()
    rows, columns = pattern.coords
    g, c = (np.asarray(side.tocsr()[rows, columns]).ravel() for side in both)
    return Matrices(
        rows=rows,
        columns=columns,
        conductance=g,
        capacitance=c,
        right=(right[0], right[1]),
        size=len(unknown),
        wanted=place[network.target],
    )


def _summed(triples: list[tuple[int, int, float, int]], size: int) -> Any:
    rows, columns, values, _ = zip(*triples, strict=True)
    return coo_array((values, (rows, columns)), shape=(size, size)).tocsr()


def hertz_at(sections: int, nepers: float) -> float:
    """Where equal sections weaken a wave by so much: cosh(gamma) = 1 + s·tau/2, bisected."""
    low, high = 1e-12, 1e15
    for _ in range(200):
        middle = (low * high) ** 0.5
        gamma = np.arccosh(1 + 1j * np.pi * middle * TAU)
        low, high = (middle, high) if sections * gamma.real < nepers else (low, middle)
    return low


def ladder(sections: int, points: int, *, deep: bool = False) -> Network:
    """RC sections, every value its own; down to 1e-20, or `deep` around a gain of 1e-200."""
    random = Random(sections)
    nodes = [f"n{k}" for k in range(sections + 1)]
    edges = (0.99 * _DEEP, 1.01 * _DEEP) if deep else (1e-2, 46.0)
    low, high = (hertz_at(sections, item) for item in edges)
    return Network(
        resistors=tuple(
            (a, b, random.randrange(900_000, 1_100_000) // 1000) for a, b in pairwise(nodes)
        ),
        capacitors=tuple((node, "gnd", random.randrange(900, 1100)) for node in nodes[1:]),
        source="n0",
        target=nodes[-1],
        hertz=np.geomspace(low, high, points),
    )


def mesh(side: int, points: int) -> Network:
    """A square mesh of resistors, a capacitor at every node but the driven corner."""
    random = Random(side)
    name = {(i, k): f"m{i}_{k}" for i in range(side) for k in range(side)}
    ends = [(name[i, k], name[i, k + 1]) for i in range(side) for k in range(side - 1)]
    ends += [(name[i, k], name[i + 1, k]) for i in range(side - 1) for k in range(side)]
    nodes = list(name.values())
    return Network(
        resistors=tuple((a, b, random.randrange(900, 1100)) for a, b in ends),
        capacitors=tuple((node, "gnd", random.randrange(900, 1100)) for node in nodes[1:]),
        source=nodes[0],
        target=nodes[-1],
        hertz=np.geomspace(1e2, 1e6, points),
    )


def active_filter(points: int) -> Network:
    """Four second-order low-pass sections with unity-gain buffers: 12 unknown nodes."""
    resistors, capacitors, amplifiers, node = [], [], [], "in"
    for k in range(1, 5):
        a, b, out = f"a{k}", f"b{k}", f"out{k}"
        resistors += [(node, a, 9_900 + 130 * k), (a, b, 11_000 - 170 * k)]
        capacitors += [(a, out, 1_000 + 310 * k), (b, "gnd", 1_000 - 190 * k)]
        amplifiers.append((b, out, out))
        node = out
    return Network(
        resistors=tuple(resistors),
        capacitors=tuple(capacitors),
        amplifiers=tuple(amplifiers),
        source="in",
        target="out4",
        hertz=np.geomspace(1e2, 1e6, points),
    )


SECTIONS = (100, 1_000, 10_000, 100_000)
SIDES = (5, 10, 20, 30, 60)
LARGEST = "ladder 100000"
FILTER = "active filter"
DEEP = "ladder 1000 deep"
NETWORKS: dict[str, Callable[[], Network]] = {
    FILTER: lambda: active_filter(100_000),
    **{f"ladder {n}": lambda n=n: ladder(n, 1_000) for n in SECTIONS},
    DEEP: lambda: ladder(1_000, 1_000, deep=True),
    **{f"mesh {n}x{n}": lambda n=n: mesh(n, 200) for n in SIDES},
}

CASCADE_COPIES = 100_000
CASCADE = f"""block section(a, b)
    a -- R -- b
    b -- C -- gnd
    R = 1 kohm
    C = 1 nF
end

start -- N1 : {CASCADE_COPIES} * section -- finish
"""
