"""Both edges of a band in closed form, its width, centre and quality factor."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

from acsolve.algebra.ring import Polynomial
from acsolve.analyses.level_ring import sign_for_positive
from acsolve.analyses.passband import BandForms
from acsolve.analyses.shape import natural_frequency, quality, rooted
from acsolve.equations.grouping import Writer
from acsolve.equations.phrase import product, root

if TYPE_CHECKING:
    from acsolve.analyses.cutoff_formula import Equation


@dataclass(frozen=True, slots=True)
class Edges:
    """Both roots of an equation are (sqrt(wide) ± sqrt(narrow))/(2·alpha)."""

    alpha: Polynomial
    gamma: Polynomial
    narrow: Polynomial
    wide: Polynomial


def edges_of(equation: Equation) -> Edges | None:
    """The edges of an equation of second degree in ω² whose ends are squares, else None."""
    from flint.utils.flint_exceptions import DomainError

    form, (c, b, a) = equation.form, equation.coefficients
    try:
        alpha, gamma = a.sqrt(), c.sqrt()
    except DomainError:
        return None
    signs = sign_for_positive(form, alpha), sign_for_positive(form, gamma)
    if 0 in signs:
        return None
    alpha, gamma = alpha * signs[0], gamma * signs[1]
    return Edges(alpha, gamma, -2 * alpha * gamma - b, 2 * alpha * gamma - b)


def edges_hold(equation: Equation, edges: Edges, write: Writer) -> str | None:
    """When both edges are real; None where they always are."""
    narrow = edges.narrow
    if sign_for_positive(equation.form, narrow) == 0 and _square(narrow) is None:
        return f"the edges hold where {write.grouped(narrow)} >= 0"
    return None


def band_forms(equation: Equation) -> BandForms | None:
    """Width sqrt(narrow)/α and centre sqrt(γ/α) of the band between both roots."""
    if len(equation.coefficients) != 3:
        return None
    edges = edges_of(equation)
    if edges is None or sign_for_positive(equation.form, edges.narrow) < 0:
        return None
    write = Writer(equation.form.basis, equation.form.spelled(safe=True))
    alpha, gamma, narrow = edges.alpha, edges.gamma, edges.narrow
    outer, inner = rooted(narrow)
    q = quality(write, [gamma, outer, alpha])
    if inner != 1:
        q = natural_frequency(write, [alpha * gamma, alpha, narrow])
    return BandForms(
        width=str(half_width(write, narrow, alpha)),
        centre=str(natural_frequency(write, [gamma, alpha, alpha])),
        q=str(q),
        condition=edges_hold(equation, edges, write),
    )


def _square(polynomial: Polynomial) -> Polynomial | None:
    from flint.utils.flint_exceptions import DomainError

    try:
        return polynomial.sqrt()
    except DomainError:
        return None


def half_width(write: Writer, inside: Polynomial, below: Polynomial) -> Any:
    """sqrt(inside)/below as a phrase."""
    outer, inner = rooted(inside)
    pieces = write.pieces(outer, below)
    return product([*pieces.top, root(write.grouped(inner))], pieces.bottom)
