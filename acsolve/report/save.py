"""Saving answers: the ending picks the form, and a file is replaced only by a whole one."""

from __future__ import annotations

import csv
import io
import os
import stat
import tempfile
from collections.abc import Callable, Iterable, Sequence
from contextlib import suppress
from math import isfinite
from pathlib import Path

from acsolve.errors import AnalysisError, Diagnostic, TextError
from acsolve.report.entry import Entry, Kind, pair_text, unit_sign
from acsolve.report.family_files import setting_heads

PICTURES = ("svg", "png", "pdf")

#: What each kind of answer can be saved as.
ENDINGS: dict[Kind, tuple[str, ...]] = {
    "two-port": ("s2p", "json"),
    "draw": (*PICTURES, "json"),
    "note": ("html", "md", "tex", "pdf", "json"),
    "check": ("json",),
    "equations": ("json",),
    "transfer": ("json", *PICTURES),
    "impedance": ("json", *PICTURES),
    "cutoff": ("csv", "json", *PICTURES),
    "part-value": ("json",),
    "sweep": ("csv", "npz", "json", *PICTURES),
    "step": ("csv", "npz", "json", *PICTURES),
}


def ending(name: str) -> str:
    """The ending of a file's name, in lower case without its dot."""
    return Path(name).suffix.lower().removeprefix(".")


def refuse_unfit(names: Iterable[str], kind: Kind) -> None:
    """Refuse files that could not be saved, before any work is done.

    Raises
    ------
    TextError
        [save.ending] the ending is not one this kind of answer can be saved as;
        [save.failed] there is no such folder, or it cannot be written to.
    """
    problems = [found for name in names if (found := _unfit(name, kind)) is not None]
    if problems:
        raise TextError(problems)


def _unfit(name: str, kind: Kind) -> Diagnostic | None:
    known = ENDINGS[kind]
    found = ending(name)
    if found not in known:
        what = f"the ending .{found}" if found else "no ending"
        return Diagnostic(
            code="save.ending",
            message=f"{name} has {what}, and {_with_article(kind)} is saved as {_listed(known)}",
            hint=f"Name a file such as answer.{known[0]}.",
        )
    return _unwritable(name)


def _unwritable(name: str) -> Diagnostic | None:
    """Why nothing can be written there; None where it can."""
    target = Path(os.path.realpath(name))
    if target.exists() and not target.is_file():
        return _failed(name, "it is not a plain file", "Name another file.")
    if not target.parent.is_dir():
        return _failed(name, f"there is no folder {Path(name).parent}", "Make the folder first.")
    if not os.access(target.parent, os.W_OK):
        return _failed(
            name, f"the folder {Path(name).parent} cannot be written to", "Name another folder."
        )
    return None


_ARTICLES = {
    "impedance": "an impedance",
    "equations": "a set of equations",
    "draw": "a drawing",
}


def _with_article(kind: Kind) -> str:
    return _ARTICLES.get(kind, f"a {kind}")


def _listed(endings: Sequence[str]) -> str:
    if len(endings) == 1:
        return endings[0]
    return f"{', '.join(endings[:-1])} or {endings[-1]}"


def _failed(name: str, why: str, hint: str | None = None) -> Diagnostic:
    return Diagnostic(code="save.failed", message=f"{name} cannot be saved: {why}", hint=hint)


def write_all(contents: Iterable[tuple[str, bytes]]) -> None:
    """Write files so that each name shows the old content or the whole new one.

    All are written beside their targets first and moved into place afterwards.

    Raises
    ------
    AnalysisError
        [save.failed] the disk is full, or the folder went away; no file is left half-written.
    """
    waiting: list[tuple[Path, Path]] = []
    contents = list(contents)
    problems = [found for name, _ in contents if (found := _unwritable(name)) is not None]
    if problems:
        raise AnalysisError(problems)
    try:
        for name, content in contents:
            target = Path(os.path.realpath(name))
            try:
                waiting.append((_written_beside(target, content), target))
            except OSError as error:
                raise AnalysisError(_failed(name, _reason(error))) from error
        for place, target in waiting:
            try:
                place.replace(target)
            except OSError as error:
                raise AnalysisError(_failed(str(target), _reason(error))) from error
    finally:
        for place, _ in waiting:
            with suppress(OSError):
                place.unlink(missing_ok=True)


def _reason(error: OSError) -> str:
    return (error.strerror or str(error)).lower()


def _written_beside(target: Path, content: bytes) -> Path:
    """A new file in the target's folder with the content and the target's permissions."""
    handle, name = tempfile.mkstemp(prefix=f".{target.name}.", dir=target.parent)
    place = Path(name)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(content)
            file.flush()
            os.fsync(file.fileno())
        place.chmod(_permissions(target))
    except BaseException:
        place.unlink(missing_ok=True)
        raise
    return place


def _permissions(target: Path) -> int:
    if target.exists():
        return stat.S_IMODE(target.stat().st_mode)
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask


def csv_content(entries: Sequence[Entry]) -> bytes:
    """A sweep, a response in time, or all cutoffs, as RFC 4180 text in full double precision."""
    maker: dict[str, Callable[[Sequence[Entry]], list[list[str]]]] = {
        "sweep": _sweep_rows,
        "cutoff": _cutoff_rows,
        "step": _step_rows,
    }
    text = io.StringIO()
    csv.writer(text, lineterminator="\r\n").writerows(maker[entries[0].kind](entries))
    return text.getvalue().encode()


def _cell(value: float | None) -> str:
    """A number that reads back as the same double; nothing where it is not finite."""
    return repr(float(value)) if value is not None and isfinite(value) else ""


def _sweep_rows(entries: Sequence[Entry]) -> list[list[str]]:
    head, rows = _one_sweep(entries[0])
    if not entries[0].over:
        return [head, *rows]
    long = [setting_heads(entries[0]) + head]
    for entry in entries:
        settings = [_cell(item.value) for item in entry.over]
        long += [settings + row for row in _one_sweep(entry)[1]]
    return long


def _one_sweep(entry: Entry) -> tuple[list[str], list[list[str]]]:
    found = entry.sweep
    assert found is not None, "a sweep entry holds a sweep"
    unit = unit_sign(entry.ask) if entry.ask else ""
    sized = f" ({unit})" if unit else ""
    decibel = f"dB re 1 {unit}" if unit else "dB"
    head = ["frequency (Hz)", f"real{sized}", f"imag{sized}", f"gain ({decibel})"]
    head += ["phase (deg)", "phase delay (s)", "group delay (s)"]
    columns = (
        found.hertz,
        found.value.real,
        found.value.imag,
        found.gain_db,
        found.phase_deg,
        found.phase_delay_s,
        found.group_delay_s,
    )
    rows = zip(*(column.tolist() for column in columns), strict=True)
    return head, [[_cell(value) for value in row] for row in rows]


def _step_rows(entries: Sequence[Entry]) -> list[list[str]]:
    seconds, value = _in_time(entries[0])
    unit = unit_sign(entries[0].ask) if entries[0].ask else ""
    head = ["time (s)", f"response ({unit})" if unit else "response"]
    return [head, *([_cell(a), _cell(b)] for a, b in zip(seconds, value, strict=True))]


def _in_time(entry: Entry) -> tuple[list[float], list[float]]:
    """Times and values of a response.

    Raises
    ------
    AnalysisError
        [question.no-value] symbols are left, so there is no curve.
    """
    found = entry.step
    assert found is not None, "a step entry holds a response in time"
    if found.seconds is None or found.value is None:
        raise AnalysisError(
            Diagnostic(
                code="question.no-value",
                message=f"{', '.join(found.form.symbols[:6])} have no value, so there is no curve",
                hint="Give values in the file or with --let, or save json.",
            )
        )
    return found.seconds.tolist(), found.value.tolist()


def _cutoff_rows(entries: Sequence[Entry]) -> list[list[str]]:
    rows = [["from", "to", "level (dB)", "frequency (Hz)", "angular frequency (rad/s)"]]
    rows[0] += ["direction", "closed form (rad/s)"]
    for entry in entries:
        found, ask = entry.cutoff, entry.ask
        assert found is not None, "a cutoff entry holds a cutoff answer"
        assert ask is not None, "a cutoff entry holds its question"
        source = pair_text(ask.source) if ask.source else ""
        head = [source, pair_text(ask.target), _cell(found.level_db)]
        rows += [
            [
                *head,
                _cell(item.hertz),
                _cell(item.rad_per_s),
                item.direction or "",
                item.closed_form or "",
            ]
            for item in found.cutoffs
        ]
    return rows


def npz_content(entry: Entry) -> bytes:
    """A sweep as NumPy arrays under the names of the JSON keys, and the complex `value`."""
    import numpy as np

    if entry.kind == "step":
        seconds, value = _in_time(entry)
        store = io.BytesIO()
        np.savez(store, seconds=np.array(seconds), value=np.array(value))
        return store.getvalue()
    found = entry.sweep
    assert found is not None, "a sweep entry holds a sweep"
    store = io.BytesIO()
    np.savez(
        store,
        hertz=found.hertz,
        value=found.value,
        gain_db=found.gain_db,
        phase_deg=found.phase_deg,
        phase_delay_s=found.phase_delay_s,
        group_delay_s=found.group_delay_s,
        status=found.status,
    )
    return store.getvalue()


def touchstone_content(entry: Entry) -> bytes:
    """The s parameters of a two-port as a Touchstone file, in full double precision.

    Raises
    ------
    AnalysisError
        [ports.reference], [ports.no-set].
    """
    from acsolve.ports.write import touchstone_text

    found = entry.two_port
    assert found is not None, "a two-port entry holds a two-port answer"
    assert found.sweep is not None, "the command asked for a sweep"
    heading, ask = entry.heading, entry.ask
    comments = [text for text in (heading.title,) if text]
    if ask is not None and ask.source is not None:
        comments.append(f"port 1 {pair_text(ask.source)}, port 2 {pair_text(ask.target)}")
    return touchstone_text(found.sweep.data("s"), comments=comments).encode()
