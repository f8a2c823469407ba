"""The derivative of a value expression with respect to the complex frequency s."""

from __future__ import annotations

from acsolve.circuit.expression import (
    MINUS_ONE,
    ONE,
    ZERO,
    Call,
    Expression,
    Frequency,
    Power,
    Product,
    Quotient,
    Sum,
    add,
    call,
    depends_on_s,
    divide,
    is_zero,
    multiply,
    negate,
    number,
    power,
    subtract,
)


def slope(expression: Expression) -> Expression:
    """The derivative by s; names stand for quantities that do not depend on s."""
    match expression:
        case Frequency():
            return ONE
        case Sum(left, right):
            return add(slope(left), slope(right))
        case Product(left, right):
            return add(multiply(slope(left), right), multiply(left, slope(right)))
        case Quotient(left, right):
            top = subtract(multiply(slope(left), right), multiply(left, slope(right)))
            return divide(top, multiply(right, right))
        case Power():
            return _of_power(expression)
        case Call():
            return _of_call(expression)
        case _:
            return ZERO


def _of_power(item: Power) -> Expression:
    """(u^v)' = v·u^(v-1)·u' + u^v·ln(u)·v'."""
    base, exponent = item.base, item.exponent
    first = multiply(multiply(exponent, power(base, add(exponent, MINUS_ONE))), slope(base))
    if not depends_on_s(exponent):
        return first
    return add(first, multiply(multiply(item, call("ln", base)), slope(exponent)))


def _of_call(item: Call) -> Expression:
    argument = item.argument
    inner = slope(argument)
    if is_zero(inner):
        return ZERO
    match item.function:
        case "sqrt":
            return divide(inner, multiply(number(2), item))
        case "exp":
            return multiply(item, inner)
        case "ln":
            return divide(inner, argument)
        case "log10":
            return divide(inner, multiply(argument, call("ln", number(10))))
        case "cosh":
            return multiply(call("sinh", argument), inner)
        case "sinh":
            return multiply(call("cosh", argument), inner)
        case "cos":
            return negate(multiply(call("sin", argument), inner))
        case "sin":
            return multiply(call("cos", argument), inner)
