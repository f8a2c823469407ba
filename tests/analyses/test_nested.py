"""Nested forms, budgets, and forms evaluated where doubles do not reach."""

from __future__ import annotations

import pickle

import numpy as np
import pytest

import acsolve
from acsolve.errors import EquationError


def ladder(sections: int, *, values: bool = False) -> acsolve.Circuit:
    """An RC ladder from n[0] to n[sections]."""
    draft = acsolve.Draft("ladder")
    for k in range(1, sections + 1):
        draft = draft.chain(f"n[{k - 1}]", f"R[{k}]", f"n[{k}]").chain(f"n[{k}]", f"C[{k}]", "gnd")
        if values:
            draft = draft.values({f"R[{k}]": 100 + k, f"C[{k}]": f"{k} nF"})
    return draft.circuit()


def mesh(side: int) -> acsolve.Circuit:
    """A square mesh of resistors with a capacitor to ground at every node but the driven one."""
    draft = acsolve.Draft("mesh")
    for i in range(side):
        for j in range(side):
            here = f"n[{i}, {j}]"
            if j + 1 < side:
                draft = draft.chain(here, f"Ra[{i}, {j}]", f"n[{i}, {j + 1}]")
            if i + 1 < side:
                draft = draft.chain(here, f"Rb[{i}, {j}]", f"n[{i + 1}, {j}]")
            if (i, j) != (0, 0):
                draft = draft.chain(here, f"C[{i}, {j}]", "gnd")
    return draft.circuit()


def test_steps_grow_with_the_ladder() -> None:
    """A ladder twice as long has about twice as many steps, four for each section."""
    counts = [len(ladder(n).path("n[0]", f"n[{n}]").nested_form().steps) for n in (10, 20, 40)]
    assert counts == [39, 79, 159]


def test_a_ladder_reads_as_its_continued_fraction() -> None:
    """The first steps of a ladder are the impedances seen from its far end inwards."""
    texts = dict(ladder(3).path("n[0]", "n[3]").nested_form().step_texts())
    assert texts["Z1"] == "R[3] + 1/(s*C[3])"
    assert texts["Y1"] == "s*C[2] + 1/Z1"
    assert texts["Z2"] == "R[2] + 1/Y1"


@pytest.mark.parametrize(
    ("circuit", "target"), [(ladder(40), "n[40]"), (mesh(8), "n[7, 7]")], ids=["ladder", "mesh"]
)
def test_past_the_budget_the_nested_form_answers(circuit: acsolve.Circuit, target: str) -> None:
    """A network too large to multiply out is refused, and its nested form equals the sweep."""
    path = circuit.path("n[0]" if target == "n[40]" else "n[0, 0]", target)
    with pytest.raises(EquationError) as refused:
        path.closed_form()
    assert refused.value.code == "equations.budget"
    form = path.transfer().form
    assert isinstance(form, acsolve.NestedForm)
    values = {name: 1.5 + 0.25 * (k % 7) for k, name in enumerate(form.symbols)}
    valued = circuit.with_values(values)
    asked = valued.path(*(path.ask.source[0], path.ask.target[0]))
    hertz = np.logspace(-3, -1, 9)
    here = asked.nested_form().response(hertz)
    assert np.allclose(here, asked.response(hertz), rtol=1e-10, atol=0)


def test_the_count_of_terms_is_exact() -> None:
    """A ladder of n sections has F(2n+1) terms, and the budget draws the line exactly there."""
    path = ladder(6).path("n[0]", "n[6]")
    assert len(path.closed_form().denominator) == 233
    assert path.closed_form(budget=100_000).checked is not None


def test_nested_and_expanded_agree_exactly() -> None:
    """Steps substituted into the result give the expanded form, by SymPy's algebra."""
    import sympy

    path = ladder(3).path("n[0]", "n[3]")
    steps, result = path.nested_form().as_sympy()
    for symbol, expression in reversed(steps):
        result = result.subs(symbol, expression)
    assert sympy.simplify(result - path.closed_form().as_sympy()) == 0


def test_nested_at_zero_hertz_is_the_limit() -> None:
    """A step may be singular at 0 Hz; the answer is its limit all the same."""
    path = ladder(4, values=True).path("n[0]", "n[4]")
    assert path.nested_form().response(0.0) == pytest.approx(1.0)


def test_closed_form_beyond_the_range_of_doubles() -> None:
    """A closed form of order 60 evaluates where its polynomials overflow a double."""
    path = ladder(60, values=True).path("n[0]", "n[60]")
    hertz = np.array([0.0, 1e3, 1e6])
    assert np.allclose(path.closed_form().response(hertz), path.response(hertz), rtol=1e-9, atol=0)


@pytest.mark.parametrize("kind", ["closed_form", "nested_form", "transfer", "cutoffs"])
def test_answers_pickle(kind: str) -> None:
    """An answer survives the way to another process."""
    answer = getattr(ladder(2, values=True).path("n[0]", "n[2]"), kind)()
    again = pickle.loads(pickle.dumps(answer))  # noqa: S301 - our own bytes
    assert type(again) is type(answer)
    assert repr(again) == repr(answer)
