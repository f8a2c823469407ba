"""What users hold of two pairs of a circuit: parameter sets, sweeps, insertion loss."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from acsolve.circuit.expression import Expression, Number
from acsolve.circuit.netlist import Netlist, Pair
from acsolve.circuit.value import Value
from acsolve.given import exact, frequencies_of, refuse

if TYPE_CHECKING:
    from numpy.typing import ArrayLike

    from acsolve.analyses.closed_form import ClosedForm
    from acsolve.analyses.insertion import Insertion
    from acsolve.analyses.port_answer import PortAnswer
    from acsolve.analyses.port_ask import References
    from acsolve.analyses.port_laws import Laws
    from acsolve.analyses.port_sweep import PortSweep
    from acsolve.analyses.question import Ask
    from acsolve.analyses.two_port import Matrix, PortForms
    from acsolve.equations.exact import Symbols
    from acsolve.ports.data import PortData
    from acsolve.ports.sets import SetName

ResistanceLike = float | str | Value


@dataclass(frozen=True, slots=True, eq=False, repr=False)
class TwoPort:
    """Two pairs of a circuit as ports; current enters a pair's first node.

    The closed forms are worked out when one is first asked for. A set is ((11, 12), (21, 22)),
    each a checked `ClosedForm`, and None where it does not exist: z of a lone series part, y
    of a lone shunt part, z and y of an ideal transformer.
    """

    netlist: Netlist
    first: Pair
    second: Pair
    references: References | None
    symbols: Symbols
    budget: int | None = None
    _forms: list[PortForms] = field(default_factory=list, repr=False)

    def __repr__(self) -> str:
        (a, b), (c, d) = self.first, self.second
        return f"TwoPort(from ({a}, {b}) to ({c}, {d}))"

    @property
    def ask(self) -> Ask:
        """The question as data: its two pairs."""
        from acsolve.analyses.question import Ask

        return Ask(source=self.first, target=self.second, quantity="two-port")

    @property
    def z(self) -> Matrix | None:
        """Impedances: V1 = z11·I1 + z12·I2, V2 = z21·I1 + z22·I2."""
        return self.matrix("z")

    @property
    def y(self) -> Matrix | None:
        """Admittances: I1 = y11·V1 + y12·V2, I2 = y21·V1 + y22·V2."""
        return self.matrix("y")

    @property
    def h(self) -> Matrix | None:
        """Hybrid: V1 = h11·I1 + h12·V2, I2 = h21·I1 + h22·V2."""
        return self.matrix("h")

    @property
    def g(self) -> Matrix | None:
        """Inverse hybrid: I1 = g11·V1 + g12·I2, V2 = g21·V1 + g22·I2."""
        return self.matrix("g")

    @property
    def abcd(self) -> Matrix | None:
        """Chain: V1 = A·V2 - B·I2, I1 = C·V2 - D·I2; a cascade multiplies them."""
        return self.matrix("abcd")

    @property
    def s(self) -> Matrix | None:
        """Scattering, with the stated reference resistances."""
        return self.matrix("s")

    def matrix(self, name: SetName) -> Matrix | None:
        """The set of that name.

        Raises
        ------
        AnalysisError
            [ports.reference] s without a reference.
        EquationError
            [equations.singular], [equations.budget], [equations.not-rational].
        """
        return self.forms().matrix(name)

    @property
    def laws(self) -> Laws:
        """Whether it is reciprocal, symmetric, lossless, passive; None where not proven."""
        return self.forms().laws

    @property
    def port_condition(self) -> str:
        """How the port condition is known: "shared node", or else "assumed".

        The parameters hold where the current into a pair's first node returns at its second;
        pairs that share their second node leave a circuit around no other way.
        """
        return "shared node" if self.first[1] == self.second[1] else "assumed"

    def forms(self) -> PortForms:
        """All closed forms, over one set of shared minors."""
        from acsolve.analyses.transfer import DEFAULT_BUDGET
        from acsolve.analyses.two_port import port_forms

        if not self._forms:
            found = port_forms(
                self.netlist,
                self.first,
                self.second,
                references=self.references,
                symbols=self.symbols,
                budget=self.budget or DEFAULT_BUDGET,
            )
            self._forms.append(found)
        return self._forms[0]

    def sweep(
        self,
        hertz: ArrayLike | str,
        *,
        points: str | int | None = None,
        linear: bool = False,
        sets: Sequence[SetName] | None = None,
    ) -> PortSweep:
        """The parameters over frequency, arrays of shape (f, 2, 2).

        Each set is solved with its own ends open, shorted or loaded with the references: none
        is a conversion of another.

        Parameters
        ----------
        hertz, points, linear : as `Path.sweep`.
        sets : only these; by default all, s where a reference is stated.

        Raises
        ------
        AnalysisError
            [ports.reference] s without a reference; [sweep.band], [sweep.points].
        EquationError
            [question.no-value]; [equations.singular] no set exists.
        """
        from acsolve.analyses.port_sweep import port_sweep

        return port_sweep(
            self.netlist,
            self.first,
            self.second,
            frequencies_of(hertz, self.netlist, points=points, linear=linear),
            references=self.references,
            sets=sets,
        )

    def answer(self, found: PortSweep | None = None) -> PortAnswer:
        """Every set in closed form with its laws, and a sweep beside them."""
        from acsolve.analyses.port_answer import port_answer

        return port_answer(self.references, self.port_condition, self.forms, found)

    def data(self, hertz: ArrayLike | str, name: SetName = "s") -> PortData:
        """One set over frequency, to be converted, put in a row with others, or saved."""
        return self.sweep(hertz, sets=(name,)).data(name)

    def cascade(self, other: TwoPort | PortData, hertz: ArrayLike | str) -> PortData:
        """The s parameters of this two-port followed by another one, computed or measured."""
        behind = other.data(hertz) if isinstance(other, TwoPort) else other
        return self.data(hertz).cascade(behind)

    def insertion_ratio(self, source: ResistanceLike, load: ResistanceLike) -> ClosedForm:
        """The load's voltage over that with source and load connected directly, exact.

        Parameters
        ----------
        source, load : resistances in ohm, numbers or texts ("50 ohm").
        """
        from acsolve.analyses.insertion import insertion_form

        ends = self._ends(source, load)
        return insertion_form(self.netlist, self.first, self.second, ends, self.symbols)

    def insertion(
        self, hertz: ArrayLike | str, source: ResistanceLike, load: ResistanceLike
    ) -> Insertion:
        """Insertion loss and gain, transducer, power and available gain over frequency, in dB."""
        from acsolve.analyses.insertion import insertion

        frequencies = frequencies_of(hertz, self.netlist)
        return insertion(
            self.netlist, self.first, self.second, self._ends(source, load), frequencies
        )

    def _ends(self, source: ResistanceLike, load: ResistanceLike) -> References:
        found = references_of((source, load), self.netlist)
        assert found is not None, "two resistances were given"
        return found


def two_port_of(
    netlist: Netlist,
    pairs: tuple[Pair, Pair],
    reference: ResistanceLike | Sequence[ResistanceLike] | None,
    symbols: Symbols,
    budget: int | None,
) -> TwoPort:
    """Two pairs as ports; the pairs are checked at once, the rest when it is asked for."""
    from acsolve.analyses.two_port import check_pairs

    check_pairs(*pairs)
    return TwoPort(netlist, *pairs, references_of(reference, netlist), symbols, budget)


def references_of(given: Any, netlist: Netlist) -> References | None:
    """One resistance for both ports, or one for each, as expressions in ohm.

    Raises
    ------
    AnalysisError
        [option.value] they are neither one nor two resistances above zero.
    TextError
        codes of the text format for a text that does not read.
    """
    if given is None:
        return None
    items = list(given) if isinstance(given, tuple | list) else [given]
    if isinstance(given, str) and "," in given:
        items = given.split(",")
    if len(items) not in (1, 2):
        raise refuse(
            "option.value",
            f"{len(items)} reference resistances for two ports",
            "Give one for both, or one for each.",
        )
    found = [_resistance(item, netlist) for item in items]
    return found[0], found[-1]


def _resistance(given: Any, netlist: Netlist) -> Expression:
    from acsolve.text import parse_resistance

    if isinstance(given, str):
        given = parse_resistance(given, netlist=netlist)
    if isinstance(given, Value):
        assert given.expression is not None, "a resistance that was read has a value"
        return given.expression
    value = exact(given)
    if value <= 0:
        raise refuse(
            "option.value", f"a resistance of {given!r} is not above zero", "Give ohms, as 50."
        )
    return Number(value)
