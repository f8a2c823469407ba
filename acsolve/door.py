"""What users import: circuits and the questions that are put to them.

Nothing heavy is imported here: each method loads what it needs.
"""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import TYPE_CHECKING, Any, Literal, get_args

from acsolve.circuit.expression import names
from acsolve.circuit.netlist import (
    Band,
    Level,
    Netlist,
    Pair,
    QuantityName,
    Question,
    with_absent,
    with_values,
    with_variant,
)
from acsolve.circuit.value import Value
from acsolve.errors import AnalysisError, CircuitError, Diagnostic, EquationError
from acsolve.given import (
    band_of,
    edges_of,
    frequencies_of,
    level_of,
    names_of,
    number_of,
    pair_of,
    reference_of,
    refuse,
    share_of,
    texts_of,
    value_for,
    values_of,
)

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
BandLike = str | tuple[float, float]
ReferenceLike = Literal["dc", "infinity", "peak"] | float | Fraction | str


@dataclass(frozen=True, slots=True, repr=False)
class Circuit:
    """A circuit, immutable; changing a value returns a new one that shares the rest.

    Made by `acsolve.read`, `acsolve.parse` or `acsolve.Draft`. `warnings` are what the
    reader remarked without refusing the file. `netlist` is the circuit as data, to be read
    and never written to; `drawn` is the same without the variant, None where they agree, and
    `given` holds the values that `with_values` set.
    """

    netlist: Netlist
    warnings: tuple[Diagnostic, ...] = field(default=(), compare=False)
    drawn: Netlist | None = field(default=None, compare=False)
    given: Mapping[str, Value] = field(default_factory=dict, compare=False)

    def __repr__(self) -> str:
        title = "" if self.title is None else f'"{self.title}"'
        variant = "" if self.variant is None else f'variant "{self.variant}"'
        head = ", ".join(text for text in (title, variant) if text)
        size = f"{_count(len(self.parts), 'part')}, {_count(len(self.nodes), 'node')}"
        return f"Circuit({head}: {size})" if head else f"Circuit({size})"

    def __hash__(self) -> int:
        return hash((self.title, self.variant, self.parts))

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
            `transadmittance`; with an `ammeter` `current-ratio` (default) or
            `transadmittance`.

        Raises
        ------
        AnalysisError
            [question.same-node] a pair is one node, or the driven pair is the observed one;
            [question.no-pair] a pair is missing or none; [question.unknown-name] there is no
            such ammeter; [option.value] the quantity is unknown or does not fit.
        AcsolveError
            [name.unknown-node] a node does not occur; codes of the text format for a text
            that is no pair.
        """
        from acsolve.analyses.question import transfer_ask

        _check_quantity(quantity, ammeter)
        driven = None if source is None else self.pair(source)
        if target is not None and ammeter is not None:
            raise refuse(
                "option.value",
                "both a target and an ammeter say where the answer is observed",
                "Leave one of them out.",
            )
        if target is None and ammeter is None:
            raise AnalysisError(
                Diagnostic(
                    code="question.no-pair",
                    message="the question does not say where the answer is observed",
                    hint='Name a node, two nodes ("a,b") or a port, or an ammeter.',
                )
            )
        observed = self._ammeter_pair(ammeter) if target is None else self.pair(target)
        if driven == observed and ammeter is None and quantity != "transimpedance":
            raise refuse(
                "question.same-node",
                f"the pair ({observed[0]}, {observed[1]}) is both driven and observed",
                "Observe another pair, or ask for the impedance by looking_into.",
            )
        ask = transfer_ask(self.netlist, driven, observed, quantity=quantity, ammeter=ammeter)
        return Path(self, ask)

    def looking_into(self, pair: PairLike) -> Path:
        """The driving-point impedance of a pair, asked the same ways as a path."""
        from acsolve.analyses.question import impedance_ask

        return Path(self, impedance_ask(self.netlist, self.pair(pair)))

    def asked(self, question: Question) -> Path:
        """The path that an `ask` line of the file speaks of."""
        if not isinstance(question, Question):
            raise refuse("option.value", f"{question!r} is no question", "Give one of `questions`.")
        if question.kind == "impedance":
            return self.looking_into(question.target)
        target = None if question.ammeter else question.target
        return self.path(
            question.source, target, quantity=question.quantity, ammeter=question.ammeter
        )

    def level(self, level: Level) -> Fraction | None:
        """A level of an `ask` line in decibels, None for half power."""
        return None if level.decibel is None else number_of(level.decibel, self.netlist)

    def band(self, band: Band) -> tuple[float, float]:
        """Lowest and highest frequency of an `ask` line's band, in hertz."""
        return edges_of(band, self.netlist)

    def frequencies(
        self, hertz: ArrayLike | str, *, points: str | int | None = None, linear: bool = False
    ) -> NDArray[np.float64]:
        """Frequencies in hertz from a band ("10 Hz .. 1 MHz"), a list ("50 Hz, 60 Hz"), numbers.

        Parameters
        ----------
        points : with a band: "50/decade" (default) or a number of points.
        linear : with a band: even steps instead of even ratios.

        Raises
        ------
        AnalysisError
            [sweep.band], [sweep.points].
        TextError
            codes of the text format for a text that does not read.
        """
        return frequencies_of(hertz, self.netlist, points=points, linear=linear)

    def edges(self, band: BandLike) -> HertzBand:
        """The edges of a band given as text ("10 Hz .. 1 MHz") or two numbers, exact."""
        return band_of(band, self.netlist)

    def pair(self, text: PairLike) -> Pair:
        """A pair of nodes from a node's name, "a,b", two names or a port's name."""
        return pair_of(text, self.netlist)

    def _ammeter_pair(self, name: str | None) -> Pair:
        part = self.netlist.part(name or "")
        if part is None or part.kind != "ammeter":
            known = [part.name for part in self.netlist.parts if part.kind == "ammeter"]
            raise refuse(
                "question.unknown-name",
                f"there is no ammeter {name} in this circuit",
                f"The ammeters are {', '.join(known[:12])}."
                if known
                else "Put a part of kind ammeter where the current flows.",
            )
        return part.nodes[0], part.nodes[1]

    def with_values(self, values: Mapping[str, Any] | None = None, /, **named: Any) -> Circuit:
        """A new circuit with other values: `with_values(R1="2k2", C1=10e-9)`.

        A text is read as the file format writes values; a number is in SI units. Names
        that Python cannot spell go in a mapping: `with_values({"N1[7].C": "2 nF"})`. The
        variant stays, and these values win over those of any variant taken later.

        Raises
        ------
        AcsolveError
            [question.unknown-name] no such part or quantity; [option.value] what is neither
            a text nor a finite number; codes of the text format for
            a value that does not read or has the wrong unit.
        """
        given = values_of(values, named)
        changed = {name: value_for(name, value, self.netlist) for name, value in given.items()}
        return replace(
            self,
            netlist=with_values(self.netlist, changed),
            drawn=None if self.drawn is None else with_values(self.drawn, changed),
            given={**self.given, **changed},
        )

    def with_variant(self, name: str | None) -> Circuit:
        """The circuit as its variant of that name says; None for the circuit as drawn.

        It always starts from the circuit as drawn, so variants do not add up. Values set by
        `with_values` stay, and win where the variant names them too.

        Raises
        ------
        CircuitError
            [variant.unknown] there is no such variant.
        """
        drawn = self.netlist if self.drawn is None else self.drawn
        if name is None:
            return replace(self, netlist=drawn, drawn=None)
        if not isinstance(name, str) or name not in drawn.variants:
            known = ", ".join(f'"{item}"' for item in drawn.variants) or "none"
            raise CircuitError(
                Diagnostic(
                    code="variant.unknown",
                    message=f'there is no variant "{name}" in this circuit',
                    hint=f"The variants are: {known}.",
                )
            )
        netlist = with_variant(drawn, name)
        if self.given:
            netlist = with_values(netlist, self.given)
        return replace(self, netlist=netlist, drawn=drawn)

    def without(self, *parts: str) -> Circuit:
        """The circuit with those parts not fitted, as drawn and in every variant.

        Raises
        ------
        AnalysisError
            [question.unknown-name] there is no such part.
        CircuitError
            [name.absent] a value that stays is made of a part that goes.
        """
        gone = frozenset(texts_of(parts, "names of parts"))
        unknown = sorted(gone - set(self.parts))
        if unknown:
            from difflib import get_close_matches

            near = get_close_matches(unknown[0], self.parts, n=1)
            raise refuse(
                "question.unknown-name",
                f"there is no part {unknown[0]} in this circuit",
                f"Did you mean {near[0]}?" if near else "Name parts of the circuit.",
            )
        drawn = None if self.drawn is None else with_absent(self.drawn, gone)
        for netlist in (self.netlist, drawn):
            if netlist is not None:
                _refuse_missing(netlist, gone)
        return replace(self, netlist=with_absent(self.netlist, gone), drawn=drawn)

    def problems(self, *asked: PairLike) -> tuple[Diagnostic, ...]:
        """The network's own faults and oddities; `asked` are pairs that are asked about."""
        from acsolve.circuit.check import check

        return check(self.netlist, asked=[self.pair(pair) for pair in asked])

    def check(self) -> CheckAnswer:
        """Does the circuit make sense: order, natural modes, every problem found."""
        from acsolve.analyses.check import check_answer

        return check_answer(self.netlist, self.warnings)

    def equations(
        self,
        source: PairLike | None = None,
        *,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
    ) -> Equations:
        """The modified nodal equations, driven by a voltage E at a pair or by own sources."""
        from acsolve.analyses.equations import equations

        drive = None if source is None else self.pair(source)
        return equations(self.netlist, drive=drive, symbols=_symbols(symbolic, keep, self.netlist))


@dataclass(frozen=True, slots=True, repr=False)
class Path:
    """A question put to a circuit; its methods are the answers."""

    circuit: Circuit
    ask: Ask

    def __repr__(self) -> str:
        ask = self.ask
        into = f"({ask.target[0]}, {ask.target[1]})"
        if ask.quantity == "impedance":
            return f"Path(impedance into {into})"
        to = into if ask.ammeter is None else ask.ammeter
        if ask.source is None:
            return f"Path({ask.quantity} at {to})"
        return f"Path({ask.quantity} from ({ask.source[0]}, {ask.source[1]}) to {to})"

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
        self, *, symbolic: bool = False, keep: str | Iterable[str] = (), budget: int | None = None
    ) -> ClosedForm:
        """The exact closed form, checked against an independent numeric solution.

        Parameters
        ----------
        symbolic : ignore all numbers: every part is its own symbol.
        keep : names of parts and quantities that stay symbols ("R1, C1", or several texts),
            the others take their values.
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
            _symbols(symbolic, keep, self.circuit.netlist),
            budget=DEFAULT_BUDGET if budget is None else _checked_budget(budget),
        )

    def nested_form(self, *, symbolic: bool = False, keep: str | Iterable[str] = ()) -> NestedForm:
        """The closed form as named steps, for networks too large to multiply out.

        Raises
        ------
        EquationError
            [equations.singular]: the question has no answer.
        """
        from acsolve.analyses.nested import nested_form

        return nested_form(
            self.circuit.netlist, self.ask, _symbols(symbolic, keep, self.circuit.netlist)
        )

    def transfer(
        self,
        *,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
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
            _symbols(symbolic, keep, self.circuit.netlist),
            budget=DEFAULT_BUDGET if budget is None else _checked_budget(budget),
            as_nested=nested,
        )
        return transfer_answer(form)

    def assume(
        self, assumptions: str | Iterable[str], *, band: BandLike | None = None
    ) -> Approximation:
        """The closed form to leading order in assumed small ratios, with its error.

        Parameters
        ----------
        assumptions : "R2 >> R1", or several, with commas or as several texts.
        band : where the error is measured ("10 Hz .. 1 MHz", or two numbers in
            hertz); by default from a decade below the lowest to a decade above the highest
            natural frequency.

        Raises
        ------
        AnalysisError
            [option.value] an assumption that does not read, or names what is no symbol.
        """
        from acsolve.analyses.approximate import assume

        wanted = texts_of(assumptions, "assumptions")
        edges = None if band is None else self.circuit.edges(band)
        form = self.closed_form(symbolic=True)
        return assume(form, wanted, netlist=self.circuit.netlist, band=edges)

    def simplify(
        self, band: BandLike, *, within: float | str = 0.01, tolerances: bool = True
    ) -> Approximation:
        """The closed form without the terms that hardly change the response over a band.

        Parameters
        ----------
        band : "10 Hz .. 1 MHz", or two numbers in hertz.
        within : the largest relative change of the response, 0.01 or "1%" for 1 %.
        tolerances : whether that holds over the tolerances of the parts too.

        Raises
        ------
        AnalysisError
            [sweep.band] it is no band; [option.value] `within` is no share below one.
        EquationError
            [question.no-value] a part has no value.
        """
        from acsolve.analyses.approximate import simplify

        edges, share = self.circuit.edges(band), share_of(within)
        form = self.closed_form(symbolic=True)
        return simplify(
            form,
            self.circuit.netlist,
            band=edges,
            within=share,
            tolerances=tolerances,
        )

    def cutoffs(
        self,
        level: str | float | None = None,
        *,
        reference: ReferenceLike | None = None,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
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
            [question.no-reference], [question.no-value], [equations.not-rational];
            [option.value] the level or the reference is no finite number.
        """
        from acsolve.analyses.cutoff import cutoffs

        wanted, counted = level_of(level), reference_of(reference)
        form = self.closed_form(symbolic=symbolic, keep=keep)
        return cutoffs(
            form,
            level=wanted,
            reference=counted,
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

    def response(self, hertz: ArrayLike | str) -> NDArray[np.complex128]:
        """The complex response at frequencies in hertz; any shape in, the same shape out.

        A text is read as `sweep` reads it.

        Raises
        ------
        AnalysisError
            [sweep.band] they are no finite frequencies from 0 Hz upwards.
        EquationError
            [question.no-value] a part has no value.
        """
        from acsolve.analyses.sweep import response

        return response(self.circuit.netlist, self.ask, self.circuit.frequencies(hertz))

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
        frequencies = circuit.frequencies(hertz, points=points, linear=linear)
        return sweep(circuit.netlist, self.ask, frequencies)


_SECOND_ORDER = 2
_LARGEST_FORMULA = 2_000  # terms; the closed form of a larger network is no longer read


def _count(number: int, word: str) -> str:
    return f"{number} {word}" + "s" * (number != 1)


def _check_quantity(quantity: Any, ammeter: Any) -> None:
    """Refuse a quantity that is none, or that no ammeter observes."""
    known = get_args(QuantityName)
    listed = f"{', '.join(known[:-1])} and {known[-1]}"
    if quantity is not None and not (isinstance(quantity, str) and quantity in known):
        raise refuse(
            "option.value", f"there is no quantity {quantity}", f"The quantities are {listed}."
        )
    if ammeter is not None and quantity in ("voltage-ratio", "transimpedance"):
        raise refuse(
            "option.value",
            f"an ammeter observes a current, and {quantity} asks for a voltage",
            "Ask for current-ratio or transadmittance, or name a pair of nodes.",
        )


def _refuse_missing(netlist: Netlist, gone: frozenset[str]) -> None:
    """Refuse to leave out a part that a value which stays is made of."""
    for name, value in netlist.values():
        if value.expression is None or name in gone or name.rpartition(".")[0] in gone:
            continue
        for inner in sorted(names(value.expression)):
            if inner in gone or inner.rpartition(".")[0] in gone:
                raise CircuitError(
                    Diagnostic(
                        code="name.absent",
                        message=f"{name} is made of {inner}, which is not fitted",
                        hint=f"Give {name} another value first.",
                    )
                )


def _checked_budget(budget: Any) -> int:
    if isinstance(budget, bool) or not isinstance(budget, int) or budget < 1:
        raise refuse(
            "option.value", f"{budget!r} is no number of terms", "Give a whole number from 1."
        )
    return budget


def _check_text(given: Any, what: str, hint: str) -> None:
    if not isinstance(given, str):
        raise refuse("option.value", f"{what} is a text, got {type(given).__name__}", hint)


def _symbols(symbolic: bool, keep: str | Iterable[str], netlist: Netlist) -> Any:
    from acsolve.equations.exact import Symbols

    return Symbols(symbolic=symbolic, keep=names_of(keep, netlist))


def read(path: str | os.PathLike[str], *, variant: str | None = None) -> Circuit:
    """Read a circuit file; "-" reads standard input.

    Raises
    ------
    TextError, CircuitError
        with every problem of the file that can be found in one go.
    AnalysisError
        [option.value] the path is none.
    """
    from acsolve.text import read as read_text

    name = os.fspath(path) if isinstance(path, os.PathLike) else path
    _check_text(name, "the path of a file", "Give the file's name, as a text or a path.")
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

    _check_text(text, "a circuit", "Give the circuit as a text; decode bytes first.")
    _check_text(name, "the name of a circuit", "Give a text, which messages will show.")
    reading = parse_text(text, name=name)
    return Circuit(reading.netlist, reading.warnings).with_variant(variant)
