"""Pictures of answers: which curves, over which band, with which marks."""

from __future__ import annotations

from dataclasses import replace
from math import pi
from typing import TYPE_CHECKING, Any, cast

from acsolve import AnalysisError, Circuit, Diagnostic, EquationError, Path
from acsolve.cli.family import draw_family
from acsolve.cli.options import Options, refused

if TYPE_CHECKING:
    from acsolve.cli.deliver import Answered
    from acsolve.report.entry import Entry
    from acsolve.report.picture_kind import PictureKind
    from acsolve.report.plot import Picture
    from acsolve.report.plot_poles import PoleMap

    Group = list[tuple[Path, Entry]]


def draw(answered: Answered, options: Options) -> Picture | PoleMap:
    """What --picture names; without it gain and phase."""
    if options.picture == "poles":
        return _pole_map(answered)
    return _curves(answered, options)


def placed(options: Options) -> Options:
    """The options, with automatic points where a curve in a plane needs them."""
    from acsolve.report.picture_kind import PLANES

    if options.picture not in PLANES or options.points is not None or options.at is not None:
        return options
    return replace(options, points="auto")


def placed_for(options: Options, circuit: Circuit) -> Options:
    """The same for a sweep that is only looked at: its curves are drawn from its points."""
    endings = {name.lower().rpartition(".")[2] for name in options.save}
    looked_at = bool(endings) and endings <= {"svg", "png", "pdf"} and not options.as_json
    free = options.points is None and options.at is None and options.picture != "poles"
    if looked_at and free and len(circuit.parts) <= _MOST_PLACED:
        return replace(options, points="auto")
    return placed(options)


_MOST_PLACED = 2_000  # parts; placing points takes several sweeps


def _pole_map(answered: Answered) -> PoleMap:
    """Poles, zeros and hidden modes of one answer."""
    from acsolve.report.entry import question_text
    from acsolve.report.plot_poles import PoleMap

    (path, entry), *more = answered
    if more:
        raise refused(
            f"one picture holds the poles and zeros of one answer, not of {len(answered)}",
            "Pick one with --from and --to, or --into, and leave --over out.",
        )
    assert path is not None, "an answer that is drawn belongs to a path"
    return PoleMap(
        roots=entry.roots or path.poles(),
        title=_title(entry),
        subtitle=question_text(path.ask),
    )


def _title(entry: Entry) -> str:
    heading = entry.heading
    variant = f' (variant "{heading.variant}")' if heading.variant else ""
    return (heading.title or "") + variant


def _curves(answered: Answered, options: Options) -> Picture:
    """Every question once, as a curve over the band that shows it, cutoffs marked."""
    from acsolve.report.entry import curve_words, unit_sign
    from acsolve.report.plot import LARGEST, Curve, Picture

    entries = [entry for _, entry in answered]
    if entries[0].over:
        return replace(draw_family(answered, options), kind=_kind(options))
    groups = _by_question(answered)
    asks = [group[0][1].ask for group in groups]
    units = {unit_sign(ask) for ask in asks if ask is not None}
    if len(units) > 1 or len(groups) > LARGEST:
        raise refused(
            f"one picture cannot hold these {len(groups)} answers",
            "Pick one with --from and --to, or --into.",
        )
    subtitle, labels = curve_words([ask for ask in asks if ask is not None])
    marks = [_marks(group) for group in groups]
    swept = _given(groups) or _swept(groups, marks, options)
    return Picture(
        curves=tuple(map(Curve, swept, labels, marks)),
        kind=_kind(options),
        asymptotes=_asymptotes(groups, options),
        title=_title(entries[0]),
        subtitle=subtitle,
        unit=next(iter(units), ""),
        linear=options.linear,
        level_db=_level(entries),
    )


def _by_question(answered: Answered) -> list[Group]:
    """The answers in groups that share their question; a sweep is a group of its own."""
    groups: list[Group] = []
    for path, entry in answered:
        assert path is not None, "an answer that is drawn belongs to a path"
        home = next((group for group in groups if group[0][1].ask == entry.ask), None)
        if home is None or entry.kind == "sweep":
            groups.append([(path, entry)])
        else:
            home.append((path, entry))
    return groups


def _given(groups: list[Group]) -> list[Any]:
    """The sweeps themselves, where sweeps were asked for."""
    return [group[0][1].sweep for group in groups if group[0][1].sweep is not None]


def _kind(options: Options) -> PictureKind:
    return cast("PictureKind", options.picture or "gain")  # checked with the other options


_MOST_STORING = 12  # parts that store energy; a gain of more has too many corners to be drawn


def _asymptotes(groups: list[Group], options: Options) -> tuple[Any, ...]:
    """The asymptotes of a lone gain, where it is small and its form is known."""
    from acsolve.report.plot_asymptotes import asymptotes_of

    path, entry = groups[0][0]
    if _kind(options) != "gain" or len(groups) > 1 or _storing(path) > _MOST_STORING:
        return ()
    try:
        return asymptotes_of(entry.transfer or path.transfer())
    except (AnalysisError, EquationError):
        return ()


def _swept(groups: list[Group], marks: list[tuple[float, ...]], options: Options) -> list[Any]:
    """Each path over one band that shows every pole, zero and mark."""
    from acsolve.report.band import drawn_frequencies, natural_band

    roots = [features(group[0][0]) for group in groups]
    places = [mark for item in marks for mark in item]
    places += [abs(root) / (2 * pi) for item in roots for root in item or ()]
    if not places and None in roots:
        raise no_band()
    band = natural_band(places)
    if placed(options).points == "auto":
        return [group[0][0].sweep(band_text(band), points="auto") for group in groups]
    return [
        group[0][0].sweep(drawn_frequencies(band, own or (), mark))
        for group, own, mark in zip(groups, roots, marks, strict=True)
    ]


def _marks(group: Group) -> tuple[float, ...]:
    """The cutoffs to mark, in hertz: those answered, or those at half power.

    A sweep of many parts goes without: it may be wanted long before its cutoffs are found.
    """
    path, entry = group[0]
    found = [item.cutoff for _, item in group]
    if entry.kind == "transfer" or (entry.kind == "sweep" and _storing(path) <= _MOST_STORING):
        try:
            found = [path.cutoffs()]
        except (AnalysisError, EquationError):
            return ()
    marks = [item.hertz for answer in found if answer is not None for item in answer.cutoffs]
    return tuple(sorted(mark for mark in marks if mark is not None and _is_shown(mark, entry)))


def _is_shown(mark: float, entry: Entry) -> bool:
    if entry.sweep is None:
        return True
    return bool(entry.sweep.hertz.min() <= mark <= entry.sweep.hertz.max())


def _storing(path: Path) -> int:
    return sum(part.kind != "resistor" for part in path.circuit.netlist.parts)


def _level(entries: list[Entry]) -> float | None:
    """The level in dB where there is just one."""
    from acsolve.report.number import gain_in_db

    found = entries[0].cutoff
    if len(entries) != 1 or found is None or not found.reference.gain:
        return None
    return gain_in_db(found.reference.gain) + found.level_db


def features(path: Path) -> tuple[complex, ...] | None:
    """Poles and zeros of a path in rad/s, None where they are not known.

    Raises
    ------
    EquationError
        [question.no-value] a part has no value, so no curve can be drawn.
    """
    from acsolve.report.band import roots_of

    found = path.transfer()
    if found.form.symbols:
        path.response([1.0])
    return roots_of(found)


def band_text(band: tuple[float, float]) -> str:
    """A band as --band writes it."""
    return f"{band[0]!r}Hz..{band[1]!r}Hz"


def no_band() -> AnalysisError:
    """The error where no band was given and none shows itself."""
    return AnalysisError(
        Diagnostic(
            code="sweep.band",
            message="no band is given, and the poles that would suggest one are not known",
            hint="Add --band 10Hz..1MHz, or --at with single frequencies.",
        )
    )
