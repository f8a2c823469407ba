"""What users import: circuits and the questions that are put to them.

Nothing heavy is imported here: each method loads what it needs.
"""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping, Sequence
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
    dimension_of,
    edges_of,
    exact,
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
    from acsolve.analyses.equivalent import DriveName, Equivalent
    from acsolve.analyses.grid import HertzBand
    from acsolve.analyses.nested import NestedForm
    from acsolve.analyses.pole_record import PoleAnswer
    from acsolve.analyses.proof import Verification
    from acsolve.analyses.question import Ask
    from acsolve.analyses.steady import SteadySine
    from acsolve.analyses.step import StepAnswer
    from acsolve.analyses.sweep import Sweep
    from acsolve.analyses.transfer import TransferAnswer
    from acsolve.analyses.value_for import ValueAnswer
    from acsolve.over import Member
    from acsolve.ports.data import PortData
    from acsolve.report.drawing.drawing import Drawing
    from acsolve.two_port import ResistanceLike, TwoPort

PairLike = str | tuple[str, str]
BandLike = str | tuple[float, float]
DriveLike = float | str | tuple[float | str, float | str]
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

    def two_port(
        self,
        first: PairLike,
        second: PairLike,
        *,
        reference: ResistanceLike | Sequence[ResistanceLike] | None = None,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
        budget: int | None = None,
    ) -> TwoPort:
        """Two pairs of nodes as the ports of a network; sources are zero.

        Parameters
        ----------
        first, second : pairs, as `path` takes them; they may float against each other.
        reference : reference resistance of the s parameters, 50 or "50 ohm", or one for
            each port.
        symbolic, keep, budget : as `Path.closed_form`.

        Raises
        ------
        AnalysisError
            [question.same-node] both pairs are one; [option.value] a reference is none.
        AcsolveError
            as `path`, for pairs that do not read.

        Examples
        --------
        >>> import acsolve
        >>> circuit = acsolve.parse("in -- R1 -- out; out -- C1 -- gnd")
        >>> (a, b), (c, d) = circuit.two_port("in", "out").abcd
        >>> print(a, b, c, d, sep=", ")
        1 + R1*C1*s, R1, C1*s, 1
        """
        from acsolve.two_port import two_port_of

        return two_port_of(
            self.netlist,
            (self.pair(first), self.pair(second)),
            reference,
            _symbols(symbolic, keep, self.netlist),
            None if budget is None else _checked_budget(budget),
        )

    def equivalent(
        self,
        pair: PairLike,
        *,
        source: PairLike | None = None,
        drive: DriveName = "voltage",
        hertz: ArrayLike | str | None = None,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
    ) -> Equivalent:
        """Thévenin and Norton equivalent of a pair, in closed form or over frequency.

        Parameters
        ----------
        pair : the pair that is looked into.
        source : another pair that is driven, by one volt or, with `drive` "current", one
            ampere; by default the file's own sources act.
        hertz : frequencies, for arrays instead of closed forms.
        symbolic, keep : as `Path.closed_form`.

        Raises
        ------
        AnalysisError
            [question.same-node]; [option.value] `drive` is neither.
        EquationError
            [equations.singular], [equations.budget]; [question.no-value] over frequency.
        """
        from acsolve.analyses.equivalent import equivalent, equivalent_sweep

        if drive not in ("voltage", "current"):
            raise refuse(
                "option.value", f"there is no drive {drive!r}", "It is voltage or current."
            )
        looked, driven = self.pair(pair), None if source is None else self.pair(source)
        if hertz is not None:
            return equivalent_sweep(
                self.netlist, looked, self.frequencies(hertz), source=driven, drive=drive
            )
        return equivalent(
            self.netlist,
            looked,
            source=driven,
            drive=drive,
            symbols=_symbols(symbolic, keep, self.netlist),
        )

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

    def duration(self, question: Question) -> float | None:
        """How long the curve of a `step` line is, in seconds; None where it does not say."""
        value = question.duration
        return None if value is None else float(number_of(value, self.netlist))

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
        return self.with_read_values(
            {name: value_for(name, value, self.netlist) for name, value in given.items()}
        )

    def with_read_values(self, changed: Mapping[str, Value]) -> Circuit:
        """As `with_values`, for values that are read already."""
        return replace(
            self,
            netlist=with_values(self.netlist, changed),
            drawn=None if self.drawn is None else with_values(self.drawn, changed),
            given={**self.given, **changed},
        )

    def with_data(
        self, data: Mapping[str, PortData] | None = None, /, **named: PortData
    ) -> Circuit:
        """The circuit with other numbers for measured parts: name -> data of a two-port.

        Raises
        ------
        AnalysisError
            [question.unknown-name] no measured part has that name; [option.value] no data.
        """
        from acsolve.ports.data import PortData

        given = {**(data or {}), **named}
        for name, item in given.items():
            part = self.netlist.part(name)
            if part is None or part.kind != "measured":
                raise refuse(
                    "question.unknown-name",
                    f"there is no measured part {name} in this circuit",
                    "Name a part of kind measured.",
                )
            if not isinstance(item, PortData):
                raise refuse(
                    "option.value", f"{item!r} is no data of a network", "Give PortData."
                )
        return replace(
            self,
            netlist=replace(self.netlist, data={**self.netlist.data, **given}),
            drawn=None
            if self.drawn is None
            else replace(self.drawn, data={**self.drawn.data, **given}),
        )

    def family(self, over: str | Iterable[str]) -> tuple[Member, ...]:
        """The circuit with a value, or several, in a few steps.

        Parameters
        ----------
        over : "R1 = 1k .. 10k" for five steps in even ratios, "R1 = 1k .. 10k : 7" for
            seven, "R1 = 1k, 2k2, 10k" for just these; several texts give all combinations,
            the first of them varying slowest. Steps are even differences where the edges
            differ in sign or one is zero.

        Raises
        ------
        AnalysisError
            [option.value] a text is no family, or there are more than 200 members;
            [question.unknown-name] there is no such value.
        TextError
            codes of the text format for a value that does not read or has the wrong unit.

        Examples
        --------
        >>> import acsolve
        >>> circuit = acsolve.parse('''
        ...     in -- R1 -- out -- C1 -- gnd
        ...     R1 = 1 kohm
        ...     C1 = 1 uF
        ... ''')
        >>> [member.settings[0].value for member in circuit.family("R1 = 1k .. 16k : 3")]
        [1000.0, 4000.0, 16000.0]
        """
        from acsolve.over import members

        return members(self, over)

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

    def drawing(
        self, source: PairLike | None = None, target: PairLike | None = None
    ) -> Drawing:
        """The schematic, drawn from the netlist alone; a notebook shows it as a picture.

        Parameters
        ----------
        source, target : where the signal enters on the left and leaves on the right; by
            default as the file's first question says.

        Raises
        ------
        AcsolveError
            as `path`, for pairs that do not read.

        Examples
        --------
        >>> import acsolve
        >>> drawing = acsolve.parse("in -- R1 -- out -- C1 -- gnd").drawing("in", "out")
        >>> drawing.parts, drawing.svg()[:4]
        (('R1', 'C1'), '<svg')
        """
        from acsolve.report.drawing.drawing import draw

        return draw(
            self.netlist,
            None if source is None else self.pair(source),
            None if target is None else self.pair(target),
        )

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

    def poles(
        self,
        *,
        digits: int | None = None,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
        form: ClosedForm | None = None,
    ) -> PoleAnswer:
        """Poles, zeros, hidden modes and stability, exact where they can be.

        Parameters
        ----------
        digits : of each part of each root, as text; 1 to 1,000.
        form : the closed form, where it is known already; worked out by default.

        Returns
        -------
        Tables of roots in rad/s with multiplicity, closed form, natural frequency and
        damping. Of an order above 160 they are eigenvalues of the network's matrix, which the
        table calls not certified.

        Raises
        ------
        AnalysisError
            [option.value] the number of digits is none.
        EquationError
            as `closed_form`.

        Examples
        --------
        >>> import acsolve
        >>> circuit = acsolve.parse("in -- R1 -- a -- L1 -- out -- C1 -- gnd")
        >>> found = circuit.path("in", "out").poles()
        >>> found.poles.roots[0].w0_form, found.stability.verdict
        ('1/sqrt(L1*C1)', 'stable')
        """
        from acsolve.analyses.pole_record import pole_answer

        if digits is not None and (isinstance(digits, bool) or not isinstance(digits, int)):
            raise refuse(
                "option.value", f"{digits!r} is no number of digits", "Give a whole number."
            )
        known = form or self.closed_form(symbolic=symbolic, keep=keep)
        found = pole_answer(known, digits=digits)
        if known.symbols or not known.rational or (found.poles and found.zeros):
            return found
        from acsolve.analyses.estimated_roots import estimated_tables

        tables = estimated_tables(self.circuit.netlist, self.ask)
        return found if tables is None else replace(found, poles=tables[0], zeros=tables[1])

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
        band: BandLike | None = None,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
        degree: int = 2,
    ) -> CutoffAnswer:
        """Every frequency where the gain crosses a level below its reference.

        Parameters
        ----------
        level : in dB relative to the reference, a number or a text ("-6 dB"); None, or
            -3 dB, is half power, exactly 1/sqrt(2).
        reference : "dc", "infinity", "peak" or a stated gain; None chooses by the shape.
        band : only within "10 Hz .. 1 MHz", or two numbers in hertz, above zero. Without one
            all frequencies are meant where the response is a ratio of polynomials in s; with
            lines, constant-phase parts and the like, or in very large networks, a band
            from the network's own time scales. `searched` of the answer says which.
        degree : closed forms are written where the equation in ω² is of this degree at most:
            2, or up to 4 for those who can use them.

        Raises
        ------
        AnalysisError
            [question.no-reference], [question.no-value], [sweep.band];
            [equations.not-rational] symbols beside a line or another function of s;
            [option.value] the level or the reference is no finite number.
        """
        from acsolve.analyses.cutoff import cutoffs
        from acsolve.analyses.scan import form_or_none, large_cutoffs

        wanted, counted = level_of(level), reference_of(reference)
        netlist = self.circuit.netlist
        edges = None if band is None else self.circuit.edges(band)
        form = form_or_none(netlist, self.ask, _symbols(symbolic, keep, netlist))
        if form is None:
            return large_cutoffs(netlist, self.ask, level=wanted, reference=counted, band=edges)
        return cutoffs(
            form,
            level=wanted,
            reference=counted,
            formula=self._formula(form, _checked_degree(degree)),
            band=edges,
            degree=degree,
        )

    def step(
        self,
        duration: float | str | None = None,
        *,
        drive: DriveLike = "step",
        band: float | str = 0.02,
        points: int = 501,
        symbolic: bool = False,
        keep: str | Iterable[str] = (),
    ) -> StepAnswer:
        """The response in time to a unit step, a unit impulse, or a sine that starts at 0.

        Parameters
        ----------
        duration : of the curve in seconds, or "5 ms"; by default until all has happened.
        drive : "step", "impulse", the frequency of a sine that goes on ("1 kHz", or hertz), or
            a frequency with the whole or half cycles that it lasts: ("1 kHz", 5).
        band : half the settling band as a share of the final value, 0.02 or "2%".
        points : of the curve.

        Raises
        ------
        AnalysisError
            [option.value], [sweep.band], [sweep.points] what is asked does not fit.
        EquationError
            [equations.not-rational] lines and the like have no residues; [equations.budget]
            more than 160 poles. Symbols that stay leave the closed form in time, of first and
            second order, and the moments.

        Examples
        --------
        >>> import acsolve
        >>> circuit = acsolve.parse('''
        ...     in -- R1 = 1 kohm -- out
        ...     out -- C1 = 1 uF -- gnd
        ... ''')
        >>> found = circuit.path("in", "out").step()
        >>> f"{found.rise_s:.6g} {found.delay_s:.6g} {found.at(1e-3):.6f}"
        '0.00219722 0.000693147 0.632121'
        """
        from acsolve.analyses.steady import steady_sine
        from acsolve.analyses.step import step_answer
        from acsolve.drive import band_share, drive_of, duration_of, points_of

        netlist = self.circuit.netlist
        acting = drive_of(drive, netlist)
        length, share, count = duration_of(duration, netlist), band_share(band), points_of(points)
        form = self.closed_form(symbolic=symbolic, keep=keep)
        found = step_answer(
            form,
            duration=length,
            points=count,
            drive=acting,
            band=share,
            formula=self._formula(form),
        )
        if acting.hertz is None or not found.stable:
            return found
        return replace(found, steady=steady_sine(netlist, self.ask, float(acting.hertz)))

    def sine(self, hertz: float | str) -> SteadySine:
        """The steady answer to a sine: amplitude, phase, its delay, and the group delay there.

        Parameters
        ----------
        hertz : one frequency above 0 Hz, a number or a text ("1 kHz").

        Raises
        ------
        AnalysisError
            [sweep.band] it is none.
        EquationError
            [question.no-value] a part has no value.
        """
        from acsolve.analyses.steady import steady_sine
        from acsolve.drive import hertz_of

        netlist = self.circuit.netlist
        return steady_sine(netlist, self.ask, float(hertz_of(hertz, netlist)))

    def value_for(
        self,
        name: str,
        *,
        cutoff: str | float,
        level: str | float | None = None,
        reference: ReferenceLike | None = None,
        degree: int = 2,
    ) -> ValueAnswer:
        """The values of a part that put a cutoff at a wanted frequency.

        Parameters
        ----------
        name : the part, an attribute (`L1.quality`) or a quantity.
        cutoff : the frequency, "1 kHz" or a number in hertz, above zero.
        level, reference : as for `cutoffs`; the reference follows the value.
        degree : closed forms are written up to this degree in the value, four at most.

        Returns
        -------
        Every positive value in SI units, with proof that none is missing, its closed form where
        there is one, and how exactly the gain is met when it is put back; over symbols the
        closed forms alone, which call the angular frequency of the cutoff `w`.

        Raises
        ------
        AnalysisError
            [question.unknown-name], [question.no-reference], [question.no-value],
            [equations.not-rational], [sweep.band]; [option.value] the answer does not depend
            on the value, or the degree is none.

        Examples
        --------
        >>> import acsolve
        >>> path = acsolve.parse("in -- R1 -- out -- C1 -- gnd").path("in", "out")
        >>> path.value_for("R1", cutoff="1 kHz").values[0].closed_form
        '1/(w*C1)'
        """
        from acsolve.analyses.value_equation import WantedCutoff
        from acsolve.analyses.value_for import value_for as answered

        netlist = self.circuit.netlist
        dimension = dimension_of(name, netlist)
        wanted = self.circuit.frequencies([cutoff] if not isinstance(cutoff, str) else cutoff)
        if wanted.size != 1 or not wanted.flat[0] > 0:
            raise refuse(
                "sweep.band",
                f"{cutoff} is not one frequency above zero",
                'Give a single one, as "1 kHz".',
            )
        asked = WantedCutoff(
            hertz=exact(float(wanted.flat[0])),
            level=level_of(level),
            reference=reference_of(reference),
            degree=_checked_degree(degree),
        )
        return answered(netlist, self.ask, name, asked, dimension=dimension)

    def _formula(self, form: ClosedForm, degree: int = 2) -> ClosedForm | None:
        """The same question over symbols, where its cutoffs can have a closed form at all."""
        if form.symbols or not form.rational:
            return None
        if any(len(part) > degree + 1 for part in form.coefficients()):
            return None
        try:
            return self.closed_form(symbolic=True, budget=_LARGEST_FORMULA)
        except EquationError as error:
            if error.code != "equations.budget":
                raise
            return None

    def response(
        self,
        hertz: ArrayLike | str,
        *,
        values: Mapping[str, ArrayLike] | None = None,
        checked: bool = True,
    ) -> NDArray[np.complex128]:
        """The complex response at frequencies in hertz; any shape in, the same shape out.

        A text is read as `sweep` reads it.

        Parameters
        ----------
        hertz : frequencies, or a text.
        values : samples of values: name of a part, an attribute (`L1.quality`), a coupling
            or a quantity -> real numbers in SI units, of shapes that broadcast among each
            other. What the file makes of a varied value follows it. The answer then has the
            shape (*samples, *hertz.shape), 16 bytes a number, and is worked out in blocks
            without a loop over the samples.
        checked : False leaves out the check of each point, for speed: a long ladder is answered
            about five times faster, and a point that lost its digits stays unnoticed. Samples
            have rules of their own and take no notice.

        Raises
        ------
        AnalysisError
            [sweep.band] they are no finite frequencies from 0 Hz upwards;
            [question.unknown-name] nothing has that name; [option.value] values are not
            finite real numbers, or do not broadcast; [sweep.points] the answer would take
            more than 4 GiB or half of the memory.
        EquationError
            [question.no-value] a part has no value.

        Examples
        --------
        >>> import acsolve, numpy as np
        >>> circuit = acsolve.parse('''
        ...     in -- R1 -- out -- C1 -- gnd
        ...     R1 = 1 kohm
        ...     C1 = 1 uF
        ... ''')
        >>> path = circuit.path("in", "out")
        >>> path.response([10, 100, 1000], values={"R1": np.linspace(900, 1100, 5)}).shape
        (5, 3)
        """
        frequencies = self.circuit.frequencies(hertz)
        if values is not None:
            from acsolve.analyses.samples import responses

            return responses(self.circuit.netlist, self.ask, frequencies, values)
        from acsolve.analyses.sweep import response

        return response(self.circuit.netlist, self.ask, frequencies, checked=checked)

    def sweep(
        self, hertz: ArrayLike | str, *, points: str | int | None = None, linear: bool = False
    ) -> Sweep:
        """Gain, continuous phase, phase delay and group delay over frequency.

        Parameters
        ----------
        hertz : frequencies, or a text: a band ("10 Hz .. 1 MHz") or single ones
            ("50 Hz, 60 Hz").
        points : with a band: "50/decade" (default), a number of points, or "auto" for as
            many as straight lines between them need to err by no more than 0.01 dB and
            0.1 degrees; `Sweep.placed` then says what that rests on.
        linear : with a band: even steps instead of even ratios, lines over linear frequency.

        Raises
        ------
        AnalysisError
            [sweep.band], [sweep.points].
        TextError
            codes of the text format for a text that does not read.
        """
        from acsolve.analyses.sweep import sweep

        circuit = self.circuit
        if points == "auto":
            from acsolve.analyses.adaptive import adaptive_sweep

            band: Any = hertz  # refused where it is none
            return adaptive_sweep(circuit.netlist, self.ask, circuit.edges(band), linear=linear)
        frequencies = circuit.frequencies(hertz, points=points, linear=linear)
        return sweep(circuit.netlist, self.ask, frequencies)

    def verify(self, found: Sweep, *, points: int | Literal["all"] | None = None) -> Verification:
        """Proven bounds of the errors of a sweep of this path, from ball arithmetic.

        Parameters
        ----------
        found : what `sweep` answered.
        points : how many of its points, or "all"; by default a handful: both ends, the
            middle, the largest estimated errors, the highest and the lowest gain.

        Raises
        ------
        EquationError
            [equations.check-failed] a point is proven to err by more than the sweep claims.
        AnalysisError
            [option.value] `points` is no number of points, or `found` no sweep.

        Examples
        --------
        >>> import acsolve
        >>> circuit = acsolve.parse('''
        ...     in -- R1 = 1 kohm -- out
        ...     out -- C1 = 1 uF -- gnd
        ... ''')
        >>> path = circuit.path("in", "out")
        >>> proven = path.verify(path.sweep("10 Hz .. 1 MHz"))
        >>> proven.points, proven.max_relative_error < 1e-14, proven.unproven
        (7, True, ())
        """
        from acsolve.analyses.sweep import Sweep
        from acsolve.analyses.verify_sweep import verify_sweep

        if not isinstance(found, Sweep):
            raise refuse("option.value", f"{found!r} is no sweep", "Give what `sweep` answered.")
        number = isinstance(points, int) and not isinstance(points, bool) and points >= 1
        if not (number or points is None or points == "all"):
            raise refuse(
                "option.value",
                f"{points!r} is no number of points",
                'Give a whole number from 1, or "all".',
            )
        return verify_sweep(self.circuit.netlist, self.ask, found, points).confirmed()


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


def _checked_degree(degree: Any) -> int:
    if isinstance(degree, bool) or not isinstance(degree, int) or not 1 <= degree <= 4:
        raise refuse("option.value", f"{degree!r} is no degree", "Give 1, 2, 3 or 4.")
    return degree


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


def parse(
    text: str,
    *,
    name: str = "text",
    variant: str | None = None,
    folder: str | os.PathLike[str] | None = None,
) -> Circuit:
    """Read a circuit from a string; `folder` is where files that it names are looked for.

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
    place = None if folder is None else os.fspath(folder)
    reading = parse_text(text, name=name, folder=place)
    return Circuit(reading.netlist, reading.warnings).with_variant(variant)
