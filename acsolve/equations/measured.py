"""Two-ports known by measured numbers, as parts of a circuit.

Their equations are those of waves, which exist for every passive two-port (see the stamp).
Between measured frequencies real and imaginary part of each s parameter run straight: such a
matrix is a mean of its neighbours, so what is passive at them is passive between them. Nothing
is known outside the measured band; `refuse_outside` refuses what lies there.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from math import pi
from pathlib import Path
from typing import Any

import numpy as np
from numpy.typing import ArrayLike, NDArray

from acsolve.algebra.scaled import Scaled
from acsolve.circuit.netlist import Netlist, Part
from acsolve.equations.numeric import Hybrid
from acsolve.equations.stamp import WAVE_OHM
from acsolve.errors import AnalysisError, CircuitError, Diagnostic
from acsolve.ports.data import PortData
from acsolve.ports.touchstone import read_touchstone

Array = NDArray[Any]

MEASURED = "measured"
_PLACES = (("s11", 0, 0), ("s12", 0, 1), ("s21", 1, 0), ("s22", 1, 1))
_ROUND_OFF = 4 * float(np.finfo(float).eps)
_SLACK = 1e-12  # relative: a band's edge that was rounded differently is still its edge


@dataclass(slots=True, eq=False)
class Measured:
    """A measured two-port over blocks of points; the last block is remembered.

    hertz : shape (f,); matrix : s parameters with `WAVE_OHM` at both ports, (f, 2, 2).
    """

    hertz: Array
    matrix: Array
    last: tuple[Array, Hybrid] | None = None

    def at(self, s: Array) -> Hybrid:
        """The s parameters at s = j·2π·f, shape (points,); held beyond the measured band."""
        if self.last is None or self.last[0] is not s:
            values, slopes = self.between(np.asarray(s).imag / (2 * pi))
            none = np.zeros(len(s), dtype=np.int64)
            scaled = [
                {name: Scaled(part[:, i, j], none) for name, i, j in _PLACES}
                for part in (values, slopes)
            ]
            self.last = (s, Hybrid(scaled[0], scaled[1], np.full(len(s), _ROUND_OFF)))
        return self.last[1]

    def between(self, hertz: Array) -> tuple[Array, Array]:
        """Parameters and their derivatives by s, both of shape (points, 2, 2)."""
        if len(self.hertz) == 1:
            shape = (len(hertz), 2, 2)
            return np.broadcast_to(self.matrix, shape), np.zeros(shape, dtype=complex)
        inside = np.clip(hertz, self.hertz[0], self.hertz[-1])
        place = np.clip(np.searchsorted(self.hertz, inside, "right") - 1, 0, len(self.hertz) - 2)
        step = self.hertz[place + 1] - self.hertz[place]
        share = ((inside - self.hertz[place]) / step)[:, None, None]
        low, high = self.matrix[place], self.matrix[place + 1]
        slope = (high - low) / (2j * pi * step)[:, None, None]
        return (1 - share) * low + share * high, slope


@dataclass(slots=True, eq=False)
class MeasuredBalls:
    """The same at single points in balls: the numbers in doubles are what is known."""

    port: Measured

    def at(self, s: Any) -> Hybrid:
        """The parameters at s, a ball around j·2π·f."""
        from flint import acb

        hertz = np.array([float(s.imag.mid()) / (2 * pi)])
        values, slopes = (
            {name: acb(complex(part[0, i, j])) for name, i, j in _PLACES}
            for part in self.port.between(hertz)
        )
        return Hybrid(values, slopes)


def measured(netlist: Netlist) -> dict[str, Measured]:
    """The measured two-ports of a circuit by name; files are read here, and only here.

    Raises
    ------
    TextError
        [file.missing], [touchstone.*] a file cannot be read.
    CircuitError
        [ports.file] nothing says where to look for a file, or it is none to be read from there;
        [ports.size] the data are no two-port's.
    """
    return {part.name: _prepared(netlist, part) for part in netlist.parts if part.kind == MEASURED}


def has_measured(netlist: Netlist) -> bool:
    """Whether a part of the circuit is known by measured numbers only."""
    return any(part.kind == MEASURED for part in netlist.parts)


def measured_band(netlist: Netlist) -> tuple[float, float] | None:
    """The band in hertz that all measured parts share, None where there are none."""
    edges = [(item.hertz[0], item.hertz[-1]) for item in measured(netlist).values()]
    if not edges:
        return None
    return float(max(low for low, _ in edges)), float(min(high for _, high in edges))


def refuse_outside(ports: Mapping[str, Measured], hertz: ArrayLike) -> None:
    """Refuse frequencies at which a measured part is not known.

    Raises
    ------
    AnalysisError
        [sweep.band]
    """
    wanted = np.asarray(hertz, dtype=float)
    for name, port in ports.items():
        low, high = float(port.hertz[0]), float(port.hertz[-1])
        outside = wanted[(wanted < low * (1 - _SLACK)) | (wanted > high * (1 + _SLACK))]
        if outside.size:
            raise AnalysisError(
                Diagnostic(
                    code="sweep.band",
                    message=f"{name} is measured from {low:.6g} Hz to {high:.6g} Hz, and "
                    f"{float(outside.flat[0]):.6g} Hz lies outside",
                    hint="Stay within the measured band: nothing is extrapolated.",
                    where=name,
                )
            )


def _prepared(netlist: Netlist, part: Part) -> Measured:
    data = netlist.data.get(part.name)
    if data is None:
        path = _path(netlist, part)
        data = _read(path, path.stat().st_mtime_ns) if path.exists() else read_touchstone(path)
    if data.ports != 2:
        raise _refuse(
            "ports.size",
            f"{part.name} needs data of two ports, and these have {data.ports}",
            part,
            "Give it a two-port's file.",
        )
    waves = data.to("s", reference=float(WAVE_OHM))
    if not np.all(np.isfinite(waves.matrix)):
        raise _refuse(
            "ports.size",
            f"the data of {part.name} have no s parameters at some frequency",
            part,
            "Measure s parameters, or leave that frequency out.",
        )
    return Measured(waves.hertz, waves.matrix)


@lru_cache(maxsize=32)
def _read(path: Path, changed: int) -> PortData:
    """A file's data, read again only when it has changed."""
    del changed
    return read_touchstone(path)


def _path(netlist: Netlist, part: Part) -> Path:
    """The file beside the circuit's own: a relative name that stays in its folder."""
    assert part.file is not None, "a measured part is built with its file or its data"
    if netlist.folder is None:
        raise _refuse(
            "ports.file",
            f"nothing says in which folder the file of {part.name} lies",
            part,
            "Read the circuit from a file, give parse a folder, or bind data with with_data.",
        )
    folder = Path(netlist.folder).resolve()
    found = (folder / part.file).resolve()
    if Path(part.file).is_absolute() or not found.is_relative_to(folder):
        raise _refuse(
            "ports.file",
            f"the file of {part.name} lies outside the circuit's folder",
            part,
            "Put it beside the circuit or in a folder below.",
        )
    return found


def _refuse(code: Any, message: str, part: Part, hint: str) -> CircuitError:
    where = None if part.span is not None else f"{part.name}.file"
    return CircuitError(
        Diagnostic(code=code, message=message, span=part.span, where=where, hint=hint)
    )
