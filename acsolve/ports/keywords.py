"""The keywords of Touchstone 2.0."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from acsolve.ports.data import PortData
from acsolve.ports.layout import (
    BEGIN,
    END,
    FINISH,
    FREQUENCIES,
    KEYWORDS,
    MATRIX,
    MIXED,
    MOST_PORTS,
    NETWORK,
    NOISE,
    ORDER,
    PORTS,
    REFERENCE,
    VERSION,
    Shape,
)
from acsolve.ports.touchstone import Line, Manner, Word, assembled, fail, option_line, resistance

_SHAPES: dict[str, Shape] = {"full": "full", "lower": "lower", "upper": "upper"}


@dataclass(frozen=True, slots=True)
class _Section:
    """A keyword, the words behind it on its line, and the lines up to the next keyword."""

    keyword: str
    word: Word
    words: tuple[Word, ...]
    lines: list[Line]


def parse_version_two(lines: list[Line], ports: int | None) -> PortData:
    """The data of a file that begins with [Version].

    Raises
    ------
    TextError
        as `parse_touchstone`.
    """
    sections, options = _sections(lines)
    _refuse_version(sections[VERSION])
    if MIXED in sections:
        fail(
            "touchstone.keyword",
            "mixed-mode parameters are not read",
            "Convert the file to single-ended parameters.",
            sections[MIXED].word,
        )
    manner = option_line(options) if options else Manner()
    count = _whole(_needed(sections, PORTS, lines))
    if count > MOST_PORTS:
        fail(
            "touchstone.ports",
            f"{count} ports are too many",
            f"At most {MOST_PORTS} are read.",
            sections[PORTS].word,
        )
    remarks = (
        () if ports in (None, count) else (f"the ending says {ports} ports, the file {count}",)
    )
    manner = replace(
        manner,
        ports=count,
        normalised=False,
        shape=_choice(sections.get(MATRIX), _SHAPES, "full"),
        by_columns=count == 2 and _order(sections, lines),
    )
    if NOISE in sections:
        remarks = (*remarks, f"noise data at {len(sections[NOISE].lines)} frequencies are not used")
    network = _needed(sections, NETWORK, lines)
    found = assembled(
        network.lines,
        manner,
        _reference(sections.get(REFERENCE), manner),
        remarks,
        noise=False,
        name=network.word.span.source.name,
    )
    stated = _whole(_needed(sections, FREQUENCIES, lines))
    if stated != len(found.hertz):
        fail(
            "touchstone.record",
            f"{stated} frequencies are announced, {len(found.hertz)} follow",
            "Correct [Number of Frequencies], or look for missing lines.",
            sections[FREQUENCIES].word,
        )
    _needed(sections, END, lines)
    return found


def _sections(lines: list[Line]) -> tuple[dict[str, _Section], Line | None]:
    """Keyword -> its section, and the option line."""
    found: dict[str, _Section] = {}
    options: Line | None = None
    here: _Section | None = None
    for line in lines:
        if here is not None and here.keyword == BEGIN and _keyword(line)[0] != FINISH:
            continue  # free text up to its end
        sign = line.text.lstrip()[0]
        if sign == "#":
            if options is not None:
                fail("touchstone.option", "there are two option lines", "Keep one.", line.first)
            options = line
        elif sign == "[":
            name, words = _keyword(line)
            if name not in KEYWORDS:
                known = ", ".join(KEYWORDS.values())
                fail(
                    "touchstone.keyword",
                    f"{line.first.text} begins no keyword of version 2.0",
                    f"They are {known}.",
                    line.first,
                )
            if name in found:
                fail(
                    "touchstone.keyword", f"{KEYWORDS[name]} stands twice", "Keep one.", line.first
                )
            here = found[name] = _Section(name, line.first, words, [])
            if name == END:
                break
        elif here is None:
            fail("touchstone.keyword", "a line stands before [Version]", "Move it.", line.first)
        else:
            here.lines.append(line)
    if VERSION not in found:
        fail("touchstone.keyword", "the file does not begin with [Version]", _BEGIN, lines[0].first)
    return found, options


_BEGIN = "Write [Version] 2.0 in its first line."


def _keyword(line: Line) -> tuple[str, tuple[Word, ...]]:
    """The keyword of a line in lower case, and the words behind it."""
    name: list[str] = []
    for place, word in enumerate(line.words):
        inner, closed, rest = word.text.partition("]")
        name.append(inner.removeprefix("[") if place == 0 else inner)
        if closed:
            words = line.words[place + 1 :]
            return " ".join(name).strip().lower(), (
                (Word(rest, word.span), *words) if rest else words
            )
    return "", ()


def _needed(sections: dict[str, _Section], name: str, lines: list[Line]) -> _Section:
    if name not in sections:
        fail(
            "touchstone.keyword",
            f"the file lacks {KEYWORDS[name]}",
            "Version 2.0 needs it; the file may be cut off.",
            lines[-1].first,
        )
    return sections[name]


def _refuse_version(section: _Section) -> None:
    text = section.words[0].text if section.words else "nothing"
    if text not in ("2.0", "2"):
        fail(
            "touchstone.keyword",
            f"{text} is no version that is read",
            "Files without [Version] (1.1 and before) and of version 2.0 are read.",
            section.words[0] if section.words else section.word,
        )


def _whole(section: _Section) -> int:
    text = section.words[0].text if section.words else ""
    if not (text.isascii() and text.isdecimal() and len(text) < 10 and int(text) > 0):
        fail(
            "touchstone.keyword",
            f"{KEYWORDS[section.keyword]} is not followed by a whole number",
            "Write a number from 1.",
            section.words[0] if section.words else section.word,
        )
    return int(text)


def _choice(section: _Section | None, known: dict[str, Shape], usual: Shape) -> Shape:
    if section is None:
        return usual
    text = section.words[0].text.lower() if section.words else ""
    if text not in known:
        fail(
            "touchstone.keyword",
            f"{KEYWORDS[section.keyword]} is none of {', '.join(known)}",
            "Write one of them.",
            section.words[0] if section.words else section.word,
        )
    return known[text]


def _order(sections: dict[str, _Section], lines: list[Line]) -> bool:
    """Whether the parameter 21 stands before 12."""
    section = _needed(sections, ORDER, lines)
    text = section.words[0].text if section.words else ""
    if text not in ("12_21", "21_12"):
        fail(
            "touchstone.keyword",
            "the order of two-port data is neither 12_21 nor 21_12",
            "Write one of them.",
            section.words[0] if section.words else section.word,
        )
    return text == "21_12"


def _reference(section: _Section | None, manner: Manner) -> np.ndarray:
    """The reference resistance of each port; the list may go on below its keyword."""
    if section is None:
        return np.full(manner.ports, manner.resistance)
    words = [*section.words, *(word for line in section.lines for word in line.words)]
    if len(words) != manner.ports:
        fail(
            "touchstone.keyword",
            f"[Reference] gives {len(words)} resistances for {manner.ports} ports",
            "Give one for each port.",
            section.word,
        )
    return np.array([resistance(word) for word in words])
