"""Values, expressions and names as the format writes them, exactly."""

from __future__ import annotations

from collections.abc import Mapping
from fractions import Fraction

from acsolve.circuit import expression as ex
from acsolve.circuit import unit
from acsolve.circuit.expression import (
    Call,
    Expression,
    Frequency,
    Name,
    Number,
    Pi,
    Power,
    Product,
    Quotient,
    Sum,
)
from acsolve.circuit.unit import NONE, PREFIXES, SIGNS, Dimension
from acsolve.circuit.value import Tolerance, Value

_PER_SECOND = unit.NONE / unit.SECOND
_LONGEST_PLAIN = 7  # digits before or behind the point, beyond which powers of ten are used

Dimensions = Mapping[str, Dimension]


def number_text(value: Fraction) -> str:
    """An exact number: decimal where it ends, else a quotient in brackets."""
    if value < 0:
        return f"(-{number_text(-value)})"
    decimals = _decimals(value.denominator)
    if decimals is None:
        return f"({value.numerator}/{value.denominator})"
    digits = str(value.numerator * 10**decimals // value.denominator)
    significant = digits.rstrip("0")
    zeros = len(digits) - len(significant)
    if not significant:
        return "0"
    if zeros - decimals > _LONGEST_PLAIN or decimals - zeros > _LONGEST_PLAIN:
        return f"{significant}e{zeros - decimals}"
    return plain_decimal(value)


def plain_decimal(value: Fraction) -> str:
    """A decimal number without a power of ten; the value must end."""
    decimals = _decimals(value.denominator)
    assert decimals is not None, "the caller has looked"
    digits = str(abs(value.numerator) * 10**decimals // value.denominator)
    digits = digits.rjust(decimals + 1, "0")
    sign = "-" if value < 0 else ""
    if not decimals:
        return sign + digits
    return f"{sign}{digits[:-decimals]}.{digits[-decimals:]}"


def _decimals(denominator: int) -> int | None:
    """Decimal places of a number with this denominator, None where they never end."""
    twos = fives = 0
    while denominator % 2 == 0:
        denominator, twos = denominator // 2, twos + 1
    while denominator % 5 == 0:
        denominator, fives = denominator // 5, fives + 1
    return max(twos, fives) if denominator == 1 else None


def unit_factor(dimension: Dimension) -> str:
    """A product of units that is the number one in this dimension."""
    if SIGNS.get(dimension) and SIGNS[dimension] != "s":
        return f"(1 {SIGNS[dimension]})"
    factors = []
    for sign, power in (
        ("V", dimension.volt),
        ("A", dimension.ampere),
        ("Hz", -dimension.second),  # `1 s` would be two readings beside the frequency s
        ("K", dimension.kelvin),
    ):
        if power.denominator == 2:
            factors.append(f"sqrt(1 {sign})^({power.numerator})")
        elif power:
            factors.append(f"(1 {sign})^({power})")
    return "*".join(factors)


class Expressions:
    """Writes expressions; units that folding has lost are put back as factors of one."""

    def __init__(self, dimensions: Dimensions) -> None:
        self._dimensions = dimensions

    def text(self, expression: Expression, need: Dimension | None) -> str:
        """The expression, of the dimension its place needs (None: any)."""
        if isinstance(expression, Sum):
            left = self.natural(expression.left) or self.natural(expression.right)
            inner = need if need is not None else left
            return (
                f"{self.text(expression.left, inner)} + "
                f"{self._bracketed(expression.right, inner, (Sum,))}"
            )
        written = self._factor(expression)
        have = self.natural(expression)
        if need is None or have is None or have == need:
            return written
        return f"{written}*{unit_factor(need / have)}"

    def _bracketed(
        self, expression: Expression, need: Dimension | None, kinds: tuple[type, ...]
    ) -> str:
        written = self.text(expression, need)
        return f"({written})" if isinstance(expression, kinds) else written

    def _factor(self, expression: Expression) -> str:
        """Anything but a sum, in its natural dimension."""
        match expression:
            case Number(value):
                return number_text(value)
            case Name(name):
                return name
            case Pi():
                return "pi"
            case Frequency():
                return "s"
            case Product(left, right):
                return f"{self._side(left, (Sum,))}*{self._side(right, _WEAK)}"
            case Quotient(left, right):
                return f"{self._side(left, (Sum,))}/{self._side(right, _WEAK)}"
            case Power(base, exponent):
                need = None if isinstance(exponent, Number) else NONE
                return f"({self.text(base, need)})^({self.text(exponent, NONE)})"
            case Call(function, argument):
                need = None if function == "sqrt" else NONE
                return f"{function}({self.text(argument, need)})"
        raise AssertionError("sums are written by text")

    def _side(self, expression: Expression, kinds: tuple[type, ...]) -> str:
        return self._bracketed(expression, None, kinds)

    def natural(self, expression: Expression) -> Dimension | None:
        """The dimension an expression has as written; None for bare numbers."""
        match expression:
            case Number() | Pi():
                return None
            case Name(name):
                return self._dimensions.get(name, NONE)
            case Frequency():
                return _PER_SECOND
            case Sum(left, right):
                return self.natural(left) or self.natural(right)
            case Product(left, right):
                return self._combined(left, right, 1)
            case Quotient(left, right):
                return self._combined(left, right, -1)
            case Power(base, Number(exponent)):
                dimension = self.natural(base)
                return None if dimension is None else dimension**exponent
            case Call("sqrt", argument):
                dimension = self.natural(argument)
                return None if dimension is None else dimension ** Fraction(1, 2)
            case Power(base, exponent):
                return self._plain(base, exponent)
            case Call(_, argument):
                return self._plain(argument)
        raise AssertionError("every expression is one of these")

    def _plain(self, *parts: Expression) -> Dimension | None:
        return None if all(self.natural(part) is None for part in parts) else NONE

    def _combined(self, left: Expression, right: Expression, power: int) -> Dimension | None:
        first, second = self.natural(left), self.natural(right)
        if first is None and second is None:
            return None
        return (first or NONE) * (second or NONE) ** power

    # ------------------------------------------------------------ values

    def value(self, value: Value, need: Dimension | None) -> str:
        """A value behind an equals sign, in a chain or anywhere else."""
        assert value.expression is not None, "symbols have no value to write"
        written = self.given(value.expression, need)
        if value.tolerance is not None:
            written += f" {self._tolerance(value.tolerance, need)}"
        if value.at_hertz is not None:
            written += f" at {self.given(value.at_hertz, unit.HERTZ)}"
        return written

    def given(self, expression: Expression, need: Dimension | None) -> str:
        """A literal with its unit, or an expression in brackets."""
        sign = SIGNS.get(need, "") if need is not None else ""
        if isinstance(expression, Number) and _decimals(expression.value.denominator) is not None:
            minus = "-" if expression.value < 0 else ""
            number, prefix = _scaled(abs(expression.value)) if sign else (expression.value, "")
            text = number_text(abs(number))
            return f"{minus}{text} {prefix}{sign}" if sign else f"{minus}{text}"
        return f"({self.text(expression, need)})"

    def _tolerance(self, tolerance: Tolerance, need: Dimension | None) -> str:
        spread = " normal" if tolerance.distribution == "normal" else ""
        low, high = tolerance.low, tolerance.high
        if not tolerance.relative:
            return f"± {self.given(high, need)}{spread}"
        if isinstance(high, Number) and isinstance(low, Number):
            if low.value == -high.value:
                return f"± {self._percent(high.value)}{spread}"
            return f"+{plain_decimal(high.value * 100)} % {_minus(low.value)} %{spread}"
        if isinstance(high, Product) and high.right == ex.number(Fraction(1, 100)):
            return f"± ({self.text(high.left, NONE)}) %{spread}"
        return f"± ({self.text(high, NONE)}){spread}"

    def _percent(self, value: Fraction) -> str:
        if _decimals(value.denominator) is None:
            return f"({value.numerator * 100}/{value.denominator}) %"
        return f"{plain_decimal(value * 100)} %"


def _scaled(value: Fraction) -> tuple[Fraction, str]:
    """A positive number with the prefix that leaves one to three digits before the point."""
    for prefix, power in (("", 0), *PREFIXES.items()):
        scaled = value / Fraction(10) ** power
        if 1 <= scaled < 1000:
            return scaled, prefix
    return value, ""


_WEAK = (Sum, Product, Quotient)


def _minus(value: Fraction) -> str:
    """A limit below the nominal value, its sign always written."""
    return f"-{plain_decimal(-value * 100)}"
