"""Text of circuits: read into netlists, written back, and the values of the command line."""

from acsolve.text.files import Reading, parse, read
from acsolve.text.options import (
    parse_band,
    parse_duration,
    parse_frequencies,
    parse_gain,
    parse_level,
    parse_pair,
    parse_resistance,
    parse_value,
)
from acsolve.text.write import write

__all__ = [
    "Reading",
    "parse",
    "parse_band",
    "parse_duration",
    "parse_frequencies",
    "parse_gain",
    "parse_level",
    "parse_pair",
    "parse_resistance",
    "parse_value",
    "read",
    "write",
]
