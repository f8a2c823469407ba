"""Strings in JSON: SymPy's parser reads them as the same function."""

from __future__ import annotations

import random

import pytest
import sympy
from sympy.parsing.sympy_parser import parse_expr

import acsolve
from tests.cli.runner import CIRCUITS
from tests.cli.runner import acsolve as run

ODD_NAMES = """
in -- I : resistor -- mid -- lambda : capacitor -- gnd
mid -- N1 : 2 * section() -- out
block section(a, b)
    a -- R -- b
    b -- C -- gnd
end
"""


def numbers(expression: sympy.Expr, values: dict[str, float]) -> complex:
    """An expression at given values of its symbols."""
    return complex(expression.subs({item: values[item.name] for item in expression.free_symbols}))


def test_expression_and_coefficients_agree():
    """numerator over denominator, highest power first, is the expression."""
    (found,) = run("transfer", CIRCUITS / "five_sections.circuit", "--json").answers
    s = sympy.Symbol("s")
    whole = parse_expr(found["expression"])
    top, bottom = (
        sympy.Poly([parse_expr(item) for item in found[key]], s).as_expr()
        for key in ("numerator", "denominator")
    )
    values = {item.name: random.Random(4).random() + 0.5 for item in whole.free_symbols}
    assert numbers(top / bottom, values) == pytest.approx(numbers(whole, values), rel=1e-12)
    assert len(found["denominator"]) == found["order"] + 1


def test_names_the_parser_could_not_read_are_replaced(tmp_path):
    """Odd names become free symbols, and `symbols` leads back to them."""
    file = tmp_path / "odd.circuit"
    file.write_text(ODD_NAMES)
    (found,) = run("transfer", file, "--from", "in", "--to", "out", "--json").answers
    expression = parse_expr(found["expression"])
    names = {item.name for item in expression.free_symbols} - {"s"}
    original = {found["symbols"].get(name, name) for name in names}
    assert original == {"I", "lambda", "N1[1].R", "N1[2].R", "N1[1].C", "N1[2].C"}
    form = acsolve.read(file).path("in", "out").closed_form().as_sympy()
    s = sympy.Symbol("s")
    known = {item: index + 2 for index, item in enumerate(sorted(names))}
    one = expression.subs({sympy.Symbol(name): value for name, value in known.items()})
    other = form.subs({sympy.Symbol(n, positive=True): value for n, value in known.items()})
    assert sympy.simplify(one - other.subs(sympy.Symbol("s"), s)) == 0


def test_names_of_equations_are_safe(tmp_path):
    """Matrix entries and excitation read as expressions over safe names."""
    file = tmp_path / "odd.circuit"
    file.write_text(ODD_NAMES)
    (found,) = run("equations", file, "--from", "in", "--json").answers
    for text in [*found["excitation"], *(cell for row in found["matrix"] for cell in row)]:
        for item in parse_expr(text).free_symbols:
            assert item.name == "s" or item.name in found["symbols"]
    assert "E" in found["symbols"].values()


def test_equations_solve_to_the_transfer(tmp_path):
    """The matrix equation, solved by SymPy, gives the closed form of the transfer."""
    file = tmp_path / "plain.circuit"
    file.write_text("in -- R1 -- mid -- R2 -- out\nmid -- C1 -- gnd\nout -- C2 -- gnd\n")
    (found,) = run("equations", file, "--from", "in", "--json").answers
    matrix = sympy.Matrix([[parse_expr(cell) for cell in row] for row in found["matrix"]])
    right = sympy.Matrix([parse_expr(cell) for cell in found["excitation"]])
    solution = matrix.LUsolve(right)
    names = found["unknowns"]
    drive = sympy.Symbol(next(iter(found["symbols"])))
    ratio = solution[names.index("V(out)")] / drive
    (transfer,) = run("transfer", file, "--from", "in", "--to", "out", "--json").answers
    assert sympy.simplify(ratio - parse_expr(transfer["expression"])) == 0


@pytest.mark.parametrize(
    "name", ["level_float", "level_lowpass", "strain_antialias", "hum_notch", "horn_preamp"]
)
def test_numeric_strings_are_the_response(name):
    """The expression at s = j2πf is the response that a sweep gives."""
    file = CIRCUITS / f"{name}.circuit"
    found = run("transfer", file, "--json").answers[0]
    circuit = acsolve.read(file)
    question = next(item for item in circuit.questions if item.kind == "transfer")
    expression = parse_expr(found["expression"])
    for hertz in (1.0, 1234.5):
        value = complex(expression.subs(sympy.Symbol("s"), sympy.I * 2 * sympy.pi * hertz))
        swept = circuit.asked(question).response([hertz])[0]
        assert value == pytest.approx(swept, rel=1e-9)


def test_limits_and_standard_form_are_read():
    """Limits and named quantities are expressions, infinity is `oo`."""
    (found,) = run("transfer", CIRCUITS / "level_lowpass.circuit", "--symbolic", "--json").answers
    parts = {name: parse_expr(text) for name, text in found["standard_form"].items()}
    assert set(parts) == {"k", "w0", "q"}
    (crystal,) = run("impedance", CIRCUITS / "clock_crystal.circuit", "--json").answers
    assert parse_expr(crystal["at_zero"]) is sympy.oo


def test_steps_substitute_to_the_expanded_form():
    """A nested form, its steps put in, is the expanded form."""
    file = CIRCUITS / "level_lowpass.circuit"
    (nested,) = run("transfer", file, "--symbolic", "--nested", "--json").answers
    (expanded,) = run("transfer", file, "--symbolic", "--json").answers
    whole = parse_expr(nested["expression"])
    for name, text in reversed(nested["steps"]):
        whole = whole.subs(sympy.Symbol(name), parse_expr(text))
    assert sympy.simplify(whole - parse_expr(expanded["expression"])) == 0
