"""The six sets of two-port parameters, each as two port quantities given by two others.

V1 and V2 are the port voltages, I1 and I2 the currents into each port's first node. A set
says left = matrix · right; `-I2` is the current that leaves the second port. The waves are

    a = (V + R·I)/(2·sqrt(R)),  b = (V - R·I)/(2·sqrt(R))

with the reference resistance R of each port (K. Kurokawa, IEEE Trans. MTT 13 (1965) 194).
"""

from __future__ import annotations

from typing import Literal, TypeAlias, get_args

SetName: TypeAlias = Literal["z", "y", "h", "g", "abcd", "s"]

#: Set -> what is on the left, what is on the right.
SETS: dict[SetName, tuple[tuple[str, str], tuple[str, str]]] = {
    "z": (("V1", "V2"), ("I1", "I2")),
    "y": (("I1", "I2"), ("V1", "V2")),
    "h": (("V1", "I2"), ("I1", "V2")),
    "g": (("I1", "V2"), ("V1", "I2")),
    "abcd": (("V1", "I1"), ("V2", "-I2")),
    "s": (("b1", "b2"), ("a1", "a2")),
}
NAMES: tuple[SetName, ...] = get_args(SetName)
