"""Touchstone files: written and read back, the standard's layouts, errors with their places."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from hypothesis.extra import numpy as arrays

from acsolve import AcsolveError, PortData, parse_touchstone, read_touchstone, touchstone_text

_FINITE = st.floats(allow_nan=False, allow_infinity=False)


@st.composite
def port_data(draw, name="s"):
    """Any finite data of one to six ports."""
    ports, points = draw(st.integers(1, 6)), draw(st.integers(1, 4))
    if name in ("h", "g"):
        ports = 2
    hertz = sorted(
        draw(
            st.lists(
                st.floats(0, 1e15, allow_subnormal=False),
                min_size=points,
                max_size=points,
                unique=True,
            )
        )
    )
    shape = (points, ports, ports)
    real, imag = (draw(arrays.arrays(float, shape, elements=_FINITE)) for _ in range(2))
    reference = draw(st.lists(st.floats(1e-3, 1e6), min_size=ports, max_size=ports))
    return PortData(hertz, real + 1j * imag, name, reference)


def same(one: PortData, other: PortData) -> None:
    """Equality of data, bit for bit up to the sign of zero."""
    assert one.name == other.name
    assert (one.hertz == other.hertz).all()
    assert (one.reference == other.reference).all()
    assert (one.matrix == other.matrix).all()


@settings(derandomize=True, deadline=None)
@given(data=st.sampled_from("szyhg").flatmap(port_data))
def test_version_two_reads_back_exactly(data):
    """Real and imaginary parts, frequencies and every reference are the same doubles."""
    text = touchstone_text(data, version="2.0")
    same(parse_touchstone(text, name="any.ts"), data)


@settings(derandomize=True, deadline=None)
@given(data=port_data())
def test_version_one_reads_back_exactly(data):
    """So are s parameters of version 1.1, whose ports share one reference."""
    equal = PortData(data.hertz, data.matrix, "s", np.full(data.ports, data.reference[0]))
    text = touchstone_text(equal)
    assert text.startswith("# Hz S RI R ")
    same(parse_touchstone(text, name=f"any.s{equal.ports}p"), equal)


@pytest.mark.parametrize("form", ["MA", "DB"])
@pytest.mark.parametrize("name", ["s", "z", "y", "h", "g"])
@pytest.mark.parametrize("unit", ["Hz", "kHz", "MHz", "GHz"])
@pytest.mark.parametrize("version", ["1.1", "2.0"])
def test_other_ways_to_write_agree_to_rounding(form, name, unit, version):
    """Magnitudes, decibels, units and normalised parameters come back within round-off."""
    random = np.random.default_rng(3)
    matrix = random.normal(size=(3, 2, 2)) + 1j * random.normal(size=(3, 2, 2))
    data = PortData([1e5, 3e5, 7e9], matrix, name, [75.0, 75.0])
    text = touchstone_text(data, version=version, form=form, unit=unit, comments=["one", "two"])
    back = parse_touchstone(text, name="x.s2p")
    np.testing.assert_allclose(back.matrix, data.matrix, rtol=1e-13)
    np.testing.assert_allclose(back.hertz, data.hertz, rtol=1e-15)
    assert back.name == name


def test_two_ports_stand_by_columns_in_version_one():
    """11 21 12 22: the one place where the standard does not go by rows."""
    text = "! a comment\n# MHz S RI R 75 ! and another\n\n2 1 0 2 0 3 0 4 0\n"
    found = parse_touchstone(text, name="x.S2P")
    assert found.matrix.tolist() == [[[1, 3], [2, 4]]]
    assert found.hertz.tolist() == [2e6]
    assert found.reference.tolist() == [75, 75]


def test_the_option_line_has_defaults():
    """# alone means GHz, s, magnitude and angle, 50 ohm; its words come in any order."""
    found = parse_touchstone("#\n1 2 90\n", name="x.s1p")
    assert found.name == "s"
    assert found.hertz[0] == 1e9
    assert found.reference[0] == 50
    assert abs(found.matrix[0, 0, 0] - 2j) < 1e-15
    turned = parse_touchstone("# r 50 ri y khz\n1 2 90\n", name="x.s1p")
    assert turned.name == "y"
    assert turned.hertz[0] == 1e3
    assert turned.matrix[0, 0, 0] == (2 + 90j) / 50


def test_normalised_before_version_two():
    """Version 1.1 divides impedances by the reference; hybrid sets element by element."""
    body = "1 1 0 2 0 3 0 4 0\n"
    for name, factors in (
        ("Z", [[10, 10], [10, 10]]),
        ("Y", [[0.1, 0.1], [0.1, 0.1]]),
        ("H", [[10, 1], [1, 0.1]]),
        ("G", [[0.1, 1], [1, 10]]),
    ):
        found = parse_touchstone(f"# Hz {name} RI R 10\n{body}", name="x.s2p")
        assert (found.matrix == np.array([[1, 3], [2, 4]]) * factors).all()


def test_larger_matrices_are_wrapped_by_rows():
    """Four pairs a line, each row on a new line; lines may be cut elsewhere, too."""
    data = PortData([1.0], np.arange(25).reshape(1, 5, 5), "s", np.full(5, 50.0))
    text = touchstone_text(data)
    assert [len(line.split()) for line in text.splitlines()[1:]] == [9, 2, 8, 2, 8, 2, 8, 2, 8, 2]
    same(parse_touchstone(text, name="x.s5p"), data)
    three = "# Hz S RI R 50\n1 1 0 2 0 3 0\n4 0 5 0 6 0\n7 0 8 0 9 0\n"
    found = parse_touchstone(three, name="x.s3p")
    assert found.matrix[0].real.tolist() == [[1, 2, 3], [4, 5, 6], [7, 8, 9]]


@pytest.mark.parametrize("shape", ["Lower", "Upper"])
def test_triangles_are_completed(shape):
    """Version 2.0 may leave out what a symmetric matrix repeats."""
    rows = (
        "1 11 0\n21 0 22 0\n31 0 32 0 33 0"
        if shape == "Lower"
        else ("1 11 0 21 0 31 0\n22 0 32 0\n33 0")
    )
    text = f"""[Version] 2.0
# Hz S RI
[Number of Ports] 3
[Number of Frequencies] 1
[Reference] 50
 75 0.01
[Matrix Format] {shape}
[Begin Information]
[Anything] may stand here
[End Information]
[Network Data]
{rows}
[End]
"""
    found = parse_touchstone(text, name="x.ts")
    assert found.matrix[0].real.tolist() == [[11, 21, 31], [21, 22, 32], [31, 32, 33]]
    assert found.reference.tolist() == [50, 75, 0.01]


def test_order_and_noise_of_version_two():
    """The order of two-ports is stated; noise data have a keyword, and are left out."""
    for order, expected in (("12_21", [[1, 2], [3, 4]]), ("21_12", [[1, 3], [2, 4]])):
        text = f"""[Version] 2.0
# Hz Z RI R 10
[Number of Ports] 2
[Two-Port Data Order] {order}
[Number of Frequencies] 1
[Number of Noise Frequencies] 1
[Network Data]
1 1 0 2 0 3 0 4 0
[Noise Data]
1 2 3 4 5
[End]
"""
        found = parse_touchstone(text, name="x.s2p")
        assert found.matrix[0].real.tolist() == expected
        assert found.remarks == ("noise data at 1 frequencies are not used",)


def test_noise_behind_a_falling_frequency():
    """In version 1.1 noise data begin where the frequency falls."""
    text = "# Hz S RI R 50\n1 0 0 0 0 0 0 0 0\n2 0 0 0 0 0 0 0 0\n1 1 .1 90 .5\n3 1 .1 90 .5\n"
    found = parse_touchstone(text, name="x.s2p")
    assert len(found.hertz) == 2
    assert found.remarks == ("noise data at 2 frequencies are not used",)


_HEAD = "# Hz S RI R 50\n"
_TWO = "[Version] 2.0\n# Hz S RI\n[Number of Ports] 1\n[Number of Frequencies] 1\n"


@pytest.mark.parametrize(
    ("text", "code", "place"),
    [
        ("", "touchstone.record", None),
        ("! only remarks\n", "touchstone.record", None),
        ("1 2 3\n", "touchstone.option", (1, 1)),
        ("# Hz Q\n1 2 3\n", "touchstone.option", (1, 6)),
        ("# Hz kHz\n1 2 3\n", "touchstone.option", (1, 6)),
        ("# Hz R\n1 2 3\n", "touchstone.option", (1, 6)),
        ("# Hz R -5\n1 2 3\n", "touchstone.option", (1, 8)),
        (_HEAD, "touchstone.record", None),
        (_HEAD + "1 2\n", "touchstone.record", (2, 1)),
        (_HEAD + "1 2 3 4\n", "touchstone.record", (2, 7)),
        (_HEAD + "1 nan 3\n", "touchstone.number", (2, 3)),
        (_HEAD + "1 1_0 3\n", "touchstone.number", (2, 3)),
        (_HEAD + "1 1e999 3\n", "touchstone.number", (2, 3)),
        ("# Hz S DB\n1 1e9 3\n", "touchstone.number", (2, 3)),
        (_HEAD + "2 0 0\n2 0 0\n", "touchstone.order", (3, 1)),
        (_HEAD + "-2 0 0\n", "touchstone.order", (2, 1)),
        (_HEAD + "[End]\n", "touchstone.keyword", (2, 1)),
        ("[Version] 3.1\n", "touchstone.keyword", (1, 11)),
        (_TWO + "[Network Data]\n1 2 3\n", "touchstone.keyword", (6, 1)),
        (_TWO + "[Network Data]\n1 2 3\n2 3 4\n[End]\n", "touchstone.record", (4, 1)),
        (_TWO + "[Reference] 1 2\n[Network Data]\n1 2 3\n[End]\n", "touchstone.keyword", (5, 1)),
        (
            _TWO + "[Mixed-Mode Order] D1,2\n[Network Data]\n1 2 3\n[End]",
            "touchstone.keyword",
            (5, 1),
        ),
        (_TWO + "[Colour] red\n", "touchstone.keyword", (5, 1)),
        (_TWO + "[End]\n", "touchstone.keyword", (5, 1)),
        (_TWO.replace("Ports] 1", "Ports] 0"), "touchstone.keyword", (3, 19)),
    ],
)
def test_errors_say_where(text, code, place):
    """Each problem has its code, and the line and column where it stands."""
    with pytest.raises(AcsolveError) as caught:
        parse_touchstone(text, name="x.s1p")
    found = caught.value.diagnostics[0]
    assert found.code == code
    assert found.hint
    assert (None if found.span is None else (found.span.line, found.span.column)) == place


def test_a_name_without_ports_is_told():
    """Before version 2.0 only the ending says how many ports there are."""
    with pytest.raises(AcsolveError) as caught:
        parse_touchstone(_HEAD + "1 2 3\n", name="x.txt")
    assert caught.value.code == "touchstone.ports"
    assert parse_touchstone(_HEAD + "1 2 3\n", name="x.txt", ports=1).ports == 1


def test_files(tmp_path):
    """Files are read by their names; what is missing or no file is an error."""
    data = PortData([1.0, 2.0], np.ones((2, 2, 2)), "s", [50, 50])
    path = tmp_path / "a.s2p"
    path.write_text(touchstone_text(data), encoding="utf-8")
    same(read_touchstone(path), data)
    for name, code in (("b.s2p", "file.missing"), (".", "file.unreadable")):
        with pytest.raises(AcsolveError) as caught:
            read_touchstone(tmp_path / name)
        assert caught.value.code == code


def test_what_a_file_cannot_hold_is_refused():
    """No chain parameters, nothing infinite, no zero in decibels, one reference in 1.1."""
    ones = np.ones((1, 2, 2))
    for data, options, code in (
        (PortData([1.0], ones, "abcd", [50, 50]), {}, "ports.no-set"),
        (PortData([1.0], ones * np.inf, "z", [50, 50]), {}, "ports.no-set"),
        (PortData([1.0], ones * 0, "s", [50, 50]), {"form": "DB"}, "ports.no-set"),
        (PortData([1.0], ones, "s", [50, 75]), {"version": "1.1"}, "ports.reference"),
        (PortData([1.0], ones, "s", [50, 50]), {"unit": "THz"}, "option.value"),
    ):
        with pytest.raises(AcsolveError) as caught:
            touchstone_text(data, **options)
        assert caught.value.code == code


_PIECES = st.sampled_from(
    [
        *("# ", "Hz", "GHz", "S", "Z", "H", "RI", "MA", "DB", "R", "50", "!", "\n", "\n", "\n"),
        *("1", "2", "0.5", "-3", "1e9", "1e999", ".", "nan", "x", "[", "]", "[Version]", "2.0"),
        *("[Number of Ports]", "[Network Data]", "[End]", "[Reference]", "[Two-Port Data Order]"),
        *("12_21", "[Number of Frequencies]", "[Matrix Format]", "Lower", "[Begin Information]"),
        *("[End Information]", "[Noise Data]", "\t", "\x00", "\u2212", "[Number", "of", "Ports]"),
    ]
)


@settings(derandomize=True, deadline=None, max_examples=600)
@given(
    pieces=st.lists(_PIECES, max_size=40),
    start=st.sampled_from(["", _HEAD, "[Version] 2.0\n", _TWO, _TWO + "[Network Data]\n"]),
    ports=st.sampled_from(["1", "2", "3"]),
)
def test_no_text_makes_a_traceback(pieces, start, ports):
    """Whatever stands in a file, the answer is data or an error of the family."""
    try:
        found = parse_touchstone(start + " ".join(pieces), name=f"x.s{ports}p")
    except AcsolveError as error:
        found = error
    assert str(found) if isinstance(found, AcsolveError) else np.isfinite(found.matrix).all()


@settings(derandomize=True, deadline=None, max_examples=300)
@given(text=st.text(max_size=200))
def test_no_free_text_makes_a_traceback(text):
    """The same of texts of any signs."""
    with pytest.raises(AcsolveError):
        parse_touchstone(text, name="x.s2p")
