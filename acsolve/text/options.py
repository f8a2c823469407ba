"""Values that stand alone: on the command line, and in calls from Python.

They are read by the same grammar as files, so a value, a pair or a band is written in one
way everywhere.
"""

from __future__ import annotations

from typing import Any, TypeVar

from acsolve.circuit import expression as ex
from acsolve.circuit.kind import Attribute
from acsolve.circuit.netlist import Band, Level, Netlist, Pair, Part
from acsolve.circuit.unit import Dimension
from acsolve.circuit.value import Value
from acsolve.source import Source, Span
from acsolve.text import tree
from acsolve.text.book import Book
from acsolve.text.formula import Formulas, UnreadableError
from acsolve.text.givens import Givens, PartPlace, Place
from acsolve.text.measure import DECIBEL, HERTZ, OHM, SECOND, Measure, Solver, measure_of
from acsolve.text.parsing import option
from acsolve.text.problems import Problems
from acsolve.text.questions import Questions
from acsolve.text.references import Found, Lookup, need_of
from acsolve.text.scope import NO_TURNS, Draft, Named, Scope, Turns
from acsolve.text.spell import spelled
from acsolve.text.words import listed, meant

_T = TypeVar("_T")


def parse_value(
    text: str,
    *,
    dimension: Dimension | None = None,
    netlist: Netlist | None = None,
    target: str | None = None,
    name: str = "value",
) -> Value:
    """Read a value as the format writes it: `2k2`, `4.7 kohm ± 1 %`, `2*R1`.

    Parameters
    ----------
    text : the value
    dimension : what its place needs; a bare number takes it; None accepts any
    netlist : the circuit whose named quantities and parts the value may refer to
    target : the name of the value in that circuit (`R1`, `V1.angle`); it then tells the
        unit, decibels and degrees included, and whether s may occur
    name : what messages call the text

    Returns
    -------
    Value: the nominal expression in SI units, and the tolerance where one is written

    Raises
    ------
    TextError
        [syntax.*, value.*] the value is spelt wrong or has the wrong unit.
    CircuitError
        [name.unknown] it refers to something the circuit does not have.

    Examples
    --------
    >>> parse_value("2k2").expression
    Number(value=Fraction(2200, 1))

    """
    desk = _Desk(text, name, netlist)
    content = desk.tree("option_value")
    place = desk.place(target, None if dimension is None else measure_of(dimension))
    if content is not None and content.formula is None:
        desk.problems.add(
            "value.absent",
            "absent leaves a part out and is no value",
            content.span,
            hint="Write absent into a variant of the file.",
        )
        content = None
    value = desk.givens.value(content, place, desk.book.file, NO_TURNS) if content else None
    return desk.done(value)


def parse_pair(text: str, netlist: Netlist, *, name: str = "pair") -> Pair:
    """Read a pair: `out` (against gnd), `a,b`, `(a, b)`, or a port's name; joins followed.

    Raises
    ------
    TextError, CircuitError
        [syntax.*, name.unknown-node] it is no pair of this circuit.

    """
    desk = _Desk(text, name, netlist)
    content = desk.tree("option_pair")
    return desk.done(None if content is None else desk.questions().pair(content))


def parse_band(text: str, *, netlist: Netlist | None = None, name: str = "band") -> Band:
    """Read a band of frequencies: `10Hz..1MHz`.

    Raises
    ------
    TextError
        [syntax.*, value.unit, value.band] it is no band.

    """
    desk = _Desk(text, name, netlist)
    content = desk.tree("option_band")
    return desk.done(None if content is None else desk.questions().band(content))


def parse_frequencies(
    text: str, *, netlist: Netlist | None = None, name: str = "frequencies"
) -> tuple[Value, ...]:
    """Read frequencies in hertz: `50Hz, 60Hz`.

    Raises
    ------
    TextError
        [syntax.*, value.unit] it is no list of frequencies.

    """
    desk = _Desk(text, name, netlist)
    found = [
        desk.questions().quantity(item, "a frequency", HERTZ)
        for item in desk.tree("option_list") or ()
    ]
    whole = tuple(item for item in found if item is not None)
    return desk.done(whole if len(whole) == len(found) else None)


def parse_level(text: str, *, netlist: Netlist | None = None, name: str = "level") -> Level:
    """Read a level: `-6dB`, or `half power`; -3 dB means half power.

    Raises
    ------
    TextError
        [syntax.*, value.level] it is no level.

    """
    desk = _Desk(text.replace("half-power", "half power"), name, netlist)
    content = desk.tree("option_level")
    return desk.done(None if content is None else desk.questions().level(content))


def parse_duration(text: str, *, netlist: Netlist | None = None, name: str = "duration") -> Value:
    """Read a duration: `5ms`.

    Raises
    ------
    TextError
        [syntax.*, value.unit, value.positive] it is no duration.

    """
    desk = _Desk(text, name, netlist)
    content = desk.tree("option_expression")
    if content is None:
        return desk.done(None)
    clause = tree.Clause("for", content, content.span)
    return desk.done(desk.questions().positive(clause, "a duration", SECOND))


def parse_resistance(
    text: str, *, netlist: Netlist | None = None, name: str = "resistance"
) -> Value:
    """Read a resistance above zero: `50 ohm`, `50`, or an expression of the circuit's names.

    Raises
    ------
    TextError
        [syntax.*, value.unit, value.positive] it is no resistance.

    """
    desk = _Desk(text, name, netlist)
    content = desk.tree("option_expression")
    if content is None:
        return desk.done(None)
    clause = tree.Clause("reference", content, content.span)
    return desk.done(desk.questions().positive(clause, "a resistance", OHM))


def parse_gain(text: str, *, netlist: Netlist | None = None, name: str = "gain") -> Value:
    """Read a gain, `10`, `20dB` or with a unit `4.7kohm`; decibels become a ratio.

    Raises
    ------
    TextError
        [syntax.*, value.*] it is no gain.

    """
    desk = _Desk(text, name, netlist)
    content = desk.tree("option_expression")
    if content is None:
        return desk.done(None)
    try:
        made = desk.formulas.make(content, desk.book.file, NO_TURNS)
    except UnreadableError:
        return desk.done(None)
    expression = made.expression
    if made.measure == DECIBEL:
        expression = ex.power(ex.number(10), ex.divide(expression, ex.number(20)))
    return desk.done(Value(expression=expression, span=content.span))


class _Desk:
    """What is needed to read one value of a circuit that is known already."""

    def __init__(self, text: str, name: str, netlist: Netlist | None) -> None:
        self.source = Source(name, text)
        self.problems = Problems(self.source)
        self.netlist = netlist if netlist is not None else Netlist()
        self.book = Book(self.source, self.problems, flattened=True)
        self._name_quantities()
        solver = Solver()
        self.formulas = Formulas(self.book, solver, _Known(self.book, self.netlist))
        self.givens = Givens(self.book, self.formulas, solver)

    def _name_quantities(self) -> None:
        """The names that letters behind a number could be confused with."""
        scope = self.book.file
        for item in self.netlist.quantities.values():
            if item.span is not None:
                scope.quantities[item.name] = Named(item.name, scope, None, NO_TURNS, item.span)
        for part in self.netlist.parts:
            if len(part.name) <= 2 and part.span is not None:
                scope.drafts[part.name] = Draft(part.name, scope, part.span)

    def tree(self, start: str) -> Any:
        """The syntax tree, or None once the problem is recorded."""
        return option(start, self.source, self.problems)

    def place(self, target: str | None, need: Measure | None) -> Place:
        """The place of a named value of the circuit, or of any value of that unit."""
        found = attribute_of(self.netlist, target) if target else None
        if found is not None:
            return PartPlace(found[0].name, found[0].definition, found[1])
        place = Place("this value", need)
        place.at = True
        return place

    def questions(self) -> Questions:
        """A reader of pairs, bands and levels."""
        nodes = set(self.netlist.nodes())
        self.book.nodes.above.update(self.netlist.aliases)
        for node in nodes:
            self.book.file.nodes.setdefault(node, _whole(self.source))
        reader = Questions(self.book, self.givens, nodes.__contains__)
        reader.ports.update(self.netlist.ports)
        return reader

    def done(self, result: _T | None) -> _T:
        """The result; raises what is wrong."""
        self.problems.finish()
        assert result is not None, "a missing result has its problem recorded"
        return result


class _Known(Lookup):
    """Names of a finished netlist."""

    def __init__(self, book: Book, netlist: Netlist) -> None:
        super().__init__(book)
        self._netlist = netlist

    def find(
        self, path: tree.Path, scope: Scope, turns: Turns, *, in_s: bool = False
    ) -> Found | None:
        """What a name stands for in the netlist, or None once the problem is recorded."""
        if path.name in ("s", "pi"):
            return super().find(path, scope, turns, in_s=in_s)
        name = spelled(path, scope, turns, self._book)
        if name is None:
            return None
        quantity = self._netlist.quantities.get(name)
        if quantity is not None:
            return ex.Name(name), measure_of(quantity.dimension)
        measure = self._part_measure(name)
        if measure is not None:
            return ex.Name(name), measure
        known = [*self._netlist.quantities, *(part.name for part in self._netlist.parts)]
        otherwise = f"Names are {listed(known[:20])}." if known else "Write a number."
        self._book.problems.add(
            "name.unknown",
            f"{name} is not known here",
            path.span,
            hint=meant(name, known, otherwise),
        )
        return None

    def _part_measure(self, name: str) -> Measure | None:
        """The measure of a part's value or attribute."""
        found = attribute_of(self._netlist, name)
        if found is None or found[1].name not in found[0].values:
            return None
        return need_of(found[0].definition, found[1]) or {}


def attribute_of(netlist: Netlist, name: str) -> tuple[Part, Attribute] | None:
    """The part and the attribute that a name of a value stands for."""
    for owner, attribute in ((name, None), tuple(name.rpartition(".")[::2])):
        part = netlist.part(owner or "")
        if part is not None:
            row = part.definition.attribute(attribute or part.definition.principal or "")
            return None if row is None else (part, row)
    return None


def _whole(source: Source) -> Span:
    return Span(source, 0, len(source.text))
