"""What the texts of a reading say, worked out again by SymPy and compared exactly."""

from __future__ import annotations

import ast
from collections.abc import Mapping
from random import Random
from typing import Any

import sympy
from sympy.parsing.sympy_parser import parse_expr

from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.reading import FormName, reading

S, W = sympy.Symbol("s"), sympy.Symbol("w", positive=True)
DIGITS = 40


def same(first: Any, second: Any) -> bool:
    """Whether two rational functions of symbols and their roots are equal at random points.

    Exactly: each symbol, and pi, is the square of a random rational, so that its root is rational.
    Different functions agree so with a probability below degree/2**10 a point (J. T. Schwartz,
    J. ACM 27 (1980), doi:10.1145/322217.322225).
    """
    return all(_zero_at(first - second, seed) for seed in range(3))


def _zero_at(expression: Any, seed: int) -> bool:
    random = Random(seed)
    free = [*sorted(expression.free_symbols, key=str), sympy.pi]
    point = {
        item: sympy.Rational(random.randrange(1, 1 << 10), random.randrange(1, 1 << 5)) ** 2
        for item in free
    }
    found = expression.xreplace(point)
    return found == 0 or sympy.expand(sympy.fraction(sympy.together(found))[0]) == 0


def lines(form: ClosedForm, name: FormName, *, safe: bool = True) -> dict[str, str]:
    """A reading as label -> text."""
    return {line.label: line.text for line in reading(form, name, safe=safe)}


class Reader:
    """Reads texts about one closed form; the human spelling with a sign for parallel parts."""

    def __init__(self, form: ClosedForm, *, safe: bool = True) -> None:
        spelled = form.spelled(safe=True).names
        known = {spelled[name]: sympy.Symbol(spelled[name], positive=True) for name in form.symbols}
        self.names: dict[str, Any] = {"s": S, "w": W} | known
        self._safe = safe

    def __call__(self, text: str, more: Mapping[str, Any] | None = None) -> Any:
        """The text as an expression, further names standing for expressions."""
        names = self.names | dict(more or {})
        if self._safe:
            return parse_expr(text, local_dict=names)
        tree = ast.parse(text.replace("^", "**").replace("||", "|"), mode="eval")
        names |= {"parallel": lambda a, b: a * b / (a + b), "whole": sympy.Integer}
        names |= {name: getattr(sympy, name) for name in ("sqrt", "pi", "atan", "atan2", "Abs")}
        code = compile(ast.fix_missing_locations(_Parallel().visit(tree)), "text", "eval")
        return eval(code, {"abs": sympy.Abs}, names)  # noqa: S307 - our own text


class _Parallel(ast.NodeTransformer):
    """`a | b` becomes parallel(a, b), a number an exact one."""

    def visit_BinOp(self, node: ast.BinOp) -> ast.AST:
        self.generic_visit(node)
        if not isinstance(node.op, ast.BitOr):
            return node
        return ast.Call(ast.Name("parallel", ast.Load()), [node.left, node.right], [])

    def visit_Constant(self, node: ast.Constant) -> ast.AST:
        return ast.Call(ast.Name("whole", ast.Load()), [node], [])


def check(form: ClosedForm, *, safe: bool = True) -> None:
    """Every reading says exactly what the closed form says."""
    whole, read = form.as_sympy(), Reader(form, safe=safe)
    for name in ("collected", "unit"):
        text = lines(form, name, safe=safe).get("H")
        assert text is None or same(read(text), whole), (name, text)
    check_factored(form, whole, read, safe=safe)
    check_standard(form, whole, read, safe=safe)
    check_asymptotes(form, whole, read, safe=safe)
    check_real(form, whole, read, safe=safe)
    check_delay(form, whole, read, safe=safe)


def check_factored(form: ClosedForm, whole: Any, read: Reader, *, safe: bool) -> None:
    """The product of the factors, time constants put in, is the closed form."""
    found = lines(form, "factored", safe=safe)
    if found:
        text = found.pop("H")
        constants = {label: read(value) for label, value in found.items()}
        assert same(read(text, constants), whole), (text, found)


def check_standard(form: ClosedForm, whole: Any, read: Reader, *, safe: bool) -> None:
    """K, w0, Q and the time constants, put into the stated shape, give the closed form."""
    found = lines(form, "standard", safe=safe)
    if not found:
        return
    label = next(iter(found))
    text = found.pop(label)
    parts = {name: read(value) for name, value in found.items() if value != "oo"}
    symbols: dict[str, Any] = {name: sympy.Symbol(name) for name in parts}
    shape = read(text, symbols)
    for quality in [name for name in parts if name.startswith("Q")]:
        corner = "w_z" if "w_z" in parts and quality.startswith("Q_z") else "w0"
        rate = _rate(whole, quality)
        agree(parts[quality], parts[corner], rate)
        shape = shape.subs(symbols[quality], rate / symbols[corner])
    shape = sympy.together(shape).subs({symbols[name]: parts[name] for name in parts})
    expected = whole
    if label != "H":
        below = sympy.fraction(whole)[1]
        expected = below / below.subs(S, 0)
    assert same(shape, expected), (text, found)


def _rate(whole: Any, quality: str) -> Any:
    """Q·w0 of numerator or denominator: the lowest coefficient over the next."""
    part = sympy.fraction(whole)[0 if quality.startswith("Q_z") else 1]
    coefficients = sympy.Poly(sympy.expand(part), S).all_coeffs()
    return coefficients[-1] / coefficients[-2]


def agree(quality: Any, corner: Any, rate: Any) -> None:
    """Q·w0 is a rational function: its square exactly, its sign where w0 is real."""
    assert same((quality * corner) ** 2, rate**2), (quality, corner, rate)
    for seed in range(20):
        point = numbers(quality, corner, rate, seed=seed)
        if corner.subs(point).evalf(DIGITS).is_real:
            assert (quality * corner / rate).subs(point).evalf(DIGITS) > 0, (quality, corner)
            return


def numbers(*expressions: Any, seed: int = 3) -> dict[Any, Any]:
    """A random rational for every symbol but s, the same on every run."""
    random = Random(seed)
    free = sorted(set().union(*(item.free_symbols for item in expressions)) - {S}, key=str)
    return {
        item: sympy.Rational(random.randrange(20, 90), random.randrange(20, 90)) for item in free
    }


def check_asymptotes(form: ClosedForm, whole: Any, read: Reader, *, safe: bool) -> None:
    """The closed form over its asymptote tends to one at either end."""
    top, bottom = (sympy.Poly(sympy.expand(part), S) for part in sympy.fraction(whole))
    found = list(lines(form, "asymptotes", safe=safe).values())
    for text, place in zip(found, (-1, 0), strict=False):
        terms = (part.terms()[place] for part in (top, bottom))
        (((a,), upper), ((b,), lower)) = terms
        assert same(read(text), upper * S**a / (lower * S**b)), text


def check_real(form: ClosedForm, whole: Any, read: Reader, *, safe: bool) -> None:
    """The gain's square is |H(jω)|² exactly; gain·exp(jφ) is H(jω) to many digits."""
    found = lines(form, "real", safe=safe)
    if not found:
        return
    gain, phase = (read(text) for text in found.values())
    square = whole.subs(S, sympy.I * W) * whole.subs(S, -sympy.I * W)
    plain = sympy.sympify(gain**2).replace(sympy.Abs, lambda inside: sympy.sqrt(inside**2))
    assert same(plain, square), found
    point = numbers(whole, gain) | {W: sympy.Rational(17, 23)}
    here = (gain * sympy.exp(sympy.I * phase)).subs(point).evalf(DIGITS)
    there = whole.subs(S, sympy.I * W).subs(point).evalf(DIGITS)
    assert abs(here - there) <= abs(there) * sympy.Float(10) ** (8 - DIGITS), found


def check_delay(form: ClosedForm, whole: Any, read: Reader, *, safe: bool) -> None:
    """The group delay is -Re(H'/H) on the axis; the phase delay -φ/ω for the phase shown."""
    found = lines(form, "delay", safe=safe)
    if not found:
        return
    texts = list(found.values())
    phase = read(lines(form, "real", safe=safe)["phase(w)"])
    point = numbers(phase) | {W: sympy.Rational(17, 23)}
    error = (read(texts[0]) + phase / W).subs(point).evalf(DIGITS)
    assert abs(error) < sympy.Float(10) ** (8 - DIGITS), texts
    if len(texts) == 1:
        return
    top, bottom = sympy.fraction(whole)
    slope = sympy.diff(top, S) / top - sympy.diff(bottom, S) / bottom
    both = slope.subs(S, sympy.I * W) + slope.subs(S, -sympy.I * W)
    assert same(read(texts[1]), -both / 2), texts
