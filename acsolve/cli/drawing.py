"""Pictures of answers: which curves, over which band, with which marks."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from acsolve import AnalysisError, Diagnostic, EquationError, Path
from acsolve.cli.options import Options, refused

if TYPE_CHECKING:
    from acsolve.cli.deliver import Answered
    from acsolve.report.entry import Entry
    from acsolve.report.plot import Picture


def draw(answered: Answered, options: Options) -> Picture:
    """Every path once, as a curve over the band that shows it, cutoffs marked."""
    from acsolve.report.entry import letter, question_text, unit_sign
    from acsolve.report.plot import LARGEST, Curve, Picture, curve_labels

    groups = _by_question(answered)
    entries = [entry for _, entry in answered]
    asks = [group[0][1].ask for group in groups]
    units = {unit_sign(ask) for ask in asks if ask is not None}
    if len(units) > 1 or len(groups) > LARGEST:
        raise refused(
            f"one picture cannot hold these {len(groups)} answers",
            "Pick one with --from and --to, or --into.",
        )
    labels = curve_labels([question_text(ask) for ask in asks if ask is not None])
    band = None if entries[0].kind == "sweep" else _shared_band(groups)
    curves = tuple(
        Curve(_swept(group, band), label, _marks(group))
        for group, label in zip(groups, labels, strict=True)
    )
    heading = entries[0].heading
    variant = f' (variant "{heading.variant}")' if heading.variant else ""
    del letter
    return Picture(
        curves=curves,
        title=(heading.title or "") + variant,
        subtitle=labels[0] if len(groups) == 1 else "",
        unit=next(iter(units), ""),
        linear=options.linear,
        level_db=_level(entries),
    )


def _by_question(answered: Answered) -> list[list[tuple[Path, Entry]]]:
    """The answers in groups that share their question."""
    groups: list[list[tuple[Path, Entry]]] = []
    for path, entry in answered:
        home = next((group for group in groups if group[0][1].ask == entry.ask), None)
        if home is None or entry.kind == "sweep":
            groups.append([(path, entry)])
        else:
            home.append((path, entry))
    return groups


def _swept(group: list[tuple[Path, Entry]], band: str | None) -> Any:
    path, entry = group[0]
    return entry.sweep if band is None else path.sweep(band, points="60/decade")


def _marks(group: list[tuple[Path, Entry]]) -> tuple[float, ...]:
    """The cutoffs to mark, in hertz: those answered, or those at half power."""
    path, entry = group[0]
    if entry.kind == "sweep":
        return ()
    found = [item.cutoff for _, item in group]
    if entry.kind == "transfer":
        try:
            found = [path.cutoffs()]
        except (AnalysisError, EquationError):
            return ()
    marks = [item.hertz for answer in found if answer is not None for item in answer.cutoffs]
    return tuple(mark for mark in marks if mark is not None)


def _level(entries: list[Entry]) -> float | None:
    """The level in dB where there is just one."""
    from acsolve.report.number import gain_in_db

    found = entries[0].cutoff
    if len(entries) != 1 or found is None or not found.reference.gain:
        return None
    return gain_in_db(found.reference.gain) + found.level_db


def _shared_band(groups: list[list[tuple[Path, Entry]]]) -> str:
    """One band that shows every group's poles, zeros and cutoffs."""
    from acsolve.report.band import natural_band

    places: list[float] = []
    for group in groups:
        places += [*_marks(group), *(features(group[0][0]) or [])]
    if not places and any(features(group[0][0]) is None for group in groups):
        raise no_band()
    return band_text(natural_band(places))


def features(path: Path) -> list[float] | None:
    """Poles and zeros of a path in hertz, None where they are not known.

    Raises
    ------
    EquationError
        [question.no-value] a part has no value, so no curve can be drawn.
    """
    from acsolve.report.band import landmarks

    found = path.transfer()
    if found.form.symbols:
        path.response([1.0])
    return landmarks(found)


def band_text(band: tuple[float, float]) -> str:
    """A band as --band writes it."""
    return f"{band[0]:g}Hz..{band[1]:g}Hz"


def no_band() -> AnalysisError:
    """The error where no band was given and none shows itself."""
    return AnalysisError(
        Diagnostic(
            code="sweep.band",
            message="no band is given, and the poles that would suggest one are not known",
            hint="Add --band 10Hz..1MHz, or --at with single frequencies.",
        )
    )
