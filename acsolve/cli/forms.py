"""What `transfer` and `impedance` share: closed forms with what is asked of them next."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any, Literal

from acsolve import AcsolveError
from acsolve.cli.asking import Asked, answer_all, asked, heading, open_circuit, with_remarks
from acsolve.cli.deliver import deliver, refuse_unfit
from acsolve.cli.drawing import draw
from acsolve.cli.options import Options
from acsolve.cli.progress import progress

if TYPE_CHECKING:
    from acsolve.report.entry import Entry

_MOST_PARTS = 12  # up to here the symbolic twin of a numeric answer is always cheap
_MOST_ORDER = 2


def answer_forms(kind: Literal["transfer", "impedance"], options: Options) -> int:
    """Answer every question of a kind with its closed form."""
    from acsolve.report.entry import Entry

    refuse_unfit(options, kind)
    _ = options.readings, options.share, options.places  # refused before any work
    circuit = open_circuit(options)
    shared = heading(circuit, options)

    def answer(item: Asked) -> Sequence[Entry]:
        found = item.path.transfer(
            symbolic=options.symbolic,
            keep=options.kept,
            budget=options.terms,
            nested=options.nested,
        )
        twin = None if options.as_json else symbolic_twin(item, found)
        here = with_remarks(shared, item.path, options) if _is_nothing(found) else shared
        ask = item.path.ask
        return [
            Entry(
                kind=kind,
                heading=here,
                ask=ask,
                transfer=found,
                formula=twin,
                roots=_roots(item, found, options),
                readings=options.readings,
                approximations=_approximations(item, options),
                equivalent=_equivalent(item, options),
            )
        ]

    with progress("working out the closed form"):
        answered, errors = answer_all(asked(circuit, kind, options), answer)
    return deliver(answered, options, errors=errors, draw=draw)


def _roots(item: Asked, found: Any, options: Options) -> Any:
    """Poles, zeros and stability of an expanded form."""
    if found.order is None:
        return None
    return item.path.poles(digits=options.places, form=found.form)


def _approximations(item: Asked, options: Options) -> tuple[Any, ...]:
    """What --assume and --within ask for, in this order."""
    found: list[Any] = []
    if options.assume:
        found.append(item.path.assume(options.assume, band=options.band))
    if options.share is not None:
        found.append(item.path.simplify(options.band or "", within=options.share))
    return tuple(found)


def _equivalent(item: Asked, options: Options) -> Any:
    """Thévenin and Norton equivalents where --equivalent asks for them, numbers where --at does."""
    from acsolve.report.entry import EquivalentSet

    if not options.equivalent:
        return None
    circuit, pair = item.path.circuit, item.path.ask.target
    forms = circuit.equivalent(pair, symbolic=options.symbolic, keep=options.kept)
    if options.at is None:
        return EquivalentSet(forms=forms)
    hertz = circuit.frequencies(options.at)
    sweep = circuit.equivalent(pair, hertz=hertz)
    return EquivalentSet(forms=forms, hertz=tuple(hertz.ravel().tolist()), sweep=sweep)


def symbolic_twin(item: Asked, found: Any) -> Any:
    """The same answer with every part a symbol, or None where that is not small."""
    small = found.order is not None and 1 <= found.order <= _MOST_ORDER
    if found.form.symbols or not small or len(item.path.circuit.parts) > _MOST_PARTS:
        return None
    try:
        return item.path.transfer(symbolic=True)
    except AcsolveError:
        return None


def _is_nothing(found: Any) -> bool:
    """Whether the answer is zero at every frequency, which a missing connection makes it."""
    return bool(found.form.text() == "0") if found.order == 0 else False
