"""What users import: circuits and the questions that are put to them.

Nothing heavy is imported here: each method loads what it needs.
"""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import TYPE_CHECKING, Any, Literal

from acsolve.circuit.netlist import (
    Band,
    Level,
    Netlist,
    Pair,
    QuantityName,
    Question,
    with_values,
    with_variant,
)
from acsolve.circuit.value import Value
from acsolve.errors import AnalysisError, CircuitError, Diagnostic, EquationError
from acsolve.given import level_of, pair_of, reference_of, value_for

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import ArrayLike, NDArray

    from acsolve.analyses.approximate import Approximation
    from acsolve.analyses.check import CheckAnswer
    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.cutoff import CutoffAnswer
    from acsolve.analyses.equations import Equations
    from acsolve.analyses.grid import HertzBand
    from acsolve.analyses.nested import NestedForm
    from acsolve.analyses.question import Ask
    from acsolve.analyses.sweep import Sweep
    from acsolve.analyses.transfer import TransferAnswer

PairLike = str | tuple[str, str]
ReferenceLike = Literal["dc", "infinity", "peak"] | float | Fraction | str


@dataclass(frozen=True, slots=True)
class Circuit:
    """A circuit, immutable; changing a value returns a new one that shares the rest.

    Made by `acsolve.read`, `acsolve.parse` or `acsolve.Draft`. `warnings` are what the
    reader remarked without refusing the file.
    """

    netlist: Netlist
    warnings: tuple[Diagnostic, ...] = field(default=(), compare=False, repr=False)

    @property
    def title(self) -> str | None:
        """The title that the file gives."""
        return self.netlist.title

    @property
    def nodes(self) -> tuple[str, ...]:
        """All nodes, `gnd` first where it occurs."""
        return self.netlist.nodes()

    @property
    def parts(self) -> tuple[str, ...]:
        """The names of all parts, in the order of the file."""
        return tuple(part.name for part in self.netlist.parts)

    @property
    def cautions(self) -> tuple[str, ...]:
        """The safety remarks that the file carries."""
        return self.netlist.cautions

    @property
    def variant(self) -> str | None:
        """The name of the variant this circuit is, None as drawn."""
        return self.netlist.variant

    @property
    def variants(self) -> tuple[str, ...]:
        """The names of the variants that the file defines."""
        return tuple(self.netlist.variants)

    @property
    def questions(self) -> tuple[Question, ...]:
        """What the file's `ask` lines ask, in order."""
        return self.netlist.questions

    def path(
        self,
        source: PairLike | None,
        target: PairLike | None = None,
        *,
        quantity: QuantityName | None = None,
        ammeter: str | None = None,
    ) -> Path:
        """A question: where the circuit is driven, where it is observed.

        Parameters
        ----------
        source : a node (against `gnd`), two nodes ("a,b" or a tuple), or a port's name.
            None lets the file's own sources act.
        target : likewise; or leave it out and name an `ammeter`.
        quantity : `voltage-ratio` (default), `current-ratio`, `transimpedance` or
            `transadmittance`.

        Raises
        ------
        AnalysisError
            [question.unknown-node], [question.same-node].
        """
        from acsolve.analyses.question import transfer_ask

        driven = None if source is None else self.pair(source)
        if target is None and ammeter is None:
            raise AnalysisError(
                Diagnostic(
                    code="question.no-pair",
                    message="the question does not say where the answer is observed",
                    hint='Name a node, two nodes ("a,b") or a port, or an ammeter.',
                )
            )
        observed = self._ammeter_pair(ammeter) if target is None else self.pair(target)
        ask = transfer_ask(self.netlist, driven, observed, quantity=quantity, ammeter=ammeter)
        return Path(self, ask)

    def looking_into(self, pair: PairLike) -> Path:
        """The driving-point impedance of a pair, asked the same ways as a path."""
        from acsolve.analyses.question import impedance_ask

        return Path(self, impedance_ask(self.netlist, self.pair(pair)))

    def asked(self, question: Question) -> Path:
        """The path that an `ask` line of the file speaks of."""
        if question.kind == "impedance":
            return self.looking_into(question.target)
        target = None if question.ammeter else question.target
        return self.path(
            question.source, target, quantity=question.quantity, ammeter=question.ammeter
        )

    def level(self, level: Level) -> Fraction | None:
        """A level of an `ask` line in decibels, None for half power."""
        return None if level.decibel is None else self._number(level.decibel)

    def band(self, band: Band) -> tuple[float, float]:
        """Lowest and highest frequency of an `ask` line's band, in hertz."""
        return float(self._number(band.low)), float(self._number(band.high))

    def frequencies(
        self, text: str, *, points: str | int | None = None, linear: bool = False
    ) -> NDArray[np.float64]:
        """Frequencies in hertz from a band ("10 Hz .. 1 MHz") or a list ("50 Hz, 60 Hz").

        Parameters
        ----------
        points : with a band: "50/decade" (default) or a number of points.
        linear : even steps instead of even ratios.

        Raises
        ------
        AnalysisError
            [sweep.band], [sweep.points]; codes of the text format for the text.
        """
        from acsolve.analyses.grid import explicit
        from acsolve.text import parse_frequencies

        if ".." not in text:
            found = parse_frequencies(text, netlist=self.netlist)
            return explicit([self._number(value) for value in found])
        return _grid(self.edges(text), points, linear=linear)

    def edges(self, text: str) -> HertzBand:
        """The edges of a band given as text ("10 Hz .. 1 MHz"), exact."""
        from acsolve.analyses.grid import HertzBand
        from acsolve.text import parse_band

        band = parse_band(text, netlist=self.netlist)
        return HertzBand(self._number(band.low), self._number(band.high))

    def _number(self, value: Value) -> Fraction:
        """A value of this circuit as a number: exact where it is stated as one."""
        from acsolve.circuit.expression import Number
        from acsolve.circuit.netlist import bindings
        from acsolve.equations.evaluate import Evaluator, FloatArithmetic

        assert value.expression is not None, "a question states its numbers"
        if isinstance(value.expression, Number):
            return value.expression.value
        evaluate = Evaluator(bindings(self.netlist), FloatArithmetic())
        return Fraction(float(evaluate(value.expression)))

    def pair(self, text: PairLike) -> Pair:
        """A pair of nodes from a node's name, "a,b", a tuple or a port's name."""
        return pair_of(text, self.netlist)

    def _ammeter_pair(self, name: str | None) -> Pair:
        part = self.netlist.part(name or "")
        if part is None or part.kind != "ammeter":
            raise AnalysisError(
                Diagnostic(
                    code="question.unknown-name",
                    message=f"there is no ammeter {name} in this circuit",
                    hint="Name a part of kind ammeter.",
                )
            )
        return part.nodes[0], part.nodes[1]

    def with_values(self, values: Mapping[str, Any] | None = None, /, **named: Any) -> Circuit:
        """A new circuit with other values: `with_values(R1="2k2", C1=10e-9)`.

        A text is read as the file format writes values; a number is in SI units. Names
        that Python cannot spell go in a mapping: `with_values({"N1[7].C": "2 nF"})`.

        Raises
        ------
        AcsolveError
            [question.unknown-name] no such part or quantity; codes of the text format for
            a value that does not read or has the wrong unit.
        """
        given = {**(values or {}), **named}
        changed = {name: value_for(name, value, self.netlist) for name, value in given.items()}
        return replace(self, netlist=with_values(self.netlist, changed))

    def with_variant(self, name: str | None) -> Circuit:
        """The circuit as its variant of that name says; None for the circuit as drawn."""
        if name is None:
            return self
        if name not in self.netlist.variants:
            known = ", ".join(f'"{item}"' for item in self.netlist.variants) or "none"
            raise CircuitError(
                Diagnostic(
                    code="variant.unknown",
                    message=f'there is no variant "{name}" in this circuit',
                    hint=f"The variants are: {known}.",
                )
            )
        return replace(self, netlist=with_variant(self.netlist, name))

    def problems(self, *asked: Pair) -> tuple[Diagnostic, ...]:
        """What is wrong or odd about the network as a graph, quickly and without its modes.

        `asked` names pairs that a question uses, whose open ends are meant.
        """
        from acsolve.circuit.check import check

        return check(self.netlist, asked=asked)

    def check(self) -> CheckAnswer:
        """Does the circuit make sense: order, natural modes, every problem found."""
        from acsolve.analyses.check import check_answer

        return check_answer(self.netlist, self.warnings)

    def equations(
        self,
        source: PairLike | None = None,
        *,
        symbolic: bool = False,
        keep: Iterable[str] = (),
    ) -> Equations:
        """The modified nodal equations, driven by a voltage E at a pair or by own sources."""
        from acsolve.analyses.equations import equations

        drive = None if source is None else self.pair(source)
        return equations(self.netlist, drive=drive, symbols=_symbols(symbolic, keep))


@dataclass(frozen=True, slots=True)
class Path:
    """A question put to a circuit; its methods are the answers."""

    circuit: Circuit
    ask: Ask

    def problems(self) -> tuple[Diagnostic, ...]:
        """What stands against the question, errors and warnings, found from the graph alone."""
        from acsolve.circuit.check import check_question

        ask = self.ask
        return check_question(
            self.circuit.netlist,
            ask.source,
            ask.target,
            quantity="voltage-ratio" if ask.quantity == "response" else ask.quantity,
            ammeter=ask.ammeter,
        )

    def closed_form(
        self, *, symbolic: bool = False, keep: Iterable[str] = (), budget: int | None = None
    ) -> ClosedForm:
        """The exact closed form, checked against an independent numeric solution.

        Parameters
        ----------
        symbolic : ignore all numbers: every part is its own symbol.
        keep : names of parts and quantities that stay symbols, the others take their values.
        budget : the most terms that may be held at once, default four million.

        Raises
        ------
        EquationError
            [equations.singular], [equations.undriven]: the question has no answer;
            [equations.budget]: too many terms, for which `nested_form` is the answer.
        """
        from acsolve.analyses.transfer import DEFAULT_BUDGET, closed_form

        return closed_form(
            self.circuit.netlist,
            self.ask,
            _symbols(symbolic, keep),
            budget=DEFAULT_BUDGET if budget is None else budget,
        )

    def nested_form(self, *, symbolic: bool = False, keep: Iterable[str] = ()) -> NestedForm:
        """The closed form as named steps, for networks too large to multiply out.

        Raises
        ------
        EquationError
            [equations.singular]: the question has no answer.
        """
        from acsolve.analyses.nested import nested_form

        return nested_form(self.circuit.netlist, self.ask, _symbols(symbolic, keep))

    def transfer(
        self,
        *,
        symbolic: bool = False,
        keep: Iterable[str] = (),
        budget: int | None = None,
        nested: bool = False,
    ) -> TransferAnswer:
        """The closed form with its limits, standard form, poles and zeros.

        Expanded where it fits the budget; past it, or with `nested`, as named steps.
        """
        from acsolve.analyses.transfer import DEFAULT_BUDGET, form_within, transfer_answer

        form = form_within(
            self.circuit.netlist,
            self.ask,
            _symbols(symbolic, keep),
            budget=DEFAULT_BUDGET if budget is None else budget,
            as_nested=nested,
        )
        return transfer_answer(form)

    def assume(self, assumptions: str | Iterable[str], *, band: str | None = None) -> Approximation:
        """The closed form to leading order in assumed small ratios, with its error.

        Parameters
        ----------
        assumptions : "R2 >> R1", or several, with commas or as several texts.
        band : where the error is measured ("10 Hz .. 1 MHz"); by default from a decade
            below the lowest to a decade above the highest natural frequency.

        Raises
        ------
        AnalysisError
            [option.value] an assumption that does not read, or names what is no symbol.
        """
        from acsolve.analyses.approximate import assume

        edges = None if band is None else self.circuit.edges(band)
        form = self.closed_form(symbolic=True)
        return assume(form, assumptions, netlist=self.circuit.netlist, band=edges)

    def simplify(
        self, band: str, *, within: float = 0.01, tolerances: bool = True
    ) -> Approximation:
        """The closed form without the terms that hardly change the response over a band.

        Parameters
        ----------
        band : "10 Hz .. 1 MHz".
        within : the largest relative change of the response, 0.01 for 1 %.
        tolerances : whether that holds over the tolerances of the parts too.

        Raises
        ------
        EquationError
            [question.no-value] a part has no value.
        """
        from acsolve.analyses.approximate import simplify

        form = self.closed_form(symbolic=True)
        return simplify(
            form,
            self.circuit.netlist,
            band=self.circuit.edges(band),
            within=within,
            tolerances=tolerances,
        )

    def cutoffs(
        self,
        level: str | float | None = None,
        *,
        reference: ReferenceLike | None = None,
        symbolic: bool = False,
        keep: Iterable[str] = (),
    ) -> CutoffAnswer:
        """Every frequency where the gain crosses a level below its reference.

        Parameters
        ----------
        level : in dB relative to the reference, a number or a text ("-6 dB"); None, or
            -3 dB, is half power, exactly 1/sqrt(2).
        reference : "dc", "infinity", "peak" or a stated gain; None chooses by the shape.

        Raises
        ------
        AnalysisError
            [question.no-reference], [question.no-value], [equations.not-rational].
        """
        from acsolve.analyses.cutoff import cutoffs

        form = self.closed_form(symbolic=symbolic, keep=keep)
        return cutoffs(
            form,
            level=level_of(level),
            reference=reference_of(reference),
            formula=self._formula(form),
        )

    def _formula(self, form: ClosedForm) -> ClosedForm | None:
        """The same question over symbols, where its cutoffs can have a closed form at all."""
        if form.symbols or not form.rational:
            return None
        if any(len(part) > _SECOND_ORDER + 1 for part in form.coefficients()):
            return None
        try:
            return self.closed_form(symbolic=True, budget=_LARGEST_FORMULA)
        except EquationError as error:
            if error.code != "equations.budget":
                raise
            return None

    def response(self, hertz: ArrayLike) -> NDArray[np.complex128]:
        """The complex response at frequencies in hertz; any shape in, the same shape out.

        Raises
        ------
        EquationError
            [question.no-value] a part has no value.
        """
        from acsolve.analyses.sweep import response

        return response(self.circuit.netlist, self.ask, hertz)

    def sweep(
        self, hertz: ArrayLike | str, *, points: str | int | None = None, linear: bool = False
    ) -> Sweep:
        """Gain, continuous phase, phase delay and group delay over frequency.

        Parameters
        ----------
        hertz : frequencies, or a text: a band ("10 Hz .. 1 MHz") or single ones
            ("50 Hz, 60 Hz").
        points : with a band: "50/decade" (default) or a number of points.
        linear : with a band: even steps instead of even ratios.

        Raises
        ------
        AnalysisError
            [sweep.band], [sweep.points].
        TextError
            codes of the text format for a text that does not read.
        """
        from acsolve.analyses.sweep import sweep

        circuit = self.circuit
        frequencies = (
            circuit.frequencies(hertz, points=points, linear=linear)
            if isinstance(hertz, str)
            else hertz
        )
        return sweep(circuit.netlist, self.ask, frequencies)


_LINEAR_POINTS = 501  # where an even grid is asked for without a number


def _grid(band: HertzBand, points: str | int | None, *, linear: bool) -> NDArray[np.float64]:
    """A grid over a band; points are a number, or a text such as "50/decade"."""
    from acsolve.analyses import grid

    text = str(points).replace(" ", "") if points is not None else ""
    count, sign, word = text.partition("/")
    wrong = points is not None and not (count.isdecimal() and count.isascii() and len(count) < 9)
    if wrong or (sign and (word != "decade" or linear)):
        raise AnalysisError(
            Diagnostic(
                code="sweep.points",
                message=f"{points} is no number of points" + (" of an even grid" * linear),
                hint="Write 200 for so many in all"
                + ("." if linear else ", or 50/decade for so many in each decade."),
            )
        )
    if linear:
        return grid.linear(band, points=int(count or _LINEAR_POINTS))
    if sign:
        return grid.logarithmic(band, per_decade=int(count))
    return grid.logarithmic(band, points=int(count) if count else None)


_SECOND_ORDER = 2
_LARGEST_FORMULA = 2_000  # terms; the closed form of a larger network is no longer read


def _symbols(symbolic: bool, keep: Iterable[str]) -> Any:
    from acsolve.equations.exact import Symbols

    return Symbols(symbolic=symbolic, keep=frozenset(keep))


def read(path: str | os.PathLike[str], *, variant: str | None = None) -> Circuit:
    """Read a circuit file; "-" reads standard input.

    Raises
    ------
    TextError, CircuitError
        with every problem of the file that can be found in one go.
    """
    from acsolve.text import read as read_text

    reading = read_text(path)
    return Circuit(reading.netlist, reading.warnings).with_variant(variant)


def parse(text: str, *, name: str = "text", variant: str | None = None) -> Circuit:
    """Read a circuit from a string.

    Examples
    --------
    >>> import acsolve
    >>> circuit = acsolve.parse('''
    ...     in -- R1 -- out
    ...     out -- C1 -- gnd
    ... ''')
    >>> print(circuit.path("in", "out").closed_form())
    1/(1 + R1*C1*s)
    """
    from acsolve.text import parse as parse_text

    reading = parse_text(text, name=name)
    return Circuit(reading.netlist, reading.warnings).with_variant(variant)
