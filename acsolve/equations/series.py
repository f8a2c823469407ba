"""Value expressions as Taylor series: balls of python-flint that carry their derivatives along."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from typing import Any

from acsolve.equations.evaluate import BallArithmetic, Scalar


@contextmanager
def terms(count: int) -> Iterator[None]:
    """Work with series of so many terms; the library's setting is put back afterwards."""
    from flint import ctx

    before = ctx.cap
    ctx.cap = count
    try:
        yield
    finally:
        ctx.cap = before


class SeriesArithmetic(BallArithmetic):
    """Balls where a value does not depend on the variable, power series of balls where it does.

    A series without a constant term has a root where its lowest power, times the exponent,
    is whole: so expressions in s = z**q expand at s = 0 although roots of s occur.
    """

    def power(self, base: Scalar, exponent: Scalar) -> Scalar:
        """base ** exponent, principal branch."""
        if not _is_series(base):
            return super().power(base, exponent)
        whole = exponent.unique_fmpz() if hasattr(exponent, "unique_fmpz") else None
        if whole is not None and whole >= 0:
            return base ** int(whole)
        low = base.valuation()
        if low <= 0:
            return base**exponent
        steps = (exponent * low).unique_fmpz()
        if steps is None or steps < 0:
            return base * _nan()
        lead = type(base)(base.coeffs()[low:], prec=base.prec - low)
        unit = lead**exponent
        return type(base)([0] * int(steps) + unit.coeffs(), prec=unit.prec + int(steps))

    def exp_minus_one(self, exponent: Scalar) -> Scalar:
        """exp(exponent) - 1."""
        return exponent.exp() - 1

    def function(self, name: str, argument: Scalar) -> Scalar:
        """Square root, exponential, logarithms and hyperbolic functions."""
        if not _is_series(argument):
            return super().function(name, argument)
        from flint import acb

        if name == "sqrt":
            return self.power(argument, acb(0.5))
        if name in ("cosh", "sinh"):
            up, down = argument.exp(), (-argument).exp()
            return (up + down) / 2 if name == "cosh" else (up - down) / 2
        return super().function(name, argument)


def _is_series(value: Scalar) -> bool:
    from flint import acb_series

    return isinstance(value, acb_series)


def _nan() -> Any:
    from flint import acb

    return acb("nan")


def frequency(omega: Any, order: int) -> Any:
    """The complex frequency j·(omega + t) as a series in t, omega a real ball in rad/s."""
    from flint import acb, acb_series

    return acb_series([acb(0, omega), acb(0, 1)], prec=order + 1)


def near_zero(root: int, count: int) -> Any:
    """s = z**root as a series in z of so many terms."""
    from flint import acb_series

    return acb_series([0] * root + [1], prec=count)


def coefficients(value: Any, order: int) -> list[Any]:
    """Coefficients 0 to `order` of a series, or of a value that does not depend on the variable."""
    from flint import acb

    if not _is_series(value):
        return [acb(value)] + [acb(0)] * order
    found = value.coeffs()[: order + 1]
    return [*found, *[acb(0)] * (order + 1 - len(found))]
