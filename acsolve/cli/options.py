"""Options that the commands share, as one immutable object once they are read."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from typing import Any, Literal

import click

from acsolve import AnalysisError, Diagnostic
from acsolve.cli.group import Command, help_option
from acsolve.report.picture_kind import PICTURE_KINDS

QUANTITIES = ("voltage-ratio", "current-ratio", "transimpedance", "transadmittance")


@dataclass(frozen=True, slots=True, kw_only=True)
class Options:
    """What was given on the command line; None or empty where it was not."""

    files: tuple[str, ...]
    source: str | None = None
    target: str | None = None
    into: str | None = None
    through: str | None = None
    quantity: str | None = None
    variant: str | None = None
    let: tuple[str, ...] = ()
    symbolic: bool = False
    keep: str | None = None
    nested: bool = False
    equivalent: bool = False
    budget: str | None = None
    form: str | None = None
    assume: tuple[str, ...] = ()
    within: str | None = None
    digits: str | None = None
    band: str | None = None
    points: str | None = None
    linear: bool = False
    at: str | None = None
    over: tuple[str, ...] = ()
    verify: str | None = None
    level: str | None = None
    reference: str | None = None
    value_for: str | None = None
    degree: str | None = None
    duration: str | None = None
    drive: str | None = None
    cycles: str | None = None
    settle: str | None = None
    date: str | None = None
    picture: str | None = None
    save: tuple[str, ...] = ()
    as_json: bool = False
    arguments: tuple[str, ...] = ()  # the whole command line, to name options in messages

    @property
    def file(self) -> str:
        """The one circuit file."""
        return self.files[0]

    @property
    def kept(self) -> tuple[str, ...]:
        """The names that stay symbols."""
        return split_names(self.keep or "")

    @property
    def terms(self) -> int | None:
        """The most terms that may be held at once, None for the usual number."""
        if self.budget is None:
            return None
        try:
            found = int(float(self.budget.replace("_", "")))
        except (ValueError, OverflowError):
            found = 0
        if found < 1:
            raise refused(f"--budget {self.budget} is no number of terms", "Write, say, 1e6.")
        return found

    @property
    def readings(self) -> tuple[str, ...]:
        """The shapes that the closed form is to be written in."""
        chosen = split_names(self.form or "")
        for name in chosen:
            if name not in READINGS:
                raise refused(f"there is no form {name}", f"The forms are {', '.join(READINGS)}.")
        return chosen

    @property
    def places(self) -> int | None:
        """How many digits of each pole and zero are asked for."""
        if self.digits is None:
            return None
        if not (self.digits.isascii() and self.digits.isdecimal() and len(self.digits) < 5):
            raise refused(f"--digits {self.digits} is no number of digits", "Write, say, 30.")
        return int(self.digits)

    @property
    def share(self) -> float | None:
        """The largest relative change that --within allows, 0.01 for 1%."""
        if self.within is None:
            return None
        number, percent, rest = self.within.strip().partition("%")
        try:
            found = float(number) / (100 if percent else 1)
        except ValueError:
            found = 0.0
        if rest or not 0 < found < 1:
            raise refused(
                f"--within {self.within} is no share between 0 and 100 %", "Write, say, 1%."
            )
        if self.band is None:
            raise refused("--within needs to know where", "Add --band, say 10Hz..1MHz.")
        return found

    @property
    def radical(self) -> int:
        """Up to which degree closed forms are written."""
        if self.degree not in (None, "1", "2", "3", "4"):
            raise refused(f"--degree {self.degree} is no degree", "Write 2, 3 or 4.")
        return int(self.degree or 2)

    @property
    def proven(self) -> int | Literal["all"] | None:
        """How many points --verify proves; None for a handful."""
        if self.verify == "all":
            return "all"
        return None if self.verify in (None, A_HANDFUL) else int(self.verify or 0)

    @property
    def asks(self) -> bool:
        """Whether the command line itself says where to drive or observe."""
        return any((self.source, self.target, self.into, self.through))


A_HANDFUL = "a handful"  # what --verify says without a value
READINGS = ("collected", "unit", "factored", "standard", "real", "delay", "asymptotes")


def split_names(text: str) -> tuple[str, ...]:
    """Names between commas; commas inside index brackets belong to their name."""
    parts = re.split(r",(?![^\[]*\])", text)
    return tuple(part.strip() for part in parts if part.strip())


def refused(message: str, hint: str) -> AnalysisError:
    """The error for an option whose value does not fit."""
    return AnalysisError(Diagnostic(code="option.value", message=message, hint=hint))


def _option(names: str, place: str | None, text: str, **more: Any) -> Callable[[], click.Option]:
    def make() -> click.Option:
        flag = {"is_flag": True} if place is None else {"metavar": place}
        return click.Option(names.split(), help=text, **{**flag, **more})

    return make


_KINDS = ", ".join(PICTURE_KINDS)
_TABLE = {
    "from": _option("--from source", "PAIR", "where it is driven: out, or a,b, or a port"),
    "to": _option("--to target", "PAIR", "where it is observed, likewise"),
    "into": _option("--into", "PAIR", "the pair whose impedance is asked"),
    "through": _option("--through", "AMMETER", "observe the current of an ammeter instead"),
    "quantity": _option("--quantity", "NAME", ", ".join(QUANTITIES)),
    "variant": _option("--variant", "NAME", "the circuit as this variant says"),
    "let": _option("--let", "NAME=VALUE", "another value; may be repeated", multiple=True),
    "symbolic": _option("--symbolic", None, "ignore all numbers"),
    "keep": _option("--keep", "R1,C1", "only these stay symbols"),
    "nested": _option("--nested", None, "as named steps, short for large networks"),
    "budget": _option("--budget", "TERMS", "most terms to multiply out, four million"),
    "equivalent": _option(
        "--equivalent", None, "Thévenin and Norton besides, of the file's own sources"
    ),
    "form": _option("--form", "NAMES", ", ".join(READINGS)),
    "assume": _option(
        "--assume", "'R2 >> R1'", "leading order only; may be repeated", multiple=True
    ),
    "within": _option("--within", "1%", "drop terms that change less than this over --band"),
    "digits": _option("--digits", "30", "so many certified digits of each pole and zero"),
    "band": _option("--band", "10Hz..1MHz", "lowest and highest frequency"),
    "points": _option("--points", "NUMBER", "so many in all, 50/decade, or auto"),
    "linear": _option("--linear", None, "even steps instead of even ratios"),
    "at": _option("--at", "50Hz,60Hz", "just these frequencies"),
    "over": _option(
        "--over",
        "R1=1k..10k",
        "a curve for each value: five, R1=1k..10k:7, or R1=1k,2k2; may be repeated",
        multiple=True,
    ),
    "verify": _option(
        "--verify",
        "[NUMBER|all]",
        "prove the accuracy of a handful of points, of so many, or of all",
        is_flag=False,
        flag_value=A_HANDFUL,
    ),
    "level": _option("--level", "-6dB", "below the reference; half power if not given"),
    "reference": _option("--reference", "WHERE", "dc, infinity, peak, or a gain such as 0.5"),
    "for": _option("--for duration", "5ms", "how long the curve is; as it takes if not given"),
    "drive": _option("--drive", "NAME", "step, impulse, or a sine's frequency, as 1kHz"),
    "cycles": _option("--cycles", "5", "how long the sine lasts; it goes on if not given"),
    "settle": _option("--settle", "2%", "half the band around the final value, 2% if not given"),
    "date": _option("--date", "TEXT", "a date to show; the note has none of its own"),
    "resistance": _option(
        "--reference", "50ohm", "reference of the s parameters; 50ohm,75ohm for one each"
    ),
    "value-for": _option("--value-for", "R1", "the values of it that put a cutoff where --at says"),
    "degree": _option("--degree", "4", "closed forms up to this degree, 2 if not given"),
    "picture": _option("--picture", "KIND", f"what a saved picture shows: {_KINDS}"),
    "save": _option("--save", "FILE", "save as its ending says; may be repeated", multiple=True),
    "json": _option("--json as_json", None, "one JSON document on standard output"),
}

PAIRS = ("from", "to", "through", "quantity")
VALUES = ("variant", "let")
FORMS = ("symbolic", "keep")
SIZES = ("nested", "budget")
READ = ("form", "digits", "assume", "within", "band")
OUTPUT = ("save", "json")


def make_command(
    name: str, purpose: str, work: Callable[[Options], int], options: Iterable[str], example: str
) -> Command:
    """A command that reads its options, checks them and does its work."""
    listed = tuple(options)

    def callback(**given: Any) -> int:
        known = {key: value for key, value in given.items() if value is not None}
        _settle_verify(known)
        chosen = Options(**known, arguments=tuple(click.get_current_context().obj or ()))
        _check(chosen)
        if "to" in listed:
            _check_target(chosen)
        return work(chosen)

    return Command(
        name=name,
        help=purpose,
        callback=callback,
        add_help_option=False,
        example=example,
        params=[
            click.Argument(["files"], nargs=-1),
            *(_TABLE[option]() for option in listed),
            help_option(),
        ],
    )


def _settle_verify(given: dict[str, Any]) -> None:
    """Sort out whether what follows --verify is its value, or already the file."""
    text = given.get("verify", A_HANDFUL)
    if text in ("all", A_HANDFUL) or (text.isascii() and text.isdecimal() and int(text) > 0):
        return
    if given["files"]:
        raise refused(
            f"--verify {text} is no number of points",
            "Write --verify, --verify 20 or --verify all.",
        )
    given["files"], given["verify"] = (text,), A_HANDFUL


def _check(options: Options) -> None:
    """Refuse what contradicts itself before any work is done."""
    if len(options.files) != 1:
        count = len(options.files)
        raise refused(
            "no circuit file is named"
            if count == 0
            else f"one circuit file is expected, {count} are given",
            "Name one file, or - for standard input.",
        )
    if options.quantity is not None and options.quantity not in QUANTITIES:
        raise refused(
            f"there is no quantity {options.quantity}", f"It is one of {', '.join(QUANTITIES)}."
        )
    if options.into is not None and any((options.source, options.target, options.through)):
        raise refused(
            "--into stands alone: it drives and observes one pair",
            "Give --into, or --from and --to.",
        )
    if options.into is not None and options.quantity is not None:
        raise refused("--into always asks an impedance", "Leave --quantity out.")
    _check_picture(options)
    if options.cycles is not None and options.drive in (None, "step", "impulse"):
        raise refused("--cycles goes with a sine", "Name its frequency, as --drive 1kHz.")
    if options.at is not None and (options.band or options.points or options.linear):
        raise refused(
            "--at names every frequency, so --band, --points and --linear do not go with it",
            "Give --at alone, or a band.",
        )


def _check_picture(options: Options) -> None:
    if options.picture is None:
        return
    if options.picture not in PICTURE_KINDS:
        raise refused(f"there is no picture {options.picture}", f"The pictures are {_KINDS}.")
    from acsolve.report.save import PICTURES, ending

    if not any(ending(name) in PICTURES for name in options.save):
        raise refused(
            f"--picture {options.picture} says what a saved picture shows, and none is saved",
            f"Add --save {options.picture}.svg, or png or pdf.",
        )


def _check_target(options: Options) -> None:
    if options.target is not None and options.through is not None:
        raise refused("--to and --through both say what is observed", "Give one of them.")
    if options.through is not None and options.quantity in ("voltage-ratio", "transimpedance"):
        raise refused(
            f"--through observes a current, and {options.quantity} is about a voltage",
            "Ask for current-ratio or transadmittance.",
        )
    if options.source is not None and options.target is None and options.through is None:
        raise refused(
            "--from says where the circuit is driven, but nothing says what is observed",
            "Add --to PAIR, or --through AMMETER.",
        )
