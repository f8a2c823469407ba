"""Families of sweeps: the members that --over asks for, over one grid."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from acsolve import Circuit, Path
from acsolve.cli.options import Options, refused

if TYPE_CHECKING:
    from acsolve.cli.deliver import Answered
    from acsolve.report.plot import Picture

Members = Sequence[tuple[Circuit, tuple[Any, ...]]]


def members_of(circuit: Circuit, options: Options) -> Members:
    """The circuits to sweep with the settings that make them; just the circuit without --over."""
    if not options.over:
        return [(circuit, ())]
    return [(member.circuit, member.settings) for member in circuit.family(options.over)]


def paths_of(path: Path, members: Members) -> list[Path]:
    """The same question put to every member."""
    return [replace(path, circuit=circuit) for circuit, _ in members]


def sweeps_of(paths: Sequence[Path], hertz: str, options: Options) -> list[Any]:
    """A sweep of each path; where their grids differ, all over the frequencies of all."""
    found = [path.sweep(hertz, points=options.points, linear=options.linear) for path in paths]
    grids = [item.hertz.tolist() for item in found]
    if all(grid == grids[0] for grid in grids):
        return found
    together = sorted({value for grid in grids for value in grid})
    return [path.sweep(together) for path in paths]


def draw_family(answered: Answered, options: Options) -> Picture:
    """One curve a member of one question's family."""
    from acsolve.report.entry import families, question_text, unit_sign
    from acsolve.report.family_picture import LARGEST_FAMILY, family_curves, family_names
    from acsolve.report.plot import Picture

    entries = [entry for _, entry in answered]
    if len(families(entries)) > 1:
        raise refused(
            "one picture cannot hold the families of several questions",
            "Pick one with --from and --to, or --into.",
        )
    if len(entries) > LARGEST_FAMILY:
        raise refused(
            f"one picture cannot hold {len(entries)} curves that can be told apart",
            f"Take at most {LARGEST_FAMILY} values, as --over R1=1k..10k:{LARGEST_FAMILY}.",
        )
    first = entries[0]
    assert first.ask is not None, "a sweep answers a question"
    variant = f' (variant "{first.heading.variant}")' if first.heading.variant else ""
    return Picture(
        curves=family_curves(entries),
        title=(first.heading.title or "") + variant,
        subtitle=question_text(first.ask),
        unit=unit_sign(first.ask),
        linear=options.linear,
        told_by=family_names(entries),
    )
