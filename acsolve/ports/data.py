"""A network known by its parameters at frequencies: measured, or computed and kept."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any

import numpy as np
from numpy.typing import NDArray

from acsolve.codes import Code
from acsolve.errors import AnalysisError, Diagnostic
from acsolve.ports.convert import converted
from acsolve.ports.sets import SetName

Array = NDArray[Any]


@dataclass(frozen=True, slots=True, eq=False, repr=False)
class PortData:
    """Parameters of a network with n ports; all arrays are read-only.

    hertz : shape (f,), ascending.
    matrix : shape (f, n, n), in SI units (ohm, siemens), nothing normalised.
    name : the set, "s", "z", "y" and, for two ports, "h", "g", "abcd".
    reference : reference resistance of each port in ohm, shape (n,), positive.
    remarks : what the reader of a file left out or took for granted.
    """

    hertz: Array
    matrix: Array
    name: SetName
    reference: Array
    remarks: tuple[str, ...] = ()

    def __post_init__(self) -> None:
        """Check shapes and close the arrays for writing."""
        for name in ("hertz", "matrix", "reference"):
            array = np.array(getattr(self, name), dtype=complex if name == "matrix" else float)
            array.flags.writeable = False
            object.__setattr__(self, name, array)
        ports = len(self.reference)
        if self.matrix.shape != (len(self.hertz), ports, ports):
            raise refuse(
                "ports.size",
                f"parameters of shape {self.matrix.shape} do not fit {len(self.hertz)} "
                f"frequencies and {ports} reference resistances",
                "Give an array of shape (frequencies, ports, ports).",
            )
        if not np.all(np.isfinite(self.reference) & (self.reference > 0)):
            raise refuse(
                "ports.reference",
                "a reference resistance is not positive",
                "Give one resistance above 0 ohm for each port.",
            )
        if not np.all(np.isfinite(self.hertz) & (self.hertz >= 0)) or np.any(
            np.diff(self.hertz) <= 0
        ):
            raise refuse(
                "ports.order",
                "the frequencies do not ascend from 0 Hz upwards",
                "Give each frequency once, in rising order.",
            )
        if self.name in ("h", "g", "abcd") and ports != 2:
            raise refuse(
                "ports.size",
                f"{self.name} parameters belong to two ports, here are {ports}",
                "Give s, z or y parameters.",
            )

    def __repr__(self) -> str:
        size = f"{self.ports} port{'s' * (self.ports != 1)}, {len(self.hertz)} points"
        return f"PortData({self.name}: {size})"

    @property
    def ports(self) -> int:
        """The number of ports."""
        return len(self.reference)

    def to(self, name: SetName, *, reference: Any = None) -> PortData:
        """The same network in another set, or with other reference resistances.

        Where a set does not exist at a frequency its parameters are not a number there.
        """
        wanted = self.reference if reference is None else _spread(reference, self.ports)
        matrix = converted(
            self.matrix, self.name, name, reference=self.reference, to_reference=wanted
        )
        return PortData(self.hertz, matrix, name, wanted, self.remarks)

    def cascade(self, other: PortData) -> PortData:
        """This two-port followed by another one, at the same frequencies.

        In s parameters with the reference where they meet made equal, by summing all
        reflections between them: deep attenuation loses no digits.

            s21 = s21'·s21''/(1 - s22'·s11''), …
        """
        if self.ports != 2 or other.ports != 2:
            raise refuse("ports.size", "only two-ports stand in a row", "Give data of two ports.")
        if not np.array_equal(self.hertz, other.hertz):
            raise refuse(
                "ports.order",
                "the two networks are known at different frequencies",
                "Sweep or interpolate both at the same frequencies.",
            )
        first = self.to("s").matrix
        middle = float(self.reference[1])
        second = other.to("s", reference=(middle, float(other.reference[1]))).matrix
        a, b, c, d = (first[:, i, j] for i in (0, 1) for j in (0, 1))
        e, f, g, h = (second[:, i, j] for i in (0, 1) for j in (0, 1))
        with np.errstate(all="ignore"):  # a row without an answer is not a number there
            again = 1 / (1 - d * e)
            rows = [[a + b * e * c * again, b * f * again], [g * c * again, h + g * d * f * again]]
        matrix = np.moveaxis(np.array(rows), 2, 0)
        return PortData(self.hertz, matrix, "s", np.array([self.reference[0], other.reference[1]]))


def _spread(reference: Any, ports: int) -> Array:
    """One resistance for all ports, or one for each."""
    return np.array(np.broadcast_to(np.asarray(reference, dtype=float), (ports,)))


def refuse(code: Code, message: str, hint: str) -> AnalysisError:
    """An error of one sentence and its remedy."""
    return AnalysisError(Diagnostic(code=code, message=message, hint=hint))
