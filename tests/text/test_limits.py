"""Sizes are bounded, and the message names the limit before memory is spent."""

from __future__ import annotations

import pytest

from acsolve.errors import AcsolveError
from acsolve.text import limits, parse


def cells(depth: int) -> str:
    """Blocks inside blocks."""
    blocks = "".join(
        f"block b{level}(a, b)\n    a -- N : b{level - 1} -- b\nend\n" for level in range(1, depth)
    )
    return f"block b0(a, b)\n    a -- R -- b\nend\n{blocks}in -- N : b{depth - 1} -- out\n"


def copies(count: str) -> str:
    """Blocks whose copies multiply."""
    blocks = "".join(
        f"block b{level}(a, b)\n    a -- N : {count} * b{level - 1} -- b\nend\n"
        for level in range(1, 12)
    )
    return f"block b0(a, b)\n    a -- R -- b\nend\n{blocks}in -- N : {count} * b11 -- out\n"


#: A text beyond each limit.
BEYOND: dict[str, str] = {
    "limit.problems": "in -- R1 R2 -- out\n" * (limits.PROBLEMS + 1),
    "limit.statement": "n0" + " -- R1 -- n1" * limits.STATEMENT_TOKENS,
    "limit.brackets": f"in -- R1 = {'(' * 50}1{')' * 50} -- out",
    "limit.expression": f"in -- R1 = ({' + '.join(['1 ohm'] * 300)}) -- out",
    "limit.digits": f"in -- R1 = {'9' * 1001} -- out",
    "limit.exponent": "in -- R1 = 1e401 ohm -- out",
    "limit.name": f"in -- R{'x' * 200} -- out",
    "limit.range": "n[1] -- R[1] -- gnd\nR[1 .. 1000001] = 5 ohm",
    "limit.nesting": cells(34),
    "limit.parts": copies("1000"),
    "limit.expansion": "repeat i = 1 .. 3000\nrepeat k = 1 .. 3000\njoin n[i], n[k]\nend\nend",
    "limit.coupled": "".join(f"in -- L{k} -- out\n" for k in range(201))
    + f"couple {', '.join(f'L{k}' for k in range(201))} = 0",
}

#: More ways beyond the same limits.
MORE = [
    ("limit.parts", "let n = 1000\n" + copies("n")),
    ("limit.parts", "repeat k = 1 .. 1000001\nn[k] -- R[k] -- gnd\nend"),
    ("limit.range", "n[1, 1] -- R[1, 1] -- gnd\nR[1 .. 2000, 1 .. 2000] = 5 ohm"),
    ("limit.range", "block b(p, q)\nend\nlet n = 1000\nin -- N : (n*n*2) * b -- out"),
    ("limit.nesting", "repeat k = 1 .. 2\n" * 40),
    ("limit.digits", "in -- R1 = ((((9^60)^60)^60)^60) -- out"),
    ("limit.digits", "in -- R1 = ((((R2^400)^400)^400)^400) -- out\nout -- R2 = 5 ohm -- gnd"),
    ("limit.exponent", "in -- R1 = (9^(9^9)) -- out"),
    ("limit.exponent", "in -- R1 = (2^500) -- out"),
    ("limit.statement", f"in -- R1 = ({'(1' * limits.STATEMENT_TOKENS}"),
]


@pytest.mark.parametrize(
    ("code", "text"), [*BEYOND.items(), *MORE], ids=lambda item: item[:20].replace("\n", " ")
)
def test_beyond_a_limit(code, text):
    """A text beyond a limit is refused with that limit's code."""
    with pytest.raises(AcsolveError) as caught:
        parse(text)
    assert code in [item.code for item in caught.value.diagnostics]


@pytest.mark.parametrize("code", sorted(set(BEYOND) - {"limit.problems"}))
def test_the_message_names_the_limit(code):
    """The message of a limit holds a number."""
    with pytest.raises(AcsolveError) as caught:
        parse(BEYOND[code])
    message = next(item.message for item in caught.value.diagnostics if item.code == code)
    assert any(character.isdigit() for character in message)


def test_too_many_nodes(monkeypatch):
    """A circuit with more nodes than the limit is refused with the limit named."""
    monkeypatch.setattr(limits, "NODES", 3)
    assert parse("a -- R1 -- b -- R2 -- c").netlist.parts
    with pytest.raises(AcsolveError, match=r"limit\.nodes: this circuit has more than 3 nodes"):
        parse("a -- R1 -- b -- R2 -- c -- R3 -- d")


def test_problems_are_counted_beyond_the_cap():
    """Problems beyond the cap are counted in one closing diagnostic at the end of the text."""
    text = "in -- R1 R2 -- out\n" * 1000
    with pytest.raises(AcsolveError) as caught:
        parse(text)
    found = caught.value.diagnostics
    assert len(found) == limits.PROBLEMS + 1
    assert found[-1].code == "limit.problems"
    assert "800 more" in found[-1].message


def test_many_signs_are_no_danger():
    """Ten thousand signs in a row are read, or refused, without exhausting Python's stack."""
    assert len(parse(f"in -- R1 -- out\nR1 = {'- ' * 10_000} 1").netlist.parts) == 1
    with pytest.raises(AcsolveError):
        parse(f"in -- R1 -- out\nR1 = {'-' * 10_000} 1")


def test_a_long_tapered_ladder():
    """A thousand values, each made of the one before, are read."""
    text = "in -- R[1] = 1 ohm -- n[1]\nrepeat k = 2 .. 1000\nn[k-1] -- R[k] = (R[k-1]*1.1) -- n[k]\nend"
    assert len(parse(text).netlist.parts) == 1000
