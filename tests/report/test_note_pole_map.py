"""The s plane in a note: there from the second order on, with every root of the table."""

from __future__ import annotations

import pytest

from acsolve.report.note.model import Picture
from tests.report.note_reader import NAMES, note


def sections(name: str):
    """Each chapter with the pictures of its section on poles and zeros, in their order."""
    made = note(name)
    chapters = [item for item in made.facts.chapters if item.poles is not None]
    titled = [item for item in made.document.sections if item.title == "Poles and zeros"]
    assert len(chapters) == len(titled)
    return [
        (chapter, [block for block in section.blocks if isinstance(block, Picture)])
        for chapter, section in zip(chapters, titled, strict=True)
    ]


@pytest.mark.parametrize("name", NAMES)
def test_the_map_stands_where_it_says_something(name):
    """Numbers, order two or more and few enough roots; symbols and first orders have none."""
    for chapter, pictures in sections(name):
        found = chapter.poles
        tables = (found.poles, found.zeros)
        known = not found.form.symbols and None not in tables
        number = sum(len(table.roots) for table in tables) if known else 0
        wanted = known and chapter.transfer.order >= 2 and number <= 60
        assert len(pictures) == int(wanted)
        for picture in pictures:
            assert "crosses" in picture.description
            assert {mark.stroke for mark in picture.ink.marks if hasattr(mark, "stroke")} >= {
                "ink",
                *(["curve1"] if found.poles.roots else []),
                *(["curve2"] if found.zeros.roots else []),
            }
