"""Elliptic low-pass networks computed from the theory to 60 digits, as parts of our format.

Darlington's impedance (S. Darlington, J. Math. Phys. 18 (1939)) between a source of 1 ohm and a
load, and one notch after the other taken out of it. Where a zero of transmission lies at
infinity, a shunt capacitor shifts a zero of the impedance to the notch and a parallel resonator
in series takes it out. Where none does (plain prototypes of even order), it is a section of
O. Brune, J. Math. Phys. 10 (1931): a coil X/ω in series, positive or not, makes the impedance
zero at the notch, a shunt series resonator takes that out, and a second coil follows; the three
coils are two perfectly coupled ones, here one coil across an ideal transformer.
"""

from __future__ import annotations

from dataclasses import dataclass
from fractions import Fraction

from acsolve.circuit.netlist import Part
from tests.strategies import C, L, R, part

from .elliptic_theory import MP, Characteristic, added, divided, product, trimmed


@dataclass(frozen=True)
class EllipticLadder:
    """Shunt capacitors, and between them resonators (L, C) in series; the source has 1 ohm.

    `last` is a coil before the load where the order is even.
    """

    shunts: tuple[Fraction, ...]
    resonators: tuple[tuple[Fraction, Fraction], ...]
    last: Fraction | None
    load: Fraction

    def parts(self) -> list[Part]:
        """From node `in` to node `out`."""
        nodes = [f"n{k}" for k in range(len(self.shunts))]
        if self.last is None:
            nodes[-1] = "out"
        found = [R("R0", "in", nodes[0], 1), R("RL", "out", "gnd", self.load)]
        found += [C(f"C{k}", nodes[k], "gnd", item) for k, item in enumerate(self.shunts)]
        for k, (coil, capacitor) in enumerate(self.resonators):
            found.append(L(f"L{k}", nodes[k], nodes[k + 1], coil))
            found.append(C(f"D{k}", nodes[k], nodes[k + 1], capacitor))
        return found if self.last is None else [*found, L("L", nodes[-1], "out", self.last)]

    def elements(self) -> list[float]:
        """In the order of the tables: shunt, then coil and capacitor in series, and so on."""
        found = []
        for shunt, resonator in zip(self.shunts, self.resonators, strict=False):
            found += [float(shunt), *map(float, resonator)]
        found += [float(item) for item in self.shunts[len(self.resonators) :]]
        return found if self.last is None else [*found, float(self.last)]


def elliptic_ladder(theory: Characteristic, *, turned: bool = False) -> EllipticLadder:
    """The ladder of an odd order, or of an even one whose highest notch is at infinity.

    `turned` takes the notches out in the other order.
    """
    top, bottom = _immittance(theory)
    shunts, resonators = [], []
    for notch in _ordered(theory.notches, turned=turned):
        place = MP.mpc(0, notch)
        shunt = (_at(top, place) / _at(bottom, place) / place).real
        shunts.append(_fraction(shunt))
        rest = added(top, [MP.mpf(0), *bottom], -shunt)
        # Z = bottom/rest has a pole at the notch: Z = s·a/(s² + n²) + what is left
        quotient = divided(rest, product([notch**2]))
        a = (_at(bottom, place) / (place * _at(quotient, place))).real
        resonators.append((_fraction(a / notch**2), _fraction(1 / a)))
        left = added(bottom, [MP.mpf(0), *quotient], -a)
        top, bottom = quotient, divided(left, product([notch**2]))
    top, bottom = trimmed(top), trimmed(bottom)
    shunt = top[-1] / bottom[-1]
    shunts.append(_fraction(shunt))
    rest = trimmed(added(top, [MP.mpf(0), *bottom], -shunt))
    if len(bottom) == 1:
        return EllipticLadder(
            tuple(shunts), tuple(resonators), None, _fraction(bottom[0] / rest[0])
        )
    return EllipticLadder(
        tuple(shunts),
        tuple(resonators),
        _fraction(bottom[1] / rest[0]),
        _fraction(bottom[0] / rest[0]),
    )


def brune_parts(theory: Characteristic) -> list[Part]:
    """A plain prototype of even order as a row of Brune sections, from `in` to `out`."""
    bottom, top = _immittance(theory)  # Z = top/bottom
    nodes = [*(f"n{k}" for k in range(len(theory.notches))), "out"]
    found = [R("R0", "in", nodes[0], 1)]
    for k, notch in enumerate(theory.notches):
        place = MP.mpc(0, notch)
        first = (_at(top, place) / _at(bottom, place) / place).real
        rest = added(top, [MP.mpf(0), *bottom], -first)
        # Y = bottom/rest has a pole at the notch: Y = s·a/(s² + n²) + what is left
        quotient = divided(rest, product([notch**2]))
        a = (_at(bottom, place) / (place * _at(quotient, place))).real
        shunt = 1 / a
        left = added(bottom, [MP.mpf(0), *quotient], -a)
        following = -first * shunt / (first + shunt)  # perfectly coupled
        bottom = trimmed(divided(left, product([notch**2])))
        top = trimmed(added(quotient, [MP.mpf(0), *bottom], -following))
        found += _section(k, nodes[k], nodes[k + 1], first + shunt, shunt)
        found.append(C(f"C{k}", f"m{k}", "gnd", _fraction(a / notch**2)))
    return [*found, R("RL", "out", "gnd", _fraction(top[0] / bottom[0]))]


def _section(place: int, near: str, far: str, coil, shared) -> list[Part]:
    """Two perfectly coupled coils that meet at a node m: what they share is `shared`."""
    middle, ratio = f"m{place}", _fraction(coil / shared)
    return [
        L(f"L{place}", near, middle, _fraction(coil)),
        part(f"T{place}", "transformer", near, middle, far, middle, ratio=ratio),
    ]


def _immittance(theory: Characteristic) -> tuple[list, list]:
    """(E + F)/(E - F), an admittance with a pole at infinity where the ladder has one."""
    above = trimmed(added(theory.hurwitz, theory.reflection))
    below = trimmed(added(theory.hurwitz, theory.reflection, -1))
    return above, below


def _at(values, place):
    return MP.polyval(values[::-1], place)


def _ordered(notches, *, turned: bool) -> list:
    """An order in which the elements come out positive: the lowest in the middle."""
    ordered = sorted(notches)
    found = ordered[1::2] + ordered[0::2][::-1]
    return found[::-1] if turned else found


def _fraction(value) -> Fraction:
    return Fraction(int(MP.nint(value * MP.mpf(10) ** 40)), 10**40)
