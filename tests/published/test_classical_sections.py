"""Classical active sections: their closed forms are the published formulas, by exact algebra.

Each formula is written here from the source that its section's file names, over the parts'
symbols; nothing of the program is used to make it.
"""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path as File
from typing import Any

import pytest
import sympy
from sympy.parsing.sympy_parser import parse_expr

import acsolve
from acsolve.analyses.closed_form import ClosedForm
from acsolve.analyses.shape import standard_form

FOLDER = File(__file__).parent / "sections"
NAMES = "R1 R2 R3 R4 R5 R6 Ra Rb Rf Rg Rs Rd Rx C1 C2 C4 Cd Cf Cx ft"
SYMBOLS = {name: sympy.Symbol(name, positive=True) for name in NAMES.split()}
(R1, R2, R3, R4, R5, R6, Ra, Rb, Rf, Rg, Rs, Rd, Rx, C1, C2, C4, Cd, Cf, Cx, ft) = SYMBOLS.values()
s = sympy.Symbol("s")
sqrt = sympy.sqrt


@dataclass(frozen=True, slots=True)
class Published:
    """What a source says of a section: which question of its file, and the formulas.

    `shape` multiplies `k` and stands over the second-order (or first-order) denominator of
    `w0` and `q`; without a shape `k` is the whole answer.
    """

    section: str
    question: int
    k: Any
    shape: str = ""
    w0: Any = None
    q: Any = None

    @property
    def whole(self) -> Any:
        """The transfer or impedance as one expression."""
        if not self.shape:
            return self.k
        if self.q is None:
            return self.k * {"all-pass": 1 - s / self.w0}[self.shape] / (1 + s / self.w0)
        middle, square = s / (self.q * self.w0), (s / self.w0) ** 2
        tops = {
            "low-pass": 1,
            "high-pass": square,
            "band-pass": middle,
            "notch": 1 + square,
            "all-pass": 1 - middle + square,
        }
        return self.k * tops[self.shape] / (1 + middle + square)


def follower(w0: Any, loss: Any, shape: str, section: str, gain: Any = 1) -> Published:
    """A section with one amplifier: `loss` is 1/(Q·w0)."""
    return Published(section, 0, gain, shape, w0, 1 / (w0 * loss))


RC = 1 / sqrt(R1 * R2 * C1 * C2)
GAIN = 1 + Rb / Ra
LOOP = sqrt(R6 / (R5 * R2 * R3 * C1 * C2))
STATE = sqrt(R6 / (R5 * R1 * R2 * C1 * C2))
STATE_Q = (1 + R4 / R3) / (1 + R6 / R5) * sqrt(R6 * R1 * C1 / (R5 * R2 * C2))
PHOTO = sqrt(2 * sympy.pi * ft / (Rf * (Cd + Cf)))
PHOTO_Q = 1 / (PHOTO * (Rf * Cf + 1 / (2 * sympy.pi * ft)))
DELAYED = sqrt((1 / R1 + 1 / R2) / (4 * R1)) / Cx

PUBLISHED = [
    # R. P. Sallen and E. L. Key, IRE Trans. Circuit Theory CT-2 (1955), 74-85; formulas as
    # textbooks give them, from memory.
    follower(RC, (R1 + R2) * C2, "low-pass", "low-pass-unity"),
    follower(RC, (R1 + R2) * C2 + (1 - GAIN) * R1 * C1, "low-pass", "low-pass-gain", GAIN),
    follower(RC, R1 * (C1 + C2), "high-pass", "high-pass-unity"),
    follower(RC, R1 * (C1 + C2) + (1 - GAIN) * R2 * C2, "high-pass", "high-pass-gain", GAIN),
    # Common practice (multiple feedback, infinite-gain amplifier).
    Published(
        "band-pass-multiple-feedback",
        0,
        -(R3 / R1) * C2 / (C1 + C2),
        "band-pass",
        sqrt((1 / R1 + 1 / R2) / (R3 * C1 * C2)),
        sqrt(R3 * (1 / R1 + 1 / R2) * C1 * C2) / (C1 + C2),
    ),
    # J. Tow, Proc. IEEE 56 (1968), 1137-1139; formulas from memory.
    Published("two-integrator-loop", 0, -R1 / R4, "band-pass", LOOP, LOOP * R1 * C1),
    Published("two-integrator-loop", 1, -R3 / R4, "low-pass", LOOP, LOOP * R1 * C1),
    # W. J. Kerwin, L. P. Huelsman and R. W. Newcomb, IEEE J. Solid-State Circuits SC-2
    # (1967), 87-92; formulas from memory.
    Published(
        "state-variable", 0, (1 + R6 / R5) / (1 + R3 / R4), "high-pass", STATE, STATE_Q
    ),
    Published("state-variable", 1, -R4 / R3, "band-pass", STATE, STATE_Q),
    Published("state-variable", 2, (1 + R5 / R6) / (1 + R3 / R4), "low-pass", STATE, STATE_Q),
    # A. Antoniou, Proc. IEE 116 (1969), 1838-1850: L = C4·R1·R3·R5/R2.
    Published("impedance-converter", 0, s * C4 * R1 * R3 * R5 / R2),
    # Common practice.
    Published("all-pass-first", 0, 1, "all-pass", 1 / (R3 * C1)),
    # Common practice: 1 less twice a band-pass, its centre gain set by R3 = 4·R1.
    Published(
        "all-pass-second", 0, -1, "all-pass", DELAYED, sqrt(1 + R1 / R2)
    ),
    # Common practice.
    Published("instrumentation-amplifier", 0, (1 + 2 * Rf / Rg) * Rd / Rs),
    # Common practice: a noise-gain pole meets the unity-gain frequency ft.
    Published("photodiode-stage", 0, -Rf, "low-pass", PHOTO, PHOTO_Q),
    # Common practice; the branch ratio is that of M. Wien, Annalen der Physik 280 (1891).
    Published(
        "wien-network",
        0,
        1 / (1 + R1 / R2 + C2 / C1),
        "band-pass",
        RC,
        sqrt(R1 * R2 * C1 * C2) / (R1 * C1 + R2 * C2 + R2 * C1),
    ),
    # Common practice: the twin-T's Q of 1/4 grows as its foot follows Rb/(Ra + Rb) of the output.
    Published(
        "twin-t-bootstrapped",
        0,
        1,
        "notch",
        1 / (Rx * Cx),
        1 / (4 * (1 - Rb / (Ra + Rb))),
    ),
]  # fmt: skip


def closed_form(section: str, question: int) -> ClosedForm:
    """The closed form of one question of a section's file."""
    circuit = acsolve.read(FOLDER / f"{section}.circuit")
    asked = circuit.questions[question]
    if asked.kind == "impedance":
        return circuit.looking_into(asked.target).closed_form()
    return circuit.path(asked.source, asked.target, quantity=asked.quantity).closed_form()


def equal(first: Any, second: Any) -> bool:
    """Whether cross-multiplied numerators expand to the same polynomial."""
    (a, b), (c, d) = (sympy.fraction(sympy.together(item)) for item in (first, second))
    return sympy.expand(a * d - c * b) == 0


def cases() -> list[Any]:
    """The published sections, each with a name."""
    return [pytest.param(item, id=f"{item.section}-{item.question}") for item in PUBLISHED]


@pytest.mark.parametrize("published", cases())
def test_closed_form_is_the_published_formula(published):
    """The closed form, cross-multiplied with the published formula, leaves zero."""
    found = closed_form(published.section, published.question).as_sympy()
    assert equal(found, published.whole)


@pytest.mark.parametrize("published", [item for item in cases() if item.values[0].shape])
def test_standard_form_is_the_published_one(published):
    """Shape, K, w0 and Q are the published ones; where they hold roots, their squares are."""
    found = standard_form(closed_form(published.section, published.question))
    parts = {name: parse_expr(text, local_dict=SYMBOLS) for name, text in found.parts.items()}
    assert found.shape == published.shape
    assert equal(parts["k"], published.k)
    assert equal(parts["w0"] ** 2, published.w0**2)
    if published.q is not None:
        assert equal(parts["q"] ** 2, published.q**2)
        point = {symbol: sympy.Rational(k, 7) for k, symbol in enumerate(SYMBOLS.values(), 5)}
        assert (parts["q"] / published.q).subs(point).evalf() > 0


def test_bridged_t_is_the_published_formula():
    """A bridged T passes 0 Hz and infinity alike, and at w0 the ratio of its middle terms.

    Common practice: H = (1 + s·R2·(C1 + C2) + s²·R1·R2·C1·C2) over the same with R1·C2 more.
    """
    form = closed_form("bridged-t", 0)
    top = 1 + s * R2 * (C1 + C2) + s**2 * R1 * R2 * C1 * C2
    assert equal(form.as_sympy(), top / (top + s * R1 * C2))
    parts = {
        name: parse_expr(text, local_dict=SYMBOLS)
        for name, text in standard_form(form).parts.items()
    }
    assert set(parts) == {"k", "q_z", "w0", "q"}
    assert equal(parts["w0"] ** 2, RC**2)
    assert equal(parts["q_z"] ** 2, (1 / (RC * R2 * (C1 + C2))) ** 2)
    assert equal(parts["q"] ** 2, (1 / (RC * (R2 * (C1 + C2) + R1 * C2))) ** 2)


def test_every_section_is_compared():
    """Every file of a classical section, and every question in it, is compared above."""
    asked = {
        (file.stem, place)
        for file in FOLDER.glob("*.circuit")
        for place in range(len(acsolve.read(file).questions))
    }
    assert asked == {(item.section, item.question) for item in PUBLISHED} | {("bridged-t", 0)}


@pytest.mark.parametrize(
    ("section", "question", "expected"),
    [
        ("low-pass-unity", 0, {
            "k": "1",
            "w0": "1/sqrt(R1*R2*C1*C2)",
            "q": "sqrt(R1*R2*C1/C2)/(R1 + R2)",
        }),
        ("low-pass-gain", 0, {
            "k": "1 + Rb/Ra",
            "w0": "1/sqrt(R1*R2*C1*C2)",
            "q": "sqrt(R1*R2*C1*C2)/(C2*(R1 + R2) - R1*Rb*C1/Ra)",
        }),
        ("band-pass-multiple-feedback", 0, {
            "k": "-R3*C2/(R1*(C1 + C2))",
            "w0": "1/sqrt((R1 || R2)*R3*C1*C2)",
            "q": "sqrt(R3*C1*C2/(R1 || R2))/(C1 + C2)",
        }),
        ("state-variable", 0, {
            "k": "R4*(1 + R6/R5)/(R3 + R4)",
            "w0": "sqrt(R6/(R1*R2*R5*C1*C2))",
            "q": "(1 + R4/R3)*sqrt(R1*R5*R6*C1/(R2*C2))/(R5 + R6)",
        }),
        ("photodiode-stage", 0, {
            "k": "-Rf",
            "w0": "sqrt(2*pi*ft/(Rf*(Cd + Cf)))",
            "q": "sqrt(2*pi*ft*Rf*(Cd + Cf))/(1 + 2*pi*ft*Rf*Cf)",
        }),
        ("twin-t-bootstrapped", 0, {
            "k": "1",
            "w0": "1/(Rx*Cx)",
            "q": "(1 + Rb/Ra)/4",
        }),
    ],
)  # fmt: skip
def test_standard_form_has_the_shape_that_textbooks_print(section, question, expected):
    """K, w0 and Q are spelled as a textbook would."""
    found = standard_form(closed_form(section, question), safe=False)
    assert dict(found.parts) == expected
