"""The modified nodal equations to read: A(s)·x = z with unknowns and excitation named."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from typing import Any

from acsolve.circuit.expression import (
    ZERO,
    Expression,
    Name,
    names,
    negate,
    number,
)
from acsolve.circuit.graph import constant
from acsolve.circuit.netlist import Netlist, Pair, Part, bindings
from acsolve.equations.exact import Expander, Symbols, with_symbols
from acsolve.equations.system import DRIVE, System, assemble
from acsolve.equations.write import Spelling, expression_text

DRIVE_NAMES = ("E", "E_drive", "E_of_the_drive")  # the first that no part bears


@dataclass(frozen=True, slots=True, eq=False)
class Equations:
    """A·x = z. `matrix` holds the entries that are not zero, row by row.

    The classical modified nodal form (C.-W. Ho, A. E. Ruehli, P. A. Brennan, IEEE Trans.
    Circuits and Systems 22 (1975), doi:10.1109/TCS.1975.1084079): resistors and capacitors
    as admittances, a branch current for inductors, sources, op-amps and the like.
    """

    unknowns: tuple[str, ...]
    matrix: tuple[Mapping[int, Expression], ...]
    excitation: tuple[Expression, ...]
    meanings: tuple[str, ...]
    references: tuple[str, ...]

    @property
    def size(self) -> int:
        """Number of equations and unknowns."""
        return len(self.unknowns)

    def entry(self, row: int, column: int) -> Expression:
        """One entry of the matrix."""
        return self.matrix[row].get(column, ZERO)

    def as_sympy(self) -> tuple[Any, Any, Any]:
        """Matrix A (size, size), unknowns x (size, 1), excitation z (size, 1) of SymPy."""
        from acsolve.analyses.sympy_edge import equations_to_sympy

        return equations_to_sympy(self)

    def cells(self) -> list[list[str]]:
        """The matrix as text, row by row."""
        spelling = Spelling({})
        return [
            [expression_text(self.entry(row, column), spelling) for column in range(self.size)]
            for row in range(self.size)
        ]

    def symbols(self) -> tuple[str, ...]:
        """The names that occur in matrix and excitation, sorted."""
        entries = [entry for row in self.matrix for entry in row.values()]
        return tuple(sorted({n for entry in [*entries, *self.excitation] for n in names(entry)}))


def equations(
    netlist: Netlist, *, drive: Pair | None = None, symbols: Symbols | None = None
) -> Equations:
    """The equations of a circuit, driven by its own sources or by a voltage E at a pair.

    Parameters
    ----------
    netlist : the circuit.
    drive : where an ideal voltage source E stands; None lets the file's sources act.
    symbols : which values stay symbols, as for closed forms.
    """
    expand = Expander(bindings(netlist), symbols or Symbols())
    netlist = with_symbols(netlist, symbols or Symbols())
    system = assemble(netlist, drive=drive, branch_for=lambda part: _is_zero(netlist, part, expand))
    system = replace(
        system,
        laws=tuple(
            replace(law, entries={k: expand(entry) for k, entry in law.entries.items()})
            for law in system.laws
        ),
    )
    if drive is None:
        return _own_sources(system)
    taken = {name for name, _ in netlist.values()}
    return _driven(system, drive, next(name for name in DRIVE_NAMES if name not in taken))


def _is_zero(netlist: Netlist, part: Part, expand: Expander) -> bool:
    return constant(netlist, expand(Name(part.value_name("value")))) == 0


def _driven(system: System, drive: Pair, name: str) -> Equations:
    row = {column: number(sign) for column, sign in system.voltage(drive).items()}
    excitation = [ZERO] * len(system.laws) + [Name(name)]
    meanings = [law.meaning for law in system.laws] + [f"voltage {name} across {', '.join(drive)}"]
    return Equations(
        unknowns=tuple(
            str(item) if item.name != DRIVE else f"I({name})" for item in system.unknowns
        ),
        matrix=(*(law.entries for law in system.laws), row),
        excitation=tuple(excitation),
        meanings=tuple(meanings),
        references=system.groups.references,
    )


def _own_sources(system: System) -> Equations:
    """The column of the constant 1 moves to the right-hand side."""
    unity = system.positions["1"]
    keep = [column for column in range(len(system.unknowns)) if column != unity]
    place = {column: index for index, column in enumerate(keep)}
    return Equations(
        unknowns=tuple(str(system.unknowns[column]) for column in keep),
        matrix=tuple(
            {place[k]: entry for k, entry in law.entries.items() if k != unity}
            for law in system.laws
        ),
        excitation=tuple(negate(law.entries.get(unity, ZERO)) for law in system.laws),
        meanings=tuple(law.meaning for law in system.laws),
        references=system.groups.references,
    )
