"""Text of circuits: read into netlists, written back, and the values of the command line."""

from acsolve.text.files import Reading, parse, read
from acsolve.text.options import (
    parse_band,
    parse_duration,
    parse_frequencies,
    parse_gain,
    parse_level,
    parse_pair,
    parse_value,
)

__all__ = [
    "Reading",
    "parse",
    "parse_band",
    "parse_duration",
    "parse_frequencies",
    "parse_gain",
    "parse_level",
    "parse_pair",
    "parse_value",
    "read",
]
