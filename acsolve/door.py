"""What users import: circuits.

Nothing heavy is imported here: each method loads what it needs.
"""

from __future__ import annotations

import os
from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, field, replace
from fractions import Fraction
from typing import TYPE_CHECKING, Any, get_args

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
from acsolve.errors import AnalysisError, CircuitError, Diagnostic
from acsolve.given import (
    band_of,
    edges_of,
    frequencies_of,
    number_of,
    pair_of,
    refuse,
    texts_of,
    value_for,
    values_of,
)
from acsolve.path import BandLike, PairLike, Path, checked_budget, symbols_of

if TYPE_CHECKING:
    import numpy as np
    from numpy.typing import ArrayLike, NDArray

    from acsolve.analyses.check import CheckAnswer
    from acsolve.analyses.equations import Equations
    from acsolve.analyses.equivalent import DriveName, Equivalent
    from acsolve.analyses.grid import HertzBand
    from acsolve.over import Member
    from acsolve.ports.data import PortData
    from acsolve.report.drawing.drawing import Drawing
    from acsolve.report.note.note import Note
    from acsolve.two_port import ResistanceLike, TwoPort


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

    def _repr_svg_(self) -> str:
        """The schematic, for notebooks."""
        return self.drawing().svg()

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
        >>> circuit = acsolve.parse("in -- R1 -- out -- C1 -- gnd")
        >>> (a, b), (c, d) = circuit.two_port("in", "out").abcd
        >>> print(a, b, c, d, sep=", ")
        1 + R1*C1*s, R1, C1*s, 1
        """
        from acsolve.two_port import two_port_of

        return two_port_of(
            self.netlist,
            (self.pair(first), self.pair(second)),
            reference,
            symbols_of(symbolic, keep, self.netlist),
            None if budget is None else checked_budget(budget),
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
            symbols=symbols_of(symbolic, keep, self.netlist),
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
                raise refuse("option.value", f"{item!r} is no data of a network", "Give PortData.")
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

    def drawing(self, source: PairLike | None = None, target: PairLike | None = None) -> Drawing:
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

    def note(self, *, changes: Sequence[str] = (), date: str | None = None) -> Note:
        """The design note: the file's questions answered in one document.

        Parameters
        ----------
        changes : what `with_values` set, as "R1=4k7", so that the note tells it.
        date : shown as it stands; without one the note has none, and the same circuit gives
            the same bytes.

        Raises
        ------
        AcsolveError
            an `ask` line does not fit the circuit; [option.value] a day that does not exist.
            A question that has no answer is told in the note, and in its `problems`.

        Examples
        --------
        >>> import acsolve
        >>> circuit = acsolve.parse("in -- R1 -- out -- C1 -- gnd")
        >>> note = circuit.note()
        >>> note, note.html()[:15]
        (Note('Untitled circuit': 12 sections), '<!DOCTYPE html>')
        """
        from acsolve import __version__
        from acsolve.report.note.note import make_note

        return make_note(self, __version__, changes=changes, date=date)

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
        return equations(
            self.netlist, drive=drive, symbols=symbols_of(symbolic, keep, self.netlist)
        )


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


def _check_text(given: Any, what: str, hint: str) -> None:
    if not isinstance(given, str):
        raise refuse("option.value", f"{what} is a text, got {type(given).__name__}", hint)


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
