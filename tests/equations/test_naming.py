"""Safe names: readable by SymPy's parser, distinct, and the same on every run."""

from __future__ import annotations

from hypothesis import given, settings
from hypothesis import strategies as st
from sympy import Symbol
from sympy.parsing.sympy_parser import parse_expr

from acsolve.equations.naming import is_safe, safe_names

names = st.one_of(
    st.from_regex(r"[A-Za-z][A-Za-z0-9_]{0,4}(\[[0-9]\])?(\.[A-Z])?", fullmatch=True),
    st.sampled_from(
        ["I", "E", "S", "N", "lambda", "pi", "beta", "gamma", "R1", "k(L1, L2)", "Q", "oo"]
    ),
)


@settings(max_examples=60)
@given(st.sets(names, max_size=8))
def test_distinct_names_stay_distinct(given_names):
    """Every name gets one safe name, different names different ones; safe names keep theirs."""
    chosen = safe_names(given_names)
    assert set(chosen) == given_names
    assert len(set(chosen.values())) == len(given_names)
    for name, safe in chosen.items():
        assert is_safe(safe)
        if is_safe(name):
            assert safe == name
    assert safe_names(sorted(given_names, reverse=True)) == chosen


@settings(max_examples=60)
@given(names)
def test_the_parser_makes_a_symbol_of_a_safe_name(name):
    """Parsed alone, a safe name is a symbol of that name and nothing else."""
    safe = safe_names([name])[name]
    assert parse_expr(safe) == Symbol(safe)
