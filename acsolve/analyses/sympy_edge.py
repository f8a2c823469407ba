"""The one place where answers become SymPy objects; text from users is never parsed here."""

from __future__ import annotations

from collections.abc import Mapping
from typing import TYPE_CHECKING, Any

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
from acsolve.equations.naming import safe_names

if TYPE_CHECKING:
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.equations import Equations
    from acsolve.analyses.nested import NestedForm


def expression_to_sympy(expression: Expression, symbols: Mapping[str, Any], s: Any) -> Any:
    """A value expression as a SymPy expression over the given symbols."""
    import sympy

    def convert(item: Expression) -> Any:
        match item:
            case Number(value):
                return sympy.Rational(value.numerator, value.denominator)
            case Name(name):
                return symbols[name]
            case Pi():
                return sympy.pi
            case Frequency():
                return s
            case Sum(left, right):
                return convert(left) + convert(right)
            case Product(left, right):
                return convert(left) * convert(right)
            case Quotient(left, right):
                return convert(left) / convert(right)
            case Power(base, exponent):
                return convert(base) ** convert(exponent)
            case Call("log10", argument):
                return sympy.log(convert(argument), 10)
            case Call("ln", argument):
                return sympy.log(convert(argument))
            case Call(function, argument):
                return getattr(sympy, function)(convert(argument))

    return convert(expression)


def symbol_table(names: tuple[str, ...]) -> dict[str, Any]:
    """name -> positive SymPy symbol with a safe name."""
    import sympy

    return {name: sympy.Symbol(safe, positive=True) for name, safe in safe_names(names).items()}


def closed_form_to_sympy(form: ClosedForm) -> Any:
    """numerator/denominator as one SymPy fraction, powers of s collected."""
    import sympy

    s = sympy.Symbol("s")
    table = symbol_table(form.basis.free_names)
    generators = [
        expression_to_sympy(item.leaf, table, s) ** sympy.Rational(1, item.root)
        for item in form.basis.generators
    ]

    def convert(polynomial: Any) -> Any:
        total = sympy.Add(
            *(
                sympy.Integer(int(coefficient))
                * sympy.Mul(
                    *(
                        generator ** int(exponent)
                        for generator, exponent in zip(generators, exponents, strict=False)
                    )
                )
                for exponents, coefficient in polynomial.terms()
            )
        )
        return sympy.collect(total, s) if form.rational else total

    return convert(form.numerator) / convert(form.denominator)


def equations_to_sympy(found: Equations) -> tuple[Any, Any, Any]:
    """Matrix, unknowns and excitation of the nodal equations."""
    import sympy

    s = sympy.Symbol("s")
    table = symbol_table(found.symbols())

    def convert(entry: Expression) -> Any:
        return expression_to_sympy(entry, table, s)

    matrix = sympy.Matrix(
        found.size, found.size, lambda row, column: convert(found.entry(row, column))
    )
    unknowns = sympy.Matrix([sympy.Symbol(name) for name in found.unknowns])
    return matrix, unknowns, sympy.Matrix([convert(entry) for entry in found.excitation])


def nested_to_sympy(form: NestedForm) -> tuple[list[tuple[Any, Any]], Any]:
    """Steps as (symbol, expression) in order, and the result."""
    import sympy

    s = sympy.Symbol("s")
    table = symbol_table(form.symbols)
    spelling = form.spelled(safe=True)
    steps = []
    for step in form.steps:
        table[step.name] = sympy.Symbol(spelling.name(step.name))
        steps.append((table[step.name], expression_to_sympy(step.expression, table, s)))
    return steps, expression_to_sympy(form.result, table, s)
