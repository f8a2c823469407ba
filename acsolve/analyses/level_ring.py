"""A level in decibels as an exact number: 10 to a rational power, one generator more."""

from __future__ import annotations

from dataclasses import replace
from fractions import Fraction
from typing import TYPE_CHECKING

from acsolve.algebra.ring import Polynomial, Ring
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.shape import sign_of
from acsolve.circuit.expression import Number, Power
from acsolve.equations.exact import Basis, Generator

if TYPE_CHECKING:
    from acsolve.analyses.cutoff import CutoffLevel

_NAME = "level"


def with_level(form: ClosedForm, level: CutoffLevel) -> tuple[ClosedForm, Polynomial, Polynomial]:
    """The form, and the level as a ratio of squared gains, top and bottom, over its ring.

    A level that is no rational ratio, -6 dB = 10**(-3/5), brings a generator for 10**(3/5)
    (always the power above one) into the ring.
    """
    constant = form.basis.ring.constant
    if level.exact is not None:
        return form, constant(level.exact.numerator), constant(level.exact.denominator)
    assert level.decibel is not None
    tens = level.decibel / 10
    basis = form.basis
    ring = Ring((*basis.ring.names, _NAME), basis.ring.squares)
    leaf = Power(Number(Fraction(10)), Number(abs(tens)))
    wide = replace(
        form,
        basis=Basis(ring, (*basis.generators, Generator(leaf))),
        numerator=_carried(ring, form.numerator),
        denominator=_carried(ring, form.denominator),
        origin=None,
    )
    power, one = ring.generator(len(ring.names) - 1), ring.constant(1)
    return (wide, one, power) if tens < 0 else (wide, power, one)


def _carried(ring: Ring, polynomial: Polynomial) -> Polynomial:
    return ring.context.from_dict({(*key, 0): value for key, value in polynomial.terms()})


def sign_for_positive(form: ClosedForm, polynomial: Polynomial) -> int:
    """1 or -1 where the polynomial has that sign for all positive parts, else 0.

    The level's power is above one: it is replaced by 1 + u for a positive u.
    """
    names = form.basis.ring.names
    if polynomial != 0 and names and names[-1] == _NAME:
        generators = [form.basis.ring.generator(place) for place in range(len(names))]
        polynomial = polynomial.compose(*generators[:-1], generators[-1] + 1)
    return sign_of(polynomial)
